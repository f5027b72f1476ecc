//! Boulders with invented figures, for the tests of the outputs: records read from text, results made up.
#![allow(dead_code, reason = "each suite uses the part it needs")]

use std::io::Cursor;
use std::ops::ControlFlow;

use spallcast::assess::{Assessment, HeatSummary, Quantiles, SpallSummary, Status};
use spallcast::flag::Flag;
use spallcast::input::{BoulderFeature, Duplicates, read_boulders_from, refuse_duplicates};
use spallcast::output::fields::BoulderResult;
use spallcast::output::geojson::LayerHead;
use spallcast::rock::Catalogue;

pub const HORIZON_DAYS: f64 = 180.0;

pub fn head() -> LayerHead {
    LayerHead {
        program_version: "0.0.0",
        catalogue_version: "0",
        horizon_days: HORIZON_DAYS,
        valid_until: Some(jiff::civil::date(2031, 7, 9)),
    }
}

/// Reads records from text, as a run would.
pub fn read(text: &str, name: &str) -> Vec<BoulderFeature> {
    let mut features = Vec::new();
    let source = Cursor::new(text.as_bytes().to_vec());
    read_boulders_from(source, name, &Catalogue::embedded(), Duplicates::LeaveToCaller, |f| {
        features.push(f);
        ControlFlow::Continue(())
    })
    .expect("a readable inventory");
    refuse_duplicates(&mut features, name);
    features
}

/// A collection of features.
pub fn collection(features: &[String]) -> String {
    format!(r#"{{"type":"FeatureCollection","features":[{}]}}"#, features.join(","))
}

/// A point feature with further properties, each with a comma before it.
pub fn point(id: &str, more: &str) -> String {
    format!(
        r#"{{"type":"Feature","geometry":{{"type":"Point","coordinates":[-119.5,37.7,2100.25]}},"properties":{{"boulder_id":"{id}","rock":"granite","diameter_m":1.4{more}}}}}"#
    )
}

pub fn one(feature: String) -> BoulderFeature {
    read(&collection(&[feature]), "boulders.geojson").remove(0)
}

/// Figures of which no two are equal, so that a swapped column shows.
pub fn assessed() -> Assessment {
    Assessment {
        status: Status::Assessed,
        reason: "granite in crown fire".to_owned(),
        burn_id: Some("unit-1".to_owned()),
        exposure_used: Some("crown".to_owned()),
        exposure_inferred: Some(false),
        heat: Some(HeatSummary {
            peak_surface_k: Quantiles { p05: 573.15, p50: 673.15, p95: 773.15 },
            absorbed_j_m2_p50: 4.2e6,
            heated_depth_m: 0.0131,
            peak_skin_stress_pa_p50: 151e6,
        }),
        spall: Some(SpallSummary {
            p_spall: 0.75,
            p_flake: 0.625,
            p_slab: 0.25,
            p_split: 0.125,
            p_rind: None,
            thickness_m: Some(0.0072),
            thickness_quantiles_m: Some(Quantiles { p05: 0.0011, p50: 0.0052, p95: 0.0263 }),
            flake_thickness_m: Some(0.0024),
            slab_thickness_m: Some(0.0308),
            loss_m: 0.0035,
            p_spall_se: 0.0061,
            thickness_se_m: Some(0.00017),
        }),
        flags: [Flag::MoistureAssumed, Flag::WeatheringAssumed].into(),
    }
}

pub fn result(feature: BoulderFeature) -> BoulderResult {
    match feature.boulder {
        Ok(_) => BoulderResult::new(feature, assessed(), HORIZON_DAYS),
        Err(_) => BoulderResult::refused(feature, HORIZON_DAYS),
    }
}

/// An assessed boulder with this likelihood of spalling and this loss.
pub fn with(id: &str, p_spall: f64, loss_m: f64) -> BoulderResult {
    let mut result = result(one(point(id, "")));
    let spall = result.assessment.spall.as_mut().expect("assessed");
    (spall.p_spall, spall.loss_m) = (p_spall, loss_m);
    result.within = vec![0];
    result
}

/// A boulder that was not assessed, `within` the burns given.
pub fn without(id: &str, within: &[usize]) -> BoulderResult {
    let mut result = BoulderResult::new(one(point(id, "")), Assessment::not_assessed("no fire"), HORIZON_DAYS);
    result.within = within.to_vec();
    result
}

pub fn bytes(write: impl FnOnce(&mut Vec<u8>) -> std::io::Result<()>) -> Vec<u8> {
    let mut out = Vec::new();
    write(&mut out).expect("memory takes everything");
    out
}

pub fn text(write: impl FnOnce(&mut Vec<u8>) -> std::io::Result<()>) -> String {
    String::from_utf8(bytes(write)).expect("layers are UTF-8")
}

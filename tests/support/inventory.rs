//! Boulders as a field party records them, for suites that run ensembles.
#![allow(dead_code, reason = "each suite uses the part it needs")]

use spallcast::assess::{Assessment, Model};
use spallcast::fire::exposure::ExposureClass;
use spallcast::rock::catalogue::Catalogue;
use spallcast::settings::Settings;
use spallcast::site::{Boulder, HeatingRecord, Kind, Position, RockChoice, StandingRecord, Weathering};

pub fn model(draws: usize, seed: u64) -> Model {
    Model::new(Settings { draws, seed, ..Settings::default() }, Catalogue::embedded()).unwrap()
}

pub fn boulder(rock: &str, radius_m: f64, class: ExposureClass) -> Boulder {
    Boulder {
        id: "b".to_owned(),
        position: Position { lon_deg: 0.0, lat_deg: 0.0, height_m: None },
        rock: RockChoice::Named(rock.to_owned()),
        kind: Kind::Boulder,
        radius_m: Some(radius_m),
        axes_m: None,
        heating: HeatingRecord {
            exposure: Some(class),
            weathering: Some(Weathering::Fresh),
            ..HeatingRecord::default()
        },
        standing: StandingRecord::default(),
    }
}

pub fn assess(model: &Model, boulder: &Boulder) -> Assessment {
    model.assess(boulder, &[])
}

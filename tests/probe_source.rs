//! A boulder of an inventory, probed: the same source as `assess` gives it, factors and energies checkable by hand, and
//! the inputs that would change the answer in the order that the case was built for.

#[path = "support/program.rs"]
mod program;

use std::path::PathBuf;

use program::{by_id, ends_with, layer, rows, run, text};
use serde_json::{Value, json};
use spallcast::assess::Model;
use spallcast::assess::sensitivity::{Answer, Sensitivity};
use spallcast::assess::standing::statics;
use spallcast::rock::catalogue::Catalogue;
use spallcast::rockfall::place::place;
use spallcast::rockfall::release::StaticsInputs;
use spallcast::settings::Settings;
use spallcast::site::{Boulder, Contact, HeatingRecord, Kind, Position, RockChoice, StandingRecord, Support};
use tempfile::TempDir;

/// Layers hold six significant digits.
const LAYER_DIGITS: f64 = 1e-5;
/// Standard gravity, m/s2 (CGPM 1901; recalled).
const GRAVITY: f64 = 9.80665;
const LON: f64 = -119.5;
const LAT: f64 = 37.7;

struct Site {
    folder: TempDir,
}

impl Site {
    fn new(boulders: &[Value]) -> Site {
        let site = Site { folder: TempDir::new().expect("a folder") };
        let d = 0.02;
        let ring = json!([[
            [LON - d, LAT - d],
            [LON + d, LAT - d],
            [LON + d, LAT + d],
            [LON - d, LAT + d],
            [LON - d, LAT - d]
        ]]);
        let burn = json!({"type": "Feature", "geometry": {"type": "Polygon", "coordinates": ring},
            "properties": {"burn_id": "b", "exposure": "crown", "residence_min": 3, "ground_after": "bare"}});
        let line = json!([[LON - 0.001, LAT - 0.001, 2020.0], [LON + 0.001, LAT - 0.001, 2020.0]]);
        let trail = json!({"type": "Feature", "geometry": {"type": "LineString", "coordinates": line},
            "properties": {"trail_id": "T", "name": "Invented trail"}});
        site.put("burn.geojson", &[burn]);
        site.put("trails.geojson", &[trail]);
        site.put("boulders.geojson", boulders);
        site
    }

    fn put(&self, name: &str, features: &[Value]) {
        let collection = json!({"type": "FeatureCollection", "features": features});
        std::fs::write(self.path(name), collection.to_string()).expect("written");
    }

    fn path(&self, name: &str) -> PathBuf {
        self.folder.path().join(name)
    }

    fn assess(&self) -> (std::collections::BTreeMap<String, Value>, Value) {
        let (burn, boulders, trails) =
            (self.path("burn.geojson"), self.path("boulders.geojson"), self.path("trails.geojson"));
        let out = self.path("o");
        let output = run(&[
            "assess",
            "--burn",
            text(&burn),
            "--boulders",
            text(&boulders),
            "--trails",
            text(&trails),
            "--out",
            text(&out),
            "--quiet",
        ]);
        ends_with(&output, 0);
        (by_id(rows(&layer(&out.join("boulders.geojson")))), layer(&out.join("trails.geojson")))
    }

    fn probe(&self, id: &str, more: &[&str]) -> std::process::Output {
        let (burn, boulders, trails) =
            (self.path("burn.geojson"), self.path("boulders.geojson"), self.path("trails.geojson"));
        let mut arguments =
            vec!["probe", "--burn", text(&burn), "--boulders", text(&boulders), "--trails", text(&trails), "--id", id];
        arguments.extend(more);
        run(&arguments)
    }

    fn probe_json(&self, id: &str) -> Value {
        let output = self.probe(id, &["--json"]);
        ends_with(&output, 0);
        serde_json::from_slice(&output.stdout).expect("JSON")
    }
}

fn boulder(id: &str, standing: &Value) -> Value {
    let mut properties = json!({"boulder_id": id, "rock": "granite", "diameter_m": 1.4, "elevation_m": 2110});
    for (name, value) in standing.as_object().expect("a table") {
        properties[name] = value.clone();
    }
    json!({"type": "Feature", "geometry": {"type": "Point", "coordinates": [LON, LAT]}, "properties": properties})
}

fn measured() -> Value {
    json!({"slope_deg": 31, "downslope_azimuth_deg": 180, "contact": "burnt_duff", "seat_depth_m": 0.12,
        "centroid_setback_m": 0.5, "centroid_height_m": 0.5, "support": "charred"})
}

fn close(a: &Value, b: &Value, what: &str) {
    match (a.as_f64(), b.as_f64()) {
        (Some(x), Some(y)) => assert!((x - y).abs() <= LAYER_DIGITS * x.abs().max(y.abs()), "{what}: {x} and {y}"),
        _ => assert_eq!(a, b, "{what}"),
    }
}

#[test]
fn a_probe_gives_a_boulder_the_numbers_that_assess_gives_it() {
    let standings = [
        ("measured", measured()),
        ("partial", json!({"slope_deg": 33, "downslope_azimuth_deg": 175})),
        (
            "contradictory",
            json!({"slope_deg": 58, "contact": "fine_soil", "support": "none", "seat_depth_m": 0,
            "centroid_setback_m": 0.1, "centroid_height_m": 0.6}),
        ),
    ];
    let features: Vec<Value> = standings.iter().map(|(id, s)| boulder(id, s)).collect();
    let site = Site::new(&features);
    let (rows, _) = site.assess();
    for (id, _) in &standings {
        let probed = site.probe_json(id);
        let (source, row) = (&probed["source"], &rows[*id]);
        for name in ["p_source", "p_source_low", "p_source_high", "p_release", "p_fragment", "fragment_m3_p50"] {
            close(&source[name], &row[name], &format!("{id}: {name}"));
        }
        assert_eq!(source["source_mode"], row["source_mode"], "{id}");
        assert_eq!(source["basis"], row["source_basis"], "{id}");
        assert_eq!(source["horizon_days"].as_f64(), row["horizon_days"].as_f64(), "{id}");
        close(&probed["ensemble"]["p_spall"], &row["p_spall"], id);
        assert!(row["reason"].as_str().expect("text").contains(source["why"].as_str().expect("a sentence")), "{id}");
    }
    assert_eq!(site.probe_json("contradictory")["source"]["outcome"], "check_measurements");
    assert!(site.probe_json("contradictory")["sensitivity"].is_null(), "the measurements are the answer");
    let shares = site.probe_json("measured")["source"]["mode_share"].clone();
    let sum: f64 = shares.as_object().expect("by mode").values().map(|v| v.as_f64().expect("a share")).sum();
    assert!((sum - 1.0).abs() < 1e-9, "{shares}");
}

#[test]
fn the_reach_of_a_probe_is_that_of_the_trail_layer_and_its_energies_follow_by_hand() {
    let site = Site::new(&[boulder("one", &measured())]);
    let (boulders, trails) = site.assess();
    let probed = site.probe_json("one");
    let reach = probed["reach"].as_array().expect("trails were given");
    assert!(!reach.is_empty());
    let p_source = boulders["one"]["p_source"].as_f64().expect("measured");
    let mut compared = 0;
    for stretch in reach {
        let number = |name: &str| stretch[name].as_f64().unwrap_or_else(|| panic!("{name}: {stretch}"));
        let row = rows(&trails).into_iter().find(|r| r["segment"] == stretch["segment"]).expect("in the layer").clone();
        // One boulder: the chance that anything arrives is its likelihood times its P_seg.
        close(&row["p_any"], &json!(p_source * number("p_segment")), "p_any");
        let Some(angle) = stretch["angle_deg"].as_f64() else { continue };
        let (drop, distance) = (number("drop_m"), number("distance_m"));
        assert!((angle - drop.atan2(distance).to_degrees()).abs() < 1e-9, "straight rays without terrain");
        assert_eq!(stretch["terrain_checked"], false);
        // Bare ground: the mean angle is atan(tan 34 / 1.17), 29.964 deg.
        let mean = stretch["at_mean_angle"]["angle_deg"].as_f64().expect("an angle");
        assert!((mean - 29.964).abs() < 5e-4, "{mean}");
        for line in [&stretch["at_mean_angle"], &stretch["at_shadow_angle"]] {
            let head = drop - distance * line["angle_deg"].as_f64().expect("an angle").to_radians().tan();
            match line["speed_m_s"].as_f64() {
                Some(speed) => {
                    assert!((speed - (2.0 * GRAVITY * head).sqrt()).abs() < 1e-6, "{speed}");
                    // Granite sphere of 1.4 m: its mass is energy over g and head, near 1.437 m3 x 2650 kg/m3.
                    let mass = 1e3 * line["energy_kj"].as_f64().expect("an energy") / (GRAVITY * head);
                    assert!((mass / (1.437 * 2650.0) - 1.0).abs() < 0.03, "{mass}");
                    compared += 1;
                }
                None => assert!(head <= 0.0, "a line above the ground has a speed"),
            }
        }
    }
    assert!(compared >= 2, "some energy line was above the ground");
}

#[test]
fn a_probe_reads_as_text_and_leaves_described_rocks_as_they_were() {
    let site = Site::new(&[boulder("one", &measured())]);
    let output = site.probe("one", &[]);
    ends_with(&output, 0);
    let said = String::from_utf8(output.stdout).expect("UTF-8");
    for part in
        ["as a rockfall source", "factors of safety", "stretches of trail in reach", "what would change the answer"]
    {
        assert!(said.contains(part), "{part:?} is not in:\n{said}");
    }
    assert!(said.contains("ridges and valleys between were not checked"));
    assert!(!said.to_lowercase().contains(" safe "), "{said}");
    let described = run(&["probe", "--rock", "granite", "--diameter-m", "1", "--exposure", "grass", "--json"]);
    let described: Value = serde_json::from_slice(&described.stdout).expect("JSON");
    for name in ["source", "reach", "sensitivity", "ensemble"] {
        assert!(described[name].is_null(), "{name} was not computed");
    }
}

#[test]
fn three_inputs_are_told_the_largest_first_with_both_ends() {
    let probed = Site::new(&[boulder("one", &measured())]).probe_json("one");
    let told = probed["sensitivity"].as_array().expect("computed");
    assert_eq!(told.len(), 3);
    let effects: Vec<f64> = told.iter().map(|i| i["effect"].as_f64().expect("a number")).collect();
    assert!(effects.windows(2).all(|w| w[0] >= w[1]) && effects[2] > 0.0, "{effects:?}");
    for influence in told {
        let held = influence["held"].as_array().expect("two ends");
        assert_eq!(held.iter().map(|h| h["percentile"].as_u64().expect("whole")).collect::<Vec<_>>(), [10, 90]);
        close(&influence["answer"], &probed["source"]["p_source"], "the answer with nothing held");
        if let (Some(a), Some(b)) = (held[0]["answer"].as_f64(), held[1]["answer"].as_f64()) {
            assert!((influence["effect"].as_f64().expect("a number") - (b - a).abs()).abs() < 1e-12);
        }
    }
}

/// A boulder that no fire harms, for cases in which only the statics speak.
fn cool(standing: StandingRecord) -> Boulder {
    Boulder {
        id: "case".to_owned(),
        position: Position { lon_deg: LON, lat_deg: LAT, height_m: None },
        rock: RockChoice::Named("basalt".to_owned()),
        kind: Kind::Boulder,
        radius_m: Some(0.75),
        axes_m: None,
        heating: HeatingRecord { residence_s: Some(6.0), ..HeatingRecord::default() },
        standing,
    }
}

fn sensitivity(boulder: &Boulder) -> Sensitivity {
    let settings = Settings { draws: 64, ..Settings::default() };
    let placed = place(boulder, None, &settings.rockfall);
    let model = Model::new(settings, Catalogue::embedded()).expect("the default mixture is in the catalogue");
    model.sensitivity(boulder, &placed, &[]).expect("assessed")
}

fn standing(slope_deg: f64, contact: Contact, seat_m: f64, setback_m: f64, support: Support) -> StandingRecord {
    StandingRecord {
        slope_deg: Some(slope_deg),
        contact: Some(contact),
        seat_depth_m: Some(seat_m),
        centroid_setback_m: Some(setback_m),
        centroid_height_m: Some(0.6),
        support: Some(support),
        ..StandingRecord::default()
    }
}

#[test]
fn what_only_a_support_holds_hangs_on_the_support() {
    // 45 degrees, a setback of a tenth of what is needed: it goes in every draw in which the charred support goes, .5.
    let result = sensitivity(&cool(standing(45.0, Contact::FineSoil, 0.0, 0.06, Support::Charred)));
    assert_eq!(result.answer, Answer::Source);
    assert!((result.value - 0.5).abs() < 0.01, "{}", result.value);
    let first = &result.influences[0];
    assert_eq!(first.input, "whether the support goes");
    assert_eq!(first.answer, [Some(1.0), Some(0.0)], "gone at the 10th percentile, there at the 90th");
    assert!(result.influences[1].effect < 0.05, "nothing else matters: {:?}", result.influences[1]);
    assert!(!result.influences.iter().any(|i| i.input.contains("not recorded")), "all is recorded");
}

#[test]
fn what_slides_on_its_friction_hangs_on_slope_friction_and_water() {
    // No seat, wide base: sliding alone. FS = tan 35/tan 31, so friction, slope and uplift are what decides.
    let result = sensitivity(&cool(standing(31.0, Contact::CoarseSoil, 0.0, 3.0, Support::None)));
    let told: Vec<&str> = result.told().map(|i| i.input).collect();
    let deciding = ["contact friction", "slope", "uplift in a wet spell", "whether a wet spell comes"];
    assert_eq!(told.len(), 3);
    assert!(told.iter().all(|t| deciding.contains(t)), "{told:?}");
    let of = |name: &str| result.influences.iter().find(|i| i.input == name).expect("tried");
    let slope = of("slope");
    assert!(slope.answer[1] > slope.answer[0], "a steeper slope lets more draws go: {slope:?}");
    let held = slope.held.expect("a figure");
    // 31 -+ 1.28155 x 2 deg (normal quantile at .9, recalled).
    assert!((held[0] - 28.4369).abs() < 1e-3 && (held[1] - 33.5631).abs() < 1e-3, "{held:?}");
    assert!(of("contact friction").answer[0] > of("contact friction").answer[1]);
    assert_eq!(of("residence time of the fire").effect, 0.0, "six seconds of fire do nothing to basalt");
    assert!(!result.influences.iter().any(|i| i.input == "seat depth"), "a recorded zero is not varied");
}

#[test]
fn factors_of_safety_follow_by_hand() {
    let settings = Settings::default().rockfall;
    let on_soil = cool(standing(30.0, Contact::CoarseSoil, 0.0, 0.6, Support::None));
    let s = statics(&StaticsInputs::of(&on_soil, None), 0.05, &settings).expect("complete");
    let tan = 30f64.to_radians().tan();
    // tan 35/tan 30 is 1.21280; the triangle 30/35/40 has its median at 35.
    assert!((s.today.slide.expect("no seat") - 1.21280).abs() < 5e-6);
    assert!((s.today.overturn.expect("always") - 0.6 / (0.6 * tan)).abs() < 1e-12);
    assert!((s.today.undercut_left_m.expect("always") - (0.6 - 0.6 * tan)).abs() < 1e-12);
    assert_eq!(s.today.roll, None, "no seat to roll out of");
    assert!((s.after.undercut_left_m.expect("always") - (0.55 - 0.6 * tan)).abs() < 1e-12, "5 cm of base gone");
    assert!(s.after.slide < s.today.slide, "the wet spell lifts it");
    let seated = cool(standing(30.0, Contact::BurntDuff, 0.15, 0.6, Support::None));
    let s = statics(&StaticsInputs::of(&seated, None), 0.0, &settings).expect("complete");
    // cos a = (r - t)/r = .8, tan a = .75; half the seat gone: cos a = .9, tan a = .48432.
    assert!((s.today.roll.expect("a seat") - 0.75 / tan).abs() < 1e-12);
    assert!((s.after.roll.expect("a seat") - 0.484322 / tan).abs() < 1e-5);
    assert_eq!(s.today.slide, None, "a seat holds it from sliding");
    let bare = cool(StandingRecord::default());
    assert!(statics(&StaticsInputs::of(&bare, None), 0.0, &settings).is_none(), "no slope, no factors");
}

//! Holds the demo's inputs to what the demo promises to show. Counts are of the committed files in `fixtures/demo/`.

use std::collections::BTreeSet;

use serde_json::Value;

const BURNS: &str = include_str!("../fixtures/demo/burns.geojson");
const BOULDERS: &str = include_str!("../fixtures/demo/boulders.geojson");
const TRAILS: &str = include_str!("../fixtures/demo/trails.geojson");
const TERRAIN: &[u8] = include_bytes!("../fixtures/demo/terrain.tif");
/// The files are embedded in the program; larger ones would burden every download. Bytes.
const EMBEDDED_MAX: usize = 1_500_000;

fn features(text: &str) -> Vec<Value> {
    let layer: Value =
        serde_json::from_str(text).expect("the whole file is valid JSON, whatever is wrong in its records");
    assert_eq!(layer["type"], "FeatureCollection");
    layer["features"].as_array().expect("features").clone()
}

/// Distinct texts of a property over the features.
fn words(features: &[Value], property: &str) -> BTreeSet<String> {
    features.iter().filter_map(|f| f["properties"][property].as_str()).map(str::to_owned).collect()
}

fn id(feature: &Value) -> &str {
    feature["properties"]["boulder_id"].as_str().expect("every record has an id")
}

#[test]
fn burns_cover_every_class_and_every_way_to_describe_a_fire() {
    let burns = features(BURNS);
    assert_eq!(burns.len(), 10);
    assert_eq!(words(&burns, "exposure").len(), 8, "all exposure classes");
    assert_eq!(words(&burns, "ground_after").len(), 3);
    assert!(words(&burns, "burned_on").len() >= 2, "fires on different days");
    let has = |name: &str| burns.iter().filter(|b| !b["properties"][name].is_null()).count();
    for name in ["residence_gsd", "fireline_intensity_kw_m", "flame_length_m", "spread_rate_m_min", "fuel_load_kg_m2"] {
        assert!(has(name) >= 1, "{name} occurs");
    }
    assert!(has("exposure") < burns.len(), "one unit without a class");
    assert!(has("burned_on") < burns.len(), "one unit without a day");
    let holed = burns.iter().filter(|b| b["geometry"]["type"] == "MultiPolygon").any(|b| {
        b["geometry"]["coordinates"]
            .as_array()
            .expect("polygons")
            .iter()
            .any(|p| p.as_array().expect("rings").len() > 1)
    });
    assert!(holed, "one multipolygon has a hole");
}

#[test]
fn boulders_are_many_varied_and_incomplete() {
    let boulders = features(BOULDERS);
    assert_eq!(boulders.len(), 482);
    assert!(words(&boulders, "rock").len() >= 18, "names and aliases");
    assert_eq!(words(&boulders, "support").len(), 5);
    assert_eq!(words(&boulders, "weathering").len(), 4);
    assert_eq!(words(&boulders, "moisture").len(), 3);
    assert_eq!(words(&boulders, "kind").len(), 2);
    let share = |name: &str| {
        let count = boulders.iter().filter(|b| !b["properties"][name].is_null()).count();
        count as f64 / boulders.len() as f64
    };
    assert!(share("diameter_m") + share("axis_a_m") > 0.95, "nearly all have a size");
    assert!(share("centroid_setback_m") > 0.2 && share("centroid_setback_m") < 0.5, "few have a full standing");
    for name in ["rind_mm", "log_diameter_m", "standoff_m", "heated_fraction", "diffusivity_mm2_s", "base_scar_mm"] {
        assert!(share(name) > 0.0 && share(name) < 0.3, "{name} is noted now and then: {}", share(name));
    }
}

#[test]
fn wrong_records_have_the_faults_that_the_page_lists() {
    let boulders = features(BOULDERS);
    let page = include_str!("../fixtures/demo/README.md");
    let wrong: Vec<&Value> = boulders
        .iter()
        .filter(|b| id(b).starts_with("X-") || b["properties"]["team_note"] == "deliberately wrong")
        .collect();
    assert_eq!(wrong.len(), 16);
    for record in &wrong {
        assert!(page.contains(&format!("`{}`", id(record))), "{} is not explained", id(record));
    }
    let ids: Vec<&str> = boulders.iter().map(id).collect();
    let distinct: BTreeSet<&str> = ids.iter().copied().collect();
    assert_eq!(ids.len() - distinct.len(), 1, "one id is used twice");
    let record = |name: &str| boulders.iter().find(|b| id(b) == name).expect("present")["properties"].clone();
    assert_eq!(record("X-01")["diameter_m"], -1.2);
    assert_eq!(record("X-06")["diffusivity_mm2_s"], -2.1);
    assert_eq!(record("X-07")["diameter_m"], "1.2");
    assert_eq!(record("X-12")["heated_fraction"], 1.4);
    assert!(boulders.iter().any(|b| b["geometry"].is_null()), "one record has no geometry");
}

#[test]
fn trails_have_heights_and_one_has_several_parts() {
    let trails = features(TRAILS);
    assert_eq!(trails.len(), 4);
    let kinds: BTreeSet<&str> = trails.iter().map(|t| t["geometry"]["type"].as_str().expect("type")).collect();
    assert_eq!(kinds, BTreeSet::from(["LineString", "MultiLineString"]));
    for trail in &trails {
        let mut position = &trail["geometry"]["coordinates"];
        while position[0].is_array() {
            position = &position[0];
        }
        let height = position[2].as_f64().expect("a third number");
        assert!((1600.0..2700.0).contains(&height), "a height of the demo's ground, m: {height}");
    }
}

#[test]
fn files_are_small_enough_to_embed() {
    let total = BURNS.len() + BOULDERS.len() + TRAILS.len() + TERRAIN.len();
    assert!(total < EMBEDDED_MAX, "{total} bytes");
    assert_eq!(&TERRAIN[..4], b"II*\0", "a little-endian TIFF");
}

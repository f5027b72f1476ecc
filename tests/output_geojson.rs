//! The layers: what came in goes out unchanged, results follow, and every reader can read it.

#[path = "support/results.rs"]
mod results;

use results::{bytes, collection, head, one, point, read, result, text};
use spallcast::assess::Assessment;
use spallcast::input::Properties;
use spallcast::output::burns::{BURN_FIELDS, BurnResult, summarise_burns};
use spallcast::output::cautions::CAUTIONS;
use spallcast::output::fields::{BOULDER_FIELDS, BoulderResult};
use spallcast::output::geojson::{write_boulder_line, write_boulders, write_burns};
use spallcast::site::Burn;

fn layer(results: &[BoulderResult]) -> String {
    text(|out| write_boulders(out, &head(), results))
}

fn line(result: &BoulderResult) -> String {
    text(|out| write_boulder_line(out, result))
}

/// Names of the properties of the first feature, in the order in which they stand in the text.
fn names(json: &str) -> Vec<String> {
    let start = json.find(r#""properties":"#).expect("a feature has properties") + r#""properties":"#.len();
    let mut stream = serde_json::Deserializer::from_str(&json[start..]).into_iter::<&serde_json::value::RawValue>();
    let object = stream.next().expect("an object").expect("valid JSON").get().to_owned();
    // Order of names: each is looked up by where its key stands.
    let map: serde_json::Map<String, serde_json::Value> = serde_json::from_str(&object).expect("an object");
    let mut placed: Vec<(usize, String)> = (map.keys())
        .map(|k| (object.find(&format!("{}:", serde_json::to_string(k).expect("text"))).expect("a key"), k.clone()))
        .collect();
    placed.sort();
    placed.into_iter().map(|(_, name)| name).collect()
}

#[test]
fn properties_go_through_byte_for_byte_and_in_order() {
    let odd = [
        r#""price":1.10"#,
        r#""big":123456789012345678901234567890"#,
        r#""exponent":1E+02"#,
        r#""beyond":1e400"#,
        r#""minus_zero":-0.0"#,
        r#""escaped":"caf\u00e9 \/ \ud83d\ude00""#,
        r#""nested":{ "b" : [1 , 2.50], "a":null }"#,
        r#""nothing":null"#,
        r#""Zeta":true"#,
        r#""alpha":"""#,
    ];
    let feature = one(point("A", &format!(",{}", odd.join(","))));
    let written = layer(&[result(feature)]);
    let expected = format!(r#""boulder_id":"A","rock":"granite","diameter_m":1.4,{},"status":"#, odd.join(","));
    assert!(written.contains(&expected), "{written}");
}

#[test]
fn result_fields_follow_in_the_order_of_the_registry() {
    let written = line(&result(one(point("A", r#","team_note":"kept""#))));
    let mut expected = vec!["boulder_id", "rock", "diameter_m", "team_note"];
    expected.extend(BOULDER_FIELDS.iter().map(|f| f.name));
    assert_eq!(names(&written), expected);
}

#[test]
fn on_a_clash_the_result_keeps_its_name_and_the_input_value_is_kept_beside() {
    let feature = one(point("A", r#","p_spall":9,"input_p_spall":8,"input_input_p_spall":"x","status":"open""#));
    let written = line(&result(feature));
    let json: serde_json::Value = serde_json::from_str(&written).expect("valid JSON");
    let properties = &json["properties"];
    assert_eq!(properties["p_spall"], 0.75, "ours");
    assert_eq!(properties["input_p_spall"], 8, "the input's own property of that name is not touched");
    assert_eq!(properties["input_input_p_spall"], "x");
    assert_eq!(properties["input_input_input_p_spall"], 9);
    assert_eq!(properties["status"], "assessed");
    assert_eq!(properties["input_status"], "open");
    assert_eq!(written.matches(r#""p_spall":"#).count(), 1, "no name occurs twice");
}

#[test]
fn an_earlier_result_can_be_assessed_again() {
    let once = layer(&[result(one(point("A", "")))]);
    let again = layer(&[result(read(&once, "boulders.geojson").remove(0))]);
    let count = |json: &str| names(json).len();
    assert_eq!(count(&again), count(&once) + BOULDER_FIELDS.len());
    assert!(again.contains(r#""input_p_spall":0.75"#));
}

#[test]
fn ids_and_geometries_go_through() {
    let cases = [
        (r#""id":17,"#, r#"{"type":"Point","coordinates":[-119.123456789012,37.7]}"#, r#""id":17,"#),
        (r#""id":"a\"b","#, r#"{"type":"Point","coordinates":[-119.5,37.7,2100.25]}"#, r#""id":"a\"b","#),
        (r#""id":null,"#, r#"{"type":"Point","coordinates":[179.9999999,-89.5,0.1]}"#, ""),
        (
            "",
            r#"{"type":"Polygon","coordinates":[[[0.0,0.0,5.5],[0.0001,0.0,5.5],[0.0001,0.0001,6.0],[0.0,0.0,5.5]]]}"#,
            "",
        ),
    ];
    for (id, geometry, id_out) in cases {
        let input = format!(
            r#"{{"type":"Feature",{id}"geometry":{geometry},"properties":{{"boulder_id":"A","rock":"granite","diameter_m":1.4}}}}"#
        );
        let written = line(&result(one(input)));
        let start = format!(r#"{{"type":"Feature",{id_out}"geometry":{geometry},"properties":"#);
        assert!(written.starts_with(&start), "{written}\nshould start with\n{start}");
    }
}

#[test]
fn a_record_without_a_usable_place_has_a_null_geometry() {
    let wrong = [
        r#""geometry":null"#,
        r#""geometry":{"type":"Point","coordinates":[500000,4100000]}"#,
        r#""geometry":{"type":"Point","coordinates":[1]}"#,
    ];
    for geometry in wrong {
        let feature =
            one(format!(r#"{{"type":"Feature",{geometry},"properties":{{"boulder_id":"A","rock":"granite"}}}}"#));
        assert!(feature.boulder.is_err());
        let json: serde_json::Value = serde_json::from_str(&line(&result(feature))).expect("valid JSON");
        assert!(json["geometry"].is_null(), "{geometry}");
        assert_eq!(json["properties"]["status"], "not_assessed");
        assert!(json["properties"]["reason"].as_str().is_some_and(|r| r.len() > 10), "{json}");
        assert!(json["properties"]["p_spall"].is_null());
        assert_eq!(json["properties"]["boulder_id"], "A");
    }
}

#[test]
fn a_table_becomes_points() {
    let table =
        "boulder_id,rock,diameter_m,longitude,latitude,elevation_m,note\nA,granite,1.50,-119.5,37.7,2100,\"x,y\"\n";
    let written = line(&result(read(table, "b.csv").remove(0)));
    let json: serde_json::Value = serde_json::from_str(&written).expect("valid JSON");
    assert_eq!(json["geometry"]["type"], "Point");
    assert_eq!(json["geometry"]["coordinates"], serde_json::json!([-119.5, 37.7, 2100.0]));
    assert!(written.contains(r#""diameter_m":1.50"#), "a number keeps its digits: {written}");
    assert_eq!(json["properties"]["note"], "x,y");
}

#[test]
fn a_layer_carries_its_name_maker_validity_and_cautions_and_the_geojson_crate_reads_it() {
    let features =
        read(&collection(&[point("A", ""), point("B", r#","diameter_m_note":"?""#), point("A", "")]), "b.geojson");
    let results: Vec<_> = features.into_iter().map(result).collect();
    let written = layer(&results);
    let parsed: geojson::FeatureCollection = written.parse().expect("the geojson crate reads the layer");
    assert_eq!(parsed.features.len(), 3);
    let members = parsed.foreign_members.expect("foreign members");
    let mut keys: Vec<&str> = members.keys().map(String::as_str).collect();
    keys.sort_unstable();
    let expected =
        ["catalogue_version", "cautions", "horizon_days", "name", "program", "program_version", "valid_until"];
    assert_eq!(keys, expected);
    assert_eq!(members["name"], "boulders");
    assert_eq!(members["valid_until"], "2031-07-09");
    assert_eq!(members["cautions"].as_array().map(Vec::len), Some(CAUTIONS.len()));
    let p_spall = |i: usize| parsed.features[i].property("p_spall").expect("a field").clone();
    assert!(p_spall(0).is_null() && p_spall(2).is_null(), "twice the same name: both refused");
    assert_eq!(p_spall(1), 0.75);
    assert_eq!(written.lines().count(), 3 + 2, "head, one feature a line, end");
    assert!(written.ends_with("\n]}\n"));
}

#[test]
fn an_empty_inventory_is_a_valid_layer() {
    let parsed: geojson::FeatureCollection = layer(&[]).parse().expect("valid");
    assert!(parsed.features.is_empty());
}

#[test]
fn the_same_results_give_the_same_bytes() {
    let make = || -> Vec<_> {
        let more = r#","b":{"y":1,"x":2},"a":[3]"#;
        read(&collection(&[point("A", more), point("B", "")]), "b.geojson").into_iter().map(result).collect()
    };
    let write = |r: &[BoulderResult]| bytes(|out| write_boulders(out, &head(), r));
    assert_eq!(write(&make()), write(&make()));
    let mut other = make();
    other[0].assessment.spall.as_mut().expect("assessed").loss_m *= 1.001;
    assert_ne!(write(&make()), write(&other), "a changed figure shows");
}

#[test]
fn a_line_is_a_record_even_when_the_input_was_indented() {
    let more = ",\n \"nested\": {\n  \"text\": \"two\\nlines\",\r\n  \"n\": [1,\n 2]\n }";
    let r = result(one(point("A", more)));
    let written = line(&r);
    assert_eq!(written.matches('\n').count(), 1);
    assert!(written.ends_with('\n') && !written.contains('\r'));
    let json: serde_json::Value = serde_json::from_str(&written).expect("valid JSON");
    assert_eq!(json["properties"]["nested"]["text"], "two\nlines");
    assert_eq!(json["properties"]["nested"]["n"], serde_json::json!([1, 2]));
    assert!(json["properties"]["inspection_rank"].is_null(), "a stream has no ranks");
    assert!(layer(&[r]).contains("{\n  \"text\": \"two\\nlines\",\r\n"), "the layer keeps the bytes as they came");
}

#[test]
fn nothing_that_is_not_finite_is_written() {
    let mut r = result(one(point("A", "")));
    let heat = r.assessment.heat.as_mut().expect("assessed");
    heat.peak_surface_k.p05 = f64::NAN;
    heat.absorbed_j_m2_p50 = f64::INFINITY;
    r.horizon_days = f64::NEG_INFINITY;
    r.feature.geometry.as_mut().expect("a point").value = geojson::GeometryValue::new_point([f64::NAN, 1.0]);
    let written = line(&r);
    let json: serde_json::Value = serde_json::from_str(&written).expect("valid JSON");
    for name in ["peak_surface_c_p05", "absorbed_mj_m2_p50", "horizon_days"] {
        assert!(json["properties"][name].is_null(), "{name}");
    }
    assert!(json["geometry"].is_null());
    assert!(!written.contains("NaN") && !written.to_lowercase().contains("inf\""));
}

fn burn(id: &str, area: &str) -> Burn {
    let geometry: geojson::GeometryValue = serde_json::from_str(area).expect("a geometry");
    let area: geo::Geometry<f64> = geometry.try_into().expect("a geometry");
    let area = match area {
        geo::Geometry::Polygon(p) => geo::MultiPolygon::new(vec![p]),
        geo::Geometry::MultiPolygon(m) => m,
        other => panic!("not an area: {other:?}"),
    };
    Burn {
        id: id.to_owned(),
        area,
        residence_s: None,
        residence_gsd: None,
        exposure: None,
        fireline_intensity_w_m: None,
        flame_length_m: None,
        spread_rate_m_s: None,
        fuel_load_kg_m2: None,
        burned_on: None,
        ground_after: None,
    }
}

const RING: &str = "[[0.0,0.0],[2.0,0.0],[2.0,2.0],[0.0,0.0]]";
const HOLE: &str = "[[1.0,0.5],[1.5,1.0],[1.5,0.5],[1.0,0.5]]";

#[test]
fn burns_keep_their_properties_and_areas() {
    let single = format!(r#"{{"type":"Polygon","coordinates":[{RING},{HOLE}]}}"#);
    let several =
        format!(r#"{{"type":"MultiPolygon","coordinates":[[{RING}],[[[5.0,5.0],[6.0,5.0],[6.0,6.0],[5.0,5.0]]]]}}"#);
    let results: Vec<BurnResult> = [&single, &several]
        .into_iter()
        .map(|area| BurnResult {
            burn: burn("u", area),
            properties: Properties::from_pairs([("burn_id", "\"u\""), ("crew", "7.0"), ("boulders", "\"many\"")]),
            feature_id: Some(serde_json::value::RawValue::from_string("42".to_owned()).expect("a number")),
            summary: Default::default(),
        })
        .collect();
    let written = text(|out| write_burns(out, &head(), &results));
    assert!(written.contains(&format!(r#"{{"type":"Feature","id":42,"geometry":{single},"properties":{{"burn_id":"u","crew":7.0,"input_boulders":"many","boulders":0,"#)), "{written}");
    assert!(written.contains(&several));
    let parsed: geojson::FeatureCollection = written.parse().expect("the geojson crate reads the layer");
    for field in BURN_FIELDS {
        let value = parsed.features[0].property(field.name).unwrap_or_else(|| panic!("{} is missing", field.name));
        let counted = ["boulders", "assessed", "not_assessed", "with_source", "worst_boulders"].contains(&field.name);
        assert_eq!(value.is_null(), !counted, "{}: a burn without boulders has counts and no means", field.name);
    }
}

#[test]
fn a_burn_counts_what_lies_in_it_and_averages_what_was_assessed() {
    let mut results =
        vec![results::with("A", 0.9, 0.004), results::with("B", 0.3, 0.001), results::with("C", 0.9, 0.002)];
    results[2].within = vec![0, 1];
    results[1].assessment.spall.as_mut().expect("assessed").p_rind = Some(0.2);
    results.push(results::without("D", &[0]));
    results.push(BoulderResult::new(one(point("E", "")), Assessment::not_assessed("outside"), 1.0));
    let summaries = summarise_burns(3, &results);
    let first = &summaries[0];
    assert_eq!((first.boulders, first.assessed), (4, 3));
    let close = |x: Option<f64>, y: f64| (x.expect("a mean") - y).abs() < 1e-12;
    assert!(close(first.p_spall_mean, 0.7), "{first:?}"); // (.9 + .3 + .9) / 3
    assert!(close(first.share_spall_over_half, 2.0 / 3.0), "{first:?}");
    assert!(close(first.p_rind_mean, 0.2), "over the one with a rind");
    assert!(close(first.loss_m_mean, 0.007 / 3.0) && close(first.loss_m_max, 0.004), "{first:?}");
    assert_eq!(first.worst_boulders, ["A", "C", "B"], "equal likelihood: the larger loss first");
    assert_eq!((summaries[1].boulders, summaries[1].worst_boulders.as_slice()), (1, ["C".to_owned()].as_slice()));
    assert_eq!(summaries[2], Default::default(), "nothing lies in it: counts of 0, means missing");
    let mut shuffled = results.clone();
    shuffled.reverse();
    assert_eq!(summarise_burns(3, &shuffled), summaries, "the order of the file does not show");
}

#[test]
fn the_cautions_are_those_of_the_page() {
    const PAGE: &str = include_str!("../docs/cautions.md");
    let headings: Vec<&str> = PAGE.lines().filter(|l| l.starts_with(|c: char| c.is_ascii_digit())).collect();
    assert_eq!(headings.len(), CAUTIONS.len());
    for (i, (caution, heading)) in CAUTIONS.iter().zip(headings).enumerate() {
        let start = format!("{}. **{}", i + 1, caution.title);
        assert!(heading.starts_with(&start), "{heading:?} should start with {start:?}");
    }
}

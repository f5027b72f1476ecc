//! The run record: complete, valid JSON, and honest about what was not assessed.

#[path = "support/results.rs"]
mod results;

use results::{one, point, result, with, without};
use serde_json::Value;
use spallcast::diagnostic::{Diagnostic, Severity};
use spallcast::ensemble::distribution::Distribution;
use spallcast::input::InputFile;
use spallcast::output::directory::WrittenFile;
use spallcast::output::run_record::{RunCounts, RunRecord, reason_code};
use spallcast::rock::Property;
use spallcast::settings::{Settings, UserRock};

fn parsed(record: &RunRecord) -> Value {
    let text = record.json();
    assert!(text.ends_with("}\n"));
    serde_json::from_str(&text).expect("valid JSON")
}

#[test]
fn the_record_holds_every_setting() {
    let mut settings = Settings { draws: 1024, seed: u64::MAX, horizon_days: 90.5, ..Settings::default() };
    settings.spall.rain_mm_h = 3.25;
    settings.rockfall.shaking_k = 0.125;
    settings.trail.segment_m = 25.0;
    settings.trail.as_of = Some(jiff::civil::date(2031, 7, 9));
    settings.unknown_rock = vec![("tuff".to_owned(), 0.75), ("basalt".to_owned(), 0.25)];
    settings.rocks = vec![UserRock {
        name: "our granite".to_owned(),
        like: "granite".to_owned(),
        figures: vec![(Property::Emissivity, Distribution::lognormal(0.9, 1.05))],
        source: "own measurement".to_owned(),
        aliases: vec!["og".to_owned()],
    }];
    let json = parsed(&RunRecord::new(&settings));
    let s = &json["settings"];
    assert_eq!((&json["draws"], &json["seed"]), (&s["draws"], &s["seed"]));
    assert_eq!(s["seed"], u64::MAX, "a seed keeps all its digits");
    assert_eq!(s["horizon_days"], 90.5);
    assert_eq!(s["spall"]["rain_mm_h"], 3.25);
    assert_eq!(s["rockfall"]["shaking_k"], 0.125);
    assert_eq!(s["trail"]["segment_m"], 25.0);
    assert_eq!(s["trail"]["as_of"], "2031-07-09");
    assert_eq!(s["unknown_rock"], serde_json::json!({"tuff": 0.75, "basalt": 0.25}));
    let rock = &s["rocks"][0];
    assert_eq!((&rock["name"], &rock["like"]), (&"our granite".into(), &"granite".into()));
    assert_eq!(rock["figures"][0]["centre"], 0.9);
    assert!(rock["figures"][0]["upper"].is_null(), "no upper end: null, not infinity");
    // Every field of the settings by the names that Rust prints for them.
    let debug = format!("{settings:?}");
    let mut names = 0;
    for name in debug.split([' ', '{', ',', '(']).filter_map(|w| w.strip_suffix(':')) {
        let inside = json["settings"].to_string();
        // Distributions and rocks are records of their own, days are text.
        if !["shape"].contains(&name) {
            assert!(inside.contains(&format!("\"{name}\":")), "settings lack {name}");
            names += 1;
        }
    }
    assert!(names >= 30, "the settings have at least thirty names: {names}");
}

#[test]
fn the_record_names_versions_inputs_files_times_and_cautions() {
    let mut record = RunRecord::new(&Settings::default());
    let file = InputFile { name: "b.csv".to_owned(), bytes: 7, sha256: "00ff".to_owned() };
    record.input("boulders", &file, Some(3));
    record.timing("read", 0.25);
    record.options.threads = Some(2);
    record.files.push(WrittenFile { name: "boulders.geojson".to_owned(), bytes: 9, sha256: "aa".to_owned() });
    let json = parsed(&record);
    assert_eq!(json["program"], "spallcast");
    assert_eq!(json["program_version"], env!("CARGO_PKG_VERSION"));
    assert_eq!(json["catalogue_version"], spallcast::rock::Catalogue::VERSION);
    let input = serde_json::json!({"role": "boulders", "name": "b.csv", "bytes": 7, "sha256": "00ff", "records": 3});
    assert_eq!(json["inputs"][0], input);
    assert_eq!(json["timings"][0], serde_json::json!({"phase": "read", "seconds": 0.25}));
    assert_eq!(json["options"]["threads"], 2);
    assert!(json["options"]["terrain"].is_null());
    assert_eq!(json["files"][0]["name"], "boulders.geojson");
    assert_eq!(json["cautions"].as_array().map(Vec::len), Some(13));
}

#[test]
fn findings_keep_their_parts_and_their_sentence() {
    let finding = Diagnostic::new(Severity::Refusal, "value_out_of_range", "b.csv")
        .about("boulder", Some("A"))
        .at_line(Some(4))
        .property("diameter_m", "-1")
        .expected("0.05 to 60")
        .remedy("measure it again");
    let mut record = RunRecord::new(&Settings::default());
    record.findings([&finding]);
    let expected = serde_json::json!({
        "severity": "refused", "code": "value_out_of_range", "file": "b.csv", "record": "boulder", "id": "A", "line": 4,
        "property": "diameter_m", "found": "-1", "expected": "0.05 to 60", "remedy": "measure it again",
        "message": finding.to_string(),
    });
    assert_eq!(parsed(&record)["diagnostics"], serde_json::json!([expected]));
}

#[test]
fn counts_add_up_and_say_why() {
    let refused = result(one(point("R", r#","slope_deg":200"#)));
    let code = refused.feature.boulder.as_ref().expect_err("refused").code;
    let mut sourced = with("S", 0.5, 0.001);
    sourced.source.p_source = Some(0.2);
    let results = [sourced, with("A", 0.5, 0.001), without("O", &[]), without("N", &[0]), refused];
    assert_eq!(reason_code(&results[0]), None);
    let counts = RunCounts::of(&results);
    assert_eq!((counts.records, counts.assessed, counts.not_assessed, counts.with_source), (5, 2, 3, 1));
    let reasons: Vec<_> = counts.not_assessed_by_reason.iter().map(|(k, n)| (*k, *n)).collect();
    let mut expected = vec![(code, 1), ("no_fire_recorded", 1), ("outside_burns", 1)];
    expected.sort_unstable();
    assert_eq!(reasons, expected);
    assert_eq!(counts.by_flag["weathering_assumed"], 2);
    assert_eq!(counts.by_flag.len(), 2);
}

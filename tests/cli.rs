//! The program from outside: exit codes, what is left untouched, where messages go, options from the settings file.

#[path = "support/program.rs"]
mod program;

use std::collections::BTreeMap;
use std::path::{Path, PathBuf};
use std::process::{Output, Stdio};

use program::{by_id, ends_with, layer, rows, run, same_row, spallcast, text};
use serde_json::{Value, json};
use tempfile::TempDir;

/// The fewest draws there are: these tests are not about numbers.
const FEW: &str = "16";
const LON: f64 = -119.5;
const LAT: f64 = 37.7;

/// A folder with a burn, two good boulders and one that is refused.
struct Site {
    folder: TempDir,
}

impl Site {
    fn new() -> Site {
        let site = Site { folder: TempDir::new().expect("a folder") };
        let d = 0.02;
        let ring = [[LON - d, LAT - d], [LON + d, LAT - d], [LON + d, LAT + d], [LON - d, LAT + d], [LON - d, LAT - d]];
        site.write(
            "burn.geojson",
            &collection(&[json!({"type": "Feature",
            "geometry": {"type": "Polygon", "coordinates": [ring]},
            "properties": {"burn_id": "b", "exposure": "crown", "residence_min": 3}})]),
        );
        let (good, all) =
            (good(), [good(), vec![point(json!({"boulder_id": "bad", "rock": "granite", "diameter_m": -1}))]].concat());
        site.write("good.geojson", &collection(&good));
        site.write("boulders.geojson", &collection(&all));
        site
    }

    fn path(&self, name: &str) -> PathBuf {
        self.folder.path().join(name)
    }

    fn write(&self, name: &str, content: &str) -> PathBuf {
        std::fs::write(self.path(name), content).expect("written");
        self.path(name)
    }

    /// `assess` of one inventory into one folder.
    fn assess(&self, boulders: &str, out: &str, more: &[&str]) -> Output {
        let (burn, boulders, out) = (self.path("burn.geojson"), self.path(boulders), self.path(out));
        let mut arguments =
            vec!["assess", "--burn", text(&burn), "--boulders", text(&boulders), "--out", text(&out), "--draws", FEW];
        arguments.extend(more);
        run(&arguments)
    }

    fn results(&self, out: &str) -> BTreeMap<String, Vec<u8>> {
        contents(&self.path(out))
    }
}

fn collection(features: &[Value]) -> String {
    json!({"type": "FeatureCollection", "features": features}).to_string()
}

fn point(properties: Value) -> Value {
    json!({"type": "Feature", "geometry": {"type": "Point", "coordinates": [LON, LAT]}, "properties": properties})
}

fn good() -> Vec<Value> {
    vec![
        point(
            json!({"boulder_id": "one", "rock": "granite", "diameter_m": 1.4, "slope_deg": 31, "contact": "burnt_duff"}),
        ),
        point(json!({"boulder_id": "two", "rock": "basalt", "diameter_m": 0.9})),
    ]
}

fn contents(folder: &Path) -> BTreeMap<String, Vec<u8>> {
    std::fs::read_dir(folder)
        .expect("a folder")
        .map(|entry| {
            let path = entry.expect("an entry").path();
            let name = path.file_name().expect("a name").to_string_lossy().into_owned();
            (name, std::fs::read(&path).expect("readable"))
        })
        .collect()
}

fn said(output: &Output) -> String {
    String::from_utf8_lossy(&output.stderr).into_owned()
}

#[test]
fn exit_codes_are_those_of_the_help() {
    let site = Site::new();
    ends_with(&site.assess("good.geojson", "a", &[]), 0);
    ends_with(&site.assess("boulders.geojson", "b", &[]), 3);
    let nowhere = site.assess("nowhere.geojson", "c", &[]);
    ends_with(&nowhere, 1);
    assert!(said(&nowhere).contains("nowhere.geojson"), "{}", said(&nowhere));
    assert!(!site.path("c").join("boulders.geojson").exists(), "nothing was written");
    ends_with(&run(&["assess"]), 2);
    ends_with(&run(&["assess", "--no-such-option"]), 2);
    ends_with(&run(&["frobnicate"]), 2);
    ends_with(&site.assess("good.geojson", "d", &["--format", "carrier_pigeon"]), 2);
    ends_with(&site.assess("good.geojson", "d", &["--horizon-days", "-3"]), 2);
    ends_with(&site.assess("good.geojson", "d", &["--threads", "0"]), 2);
    ends_with(&run(&["--help"]), 0);
    ends_with(&run(&["--version"]), 0);
    let help = String::from_utf8(run(&["--help"]).stdout).expect("UTF-8");
    assert!(
        help.contains("0 all assessed; 1 failed, nothing written; 2 usage; 3 finished, some not assessed"),
        "{help}"
    );
}

#[test]
fn a_failed_run_leaves_the_old_results_as_they_were() {
    let site = Site::new();
    ends_with(&site.assess("good.geojson", "o", &[]), 0);
    let before = site.results("o");
    assert!(before.contains_key("boulders.geojson") && before.contains_key("run.json"));
    ends_with(&site.assess("nowhere.geojson", "o", &[]), 1);
    assert!(site.results("o") == before, "a missing inventory");
    let strict = site.assess("boulders.geojson", "o", &["--strict"]);
    ends_with(&strict, 1);
    assert!(said(&strict).contains("--strict"), "{}", said(&strict));
    assert!(site.results("o") == before, "a strict run with a refused record");
    site.write("broken.geojson", "{\"type\": \"FeatureCollection\", \"features\": [");
    ends_with(&site.assess("broken.geojson", "o", &[]), 1);
    assert!(site.results("o") == before, "a file that was cut off");
    ends_with(&site.assess("boulders.geojson", "o", &[]), 3);
    assert!(site.results("o") != before, "a run that ends replaces them");
}

#[test]
fn strict_changes_nothing_when_all_are_assessed() {
    let site = Site::new();
    ends_with(&site.assess("good.geojson", "o", &["--strict"]), 0);
    assert!(site.path("o").join("boulders.geojson").exists());
}

#[test]
fn results_do_not_overwrite_an_input() {
    let site = Site::new();
    let before = std::fs::read(site.path("boulders.geojson")).expect("written");
    let output = site.assess("boulders.geojson", ".", &[]);
    ends_with(&output, 1);
    assert!(std::fs::read(site.path("boulders.geojson")).expect("still there") == before, "{}", said(&output));
}

#[test]
fn check_tells_everything_and_writes_nothing() {
    let site = Site::new();
    let (burn, good, all) = (site.path("burn.geojson"), site.path("good.geojson"), site.path("boulders.geojson"));
    let before = contents(site.folder.path());
    let clean = run(&["check", "--burn", text(&burn), "--boulders", text(&good)]);
    ends_with(&clean, 0);
    let found = run(&["check", "--burn", text(&burn), "--boulders", text(&all)]);
    ends_with(&found, 3);
    let told = String::from_utf8(found.stdout).expect("UTF-8");
    assert!(told.contains("diameter_m is -1") && told.contains("\"bad\""), "{told}");
    ends_with(&run(&["check", "--burn", text(&burn), "--boulders", text(&all), "--strict"]), 1);
    let lines = run(&["check", "--burn", text(&burn), "--boulders", text(&all), "--json-log"]).stdout;
    assert_json_lines(&String::from_utf8(lines).expect("UTF-8"));
    assert!(contents(site.folder.path()) == before, "check computes and writes nothing");
}

fn assert_json_lines(lines: &str) {
    assert!(!lines.trim().is_empty(), "something was said");
    for line in lines.lines() {
        let value: Value = serde_json::from_str(line).unwrap_or_else(|e| panic!("{e}: {line}"));
        assert!(value["level"].is_string() && value["message"].is_string(), "{line}");
    }
}

#[test]
fn json_log_is_one_object_a_line_whatever_happens() {
    let site = Site::new();
    assert_json_lines(&said(&site.assess("boulders.geojson", "o", &["--json-log"])));
    let failed = site.assess("nowhere.geojson", "o", &["--json-log"]);
    ends_with(&failed, 1);
    assert_json_lines(&said(&failed));
    let refused: Vec<Value> = said(&site.assess("boulders.geojson", "o", &["--json-log"]))
        .lines()
        .map(|l| serde_json::from_str::<Value>(l).expect("JSON"))
        .filter(|v| v["level"] == "refused")
        .collect();
    assert!(!refused.is_empty());
    assert!(
        refused.iter().any(|r| r["id"] == "bad" && r["property"] == "diameter_m" && r["found"] == "-1"),
        "{refused:?}"
    );
}

#[test]
fn talk_goes_to_standard_error_without_colour_and_quiet_is_quiet() {
    let site = Site::new();
    let output = site.assess("boulders.geojson", "o", &[]);
    assert!(output.stdout.is_empty(), "results go to files");
    assert!(!said(&output).is_empty() && !said(&output).contains('\u{1b}'), "{}", said(&output));
    assert!(said(&site.assess("boulders.geojson", "o", &["--quiet"])).is_empty());
    let failed = site.assess("nowhere.geojson", "o", &["--quiet"]);
    assert!(!said(&failed).is_empty() && !said(&failed).contains('\u{1b}'), "errors are told even so");
    let burn = site.path("burn.geojson");
    let mut bare = spallcast();
    bare.env("NO_COLOR", "1").args(["check", "--burn", text(&burn), "--boulders", text(&site.path("nowhere"))]);
    let output = bare.output().expect("starts");
    ends_with(&output, 1);
    assert!(!said(&output).contains('\u{1b}'));
}

#[test]
fn options_stand_in_the_settings_file_and_a_flag_wins() {
    let site = Site::new();
    let toml = "draws = 32\nseed = 7\nthreads = 1\nhorizon_days = 90\nquiet = true\nburn = \"burn.geojson\"\n\
                boulders = \"good.geojson\"\nout = \"from_file\"\n[trail]\nvulnerability = 0.7\n";
    let settings = site.write("s.toml", toml);
    let output = run(&["assess", "--settings", text(&settings)]);
    ends_with(&output, 0);
    assert!(said(&output).is_empty(), "quiet stands in the file: {}", said(&output));
    let record = layer(&site.path("from_file").join("run.json"));
    assert_eq!(record["draws"], 32);
    assert_eq!(record["seed"], 7);
    assert_eq!(record["options"]["threads"], 1);
    assert_eq!(record["settings"]["horizon_days"], 90.0);
    assert_eq!(record["settings"]["trail"]["vulnerability"], 0.7);

    let out = site.path("by_flag");
    let arguments = [
        "assess",
        "--settings",
        text(&settings),
        "--draws",
        "48",
        "--seed",
        "9",
        "--horizon-days",
        "30",
        "--out",
        text(&out),
    ];
    ends_with(&run(&arguments), 0);
    let record = layer(&out.join("run.json"));
    assert_eq!((&record["draws"], &record["seed"]), (&json!(48), &json!(9)));
    assert_eq!(record["settings"]["horizon_days"], 30.0);
    assert_eq!(record["settings"]["trail"]["vulnerability"], 0.7, "what no flag names stays the file's");
    let row = rows(&layer(&out.join("boulders.geojson")))[0].clone();
    assert_eq!(row["horizon_days"].as_f64(), Some(30.0));
}

#[test]
fn the_run_record_holds_what_was_read_and_written() {
    let site = Site::new();
    ends_with(&site.assess("boulders.geojson", "o", &["--seed", "5"]), 3);
    let record = layer(&site.path("o").join("run.json"));
    assert_eq!((&record["seed"], &record["draws"]), (&json!(5), &json!(16)));
    assert_eq!(record["counts"]["records"], 3);
    assert_eq!(record["counts"]["not_assessed"], 1);
    let inputs = record["inputs"].as_array().expect("inputs");
    let burn = inputs.iter().find(|i| i["role"] == "burn").expect("the burn");
    assert_eq!(burn["sha256"], sha256(&std::fs::read(site.path("burn.geojson")).expect("written")));
    for file in record["files"].as_array().expect("files") {
        let bytes = std::fs::read(site.path("o").join(file["name"].as_str().expect("a name"))).expect("written");
        assert_eq!(file["sha256"], sha256(&bytes), "{file}");
    }
    assert!(!record["diagnostics"].as_array().expect("diagnostics").is_empty());
}

fn sha256(bytes: &[u8]) -> String {
    use sha2::{Digest, Sha256};
    Sha256::digest(bytes).iter().map(|b| format!("{b:02x}")).collect()
}

#[test]
fn a_closed_pipe_is_a_good_end() {
    let site = Site::new();
    let burn = site.path("burn.geojson");
    let closed = |arguments: &[&str], input: &str| {
        let mut child = std::process::Command::new(assert_cmd::cargo::cargo_bin("spallcast"))
            .args(arguments)
            .stdin(Stdio::piped())
            .stdout(Stdio::piped())
            .stderr(Stdio::piped())
            .spawn()
            .expect("starts");
        // Nobody reads before anything is handed in, so the first line of results meets a closed pipe.
        drop(child.stdout.take());
        use std::io::Write;
        let _ = child.stdin.take().expect("piped").write_all(input.as_bytes());
        child.wait_with_output().expect("ends")
    };
    let lines: String = good().iter().map(|f| format!("{f}\n")).collect();
    let lines = lines + &point(json!({"boulder_id": "bad"})).to_string();
    ends_with(&closed(&["assess", "--burn", text(&burn), "--boulders", "-", "--out", "-", "--draws", FEW], &lines), 0);
    ends_with(&closed(&["rocks"], ""), 0);
    ends_with(&closed(&["rocks", "--json"], ""), 0);
}

fn probe(more: &[&str]) -> Output {
    let mut arguments = vec!["probe", "--rock", "granite"];
    arguments.extend(more);
    run(&arguments)
}

#[test]
fn a_probe_gives_back_the_depths_and_times_that_were_asked_for() {
    let output =
        probe(&["--flat", "--exposure", "crown", "--json", "--depths-mm", "0,2,7.5,40", "--times-s", "1,60,600"]);
    ends_with(&output, 0);
    let value: Value = serde_json::from_slice(&output.stdout).expect("JSON");
    assert_eq!(value["depth_mm"], json!([0.0, 2.0, 7.5, 40.0]));
    assert_eq!(value["time_s"], json!([1.0, 60.0, 600.0]));
    let table = value["temperature_c"].as_array().expect("[time][depth]");
    assert_eq!((table.len(), table[0].as_array().expect("a row").len()), (3, 4));
    for list in ["5,2", "-1", "nan", "0,x"] {
        ends_with(&probe(&["--flat", "--exposure", "crown", "--depths-mm", list]), 2);
        ends_with(&probe(&["--flat", "--exposure", "crown", &format!("--times-s={list}")]), 2);
    }
}

#[test]
fn what_a_probe_cannot_mean_is_usage() {
    ends_with(&probe(&["--flat"]), 2);
    ends_with(&probe(&["--exposure", "crown"]), 2);
    ends_with(&probe(&["--flat", "--diameter-m", "1", "--exposure", "crown"]), 2);
    ends_with(&probe(&["--diameter-m", "-1", "--exposure", "crown"]), 2);
    let unknown = probe(&["--flat", "--exposure", "volcano"]);
    ends_with(&unknown, 2);
    assert!(said(&unknown).contains("crown"), "the classes are named: {}", said(&unknown));
    ends_with(&run(&["probe", "--rock", "unobtainium", "--flat", "--exposure", "crown"]), 2);
    ends_with(&run(&["probe", "--id", "one"]), 2);
    let site = Site::new();
    let (burn, boulders) = (site.path("burn.geojson"), site.path("good.geojson"));
    let missing = run(&["probe", "--burn", text(&burn), "--boulders", text(&boulders), "--id", "nobody"]);
    ends_with(&missing, 1);
    assert!(said(&missing).contains("nobody"), "{}", said(&missing));
}

#[test]
fn set_refuses_what_it_cannot_use_and_says_why() {
    for (set, word) in [
        ("conductivity_w_m_k", "="),
        ("conductivity_w_m_k=warm", "not a number"),
        ("conductivity_w_m_k=inf", "not a number"),
        ("conductivity_w_m_k=-2", "expected"),
        ("colour=3", "not a property"),
        ("emissivity=1.2", "expected"),
        ("initial_c=900", "expected"),
        ("heated_fraction=3", "expected"),
    ] {
        let output = probe(&["--flat", "--exposure", "crown", "--set", set]);
        ends_with(&output, 2);
        assert!(said(&output).contains(word), "{set}: {}", said(&output));
    }
    let all = ["conductivity_w_m_k=2.5", "density_kg_m3=2600", "specific_heat_j_kg_k=800", "diffusivity_mm2_s=5"];
    let contradiction: Vec<&str> =
        ["--flat", "--exposure", "crown"].into_iter().chain(all.iter().flat_map(|s| ["--set", *s])).collect();
    let output = probe(&contradiction);
    ends_with(&output, 2);
    assert!(said(&output).contains("contradict"), "{}", said(&output));
}

#[test]
fn series_refuses_what_it_cannot_use_and_says_why() {
    let site = Site::new();
    let series = |text: &str| site.write("s.csv", text);
    let with = |path: &Path, more: &[&str]| {
        let mut arguments = vec!["--flat", "--series", text(path)];
        arguments.extend(more);
        probe(&arguments)
    };
    for (content, word) in [
        ("surface_c\n20\n30\n", "time_s"),
        ("time_s\n0\n60\n", "time_s"),
        ("time_s,surface_c,flux_kw_m2\n0,20,5\n60,90,5\n", "one of the three"),
        ("time_s,gas_c\n0,20\n60,90\n", "h_w_m2k"),
        ("time_s,surface_c\n0,20\n60,hot\n", "hot"),
        ("time_s,surface_c\n60,20\n0,90\n", "time_s"),
        ("time_s,surface_c\n0,20\n", "two rows"),
        ("", "time_s"),
    ] {
        let output = with(&series(content), &[]);
        ends_with(&output, 1);
        assert!(said(&output).contains(word), "{content:?}: {}", said(&output));
    }
    let good = series("time_s,surface_c\n0,20\n60,300\n");
    ends_with(&with(&good, &["--times-s", "60"]), 0);
    ends_with(&with(&good, &["--times-s", "61"]), 2);
    ends_with(&with(&good, &["--draws", "16"]), 2);
    ends_with(&with(&site.path("nowhere.csv"), &[]), 1);
}

#[test]
fn every_form_of_an_inventory_gives_the_same_numbers() {
    let site = Site::new();
    site.write(
        "good.csv",
        &format!(
            "boulder_id,rock,diameter_m,slope_deg,contact,longitude,latitude\none,granite,1.4,31,burnt_duff,{LON},{LAT}\n\
             two,basalt,0.9,,,{LON},{LAT}\n"
        ),
    );
    let sequence: String = good().iter().map(|f| format!("\u{1e}{f}\n")).collect();
    site.write("good.geojsons", &sequence);
    ends_with(&site.assess("good.geojson", "a", &[]), 0);
    ends_with(&site.assess("good.csv", "b", &[]), 0);
    ends_with(&site.assess("good.geojsons", "c", &[]), 0);
    let of = |out: &str| by_id(rows(&layer(&site.path(out).join("boulders.geojson"))));
    let (json, csv, separated) = (of("a"), of("b"), of("c"));
    // A table keeps every column in every row, as the text that was written.
    let as_written = ["rock", "diameter_m", "slope_deg", "contact", "longitude", "latitude"];
    for (id, row) in &json {
        same_row(id, row, &separated[id], &[]);
        let (row, other) = (row.as_object().expect("a row"), csv[id].as_object().expect("a row"));
        for (name, value) in row.iter().filter(|(n, _)| !as_written.contains(&n.as_str())) {
            assert_eq!(value, &other[name], "{id}: {name}");
        }
    }
    let burn = site.path("burn.geojson");
    let mut streamed = spallcast();
    streamed.args(["assess", "--burn", text(&burn), "--boulders", "-", "--out", "-", "--draws", FEW, "--quiet"]);
    let output = streamed.write_stdin(sequence).output().expect("starts");
    ends_with(&output, 0);
    let lines: Vec<Value> = String::from_utf8(output.stdout)
        .expect("UTF-8")
        .lines()
        .map(|l| serde_json::from_str(l).expect("one feature a line"))
        .collect();
    for (id, row) in by_id(lines.iter().map(|l| &l["properties"])) {
        same_row(&id, &json[&id], &row, &["inspection_rank"]);
    }
}

#[test]
fn a_stream_refuses_what_needs_all_boulders_at_once() {
    let site = Site::new();
    let burn = site.path("burn.geojson");
    let base = ["assess", "--burn", text(&burn), "--boulders", "-", "--out", "-"];
    let with = |more: &[&str]| run(&[&base[..], more].concat());
    ends_with(&with(&["--trails", text(&burn)]), 2);
    ends_with(&with(&["--strict"]), 2);
}

#[test]
fn the_catalogue_lists_and_finds() {
    ends_with(&run(&["rocks"]), 0);
    let output = run(&["rocks", "--json"]);
    ends_with(&output, 0);
    let _: Value = serde_json::from_slice(&output.stdout).expect("JSON");
    ends_with(&run(&["rocks", "--rock", "tonalite"]), 0);
    ends_with(&run(&["rocks", "--rock", "unobtainium"]), 2);
}

//! Every file of `fixtures/hostile` through the real program: the exit code that the contract gives it, a message where
//! there is something to say, results only where there are some, and never a panic.
//!
//! Expected codes follow from what the files are (see the README beside them), not from a run.

#[path = "support/program.rs"]
mod program;

use std::collections::BTreeSet;
use std::path::{Path, PathBuf};
use std::process::Output;

use program::{ends_with, fixture, run, spallcast, text};
use tempfile::TempDir;

/// The fewest draws there are: these tests are not about numbers.
const FEW: &str = "16";
/// Inventories that cannot be used at all: exit code 1.
const UNUSABLE: &[&str] = &[
    "array.geojson",
    "bare_geometry.geojson",
    "blank.geojson",
    "column_twice.csv",
    "columns_missing.csv",
    "crs_after.geojson",
    "crs_projected.geojson",
    "deep_array.geojson",
    "empty.csv",
    "empty.geojson",
    "features_missing.geojson",
    "features_null.geojson",
    "features_twice.geojson",
    "header_missing.csv",
    "infinity_literal.geojson",
    "nan_literal.geojson",
    "not_json.geojson",
    "nul_bytes.geojson",
    "topology.geojson",
    "trailing_text.geojson",
    "truncated.geojson",
    "truncated_in_text.geojson",
    "utf_16.geojson",
    "zipped.geojson",
];
/// Inventories that are odd but clear: every record is assessed, exit code 0.
const CLEAR: &[&str] = &[
    "axes_unsorted.geojson",
    "blank_rows.csv",
    "byte_order_mark_crlf.geojson",
    "collection_empty.geojson",
    "column_case.geojson",
    "column_misspelt.geojson",
    "crs_wgs84.geojson",
    "header_only.csv",
    "id_is_number.geojson",
    "latin_1.csv",
    "latin_1.geojson",
    "number_as_text.geojson",
    "position_four_numbers.geojson",
    // What follows the open quote is the text of a note; a warning says so.
    "quote_open.csv",
    "semicolons.csv",
    "single_feature.geojson",
    "sizes_disagree.geojson",
    "values_empty.geojson",
];
/// Burns that are odd but can be used.
const CLEAR_BURNS: &[&str] = &["burn_clockwise.geojson", "burn_date_line.geojson", "burn_without_fire.geojson"];

fn names(with: impl Fn(&str) -> bool) -> Vec<String> {
    let mut names: Vec<String> = std::fs::read_dir(fixture("hostile"))
        .expect("the folder")
        .map(|e| e.expect("an entry").file_name().into_string().expect("a plain name"))
        .filter(|n| !["README.md", "make.py"].contains(&n.as_str()) && with(n))
        .collect();
    names.sort();
    names
}

fn is_inventory(name: &str) -> bool {
    !name.starts_with("burn_") && !name.starts_with("trail_") && !name.ends_with(".toml")
}

/// A burn over all places of the hostile inventories.
fn burn(folder: &Path) -> PathBuf {
    let ring = "[[-121,36],[-118,36],[-118,40],[-121,40],[-121,36]]";
    let content = format!(
        "{{\"type\":\"FeatureCollection\",\"features\":[{{\"type\":\"Feature\",\"geometry\":{{\"type\":\"Polygon\",\
         \"coordinates\":[{ring}]}},\"properties\":{{\"burn_id\":\"b\",\"exposure\":\"grass\",\"residence_min\":0.5}}}}]}}"
    );
    let path = folder.join("good_burn.geojson");
    std::fs::write(&path, content).expect("written");
    path
}

fn said(output: &Output) -> String {
    String::from_utf8_lossy(&output.stderr).into_owned()
}

/// No panic, results where they belong, a message where something is wrong.
fn sound(name: &str, output: &Output, out: &Path) {
    let said = said(output);
    assert!(!said.contains("panicked"), "{name}: {said}");
    let code = output.status.code().unwrap_or_else(|| panic!("{name} was killed: {said}"));
    let written = out.join("boulders.geojson").exists();
    assert_eq!(written, code == 0 || code == 3, "{name}: exit code {code}, results {written}");
    if code != 0 {
        assert!(!said.trim().is_empty(), "{name}: exit code {code} without a word");
    }
}

#[test]
fn every_hostile_inventory_ends_as_the_contract_says() {
    let folder = TempDir::new().expect("a folder");
    let burn = burn(folder.path());
    let inventories = names(is_inventory);
    assert!(inventories.len() >= 70, "{}", inventories.len());
    for listed in UNUSABLE.iter().chain(CLEAR) {
        assert!(inventories.iter().any(|n| n == listed), "{listed} is listed and missing");
    }
    for name in inventories {
        let (path, out) = (fixture("hostile").join(&name), folder.path().join(&name));
        let output =
            run(&["assess", "--burn", text(&burn), "--boulders", text(&path), "--out", text(&out), "--draws", FEW]);
        sound(&name, &output, &out);
        let expected = match name.as_str() {
            n if UNUSABLE.contains(&n) => 1,
            n if CLEAR.contains(&n) => 0,
            _ => 3,
        };
        assert_eq!(output.status.code(), Some(expected), "{name}: {}", said(&output));
        let checked = run(&["check", "--burn", text(&burn), "--boulders", text(&path)]);
        assert!(!said(&checked).contains("panicked"), "{name}");
        match expected {
            // What is odd but clear may be noted, which check tells as a finding.
            0 => assert!([Some(0), Some(3)].contains(&checked.status.code()), "{name}"),
            code => assert_eq!(checked.status.code(), Some(code), "check {name}: {}", said(&checked)),
        }
    }
}

#[test]
fn a_wrong_burn_or_settings_file_fails_the_run_and_a_wrong_trail_does_not_panic() {
    let folder = TempDir::new().expect("a folder");
    let (good_burn, boulders) = (burn(folder.path()), fixture("hostile/number_as_text.geojson"));
    let mut tried = 0;
    for name in names(|n| !is_inventory(n)) {
        let (path, out) = (fixture("hostile").join(&name), folder.path().join(&name));
        let mut arguments = vec!["assess", "--boulders", text(&boulders), "--out", text(&out), "--draws", FEW];
        let is_burn = name.starts_with("burn_");
        arguments.extend(["--burn", text(if is_burn { &path } else { &good_burn })]);
        match name.as_str() {
            n if n.ends_with(".toml") => arguments.extend(["--settings", text(&path)]),
            n if n.starts_with("trail_") => arguments.extend(["--trails", text(&path)]),
            _ => {}
        }
        let output = run(&arguments);
        sound(&name, &output, &out);
        let must_fail = name.ends_with(".toml") || is_burn && !CLEAR_BURNS.contains(&name.as_str());
        if must_fail {
            ends_with(&output, 1);
            assert!(said(&output).contains(&name), "{name} is named: {}", said(&output));
        }
        tried += 1;
    }
    assert!(tried >= 30, "{tried}");
}

#[test]
fn every_hostile_inventory_survives_as_a_stream() {
    let folder = TempDir::new().expect("a folder");
    let burn = burn(folder.path());
    let mut codes = BTreeSet::new();
    for name in names(is_inventory) {
        let bytes = std::fs::read(fixture("hostile").join(&name)).expect("readable");
        let mut command = spallcast();
        command.args(["assess", "--burn", text(&burn), "--boulders", "-", "--out", "-", "--draws", FEW]);
        let output = command.write_stdin(bytes).output().expect("starts");
        let code = output.status.code().unwrap_or_else(|| panic!("{name} was killed"));
        assert!(!said(&output).contains("panicked"), "{name}: {}", said(&output));
        assert!([0, 1, 3].contains(&code), "{name}: {code}");
        codes.insert(code);
        let lines = String::from_utf8(output.stdout).expect("UTF-8");
        for line in lines.lines() {
            // Values pass through as they were written, numbers beyond the range of a double too: JSON allows them.
            let _: serde::de::IgnoredAny = serde_json::from_str(line).unwrap_or_else(|e| panic!("{name}: {e}: {line}"));
        }
    }
    assert_eq!(codes, BTreeSet::from([0, 1, 3]), "all three ends occur");
}

#[test]
fn a_line_of_many_megabytes_costs_a_message() {
    const BYTES: usize = 30_000_000;
    let folder = TempDir::new().expect("a folder");
    let burn = burn(folder.path());
    // A record that cannot be read costs only itself where records are told apart by their separator.
    let starts = [("{\"type\":\"FeatureCollection\",\"features\":[\"", 1), ("[", 1), ("boulder_id,", 1), ("\u{1e}", 3)];
    for (start, code) in starts {
        let mut bytes = start.as_bytes().to_vec();
        bytes.resize(BYTES, b'a');
        let path = folder.path().join("long.geojson");
        std::fs::write(&path, &bytes).expect("written");
        let out = folder.path().join(format!("o{code}"));
        let output =
            run(&["assess", "--burn", text(&burn), "--boulders", text(&path), "--out", text(&out), "--draws", FEW]);
        sound("a long line", &output, &out);
        ends_with(&output, code);
        assert!(said(&output).len() < 4000, "the message does not repeat the line");
    }
}

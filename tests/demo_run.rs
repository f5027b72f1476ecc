//! The demo through the real program: it shows what its page promises, and its inputs give the same numbers in any order,
//! in any part, through a stream and on any number of threads.

#[path = "support/program.rs"]
mod program;

use std::collections::BTreeSet;
use std::path::Path;
use std::sync::OnceLock;

use program::{by_id, ends_with, fixture, layer, rows, run, same_row, spallcast, text};
use serde_json::Value;
use tempfile::TempDir;

/// Enough draws for numbers that differ between boulders; the demo itself runs with its own.
const FEW_DRAWS: &str = "32";
/// What depends on the other boulders of a run by its nature.
const OF_THE_RUN: &[&str] = &["inspection_rank"];

/// The demo, written and run once for all tests.
fn demo() -> &'static Path {
    static DEMO: OnceLock<TempDir> = OnceLock::new();
    DEMO.get_or_init(|| {
        let folder = TempDir::new().expect("a folder");
        let output = run(&["demo", text(folder.path())]);
        ends_with(&output, 0);
        let said = String::from_utf8_lossy(&output.stderr);
        assert!(said.contains("invented"), "the demo says that it is invented: {said}");
        assert!(!said.contains('\u{1b}'), "no colour and no bar without a terminal: {said:?}");
        folder
    })
    .path()
}

fn demo_layer(name: &str) -> Value {
    layer(&demo().join("results").join(name))
}

/// Assesses an inventory with the demo's other inputs and few draws.
fn assess(boulders: &str, out: &str, more: &[&str]) -> std::process::Output {
    let of = |name: &str| fixture("demo").join(name);
    let (burn, terrain, settings) = (of("burns.geojson"), of("terrain.tif"), of("settings.toml"));
    let mut command = spallcast();
    command.args(["assess", "--burn", text(&burn), "--terrain", text(&terrain), "--settings", text(&settings)]);
    command.args(["--boulders", boulders, "--out", out, "--draws", FEW_DRAWS, "--quiet"]).args(more);
    command.output().expect("the program starts")
}

fn inventory() -> Value {
    layer(&fixture("demo/boulders.geojson"))
}

fn written(folder: &TempDir, name: &str, value: &Value) -> String {
    let path = folder.path().join(name);
    std::fs::write(&path, value.to_string()).expect("written");
    text(&path).to_owned()
}

/// All boulders of the demo with few draws, in the order of the file.
fn in_order() -> &'static Value {
    static WHOLE: OnceLock<Value> = OnceLock::new();
    WHOLE.get_or_init(|| {
        let folder = TempDir::new().expect("a folder");
        let out = folder.path().join("o");
        let output = assess(text(&fixture("demo/boulders.geojson")), text(&out), &[]);
        ends_with(&output, 3);
        layer(&out.join("boulders.geojson"))
    })
}

#[test]
fn the_demo_writes_its_inputs_and_every_result() {
    for name in ["burns.geojson", "boulders.geojson", "trails.geojson", "terrain.tif", "settings.toml"] {
        let (own, written) = (std::fs::read(fixture("demo").join(name)), std::fs::read(demo().join(name)));
        assert_eq!(own.expect("in the project"), written.expect("written by the demo"), "{name}");
    }
    let results = demo().join("results");
    for name in ["boulders.geojson", "burns.geojson", "trails.geojson", "inspection.csv", "run.json"] {
        assert!(results.join(name).metadata().is_ok_and(|m| m.len() > 0), "{name}");
    }
    let leftovers: Vec<_> = std::fs::read_dir(&results)
        .expect("results")
        .map(|e| e.expect("entry").file_name().into_string().expect("a plain name"))
        .filter(|n| n.starts_with('.') || n.contains("tmp"))
        .collect();
    assert!(leftovers.is_empty(), "{leftovers:?}");
    assert_eq!(rows(&demo_layer("boulders.geojson")).len(), rows(&inventory()).len(), "one row a record");
}

#[test]
fn every_proposal_occurs_with_a_reason_and_nothing_unassessed_looks_open() {
    let trails = demo_layer("trails.geojson");
    let rows = rows(&trails);
    let found: BTreeSet<&str> = rows.iter().map(|r| r["proposal"].as_str().expect("a word")).collect();
    let all =
        ["closed until looked at", "keep closed", "no limit from this screening", "not assessed", "open with warning"];
    assert_eq!(found, BTreeSet::from(all));
    for row in rows {
        let (word, reason) = (row["proposal"].as_str().expect("a word"), row["reason"].as_str().expect("a reason"));
        assert!(reason.contains("metres"), "the reason names the stretch: {reason}");
        assert!(!reason.to_lowercase().contains("safe"), "{reason}");
        assert_eq!(row["decided_by"], "");
        assert!(!row["review_on"].as_str().expect("a day").is_empty());
        assert!(!row["reopens_when"].as_str().expect("a sentence").is_empty());
        if word == "keep closed" {
            assert!(row["death_chance_per_passage_p95"].as_f64().expect("a figure") >= 1e-5, "{row}");
            assert!(reason.contains("the limit set for keeping it closed"), "{reason}");
        }
    }
}

#[test]
fn boulders_in_every_state_of_support_contribute() {
    let boulders = demo_layer("boulders.geojson");
    let support: std::collections::BTreeMap<&str, &str> =
        rows(&boulders).into_iter().filter_map(|r| Some((r["boulder_id"].as_str()?, r["support"].as_str()?))).collect();
    let trails = demo_layer("trails.geojson");
    let contributing: BTreeSet<&str> = rows(&trails)
        .iter()
        .flat_map(|r| r["boulder_ids"].as_str().expect("ids").split(';'))
        .filter_map(|id| support.get(id).copied())
        .collect();
    assert_eq!(contributing, BTreeSet::from(["burnt_through", "charred", "none", "scorched", "sound"]));
}

/// The rows of the page's table of wrong records: id, the column "comes out as", and the code quotes of the last column.
fn page_rows() -> Vec<(String, bool, Vec<String>)> {
    let page = std::fs::read_to_string(fixture("demo/README.md")).expect("the page");
    let table = page.split("## Wrong records").nth(1).expect("the section").to_owned();
    let rows: Vec<_> = table
        .lines()
        .filter(|l| l.starts_with("| `"))
        .map(|line| {
            let cells: Vec<&str> = line.trim_matches('|').split('|').map(str::trim).collect();
            let quotes = |cell: &str| cell.split('`').skip(1).step_by(2).map(str::to_owned).collect::<Vec<_>>();
            (quotes(cells[0])[0].clone(), cells[2].starts_with("not assessed"), quotes(cells[3]))
        })
        .collect();
    assert_eq!(rows.len(), 16, "the page lists sixteen wrong records");
    rows
}

#[test]
fn every_wrong_record_comes_out_as_the_page_says() {
    let boulders = demo_layer("boulders.geojson");
    for (id, refused, quotes) in page_rows() {
        let of_that_name: Vec<&&Value> =
            rows(&boulders).leak().iter().filter(|r| r["boulder_id"] == id.as_str()).collect();
        assert_eq!(of_that_name.len(), if id == "A-001" { 2 } else { 1 }, "{id}");
        for row in of_that_name {
            let status = if refused { "not_assessed" } else { "assessed" };
            assert_eq!(row["status"], status, "{id}: {}", row["reason"]);
            assert!(!quotes.is_empty(), "{id}: the page says what the row says");
            for quote in &quotes {
                let place = if refused { &row["reason"] } else { &row["flags"] };
                assert!(place.as_str().expect("text").contains(quote.as_str()), "{id}: {quote:?} is not in {place}");
            }
            assert_eq!(row["p_spall"].is_null(), refused, "{id}: what was not computed is null");
            assert_eq!(row["p_source"].is_null(), refused, "{id}");
        }
    }
}

#[test]
fn what_cannot_stand_says_check_measurements() {
    let boulders = demo_layer("boulders.geojson");
    let odd: Vec<&Value> =
        rows(&boulders).into_iter().filter(|r| r["team_note"] == "measured twice, differs").collect();
    assert_eq!(odd.len(), 3);
    for row in odd {
        assert_eq!(row["status"], "assessed", "its heating is known");
        assert!(row["p_source"].is_null() && row["p_release"].is_null(), "{row}");
        assert!(row["reason"].as_str().expect("text").contains("Check measurements"), "{row}");
    }
}

#[test]
fn one_thread_and_two_write_the_same_bytes() {
    let folder = TempDir::new().expect("a folder");
    let trails = fixture("demo/trails.geojson");
    let run = |threads: &str| {
        let out = folder.path().join(threads);
        let boulders = fixture("demo/boulders.geojson");
        let output = assess(text(&boulders), text(&out), &["--trails", text(&trails), "--threads", threads]);
        ends_with(&output, 3);
        out
    };
    let (one, two) = (run("1"), run("2"));
    for name in ["boulders.geojson", "burns.geojson", "trails.geojson", "inspection.csv"] {
        let read = |out: &Path| std::fs::read(out.join(name)).expect("written");
        assert!(read(&one) == read(&two), "{name} differs between 1 and 2 threads");
    }
}

#[test]
fn another_order_gives_every_boulder_the_same_numbers() {
    let folder = TempDir::new().expect("a folder");
    let mut shuffled = inventory();
    let features = shuffled["features"].as_array_mut().expect("features");
    features.reverse();
    features.rotate_left(101);
    let (a, b) = features.split_at_mut(200);
    a[..150].swap_with_slice(&mut b[7..157]);
    let out = folder.path().join("o");
    ends_with(&assess(&written(&folder, "b.geojson", &shuffled), text(&out), &[]), 3);
    let other = by_id(rows(&layer(&out.join("boulders.geojson"))));
    let whole = by_id(rows(in_order()));
    assert_eq!(whole.len(), 480, "all but the two of one name");
    assert_eq!(whole.len(), other.len());
    // Ranks too: they depend on what the boulders are, not on where they stand in the file. Only the records that no
    // rank can be computed for stand by name.
    whole.iter().for_each(|(id, row)| same_row(id, row, &other[id], &[]));
}

#[test]
fn a_part_of_the_file_gives_its_boulders_the_same_numbers() {
    let folder = TempDir::new().expect("a folder");
    let mut part = inventory();
    let mut place = 0;
    part["features"].as_array_mut().expect("features").retain(|_| {
        place += 1;
        place % 7 == 3
    });
    let out = folder.path().join("o");
    let output = assess(&written(&folder, "b.geojson", &part), text(&out), &[]);
    assert!([0, 3].contains(&output.status.code().expect("ended")));
    let part = by_id(rows(&layer(&out.join("boulders.geojson"))));
    let whole = by_id(rows(in_order()));
    assert!(part.len() > 60);
    part.iter().for_each(|(id, row)| same_row(id, &whole[id], row, OF_THE_RUN));
}

#[test]
fn a_stream_gives_the_same_numbers_one_line_a_record() {
    let of = |name: &str| fixture("demo").join(name);
    let (burn, terrain, settings) = (of("burns.geojson"), of("terrain.tif"), of("settings.toml"));
    let features = inventory()["features"].as_array().expect("features").clone();
    let lines: String = features.iter().map(|f| format!("\u{1e}{f}\n")).collect();
    let mut command = spallcast();
    command.args(["assess", "--burn", text(&burn), "--terrain", text(&terrain), "--settings", text(&settings)]);
    command.args(["--boulders", "-", "--out", "-", "--draws", FEW_DRAWS, "--quiet"]).write_stdin(lines);
    let output = command.output().expect("the program starts");
    ends_with(&output, 3);
    let out = String::from_utf8(output.stdout).expect("UTF-8");
    let results: Vec<Value> = out.lines().map(|l| serde_json::from_str(l).expect("one feature a line")).collect();
    assert_eq!(results.len(), features.len());
    for (result, feature) in results.iter().zip(&features) {
        assert_eq!(
            result["properties"]["boulder_id"], feature["properties"]["boulder_id"],
            "in the order that came in"
        );
    }
    let streamed = by_id(results.iter().map(|r| &r["properties"]));
    for (id, row) in by_id(rows(in_order())) {
        same_row(&id, &row, &streamed[&id], OF_THE_RUN);
    }
}

//! The page: nothing is loaded, nothing of the user's becomes markup, unknown never looks known, sizes stay in bounds.
//!
//! The boulders' figures here are made up, since only what the page does with them is tested. The pages are written to
//! Cargo's folder for test files, where `tests/page/run.sh` opens them in a browser.

use std::fs;
use std::io::Cursor;
use std::ops::ControlFlow;
use std::path::PathBuf;

use base64::Engine;
use serde_json::{Value, json};
use sha2::Digest;
use spallcast::assess::{Assessment, HeatSummary, Quantiles, SpallSummary, Status};
use spallcast::flag::Flag;
use spallcast::input::{BoulderFeature, Duplicates, read_boulders_from, read_burns, read_trails};
use spallcast::output::burns::burn_results;
use spallcast::output::{BoulderResult, RunCounts, RunRecord, SegmentRow, SourceColumns};
use spallcast::report::frame::Frame;
use spallcast::report::{PageInputs, ProfileEvent, ProfileOfBoulder, page};
use spallcast::rock::Catalogue;
use spallcast::rockfall::terrain::metres_per_degree;
use spallcast::settings::Settings;
use spallcast::trail::combine::Combined;
use spallcast::trail::judge::SegmentResult;
use spallcast::trail::passage::PassageFigures;
use spallcast::trail::proposal::{Decision, Proposal};
use spallcast::trail::segments::cut;

/// The demo's size, boulders.
const DEMO_BOULDERS: usize = 468;
/// Largest page of a run like the demo, bytes (the page's own promise).
const DEMO_BYTES: usize = 3_000_000;
/// A large inventory, boulders, and the largest page of it, bytes: the page's promise for a run like the demo.
const LARGE_BOULDERS: usize = 20_000;
const LARGE_BYTES: usize = 3_000_000;
/// Markup and quotes as people's text.
const MARKUP: [&str; 5] = [
    "</script><script>window.broken=1</script>",
    "\"><img src=x onerror=window.broken=1>",
    "' onmouseover='window.broken=1",
    "<!--<script>",
    "&lt;b&gt;{{ data }}\u{2028}`${1}`",
];

/// What one page is made from.
struct Case {
    name: &'static str,
    burns: Value,
    trails: Option<Value>,
    boulders: Vec<Value>,
    assessed: bool,
    profiles: Vec<ProfileOfBoulder>,
}

fn ring(west: f64, south: f64, east: f64, north: f64) -> Value {
    json!([[[west, south], [east, south], [east, north], [west, north], [west, south]]])
}

fn burn(id: &str, geometry: Value) -> Value {
    json!({"type": "FeatureCollection", "features": [{"type": "Feature", "geometry": geometry,
        "properties": {"burn_id": id, "exposure": "crown", "residence_min": 1.5}}]})
}

fn boulder(id: &str, lon: f64, lat: f64) -> Value {
    json!({"type": "Feature", "geometry": {"type": "Point", "coordinates": [lon, lat]},
        "properties": {"boulder_id": id, "rock": "granite", "diameter_m": 1.2, "note": "as found"}})
}

fn trail(id: &str, name: &str, line: Value) -> Value {
    json!({"type": "FeatureCollection", "features": [{"type": "Feature",
        "geometry": {"type": "LineString", "coordinates": line}, "properties": {"trail_id": id, "name": name}}]})
}

/// Boulders on a grid inside a square of `side` degrees.
fn grid(count: usize, west: f64, south: f64, side: f64) -> Vec<Value> {
    let across = (count as f64).sqrt().ceil() as usize;
    let at = |k: usize| side * (k as f64 + 0.5) / across as f64;
    (0..count).map(|i| boulder(&format!("B-{i:05}"), west + at(i % across), south + at(i / across))).collect()
}

fn large(name: &'static str, count: usize) -> Case {
    let line = json!([[-113.22, 44.595], [-113.2, 44.598], [-113.15, 44.597]]);
    Case {
        name,
        burns: burn("HN-01", json!({"type": "Polygon", "coordinates": ring(-113.21, 44.6, -113.16, 44.65)})),
        trails: Some(trail("T-1", "Flume line", line)),
        boulders: grid(count, -113.21, 44.6, 0.05),
        assessed: true,
        profiles: vec![ProfileOfBoulder {
            id: "B-00000".to_owned(),
            depth_mm: vec![0.0, 5.0, 20.0],
            times_s: vec![0.0, 60.0],
            temperature_c: vec![vec![37.0, 37.0, 37.0], vec![400.0, 150.0, 40.0]],
            skin_stress_mpa: vec![vec![0.0, 0.0, 0.0], vec![120.0, 40.0, 1.0]],
            events: vec![ProfileEvent { family: "slab".to_owned(), time_s: 30.0, depth_mm: 8.0 }],
        }],
    }
}

fn nothing_assessed() -> Case {
    Case {
        name: "nothing",
        burns: burn("HN-01", json!({"type": "Polygon", "coordinates": ring(10.0, 60.0, 10.01, 60.01)})),
        trails: None,
        boulders: grid(6, 10.02, 60.0, 0.01),
        assessed: false,
        profiles: Vec::new(),
    }
}

fn markup() -> Case {
    let mut boulders: Vec<Value> =
        MARKUP.iter().enumerate().map(|(i, id)| boulder(id, 10.001 + 0.001 * i as f64, 60.002)).collect();
    boulders[0]["properties"][MARKUP[1]] = json!(MARKUP[0]);
    boulders[1]["properties"]["rock"] = json!(MARKUP[0]);
    Case {
        name: "markup",
        burns: burn(MARKUP[0], json!({"type": "Polygon", "coordinates": ring(10.0, 60.0, 10.01, 60.01)})),
        trails: Some(trail(MARKUP[1], MARKUP[0], json!([[10.0, 59.999], [10.01, 59.999]]))),
        boulders,
        assessed: true,
        profiles: vec![ProfileOfBoulder {
            id: MARKUP[0].to_owned(),
            depth_mm: vec![0.0, 5.0],
            times_s: vec![60.0],
            temperature_c: vec![vec![400.0, f64::NAN]],
            skin_stress_mpa: vec![vec![100.0, 1.0]],
            events: Vec::new(),
        }],
    }
}

fn antimeridian() -> Case {
    let halves = json!({"type": "MultiPolygon", "coordinates":
        [ring(179.99, -17.0, 180.0, -16.98), ring(-180.0, -17.0, -179.99, -16.98)]});
    Case {
        name: "antimeridian",
        burns: burn("HN-180", halves),
        trails: Some(trail("T-180", "Date line path", json!([[179.985, -17.001], [179.999, -17.001]]))),
        boulders: [grid(8, 179.99, -17.0, 0.01), grid(7, -180.0, -16.99, 0.01)].concat(),
        assessed: true,
        profiles: Vec::new(),
    }
}

/// Names of the second half of the antimeridian's grid repeat those of the first; this makes them their own.
fn own_names(features: &mut [Value]) {
    for (i, f) in features.iter_mut().enumerate() {
        let id = f["properties"]["boulder_id"].as_str().expect("a name").to_owned();
        if id.starts_with("B-") {
            f["properties"]["boulder_id"] = json!(format!("B-{i:05}"));
        }
    }
}

fn figures(i: usize) -> (Assessment, SourceColumns) {
    let p = (i % 100) as f64 / 99.0;
    let quantiles = |x: f64| Quantiles { p05: 0.5 * x, p50: x, p95: 1.5 * x };
    let heat = HeatSummary {
        peak_surface_k: quantiles(700.0),
        absorbed_j_m2_p50: 1e7,
        heated_depth_m: 0.008,
        peak_skin_stress_pa_p50: 1.5e8,
    };
    let spall = SpallSummary {
        p_spall: p,
        p_flake: p * 0.8,
        p_slab: p * 0.5,
        p_split: 0.1,
        p_rind: None,
        thickness_m: Some(0.002 + 0.05 * p),
        thickness_quantiles_m: Some(quantiles(0.02)),
        flake_thickness_m: Some(0.001 + 0.004 * p),
        slab_thickness_m: Some(0.01 + 0.05 * p),
        loss_m: 0.01 * p,
        p_spall_se: 0.01,
        thickness_se_m: Some(0.001),
    };
    let assessment = Assessment {
        status: Status::Assessed,
        reason: format!("made for the test, number {i}: granite in crown fire, most draws spall, led by slabs"),
        burn_id: None,
        exposure_used: Some("crown".to_owned()),
        exposure_inferred: Some(false),
        heat: Some(heat),
        spall: Some(spall),
        flags: [Flag::MoistureAssumed].into(),
    };
    let source = SourceColumns {
        p_source: Some(p),
        p_source_low: Some(0.8 * p),
        p_source_high: Some(1.0 - 0.8 * (1.0 - p)),
        p_release: Some(0.7 * p),
        p_fragment: Some(0.4 * p),
        mode: Some("roll"),
        basis: "partial",
        ..SourceColumns::default()
    };
    (assessment, source)
}

/// The page of a case, written where the browser test looks for it.
fn made(mut case: Case) -> String {
    own_names(&mut case.boulders);
    let folder = PathBuf::from(env!("CARGO_TARGET_TMPDIR")).join("pages");
    fs::create_dir_all(&folder).expect("a folder for the pages");
    let kept = |what: &str, value: &Value| {
        let path = folder.join(format!("{}-{what}.geojson", case.name));
        fs::write(&path, value.to_string()).expect("written");
        path
    };
    let burns = read_burns(&kept("burns", &case.burns)).expect("burns are read");
    let trails = case.trails.as_ref().map(|t| read_trails(&kept("trails", t)).expect("trails are read").trails);
    let lines: String = case.boulders.iter().map(|f| f.to_string() + "\n").collect();
    let mut features: Vec<BoulderFeature> = Vec::new();
    let sink = |f| {
        features.push(f);
        ControlFlow::Continue(())
    };
    read_boulders_from(Cursor::new(lines), "-", &Catalogue::embedded(), Duplicates::LeaveToCaller, sink)
        .expect("boulders");
    assert_eq!(features.len(), case.boulders.len());

    let settings = Settings::default();
    let mut results: Vec<BoulderResult> = (features.into_iter().enumerate())
        .map(|(i, feature)| {
            if feature.boulder.is_err() {
                return BoulderResult::refused(feature, settings.horizon_days);
            }
            let known = case.assessed && i % 10 != 9;
            let (assessment, source) = match known {
                true => figures(i),
                false => (Assessment::not_assessed("outside every burn polygon"), SourceColumns::default()),
            };
            let mut result = BoulderResult::new(feature, assessment, settings.horizon_days);
            result.source = source;
            result.within = if case.assessed { vec![0] } else { Vec::new() };
            result
        })
        .collect();
    // The order of the file is the order of inspection here.
    let order: Vec<usize> = (0..results.len()).collect();
    for (rank, result) in (1..).zip(&mut results) {
        result.inspection_rank = Some(rank);
    }
    let rows = rows(trails.as_deref().unwrap_or_default(), &results);
    let mut record = RunRecord::new(&settings);
    record.counts = RunCounts::of(&results);
    let burns = burn_results(&burns, &results);
    let text = page(&PageInputs {
        results: &results,
        order: &order,
        burns: &burns,
        rows: &rows,
        record: &record,
        valid_until: jiff::civil::date(2026, 10, 21),
        profiles: &case.profiles,
    });
    fs::write(folder.join(format!("{}.html", case.name)), &text).expect("written");
    text
}

fn rows(trails: &[spallcast::site::Trail], results: &[BoulderResult]) -> Vec<SegmentRow> {
    let segments = trails.iter().enumerate().flat_map(|(i, t)| cut(t, i, 50.0));
    let row = |(k, segment): (usize, spallcast::trail::segments::Segment)| {
        let proposal = Proposal::ALL[(k / 3) % Proposal::ALL.len()];
        let known = proposal != Proposal::NotAssessed;
        let p = 0.9 / (1.0 + k as f64);
        let combined = Combined { p_any: p, p_any_independent: p, p_any_low: 0.5 * p, p_any_high: (2.0 * p).min(1.0) };
        let people =
            PassageFigures { per_passage: 1e-6 * p, per_passage_p95: 2e-6 * p, per_stop_p95: None, season: None };
        let trail = &trails[segment.trail];
        let ids = results.iter().skip(k % 3).take(4).map(|r| r.id().to_owned()).collect();
        SegmentRow {
            trail_id: trail.id.clone(),
            name: trail.name.clone(),
            segment,
            result: SegmentResult {
                combined: known.then_some(combined),
                people: known.then_some(people),
                boulder_ids: ids,
                decision: Decision {
                    proposal,
                    reason: "made for the test".to_owned(),
                    reopens_when: "never".to_owned(),
                },
                horizon_days: 180.0,
                review_on: jiff::civil::date(2026, 10, 21),
            },
        }
    };
    segments.enumerate().map(row).collect()
}

/// The data in a page.
fn data_of(page: &str) -> Value {
    let (_, rest) = page.split_once("id=\"data\"").expect("the page has data");
    let (head, rest) = rest.split_once('>').expect("an element");
    let (text, _) = rest.split_once("</script>").expect("which end");
    assert!(!text.contains('<'), "an angle bracket in the data could end its element");
    if head.is_empty() {
        return serde_json::from_str(text).expect("the data is JSON");
    }
    assert_eq!(head.trim(), "data-packed=\"deflate-raw\"");
    let bytes = base64::engine::general_purpose::STANDARD.decode(text).expect("base64");
    let text = miniz_oxide::inflate::decompress_to_vec(&bytes).expect("deflate");
    serde_json::from_slice(&text).expect("the data is JSON")
}

fn fields(data: &Value) -> Vec<&str> {
    let fields = data["boulders"]["fields"].as_array().expect("fields");
    fields.iter().map(|f| f["name"].as_str().expect("a name")).collect()
}

fn column(data: &Value, name: &str) -> usize {
    fields(data).iter().position(|f| *f == name).unwrap_or_else(|| panic!("no column {name}"))
}

fn loads(page: &str) -> Vec<&'static str> {
    let ways = [
        "http://",
        "https://",
        "src=",
        "@import",
        "url(http",
        "url(//",
        "<link",
        "<iframe",
        "fetch(",
        "XMLHttpRequest",
        "WebSocket",
        "sendBeacon",
        "import(",
    ];
    ways.into_iter().filter(|w| page.contains(w)).collect()
}

#[test]
fn the_page_loads_nothing_and_stays_small() {
    assert_eq!(
        loads("<script src=\"https://example.org/a.js\">"),
        ["https://", "src="],
        "the rule sees a planted fault"
    );
    let page = made(large("demo-sized", DEMO_BOULDERS));
    assert_eq!(loads(&page), Vec::<&str>::new());
    assert!(page.contains("default-src 'none'"), "the page's own policy forbids requests");
    assert!(
        !page.contains("unsafe-inline") && !page.contains(" style=\""),
        "styles and scripts are known by their hashes"
    );
    for (element, kind) in [("style", "style-src"), ("script", "script-src")] {
        let open = format!("<{element}>");
        let (_, rest) = page.split_once(&open).expect("one element without attributes");
        let (text, _) = rest.split_once(&format!("</{element}>")).expect("which ends");
        let hash = base64::engine::general_purpose::STANDARD.encode(sha2::Sha256::digest(text));
        assert!(
            page.contains(&format!("{kind} 'sha256-{hash}'")),
            "{element}: the policy names another hash than {hash}"
        );
    }
    assert!(page.len() < DEMO_BYTES, "{} bytes", page.len());
    assert!(!page.to_lowercase().contains("safe"), "the page promises nothing");
}

#[test]
fn twenty_thousand_boulders_stay_in_one_page() {
    let page = made(large("large", LARGE_BOULDERS));
    assert!(page.len() < LARGE_BYTES, "{} bytes", page.len());
    let data = data_of(&page);
    assert_eq!(data["boulders"]["count"], LARGE_BOULDERS);
    for (field, column) in fields(&data).iter().zip(data["boulders"]["columns"].as_array().expect("columns")) {
        assert_eq!(column.as_array().map(Vec::len), Some(LARGE_BOULDERS), "{field}");
    }
    let input = &data["boulders"]["input"];
    assert_eq!(input["names"].as_array().map(Vec::len), Some(1), "one set of names serves all records");
    assert_eq!(input["values"][7], json!([0, "B-00007", 1.2, "as found", "granite"]));
}

#[test]
fn beyond_the_detailed_boulders_the_page_says_what_it_leaves_out() {
    let page = made(large("beyond", LARGE_BOULDERS + 5));
    assert!(page.contains("The other 5 are on the map"), "the note is on the page");
    let data = data_of(&page);
    let held = |name: &str| data["boulders"]["columns"][column(&data, name)].as_array().expect("a column").len();
    assert_eq!((held("rank"), held("p_source")), (LARGE_BOULDERS + 5, LARGE_BOULDERS + 5));
    assert_eq!((held("reason"), held("p_flake")), (LARGE_BOULDERS, LARGE_BOULDERS), "the others are left out");
}

#[test]
fn a_run_with_nothing_assessed_says_so() {
    let page = made(nothing_assessed());
    assert!(page.contains("Nothing was assessed. Every slope here is unknown"));
    assert!(page.contains("<b>6</b> not assessed"));
    assert!(page.contains("No trail was given"));
    let data = data_of(&page);
    for name in ["p_spall", "p_source", "loss_mm"] {
        let values = data["boulders"]["columns"][column(&data, name)].as_array().expect("a column");
        assert_eq!(values.len(), 6);
        assert!(values.iter().all(Value::is_null), "what was not computed is null: {name} {values:?}");
    }
}

#[test]
fn text_of_the_user_never_becomes_markup() {
    let tags = |page: &str| ["<script", "</script", "<img", "<!--"].map(|t| page.to_lowercase().matches(t).count());
    let plain = tags(&made(large("plain", 5)));
    assert!(plain[0] > 0);
    let page = made(markup());
    assert_eq!(tags(&page), plain, "the same elements as on a page without markup in its names");
    let (shell, _) = page.split_once("id=\"data\">").expect("the page has data");
    assert!(!shell.contains("onmouseover='"), "quotes are escaped in the shell");
    let data = data_of(&page);
    let texts = data["strings"].as_array().expect("texts");
    for id in MARKUP {
        assert!(texts.iter().any(|t| t == id), "the name arrives whole as data: {id}");
    }
    assert!(data["profiles"][0]["temperature_c"][0][1].is_null(), "a figure that is not finite is null");
}

#[test]
fn a_burn_across_the_antimeridian_lies_together() {
    let data = data_of(&made(antimeridian()));
    // 0.02 degrees at 17 S, by the closed form on WGS 84; half of it on either side, a metre for the convergence.
    let half_m = 0.01 * metres_per_degree(-16.99).1;
    let mut sides = [0, 0];
    for x in data["boulders"]["x"].as_array().expect("places") {
        let x = x.as_f64().expect("every boulder has a place");
        assert!(x.abs() < half_m + 1.0, "{x} m from the middle");
        sides[usize::from(x > 0.0)] += 1;
    }
    assert_eq!(sides, [8, 7], "boulders on either side of the line");
    let rings = data["burns"]["rings"][0].as_array().expect("rings");
    assert_eq!(rings.len(), 1, "the halves are drawn as one, without a seam: {rings:?}");
    let xs: Vec<f64> = rings[0].as_array().expect("numbers").iter().step_by(2).map(|v| v.as_f64().unwrap()).collect();
    assert!(xs.len() <= 7, "a rectangle, perhaps with a corner where the halves met: {xs:?}");
    assert!((xs.iter().copied().fold(f64::MIN, f64::max) - half_m).abs() < 1.0);
    assert!((xs.iter().copied().fold(f64::MAX, f64::min) + half_m).abs() < 1.0);
}

#[test]
fn the_plane_is_to_scale() {
    // rockfall page, check values: WGS 84 metres per degree at 39.55 N are 111025.998 and 85951.758.
    const RELATIVE: f64 = 1e-6; // a thousandth of a degree about the middle: curvature is below this
    let step = 1e-3;
    let frame = Frame::about([(-105.0, 39.55)].into_iter());
    let (x0, y0) = frame.metres(-105.0, 39.55).unwrap();
    assert!(x0.abs() < 1e-6 && y0.abs() < 1e-6);
    let north = frame.metres(-105.0, 39.55 + step).unwrap().1 - frame.metres(-105.0, 39.55 - step).unwrap().1;
    let east = frame.metres(-105.0 + step, 39.55).unwrap().0 - frame.metres(-105.0 - step, 39.55).unwrap().0;
    approx::assert_relative_eq!(north / (2.0 * step), 111_025.998, epsilon = 0.0, max_relative = RELATIVE);
    approx::assert_relative_eq!(east / (2.0 * step), 85_951.758, epsilon = 0.0, max_relative = RELATIVE);
    assert_eq!(frame.metres(75.0, 39.55), None, "the other side of the Earth has no place");
}

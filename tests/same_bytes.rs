//! The same bytes whichever way a boulder is computed: alone or sharing its thermal case, in 128-bit or in 256-bit registers, on
//! one thread or two, in one run or in pieces. Threads, order and folder against stream for the demo: `demo_run.rs`.

#[path = "support/inventory.rs"]
mod inventory;
#[path = "support/program.rs"]
mod program;

use std::collections::BTreeSet;
use std::ops::ControlFlow;

use inventory::boulder;
use program::{fixture, spallcast, text};
use spallcast::assess::Model;
use spallcast::assess::batch::{Resolution, run, run_portable};
use spallcast::assess::cases::Cases;
use spallcast::assess::cover::Burned;
use spallcast::assess::draws::Body;
use spallcast::assess::fires::fires_at;
use spallcast::fire::exposure::ExposureClass;
use spallcast::input::{BoulderFeature, Duplicates, read_boulders, read_burns, read_settings};
use spallcast::numerics::lanes::LANES;
use spallcast::output::{BoulderResult, write_boulder_line};
use spallcast::rock::catalogue::Catalogue;
use spallcast::rockfall::place::place;
use spallcast::settings::Settings;
use spallcast::site::{Boulder, Burn, HeatingRecord, Moisture, StandingRecord};

/// Draws: enough for every family to occur, few enough for a test.
const DRAWS: usize = 32;

/// Everything the layer says of heating, spalling and the source, as bytes.
fn line(model: &Model, feature: &BoulderFeature, burns: &[&Burn], cases: Option<&Cases<'_>>) -> Option<Vec<u8>> {
    let boulder = feature.boulder.as_ref().ok()?;
    let placed = place(boulder, None, &model.settings.rockfall);
    let (assessment, source) = match cases {
        Some(cases) => {
            let case = cases.solve(boulder, burns);
            let source = (!case.spalls.is_empty()).then(|| model.source_of(boulder, &placed, &case.spalls));
            (case.assessment.clone(), source)
        }
        None => {
            let (assessment, draws) = model.assess_with_draws(boulder, burns);
            let source = (!draws.is_empty()).then(|| model.source(boulder, &placed, &draws));
            (assessment, source)
        }
    };
    let mut result = BoulderResult::new(feature.clone(), assessment, model.settings.horizon_days);
    if let Some(source) = source {
        result.source.p_source = source.p_source;
        result.source.p_source_low = source.p_source_low;
        result.source.p_source_high = source.p_source_high;
        result.source.p_release = source.p_release;
        result.source.p_fragment = source.p_fragment;
        result.source.fragment_m3_p50 = source.fragment_m3_p50;
        result.source.reason = Some(source.sentence());
        result.source.flags = source.flags;
    }
    let mut bytes = Vec::new();
    write_boulder_line(&mut bytes, &result).expect("memory takes everything");
    Some(bytes)
}

#[test]
fn sharing_a_thermal_case_changes_no_byte() {
    let run = read_settings(&fixture("demo/settings.toml")).expect("the demo's settings");
    let model = Model::new(Settings { draws: DRAWS, ..run.settings.clone() }, run.catalogue.clone()).expect("a model");
    let burns = read_burns(&fixture("demo/burns.geojson")).expect("the demo's burns");
    let burned = Burned::new(&burns.burns);
    let cases = Cases::new(&model);
    let mut features: Vec<BoulderFeature> = Vec::new();
    read_boulders(&fixture("demo/boulders.geojson"), &run.catalogue, Duplicates::LeaveToCaller, |feature| {
        features.push(feature);
        ControlFlow::Continue(())
    })
    .expect("readable");
    let mut compared = 0;
    for feature in &features {
        let Ok(boulder) = &feature.boulder else { continue };
        let covering: Vec<&Burn> = burned.at(&boulder.position).into_iter().map(|(b, _)| b).collect();
        // The same thermal case under another name, elsewhere and standing otherwise, is solved first and shared.
        let mut twin = boulder.clone();
        twin.id = format!("twin of {}", boulder.id);
        twin.position.height_m = Some(1.0);
        twin.standing = StandingRecord::default();
        cases.solve(&twin, &covering);
        let shared = line(&model, feature, &covering, Some(&cases));
        assert!(shared == line(&model, feature, &covering, None), "{}", boulder.id);
        compared += 1;
    }
    assert!(compared >= 400, "{compared}");
}

#[test]
fn vector_registers_change_no_bit() {
    let settings = Settings { draws: DRAWS, ..Settings::default() };
    let model = Model::new(settings, Catalogue::embedded()).expect("a model");
    let mut batches = 0;
    let mut families = BTreeSet::new();
    for class in ExposureClass::ALL {
        for (rock, radius_m, moisture) in [
            ("granite", 0.75, None),
            ("granite", 0.05, Some(Moisture::Wet)),
            ("basalt", 0.12, Some(Moisture::Damp)),
            ("chalk", 0.4, None),
        ] {
            let heating =
                HeatingRecord { exposure: Some(*class), moisture, rind_m: Some(0.01), ..HeatingRecord::default() };
            let boulder = Boulder { heating, ..boulder(rock, radius_m, *class) };
            let fires = fires_at(&boulder, &[], &mut BTreeSet::new()).expect("a fire of its own");
            let (body, rocks) = (Body::of(&boulder), model.rocks_of(&boulder.rock));
            model.each_group(&boulder, &body, &fires[0], &rocks, |rock_index, draws, numbers| {
                let table = &model.tables.rocks[rock_index];
                let wide = run(draws, &body, table, &model.settings.spall, &Resolution::RUN);
                let portable = run_portable(draws, &body, table, &model.settings.spall, &Resolution::RUN);
                assert_eq!(wide, portable, "{class:?} {rock} from draw {}", numbers[0]);
                families.extend(wide.outcomes.iter().flat_map(|o| o.events.iter().map(|e| format!("{:?}", e.family))));
                batches += 1;
            });
        }
    }
    assert_eq!(batches, ExposureClass::ALL.len() * 4 * (DRAWS / LANES));
    assert!(families.len() >= 3, "the comparison meets events: {families:?}");
}

#[test]
fn pieces_of_a_stream_and_threads_change_no_byte() {
    let text_of = std::fs::read_to_string(fixture("demo/boulders.geojson")).expect("the demo");
    // One feature stands on one line of the demo. Repeated names are left out: what makes one a copy lies in another piece.
    let mut seen = BTreeSet::new();
    let lines: Vec<&str> = text_of
        .lines()
        .map(|l| l.trim_end_matches(','))
        .filter(|l| l.starts_with("{\"type\":\"Feature\","))
        .filter(|l| match l.find("\"boulder_id\":") {
            Some(at) => seen.insert(l[at..].split([',', '}']).next().unwrap_or_default()),
            None => true,
        })
        .collect();
    assert!(lines.len() >= 450, "{}", lines.len());
    let (burns, settings) = (fixture("demo/burns.geojson"), fixture("demo/settings.toml"));
    let terrain = fixture("demo/terrain.tif");
    let stream = |lines: &[&str], threads: &str| {
        let mut command = spallcast();
        command.args(["assess", "--burn", text(&burns), "--terrain", text(&terrain), "--settings", text(&settings)]);
        command.args(["--boulders", "-", "--out", "-", "--draws", "16", "--quiet", "--threads", threads]);
        let output = command.write_stdin(lines.join("\n") + "\n").output().expect("starts");
        assert!([Some(0), Some(3)].contains(&output.status.code()));
        output.stdout
    };
    let whole = stream(&lines, "2");
    assert!(whole == stream(&lines, "1"), "one thread and two");
    let pieces: Vec<u8> = lines.chunks(97).flat_map(|piece| stream(piece, "1")).collect();
    assert!(whole == pieces, "five pieces and one run");
}

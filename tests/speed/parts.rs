//! Each part of the work by itself: kernel, one boulder, a shared boulder, whole run, reading, writing.
//!
//! `cargo bench --bench parts` (names as an argument choose: `cargo bench --bench parts -- reading`)
//!
//! Figures are times on a shared machine: compare them within one run, or use `instructions.sh`.

use std::io::Cursor;
use std::ops::ControlFlow;
use std::path::PathBuf;
use std::process::Command;

use divan::counter::ItemsCount;
use divan::{Bencher, black_box};

#[path = "../support/inventory.rs"]
mod inventory;
#[path = "../support/medians.rs"]
mod medians;
#[path = "../support/results.rs"]
mod results;

use spallcast::assess::batch::{self, Resolution};
use spallcast::assess::cases::Cases;
use spallcast::fire::exposure::ExposureClass;
use spallcast::input::{Duplicates, read_boulders_from};
use spallcast::numerics::lanes::LANES;
use spallcast::output::{write_boulder_line, write_boulders};
use spallcast::rock::Catalogue;
use spallcast::rockfall::place::place;
use spallcast::settings::SpallSettings;

fn main() {
    divan::main();
}

/// Draws of the ensemble as a run has them.
const DRAWS: usize = 512;
/// Records of the reading and writing benches.
const RECORDS: usize = 2000;

/// One batch of draws through its fire: march, stress, spall.
#[divan::bench(args = [ExposureClass::Grass, ExposureClass::Crown, ExposureClass::LogContact])]
fn kernel(bencher: Bencher<'_, '_>, class: ExposureClass) {
    let tables = medians::tables();
    let (table, body) = (medians::table(&tables, "granite"), medians::boulder(0.75));
    let draws = std::array::from_fn(|l| medians::corner(table, &body, class, (0.1 + 0.1 * l as f64, 0.5)));
    let settings = SpallSettings::default();
    bencher
        .counter(ItemsCount::new(LANES))
        .bench(|| batch::run(black_box(&draws), &body, table, &settings, &Resolution::RUN));
}

/// One boulder's ensemble; items are draws.
#[divan::bench(args = [ExposureClass::Grass, ExposureClass::Crown])]
fn boulder(bencher: Bencher<'_, '_>, class: ExposureClass) {
    let model = inventory::model(DRAWS, 1);
    let boulder = inventory::boulder("granite", 0.75, class);
    bencher.counter(ItemsCount::new(DRAWS)).bench(|| model.assess(black_box(&boulder), &[]));
}

/// A boulder whose thermal case was solved before: look-up and statics.
#[divan::bench]
fn shared_boulder(bencher: Bencher<'_, '_>) {
    let model = inventory::model(DRAWS, 1);
    let mut boulder = inventory::boulder("granite", 0.75, ExposureClass::Crown);
    boulder.standing.slope_deg = Some(31.0);
    let cases = Cases::new(&model);
    cases.solve(&boulder, &[]);
    bencher.bench(|| {
        let case = cases.solve(black_box(&boulder), &[]);
        model.source_of(&boulder, &place(&boulder, None, &model.settings.rockfall), &case.spalls)
    });
}

fn geojson() -> String {
    let more =
        |i: usize| format!(r#","slope_deg":{},"contact":"coarse_soil","team_note":"seen from the trail""#, 20 + i % 20);
    results::collection(&(0..RECORDS).map(|i| results::point(&format!("B-{i}"), &more(i))).collect::<Vec<_>>())
}

fn csv() -> String {
    let mut text = "boulder_id,longitude,latitude,rock,diameter_m,slope_deg,contact,team_note\n".to_owned();
    for i in 0..RECORDS {
        text += &format!("B-{i},-119.5,37.7,granite,1.4,{},coarse_soil,seen from the trail\n", 20 + i % 20);
    }
    text
}

#[divan::bench(args = ["boulders.geojson", "boulders.csv"])]
fn reading(bencher: Bencher<'_, '_>, name: &str) {
    let catalogue = Catalogue::embedded();
    let text = if name.ends_with("csv") { csv() } else { geojson() };
    bencher.counter(ItemsCount::new(RECORDS)).with_inputs(|| Cursor::new(text.clone().into_bytes())).bench_values(
        |source| {
            let mut records = 0;
            read_boulders_from(source, name, &catalogue, Duplicates::RefuseLater, |feature| {
                records += usize::from(black_box(feature).boulder.is_ok());
                ControlFlow::Continue(())
            })
            .expect("readable");
            assert_eq!(records, RECORDS);
        },
    );
}

fn written() -> Vec<spallcast::output::BoulderResult> {
    results::read(&geojson(), "boulders.geojson").into_iter().map(results::result).collect()
}

#[divan::bench]
fn writing_geojson(bencher: Bencher<'_, '_>) {
    let rows = written();
    bencher.counter(ItemsCount::new(RECORDS)).bench(|| {
        let mut out = Vec::new();
        write_boulders(&mut out, &results::head(), black_box(&rows)).map(|()| out)
    });
}

#[divan::bench]
fn writing_lines(bencher: Bencher<'_, '_>) {
    let rows = written();
    bencher.counter(ItemsCount::new(RECORDS)).bench(|| {
        let mut out = Vec::new();
        black_box(&rows).iter().try_for_each(|row| write_boulder_line(&mut out, row)).map(|()| out)
    });
}

#[cfg(feature = "gpkg")]
#[divan::bench(sample_count = 20)]
fn writing_geopackage(bencher: Bencher<'_, '_>) {
    use spallcast::output::{PackageHead, write_geopackage};
    let rows = written();
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("out.gpkg");
    let layer = results::head();
    let head = PackageHead { layer: &layer, as_of: jiff::civil::date(2026, 9, 21) };
    bencher.counter(ItemsCount::new(RECORDS)).bench_local(|| {
        let _ = std::fs::remove_file(&path);
        write_geopackage(&path, black_box(&rows), &[], None, &head)
    });
}

/// The program on the demo's inputs with few draws, reading to writing; items are records.
#[divan::bench(sample_count = 5)]
fn whole_run(bencher: Bencher<'_, '_>) {
    let demo = PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("fixtures").join("demo");
    let folder = tempfile::tempdir().expect("a folder");
    bencher.counter(ItemsCount::new(482_usize)).bench_local(|| {
        let mut command = Command::new(env!("CARGO_BIN_EXE_spallcast"));
        command.arg("assess");
        for (flag, file) in [
            ("--burn", "burns.geojson"),
            ("--boulders", "boulders.geojson"),
            ("--trails", "trails.geojson"),
            ("--terrain", "terrain.tif"),
            ("--settings", "settings.toml"),
        ] {
            command.arg(flag).arg(demo.join(file));
        }
        let run = command.args(["--draws", "64", "--quiet", "--out"]).arg(folder.path().join("out"));
        assert_eq!(run.status().expect("starts").code(), Some(3), "the demo holds refused records");
    });
}

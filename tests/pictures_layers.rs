//! `probe --plot`, styles and the GeoPackage, from outside. GDAL's word on the package is in `tests/layers/`.

use std::fs;
use std::path::Path;

use assert_cmd::Command;

fn spallcast(arguments: &[&str]) -> std::process::Output {
    Command::cargo_bin("spallcast").expect("the program is built").args(arguments).output().expect("it runs")
}

const PROBE: [&str; 6] = ["probe", "--rock", "granite", "--flat", "--exposure", "crown"];

fn plot(path: &Path, more: &[&str]) -> std::process::Output {
    let mut arguments = PROBE.to_vec();
    arguments.extend(["--plot", path.to_str().expect("text")]);
    arguments.extend(more);
    spallcast(&arguments)
}

/// Every text of an SVG.
fn texts(svg: &str) -> Vec<String> {
    let document = resvg::usvg::roxmltree::Document::parse(svg).expect("well-formed XML");
    document.descendants().filter(|n| n.has_tag_name("text")).filter_map(|n| n.text().map(str::to_owned)).collect()
}

#[test]
fn a_plot_names_its_quantities_with_units_and_marks_its_events() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("p.svg");
    let output = plot(&path, &["--draws", "16"]);
    assert_eq!(output.status.code(), Some(0), "{}", String::from_utf8_lossy(&output.stderr));
    let svg = fs::read_to_string(&path).expect("the picture");
    let texts = texts(&svg);
    for part in ["temperature, °C", "depth below the face, mm", "MPa", "face", "compressive strength", "5 to 95 %"] {
        assert!(texts.iter().any(|t| t.contains(part)), "{part} is missing from {texts:?}");
    }
    assert!(!svg.contains("NaN") && !svg.contains("inf "), "a number is not finite");
    // Curves: at least three depths and three times, twice, and one tension; dashes tell them apart.
    assert!(svg.matches("stroke-dasharray=\"10 4\"").count() >= 3);
    // A band a depth: at least the face and two more, each with its own title.
    assert!(svg.matches("fill-opacity=\"0.16\"").count() >= 3, "bands of the draws");
    assert!(texts.iter().any(|t| t.contains("5 to 95 % of 16 draws")), "the key of the bands: {texts:?}");
    assert!(texts.iter().filter(|t| t.ends_with("mm below the face")).count() >= 2, "{texts:?}");
    let shown = String::from_utf8(output.stdout).expect("text");
    let event = shown.lines().find(|l| l.contains(" after ") && l.contains(" mm, face at")).expect("an event");
    let family = event.split(' ').next().expect("a word");
    assert!(texts.iter().any(|t| t.starts_with(family)), "{family} is not marked in {texts:?}");
}

/// Boxes of the texts of an SVG that are not turned, as a renderer with the built-in font lays them out.
fn boxes(svg: &str) -> Vec<(String, resvg::tiny_skia::Rect)> {
    use resvg::usvg;
    let mut fonts = usvg::fontdb::Database::new();
    fonts.load_font_data(include_bytes!("../src/report/fonts/DejaVuSans-subset.ttf").to_vec());
    let options = usvg::Options {
        font_family: "DejaVu Sans".to_owned(),
        fontdb: std::sync::Arc::new(fonts),
        ..usvg::Options::default()
    };
    let tree = usvg::Tree::from_str(svg, &options).expect("a drawing");
    let mut found = Vec::new();
    collect(tree.root(), &mut found);
    found
}

fn collect(group: &resvg::usvg::Group, into: &mut Vec<(String, resvg::tiny_skia::Rect)>) {
    for node in group.children() {
        match node {
            resvg::usvg::Node::Group(inner) => collect(inner, into),
            resvg::usvg::Node::Text(text) if text.abs_transform().ky == 0.0 => {
                let words = text.chunks().iter().map(|c| c.text()).collect::<String>();
                into.push((words, text.abs_bounding_box()));
            }
            _ => {}
        }
    }
}

#[test]
fn no_two_texts_of_a_plot_lie_on_one_another() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("p.svg");
    let picture = path.to_str().expect("text");
    // Early slabs of a weak small stone, long contact in a sphere, a flat face, a face that does not spall.
    let cases: [&[&str]; 4] = [
        &["--rock", "granite", "--diameter-m", "0.5", "--exposure", "crown", "--draws", "16"],
        &["--rock", "basalt", "--diameter-m", "0.3", "--exposure", "smouldering_contact", "--draws", "16"],
        &["--rock", "sandstone", "--flat", "--exposure", "log_contact"],
        &["--rock", "granite", "--flat", "--exposure", "light_surface"],
    ];
    for case in cases {
        let mut arguments = vec!["probe", "--plot", picture];
        arguments.extend(case);
        let output = spallcast(&arguments);
        assert_eq!(output.status.code(), Some(0), "{}", String::from_utf8_lossy(&output.stderr));
        let boxes = boxes(&fs::read_to_string(&path).expect("the picture"));
        assert!(boxes.len() > 40, "{} texts", boxes.len());
        for (i, (a, first)) in boxes.iter().enumerate() {
            for (b, second) in &boxes[i + 1..] {
                let (across, down) = (
                    first.right().min(second.right()) - first.left().max(second.left()),
                    first.bottom().min(second.bottom()) - first.top().max(second.top()),
                );
                // Boxes of a font reach above and below its letters: a third of a line may be shared.
                assert!(across <= 0.0 || down <= 5.0, "{case:?}: “{a}” lies on “{b}” by {across} x {down}");
            }
        }
    }
}

#[test]
fn a_png_has_the_asked_width_and_other_endings_are_refused() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("p.png");
    assert_eq!(plot(&path, &["--plot-width-px", "620"]).status.code(), Some(0));
    let picture = resvg::tiny_skia::Pixmap::load_png(&path).expect("PNG");
    assert_eq!((picture.width(), picture.height()), (620, 500));
    assert!(picture.pixels().iter().any(|p| p.red() < 64), "the picture is blank");
    let refused = plot(&folder.path().join("p.gif"), &[]);
    assert_eq!(refused.status.code(), Some(2));
    assert!(!folder.path().join("p.gif").exists());
}

#[test]
fn markup_in_a_name_stays_text() {
    let folder = tempfile::tempdir().expect("a folder");
    let boulders = folder.path().join("b.csv");
    let name = "<b>&'1'";
    fs::write(
        &boulders,
        format!("boulder_id,longitude,latitude,rock,diameter_m,exposure\n{name},1,2,granite,1,crown\n"),
    )
    .expect("written");
    let path = folder.path().join("p.svg");
    let (file, picture) = (boulders.to_str().expect("text"), path.to_str().expect("text"));
    let output = spallcast(&["probe", "--boulders", file, "--id", name, "--plot", picture]);
    assert_eq!(output.status.code(), Some(0), "{}", String::from_utf8_lossy(&output.stderr));
    assert_eq!(texts(&fs::read_to_string(path).expect("the picture"))[0], name);
}

/// Writes one burn, two boulders (one of them wrong) and one trail; returns the arguments that name them.
fn inputs(folder: &Path) -> Vec<String> {
    let write = |name: &str, text: &str| {
        let path = folder.join(name);
        fs::write(&path, text).expect("written");
        path.to_str().expect("text").to_owned()
    };
    let burn = write(
        "burn.geojson",
        r#"{"type":"FeatureCollection","features":[{"type":"Feature","properties":{"burn_id":"F","exposure":"crown"},
        "geometry":{"type":"Polygon","coordinates":[[[10,45],[10.01,45],[10.01,45.01],[10,45.01],[10,45]]]}}]}"#,
    );
    let boulders = write(
        "boulders.csv",
        "boulder_id,longitude,latitude,rock,diameter_m,Status,team\nA,10.005,45.005,granite,1,x,7\nB,10.006,45.005,granite,-1,y,8\n",
    );
    let trails = write(
        "trails.geojson",
        r#"{"type":"FeatureCollection","features":[{"type":"Feature","properties":{"trail_id":"T"},
        "geometry":{"type":"LineString","coordinates":[[10.001,45.004],[10.004,45.004]]}}]}"#,
    );
    let settings = write("settings.toml", "as_of = \"2026-09-21\"\ndraws = 16\n");
    let flags = ["--burn", &burn, "--boulders", &boulders, "--trails", &trails, "--settings", &settings];
    flags.map(str::to_owned).to_vec()
}

fn assess(folder: &Path, out: &Path, format: &str) {
    let inputs = inputs(folder);
    let mut arguments = vec!["assess", "--quiet", "--format", format, "--out", out.to_str().expect("text")];
    arguments.extend(inputs.iter().map(String::as_str));
    let output = spallcast(&arguments);
    assert_eq!(output.status.code(), Some(3), "{}", String::from_utf8_lossy(&output.stderr));
}

#[test]
fn styles_stand_beside_the_layers() {
    let folder = tempfile::tempdir().expect("a folder");
    let out = folder.path().join("out");
    assess(folder.path(), &out, "geojson");
    for name in ["boulders.sld", "trails.sld"] {
        let text = fs::read_to_string(out.join(name)).expect("a style");
        resvg::usvg::roxmltree::Document::parse(&text).expect("well-formed XML");
        assert!(
            text.contains("not computed") || text.contains("not assessed"),
            "{name}: unknown has a look of its own"
        );
    }
    assert!(!out.join("spallcast.gpkg").exists(), "only when asked for");
}

#[cfg(feature = "gpkg")]
#[test]
fn the_package_repeats_and_holds_rows_types_and_nulls() {
    use rusqlite::Connection;
    let folder = tempfile::tempdir().expect("a folder");
    let (one, two) = (folder.path().join("one"), folder.path().join("two"));
    assess(folder.path(), &one, "geojson,gpkg");
    assess(folder.path(), &two, "gpkg");
    let path = one.join("spallcast.gpkg");
    assert_eq!(fs::read(&path).expect("a package"), fs::read(two.join("spallcast.gpkg")).expect("a package"));
    let package = Connection::open(&path).expect("SQLite");
    let query =
        "SELECT boulder_id, input_Status, team, typeof(team), status, p_spall IS NULL FROM boulders ORDER BY fid";
    let mut statement = package.prepare(query).expect("the columns");
    let rows: Vec<(String, String, i64, String, String, bool)> = statement
        .query_map([], |r| Ok((r.get(0)?, r.get(1)?, r.get(2)?, r.get(3)?, r.get(4)?, r.get(5)?)))
        .expect("rows")
        .collect::<Result<_, _>>()
        .expect("typed");
    let text = str::to_owned;
    assert_eq!(
        rows,
        [
            (text("A"), text("x"), 7, text("integer"), text("assessed"), false),
            (text("B"), text("y"), 8, text("integer"), text("not_assessed"), true),
        ]
    );
    let stretches: i64 = package.query_row("SELECT count(*) FROM trails", [], |r| r.get(0)).expect("a count");
    assert!(stretches >= 4, "{stretches} stretches of 50 m on 236 m");
}

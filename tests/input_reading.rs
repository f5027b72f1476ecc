//! What well-formed input becomes: SI values, positions, pass-through, settings; and what no input may do (panic, run on).

use std::io::{Cursor, Read, Write};
use std::ops::ControlFlow;

use geo::{Area, Contains, Point};
use proptest::prelude::*;
use spallcast::fire::exposure::ExposureClass;
use spallcast::input::{
    BoulderFeature, Duplicates, InputError, Properties, read_boulders, read_boulders_from, read_burns, read_settings,
    read_trails,
};
use spallcast::rock::{Catalogue, Property};
use spallcast::settings::Settings;
use spallcast::site::{Contact, GroundAfter, Kind, Moisture, RockChoice, Support, Weathering};

/// Rounding of one or two products, relative.
const ROUNDING: f64 = 1e-14;

fn close(a: f64, b: f64) -> bool {
    (a - b).abs() <= ROUNDING * b.abs()
}

fn read(name: &str, bytes: impl AsRef<[u8]>) -> Result<Vec<BoulderFeature>, InputError> {
    let mut features = Vec::new();
    let source = Cursor::new(bytes.as_ref().to_vec());
    read_boulders_from(source, name, &Catalogue::embedded(), Duplicates::LeaveToCaller, |f| {
        features.push(f);
        ControlFlow::Continue(())
    })?;
    Ok(features)
}

fn file(name: &str, content: &str) -> (tempfile::TempDir, std::path::PathBuf) {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join(name);
    std::fs::write(&path, content).unwrap();
    (folder, path)
}

fn collection(features: &[String]) -> String {
    format!("{{\"type\":\"FeatureCollection\",\"features\":[{}]}}", features.join(","))
}

fn feature(geometry: &str, properties: &str) -> String {
    format!("{{\"type\":\"Feature\",\"geometry\":{geometry},\"properties\":{properties}}}")
}

const PLACE: &str = r#"{"type":"Point","coordinates":[-119.5,37.7,2100.25]}"#;

#[test]
fn every_column_arrives_in_si() {
    // Expected values converted by hand.
    let properties = r#"{"boulder_id":"A-1","rock":"granodiorite","diameter_m":1.5,"kind":"outcrop",
        "diffusivity_mm2_s":1.2,"diffusivity_gsd":1.3,"residence_min":2.5,"exposure":"Heavy dead wood",
        "heated_fraction":0.4,"standoff_m":3,"log_diameter_m":0.5,"weathering":"moderate","rind_mm":12,"moisture":"damp",
        "density_kg_m3":2650,"tensile_strength_mpa":8,"youngs_modulus_gpa":50,
        "slope_deg":31,"downslope_azimuth_deg":180,"contact":"burnt_duff","seat_depth_m":0.1,"centroid_setback_m":0.5,
        "centroid_height_m":0.6,"support":"burnt_through","base_scar_mm":40,"elevation_sd_m":2,
        "observed_on":"2026-08-14T16:20:00-07:00"}"#;
    let features = read("b.geojson", collection(&[feature(PLACE, properties)])).unwrap();
    assert!(features[0].remarks.is_empty(), "{:?}", features[0].remarks);
    let b = features[0].boulder.as_ref().unwrap();
    assert_eq!(b.rock, RockChoice::Named("granite".to_owned()));
    assert_eq!((b.kind, b.radius_m, b.axes_m), (Kind::Outcrop, Some(0.75), None));
    assert_eq!((b.position.lon_deg, b.position.lat_deg, b.position.height_m), (-119.5, 37.7, Some(2100.25)));
    let h = &b.heating;
    assert!(close(h.diffusivity_m2_s.unwrap(), 1.2e-6));
    assert_eq!((h.diffusivity_gsd, h.residence_s), (Some(1.3), Some(150.0)));
    assert_eq!(h.exposure, Some(ExposureClass::HeavyDeadWood));
    assert_eq!((h.heated_fraction, h.standoff_m, h.log_diameter_m), (Some(0.4), Some(3.0), Some(0.5)));
    assert_eq!((h.weathering, h.rind_m, h.moisture), (Some(Weathering::Moderate), Some(0.012), Some(Moisture::Damp)));
    let figures = [(Property::Density, 2650.0), (Property::YoungsModulus, 5e10), (Property::TensileStrength, 8e6)];
    assert_eq!(h.properties, figures);
    let s = &b.standing;
    assert_eq!((s.slope_deg, s.downslope_azimuth_deg, s.contact), (Some(31.0), Some(180.0), Some(Contact::BurntDuff)));
    assert_eq!((s.seat_depth_m, s.centroid_setback_m, s.centroid_height_m), (Some(0.1), Some(0.5), Some(0.6)));
    assert_eq!((s.support, s.base_scar_m, s.elevation_sd_m), (Some(Support::BurntThrough), Some(0.04), Some(2.0)));
    assert_eq!(s.observed_on, Some(jiff::civil::date(2026, 8, 14)));
}

#[test]
fn a_table_says_the_same_as_a_layer() {
    let table = "boulder_id,longitude,latitude,elevation_m,rock,axis_a_m,axis_b_m,axis_c_m,note\n\
                 7,-119.5,37.7,2100.5,basalt,1.2,.9,0.7,\"a, b\"\n";
    let features = read("b.csv", table).unwrap();
    let b = features[0].boulder.as_ref().unwrap();
    assert_eq!((b.id.as_str(), b.position.height_m), ("7", Some(2100.5)));
    // Sphere of equal volume, by hand: (1.2 x .9 x .7)^(1/3) / 2 = .756^(1/3) / 2 = .45549 m.
    assert!((b.radius_m.unwrap() - 0.455_49).abs() < 5e-6);
    assert_eq!(b.axes_m, Some([1.2, 0.9, 0.7]));
    let kept = r#"{"boulder_id":7,"longitude":-119.5,"latitude":37.7,"elevation_m":2100.5,"rock":"basalt","axis_a_m":1.2,"axis_b_m":".9","axis_c_m":0.7,"note":"a, b"}"#;
    assert_eq!(features[0].properties.as_json(), kept);
    let geometry = serde_json::to_string(features[0].geometry.as_ref().unwrap()).unwrap();
    assert_eq!(geometry, r#"{"type":"Point","coordinates":[-119.5,37.7,2100.5]}"#);
}

#[test]
fn a_silent_record_stays_silent() {
    let features = read("b.geojson", collection(&[feature(PLACE, r#"{"boulder_id":1,"kind":"outcrop"}"#)])).unwrap();
    let b = features[0].boulder.as_ref().unwrap();
    assert_eq!((b.rock.clone(), b.radius_m), (RockChoice::Mixture, None));
    assert_eq!((b.heating.clone(), b.standing.clone()), Default::default());
}

#[test]
fn a_footprint_gives_a_point_inside_and_keeps_its_shape() {
    // A U: its centroid lies outside it.
    let ring = "[[0,0],[3,0],[3,3],[2,3],[2,1],[1,1],[1,3],[0,3],[0,0]]";
    let u = format!("{{\"type\":\"Polygon\",\"coordinates\":[{ring}]}}");
    let date_line = r#"{"type":"Polygon","coordinates":[[[179.9,1],[-179.7,1],[-179.7,2],[179.9,2],[179.9,1]]]}"#;
    let props = r#"{"boulder_id":1,"diameter_m":1}"#;
    let features = read("b.geojson", collection(&[feature(&u, props), feature(date_line, props)])).unwrap();
    let inside = features[0].boulder.as_ref().unwrap().position;
    let outline: geo::Polygon<f64> = geo::wkt!(POLYGON((0. 0.,3. 0.,3. 3.,2. 3.,2. 1.,1. 1.,1. 3.,0. 3.,0. 0.)));
    assert!(outline.contains(&Point::new(inside.lon_deg, inside.lat_deg)), "{inside:?}");
    assert_eq!(inside.height_m, None);
    // The middle of 179.9 to 180.3 is -179.9.
    let across = features[1].boulder.as_ref().unwrap().position;
    assert!(across.lon_deg.abs() <= 180.0 && (across.lon_deg + 179.9).abs() < 1e-9, "{across:?}");
}

#[test]
fn a_burn_across_the_date_line_is_cut_there() {
    let path = concat!(env!("CARGO_MANIFEST_DIR"), "/fixtures/hostile/burn_date_line.geojson");
    let read = read_burns(path.as_ref()).unwrap();
    let area = &read.burns[1].area;
    assert_eq!(area.0.len(), 2);
    // Two degrees by one, by hand.
    assert!((area.signed_area() - 2.0).abs() < 1e-9, "{}", area.signed_area());
    for (x, y, inside) in [(179.5, -16.5, true), (-179.5, -16.5, true), (0.0, -16.5, false), (178.9, -16.5, false)] {
        assert_eq!(area.contains(&Point::new(x, y)), inside, "{x}, {y}");
    }
}

#[test]
fn burns_and_trails_arrive_in_si() {
    let square = "[[0,0],[1,0],[1,1],[0,1],[0,0]]";
    let multi = format!("{{\"type\":\"MultiPolygon\",\"coordinates\":[[{square}]]}}");
    let burn = r#"{"burn_id":"b","residence_min":3,"residence_gsd":1.4,"exposure":"crown","fireline_intensity_kw_m":500,
        "flame_length_m":2,"spread_rate_m_min":30,"fuel_load_kg_m2":1.2,"burned_on":"2026-07-01","ground_after":"bare"}"#;
    let (_folder, path) = file("burn.json", &collection(&[feature(&multi, burn)]));
    let read = read_burns(&path).unwrap();
    let b = &read.burns[0];
    assert_eq!((b.residence_s, b.residence_gsd, b.exposure), (Some(180.0), Some(1.4), Some(ExposureClass::Crown)));
    assert_eq!((b.fireline_intensity_w_m, b.flame_length_m), (Some(5e5), Some(2.0)));
    assert_eq!((b.spread_rate_m_s, b.fuel_load_kg_m2), (Some(0.5), Some(1.2)));
    assert_eq!((b.burned_on, b.ground_after), (Some(jiff::civil::date(2026, 7, 1)), Some(GroundAfter::Bare)));
    let line = r#"{"type":"MultiLineString","coordinates":[[[0,0,10],[0,0,10],[1,0]],[[2,0],[3,0]]]}"#;
    let trail =
        r#"{"trail_id":"t","name":"Invented way","passages_per_day":80,"walking_speed_m_s":1.1,"standing_minutes":5}"#;
    let (_folder, path) = file("trails.geojson", &collection(&[feature(line, trail)]));
    let t = &read_trails(&path).unwrap().trails[0];
    assert_eq!((t.name.as_deref(), t.lines.len(), t.lines[0].len()), (Some("Invented way"), 2, 2));
    assert_eq!((t.lines[0][0].height_m, t.lines[0][1].height_m), (Some(10.0), None));
    assert_eq!((t.passages_per_day, t.walking_speed_m_s, t.standing_s), (Some(80.0), Some(1.1), Some(300.0)));
}

#[test]
fn lines_of_features_are_numbered_in_a_document() {
    let bad = feature(PLACE, r#"{"boulder_id":2,"diameter_m":-1}"#);
    let text = format!("{{\n\"type\": \"FeatureCollection\",\n\"features\": [\n\n{bad},\n{bad}\n]}}");
    let lines: Vec<_> = read("b.geojson", text).unwrap().iter().map(|f| f.boulder.as_ref().unwrap_err().line).collect();
    assert_eq!(lines, [Some(5), Some(6)]);
}

#[test]
fn a_reader_that_has_enough_stops_the_reading() {
    let one = feature(PLACE, r#"{"boulder_id":1,"diameter_m":1}"#);
    for text in [collection(&[one.clone(), one.clone(), one.clone()]), format!("{one}\n{one}\n{one}\n")] {
        let mut taken = 0;
        let source = Cursor::new(text);
        let summary =
            read_boulders_from(source, "b.geojson", &Catalogue::embedded(), Duplicates::LeaveToCaller, |_| {
                taken += 1;
                if taken == 2 { ControlFlow::Break(()) } else { ControlFlow::Continue(()) }
            });
        assert_eq!((taken, summary.unwrap().records), (2, 2));
    }
}

#[test]
fn an_empty_pipe_is_an_empty_inventory() {
    assert!(read("standard input", "").unwrap().is_empty());
    assert!(read("standard input", "boulder_id,longitude,latitude,diameter_m\nA,1,2,3\n").unwrap()[0].boulder.is_ok());
}

#[test]
fn settings_are_read_flat_or_by_subject() {
    let content = r#"
        burn = "layers/burn.geojson"
        boulders = "-"
        out = "results"
        draws = 1_024
        seed = 0x10
        horizon_days = 90
        threads = 2
        format = ["geojson", "gpkg"]
        strict = true
        segment_m = 100
        as_of = 2026-09-01
        [rockfall]
        reach_mean_deg = 33.5
        reach-sd-deg = 2.65
        uplift_share = [0, 0.1, 0.2]
        friction_deg = { burnt_duff = [18, 25, 32] }
        [rockfall.support_loss]
        charred = 0.6
        [unknown_rock]
        granodiorite = 3
        basalt = 1
        [rocks.ridge_granite]
        like = "granite"
        source = "own tests"
        density_kg_m3 = 2655
        tensile_strength_mpa = { median = 9, gsd = 1.3 }
        porosity = { mean = 0.012, sd = 0.004, lower = 0.002 }
        emissivity = { low = 0.85, mode = 0.9, high = 0.95 }
    "#;
    let (folder, path) = file("s.toml", content);
    let run = read_settings(&path).unwrap();
    assert_eq!(run.burn, Some(folder.path().join("layers/burn.geojson")));
    assert_eq!((run.boulders, run.out), (Some("-".into()), Some(folder.path().join("results"))));
    assert_eq!((run.threads, run.strict, run.quiet), (Some(2), Some(true), None));
    assert_eq!(run.format, Some(vec!["geojson".to_owned(), "gpkg".to_owned()]));
    let s = &run.settings;
    assert_eq!((s.draws, s.seed, s.horizon_days), (1024, 16, 90.0));
    assert_eq!((s.trail.segment_m, s.trail.as_of), (100.0, Some(jiff::civil::date(2026, 9, 1))));
    assert_eq!((s.rockfall.reach_mean_deg, s.rockfall.reach_sd_deg), (33.5, 2.65));
    let (r, d) = (&s.rockfall, Settings::default().rockfall);
    assert_eq!((r.uplift_share.lower, r.uplift_share.centre, r.uplift_share.upper), (0.0, 0.1, 0.2));
    for (contact, duff) in Contact::ALL.iter().map(|c| (*c, *c == Contact::BurntDuff)) {
        let friction = r.friction_deg[contact as usize];
        assert_eq!(friction == d.friction_deg[contact as usize], !duff);
        assert!(!duff || (friction.lower, friction.centre, friction.upper) == (18.0, 25.0, 32.0));
    }
    assert_eq!((r.support_loss[Support::Charred as usize], r.support_loss[Support::Scorched as usize]), (0.6, 0.1));
    assert_eq!(s.unknown_rock, [("basalt".to_owned(), 0.25), ("granite".to_owned(), 0.75)]);
    let rock = &s.rocks[0];
    assert_eq!((rock.name.as_str(), rock.like.as_str(), rock.figures.len()), ("ridge_granite", "granite", 4));
    let figure = |p| rock.figures.iter().find(|f| f.0 == p).unwrap().1;
    assert_eq!(figure(Property::Density).median(), 2655.0);
    assert!(close(figure(Property::TensileStrength).centre, 9e6));
    assert_eq!((figure(Property::Porosity).spread, figure(Property::Porosity).lower), (0.004, 0.002));
    assert_eq!((figure(Property::Emissivity).lower, figure(Property::Emissivity).upper), (0.85, 0.95));
    assert!(run.catalogue.rock(&s.rocks[0].name).is_some());
    let codes: Vec<_> = run.findings.iter().map(|f| f.code).collect();
    assert_eq!(codes, ["weights_scaled"]);
    let (_folder, path) =
        file("twice.toml", "[rockfall]\nuplift_share = [0.2, 0.1, 0.3]\nsupport_loss = { gone = 1 }\n");
    let codes: Vec<_> = read_settings(&path).unwrap_err().findings().map(|f| f.code).collect();
    assert_eq!(codes, ["figure_unreadable", "setting_unknown"]);
    let (_folder, path) = file("empty.toml", "");
    assert_eq!(read_settings(&path).unwrap().settings, Settings::default());
}

#[test]
fn a_hundred_megabytes_on_one_line_are_read_to_the_end() {
    const WANTED: usize = 100 * 1024 * 1024;
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("one_line.geojson");
    let mut out = std::io::BufWriter::new(std::fs::File::create(&path).unwrap());
    let padding = "x".repeat(100_000);
    out.write_all(b"{\"type\":\"FeatureCollection\",\"features\":[").unwrap();
    let mut wrote = 0;
    let mut n = 0;
    while wrote < WANTED {
        let text = feature(PLACE, &format!("{{\"boulder_id\":{n},\"diameter_m\":1,\"note\":\"{padding}\"}}"));
        write!(out, "{}{text}", if n == 0 { "" } else { "," }).unwrap();
        wrote += text.len() + 1;
        n += 1;
    }
    out.write_all(b"]}").unwrap();
    out.flush().unwrap();
    let mut good = 0;
    let catalogue = Catalogue::embedded();
    let summary = read_boulders(&path, &catalogue, Duplicates::RefuseLater, |f| {
        good += usize::from(f.boulder.is_ok());
        ControlFlow::Continue(())
    });
    let summary = summary.unwrap();
    assert_eq!((good, summary.records), (n, n));
    assert!(summary.file.bytes as usize > WANTED);

    // The same length as one value of one feature, and as no JSON at all.
    let long = |start: &'static str, end: &'static str| {
        let body = std::io::repeat(b'x').take(WANTED as u64);
        let source = start.as_bytes().chain(body).chain(end.as_bytes());
        read_boulders_from(source, "b.geojson", &catalogue, Duplicates::RefuseLater, |f| {
            assert_eq!(f.boulder.unwrap_err().code, "not_a_feature");
            ControlFlow::Continue(())
        })
    };
    assert_eq!(long("{\"type\":\"FeatureCollection\",\"features\":[{\"x\":\"", "\"}]}").unwrap().records, 1);
    assert_eq!(long("", "").unwrap_err().finding.code, "not_json");
}

#[test]
fn a_comb_of_long_teeth_is_checked_in_time() {
    // Teeth along x and teeth along y: either way the sweep must not compare every edge with every other.
    const TEETH: usize = 10_000;
    for along_x in [true, false] {
        let corner = |a: f64, b: f64| if along_x { format!("[{a},{b}]") } else { format!("[{b},{a}]") };
        let mut ring: Vec<String> = vec![corner(0.0, 0.0)];
        for tooth in 0..TEETH {
            let b = tooth as f64 * 1e-3;
            ring.extend([corner(10.0, b), corner(10.0, b + 4e-4), corner(1.0, b + 5e-4), corner(1.0, b + 9e-4)]);
        }
        ring.extend([corner(0.0, TEETH as f64 * 1e-3), corner(0.0, 0.0)]);
        let shape = format!("{{\"type\":\"Polygon\",\"coordinates\":[[{}]]}}", ring.join(","));
        let (_folder, path) =
            file("burn.geojson", &collection(&[feature(&shape, r#"{"burn_id":1,"exposure":"crown"}"#)]));
        assert_eq!(read_burns(&path).unwrap().burns[0].area.0[0].exterior().0.len(), ring.len());
    }
}

/// A text with everything in it that readers know.
fn rich_document() -> Vec<u8> {
    let good = feature(
        PLACE,
        r#"{"boulder_id":"A","rock":"granite","diameter_m":1.4,"slope_deg":"31","observed_on":"2026-08-14","note":"é\u00e9\n"}"#,
    );
    let ring = r#"{"type":"Polygon","coordinates":[[[0,0],[1,0],[1,1],[0,1],[0,0]]]}"#;
    let line = r#"{"type":"LineString","coordinates":[[0,0,1],[1,1,2]]}"#;
    let burn = feature(
        ring,
        r#"{"burn_id":"B","trail_id":"T","boulder_id":"F","residence_min":3,"exposure":"crown","diameter_m":2}"#,
    );
    collection(&[good, burn, feature(line, r#"{"trail_id":"T","name":"w"}"#)]).into_bytes()
}

const RICH_TABLE: &[u8] =
    b"boulder_id,longitude,latitude,rock,diameter_m,note\nA,-119.5,37.7,granite,1.4,\"x\ny\"\nB,1,2,ss,2,\n";
const RICH_SETTINGS: &[u8] =
    b"draws = 512\nas_of = 2026-09-01\n[trail]\nsegment_m = 25.0\n[unknown_rock]\ngranite = 1\n\
    [rocks.mine]\nlike = \"granite\"\nsource = \"s\"\nporosity = { low = 0.1, mode = 0.2, high = 0.3 }\n";

/// Changes some bytes of `text`, and cuts it.
fn damaged(text: &[u8], changes: &[(prop::sample::Index, u8)], cut: prop::sample::Index) -> Vec<u8> {
    let mut bytes = text.to_vec();
    for (at, byte) in changes {
        let at = at.index(bytes.len());
        bytes[at] = *byte;
    }
    if changes.len() % 2 == 1 {
        bytes.truncate(cut.index(bytes.len()));
    }
    bytes
}

/// Any JSON value as text, with odd spellings of numbers.
fn json_value() -> impl Strategy<Value = String> {
    let leaf = prop_oneof![
        Just("null".to_owned()),
        Just("true".to_owned()),
        Just("-0".to_owned()),
        Just("1.50".to_owned()),
        Just("1E+2".to_owned()),
        Just("123456789012345678901234567890".to_owned()),
        any::<f64>().prop_filter("finite", |x| x.is_finite()).prop_map(|x| format!("{x:e}")),
        any::<String>().prop_map(|s| serde_json::to_string(&s).unwrap()),
        Just("\"\\u00e9\\/\"".to_owned()),
    ];
    leaf.prop_recursive(3, 12, 4, |inner| {
        prop_oneof![
            prop::collection::vec(inner.clone(), 0..4).prop_map(|v| format!("[{}]", v.join(", "))),
            prop::collection::vec(inner, 0..3).prop_map(|v| {
                let pairs: Vec<_> = v.iter().enumerate().map(|(i, x)| format!("\"k{i}\": {x}")).collect();
                format!("{{{}}}", pairs.join(","))
            }),
        ]
    })
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 192, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn properties_pass_through_byte_for_byte(values in prop::collection::vec((any::<String>(), json_value()), 0..8)) {
        let mut pairs: Vec<(String, String)> = vec![("boulder_id".into(), "\"A\"".into()), ("diameter_m".into(), "1.50".into())];
        // Names of their own, so that none is repeated or known.
        pairs.extend(values.into_iter().enumerate().map(|(i, (name, value))| (format!("other-{i}-{name}"), value)));
        let text: Vec<_> = pairs.iter().map(|(n, v)| format!("{} : {v}", serde_json::to_string(n).unwrap())).collect();
        let features = read("b.geojson", collection(&[feature(PLACE, &format!("{{{}}}", text.join(" ,")))])).unwrap();
        let kept = features[0].properties.entries();
        prop_assert_eq!(kept.len(), pairs.len());
        for ((name, value), (kept_name, kept_value)) in pairs.iter().zip(&kept) {
            prop_assert_eq!(name, kept_name);
            prop_assert_eq!(value, kept_value.get());
        }
        let again = Properties::from_pairs(kept.iter().map(|(n, v)| (n.as_ref(), v.get())));
        prop_assert_eq!(again.as_json(), features[0].properties.as_json());
        prop_assert!(features[0].boulder.is_ok());
    }

    #[test]
    fn coordinates_pass_through_to_the_last_digit(lon in -180.0..=180.0f64, lat in -90.0..=90.0f64, h in -400.0..9000.0f64) {
        let text = format!("{{\"type\":\"Point\",\"coordinates\":[{lon},{lat},{h}]}}");
        let features = read("b.geojson", collection(&[feature(&text, r#"{"boulder_id":1,"diameter_m":1}"#)])).unwrap();
        let place = features[0].boulder.as_ref().unwrap().position;
        prop_assert_eq!((place.lon_deg, place.lat_deg, place.height_m), (lon, lat, Some(h)));
        let out: serde_json::Value = serde_json::from_str(&serde_json::to_string(features[0].geometry.as_ref().unwrap()).unwrap()).unwrap();
        prop_assert_eq!(out["coordinates"][0].as_f64(), Some(lon));
        prop_assert_eq!(out["coordinates"][2].as_f64(), Some(h));
    }

    #[test]
    fn a_number_is_used_or_refused_never_dropped(x in prop_oneof![any::<f64>(), -10.0..20.0f64], quoted in any::<bool>()) {
        let value = if quoted || !x.is_finite() { format!("\"{x}\"") } else { format!("{x}") };
        let text = format!("{{\"boulder_id\":1,\"diameter_m\":1,\"diffusivity_mm2_s\":{value}}}");
        let features = read("b.geojson", collection(&[feature(PLACE, &text)])).unwrap();
        match &features[0].boulder {
            Ok(b) => {
                prop_assert!((0.1..=10.0).contains(&x));
                prop_assert!(close(b.heating.diffusivity_m2_s.unwrap(), x * 1e-6));
                prop_assert_eq!(features[0].remarks.len(), usize::from(quoted));
            }
            Err(d) => {
                prop_assert!(!(0.1..=10.0).contains(&x));
                prop_assert_eq!(d.property.as_deref(), Some("diffusivity_mm2_s"));
                prop_assert_eq!(d.expected.as_deref(), Some("0.1 to 10"));
            }
        }
    }

    #[test]
    fn damaged_bytes_never_panic(
        changes in prop::collection::vec((any::<prop::sample::Index>(), any::<u8>()), 1..6),
        cut in any::<prop::sample::Index>(),
    ) {
        let folder = tempfile::tempdir().unwrap();
        for (name, text) in [("b.geojson", rich_document()), ("b.csv", RICH_TABLE.to_vec()), ("s.toml", RICH_SETTINGS.to_vec())] {
            let bytes = damaged(&text, &changes, cut);
            for piped in ["standard input", name] {
                if let Ok(features) = read(piped, &bytes) {
                    for feature in features {
                        let _ = feature.properties.entries();
                        if let Err(refusal) = &feature.boulder {
                            prop_assert!(refusal.remedy.is_some(), "{}", refusal);
                        }
                    }
                }
            }
            let path = folder.path().join(name);
            std::fs::write(&path, &bytes).unwrap();
            let _ = (read_burns(&path), read_trails(&path), read_settings(&path));
        }
    }
}

#[test]
fn the_undamaged_texts_are_good() {
    let fates: Vec<_> = read("b.geojson", rich_document()).unwrap().iter().map(|f| f.boulder.is_ok()).collect();
    assert_eq!(fates, [true, true, false]);
    assert_eq!(read("b.csv", RICH_TABLE).unwrap().len(), 2);
    let (_folder, path) = file("s.toml", std::str::from_utf8(RICH_SETTINGS).unwrap());
    read_settings(&path).unwrap();
}

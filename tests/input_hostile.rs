//! Hostile files: each leads to its finding, with where, what was found, what was expected and what to do.
//!
//! The files are in `fixtures/hostile` (see its README). Expected codes and words were written down from the contract and
//! `docs/inputs.md`, not copied from a run.

use std::ops::ControlFlow;
use std::path::PathBuf;

use spallcast::diagnostic::{Diagnostic, Severity};
use spallcast::input::{
    BoulderFeature, Duplicates, InputError, read_boulders, read_boulders_from, read_burns, read_settings, read_trails,
    refuse_duplicates,
};
use spallcast::rock::Catalogue;

fn fixture(name: &str) -> PathBuf {
    PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("fixtures/hostile").join(name)
}

/// A message that a tired geologist can act on.
fn holds(finding: &Diagnostic, file: &str, code: &str, words: &str) {
    let text = finding.to_string();
    assert_eq!(finding.code, code, "{file}: {text}");
    assert!(finding.file.ends_with(file), "{file}: where? {text}");
    for (what, part) in [("found", &finding.found), ("expected", &finding.expected), ("remedy", &finding.remedy)] {
        assert!(part.as_ref().is_some_and(|p| !p.trim().is_empty()), "{file}: {what}? {text}");
    }
    assert!(text.contains(words), "{file}: {words:?} is not in: {text}");
}

fn boulders(file: &str) -> Result<(Vec<BoulderFeature>, Vec<Diagnostic>), InputError> {
    let path = fixture(file);
    let mut features = Vec::new();
    let summary = read_boulders(&path, &Catalogue::embedded(), Duplicates::LeaveToCaller, |feature| {
        features.push(feature);
        ControlFlow::Continue(())
    })?;
    refuse_duplicates(&mut features, &summary.file.name);
    assert_eq!(summary.records, features.len());
    Ok((features, summary.findings))
}

/// File, code of the refusal, words of its message. Each holds a good boulder and one that is refused.
const ONE_REFUSED: &[(&str, &str, &str)] = &[
    (
        "value_out_of_range.geojson",
        "value_out_of_range",
        "boulder \"bad\": diffusivity_mm2_s is -2.1, expected 0.1 to 10; remove it to use the catalogue value for granite",
    ),
    ("size_negative.geojson", "value_out_of_range", "diameter_m is -1"),
    ("size_missing.geojson", "size_missing", "there is no size"),
    ("axes_two_of_three.geojson", "size_missing", "2 of three axes"),
    ("rock_misspelt.geojson", "rock_unknown", "granite"),
    ("word_unknown.geojson", "word_unknown", "did you mean \"burnt_duff\"?"),
    ("word_is_number.geojson", "word_unknown", "support is 3"),
    ("date_unreadable.geojson", "date_unreadable", "2026-08-14"),
    ("number_is_text.geojson", "not_a_number", "slope_deg is \"steep\""),
    ("number_is_nan_text.geojson", "not_finite", "slope_deg is \"NaN\""),
    ("number_is_list.geojson", "not_a_number", "slope_deg is [31]"),
    ("number_is_true.geojson", "not_a_number", "slope_deg is true"),
    ("number_with_unit.geojson", "not_a_number", "remove the unit"),
    ("decimal_comma_text.geojson", "not_a_number", "use a point"),
    ("id_missing.geojson", "id_missing", "boulder_id"),
    ("id_empty.geojson", "id_missing", "boulder_id"),
    ("id_is_object.geojson", "id_unreadable", "boulder_id"),
    ("geometry_null.geojson", "geometry_missing", "null"),
    ("geometry_collection.geojson", "geometry_kind", "GeometryCollection"),
    ("geometry_line.geojson", "geometry_kind", "LineString"),
    ("position_one_number.geojson", "position_short", "1 number"),
    ("position_empty.geojson", "position_short", "0 numbers"),
    ("position_text.geojson", "geometry_unreadable", "coordinates"),
    ("position_huge.geojson", "geometry_unreadable", "out of range"),
    ("position_swapped.geojson", "coordinates_out_of_range", "swapped"),
    ("position_metres.geojson", "coordinates_out_of_range", "metres"),
    ("position_past_180.geojson", "coordinates_out_of_range", "subtract 360"),
    ("footprint_crossed.geojson", "ring_crosses_itself", "0.5"),
    ("number_overflow.geojson", "not_finite", "1e400"),
    ("number_huge_integer.geojson", "not_finite", "9999"),
    ("duplicate_key.geojson", "duplicate_key", "diameter_m"),
    ("properties_list.geojson", "not_a_feature", "[1,2]"),
    ("properties_null.geojson", "size_missing", "boulder \"bad\""),
    ("feature_is_null.geojson", "not_json", "feature 2"),
    ("feature_without_type.geojson", "not_a_feature", "no type"),
    ("nested_property.geojson", "nesting_too_deep", "64 deep"),
    ("nested_coordinates.geojson", "nesting_too_deep", "64 deep"),
    ("ragged_short.csv", "row_ragged", "3 cells"),
    ("ragged_long.csv", "row_ragged", "9 cells"),
    ("quote_open.csv", "not_a_number", ""),
    ("decimal_comma.csv", "not_a_number", "use a point"),
    ("number_nan.csv", "not_finite", "NaN"),
    ("number_overflow.csv", "not_finite", "1e400"),
    ("place_missing.csv", "geometry_missing", "longitude or latitude"),
    ("place_text.csv", "not_a_number", "longitude is \"119W\""),
    ("place_swapped.csv", "coordinates_out_of_range", "swapped"),
    ("place_metres.csv", "coordinates_out_of_range", "metres"),
];

#[test]
fn one_bad_boulder_is_refused_and_the_good_one_stays() {
    let mut rows = 0;
    for (file, code, words) in ONE_REFUSED {
        if *file == "quote_open.csv" {
            continue;
        }
        let (features, _) = boulders(file).unwrap_or_else(|e| panic!("{file}: {e}"));
        assert_eq!(features.len(), 2, "{file}");
        assert!(features[0].boulder.is_ok(), "{file}: {:?}", features[0].boulder);
        assert_eq!(features[0].id.as_deref(), Some("good"), "{file}");
        let refusal = features[1].boulder.as_ref().expect_err(file);
        assert_eq!(refusal.severity, Severity::Refusal, "{file}");
        assert_eq!(refusal.line, Some(3), "{file}: line");
        holds(refusal, file, code, words);
        rows += 1;
    }
    assert_eq!(rows, 46);
}

#[test]
fn an_open_quote_costs_the_rows_it_swallows_and_says_so() {
    // The quoted cell takes in the next row: the good row after it is part of the note.
    let (features, _) = boulders("quote_open.csv").unwrap();
    assert_eq!(features.len(), 2);
    let note = features[1].properties.get("note").unwrap().get();
    assert!(note.contains("good,-119.5"), "{note}");
    let said: Vec<_> = features[1].remarks.iter().map(|r| r.code).collect();
    assert_eq!(said, ["cell_with_line_break"]);
}

#[test]
fn all_records_that_share_a_name_are_refused_whatever_their_order() {
    let (features, _) = boulders("duplicate_id.geojson").unwrap();
    assert_eq!(features.len(), 2);
    for feature in &features {
        holds(feature.boulder.as_ref().unwrap_err(), "duplicate_id.geojson", "duplicate_id", "2 records");
    }
}

#[test]
fn in_a_stream_the_second_record_of_a_name_is_refused() {
    let line = r#"{"type":"Feature","geometry":{"type":"Point","coordinates":[1,2]},"properties":{"boulder_id":7,"diameter_m":1}}"#;
    let stream = format!("{line}\n{}\n{{\"type\":\n", line.replace(":7", ":\"7\""));
    let mut fates = Vec::new();
    let read = read_boulders_from(
        std::io::Cursor::new(stream),
        "standard input",
        &Catalogue::embedded(),
        Duplicates::RefuseLater,
        |f| {
            fates.push(f.boulder.map(|b| b.id).map_err(|d| d.code));
            ControlFlow::Continue(())
        },
    );
    assert_eq!(read.unwrap().records, 3);
    assert_eq!(fates, [Ok("7".to_owned()), Err("duplicate_id"), Err("not_json")]);
}

/// File, records, code of what is said, words of it. Every boulder is usable.
const USABLE: &[(&str, usize, &str, &str)] = &[
    ("number_as_text.geojson", 2, "number_as_text", "diameter_m"),
    ("column_misspelt.geojson", 2, "column_misspelt", "\"moisture\""),
    ("column_case.geojson", 2, "column_name_adapted", "boulder_id"),
    ("axes_unsorted.geojson", 2, "axes_sorted", "1, 2, 1.5"),
    ("sizes_disagree.geojson", 2, "sizes_disagree", "3.30"),
    ("id_is_number.geojson", 2, "", ""),
    ("position_four_numbers.geojson", 2, "", ""),
    ("values_empty.geojson", 2, "", ""),
    ("collection_empty.geojson", 0, "empty_collection", "no record"),
    ("byte_order_mark_crlf.geojson", 2, "", ""),
    ("latin_1.geojson", 2, "not_utf8", "Windows-1252"),
    ("single_feature.geojson", 1, "", ""),
    ("crs_wgs84.geojson", 1, "", ""),
    ("semicolons.csv", 2, "other_delimiter", "semicolons"),
    ("blank_rows.csv", 2, "blank_rows", "1 rows"),
    ("latin_1.csv", 2, "not_utf8", "Windows-1252"),
    ("header_only.csv", 0, "empty_collection", "no record"),
];

#[test]
fn odd_but_clear_files_are_read_and_said() {
    for (file, records, code, words) in USABLE {
        let (features, findings) = boulders(file).unwrap_or_else(|e| panic!("{file}: {e}"));
        assert_eq!(features.len(), *records, "{file}");
        for feature in &features {
            assert!(feature.boulder.is_ok(), "{file}: {:?}", feature.boulder);
        }
        let said: Vec<_> = features.iter().flat_map(|f| &f.remarks).chain(&findings).collect();
        if code.is_empty() {
            assert!(said.is_empty(), "{file}: {said:?}");
        } else {
            assert!(said.len() <= 2 && said.iter().all(|d| d.code == *code), "{file}: {said:?}");
            holds(said[0], file, code, words);
        }
    }
    assert_eq!(USABLE.len(), 17);
}

#[test]
fn a_broken_line_costs_only_itself() {
    let (features, _) = boulders("newline_delimited.geojsonl").unwrap();
    let fates: Vec<_> =
        features.iter().map(|f| f.boulder.as_ref().map(|b| b.id.as_str()).map_err(|d| d.code)).collect();
    assert_eq!(fates, [Ok("good"), Err("not_json"), Ok("odd")]);
    let (features, _) = boulders("record_separators.geojsons").unwrap();
    let fates: Vec<_> =
        features.iter().map(|f| f.boulder.as_ref().map(|b| b.id.as_str()).map_err(|d| d.code)).collect();
    assert_eq!(fates, [Ok("good"), Ok("odd"), Err("not_json")]);
}

/// File, code, words.
const UNUSABLE: &[(&str, &str, &str)] = &[
    ("no_such_file.geojson", "file_missing", "no such file"),
    ("", "file_unreadable", "directory"),
    ("empty.geojson", "file_empty", "empty"),
    ("blank.geojson", "file_empty", "empty"),
    ("truncated.geojson", "truncated", "ends too early, at line 3"),
    ("truncated_in_text.geojson", "truncated", "line 1"),
    ("nan_literal.geojson", "not_json", "JSON has no NaN"),
    ("infinity_literal.geojson", "not_json", "Infinity"),
    ("not_json.geojson", "not_json", "line 1, column 1"),
    ("trailing_text.geojson", "not_json", "line 4"),
    ("array.geojson", "not_a_collection", "sequence"),
    ("deep_array.geojson", "not_a_collection", "sequence"),
    ("bare_geometry.geojson", "not_a_collection", "wrap the geometry"),
    ("features_missing.geojson", "not_a_collection", "\"features\" is missing"),
    ("features_null.geojson", "not_a_collection", "null"),
    ("features_twice.geojson", "not_a_collection", "twice"),
    ("topology.geojson", "not_a_collection", "TopoJSON"),
    ("crs_projected.geojson", "wrong_crs", "32611"),
    ("crs_after.geojson", "wrong_crs", "3857"),
    ("utf_16.geojson", "not_text", "UTF-16"),
    ("zipped.geojson", "not_text", "zip"),
    ("nul_bytes.geojson", "not_text", "NUL"),
    ("columns_missing.csv", "column_missing", "longitude, latitude"),
    ("column_twice.csv", "duplicate_column", "rock"),
    ("header_missing.csv", "column_missing", "longitude"),
    ("empty.csv", "file_empty", "header"),
];

#[test]
fn unusable_files_are_named_as_such() {
    for (file, code, words) in UNUSABLE {
        let error = boulders(file).err().unwrap_or_else(|| panic!("{file} was read"));
        holds(&error.finding, file, code, words);
    }
    assert_eq!(UNUSABLE.len(), 26);
}

/// File, code, words. Each makes the burn file unusable.
const BURNS: &[(&str, &str, &str)] = &[
    ("burn_not_closed.geojson", "ring_not_closed", "repeat the first position"),
    ("burn_crossed.geojson", "ring_crosses_itself", "0.500000, 0.500000"),
    ("burn_spike.geojson", "ring_crosses_itself", "outline"),
    ("burn_hole_crosses.geojson", "ring_crosses_itself", "-119.4"),
    ("burn_three_positions.geojson", "ring_too_short", "3 positions"),
    ("burn_flat.geojson", "ring_without_area", "no area"),
    ("burn_point.geojson", "geometry_kind", "Point"),
    ("burn_empty_polygon.geojson", "geometry_missing", "no coordinates"),
    ("burn_short_position.geojson", "position_short", "1 number"),
    ("burn_residence_negative.geojson", "value_out_of_range", "residence_min is -3"),
    ("burn_class_unknown.geojson", "word_unknown", "did you mean \"crown\"?"),
    ("burn_id_twice.geojson", "duplicate_id", "line 2"),
    ("burn_id_missing.geojson", "id_missing", "burn_id"),
    ("burn_metres.geojson", "coordinates_out_of_range", "metres"),
    ("crs_projected.geojson", "wrong_crs", "32611"),
    ("truncated.geojson", "truncated", "line 3"),
];

#[test]
fn a_wrong_burn_makes_the_run_unusable_and_says_why() {
    for (file, code, words) in BURNS {
        let error = read_burns(&fixture(file)).expect_err(file);
        holds(&error.finding, file, code, words);
        if file.starts_with("burn_") {
            assert!(error.to_string().contains("would look unburnt"), "{error}");
        }
    }
    assert_eq!(BURNS.len(), 16);
}

#[test]
fn odd_but_clear_burns_are_read() {
    let read = read_burns(&fixture("burn_without_fire.geojson")).unwrap();
    assert_eq!(read.burns.len(), 2);
    assert_eq!(read.findings.len(), 1);
    holds(&read.findings[0], "burn_without_fire.geojson", "burn_without_fire", "residence_min");
    let read = read_burns(&fixture("burn_clockwise.geojson")).unwrap();
    assert_eq!(read.burns[0].area, {
        // Same square, other direction: same perimeter once oriented, but for its starting corner.
        use geo::Area;
        assert!(read.burns[1].area.signed_area() > 0.0);
        assert_eq!(read.burns[1].area.signed_area(), read.burns[0].area.signed_area());
        read.burns[0].area.clone()
    });
    let empty = read_burns(&fixture("collection_empty.geojson")).unwrap();
    assert_eq!((empty.burns.len(), empty.findings[0].code), (0, "empty_collection"));
}

#[test]
fn a_wrong_trail_is_left_out_and_said_to_be_missing() {
    let cases = [
        ("trail_one_position.geojson", "line_too_short", 1),
        ("trail_passages_negative.geojson", "value_out_of_range", 1),
        ("trail_twice.geojson", "duplicate_id", 2),
    ];
    for (file, code, refused) in cases {
        let read = read_trails(&fixture(file)).unwrap();
        let ids: Vec<_> = read.trails.iter().map(|t| t.id.as_str()).collect();
        assert_eq!(ids, ["good"], "{file}");
        assert_eq!(read.findings.len(), refused, "{file}");
        for finding in &read.findings {
            assert_eq!(finding.severity, Severity::Refusal);
            holds(finding, file, code, "does not mean that it is clear");
        }
    }
    assert_eq!(cases.len(), 3);
}

/// File, code, words.
const SETTINGS: &[(&str, &str, &str)] = &[
    ("setting_unknown.toml", "setting_unknown", "did you mean \"segment_m\"?"),
    ("setting_out_of_range.toml", "value_out_of_range", "segment_m is -5"),
    ("setting_nan.toml", "not_finite", "reach_mean_deg is nan"),
    ("setting_not_whole.toml", "not_whole", "10.5"),
    ("setting_twice.toml", "duplicate_key", "segment_m"),
    ("setting_wrong_table.toml", "setting_unknown", "does not belong there"),
    ("setting_text.toml", "not_a_switch", "strict is \"yes\""),
    ("settings_not_toml.toml", "not_toml", ":2:"),
    ("settings_key_twice.toml", "not_toml", ":2:"),
    ("setting_limits.toml", "limits_out_of_order", "from high to low"),
    ("rock_like_unknown.toml", "rock_unusable", "nowhere stone"),
    ("rock_source_missing.toml", "source_missing", "traceable"),
    ("rock_figure_form.toml", "figure_unreadable", "median and gsd"),
    ("rock_figure_misspelt.toml", "setting_unknown", "did you mean \"density_kg_m3\"?"),
    ("mixture_unknown_rock.toml", "rock_unknown", "kryptonite"),
    ("mixture_empty.toml", "mixture_empty", "at least one rock"),
    ("no_such.toml", "file_missing", "no such file"),
    ("zipped.geojson", "not_text", "zip"),
];

#[test]
fn wrong_settings_are_errors_with_their_line() {
    for (file, code, words) in SETTINGS {
        let error = read_settings(&fixture(file)).expect_err(file);
        holds(&error.finding, file, code, words);
    }
    assert_eq!(SETTINGS.len(), 18);
}

#[test]
fn every_hostile_file_meets_every_reader_without_a_panic() {
    let mut files = 0;
    for entry in std::fs::read_dir(fixture("")).unwrap() {
        let path = entry.unwrap().path();
        let _ = read_boulders(&path, &Catalogue::embedded(), Duplicates::RefuseLater, |_| ControlFlow::Continue(()));
        let _ = read_burns(&path);
        let _ = read_trails(&path);
        let _ = read_settings(&path);
        files += 1;
    }
    assert!(files >= 120, "{files}");
}

/// Codes that `src/input` gives to findings, taken from its text: a literal where a code stands.
fn codes_in_source() -> std::collections::BTreeSet<String> {
    let mut codes = std::collections::BTreeSet::new();
    for entry in std::fs::read_dir(concat!(env!("CARGO_MANIFEST_DIR"), "/src/input")).unwrap() {
        let path = entry.unwrap().path();
        // Rasters and series are inputs with documents of their own; the notes say what columns and settings mean.
        let elsewhere = ["terrain.rs", "series.rs", "column_notes.rs", "setting_notes.rs"];
        if elsewhere.iter().any(|file| path.ends_with(file)) {
            continue;
        }
        let text = std::fs::read_to_string(path).unwrap();
        let text: String = text.split("#[cfg(test)]").next().unwrap().split_whitespace().collect::<Vec<_>>().join(" ");
        let starts = [
            "Severity::Refusal, ",
            "Severity::Warning, ",
            "Severity::Note, ",
            "flaw( ",
            "flaw(",
            "refuse( ",
            "refuse(",
            "warn( ",
            "warn(",
            "note( ",
            "note(",
            "finding(",
            "code: ",
            "unusable(",
            "unusable(name, ",
            "unusable(self.name, ",
        ];
        for start in starts {
            for (at, _) in text.match_indices(&format!("{start}\"")) {
                let code: String = text[at + start.len() + 1..].chars().take_while(|c| *c != '"').collect();
                codes.insert(code);
            }
        }
    }
    codes.remove("not_read");
    codes
}

#[test]
fn every_code_is_listed_in_the_docs_and_the_docs_list_no_other() {
    let docs = std::fs::read_to_string(concat!(env!("CARGO_MANIFEST_DIR"), "/docs/inputs.md")).unwrap();
    let table = docs.split("## Codes of findings").nth(1).expect("the section is there");
    let listed: std::collections::BTreeSet<String> = table
        .lines()
        .filter_map(|l| l.strip_prefix("| `"))
        .flat_map(|l| {
            l.split(" |").next().unwrap().split(", ").map(|c| c.trim_matches('`').to_owned()).collect::<Vec<_>>()
        })
        .collect();
    assert_eq!(codes_in_source(), listed);
    assert!(listed.len() > 50, "{}", listed.len());
}

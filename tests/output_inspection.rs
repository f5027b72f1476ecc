//! The inspection table: its rows, its cells, and that no spreadsheet runs any of them.

#[path = "support/results.rs"]
mod results;

use results::{one, point, read, result, with, without};
use spallcast::output::fields::BoulderResult;
use spallcast::output::inspection::{INSPECTION_COLUMNS, inert, write_inspection};

/// Rows of the table by column name; the boulders are ranked as they stand.
fn rows(results: &mut [BoulderResult]) -> Vec<std::collections::HashMap<String, String>> {
    for (rank, result) in (1..).zip(results.iter_mut()) {
        result.inspection_rank = Some(rank);
    }
    let order: Vec<usize> = (0..results.len()).collect();
    let mut out = Vec::new();
    write_inspection(&mut out, results, &order).expect("memory");
    csv::Reader::from_reader(out.as_slice()).deserialize().map(|row| row.expect("a row")).collect()
}

#[test]
fn rows_stand_in_the_order_given() {
    let mut results = vec![with("A", 0.2, 0.001), without("B", &[0]), with("C", 0.8, 0.002)];
    let order = [2, 1, 0];
    for (rank, index) in (1..).zip(order) {
        results[index].inspection_rank = Some(rank);
    }
    let mut out = Vec::new();
    write_inspection(&mut out, &results, &order).expect("memory");
    let text = String::from_utf8(out).expect("UTF-8");
    let starts: Vec<&str> = text.lines().skip(1).map(|l| &l[..3]).collect();
    assert_eq!(starts, ["1,C", "2,B", "3,A"]);
}

#[test]
fn cells_hold_figures_as_plain_numbers_and_missing_ones_are_empty() {
    let feature = point("A", r#","support":"charred","observed_on":"2031-06-05""#);
    let mut results = vec![result(one(feature)), without("B", &[0])];
    let rows = rows(&mut results);
    let a = &rows[0];
    assert_eq!(a.len(), INSPECTION_COLUMNS.len());
    assert_eq!((a["longitude"].as_str(), a["latitude"].as_str()), ("-119.5", "37.7"), "a minus sign stays a number");
    assert_eq!((a["p_spall"].as_str(), a["spall_thickness_mm"].as_str()), ("0.75", "7.2"));
    assert_eq!(
        (a["rock"].as_str(), a["support"].as_str(), a["observed_on"].as_str()),
        ("granite", "charred", "2031-06-05")
    );
    let b = &rows[1];
    assert_eq!(b["status"], "not_assessed");
    for empty in ["p_spall", "spall_thickness_mm", "loss_mm", "p_source", "p_source_high", "source_mode", "burn_id"] {
        assert_eq!(b[empty], "", "{empty}");
    }
}

#[test]
fn a_refused_record_shows_where_it_is_and_what_rock_was_written() {
    let refused = r#"{"type":"Feature","geometry":{"type":"Polygon","coordinates":[[[7.123456789,46.5],[7.2,46.5],[7.2,46.6],[7.123456789,46.5]]]},"properties":{"boulder_id":"A","rock":"granitic thing","diameter_m":1}}"#;
    let mut results = vec![result(one(refused.to_owned()))];
    assert!(results[0].feature.boulder.is_err(), "the rock is not known");
    let rows = rows(&mut results);
    assert_eq!((rows[0]["longitude"].as_str(), rows[0]["rock"].as_str()), ("7.1234568", "granitic thing"));
}

#[test]
fn cells_that_a_spreadsheet_would_run_are_made_inert() {
    let run = ["=1+1", "+1", "-1", "@SUM(A1)", "\t=1", "\r=1", "\n=1", "\tx", " =1", "\u{feff}=1", "＝1", "＠x", "-"];
    for text in run {
        assert_eq!(inert(text), format!("'{text}"), "{text:?}");
    }
    for text in ["", "A-1", "granite=hard", "1+1", "'=1", "é", " x"] {
        assert_eq!(inert(text), text, "{text:?}");
    }
}

#[test]
fn no_text_cell_of_the_table_begins_like_a_formula() {
    let nasty = ["=cmd|' /C calc'!A0", "+1", "-2", "@x", "\\t=1", "a\\\"b,c\\nd", "=1;2"];
    let features: Vec<String> = nasty
        .iter()
        .map(|id| point(id, "").replace("granite", "=HYPERLINK(\\\"x\\\")"))
        .chain([point("plain", "")])
        .collect();
    let features = read(&results::collection(&features), "b.geojson");
    let mut results: Vec<_> = features.into_iter().map(result).collect();
    let plain = results.iter_mut().find(|r| r.id() == "plain").expect("there");
    plain.assessment.reason = "=1".to_owned();
    plain.assessment.burn_id = Some("@burn".to_owned());
    plain.assessment.exposure_used = Some("+x".to_owned());
    let rows = rows(&mut results);
    assert_eq!(rows.len(), nasty.len() + 1);
    let mut inert_cells = 0;
    for row in &rows {
        for column in INSPECTION_COLUMNS.iter().filter(|c| c.kind == spallcast::output::fields::JsonType::Text) {
            let cell = &row[column.name];
            assert!(!cell.trim_start().starts_with(['=', '+', '-', '@']), "{}: {cell:?}", column.name);
            inert_cells += usize::from(cell.starts_with('\''));
        }
    }
    assert!(inert_cells >= nasty.len() + 3, "the table held cells to be made inert: {inert_cells}");
}

#[test]
fn the_table_has_a_header_and_no_byte_order_mark() {
    let mut out = Vec::new();
    write_inspection(&mut out, &[], &[]).expect("memory");
    let text = String::from_utf8(out).expect("UTF-8");
    let names: Vec<&str> = INSPECTION_COLUMNS.iter().map(|c| c.name).collect();
    assert_eq!(text, format!("{}\n", names.join(",")));
    assert!(text.starts_with("rank,boulder_id,status,"));
}

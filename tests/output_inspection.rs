//! The inspection table: its order, its cells, and that no spreadsheet runs any of them.

#[path = "support/results.rs"]
mod results;

use results::{one, point, read, result, with, without};
use spallcast::output::fields::BoulderResult;
use spallcast::output::inspection::{INSPECTION_COLUMNS, assign_ranks, inert, inspection_order, write_inspection};

/// Rows of the table by column name.
fn rows(results: &mut [BoulderResult]) -> Vec<std::collections::HashMap<String, String>> {
    let order = assign_ranks(results);
    let mut out = Vec::new();
    write_inspection(&mut out, results, &order).expect("memory");
    csv::Reader::from_reader(out.as_slice()).deserialize().map(|row| row.expect("a row")).collect()
}

fn order_of(results: &[BoulderResult]) -> Vec<&str> {
    inspection_order(results).into_iter().map(|i| results[i].id()).collect()
}

#[test]
fn what_is_unknown_comes_after_what_is_likely_and_before_what_is_unlikely() {
    let refused = result(one(point("refused", r#","slope_deg":200"#)));
    assert!(refused.feature.boulder.is_err());
    let mut results = vec![
        with("faint", 0.02, 0.0),
        without("outside", &[]),
        with("middling", 0.3, 0.001),
        refused,
        without("in_a_burn", &[0]),
        with("likely", 0.9, 0.001),
        with("likelier", 0.95, 0.0005),
    ];
    let expected = ["likelier", "likely", "in_a_burn", "refused", "middling", "outside", "faint"];
    assert_eq!(order_of(&results), expected);
    results.reverse();
    assert_eq!(order_of(&results), expected, "the order of the file does not matter");
    // A source likelihood replaces the likelihood of spalling.
    let faint = results.iter_mut().find(|r| r.id() == "faint").expect("there");
    faint.source.p_source_high = Some(0.97);
    let likely = results.iter_mut().find(|r| r.id() == "likely").expect("there");
    likely.source.p_source_high = Some(0.05);
    assert_eq!(order_of(&results), ["faint", "likelier", "in_a_burn", "refused", "middling", "outside", "likely"]);
}

#[test]
fn ties_go_to_the_larger_loss_and_then_to_the_name() {
    let results = vec![with("b", 1.0, 0.002), with("c", 1.0, 0.003), with("a", 1.0, 0.002)];
    assert_eq!(order_of(&results), ["c", "a", "b"]);
}

#[test]
fn every_boulder_has_one_row_and_one_rank() {
    let mut results = vec![with("A", 0.2, 0.001), without("B", &[0]), with("C", 0.8, 0.002)];
    let rows = rows(&mut results);
    let ids: Vec<&str> = rows.iter().map(|r| r["boulder_id"].as_str()).collect();
    assert_eq!(ids, ["C", "B", "A"]);
    let ranks: Vec<&str> = rows.iter().map(|r| r["rank"].as_str()).collect();
    assert_eq!(ranks, ["1", "2", "3"]);
    assert_eq!(results.iter().map(|r| r.inspection_rank).collect::<Vec<_>>(), [Some(3), Some(2), Some(1)]);
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

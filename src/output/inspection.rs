//! `inspection.csv`: every boulder once, in the order in which to look at them.
//!
//! The order itself is made in [`crate::trail::inspection`]; here it is written down.
//!
//! **Text cells.** A cell of text that a spreadsheet would run as a formula is made inert by an apostrophe before it:
//! when its first character (spaces and invisible characters aside) is `=`, `+`, `-`, `@` or the full-width form of one, or when it begins with a
//! tab or a line break. Numbers stay numbers. An empty cell is a value that was not computed or not recorded.

use std::borrow::Cow;
use std::io;

use super::fields::{BOULDER_FIELDS, BoulderResult, Field, Value, field};
use crate::site::{Boulder, RockChoice};

/// Decimals of a degree in tables: about 1 cm on the ground.
const PLACE_DECIMALS: f64 = 1e7;

fn degrees(x: Option<f64>) -> Value<'static> {
    x.filter(|x| x.is_finite()).map_or(Value::Null, |x| Value::Number((x * PLACE_DECIMALS).round() / PLACE_DECIMALS))
}

fn boulder(result: &BoulderResult) -> Option<&Boulder> {
    result.feature.boulder.as_ref().ok()
}

/// The rock that was run; as recorded where the record was refused.
fn rock(result: &BoulderResult) -> Value<'_> {
    match boulder(result).map(|b| &b.rock) {
        Some(RockChoice::Named(key)) => Value::text(key.as_str()),
        Some(RockChoice::Mixture) => Value::text("unknown"),
        None => {
            let recorded = result.feature.properties.get("rock");
            Value::text_or_null(recorded.and_then(|raw| serde_json::from_str::<String>(raw.get()).ok()))
        }
    }
}

/// The entry of the boulder layer with this name.
const fn same(name: &str) -> Field<BoulderResult> {
    let mut i = 0;
    while i < BOULDER_FIELDS.len() {
        if equal(BOULDER_FIELDS[i].name, name) {
            return BOULDER_FIELDS[i];
        }
        i += 1;
    }
    panic!("a column of the table is a field of the layer")
}

const fn equal(a: &str, b: &str) -> bool {
    let (a, b) = (a.as_bytes(), b.as_bytes());
    if a.len() != b.len() {
        return false;
    }
    let mut i = 0;
    while i < a.len() {
        if a[i] != b[i] {
            return false;
        }
        i += 1;
    }
    true
}

/// Columns of `inspection.csv`, in their order.
pub const INSPECTION_COLUMNS: &[Field<BoulderResult>] = &[
    field!("rank", "", Integer, "Place in the order of inspection, from 1.", |r| {
        r.inspection_rank.map_or(Value::Null, Value::Integer)
    }),
    field!("boulder_id", "", Text, "Name of the boulder; empty when its record has none.", |r| {
        Value::text_or_null(r.feature.id.as_deref())
    }),
    same("status"),
    field!(
        "longitude",
        "deg",
        Number,
        "Longitude, WGS 84; a footprint's interior point, or its first corner where the record was refused.",
        |r| { degrees(r.place_deg().map(|p| p.0)) }
    ),
    field!("latitude", "deg", Number, "Latitude, WGS 84.", |r| degrees(r.place_deg().map(|p| p.1))),
    field!("rock", "", Text, "Rock that was run; as recorded where the record was refused.", |r| rock(r)),
    same("burn_id"),
    same("exposure_used"),
    same("p_spall"),
    same("spall_thickness_mm"),
    same("loss_mm"),
    same("p_source"),
    same("p_source_low"),
    same("p_source_high"),
    same("source_mode"),
    same("source_basis"),
    field!("support", "", Text, "What holds it from below, as recorded.", |r| {
        Value::text_or_null(boulder(r).and_then(|b| b.standing.support).map(|s| s.word()))
    }),
    field!("observed_on", "", Text, "Day of the last look, as recorded.", |r| {
        Value::text_or_null(boulder(r).and_then(|b| b.standing.observed_on).map(|d| d.to_string()))
    }),
    same("reason"),
    same("flags"),
];

/// Writes `inspection.csv`: a header, then the boulders in `order`.
///
/// # Errors
/// Those of the writer.
pub fn write_inspection(out: impl io::Write, results: &[BoulderResult], order: &[usize]) -> io::Result<()> {
    let mut table = csv::Writer::from_writer(out);
    table.write_record(INSPECTION_COLUMNS.iter().map(|c| c.name))?;
    for index in order {
        for column in INSPECTION_COLUMNS {
            match (column.value)(&results[*index]) {
                Value::Text(text) => table.write_field(&*inert(&text))?,
                Value::Null => table.write_field("")?,
                Value::Bool(yes) => table.write_field(yes.to_string())?,
                Value::Integer(n) => table.write_field(n.to_string())?,
                Value::Number(x) if x.is_finite() => table.write_field(x.to_string())?,
                Value::Number(_) => table.write_field("")?,
            }
        }
        table.write_record(None::<&[u8]>)?;
    }
    table.flush()
}

/// Text that no spreadsheet takes for a formula.
///
/// ```
/// use spallcast::output::inspection::inert;
/// assert_eq!(inert("=1+1"), "'=1+1");
/// assert_eq!(inert("B-17"), "B-17");
/// ```
pub fn inert(text: &str) -> Cow<'_, str> {
    let starts_formula = |c: char| matches!(c, '=' | '+' | '-' | '@' | '＝' | '＋' | '－' | '＠');
    let unseen =
        |c: char| c.is_whitespace() || c.is_control() || matches!(c, '\u{200b}'..='\u{200f}' | '\u{2060}' | '\u{feff}');
    let first_visible = text.chars().find(|c| !unseen(*c));
    let runs = first_visible.is_some_and(starts_formula) || text.starts_with(['\t', '\r', '\n']);
    match runs {
        true => Cow::Owned(format!("'{text}")),
        false => Cow::Borrowed(text),
    }
}

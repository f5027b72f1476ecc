//! `inspection.csv`: every boulder once, in the order in which to look at them.
//!
//! **Order** ([`compare`]). A boulder's concern is its upper source likelihood, or its likelihood of spalling where there
//! is no source likelihood. Boulders come in five steps:
//!
//! 1. concern of one half or more;
//! 2. not assessed, for a reason that leaves everything open (a refused record, a rock that is not known, ...);
//! 3. concern from one tenth to one half;
//! 4. not assessed because no recorded fire reached it;
//! 5. concern below one tenth.
//!
//! Within a step: larger concern, then larger expected loss, then name. What is unknown is thus looked at before what is
//! known to be of little concern. The limits are ours (assumption).
//!
//! **Text cells.** A cell of text that a spreadsheet would run as a formula is made inert by an apostrophe before it:
//! when its first character (spaces and invisible characters aside) is `=`, `+`, `-`, `@` or the full-width form of one, or when it begins with a
//! tab or a line break. Numbers stay numbers. An empty cell is a value that was not computed or not recorded.

use std::borrow::Cow;
use std::cmp::Ordering;
use std::io;

use super::fields::{BOULDER_FIELDS, BoulderResult, Field, Value, field};
use crate::flag::Flag;
use crate::site::{Boulder, RockChoice};

/// Concern from which a boulder comes first (A).
const HIGH_CONCERN: f64 = 0.5;
/// Concern below which a boulder comes last (A).
const LOW_CONCERN: f64 = 0.1;

/// Places in the order of inspection: indices into `results`, first to look at first.
pub fn inspection_order(results: &[BoulderResult]) -> Vec<usize> {
    let mut order: Vec<usize> = (0..results.len()).collect();
    order.sort_by(|a, b| compare(&results[*a], &results[*b]));
    order
}

/// Gives every boulder its rank, from 1, and returns the order.
pub fn assign_ranks(results: &mut [BoulderResult]) -> Vec<usize> {
    let order = inspection_order(results);
    for (rank, index) in (1..).zip(&order) {
        results[*index].inspection_rank = Some(rank);
    }
    order
}

/// Which of two boulders to look at first. Ties go to the name, so the order of the file does not matter.
pub fn compare(a: &BoulderResult, b: &BoulderResult) -> Ordering {
    let key = |r: &BoulderResult| (step(r), concern(r).unwrap_or(0.0), loss(r));
    let ((step_a, concern_a, loss_a), (step_b, concern_b, loss_b)) = (key(a), key(b));
    step_a
        .cmp(&step_b)
        .then(concern_b.total_cmp(&concern_a))
        .then(loss_b.total_cmp(&loss_a))
        .then_with(|| a.id().cmp(b.id()))
        .then(a.feature.index.cmp(&b.feature.index))
}

/// Upper source likelihood, or the likelihood of spalling without one.
fn concern(result: &BoulderResult) -> Option<f64> {
    result.source.p_source_high.or(result.assessment.spall.as_ref().map(|s| s.p_spall))
}

fn loss(result: &BoulderResult) -> f64 {
    result.assessment.spall.as_ref().map_or(0.0, |s| s.loss_m)
}

fn step(result: &BoulderResult) -> u8 {
    let unburnt = result.within.is_empty() && result.feature.boulder.is_ok()
        || result.assessment.flags.contains(&Flag::BeyondFlames);
    match concern(result) {
        Some(p) if p >= HIGH_CONCERN => 1,
        None if !unburnt => 2,
        Some(p) if p >= LOW_CONCERN => 3,
        None => 4,
        Some(_) => 5,
    }
}

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

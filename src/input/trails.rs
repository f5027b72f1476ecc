//! Features to trails, roads and crew lines. Heights are kept where the coordinates carry them.
//!
//! A wrong trail is left out with a refusal; the run counts as not wholly assessed, and the message says that the trail is
//! missing from the layer, so that its absence is not taken for a clear path.

use std::collections::HashMap;
use std::ops::ControlFlow;
use std::path::Path;

use super::columns::Columns;
use super::geojson::{Layout, layout, parts, read_features};
use super::geometry;
use super::values::Record;
use super::{InputError, InputFile, foreign_bytes, nothing_inside, open, reading_error};
use crate::diagnostic::{Diagnostic, Severity};
use crate::site::Trail;
use crate::units::SECONDS_PER_MINUTE;

pub(super) const COLUMNS: [&str; 5] = ["trail_id", "name", "passages_per_day", "walking_speed_m_s", "standing_minutes"];
const WANTED: &str = "a LineString or MultiLineString";
const OR_EMPTY: &str = "correct it, or leave it empty when it is not known";
const LEFT_OUT: &str = "until then this trail is missing from the layer, which does not mean that it is clear";

/// What a trail file held.
#[derive(Debug, Clone)]
pub struct Trails {
    /// The usable trails in the order of the file.
    pub trails: Vec<Trail>,
    /// Findings; a refusal among them is a trail that was left out.
    pub findings: Vec<Diagnostic>,
    /// The file as the run record names it.
    pub file: InputFile,
}

/// Reads a trail file. Records that share a name are all left out, so that the order of the file does not matter.
///
/// # Errors
/// When the file cannot be used at all.
pub fn read_trails(path: &Path) -> Result<Trails, InputError> {
    let (text, name) = open(path)?;
    let head = text.head().map_err(|e| reading_error(&name, &e))?;
    let layout = layout(&name, &head).unwrap_or(Layout::Document);
    let mut columns = Columns::new("trail", COLUMNS.to_vec());
    let (mut trails, mut findings, mut records) = (Vec::new(), Vec::new(), 0);
    let mut names: HashMap<String, usize> = HashMap::new();
    read_features(&text, &name, layout, &mut |raw| {
        records += 1;
        let parts = match parts(&raw, &name, "trail") {
            Ok(parts) => parts,
            Err(refusal) => {
                findings.push(left_out(*refusal));
                return ControlFlow::Continue(());
            }
        };
        let mut record = Record::new(&name, "trail", raw.line, &mut columns, &parts.properties);
        let id = record.identify("trail_id", parts.id);
        if let Some(id) = &id {
            *names.entry(id.clone()).or_default() += 1;
        }
        let lines = geometry::parse(parts.geometry, WANTED).and_then(|value| geometry::lines(&value, WANTED));
        let lines = lines.unwrap_or_else(|flaw| {
            let finding = record.finding(Severity::Refusal, flaw.code).found(flaw.found).expected(flaw.expected);
            record.refusals.push(finding.remedy(flaw.remedy));
            Vec::new()
        });
        let trail = Trail {
            id: id.unwrap_or_default(),
            name: record.text("name"),
            lines,
            passages_per_day: record.number("passages_per_day", OR_EMPTY),
            walking_speed_m_s: record.number("walking_speed_m_s", OR_EMPTY),
            standing_s: record.number("standing_minutes", OR_EMPTY).map(|x| x * SECONDS_PER_MINUTE),
        };
        findings.append(&mut record.remarks);
        if record.refusals.is_empty() {
            trails.push((trail, raw.line));
        }
        findings.extend(record.refusals.drain(..).map(left_out));
        ControlFlow::Continue(())
    })?;
    let file = text.finish(&name).map_err(|e| reading_error(&name, &e))?;
    let (single, shared): (Vec<_>, Vec<_>) = trails.into_iter().partition(|(t, _)| names[&t.id] == 1);
    findings.extend(shared.into_iter().map(|(trail, line)| {
        let finding = Diagnostic::new(Severity::Refusal, "duplicate_id", name.as_str())
            .about("trail", Some(&trail.id))
            .at_line(Some(line))
            .found(format!("the name is used by {} records", names[&trail.id]))
            .expected("a name of its own for each trail")
            .remedy("rename them, or merge the parts into one MultiLineString");
        left_out(finding)
    }));
    findings.extend(foreign_bytes(&name, &text));
    findings.append(&mut columns.findings);
    if records == 0 {
        findings.push(nothing_inside(&name, "trail"));
    }
    Ok(Trails { trails: single.into_iter().map(|(t, _)| t).collect(), findings, file })
}

fn left_out(finding: Diagnostic) -> Diagnostic {
    let remedy = finding.remedy.clone().unwrap_or_default();
    finding.remedy(format!("{remedy}; {LEFT_OUT}"))
}

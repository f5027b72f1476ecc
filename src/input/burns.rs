//! Features to burn units.
//!
//! A burn file must be wholly right: were one burn dropped, the boulders inside it would look as if no fire had reached
//! them. One wrong burn therefore makes the run unusable, and the error lists every wrong one.

use std::collections::HashMap;
use std::ops::ControlFlow;
use std::path::Path;

use serde_json::value::RawValue;

use super::columns::Columns;
use super::geojson::{Layout, layout, parts, read_features};
use super::geometry;
use super::values::Record;
use super::{InputError, InputFile, Properties, foreign_bytes, nothing_inside, open, reading_error};
use crate::diagnostic::{Diagnostic, Severity};
use crate::fire::exposure::ExposureClass;
use crate::site::{Burn, GroundAfter};
use crate::units::{SECONDS_PER_MINUTE, W_PER_KW};

pub(super) const COLUMNS: [&str; 10] = [
    "burn_id",
    "residence_min",
    "residence_gsd",
    "exposure",
    "fireline_intensity_kw_m",
    "flame_length_m",
    "spread_rate_m_min",
    "fuel_load_kg_m2",
    "burned_on",
    "ground_after",
];
const WANTED: &str = "a Polygon or MultiPolygon";
const WHY_ALL: &str = "every burn must be right, or boulders inside the wrong one would look unburnt";
const OR_EMPTY: &str = "correct it, or leave it empty when it is not known";

/// What goes through from a burn's feature to its layer unchanged.
#[derive(Debug, Clone)]
pub struct Kept {
    /// Its properties as they came.
    pub properties: Properties,
    /// The feature's own `id` member, as written.
    pub feature_id: Option<Box<RawValue>>,
}

/// What a burn file held.
#[derive(Debug, Clone)]
pub struct Burns {
    /// The burns in the order of the file.
    pub burns: Vec<Burn>,
    /// What each came with, in the same order.
    pub kept: Vec<Kept>,
    /// Notes and warnings.
    pub findings: Vec<Diagnostic>,
    /// The file as the run record names it.
    pub file: InputFile,
}

/// Reads a burn file.
///
/// # Errors
/// When the file cannot be used, or any burn in it is refused.
pub fn read_burns(path: &Path) -> Result<Burns, InputError> {
    let (text, name) = open(path)?;
    let head = text.head().map_err(|e| reading_error(&name, &e))?;
    let layout = layout(&name, &head).unwrap_or(Layout::Document);
    let mut columns = Columns::new("burn", COLUMNS.to_vec());
    let (mut burns, mut kept, mut findings, mut refusals) = (Vec::new(), Vec::new(), Vec::new(), Vec::new());
    let mut lines: HashMap<String, u64> = HashMap::new();
    read_features(&text, &name, layout, &mut |raw| {
        let parts = match parts(&raw, &name, "burn") {
            Ok(parts) => parts,
            Err(refusal) => {
                refusals.push(*refusal);
                return ControlFlow::Continue(());
            }
        };
        let mut record = Record::new(&name, "burn", raw.line, &mut columns, &parts.properties);
        let id = record.identify("burn_id", parts.id);
        if let Some(first) = id.as_ref().and_then(|id| lines.insert(id.clone(), raw.line)) {
            let finding = record
                .finding(Severity::Refusal, "duplicate_id")
                .found(format!("the name was used before, in line {first}"))
                .expected("a name of its own for each burn")
                .remedy("rename one, or merge the parts into one MultiPolygon");
            record.refusals.push(finding);
        }
        let area = geometry::parse(parts.geometry, WANTED).and_then(|value| geometry::area(&value, WANTED));
        let area = area.map_err(|flaw| {
            let finding = record.finding(Severity::Refusal, flaw.code).found(flaw.found).expected(flaw.expected);
            record.refusals.push(finding.remedy(flaw.remedy));
        });
        let burn = Burn {
            id: id.unwrap_or_default(),
            area: area.unwrap_or_else(|()| geo::MultiPolygon::new(Vec::new())),
            residence_s: record.number("residence_min", OR_EMPTY).map(|x| x * SECONDS_PER_MINUTE),
            residence_gsd: record.number("residence_gsd", OR_EMPTY),
            exposure: record.word("exposure", ExposureClass::parse, ExposureClass::ALL, ExposureClass::word),
            fireline_intensity_w_m: record.number("fireline_intensity_kw_m", OR_EMPTY).map(|x| x * W_PER_KW),
            flame_length_m: record.number("flame_length_m", OR_EMPTY),
            spread_rate_m_s: record.number("spread_rate_m_min", OR_EMPTY).map(|x| x / SECONDS_PER_MINUTE),
            fuel_load_kg_m2: record.number("fuel_load_kg_m2", OR_EMPTY),
            burned_on: record.date("burned_on"),
            ground_after: record.word("ground_after", GroundAfter::parse, GroundAfter::ALL, GroundAfter::word),
        };
        if burn.residence_s.is_none() && burn.exposure.is_none() && record.refusals.is_empty() {
            let finding = record
                .finding(Severity::Warning, "burn_without_fire")
                .found("there is neither residence_min nor exposure")
                .expected("at least one of them")
                .remedy("add one; until then only boulders with their own residence_min or exposure are assessed here");
            record.remarks.push(finding);
        }
        findings.append(&mut record.remarks);
        refusals.append(&mut record.refusals);
        burns.push(burn);
        kept.push(Kept {
            properties: Properties::from_pairs(parts.properties.iter().map(|(n, v)| (n.as_ref(), v.get()))),
            feature_id: parts.id.map(ToOwned::to_owned),
        });
        ControlFlow::Continue(())
    })?;
    let file = text.finish(&name).map_err(|e| reading_error(&name, &e))?;
    findings.extend(foreign_bytes(&name, &text));
    findings.append(&mut columns.findings);
    if burns.is_empty() && refusals.is_empty() {
        findings.push(nothing_inside(&name, "burn"));
    }
    let mut refusals = refusals.into_iter().map(|finding| {
        let remedy = match &finding.remedy {
            Some(remedy) => format!("{remedy}: {WHY_ALL}"),
            None => WHY_ALL.to_owned(),
        };
        finding.remedy(remedy)
    });
    match refusals.next() {
        Some(first) => Err(InputError { others: refusals.collect(), ..InputError::new(first) }),
        None => Ok(Burns { burns, kept, findings, file }),
    }
}

//! The document: what goes in, the template, the parts put together.

use askama::Template;
use base64::Engine;
use base64::engine::general_purpose::STANDARD as BASE64;
use jiff::civil::Date;
use miniz_oxide::deflate::compress_to_vec;
use serde::Serialize;
use sha2::{Digest, Sha256};

use super::classes::{SOURCE_CLASSES, SourceClass};
use super::data::{DETAILED_MAX, LISTED_MAX, data};
use super::frame::Frame;
use super::summary::{self, NamedBoulder, ProposalMetres, ReasonCount, WorstStretch};
use crate::output::cautions::{CAUTIONS, Caution};
use crate::output::run_record::DiagnosticRecord;
use crate::output::{BoulderResult, BurnResult, InputRecord, RunRecord, SegmentRow};
use crate::rock::Catalogue;

/// Findings that the page lists; the run record holds all.
const FINDINGS_LISTED: usize = 200;

/// Data up to this length stand as plain text, bytes; beyond it they are packed (deflate, RFC 1951, as base64).
const PLAIN_MAX: usize = 2_000_000;
/// Effort of the packing, 0 to 10: beyond this a page grows smaller by a few percent and takes twice as long.
const LEVEL: u8 = 6;

const STYLE: &str = include_str!("templates/page.css");
const SCRIPT: [&str; 7] = [
    include_str!("script/base.js"),
    include_str!("script/map.js"),
    include_str!("script/card.js"),
    include_str!("script/table.js"),
    include_str!("script/strips.js"),
    include_str!("script/charts.js"),
    include_str!("script/main.js"),
];

/// Everything that a page shows.
#[derive(Debug, Clone, Copy)]
pub struct PageInputs<'a> {
    /// Boulders.
    pub results: &'a [BoulderResult],
    /// Order of inspection: places in `results`, every one once.
    pub order: &'a [usize],
    /// Burns.
    pub burns: &'a [BurnResult],
    /// Trail stretches; empty without trails.
    pub rows: &'a [SegmentRow],
    /// What was run.
    pub record: &'a RunRecord,
    /// Day until which the figures may be used without looking again.
    pub valid_until: Date,
    /// Temperature and stress through depth of some boulders; may be empty.
    pub profiles: &'a [ProfileOfBoulder],
}

/// Temperature and stress of one boulder through time and depth, in the units of the page.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct ProfileOfBoulder {
    /// The boulder's name.
    pub id: String,
    /// Depths, mm, surface first.
    pub depth_mm: Vec<f64>,
    /// Times from the start of the fire, s.
    pub times_s: Vec<f64>,
    /// Temperature, C, by time, then depth.
    pub temperature_c: Vec<Vec<f64>>,
    /// Compression along the face, MPa, by time, then depth.
    pub skin_stress_mpa: Vec<Vec<f64>>,
    /// What came off and when.
    pub events: Vec<ProfileEvent>,
}

/// One event of a profile.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct ProfileEvent {
    /// Word of the spall family.
    pub family: String,
    /// When, s from the start of the fire.
    pub time_s: f64,
    /// Thickness of what came off, mm.
    pub depth_mm: f64,
}

#[derive(Template)]
#[template(path = "page.html", config = "src/report/askama.toml")]
struct Document<'a> {
    policy: String,
    css: &'a str,
    script: &'a str,
    data: &'a str,
    packed: bool,
    program_version: &'a str,
    catalogue_version: &'a str,
    valid_until: String,
    horizon_days: String,
    records: String,
    assessed: String,
    not_assessed: String,
    with_source: String,
    reasons: Vec<ReasonCount>,
    burn_count: usize,
    trail_count: usize,
    stretch_count: usize,
    proposals: Vec<ProposalMetres>,
    worst: Vec<WorstStretch>,
    unknown_stretches: usize,
    unknown_metres: String,
    first_boulders: Vec<NamedBoulder>,
    cautions: &'a [Caution],
    classes: &'a [SourceClass],
    notes: Vec<String>,
    centre: String,
    draws: usize,
    seed: u64,
    started_at: &'a str,
    inputs: &'a [InputRecord],
    findings: &'a [DiagnosticRecord],
    finding_count: usize,
}

/// The page as one HTML document that loads nothing.
///
/// # Panics
/// When `order` names a place outside `results`.
pub fn page(inputs: &PageInputs) -> String {
    let record = inputs.record;
    let frame = frame(inputs);
    // A function of its own, which may wait for the data.
    let script = format!("(async function () {{\n\"use strict\";\n{}\n}})();", SCRIPT.join("\n"));
    let data = data(inputs, &frame, &Catalogue::embedded());
    let packed = data.len() > PLAIN_MAX;
    let data = if packed { BASE64.encode(compress_to_vec(data.as_bytes(), LEVEL)) } else { data };
    let (unknown_stretches, unknown_metres) = summary::unknown_stretches(inputs.rows);
    let mut trails: Vec<&str> = inputs.rows.iter().map(|r| r.trail_id.as_str()).collect();
    trails.dedup();
    let document = Document {
        policy: policy(&script),
        css: STYLE,
        script: &script,
        data: &data,
        packed,
        program_version: record.program_version,
        catalogue_version: record.catalogue_version,
        valid_until: inputs.valid_until.to_string(),
        horizon_days: record.settings.horizon_days.to_string(),
        records: summary::count(record.counts.records),
        assessed: summary::count(record.counts.assessed),
        not_assessed: summary::count(record.counts.not_assessed),
        with_source: summary::count(record.counts.with_source),
        reasons: summary::reasons(&record.counts),
        burn_count: inputs.burns.len(),
        trail_count: trails.len(),
        stretch_count: inputs.rows.len(),
        proposals: summary::proposal_metres(inputs.rows),
        worst: summary::worst_stretches(inputs.rows),
        unknown_stretches,
        unknown_metres,
        first_boulders: summary::first_boulders(inputs.results, inputs.order),
        cautions: CAUTIONS,
        classes: &SOURCE_CLASSES,
        notes: notes(inputs, &frame),
        centre: centre(&frame),
        draws: record.draws,
        seed: record.seed,
        started_at: record.started_at.as_deref().unwrap_or_default(),
        inputs: &record.inputs,
        findings: &record.diagnostics[..record.diagnostics.len().min(FINDINGS_LISTED)],
        finding_count: record.diagnostics.len(),
    };
    document.render().expect("text renders into memory")
}

/// What the page may do: its own style and script, known by their hashes, and nothing else.
fn policy(script: &str) -> String {
    let hash = |text: &str| format!("'sha256-{}'", BASE64.encode(Sha256::digest(text)));
    format!(
        "default-src 'none'; style-src {}; script-src {}; form-action 'none'; base-uri 'none'",
        hash(STYLE),
        hash(script)
    )
}

/// The plane about the burns, or about the boulders without a burn.
fn frame(inputs: &PageInputs) -> Frame {
    let corners = || inputs.burns.iter().flat_map(|b| &b.burn.area.0).flat_map(|p| p.exterior().coords());
    match corners().next() {
        Some(_) => Frame::about(corners().map(|c| (c.x, c.y))),
        None => Frame::about(inputs.results.iter().filter_map(|r| r.place_deg())),
    }
}

fn centre(frame: &Frame) -> String {
    let (lat, lon) = (frame.lat_deg, frame.lon_deg);
    let (north, east) = (if lat < 0.0 { "S" } else { "N" }, if lon < 0.0 { "W" } else { "E" });
    format!("{:.4}° {north}, {:.4}° {east}", lat.abs(), lon.abs())
}

/// What this page leaves out.
fn notes(inputs: &PageInputs, frame: &Frame) -> Vec<String> {
    let mut notes = Vec::new();
    let total = inputs.order.len();
    if total > DETAILED_MAX {
        notes.push(format!(
            "This page carries every figure of the first {DETAILED_MAX} boulders in the order of inspection. The other {} \
             are on the map and in the table with fewer columns; all their figures are in boulders.geojson.",
            total.min(LISTED_MAX) - DETAILED_MAX
        ));
    }
    if total > LISTED_MAX {
        notes.push(format!(
            "{} further boulders are neither on the map nor in the table: they are counted above and stand in \
             boulders.geojson and inspection.csv.",
            total - LISTED_MAX
        ));
    }
    let away = |r: &BoulderResult| r.place_deg().is_some_and(|(lon, lat)| frame.metres(lon, lat).is_none());
    let far = inputs.results.iter().filter(|r| away(r)).count();
    if far > 0 {
        notes.push(format!("{far} boulder records lie far from the burns, or nowhere on Earth, and are not on the map; check their coordinates."));
    }
    notes
}

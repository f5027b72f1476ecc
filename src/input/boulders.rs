//! Features and rows to boulders, one at a time.
//!
//! Each record of the file becomes one [`BoulderFeature`]: its geometry and properties as they came, and either the
//! boulder in SI or the finding that refuses it. Memory is one record, plus 16 bytes a record (twice that just after the
//! table of them has grown) where repeated names are watched for while streaming.

use std::borrow::Cow;
use std::collections::HashMap;
use std::collections::hash_map::{DefaultHasher, Entry};
use std::hash::{Hash, Hasher};
use std::io::Read;
use std::ops::ControlFlow;
use std::path::Path;

use ::geojson::{Geometry, GeometryValue, Position as RawPosition};
use serde_json::value::RawValue;

use super::columns::Columns;
use super::geojson::{RawFeature, layout, parts, read_features};
use super::geometry::{self, Flaw};
use super::text::Text;
use super::values::Record;
use super::{InputError, InputFile, Properties, boulder_record, foreign_bytes, nothing_inside, open, reading_error};
use crate::diagnostic::{Diagnostic, Severity};
use crate::rock::Catalogue;
use crate::site::{Boulder, Kind, Position, RockChoice};

/// Columns a table cannot do without.
const PLACE: [&str; 2] = ["longitude", "latitude"];
/// What a boulder's geometry may be.
const WANTED: &str = "a Point or a Polygon footprint";
/// One record of the inventory.
#[derive(Debug, Clone)]
pub struct BoulderFeature {
    /// Its place in the file, from 0.
    pub index: usize,
    /// Its name as found, also for refused records.
    pub id: Option<String>,
    /// Its geometry as it came, with heights; `None` where there is none that a map could show.
    pub geometry: Option<Geometry>,
    /// Its properties as they came.
    pub properties: Properties,
    /// The feature's own `id` member, as written.
    pub feature_id: Option<Box<RawValue>>,
    /// The boulder, or why it is not assessed.
    pub boulder: Result<Boulder, Diagnostic>,
    /// What else was found.
    pub remarks: Vec<Diagnostic>,
}

/// What to do about repeated names.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Duplicates {
    /// Refuse the second and later records of a name as they come: for streams.
    RefuseLater,
    /// Leave it to [`refuse_duplicates`], which refuses all of them, so that the order of the file does not matter.
    LeaveToCaller,
}

/// What was read.
#[derive(Debug, Clone, PartialEq)]
pub struct Summary {
    /// The file as the run record names it; its first part only when the sink ended the reading.
    pub file: InputFile,
    /// Records handed on.
    pub records: usize,
    /// Findings about the file as a whole.
    pub findings: Vec<Diagnostic>,
}

/// Reads a boulder file, GeoJSON or CSV by its content, handing each record to `sink`.
///
/// # Errors
/// When the file cannot be used at all; records before the damage have been handed on by then.
pub fn read_boulders(
    path: &Path,
    catalogue: &Catalogue,
    duplicates: Duplicates,
    sink: impl FnMut(BoulderFeature) -> ControlFlow<()>,
) -> Result<Summary, InputError> {
    let (text, name) = open(path)?;
    read(&text, &name, catalogue, duplicates, sink)
}

/// Reads boulders from an open source such as standard input; `name` is how messages call it.
///
/// # Errors
/// As [`read_boulders`]. An empty source is no error: it is an empty inventory.
pub fn read_boulders_from(
    source: impl Read + 'static,
    name: &str,
    catalogue: &Catalogue,
    duplicates: Duplicates,
    sink: impl FnMut(BoulderFeature) -> ControlFlow<()>,
) -> Result<Summary, InputError> {
    read(&Text::new(source), name, catalogue, duplicates, sink)
}

fn read(
    text: &Text,
    name: &str,
    catalogue: &Catalogue,
    duplicates: Duplicates,
    mut sink: impl FnMut(BoulderFeature) -> ControlFlow<()>,
) -> Result<Summary, InputError> {
    let head = text.head().map_err(|e| reading_error(name, &e))?;
    let known = boulder_record::columns();
    let mut reader = Reader { name, catalogue, columns: Columns::new("boulder", known.clone()) };
    let mut findings = Vec::new();
    let mut seen: HashMap<NameHash, u32> = HashMap::new();
    let mut stopped = false;
    let mut hand_on = |mut feature: BoulderFeature, line: u64| {
        if duplicates == Duplicates::RefuseLater
            && let Some(id) = feature.id.clone()
        {
            match seen.entry(hash(&id)) {
                Entry::Vacant(free) => {
                    free.insert(u32::try_from(line).unwrap_or(u32::MAX));
                }
                Entry::Occupied(first) => {
                    let found = format!("the name was used before, in line {}", first.get());
                    refuse(&mut feature, repeated(name, &id, &found).at_line(Some(line)));
                }
            }
        }
        let flow = sink(feature);
        stopped |= flow.is_break();
        flow
    };
    let blank = head.iter().all(u8::is_ascii_whitespace);
    let records = if blank && name == super::STANDARD_INPUT {
        0
    } else if let Some(layout) = layout(name, &head) {
        read_features(text, name, layout, &mut |raw| {
            let line = raw.line;
            hand_on(reader.feature(&raw), line)
        })?
    } else {
        let table = super::csv::read_rows(text, name, &PLACE, &known, &mut |row| {
            let line = row.line;
            hand_on(reader.row(row), line)
        })?;
        findings.extend(table.findings);
        table.rows
    };
    // Whoever has enough does not wait for the rest of the pipe.
    let file = if stopped { text.so_far(name) } else { text.finish(name).map_err(|e| reading_error(name, &e))? };
    findings.extend(foreign_bytes(name, text));
    findings.extend(reader.columns.findings);
    if records == 0 {
        findings.push(nothing_inside(name, "boulder"));
    }
    Ok(Summary { file, records, findings })
}

/// Refuses every record whose name occurs more than once.
pub fn refuse_duplicates(features: &mut [BoulderFeature], file: &str) {
    let mut counts: HashMap<String, usize> = HashMap::new();
    for id in features.iter().filter_map(|f| f.id.as_ref()) {
        *counts.entry(id.clone()).or_default() += 1;
    }
    for feature in features {
        if let Some((id, n)) = feature.id.as_ref().and_then(|id| counts.get(id).map(|n| (id, *n)))
            && n > 1
        {
            let finding = repeated(file, id, &format!("the name is used by {n} records"));
            refuse(feature, finding);
        }
    }
}

fn repeated(file: &str, id: &str, found: &str) -> Diagnostic {
    Diagnostic::new(Severity::Refusal, "duplicate_id", file)
        .about("boulder", Some(id))
        .found(found)
        .expected("a name of its own for each boulder")
        .remedy("rename or remove the copies; none is preferred by guessing")
}

/// Makes `finding` the reason of a feature; a reason that was there before becomes a remark.
fn refuse(feature: &mut BoulderFeature, finding: Diagnostic) {
    if let Err(before) = std::mem::replace(&mut feature.boulder, Err(finding)) {
        feature.remarks.push(before);
    }
}

/// 96 bits of a name: among a hundred million names the chance that two share them is under one in ten million million.
type NameHash = [u32; 3];

fn hash(id: &str) -> NameHash {
    let half = |salt: u8| {
        let mut hasher = DefaultHasher::new();
        (salt, id).hash(&mut hasher);
        hasher.finish()
    };
    let (first, second) = (half(1), half(2));
    [first as u32, (first >> 32) as u32, second as u32]
}

struct Reader<'r> {
    name: &'r str,
    catalogue: &'r Catalogue,
    columns: Columns,
}

impl Reader<'_> {
    fn feature(&mut self, raw: &RawFeature<'_>) -> BoulderFeature {
        let mut feature = BoulderFeature {
            index: raw.index,
            id: None,
            geometry: None,
            properties: Properties::default(),
            feature_id: None,
            boulder: Err(Diagnostic::new(Severity::Refusal, "not_read", self.name)),
            remarks: Vec::new(),
        };
        let parts = match parts(raw, self.name, "boulder") {
            Ok(parts) => parts,
            Err(refusal) => {
                feature.boulder = Err(*refusal);
                return feature;
            }
        };
        feature.properties = Properties::from_pairs(parts.properties.iter().map(|(n, v)| (n.as_ref(), v.get())));
        feature.feature_id = parts.id.map(ToOwned::to_owned);
        let geometry = geometry::parse(parts.geometry, WANTED);
        let mut record = Record::new(self.name, "boulder", raw.line, &mut self.columns, &parts.properties);
        feature.id = record.identify("boulder_id", parts.id);
        let place = match &geometry {
            Ok(value) => geometry::standpoint(value, WANTED),
            Err(flaw) => Err(flaw.clone()),
        };
        feature.geometry = geometry.ok().map(|value| Geometry { bbox: None, value, foreign_members: None });
        self.finish(&mut feature, record, place);
        feature
    }

    fn row(&mut self, row: super::csv::Row) -> BoulderFeature {
        let cells: Vec<(Cow<'_, str>, Box<RawValue>)> = row
            .cells
            .iter()
            .map(|(n, json)| {
                (Cow::Borrowed(n.as_str()), RawValue::from_string(json.clone()).expect("a cell becomes valid JSON"))
            })
            .collect();
        let borrowed: Vec<(Cow<'_, str>, &RawValue)> = cells.iter().map(|(n, v)| (n.clone(), &**v)).collect();
        let mut record = Record::new(self.name, "boulder", row.line, &mut self.columns, &borrowed);
        let mut feature = BoulderFeature {
            index: row.index,
            id: record.identify("boulder_id", None),
            geometry: None,
            properties: Properties::from_pairs(row.cells.iter().map(|(n, v)| (n.as_str(), v.as_str()))),
            feature_id: None,
            boulder: Err(Diagnostic::new(Severity::Refusal, "not_read", self.name)),
            remarks: Vec::new(),
        };
        if let Some((found, remedy)) = row.ragged {
            let finding = record
                .finding(Severity::Refusal, "row_ragged")
                .found(found)
                .expected(format!("{} as in the header", row.cells.len()))
                .remedy(remedy);
            // Cells may have moved: nothing else of the row is believed.
            feature.boulder = Err(finding);
            return feature;
        }
        if row.cells.iter().any(|(_, json)| json.contains("\\n")) {
            record.warn(
                "cell_with_line_break",
                "a cell",
                "text of several lines",
                "one row of the sheet a line",
                "if rows are missing after this one, look for an open quote here",
            );
        }
        let remedy = "write decimal degrees in WGS 84";
        let place = match (record.coordinate("longitude", remedy), record.coordinate("latitude", remedy)) {
            (Some(lon_deg), Some(lat_deg)) => {
                geometry::place_on_earth(lon_deg, lat_deg).map(|()| Position { lon_deg, lat_deg, height_m: None })
            }
            _ => Err(Flaw {
                code: "geometry_missing",
                found: "longitude or latitude is missing or unreadable".to_owned(),
                expected: "both, in degrees".to_owned(),
                remedy: "add them or remove the row".to_owned(),
            }),
        };
        if let Ok(place) = &place {
            let mut numbers = vec![place.lon_deg, place.lat_deg];
            numbers.extend(record.peek("elevation_m"));
            let value = GeometryValue::Point { coordinates: RawPosition::from(numbers) };
            feature.geometry = Some(Geometry { bbox: None, value, foreign_members: None });
        }
        self.finish(&mut feature, record, place);
        feature
    }

    /// Reads the rest of the record and settles the feature's fate.
    fn finish(&mut self, feature: &mut BoulderFeature, mut record: Record<'_>, place: Result<Position, Flaw>) {
        let position = match place {
            Ok(position) => Some(position),
            Err(flaw) => {
                let finding = record
                    .finding(Severity::Refusal, flaw.code)
                    .found(flaw.found)
                    .expected(flaw.expected)
                    .remedy(flaw.remedy);
                // The cause of an unreadable coordinate is already there when a cell could not be read.
                if flaw.code != "geometry_missing" || record.refusals.is_empty() || feature.id.is_none() {
                    record.refusals.push(finding);
                }
                None
            }
        };
        let rock = boulder_record::rock(&mut record, self.catalogue);
        let rock_name = match &rock {
            Some(RockChoice::Named(key)) => key.clone(),
            _ => "the rock".to_owned(),
        };
        let kind = record.word("kind", Kind::parse, Kind::ALL, Kind::word).unwrap_or(Kind::Boulder);
        let (radius_m, axes_m) = boulder_record::size(&mut record, kind);
        let heating = boulder_record::heating(&mut record, &rock_name);
        let standing = boulder_record::standing(&mut record);
        let elevation_m = record.number("elevation_m", "give metres above sea level, or leave it empty");
        let mut refusals = std::mem::take(&mut record.refusals).into_iter();
        feature.remarks = std::mem::take(&mut record.remarks);
        feature.boulder = match (refusals.next(), feature.id.clone(), position, rock) {
            (None, Some(id), Some(mut position), Some(rock)) => {
                position.height_m = elevation_m.or(position.height_m);
                Ok(Boulder { id, position, rock, kind, radius_m, axes_m, heating, standing })
            }
            (Some(first), ..) => Err(first),
            (None, ..) => unreachable!("a record without name, place or rock has been refused"),
        };
        feature.remarks.extend(refusals);
    }
}

//! The page's data as one JSON text: columns by the registries, geometry in metres, profiles.
//!
//! Columns come from [`INSPECTION_COLUMNS`] and [`BOULDER_FIELDS`], [`BURN_FIELDS`] and [`TRAIL_FIELDS`], one list of values
//! each. Text cells are places in one list of texts; null stays null. What was recorded stands once a set of names: the
//! names, then a list of values a record. Outlines are simplified to [`OUTLINE_M`]; a boulder's place is given to
//! [`PLACE_M`], and its longitude and latitude stand beside it only where it has no place on the map.

use std::borrow::Cow;
use std::collections::{BTreeMap, HashMap};
use std::io::Write;

use geo::{BooleanOps, Coord, LineString, MapCoords, MultiPolygon, Polygon, Simplify};
use serde::Serialize;

use super::classes::{PROPOSAL_CLASSES, SOURCE_CLASSES, weight};
use super::frame::Frame;
use super::label::label;
use super::page::PageInputs;
use crate::fire::exposure::ExposureClass;
use crate::flag::Flag;
use crate::input::Properties;
use crate::output::fields::{Field, Value};
use crate::output::inspection::INSPECTION_COLUMNS;
use crate::output::{BOULDER_FIELDS, BURN_FIELDS, BoulderResult, TRAIL_FIELDS};
use crate::rock::{Catalogue, Property};
use crate::site::RockChoice;
use crate::units::SECONDS_PER_MINUTE;

/// Boulders with every figure on the page.
pub const DETAILED_MAX: usize = 20_000;
/// Boulders with a row on the page.
pub const LISTED_MAX: usize = 200_000;
/// Boulders of a stretch in the order of their contributions; the others stand after them by rank, as steps from one to
/// the next.
pub const ORDERED_OF_STRETCH: usize = 30;
/// Largest error of a simplified outline or trail, m.
pub const OUTLINE_M: f64 = 0.5;

/// Places of boulders are rounded to this, m: the sixth decimal of a degree.
pub const PLACE_M: f64 = 0.01;

/// The list of texts that text cells point into.
#[derive(Default)]
struct Texts {
    list: Vec<String>,
    places: HashMap<String, usize>,
}

impl Texts {
    fn place(&mut self, text: &str) -> usize {
        if let Some(place) = self.places.get(text) {
            return *place;
        }
        self.places.insert(text.to_owned(), self.list.len());
        self.list.push(text.to_owned());
        self.list.len() - 1
    }

    fn cell<R>(&mut self, out: &mut Vec<u8>, field: &Field<R>, row: &R) {
        match (field.value)(row) {
            Value::Text(text) => {
                let place = self.place(&text);
                write!(out, "{place}").expect("memory takes it");
            }
            value => value.write_json(out).expect("memory takes it"),
        }
    }

    /// One list of values a field.
    fn columns<R>(&mut self, out: &mut Vec<u8>, rows: &[R], fields: &[Field<R>]) {
        list(out, fields.iter(), |out, field| list(out, rows.iter(), |out, row| self.cell(out, field, row)));
    }
}

/// A JSON array.
fn list<T>(out: &mut Vec<u8>, items: impl Iterator<Item = T>, mut write: impl FnMut(&mut Vec<u8>, T)) {
    out.push(b'[');
    for (i, item) in items.enumerate() {
        if i > 0 {
            out.push(b',');
        }
        write(out, item);
    }
    out.push(b']');
}

fn json(out: &mut Vec<u8>, value: &(impl Serialize + ?Sized)) {
    serde_json::to_writer(out, value).expect("numbers and text are JSON");
}

fn key(out: &mut Vec<u8>, name: &str) {
    if !matches!(out.last(), Some(b'{')) {
        out.push(b',');
    }
    json(out, name);
    out.push(b':');
}

#[derive(Serialize)]
struct FieldHead {
    name: &'static str,
    label: String,
    unit: &'static str,
    kind: &'static str,
    meaning: &'static str,
}

fn heads<R>(fields: &[Field<R>]) -> Vec<FieldHead> {
    let head = |f: &Field<R>| FieldHead {
        name: f.name,
        label: label(f.name),
        unit: f.unit,
        kind: f.kind.word(),
        meaning: f.meaning,
    };
    fields.iter().map(head).collect()
}

/// The columns of a boulder: those of the table without reason and flags, then these, then the rest of the layer.
fn boulder_fields() -> (Vec<Field<BoulderResult>>, usize) {
    let late = |f: &&Field<BoulderResult>| matches!(f.name, "reason" | "flags");
    let mut fields: Vec<Field<BoulderResult>> = INSPECTION_COLUMNS.iter().filter(|f| !late(f)).copied().collect();
    let short = fields.len();
    for field in BOULDER_FIELDS {
        // The rank stands under its name of the table.
        if field.name != "inspection_rank" && !fields.iter().any(|f| f.name == field.name) {
            fields.push(*field);
        }
    }
    (fields, short)
}

/// Residence time of the fire that governs a boulder, min, and where it comes from: `boulder`, `burn` or `class`.
fn residence(result: &BoulderResult, inputs: &PageInputs) -> Option<(f64, &'static str)> {
    result.assessment.spall.as_ref()?;
    let boulder = result.feature.boulder.as_ref().ok()?;
    let burn = || inputs.burns.iter().find(|b| Some(b.burn.id.as_str()) == result.assessment.burn_id.as_deref());
    let own = boulder.heating.residence_s.map(|s| (s, "boulder"));
    let of_burn = || burn().and_then(|b| b.burn.residence_s).map(|s| (s, "burn"));
    let of_class = || {
        let class = ExposureClass::parse(result.assessment.exposure_used.as_deref()?)?;
        Some((class.figures().residence_s.median(), "class"))
    };
    // A class of the boulder's own overrules the burn's time.
    let found = match (own, boulder.heating.exposure) {
        (Some(own), _) => Some(own),
        (None, Some(_)) => of_class(),
        (None, None) => of_burn().or_else(of_class),
    };
    found.map(|(s, from)| (s / SECONDS_PER_MINUTE, from))
}

fn tenth(x: f64) -> f64 {
    (x * 10.0).round() / 10.0 + 0.0
}

fn flat(out: &mut Vec<u8>, frame: &Frame, places: impl Iterator<Item = (f64, f64)>) {
    let line: LineString<f64> =
        places.filter_map(|(lon, lat)| frame.metres(lon, lat)).map(|(x, y)| Coord { x, y }).collect();
    let numbers: Vec<f64> = line.simplify(OUTLINE_M).coords().flat_map(|c| [tenth(c.x), tenth(c.y)]).collect();
    json(out, &numbers);
}

#[derive(Serialize)]
struct RockFigure {
    property: String,
    centre: f64,
    unit: &'static str,
    basis: &'static str,
    source: String,
}

/// Figures and sources of the rocks that were run.
fn rocks(inputs: &PageInputs, catalogue: &Catalogue) -> BTreeMap<String, Vec<RockFigure>> {
    let mut rocks = BTreeMap::new();
    for result in inputs.results {
        let Ok(boulder) = &result.feature.boulder else { continue };
        let RockChoice::Named(name) = &boulder.rock else { continue };
        if rocks.contains_key(name) {
            continue;
        }
        let user = inputs.record.settings.rocks.iter().find(|r| r.name == *name);
        let Some(rock) = catalogue.rock(user.map_or(name.as_str(), |u| u.like.as_str())) else { continue };
        let mut figures: Vec<RockFigure> = Property::ALL
            .iter()
            .map(|p| {
                let figure = rock.figure(*p);
                let own = user.and_then(|u| u.figures.iter().find(|f| f.property == p.key()).map(|f| (u, f)));
                let si = own.map_or(figure.distribution.median(), |(_, f)| f.distribution.centre);
                let (basis, source) = match own {
                    Some((u, _)) => ("settings", u.source.clone()),
                    None => (figure.basis.word(), figure.source.clone()),
                };
                let property = label(p.input_name());
                RockFigure { property, centre: si / p.si_per_input(), unit: p.input_unit(), basis, source }
            })
            .collect();
        figures.retain(|f| f.centre.is_finite());
        rocks.insert(name.clone(), figures);
    }
    rocks
}

/// The data as JSON in which no `<` stands, so that it can stand in a script element.
pub fn data(inputs: &PageInputs, frame: &Frame, catalogue: &Catalogue) -> String {
    let mut out = Vec::from(b"{");
    let mut texts = Texts::default();
    let listed: Vec<usize> = inputs.order.iter().copied().take(LISTED_MAX).collect();
    let detailed = listed.len().min(DETAILED_MAX);

    key(&mut out, "frame");
    json(&mut out, &BTreeMap::from([("lon", frame.lon_deg), ("lat", frame.lat_deg)]));
    key(&mut out, "classes");
    json(&mut out, &SOURCE_CLASSES);
    key(&mut out, "proposals");
    list(&mut out, PROPOSAL_CLASSES.iter(), |out, c| {
        let (word, weight) = (c.proposal.word(), weight(c.proposal));
        json(out, &serde_json::json!({ "word": word, "weight": weight }));
    });
    key(&mut out, "flags");
    json(&mut out, &Flag::ALL.iter().map(|f| (f.code(), f.meaning())).collect::<BTreeMap<_, _>>());
    key(&mut out, "rocks");
    json(&mut out, &rocks(inputs, catalogue));
    key(&mut out, "table");
    json(&mut out, &INSPECTION_COLUMNS.iter().map(|c| c.name).collect::<Vec<_>>());

    key(&mut out, "boulders");
    boulders(&mut out, &mut texts, inputs, frame, &listed, detailed);
    key(&mut out, "burns");
    burns(&mut out, &mut texts, inputs, frame);
    key(&mut out, "trails");
    trails(&mut out, &mut texts, inputs, frame, &listed);
    key(&mut out, "profiles");
    json(&mut out, inputs.profiles);
    key(&mut out, "strings");
    json(&mut out, &texts.list);
    out.push(b'}');
    let text = String::from_utf8(out).expect("JSON is UTF-8");
    // Outside of text, JSON has no angle bracket; within text the escape means the same.
    text.replace('<', "\\u003c").replace('\u{2028}', "\\u2028").replace('\u{2029}', "\\u2029")
}

fn boulders(
    out: &mut Vec<u8>,
    texts: &mut Texts,
    inputs: &PageInputs,
    frame: &Frame,
    listed: &[usize],
    detailed: usize,
) {
    let (fields, short) = boulder_fields();
    let rows = || listed.iter().map(|i| &inputs.results[*i]);
    let places: Vec<Option<(f64, f64)>> =
        rows().map(|r| r.place_deg().and_then(|(lon, lat)| frame.metres(lon, lat))).collect();
    out.push(b'{');
    key(out, "count");
    json(out, &listed.len());
    key(out, "fields");
    json(out, &heads(&fields));
    key(out, "columns");
    list(out, fields.iter().enumerate(), |out, (i, field)| {
        let kept = if i < short { listed.len() } else { detailed };
        let degrees = matches!(field.name, "longitude" | "latitude");
        list(out, rows().zip(&places).take(kept), |out, (row, place)| match place {
            // The page has it from the place on the map.
            Some(_) if degrees => out.extend_from_slice(b"null"),
            _ => texts.cell(out, field, row),
        });
    });
    key(out, "x");
    list(out, places.iter(), |out, p| number(out, p.map(|(x, _)| x)));
    key(out, "y");
    list(out, places.iter(), |out, p| number(out, p.map(|(_, y)| y)));
    key(out, "within");
    list(out, rows(), |out, r| json(out, &r.within));
    key(out, "residence");
    list(out, rows(), |out, r| json(out, &residence(r, inputs).map(|(min, from)| (tenth(min * 100.0) / 100.0, from))));
    key(out, "input");
    recorded(out, &rows().take(detailed).map(|r| &r.feature.properties).collect::<Vec<_>>());
    out.push(b'}');
}

/// A length to [`PLACE_M`], or null.
fn number(out: &mut Vec<u8>, x: Option<f64>) {
    match x {
        Some(x) => write!(out, "{}", format!("{:.2}", x + 0.0).trim_end_matches('0').trim_end_matches('.')),
        None => write!(out, "null"),
    }
    .expect("memory takes it");
}

/// What records hold: every set of names once, then for each record the place of its set and its values as they came.
fn recorded(out: &mut Vec<u8>, records: &[&Properties]) {
    let mut sets: Vec<Vec<String>> = Vec::new();
    let mut places: HashMap<Vec<String>, usize> = HashMap::new();
    let entries: Vec<_> = records.iter().map(|r| r.entries()).collect();
    out.push(b'{');
    key(out, "values");
    list(out, entries.iter(), |out, entries| {
        let names: Vec<String> = entries.iter().map(|(name, _)| name.clone().into_owned()).collect();
        let place = *places.entry(names.clone()).or_insert_with(|| {
            sets.push(names);
            sets.len() - 1
        });
        write!(out, "[{place}").expect("memory takes it");
        for (_, value) in entries {
            out.push(b',');
            out.extend_from_slice(value.get().as_bytes());
        }
        out.push(b']');
    });
    key(out, "names");
    json(out, &sets);
    out.push(b'}');
}

/// An area without the cut along the antimeridian, longitudes from 0 to 360 where it was cut.
fn whole(area: &MultiPolygon<f64>) -> Cow<'_, MultiPolygon<f64>> {
    let cut = |p: &Polygon<f64>| p.exterior().coords().any(|c| c.x.abs() == 180.0);
    if area.0.iter().filter(|p| cut(p)).count() < 2 {
        return Cow::Borrowed(area);
    }
    let east = area.map_coords(|c| Coord { x: if c.x < 0.0 { c.x + 360.0 } else { c.x }, y: c.y });
    let parts = east.0.iter().map(|p| MultiPolygon::new(vec![p.clone()]));
    Cow::Owned(parts.reduce(|a, b| a.union(&b)).unwrap_or(east))
}

fn burns(out: &mut Vec<u8>, texts: &mut Texts, inputs: &PageInputs, frame: &Frame) {
    out.push(b'{');
    key(out, "fields");
    json(out, &heads(BURN_FIELDS));
    key(out, "count");
    json(out, &inputs.burns.len());
    key(out, "columns");
    texts.columns(out, inputs.burns, BURN_FIELDS);
    key(out, "names");
    json(out, &inputs.burns.iter().map(|b| b.burn.id.as_str()).collect::<Vec<_>>());
    key(out, "input");
    recorded(out, &inputs.burns.iter().map(|b| &b.properties).collect::<Vec<_>>());
    key(out, "rings");
    list(out, inputs.burns.iter(), |out, b| {
        let area = whole(&b.burn.area);
        let rings = area.0.iter().flat_map(|p| std::iter::once(p.exterior()).chain(p.interiors()));
        list(out, rings, |out, ring| flat(out, frame, ring.coords().map(|c| (c.x, c.y))));
    });
    out.push(b'}');
}

fn trails(out: &mut Vec<u8>, texts: &mut Texts, inputs: &PageInputs, frame: &Frame, listed: &[usize]) {
    let places: HashMap<&str, usize> =
        listed.iter().enumerate().map(|(row, i)| (inputs.results[*i].id(), row)).collect();
    // The names of boulders stand as their places in the list below.
    let fields: Vec<_> = TRAIL_FIELDS.iter().filter(|f| f.name != "boulder_ids").copied().collect();
    out.push(b'{');
    key(out, "fields");
    json(out, &heads(&fields));
    key(out, "count");
    json(out, &inputs.rows.len());
    key(out, "columns");
    texts.columns(out, inputs.rows, &fields);
    key(out, "boulders");
    list(out, inputs.rows.iter(), |out, r| {
        let named: Vec<usize> = r.result.boulder_ids.iter().filter_map(|id| places.get(id.as_str()).copied()).collect();
        let (first, rest) = named.split_at(named.len().min(ORDERED_OF_STRETCH));
        let mut rest = rest.to_vec();
        rest.sort_unstable();
        let steps: Vec<usize> = rest.iter().scan(0, |before, at| Some(at - std::mem::replace(before, *at))).collect();
        json(out, &(first, steps));
    });
    key(out, "lines");
    list(out, inputs.rows.iter(), |out, r| {
        flat(out, frame, r.segment.points.iter().map(|p| (p.lon_deg, p.lat_deg)));
    });
    out.push(b'}');
}

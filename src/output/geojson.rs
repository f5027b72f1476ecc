//! GeoJSON layers (RFC 7946) and the newline-delimited form.
//!
//! - A record's geometry, heights included, its `id` and its properties go through as they came: properties keep their
//!   order and each value its bytes. Then follow the result fields of the registry, all of them, null where not computed.
//! - **Name clash.** Where the input already has a property of a result field's name, the result keeps the name and the
//!   input's value stays in its place as `input_<name>` (`input_` is put before it again while that name is taken too).
//! - A layer carries, besides `type` and `features`, the foreign members of RFC 7946 section 6.1 that [`LayerHead`] lists:
//!   who made it, its horizon, until when it is valid, and the cautions.
//! - One feature stands on one line. In the newline-delimited form line breaks between the tokens of an input value are
//!   left out, so that a line is a record.
//! - Nothing that is not finite is written: such a figure is null, and a geometry that holds one is null.

use std::borrow::Cow;
use std::io::{self, Write};

use geo::{MultiPolygon, Polygon};
use geojson::{Geometry, GeometryValue, Position};
use jiff::civil::Date;
use serde_json::value::RawValue;

use super::burns::{BURN_FIELDS, BurnResult};
use super::cautions;
use super::fields::{BOULDER_FIELDS, BoulderResult, Field};
use super::trails::{SegmentRow, TRAIL_FIELDS};
use crate::input::Properties;

/// What a layer says about itself.
#[derive(Debug, Clone, PartialEq)]
pub struct LayerHead {
    /// Version of the program.
    pub program_version: &'static str,
    /// Version of the catalogue.
    pub catalogue_version: &'static str,
    /// Horizon of the source likelihoods, days.
    pub horizon_days: f64,
    /// Day until which the figures may be used without looking again; `None` where no day was set.
    pub valid_until: Option<Date>,
}

/// Whether a value must fit on one line.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Breaks {
    Kept,
    LeftOut,
}

/// Writes `boulders.geojson`, in the order given.
///
/// # Errors
/// Those of the writer.
pub fn write_boulders<'r>(
    out: &mut dyn Write,
    head: &LayerHead,
    results: impl IntoIterator<Item = &'r BoulderResult>,
) -> io::Result<()> {
    layer(out, head, "boulders", results, |out, result| boulder(out, result, Breaks::Kept))
}

/// Writes one boulder as one line, for streams.
///
/// # Errors
/// Those of the writer.
pub fn write_boulder_line(out: &mut dyn Write, result: &BoulderResult) -> io::Result<()> {
    boulder(out, result, Breaks::LeftOut)?;
    out.write_all(b"\n")
}

/// Writes `burns.geojson`.
///
/// # Errors
/// Those of the writer.
pub fn write_burns<'r>(
    out: &mut dyn Write,
    head: &LayerHead,
    results: impl IntoIterator<Item = &'r BurnResult>,
) -> io::Result<()> {
    layer(out, head, "burns", results, |out, result| {
        let geometry = area(&result.burn.area);
        let (id, properties) = (result.feature_id.as_deref(), &result.properties);
        feature(out, id, Some(&geometry), properties, BURN_FIELDS, result, Breaks::Kept)
    })
}

/// Writes `trails.geojson`, in the order given.
///
/// # Errors
/// Those of the writer.
pub fn write_trails<'r>(
    out: &mut dyn Write,
    head: &LayerHead,
    rows: impl IntoIterator<Item = &'r SegmentRow>,
) -> io::Result<()> {
    let nothing = Properties::from_pairs([]);
    layer(out, head, "trails", rows, |out, row| {
        let line = |p: &crate::site::Position| match p.height_m {
            Some(height) => Position::from([p.lon_deg, p.lat_deg, height]),
            None => Position::from([p.lon_deg, p.lat_deg]),
        };
        let geometry = GeometryValue::LineString { coordinates: row.segment.points.iter().map(line).collect() };
        feature(out, None, Some(&geometry), &nothing, TRAIL_FIELDS, row, Breaks::Kept)
    })
}

fn layer<R>(
    out: &mut dyn Write,
    head: &LayerHead,
    name: &str,
    rows: impl IntoIterator<Item = R>,
    mut row: impl FnMut(&mut dyn Write, R) -> io::Result<()>,
) -> io::Result<()> {
    out.write_all(b"{\"type\":\"FeatureCollection\"")?;
    member(out, "name", name)?;
    member(out, "program", "spallcast")?;
    member(out, "program_version", head.program_version)?;
    member(out, "catalogue_version", head.catalogue_version)?;
    member(out, "horizon_days", &head.horizon_days)?;
    member(out, "valid_until", &head.valid_until.map(|d| d.to_string()))?;
    member(out, "cautions", &cautions::sentences())?;
    out.write_all(b",\"features\":[")?;
    for (i, r) in rows.into_iter().enumerate() {
        out.write_all(if i == 0 { b"\n" } else { b",\n" })?;
        row(out, r)?;
    }
    out.write_all(b"\n]}\n")
}

fn member(out: &mut dyn Write, name: &str, value: &(impl serde::Serialize + ?Sized)) -> io::Result<()> {
    out.write_all(b",")?;
    serde_json::to_writer(&mut *out, name)?;
    out.write_all(b":")?;
    serde_json::to_writer(out, value).map_err(Into::into)
}

fn boulder(out: &mut dyn Write, result: &BoulderResult, breaks: Breaks) -> io::Result<()> {
    let record = &result.feature;
    let geometry = record.geometry.as_ref().map(|g| &g.value);
    feature(out, record.feature_id.as_deref(), geometry, &record.properties, BOULDER_FIELDS, result, breaks)
}

fn feature<R>(
    out: &mut dyn Write,
    id: Option<&RawValue>,
    geometry: Option<&GeometryValue>,
    properties: &Properties,
    fields: &[Field<R>],
    row: &R,
    breaks: Breaks,
) -> io::Result<()> {
    out.write_all(b"{\"type\":\"Feature\"")?;
    // RFC 7946 section 3.2 allows text and numbers.
    if let Some(id) =
        id.map(RawValue::get).filter(|id| id.starts_with(|c: char| c == '"' || c == '-' || c.is_ascii_digit()))
    {
        write!(out, ",\"id\":{id}")?;
    }
    out.write_all(b",\"geometry\":")?;
    match geometry.filter(|g| all_finite(g)) {
        Some(value) => serde_json::to_writer(&mut *out, value)?,
        None => out.write_all(b"null")?,
    }
    out.write_all(b",\"properties\":{")?;
    let entries = properties.entries();
    for (i, (name, value)) in entries.iter().enumerate() {
        if i > 0 {
            out.write_all(b",")?;
        }
        serde_json::to_writer(&mut *out, &*kept_name(name, fields, &entries))?;
        out.write_all(b":")?;
        match breaks {
            Breaks::Kept => out.write_all(value.get().as_bytes())?,
            Breaks::LeftOut => out.write_all(&one_line(value.get()))?,
        }
    }
    for (i, field) in fields.iter().enumerate() {
        if i > 0 || !entries.is_empty() {
            out.write_all(b",")?;
        }
        write!(out, "\"{}\":", field.name)?;
        (field.value)(row).write_json(out)?;
    }
    out.write_all(b"}}")
}

/// The name under which an input property is written.
fn kept_name<'n, R>(name: &'n str, fields: &[Field<R>], entries: &[(Cow<'_, str>, &RawValue)]) -> Cow<'n, str> {
    let ours = |n: &str| fields.iter().any(|f| f.name == n);
    let mut kept = Cow::Borrowed(name);
    while ours(&kept) || (kept != name && entries.iter().any(|(n, _)| *n == kept)) {
        kept = Cow::Owned(format!("input_{kept}"));
    }
    kept
}

/// JSON without line breaks. They stand between tokens only: within text JSON writes them as escapes.
fn one_line(json: &str) -> Cow<'_, [u8]> {
    match json.bytes().any(|b| b == b'\n' || b == b'\r') {
        false => Cow::Borrowed(json.as_bytes()),
        true => Cow::Owned(json.bytes().filter(|b| *b != b'\n' && *b != b'\r').collect()),
    }
}

fn all_finite(value: &GeometryValue) -> bool {
    let position = |p: &Position| p.as_slice().iter().all(|x| x.is_finite());
    match value {
        GeometryValue::Point { coordinates } => position(coordinates),
        GeometryValue::MultiPoint { coordinates } | GeometryValue::LineString { coordinates } => {
            coordinates.iter().all(position)
        }
        GeometryValue::MultiLineString { coordinates } | GeometryValue::Polygon { coordinates } => {
            coordinates.iter().flatten().all(position)
        }
        GeometryValue::MultiPolygon { coordinates } => coordinates.iter().flatten().flatten().all(position),
        GeometryValue::GeometryCollection { geometries } => geometries.iter().all(|g: &Geometry| all_finite(&g.value)),
    }
}

/// A burn's area as it was checked: rings closed, exterior counter-clockwise, cut at the antimeridian.
fn area(area: &MultiPolygon<f64>) -> GeometryValue {
    let rings = |polygon: &Polygon<f64>| -> Vec<Vec<Position>> {
        std::iter::once(polygon.exterior())
            .chain(polygon.interiors())
            .map(|ring| ring.coords().map(|c| Position::from([c.x, c.y])).collect())
            .collect()
    };
    match area.0.as_slice() {
        [one] => GeometryValue::Polygon { coordinates: rings(one) },
        several => GeometryValue::MultiPolygon { coordinates: several.iter().map(rings).collect() },
    }
}

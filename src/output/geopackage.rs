//! A GeoPackage (OGC 12-128r19, version 1.4): burns, boulders and trails in one file.
//!
//! - **Layers.** `burns` (MultiPolygon), `boulders` (points, and polygons where footprints were recorded; the layer is
//!   declared Point without a footprint and Geometry with one), `trails` (LineString), heights kept, WGS 84. A refused
//!   record stands at its first corner; without a usable place it has no geometry and is listed all the same.
//! - **Columns.** Input properties first, typed by what they hold, then the result fields of the registry, `NULL` where
//!   not computed. SQLite compares column names without case; where an input name meets a result field or another column,
//!   the input's goes by `input_<name>`. Beyond [`INPUT_COLUMNS_MAX`] names the rest goes into one column of JSON.
//! - **Extensions.** R-tree spatial indexes (`gpkg_rtree_index`) with their triggers, column descriptions with units and
//!   the words of a column (`gpkg_schema`), metadata with the cautions (`gpkg_metadata`).
//! - **Bytes.** The same run gives the same bytes: every time stamp is the day that the run stands for.

use std::path::Path;

use geojson::GeometryValue;
use jiff::civil::Date;
use rusqlite::{Connection, ToSql, Transaction, params, params_from_iter};

use super::burns::{BURN_FIELDS, BurnResult};
use super::cautions;
use super::fields::{BOULDER_FIELDS, BoulderResult, Field, JsonType, Value};
use super::geojson::LayerHead;
use super::geopackage_blob::{self as blob, Extent, Shape};
use super::geopackage_columns::{Cell, InputColumns};
use super::geopackage_tables as tables;
use super::trails::{SegmentRow, TRAIL_FIELDS};
use crate::input::Properties;

/// `GPKG`, the application id of the standard.
const APPLICATION_ID: i32 = 0x4750_4B47;
/// Version 1.4.0 as the standard writes it.
const USER_VERSION: i32 = 10_400;
/// Input properties that get columns of their own; far below the limits of SQLite.
pub const INPUT_COLUMNS_MAX: usize = 400;

/// Why there is no GeoPackage.
#[derive(Debug, thiserror::Error)]
pub enum GeoPackageError {
    /// The database refused.
    #[error("the GeoPackage cannot be written: {0}; check that the disk has room")]
    Database(#[from] rusqlite::Error),
}

/// What the file says about itself.
#[derive(Debug, Clone, PartialEq)]
pub struct PackageHead<'a> {
    /// What every layer says.
    pub layer: &'a LayerHead,
    /// The day that the run stands for: the only time stamp in the file.
    pub as_of: Date,
}

impl PackageHead<'_> {
    fn stamp(&self) -> String {
        format!("{}T00:00:00.000Z", self.as_of)
    }
}

/// One layer under way.
struct Layer<'a, R> {
    name: &'static str,
    title: &'static str,
    geometry: &'static str,
    /// Whether positions may have heights.
    heights: bool,
    fields: &'a [Field<R>],
}

/// Writes the package to `path`, where no file stands yet. Trails are `None` in a run without a trail file.
///
/// # Errors
/// When the database cannot be written.
pub fn write_geopackage(
    path: &Path,
    boulders: &[BoulderResult],
    burns: &[BurnResult],
    trails: Option<&[SegmentRow]>,
    head: &PackageHead<'_>,
) -> Result<(), GeoPackageError> {
    let mut database = Connection::open(path)?;
    // The file is new and moved into place when whole: a journal would only leave a second file behind.
    database.pragma_update(None, "journal_mode", "OFF")?;
    database.pragma_update(None, "synchronous", "OFF")?;
    database.pragma_update(None, "application_id", APPLICATION_ID)?;
    database.pragma_update(None, "user_version", USER_VERSION)?;
    let write = database.transaction()?;
    write.execute_batch(tables::BASE)?;
    tables::metadata(&write, &metadata(head), &head.stamp())?;
    let none = Properties::default();
    let layer = Layer {
        name: "burns",
        title: "Burns: perimeters and what their boulders come to",
        geometry: "MULTIPOLYGON",
        heights: false,
        fields: BURN_FIELDS,
    };
    layer.write(&write, head, burns, |r| &r.properties, |r| Some(Shape::Areas(&r.burn.area)))?;
    let footprints = boulders.iter().any(|r| matches!(place(r), Some(Shape::Footprint(_))));
    let layer = Layer {
        name: "boulders",
        title: "Boulders: spall thickness and rockfall-source likelihood",
        geometry: if footprints { "GEOMETRY" } else { "POINT" },
        heights: true,
        fields: BOULDER_FIELDS,
    };
    layer.write(&write, head, boulders, |r| &r.feature.properties, place)?;
    if let Some(trails) = trails {
        let layer = Layer {
            name: "trails",
            title: "Trails: stretches with likelihoods and proposals",
            geometry: "LINESTRING",
            heights: true,
            fields: TRAIL_FIELDS,
        };
        layer.write(&write, head, trails, |_| &none, |r| Some(Shape::Line(&r.segment.points)))?;
    }
    write.commit()?;
    Ok(())
}

/// A boulder's footprint where one was accepted, else where it stands; nothing for a place that is not on the globe.
fn place(result: &BoulderResult) -> Option<Shape<'_>> {
    if result.feature.boulder.is_ok() {
        match result.feature.geometry.as_ref().map(|g| &g.value) {
            Some(GeometryValue::Polygon { coordinates }) => return Some(Shape::Footprint(coordinates)),
            // Several parts are refused: a boulder stands in one place.
            Some(GeometryValue::MultiPolygon { coordinates }) if coordinates.len() == 1 => {
                return Some(Shape::Footprint(&coordinates[0]));
            }
            _ => {}
        }
    }
    let (lon, lat) = result.place_deg()?;
    let height = result.feature.boulder.as_ref().ok().and_then(|b| b.position.height_m);
    (lon.abs() <= 180.0 && lat.abs() <= 90.0).then_some(Shape::Point(lon, lat, height))
}

/// Dublin Core terms as JSON.
fn metadata(head: &PackageHead<'_>) -> String {
    let layer = head.layer;
    serde_json::json!({
        "dcterms:title": "Spall, rockfall sources and trail stretches after a wildfire",
        "dcterms:creator": format!("spallcast {}, catalogue {}", layer.program_version, layer.catalogue_version),
        "dcterms:date": head.as_of.to_string(),
        "dcterms:valid": layer.valid_until.map(|d| d.to_string()),
        "dcterms:description": format!("Likelihoods refer to {} days. {}", layer.horizon_days, cautions::sentences().join(" ")),
    })
    .to_string()
}

impl<R> Layer<'_, R> {
    fn write<'r>(
        &self,
        write: &Transaction<'_>,
        head: &PackageHead<'_>,
        rows: &'r [R],
        properties: impl Fn(&'r R) -> &'r Properties,
        shape: impl Fn(&'r R) -> Option<Shape<'r>>,
    ) -> Result<(), GeoPackageError> {
        let taken = ["fid", "geom"].into_iter().chain(self.fields.iter().map(|f| f.name));
        let inputs = InputColumns::of(rows.iter().map(&properties), taken, INPUT_COLUMNS_MAX);
        let mut columns = vec![
            "\"fid\" INTEGER PRIMARY KEY AUTOINCREMENT NOT NULL".to_owned(),
            format!("\"geom\" {}", self.geometry),
        ];
        columns.extend(inputs.declarations());
        columns.extend(self.fields.iter().map(|f| format!("\"{}\" {}", f.name, declared(f.name, f.kind))));
        let name = self.name;
        write.execute_batch(&format!("CREATE TABLE \"{name}\" ({});", columns.join(", ")))?;
        write.execute_batch(&format!(
            "CREATE VIRTUAL TABLE \"rtree_{name}_geom\" USING rtree(id, minx, maxx, miny, maxy);"
        ))?;

        let marks = vec!["?"; columns.len()].join(", ");
        let mut insert = write.prepare(&format!("INSERT INTO \"{name}\" VALUES ({marks})"))?;
        let mut index = write.prepare(&format!("INSERT INTO \"rtree_{name}_geom\" VALUES (?, ?, ?, ?, ?)"))?;
        let mut whole = Extent::NOTHING;
        for (fid, row) in (1_i64..).zip(rows) {
            let geometry = shape(row).and_then(|s| blob::encode(&s));
            let mut values: Vec<Box<dyn ToSql>> = Vec::with_capacity(columns.len());
            values.push(Box::new(fid));
            values.push(Box::new(geometry.as_ref().map(|g| g.bytes.as_slice())));
            values.extend(inputs.cells(properties(row)).into_iter().map(boxed));
            values.extend(self.fields.iter().map(|f| boxed(cell((f.value)(row)))));
            insert.execute(params_from_iter(values))?;
            if let Some(geometry) = &geometry {
                let e = geometry.extent;
                index.execute(params![fid, e.min_x, e.max_x, e.min_y, e.max_y])?;
                whole = whole.with(e);
            }
        }
        drop((insert, index));
        write.execute_batch(&tables::index_triggers(name))?;
        let heights = i32::from(self.heights) * 2;
        tables::contents(write, name, self.title, &head.stamp(), whole)?;
        tables::geometry_column(write, name, self.geometry, heights)?;
        for (column, meaning) in inputs.descriptions() {
            tables::describe(write, name, &column, &meaning, None)?;
        }
        for f in self.fields {
            let unit = if f.unit.is_empty() { String::new() } else { format!(" Unit: {}.", f.unit) };
            let meaning = format!("{}{unit} NULL: not computed.", f.meaning.replace('`', ""));
            tables::describe(write, name, f.name, &meaning, tables::words_of(f.name))?;
        }
        Ok(())
    }
}

/// The type of a result field's column.
fn declared(name: &str, kind: JsonType) -> &'static str {
    match kind {
        JsonType::Number => "DOUBLE",
        JsonType::Integer => "INTEGER",
        JsonType::Bool => "BOOLEAN",
        JsonType::Text if name == "review_on" => "DATE",
        JsonType::Text => "TEXT",
    }
}

fn cell(value: Value<'_>) -> Cell {
    match value {
        Value::Null => Cell::Null,
        Value::Bool(yes) => Cell::Integer(i64::from(yes)),
        Value::Integer(n) => i64::try_from(n).map_or(Cell::Null, Cell::Integer),
        Value::Number(x) if x.is_finite() => Cell::Real(x),
        Value::Number(_) => Cell::Null,
        Value::Text(text) => Cell::Text(text.into_owned()),
    }
}

fn boxed<'c>(cell: Cell) -> Box<dyn ToSql + 'c> {
    match cell {
        Cell::Null => Box::new(rusqlite::types::Null),
        Cell::Integer(n) => Box::new(n),
        Cell::Real(x) => Box::new(x),
        Cell::Text(text) => Box::new(text),
    }
}

//! The tables that the standard asks for, the triggers of its R-tree extension, and what is written into them.

use rusqlite::{Transaction, params};

use super::geopackage::GeoPackageError;
use super::geopackage_blob::{Extent, SRS_ID};
use crate::trail::proposal::Proposal;

/// Tables of the core (OGC 12-128r19, annex C) and of the extensions used, with their fixed rows.
pub(super) const BASE: &str = r#"
CREATE TABLE gpkg_spatial_ref_sys (
  srs_name TEXT NOT NULL, srs_id INTEGER PRIMARY KEY NOT NULL, organization TEXT NOT NULL,
  organization_coordsys_id INTEGER NOT NULL, definition TEXT NOT NULL, description TEXT);
INSERT INTO gpkg_spatial_ref_sys VALUES
  ('WGS 84 geodetic', 4326, 'EPSG', 4326,
   'GEOGCS["WGS 84",DATUM["WGS_1984",SPHEROID["WGS 84",6378137,298.257223563,AUTHORITY["EPSG","7030"]],AUTHORITY["EPSG","6326"]],PRIMEM["Greenwich",0,AUTHORITY["EPSG","8901"]],UNIT["degree",0.0174532925199433,AUTHORITY["EPSG","9122"]],AXIS["Latitude",NORTH],AXIS["Longitude",EAST],AUTHORITY["EPSG","4326"]]',
   'longitude and latitude in degrees on the WGS 84 ellipsoid'),
  ('Undefined Cartesian SRS', -1, 'NONE', -1, 'undefined', 'undefined Cartesian coordinates'),
  ('Undefined geographic SRS', 0, 'NONE', 0, 'undefined', 'undefined geographic coordinates');
CREATE TABLE gpkg_contents (
  table_name TEXT NOT NULL PRIMARY KEY, data_type TEXT NOT NULL, identifier TEXT UNIQUE, description TEXT DEFAULT '',
  last_change DATETIME NOT NULL DEFAULT (strftime('%Y-%m-%dT%H:%M:%fZ','now')), min_x DOUBLE, min_y DOUBLE,
  max_x DOUBLE, max_y DOUBLE, srs_id INTEGER,
  CONSTRAINT fk_gc_r_srs_id FOREIGN KEY (srs_id) REFERENCES gpkg_spatial_ref_sys(srs_id));
CREATE TABLE gpkg_geometry_columns (
  table_name TEXT NOT NULL, column_name TEXT NOT NULL, geometry_type_name TEXT NOT NULL, srs_id INTEGER NOT NULL,
  z TINYINT NOT NULL, m TINYINT NOT NULL, CONSTRAINT pk_geom_cols PRIMARY KEY (table_name, column_name),
  CONSTRAINT uk_gc_table_name UNIQUE (table_name),
  CONSTRAINT fk_gc_tn FOREIGN KEY (table_name) REFERENCES gpkg_contents(table_name),
  CONSTRAINT fk_gc_srs FOREIGN KEY (srs_id) REFERENCES gpkg_spatial_ref_sys (srs_id));
CREATE TABLE gpkg_extensions (
  table_name TEXT, column_name TEXT, extension_name TEXT NOT NULL, definition TEXT NOT NULL, scope TEXT NOT NULL,
  CONSTRAINT ge_tce UNIQUE (table_name, column_name, extension_name));
INSERT INTO gpkg_extensions VALUES
  ('gpkg_data_columns', NULL, 'gpkg_schema', 'http://www.geopackage.org/spec140/#extension_schema', 'read-write'),
  ('gpkg_data_column_constraints', NULL, 'gpkg_schema', 'http://www.geopackage.org/spec140/#extension_schema', 'read-write'),
  ('gpkg_metadata', NULL, 'gpkg_metadata', 'http://www.geopackage.org/spec140/#extension_metadata', 'read-write'),
  ('gpkg_metadata_reference', NULL, 'gpkg_metadata', 'http://www.geopackage.org/spec140/#extension_metadata', 'read-write');
CREATE TABLE gpkg_data_columns (
  table_name TEXT NOT NULL, column_name TEXT NOT NULL, name TEXT, title TEXT, description TEXT, mime_type TEXT,
  constraint_name TEXT, CONSTRAINT pk_gdc PRIMARY KEY (table_name, column_name),
  CONSTRAINT gdc_tn UNIQUE (table_name, name));
CREATE TABLE gpkg_data_column_constraints (
  constraint_name TEXT NOT NULL, constraint_type TEXT NOT NULL, value TEXT, min NUMERIC, min_is_inclusive BOOLEAN,
  max NUMERIC, max_is_inclusive BOOLEAN, description TEXT,
  CONSTRAINT gdcc_ntv UNIQUE (constraint_name, constraint_type, value));
CREATE TABLE gpkg_metadata (
  id INTEGER CONSTRAINT m_pk PRIMARY KEY ASC NOT NULL, md_scope TEXT NOT NULL DEFAULT 'dataset',
  md_standard_uri TEXT NOT NULL, mime_type TEXT NOT NULL DEFAULT 'text/xml', metadata TEXT NOT NULL DEFAULT '');
CREATE TABLE gpkg_metadata_reference (
  reference_scope TEXT NOT NULL, table_name TEXT, column_name TEXT, row_id_value INTEGER,
  timestamp DATETIME NOT NULL DEFAULT (strftime('%Y-%m-%dT%H:%M:%fZ','now')), md_file_id INTEGER NOT NULL,
  md_parent_id INTEGER, CONSTRAINT crmr_mfi_fk FOREIGN KEY (md_file_id) REFERENCES gpkg_metadata(id),
  CONSTRAINT crmr_mpi_fk FOREIGN KEY (md_parent_id) REFERENCES gpkg_metadata(id));
"#;

/// The words of a field that has a fixed set of them, as the name of their constraint.
pub(super) fn words_of(field: &str) -> Option<&'static str> {
    match field {
        "proposal" => Some("proposal"),
        "status" => Some("status"),
        "source_basis" => Some("source_basis"),
        _ => None,
    }
}

/// The words of [`words_of`].
fn word_sets() -> [(&'static str, Vec<&'static str>); 3] {
    [
        ("proposal", Proposal::ALL.iter().map(|p| p.word()).collect()),
        ("status", vec!["assessed", "not_assessed"]),
        ("source_basis", vec!["measured", "partial", "none"]),
    ]
}

/// Metadata of the whole file and the word sets.
pub(super) fn metadata(write: &Transaction<'_>, json: &str, stamp: &str) -> Result<(), GeoPackageError> {
    write.execute(
        "INSERT INTO gpkg_metadata VALUES (1, 'dataset', 'http://purl.org/dc/terms/', 'application/json', ?)",
        params![json],
    )?;
    write.execute(
        "INSERT INTO gpkg_metadata_reference VALUES ('geopackage', NULL, NULL, NULL, ?, 1, NULL)",
        params![stamp],
    )?;
    for (set, words) in word_sets() {
        for word in words {
            write.execute(
                "INSERT INTO gpkg_data_column_constraints (constraint_name, constraint_type, value) VALUES (?, 'enum', ?)",
                params![set, word],
            )?;
        }
    }
    Ok(())
}

/// The row of a layer among the contents.
pub(super) fn contents(
    write: &Transaction<'_>,
    name: &str,
    description: &str,
    stamp: &str,
    extent: Extent,
) -> Result<(), GeoPackageError> {
    let or_null = |x: f64| extent.some().then_some(x);
    write.execute(
        "INSERT INTO gpkg_contents VALUES (?1, 'features', ?1, ?2, ?3, ?4, ?5, ?6, ?7, ?8)",
        params![
            name,
            description,
            stamp,
            or_null(extent.min_x),
            or_null(extent.min_y),
            or_null(extent.max_x),
            or_null(extent.max_y),
            SRS_ID
        ],
    )?;
    Ok(())
}

/// The geometry column of a layer and its index. `heights`: 0 none, 2 optional.
pub(super) fn geometry_column(
    write: &Transaction<'_>,
    name: &str,
    geometry: &str,
    heights: i32,
) -> Result<(), GeoPackageError> {
    write.execute(
        "INSERT INTO gpkg_geometry_columns VALUES (?, 'geom', ?, ?, ?, 0)",
        params![name, geometry, SRS_ID, heights],
    )?;
    write.execute(
        "INSERT INTO gpkg_extensions VALUES (?, 'geom', 'gpkg_rtree_index', \
         'http://www.geopackage.org/spec140/#extension_rtree', 'write-only')",
        params![name],
    )?;
    Ok(())
}

/// What a column means.
pub(super) fn describe(
    write: &Transaction<'_>,
    table: &str,
    column: &str,
    meaning: &str,
    words: Option<&str>,
) -> Result<(), GeoPackageError> {
    write.execute(
        "INSERT INTO gpkg_data_columns (table_name, column_name, name, description, constraint_name) VALUES (?1, ?2, ?2, ?3, ?4)",
        params![table, column, meaning, words],
    )?;
    Ok(())
}

/// Triggers of the R-tree extension (annex F.3, version 1.4) that keep an index true to its layer when it is edited.
pub(super) fn index_triggers(table: &str) -> String {
    let tree = format!("\"rtree_{table}_geom\"");
    let full = |row: &str| format!("({row}.\"geom\" NOTNULL AND NOT ST_IsEmpty({row}.\"geom\"))");
    let void = |row: &str| format!("({row}.\"geom\" ISNULL OR ST_IsEmpty({row}.\"geom\"))");
    let (new, no_new, old, no_old) = (full("NEW"), void("NEW"), full("OLD"), void("OLD"));
    let sides = "ST_MinX(NEW.\"geom\"), ST_MaxX(NEW.\"geom\"), ST_MinY(NEW.\"geom\"), ST_MaxY(NEW.\"geom\")";
    let insert = format!("INSERT OR REPLACE INTO {tree} VALUES (NEW.\"fid\", {sides});");
    let trigger = |name: &str, when: &str, condition: &str, body: &str| {
        format!(
            "CREATE TRIGGER \"rtree_{table}_geom_{name}\" AFTER {when} ON \"{table}\" WHEN {condition} BEGIN {body} END;\n"
        )
    };
    let same = "OLD.\"fid\" = NEW.\"fid\"";
    let other = "OLD.\"fid\" != NEW.\"fid\"";
    let of = "UPDATE OF \"geom\"";
    let update = format!(
        "UPDATE {tree} SET minx = ST_MinX(NEW.\"geom\"), maxx = ST_MaxX(NEW.\"geom\"), miny = ST_MinY(NEW.\"geom\"), \
         maxy = ST_MaxY(NEW.\"geom\") WHERE id = NEW.\"fid\";"
    );
    let forget = format!("DELETE FROM {tree} WHERE id = OLD.\"fid\";");
    [
        trigger("insert", "INSERT", &new, &insert),
        trigger("update2", of, &format!("{same} AND {no_new}"), &forget),
        trigger(
            "update4",
            "UPDATE",
            &format!("{other} AND {no_new}"),
            &format!("DELETE FROM {tree} WHERE id IN (OLD.\"fid\", NEW.\"fid\");"),
        ),
        trigger("update5", "UPDATE", &format!("{other} AND {new}"), &format!("{forget} {insert}")),
        trigger("update6", of, &format!("{same} AND {new} AND {old}"), &update),
        trigger("update7", of, &format!("{same} AND {new} AND {no_old}"), &insert),
        trigger("delete", "DELETE", "OLD.\"geom\" NOT NULL", &forget),
    ]
    .concat()
}

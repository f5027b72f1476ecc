//! Numbers to layers, tables and records. Nothing here prints; files are written through [`directory`].
//!
//! ```text
//! fields      the registry: every column of the boulder layer, once
//! burns       what the boulders of a burn come to, and its columns
//! inspection  the inspection table
//! geojson     the layers and the newline-delimited form
//! geopackage  all layers in one file for maps (feature `gpkg`)
//! cautions    what goes with every layer, table and page
//! run_record  what was run on what, and what came of it
//! directory   files written beside and renamed, so that a failed run leaves the old ones
//! probe_source one boulder as a source, in detail
//! message     messages as JSON, for logs
//! probe_table one boulder through time and depth, as text, JSON and CSV
//! rock_table  the catalogue as text and JSON
//! trails      the columns of the trail layer
//! schema      inputs, settings and output fields for machines
//! template    an empty inventory and a settings file to fill in
//! ```

pub mod burns;
pub mod cautions;
pub mod directory;
pub mod fields;
pub mod geojson;
#[cfg(feature = "gpkg")]
pub mod geopackage;
#[cfg(feature = "gpkg")]
mod geopackage_blob;
#[cfg(feature = "gpkg")]
mod geopackage_columns;
#[cfg(feature = "gpkg")]
mod geopackage_tables;
pub mod inspection;
pub mod message;
pub mod probe_source;
pub mod probe_table;
pub mod rock_table;
pub mod run_record;
pub mod schema;
pub mod template;
pub mod trails;

pub use burns::{BURN_FIELDS, BurnResult, BurnSummary, burn_results, summarise_burns};
pub use directory::{Committed, OutputDirectory, OutputError, WrittenFile};
pub use fields::{BOULDER_FIELDS, BoulderResult, SourceColumns};
pub use geojson::{LayerHead, write_boulder_line, write_boulders, write_burns, write_trails};
#[cfg(feature = "gpkg")]
pub use geopackage::{GeoPackageError, PackageHead, write_geopackage};
pub use inspection::write_inspection;
pub use run_record::{InputRecord, OptionsRecord, RunCounts, RunRecord};
pub use trails::{SegmentRow, TRAIL_FIELDS};

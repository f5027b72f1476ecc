//! From burn perimeters and a boulder inventory to spall, rockfall-source and trail layers.
//!
//! The way data flows, top to bottom:
//!
//! ```text
//! input   text to checked records (GeoJSON, CSV, settings, terrain)
//! fire    exposure class and residence to a surface forcing
//! heat    forcing to temperature through depth and time
//! stress  temperature to skin stress, membrane force, normal tension
//! spall   stress to flakes, slabs, splits, rinds
//! rockfall, trail   spalls and statics to sources, reach, segments
//! assess  one boulder through all of the above
//! output, report    numbers to layers, tables, a page
//! ```

pub mod assess;
pub mod bounds;
pub mod diagnostic;
pub mod ensemble;
pub mod fire;
pub mod flag;
pub mod heat;
pub mod input;
pub mod numerics;
pub mod output;
pub mod report;
pub mod rock;
pub mod rockfall;
pub mod settings;
pub mod site;
pub mod spall;
pub mod stress;
pub mod trail;
pub mod units;

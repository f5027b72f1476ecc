//! What people look at: `report.html`, one self-contained page from the results of a run; pictures; styles.
//!
//! ```text
//! page      what goes in; the template; the document
//! summary   the first screen: counts, metres by proposal, worst stretches, first boulders
//! data      rows of the registries, geometry in metres and profiles as one JSON text
//! frame     longitude and latitude to metres about the middle of the data
//! classes   classes of source likelihood and of proposals, shared by map, legend and styles
//! looks     their marks and dashes in a map program
//! sld       styles of the layers (OGC)
//! chart, probe_plot, picture   one boulder through time and depth as SVG and PNG
//! probe_bands  the draws behind it
//! label     a field's name in words
//! profiles  temperature and stress through depth of the first boulders
//! ```
//!
//! The document loads nothing: styles, script and data stand in it, and its own policy forbids requests. Text of the user
//! enters through the template's escaping or, as data, through text nodes of the script; in the data every `<` is written
//! as `\u003c`, so that no text can end the script element.
//!
//! **Large runs.** The first [`data::DETAILED_MAX`] boulders in the order of inspection carry every figure; the others keep
//! the columns of the inspection table without reason and flags, and those beyond [`data::LISTED_MAX`] are only counted.
//! The page says so.

pub mod chart;
pub mod classes;
pub mod data;
pub mod frame;
pub mod label;
pub mod looks;
pub mod page;
pub mod picture;
pub mod probe_bands;
pub mod probe_plot;
pub mod profiles;
pub mod sld;
pub mod summary;

pub use page::{PageInputs, ProfileEvent, ProfileOfBoulder, page};

//! Pictures, styles and classes: what people look at. Nothing here prints or touches a file.
//!
//! ```text
//! classes     classes of likelihood and proposals, with colour and shape, once for page and styles
//! chart       panel, axes, curves as SVG
//! probe_plot  one boulder through time and depth as SVG
//! picture     SVG to PNG
//! sld         styles of the layers (OGC)
//! ```

pub mod chart;
pub mod classes;
pub mod picture;
pub mod probe_plot;
pub mod sld;

//! Fire: exposure classes, the pulse, the flux on a face.
pub mod exposure;

//! Fire: exposure classes, the pulse, what reaches a face.

pub mod exposure;
pub mod flame;
pub mod pulse;

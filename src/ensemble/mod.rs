//! The ensemble: distributions, the point set. Knows no physics.

pub mod distribution;
pub mod points;

//! The ensemble: distributions, the point set, summaries. Knows no physics.
pub mod distribution;

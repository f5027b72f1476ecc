//! The likelihood that anything reaches a segment, from the sources that may.
//!
//! shared trigger  P_any = sum over strata of w [1 - prod(1 - p_i(stratum) P_i)]      the main figure
//! independent     P_any = 1 - prod(1 - p_i P_i)
//! bounds          max(p_i P_i) <= P_any <= min(1, sum p_i P_i)
//!
//! p_i source likelihood, P_i = P_seg of source i, strata of the fire coordinate and the wet spell that all boulders of
//! a run share. `low` is max over i of p_i(low) P_i and `high` is min(1, sum p_i(high) P_i): the dependence that gives
//! least, at the lower ends of the sources' intervals, and the one that gives most, at the upper ends.

use crate::rockfall::source::{STRATA, TriggerStrata};

/// One assessed source on one segment.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Share {
    /// Source likelihood.
    pub p_source: f64,
    /// Its lower end.
    pub p_source_low: f64,
    /// Its upper end.
    pub p_source_high: f64,
    /// By stratum of the shared triggers.
    pub strata: TriggerStrata,
    /// P_seg.
    pub p_segment: f64,
}

/// The joint figures.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Combined {
    /// With shared triggers: the main figure.
    pub p_any: f64,
    /// As if sources were independent.
    pub p_any_independent: f64,
    /// Lower bound at the lower ends.
    pub p_any_low: f64,
    /// Upper bound at the upper ends.
    pub p_any_high: f64,
}

/// Joins the sources of a segment.
pub fn combine(shares: &[Share], wet_probability: f64) -> Combined {
    let none = |f: &dyn Fn(&Share) -> f64| shares.iter().map(|s| 1.0 - f(s) * s.p_segment).product::<f64>();
    let shared: f64 =
        (0..STRATA).map(|s| TriggerStrata::weight(s, wet_probability) * (1.0 - none(&|share| share.strata.p[s]))).sum();
    let independent = 1.0 - none(&|s| s.p_source);
    let low = shares.iter().map(|s| s.p_source_low * s.p_segment).fold(0.0, f64::max);
    let high = shares.iter().map(|s| s.p_source_high * s.p_segment).sum::<f64>().min(1.0);
    Combined { p_any: shared, p_any_independent: independent, p_any_low: low, p_any_high: high }
}

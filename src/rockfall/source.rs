//! What is said about one boulder as a rockfall source, and the interval around a share of draws.
//!
//! Wilson 95 %: (p + z2/2n -+ z sqrt(p(1-p)/n + z2/4n2)) / (1 + z2/n), z = 1.959964 (Wilson 1927, J. Am. Stat. Assoc.
//! 22, 209; recalled). n is the number of kept draws counted as thermal draws: the static draws that share one thermal
//! draw are no independent evidence about the fire, so the interval is that of the draws the user asked for. It
//! measures the ensemble's own scatter, not the truth of its assumptions.

use std::collections::BTreeSet;

use super::statics::Mode;
use crate::flag::Flag;
use crate::site::word_enum;

/// 97.5 % score of the standard normal.
const Z_95: f64 = 1.959_963_984_540_054;

word_enum! {
    /// What the source likelihood rests on.
    SourceBasis {
        /// Slope, contact, seat, setback, centroid height and support were all recorded.
        Measured = "measured",
        /// Slope and size are known; what is missing was sampled wide.
        Partial = "partial",
        /// Slope or size is missing: no likelihood, only a place in the inspection order.
        None = "none",
    }
}

word_enum! {
    /// What, within the horizon, makes a boulder move that stands today.
    Cause {
        /// The support goes.
        SupportLoss = "support_loss",
        /// The seat burns or washes away.
        SeatLoss = "seat_loss",
        /// The base spalled.
        BaseRetreat = "base_retreat",
        /// A wet spell lifts it.
        WetSpell = "wet_spell",
        /// It is shaken (only where the settings ask for it).
        Shaking = "shaking",
    }
}

impl Cause {
    /// The cause in words.
    pub fn phrase(self) -> &'static str {
        match self {
            Cause::SupportLoss => "what holds it from below gives way",
            Cause::SeatLoss => "its seat burns or washes away",
            Cause::BaseRetreat => "rock spalled from its base",
            Cause::WetSpell => "a wet spell lifts it",
            Cause::Shaking => "the ground shakes",
        }
    }
}

/// Bins of the shared fire coordinate.
pub const FIRE_BINS: usize = 8;
/// Strata of the shared triggers: fire bins, each dry and wet.
pub const STRATA: usize = FIRE_BINS * 2;

/// Source likelihood within each stratum of the triggers that all boulders share, `[STRATA]`: entry 2 b is fire bin b
/// without a wet spell, 2 b + 1 with one. The weighted mean over strata is `p_source`.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct TriggerStrata {
    /// Likelihood in each stratum.
    pub p: [f64; STRATA],
}

impl TriggerStrata {
    /// Weight of a stratum under a chance of a wet spell.
    ///
    /// ```
    /// use spallcast::rockfall::source::{STRATA, TriggerStrata};
    /// let total: f64 = (0..STRATA).map(|s| TriggerStrata::weight(s, 0.9)).sum();
    /// assert!((total - 1.0).abs() < 1e-12);
    /// ```
    pub fn weight(stratum: usize, wet_probability: f64) -> f64 {
        let share = if stratum % 2 == 1 { wet_probability } else { 1.0 - wet_probability };
        share / FIRE_BINS as f64
    }

    /// The weighted mean.
    pub fn mean(&self, wet_probability: f64) -> f64 {
        self.p.iter().enumerate().map(|(s, p)| p * Self::weight(s, wet_probability)).sum()
    }
}

/// Whether there is a likelihood.
#[derive(Debug, Clone, PartialEq)]
pub enum SourceOutcome {
    /// There is.
    Assessed,
    /// Fewer than the least share of draws stand today: the recorded geometry contradicts the standing boulder.
    CheckMeasurements {
        /// Share of draws that stand.
        kept_share: f64,
    },
    /// Slope or size is missing.
    NotRecorded {
        /// The columns that are missing.
        missing: Vec<&'static str>,
    },
}

/// One boulder as a source. Numbers are `None` where none was computed.
#[derive(Debug, Clone, PartialEq)]
pub struct SourceSummary {
    /// What it rests on.
    pub basis: SourceBasis,
    /// Whether there is a likelihood, and why not.
    pub outcome: SourceOutcome,
    /// Share of draws that stand today.
    pub kept_share: Option<f64>,
    /// Likelihood that it, or a part of it, moves within the horizon.
    pub p_source: Option<f64>,
    /// Lower end of its 95 % interval.
    pub p_source_low: Option<f64>,
    /// Upper end of its 95 % interval.
    pub p_source_high: Option<f64>,
    /// Likelihood that the boulder itself moves; `None` for an outcrop.
    pub p_release: Option<f64>,
    /// Likelihood that a loose plate or split part moves.
    pub p_fragment: Option<f64>,
    /// Share of `p_source` by mode, in the order of [`Mode::ALL`], summing to 1; zeros when nothing moves.
    pub mode_share: [f64; 4],
    /// Share of `p_release` by cause, in the order of [`Cause::ALL`], summing to 1; zeros when nothing moves.
    pub cause_share: [f64; 5],
    /// Median volume of the loose parts over the draws that have one, m3.
    pub fragment_m3_p50: Option<f64>,
    /// Median breadth of the loose plates over the draws that have one, m.
    pub fragment_breadth_m_p50: Option<f64>,
    /// Loss of base that would overturn it at its readings, m; `None` unless setback and height are recorded.
    pub undercut_to_overturn_m: Option<f64>,
    /// Likelihood by stratum of the shared triggers.
    pub strata: Option<TriggerStrata>,
    /// The horizon the likelihoods refer to, days.
    pub horizon_days: f64,
    /// Remarks.
    pub flags: BTreeSet<Flag>,
}

impl SourceSummary {
    /// A boulder without a likelihood.
    pub(crate) fn without_numbers(
        basis: SourceBasis,
        outcome: SourceOutcome,
        horizon_days: f64,
        flags: BTreeSet<Flag>,
    ) -> Self {
        SourceSummary {
            basis,
            outcome,
            kept_share: None,
            p_source: None,
            p_source_low: None,
            p_source_high: None,
            p_release: None,
            p_fragment: None,
            mode_share: [0.0; 4],
            cause_share: [0.0; 5],
            fragment_m3_p50: None,
            fragment_breadth_m_p50: None,
            undercut_to_overturn_m: None,
            strata: None,
            horizon_days,
            flags,
        }
    }

    /// The mode with the largest share; `None` when nothing moves or nothing was computed.
    pub fn main_mode(&self) -> Option<Mode> {
        largest(&self.mode_share).map(|i| Mode::ALL[i])
    }

    /// The cause with the largest share.
    pub fn main_cause(&self) -> Option<Cause> {
        largest(&self.cause_share).map(|i| Cause::ALL[i])
    }

    /// Why it would move, or why there is no number, in one sentence.
    pub fn sentence(&self) -> String {
        match &self.outcome {
            SourceOutcome::NotRecorded { missing } => {
                format!("No source likelihood: {} not recorded.", missing.join(" and "))
            }
            SourceOutcome::CheckMeasurements { kept_share } => format!(
                "Check measurements: with the recorded slope, contact and shape the boulder would not be standing today \
                 in {:.0} of 100 draws, so no source likelihood is given.",
                100.0 * (1.0 - kept_share)
            ),
            SourceOutcome::Assessed => {
                let verb = match self.main_mode() {
                    None => return "In no draw does it move within the horizon.".to_owned(),
                    Some(Mode::Slide) => "slide",
                    Some(Mode::Overturn) => "overturn",
                    Some(Mode::Roll) => "roll out of its seat",
                    Some(Mode::Fragment) => return "Most likely to shed a loose plate.".to_owned(),
                };
                match self.main_cause() {
                    Some(cause) => format!("Most likely to {verb} once {}.", cause.phrase()),
                    None => format!("Most likely to {verb}."),
                }
            }
        }
    }
}

/// Index of the largest positive entry, the first of equals.
fn largest(shares: &[f64]) -> Option<usize> {
    let mut best: Option<usize> = None;
    for (index, share) in shares.iter().enumerate() {
        if *share > 0.0 && best.is_none_or(|b| *share > shares[b]) {
            best = Some(index);
        }
    }
    best
}

/// Wilson 95 % interval of a share `p` seen in `n` draws; (0, 1) when there are none.
///
/// ```
/// use spallcast::rockfall::source::wilson_95;
/// // 8 of 10: .4902 to .9433 (statsmodels 0.14 proportion_confint, method wilson; recalled).
/// let (low, high) = wilson_95(0.8, 10.0);
/// assert!((low - 0.4902).abs() < 5e-5 && (high - 0.9433).abs() < 5e-5);
/// ```
pub fn wilson_95(p: f64, n: f64) -> (f64, f64) {
    if n <= 0.0 {
        return (0.0, 1.0);
    }
    let z2 = Z_95 * Z_95;
    let centre = p + z2 / (2.0 * n);
    let half = Z_95 * (p * (1.0 - p) / n + z2 / (4.0 * n * n)).max(0.0).sqrt();
    let scale = 1.0 + z2 / n;
    // At p = 0 and 1 an end is exactly p; rounding must not move it past.
    (((centre - half) / scale).clamp(0.0, p), ((centre + half) / scale).clamp(p, 1.0))
}

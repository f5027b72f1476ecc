//! What a segment means for people: one passage, one stop, one season.
//!
//! passage  d = V sum p_i P_i (w_i + person)/(v T)
//! stop     d = V sum p_i P_i (w_i + person)/L  t/T
//! season   d x passages a day x days, plus the stops of those who stop
//!
//! V vulnerability, w_i block width, v walking speed, T horizon, L landing width (the segment's length), t time standing.
//! The sum over sources is the expected number of hits, whatever ties the sources together; the chance of one hit cannot
//! be larger. Upper figures take the upper ends of the sources' intervals. The season's figure takes the central ones.

use super::combine::Share;

/// Seconds in a day.
const DAY_S: f64 = 86_400.0;

/// How people use a segment.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Use {
    /// Walking speed, m/s.
    pub walking_speed_m_s: f64,
    /// Time one person stands still, s, when the trail says.
    pub standing_s: Option<f64>,
    /// Passages a day, when the trail says.
    pub passages_per_day: Option<f64>,
    /// Width of a person, m.
    pub person_width_m: f64,
    /// Vulnerability.
    pub vulnerability: f64,
    /// Segment length, m.
    pub segment_m: f64,
    /// Horizon, days.
    pub horizon_days: f64,
}

/// Figures for people.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct PassageFigures {
    /// Death chance per passage, central.
    pub per_passage: f64,
    /// The same at the upper ends: what the limits are set on.
    pub per_passage_p95: f64,
    /// Death chance of one stop at the upper ends; `None` where the trail states none.
    pub per_stop_p95: Option<f64>,
    /// Expected deaths within the horizon; `None` where the trail states no passages.
    pub season: Option<f64>,
}

/// Computes them; `widths_m` are the blocks' widths in the order of `shares`.
///
/// ```
/// use spallcast::rockfall::source::{STRATA, TriggerStrata};
/// use spallcast::trail::{combine::Share, passage::{Use, figures}};
/// let share = Share { p_source: 0.2, p_source_low: 0.1, p_source_high: 0.4,
///     strata: TriggerStrata { p: [0.2; STRATA] }, p_segment: 0.5 };
/// let how = Use { walking_speed_m_s: 1.0, standing_s: None, passages_per_day: Some(100.0), person_width_m: 0.5,
///     vulnerability: 0.5, segment_m: 50.0, horizon_days: 100.0 };
/// let f = figures(&[share], &[1.5], &how);
/// // .5 x .4 x .5 x 2 m / (1 m/s x 8.64e6 s)
/// assert!((f.per_passage_p95 - 0.2 / 8.64e6).abs() < 1e-15);
/// // .5 x .2 x .5 x 2 / 8.64e6 x 100 x 100
/// assert!((f.season.unwrap() - 0.1 / 864.0).abs() < 1e-12);
/// ```
pub fn figures(shares: &[Share], widths_m: &[f64], how: &Use) -> PassageFigures {
    let horizon_s = how.horizon_days * DAY_S;
    let swept = |p: fn(&Share) -> f64| -> f64 {
        shares.iter().zip(widths_m).map(|(s, w)| p(s) * s.p_segment * (w + how.person_width_m)).sum()
    };
    let (central, upper) = (swept(|s| s.p_source), swept(|s| s.p_source_high));
    let walking = how.vulnerability / (how.walking_speed_m_s * horizon_s);
    // Blocks wider than the segment hit whoever stands there, no more.
    let standing = how.standing_s.map(|t| how.vulnerability / how.segment_m.max(1.0) * (t / horizon_s).min(1.0));
    let per_passage = (central * walking).min(1.0);
    PassageFigures {
        per_passage,
        per_passage_p95: (upper * walking).min(1.0),
        per_stop_p95: standing.map(|s| (upper * s).min(1.0)),
        season: how
            .passages_per_day
            .map(|n| n * how.horizon_days * (per_passage + standing.map_or(0.0, |s| (central * s).min(1.0)))),
    }
}

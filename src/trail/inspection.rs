//! Which boulder to walk up to first.
//!
//! By upper exposure of people, then width of the interval, then age of the last look, then id. Upper exposure is the
//! sum over segments of p_source(high) x P_seg x person-hours a day on the segment; without trails it is p_source(high).
//! A boulder without a likelihood is placed by what is unknown about it: its likelihood may be anything up to 1, so 1 is its
//! upper value and its interval is 1 wide; a reach that cannot be judged counts as 1.

use jiff::civil::Date;

use super::exposure::Exposure;
use super::segments::Segment;
use crate::rockfall::source::SourceSummary;
use crate::settings::TrailSettings;
use crate::site::Trail;

/// What a boulder is ranked by.
#[derive(Debug, Clone, PartialEq)]
pub struct InspectionKey {
    /// Its id.
    pub id: String,
    /// Upper exposure, person-hours a day; the bare upper likelihood in a run without trails.
    pub upper_exposure: f64,
    /// Width of the likelihood's interval.
    pub interval_width: f64,
    /// Day of the last look; never looked at counts as the oldest.
    pub observed_on: Option<Date>,
}

/// Upper likelihood and width of the interval; (1, 1) where there is none.
pub fn upper_and_width(source: Option<&SourceSummary>) -> (f64, f64) {
    match source.and_then(|s| Some((s.p_source_low?, s.p_source_high?))) {
        Some((low, high)) => (high, high - low),
        None => (1.0, 1.0),
    }
}

/// Person-hours a day on a segment; the settings' assumed passages where the trail states none.
pub fn person_hours_per_day(segment: &Segment, trail: &Trail, settings: &TrailSettings) -> f64 {
    let passages = trail.passages_per_day.unwrap_or(settings.passages_per_day_assumed);
    let walking_s = segment.length_m() / trail.walking_speed_m_s.unwrap_or(settings.walking_speed_m_s);
    passages * (walking_s + trail.standing_s.unwrap_or(0.0)) / 3600.0
}

/// Upper exposure of one boulder over the segments it may touch.
pub fn upper_exposure(
    source: Option<&SourceSummary>,
    exposures: &[Exposure],
    segments: &[Segment],
    trails: &[Trail],
    settings: &TrailSettings,
) -> f64 {
    let (upper, _) = upper_and_width(source);
    exposures
        .iter()
        .map(|e| {
            let segment = &segments[e.segment];
            let reach = e.reach.map_or(1.0, |r| r.p_segment);
            upper * reach * person_hours_per_day(segment, &trails[segment.trail], settings)
        })
        .sum()
}

/// Rank of each key, from 1, in the order given.
pub fn ranks(keys: &[InspectionKey]) -> Vec<usize> {
    let mut order: Vec<usize> = (0..keys.len()).collect();
    order.sort_by(|&a, &b| {
        let (a, b) = (&keys[a], &keys[b]);
        b.upper_exposure
            .total_cmp(&a.upper_exposure)
            .then_with(|| b.interval_width.total_cmp(&a.interval_width))
            .then_with(|| a.observed_on.cmp(&b.observed_on))
            .then_with(|| a.id.cmp(&b.id))
    });
    let mut ranks = vec![0; keys.len()];
    for (rank, index) in order.into_iter().enumerate() {
        ranks[index] = rank + 1;
    }
    ranks
}

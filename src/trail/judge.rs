//! One segment from its exposures to its row: the only place where reach, sources and people meet.

use jiff::{ToSpan, civil::Date};

use super::combine::{Combined, Share, combine};
use super::exposure::Exposure;
use super::passage::{PassageFigures, Use, figures};
use super::proposal::{Decision, Evidence, Named, decide};
use super::segments::Segment;
use crate::flag::Flag;
use crate::rockfall::place::Placed;
use crate::rockfall::source::SourceSummary;
use crate::settings::Settings;
use crate::site::{Boulder, Support, Trail};

/// Everything known about one boulder when trails are judged.
#[derive(Debug, Clone, Copy)]
pub struct Judged<'a> {
    /// Its record.
    pub boulder: &'a Boulder,
    /// Its place.
    pub placed: &'a Placed,
    /// Its source summary; `None` when the boulder was not assessed.
    pub source: Option<&'a SourceSummary>,
    /// Why it was not assessed, when it was not.
    pub not_assessed: Option<&'a str>,
}

impl Judged<'_> {
    /// Width of what comes down, m: the boulder's longest axis; for an outcrop the median plate, else 1 m.
    pub fn width_m(&self) -> f64 {
        let axes = self.boulder.axes_m.map(|[a, b, c]| a.max(b).max(c));
        let plate = self.source.and_then(|s| s.fragment_breadth_m_p50);
        match self.boulder.kind {
            crate::site::Kind::Outcrop => plate.unwrap_or(1.0),
            crate::site::Kind::Boulder => axes.or(self.boulder.radius_m.map(|r| 2.0 * r)).unwrap_or(1.0),
        }
    }
}

/// One row of the trail layer.
#[derive(Debug, Clone, PartialEq)]
pub struct SegmentResult {
    /// Joint figures; `None` when no assessed boulder reaches the segment and it is not known that none does.
    pub combined: Option<Combined>,
    /// Figures for people; `None` likewise.
    pub people: Option<PassageFigures>,
    /// Contributing boulders, largest p_source x P_seg first, unassessed ones after them.
    pub boulder_ids: Vec<String>,
    /// Word, reason, reopening.
    pub decision: Decision,
    /// Horizon, days.
    pub horizon_days: f64,
    /// Day of the next review.
    pub review_on: Date,
}

/// Judges a segment. `exposed` pairs each exposure of this segment with its boulder, in the order of the inventory.
pub fn judge(
    segment: &Segment,
    trail: &Trail,
    exposed: &[(Judged<'_>, Exposure)],
    with_terrain: bool,
    settings: &Settings,
    as_of: Date,
) -> SegmentResult {
    let limits = &settings.trail;
    let mut evidence = Evidence {
        trail_name: trail.name.clone().unwrap_or_else(|| trail.id.clone()),
        from_m: segment.from_m,
        to_m: segment.to_m,
        without_terrain: !with_terrain,
        horizon_days: settings.horizon_days,
        ..Evidence::default()
    };
    let mut counted: Vec<(f64, Share, f64, Named)> = Vec::new();
    for (judged, exposure) in exposed {
        evidence.listed_near |= exposure.distance_m <= limits.looked_at_m;
        let id = &judged.boulder.id;
        let Some(reach) = exposure.reach else {
            if exposure.distance_m <= settings.rockfall.unknown_height_reach_m {
                let whose = if judged.placed.height_m.is_none() { "its height" } else { "the height of the trail" };
                let why = format!("{whose} is not known, so its reach cannot be judged");
                evidence.unassessed.push(Named { id: id.clone(), why, p_segment: None });
            }
            continue;
        };
        if reach.shielded {
            evidence.shielded.push(id.clone());
        }
        if reach.p_segment <= 0.0 {
            continue;
        }
        let named = |why: String| Named { id: id.clone(), why, p_segment: Some(reach.p_segment) };
        let numbers = judged.source.and_then(|s| Some((s, s.p_source?, s.p_source_low?, s.p_source_high?, s.strata?)));
        let within = reach.p_segment >= limits.in_reach_share;
        if within {
            evidence.listed_near = true;
            evidence.terrain_gap |= reach.terrain_gap;
            evidence.bearing_unknown |= judged.placed.flags.contains(&Flag::BearingUnknown);
        }
        if judged.boulder.standing.support == Some(Support::BurntThrough)
            && reach.p_segment > limits.burnt_through_share
        {
            evidence.burnt_through.push(named(String::new()));
        }
        match numbers {
            Some((summary, p_source, p_source_low, p_source_high, strata)) => {
                let share = Share { p_source, p_source_low, p_source_high, strata, p_segment: reach.p_segment };
                counted.push((p_source * reach.p_segment, share, judged.width_m(), named(summary.sentence())));
            }
            None if within => {
                let why = match (judged.source, judged.not_assessed) {
                    (Some(summary), _) => summary.sentence(),
                    (None, Some(reason)) => reason.to_owned(),
                    (None, None) => "it was not assessed".to_owned(),
                };
                evidence.unassessed.push(named(why));
            }
            None => {}
        }
    }
    counted.sort_by(|a, b| b.0.total_cmp(&a.0).then_with(|| a.3.id.cmp(&b.3.id)));
    evidence.unassessed.sort_by(|a, b| a.id.cmp(&b.id));
    evidence.burnt_through.sort_by(|a, b| a.id.cmp(&b.id));
    evidence.shielded.sort();

    let shares: Vec<Share> = counted.iter().map(|c| c.1).collect();
    let widths_m: Vec<f64> = counted.iter().map(|c| c.2).collect();
    let how = Use {
        walking_speed_m_s: trail.walking_speed_m_s.unwrap_or(limits.walking_speed_m_s),
        standing_s: trail.standing_s,
        passages_per_day: trail.passages_per_day,
        person_width_m: limits.person_width_m,
        vulnerability: limits.vulnerability,
        segment_m: segment.length_m(),
        horizon_days: settings.horizon_days,
    };
    // No numbers where nothing was judged: unassessed boulders alone, or nothing listed near.
    let known = !shares.is_empty() || (evidence.unassessed.is_empty() && evidence.listed_near);
    let combined = known.then(|| combine(&shares, settings.rockfall.wet_spell_probability));
    let people = known.then(|| figures(&shares, &widths_m, &how));
    if let (false, Some(combined)) = (shares.is_empty(), &combined) {
        evidence.p_any = Some(combined.p_any);
    }
    if let Some(people) = &people {
        evidence.per_passage_p95 = people.per_passage_p95;
        evidence.per_stop_p95 = people.per_stop_p95;
    }
    evidence.contributors = counted.into_iter().map(|c| c.3).collect();
    let boulder_ids = evidence.contributors.iter().chain(&evidence.unassessed).map(|n| n.id.clone()).collect();
    let days = (limits.review_days.min(settings.horizon_days)).clamp(0.0, 36_500.0) as i64;
    SegmentResult {
        combined,
        people,
        boulder_ids,
        decision: decide(&evidence, limits),
        horizon_days: settings.horizon_days,
        review_on: as_of.saturating_add(days.days()),
    }
}

//! All trails of a run: cut, reached, judged; and the order in which its boulders deserve a look.

use jiff::civil::Date;

use super::exposure::{Exposure, ReachSource, SegmentIndex, exposures};
use super::inspection::{InspectionKey, ranks, upper_and_width, upper_exposure};
use super::judge::{Judged, SegmentResult, judge};
use super::segments::{Segment, cut, fill_heights};
use crate::rockfall::reach::ReachAngle;
use crate::rockfall::terrain::Terrain;
use crate::settings::Settings;
use crate::site::{GroundAfter, Trail};

/// One boulder as the survey of trails needs it.
#[derive(Debug, Clone, Copy)]
pub struct Surveyed<'a> {
    /// What is known of it.
    pub judged: Judged<'a>,
    /// State of the ground around it after the fire, where the burn says it.
    pub ground: Option<GroundAfter>,
}

/// The trails of a run.
#[derive(Debug, Clone)]
pub struct Survey {
    /// Every segment, trail by trail.
    pub segments: Vec<Segment>,
    /// Its result, in the same order.
    pub results: Vec<SegmentResult>,
    /// Inspection rank of each boulder, from 1, in the order given.
    pub ranks: Vec<usize>,
    /// Trail vertices whose recorded height differs from the raster by more than the tolerance.
    pub doubtful_trail_heights: usize,
}

/// Cuts the trails, finds who reaches which segment, judges every segment and ranks the boulders. Without trails the
/// survey has no segments and ranks by likelihood alone.
pub fn survey(
    trails: &[Trail],
    boulders: &[Surveyed<'_>],
    terrain: Option<&Terrain>,
    settings: &Settings,
    as_of: Date,
) -> Survey {
    let mut segments: Vec<Segment> =
        trails.iter().enumerate().flat_map(|(i, t)| cut(t, i, settings.trail.segment_m)).collect();
    let mut doubtful_trail_heights = 0;
    if let Some(terrain) = terrain {
        for segment in &mut segments {
            doubtful_trail_heights += fill_heights(segment, terrain, settings.rockfall.height_tolerance_m);
        }
    }
    let index = SegmentIndex::new(&segments);
    let angle = |ground| ReachAngle::new(&settings.rockfall, ground);
    let angles = [None, Some(GroundAfter::Intact), Some(GroundAfter::Bare), Some(GroundAfter::Severe)]
        .map(|ground| (ground, angle(ground)));
    let mut by_segment: Vec<Vec<(Judged<'_>, Exposure)>> = vec![Vec::new(); segments.len()];
    let mut keys = Vec::with_capacity(boulders.len());
    for boulder in boulders {
        let judged = boulder.judged;
        let angle = angles.iter().find(|(ground, _)| *ground == boulder.ground).map_or(&angles[0].1, |(_, a)| a);
        let source =
            ReachSource { position: judged.boulder.position, placed: judged.placed, width_m: judged.width_m(), angle };
        let touched = exposures(&source, &index, terrain, &settings.rockfall, settings.trail.looked_at_m);
        let (upper, width) = upper_and_width(judged.source);
        let exposure = if trails.is_empty() {
            upper
        } else {
            upper_exposure(judged.source, &touched, &segments, trails, &settings.trail)
        };
        keys.push(InspectionKey {
            id: judged.boulder.id.clone(),
            upper_exposure: exposure,
            interval_width: width,
            observed_on: judged.boulder.standing.observed_on,
        });
        for exposure in touched {
            by_segment[exposure.segment].push((judged, exposure));
        }
    }
    let results = segments
        .iter()
        .zip(&by_segment)
        .map(|(segment, exposed)| judge(segment, &trails[segment.trail], exposed, terrain.is_some(), settings, as_of))
        .collect();
    Survey { results, ranks: ranks(&keys), segments, doubtful_trail_heights }
}

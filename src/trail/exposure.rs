//! Which sources reach which segments.
//!
//! Segments are indexed by the middle of their points on the unit sphere; a source asks for those within the distance at
//! which even the flattest counted reach angle has run out. One call per source, so that callers may share the work out;
//! results do not depend on the order of calls.

use rstar::{RTree, primitives::GeomWithData};

use super::segments::{Segment, east_north_m, seen_from};
use crate::rockfall::place::Placed;
use crate::rockfall::profile::RayCaster;
use crate::rockfall::reach::{Bearings, ReachAngle, SegmentReach, distance_to_chain_m, segment_reach};
use crate::rockfall::terrain::Terrain;
use crate::settings::RockfallSettings;
use crate::site::Position;

/// Mean radius of the Earth for chords, m; only widens searches (recalled).
const EARTH_M: f64 = 6_371_000.0;
/// Share of falls under which a segment is not looked at any more.
const COUNTED_SHARE: f64 = 1e-6;
/// Margin on searches, m.
const MARGIN_M: f64 = 50.0;

type Entry = GeomWithData<[f64; 3], usize>;

/// Segments by place.
#[derive(Debug)]
pub struct SegmentIndex<'a> {
    segments: &'a [Segment],
    tree: RTree<Entry>,
    lowest_m: f64,
    half_length_m: f64,
}

fn on_sphere(p: Position) -> [f64; 3] {
    let (lon, lat) = (p.lon_deg.to_radians(), p.lat_deg.to_radians());
    let cos = libm::cos(lat);
    [cos * libm::cos(lon), cos * libm::sin(lon), libm::sin(lat)]
}

impl<'a> SegmentIndex<'a> {
    /// Indexes the segments of a run.
    pub fn new(segments: &'a [Segment]) -> Self {
        let entries =
            segments.iter().enumerate().map(|(i, s)| Entry::new(on_sphere(s.points[s.points.len() / 2]), i)).collect();
        let heights = segments.iter().flat_map(|s| &s.points).filter_map(|p| p.height_m);
        SegmentIndex {
            segments,
            tree: RTree::bulk_load(entries),
            lowest_m: heights.fold(f64::INFINITY, f64::min),
            half_length_m: segments.iter().map(Segment::length_m).fold(0.0, f64::max),
        }
    }

    /// The segments.
    pub fn segments(&self) -> &'a [Segment] {
        self.segments
    }

    /// Segments that may lie within `radius_m`, in order.
    fn near(&self, origin: Position, radius_m: f64) -> Vec<usize> {
        let chord = (radius_m + self.half_length_m + MARGIN_M) / EARTH_M;
        let found = self.tree.locate_within_distance(on_sphere(origin), chord * chord);
        let mut near: Vec<usize> = found.map(|e| e.data).collect();
        near.sort_unstable();
        near
    }
}

/// A boulder as the trail sees it.
#[derive(Debug, Clone)]
pub struct ReachSource<'a> {
    /// Where it is.
    pub position: Position,
    /// Slope, bearing and height as used. A height in doubt must be `None` here.
    pub placed: &'a Placed,
    /// Width of the block, m.
    pub width_m: f64,
    /// Reach angle over its ground.
    pub angle: &'a ReachAngle,
}

/// What one source is to one segment.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Exposure {
    /// Place of the segment in the run's list.
    pub segment: usize,
    /// Least horizontal distance, m.
    pub distance_m: f64,
    /// Its reach; `None` where a height is missing, so that it cannot be judged.
    pub reach: Option<SegmentReach>,
}

/// Every segment that the source may touch, in order, and those within `looked_at_m`, touched or not.
///
/// Segments whose reach cannot be judged are listed within [`RockfallSettings::unknown_height_reach_m`].
pub fn exposures(
    source: &ReachSource<'_>,
    index: &SegmentIndex<'_>,
    terrain: Option<&Terrain>,
    settings: &RockfallSettings,
    looked_at_m: f64,
) -> Vec<Exposure> {
    let placed = source.placed;
    let height_m = placed.height_m;
    let flattest = source.angle.flattest_deg(COUNTED_SHARE).max(5.0);
    let run_out_m = match height_m {
        Some(h) if index.lowest_m.is_finite() => {
            (h + 3.0 * placed.height_sd_m - index.lowest_m).max(0.0) / libm::tan(flattest.to_radians())
        }
        _ => 0.0,
    };
    let radius_m = run_out_m.max(settings.unknown_height_reach_m).max(looked_at_m);
    let rays = height_m.and_then(|h| RayCaster::new(terrain?, source.position.lon_deg, source.position.lat_deg, h));
    let mut list = Vec::new();
    for segment in index.near(source.position, radius_m) {
        let stretch = &index.segments[segment];
        let judged = height_m.and_then(|h| seen_from(stretch, source.position, h));
        let Some(points) = judged else {
            let distance_m = distance_without_heights_m(stretch, source.position);
            if distance_m <= settings.unknown_height_reach_m.max(looked_at_m) {
                list.push(Exposure { segment, distance_m, reach: None });
            }
            continue;
        };
        let distance_m = distance_to_chain_m(&points);
        let bearings = match placed.bearing_deg {
            Some(centre_deg) => {
                Bearings::FallLine { centre_deg, sd_deg: settings.bearing_sd_deg, cut_deg: settings.bearing_cut_deg }
            }
            None => {
                let nearest = points.iter().min_by(|a, b| a.distance_m().total_cmp(&b.distance_m()));
                Bearings::Even {
                    centre_deg: nearest.map_or(0.0, |p| p.bearing_deg()),
                    half_width_deg: settings.unknown_bearing_deg,
                }
            }
        };
        let reach = segment_reach(&points, &bearings, source.angle, placed.height_sd_m, source.width_m, rays.as_ref());
        if reach.p_segment >= COUNTED_SHARE || distance_m <= looked_at_m || reach.shielded {
            list.push(Exposure { segment, distance_m, reach: Some(reach) });
        }
    }
    list
}

fn distance_without_heights_m(segment: &Segment, origin: Position) -> f64 {
    let flat: Vec<_> = segment
        .points
        .iter()
        .map(|p| {
            let (east_m, north_m) = east_north_m(origin, *p);
            crate::rockfall::reach::SeenPoint { east_m, north_m, drop_m: 0.0 }
        })
        .collect();
    distance_to_chain_m(&flat)
}

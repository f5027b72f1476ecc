//! Trails cut into segments of equal length along the geodesic, with points 5 m apart or closer.
//!
//! Metres run on over the parts of a multi-part trail; the gap between parts does not count. A remainder shorter than a
//! hundredth of a segment joins the one before. Distances: geodesics on WGS 84 (Karney 2013, by `geo`).

use geo::{Distance, Geodesic, InterpolatePoint, Point};

use crate::rockfall::reach::SeenPoint;
use crate::rockfall::terrain::{Terrain, metres_per_degree};
use crate::site::{Position, Trail};

/// Widest spacing of points, m.
pub const POINT_SPACING_M: f64 = 5.0;

/// One stretch of one trail.
#[derive(Debug, Clone, PartialEq)]
pub struct Segment {
    /// Place of the trail in the run's list.
    pub trail: usize,
    /// Number within the trail, from 1.
    pub number: usize,
    /// Metres along the trail at its start.
    pub from_m: f64,
    /// Metres along the trail at its end.
    pub to_m: f64,
    /// Its points in order, the trail's own vertices included.
    pub points: Vec<Position>,
}

impl Segment {
    /// Length, m.
    pub fn length_m(&self) -> f64 {
        self.to_m - self.from_m
    }
}

fn point(p: Position) -> Point<f64> {
    Point::new(p.lon_deg, p.lat_deg)
}

/// Geodesic distance between two positions, m.
pub fn geodesic_m(a: Position, b: Position) -> f64 {
    Geodesic.distance(point(a), point(b))
}

/// Cuts one trail; `trail_index` is its place in the run's list.
pub fn cut(trail: &Trail, trail_index: usize, segment_m: f64) -> Vec<Segment> {
    let mut segments = Vec::new();
    let mut from_m = 0.0;
    for line in &trail.lines {
        let lengths: Vec<f64> = line.windows(2).map(|w| geodesic_m(w[0], w[1])).collect();
        let total_m: f64 = lengths.iter().sum();
        if total_m <= 0.0 {
            continue;
        }
        let count = ((total_m / segment_m - 0.01).ceil() as usize).max(1);
        let end_m = |k: usize| if k + 1 == count { total_m } else { (k + 1) as f64 * segment_m };
        let mut current = vec![line[0]];
        let (mut index, mut start_m, mut done_m) = (0, 0.0, 0.0);
        for (leg, length_m) in line.windows(2).zip(&lengths) {
            let mut at_m = 0.0;
            while at_m < *length_m {
                let to_boundary = end_m(index) - done_m - at_m;
                let left = length_m - at_m;
                // Equal steps up to the next boundary or vertex; the last segment's end is the last vertex itself.
                let stretch = if index + 1 == count { left } else { left.min(to_boundary) };
                let steps = (stretch / POINT_SPACING_M).ceil().max(1.0);
                let start = at_m;
                for step in 1..=steps as usize {
                    let here = start + stretch * step as f64 / steps;
                    current.push(along(leg[0], leg[1], here / length_m));
                }
                at_m = if stretch >= left { *length_m } else { start + stretch };
                if index + 1 < count && stretch >= to_boundary {
                    let last = *current.last().expect("a point was just added");
                    let number = segments.len() + 1;
                    let points = std::mem::replace(&mut current, vec![last]);
                    segments.push(Segment {
                        trail: trail_index,
                        number,
                        from_m: from_m + start_m,
                        to_m: from_m + end_m(index),
                        points,
                    });
                    start_m = end_m(index);
                    index += 1;
                }
            }
            done_m += length_m;
        }
        let number = segments.len() + 1;
        segments.push(Segment {
            trail: trail_index,
            number,
            from_m: from_m + start_m,
            to_m: from_m + total_m,
            points: current,
        });
        from_m += total_m;
    }
    segments
}

fn along(a: Position, b: Position, ratio: f64) -> Position {
    if ratio >= 1.0 {
        return b;
    }
    let p = Geodesic.point_at_ratio_between(point(a), point(b), ratio);
    let height_m = match (a.height_m, b.height_m) {
        (Some(za), Some(zb)) => Some(za + ratio * (zb - za)),
        _ => None,
    };
    Position { lon_deg: p.x(), lat_deg: p.y(), height_m }
}

/// Fills heights from the raster where the trail has none or differs from it by more than `tolerance_m`; returns how
/// many points were replaced against their record.
pub fn fill_heights(segment: &mut Segment, terrain: &Terrain, tolerance_m: f64) -> usize {
    let mut replaced = 0;
    for p in &mut segment.points {
        if let Some(h) = terrain.height(p.lon_deg, p.lat_deg) {
            match p.height_m {
                Some(own) if (own - h).abs() <= tolerance_m => {}
                Some(_) => {
                    replaced += 1;
                    p.height_m = Some(h);
                }
                None => p.height_m = Some(h),
            }
        }
    }
    replaced
}

/// Metres east and north of `origin`, by the ellipsoid's curvature at the middle latitude, turned by half the meridian
/// convergence so that bearings are those at the origin. Within 1 mm and .001 deg of the geodesic to 2 km.
pub fn east_north_m(origin: Position, to: Position) -> (f64, f64) {
    let middle = 0.5 * (origin.lat_deg + to.lat_deg);
    let (north, east) = metres_per_degree(middle);
    let dlon = (to.lon_deg - origin.lon_deg + 180.0).rem_euclid(360.0) - 180.0;
    let (e, n) = (dlon * east, (to.lat_deg - origin.lat_deg) * north);
    let turn = -0.5 * dlon.to_radians() * libm::sin(middle.to_radians());
    let (sin, cos) = (libm::sin(turn), libm::cos(turn));
    (e * cos + n * sin, n * cos - e * sin)
}

/// The segment as a source at `origin` and `height_m` sees it; `None` when a height is missing.
pub fn seen_from(segment: &Segment, origin: Position, height_m: f64) -> Option<Vec<SeenPoint>> {
    segment
        .points
        .iter()
        .map(|p| {
            let (east_m, north_m) = east_north_m(origin, *p);
            p.height_m.map(|h| SeenPoint { east_m, north_m, drop_m: height_m - h })
        })
        .collect()
}

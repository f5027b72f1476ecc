//! How far and where a source reaches: reach angle, bearing, the integral over a stretch of trail, the energy line.
//!
//! P_reach(theta) = Phi((theta - mu')/s_eff),  theta = atan(drop/distance),  tan mu' = tan mu / f
//! s_eff  = sqrt(s^2 + s_theta^2),  s_theta = (180/pi) cos^2 theta s_h/d
//! P_seg  = int f(psi) max over the stretch's points at psi of P_reach dpsi
//! dh     = z_s - d tan a - z_ground,  v = sqrt(2 g dh),  E = m g dh
//!
//! mu, s mean and sd of the reach angle; f factor of the ground (1 intact, 1.17 bare, triangular 1/1.17/1.40 severe; P_reach
//! is averaged over it); s_h sd of the heights; psi bearing, normal about the downslope bearing (sd 10 deg) cut at +-30 (the
//! .27 % beyond the cut reach nothing: not renormalised); where the bearing is unknown even over +-45 deg about the stretch's nearest point. The maximum along a
//! bearing, not the sum: it is the same block. With terrain theta is the least angle on the way ([`super::profile`]).
//!
//! Method: in the plane of distance and bearing about the source (geodesic, Karney) a stretch is a chain of straight
//! pieces. Bearings are cut at every vertex and at every whole piece of [`BIN_DEG`]; each piece of bearing takes two Gauss
//! points; rays meet pieces exactly. Mean and sd of the angle are assumptions (50 % at 34 deg, 5.2 % at 27.5, .13 % at
//! 22); 27.5 deg is the minimum shadow angle of Evans & Hungr 1993 (abstract read). Volume does not enter: angle against
//! volume (Corominas 1996, recalled) is not for blocks of metres.

use super::profile::RayCaster;
use crate::ensemble::distribution::{Distribution, normal_cdf};
use crate::settings::RockfallSettings;
use crate::site::GroundAfter;
use crate::units::GRAVITY_M_S2;

/// Widest piece of bearing in the integral, degrees.
pub const BIN_DEG: f64 = 0.5;
/// Minimum shadow angle, degrees. Evans & Hungr 1993, Can. Geotech. J. 30, 620 (published).
pub const SHADOW_ANGLE_DEG: f64 = 27.5;
/// Closer than this the bearing of a point means nothing: the source stands on the trail, m.
const ON_TRAIL_M: f64 = 1.0;
/// Shares at which the ground factor is sampled.
const GROUND_SHARES: usize = 8;

/// Reach angle to a point, degrees.
///
/// ```
/// use spallcast::rockfall::reach::reach_angle_deg;
/// assert!((reach_angle_deg(120.0, 180.0) - 33.6901).abs() < 5e-5);
/// ```
pub fn reach_angle_deg(drop_m: f64, distance_m: f64) -> f64 {
    libm::atan2(drop_m, distance_m).to_degrees()
}

/// Widening of the angle by an error of the heights, degrees.
///
/// ```
/// use spallcast::rockfall::reach::height_error_deg;
/// assert!((height_error_deg(10.0, 120.0, 180.0) - 2.2037).abs() < 5e-5);
/// ```
pub fn height_error_deg(height_sd_m: f64, drop_m: f64, distance_m: f64) -> f64 {
    let cos2 = distance_m * distance_m / (distance_m * distance_m + drop_m * drop_m);
    (cos2 * height_sd_m / distance_m).to_degrees()
}

/// Distance at which a line under `angle_deg` has dropped by `drop_m`, m.
///
/// ```
/// assert!((spallcast::rockfall::reach::distance_at_angle_m(50.0, 27.5) - 96.049).abs() < 5e-4);
/// ```
pub fn distance_at_angle_m(drop_m: f64, angle_deg: f64) -> f64 {
    drop_m / libm::tan(angle_deg.to_radians())
}

/// Mean reach angle over ground of a factor `f`: atan(tan mu / f), degrees.
///
/// ```
/// assert!((spallcast::rockfall::reach::mean_over_ground_deg(34.0, 1.17) - 29.964).abs() < 5e-4);
/// ```
pub fn mean_over_ground_deg(mean_deg: f64, factor: f64) -> f64 {
    libm::atan(libm::tan(mean_deg.to_radians()) / factor).to_degrees()
}

/// What a block has left where its energy line passes over the ground.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct EnergyLine {
    /// Height of the line above the ground, m.
    pub head_m: f64,
    /// Speed, m/s.
    pub speed_m_s: f64,
    /// Energy, J.
    pub energy_j: f64,
}

/// Energy line under `angle_deg` at a point; `None` where it runs under the ground.
///
/// ```
/// let line = spallcast::rockfall::reach::energy_line(33.0, 50.0, 60.0, 1000.0).unwrap();
/// assert!((line.head_m - 11.0355).abs() < 5e-5 && (line.speed_m_s - 14.712).abs() < 5e-4);
/// ```
pub fn energy_line(angle_deg: f64, drop_m: f64, distance_m: f64, mass_kg: f64) -> Option<EnergyLine> {
    let head_m = drop_m - distance_m * libm::tan(angle_deg.to_radians());
    (head_m > 0.0).then(|| EnergyLine {
        head_m,
        speed_m_s: (2.0 * GRAVITY_M_S2 * head_m).sqrt(),
        energy_j: mass_kg * GRAVITY_M_S2 * head_m,
    })
}

/// The reach angle's distribution over one kind of ground, built once per ground.
#[derive(Debug, Clone, PartialEq)]
pub struct ReachAngle {
    means_deg: Vec<f64>,
    sd_deg: f64,
    /// Mean at the ground's most likely factor, degrees: where the energy line is drawn.
    pub central_mean_deg: f64,
}

impl ReachAngle {
    /// Over ground as it is after the fire; ground that was not recorded counts as intact.
    pub fn new(settings: &RockfallSettings, ground: Option<GroundAfter>) -> Self {
        let factor = match ground.unwrap_or(GroundAfter::Intact) {
            GroundAfter::Intact => Distribution::point(1.0),
            GroundAfter::Bare => Distribution::point(settings.bare_ground_factor),
            GroundAfter::Severe => settings.severe_ground_factor,
        };
        let mean = |f: f64| mean_over_ground_deg(settings.reach_mean_deg, f);
        let means_deg = if factor.lower >= factor.upper {
            vec![mean(factor.lower)]
        } else {
            (0..GROUND_SHARES).map(|i| mean(factor.quantile((i as f64 + 0.5) / GROUND_SHARES as f64))).collect()
        };
        ReachAngle { means_deg, sd_deg: settings.reach_sd_deg, central_mean_deg: mean(factor.centre) }
    }

    /// P_reach at an angle, with the widening by heights.
    pub fn probability(&self, angle_deg: f64, widening_deg: f64) -> f64 {
        let sd = (self.sd_deg * self.sd_deg + widening_deg * widening_deg).sqrt();
        self.means_deg.iter().map(|mean| normal_cdf((angle_deg - mean) / sd)).sum::<f64>() / self.means_deg.len() as f64
    }

    /// Angle under which the probability is below `least`, without any widening, degrees.
    pub fn flattest_deg(&self, least: f64) -> f64 {
        let lowest = self.means_deg.iter().copied().fold(f64::INFINITY, f64::min);
        lowest + self.sd_deg * crate::ensemble::distribution::normal_score(least)
    }
}

/// The bearings a block may take.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Bearings {
    /// Normal about the fall line, cut, not renormalised: what lies beyond the cut reaches nothing.
    FallLine {
        /// Downslope bearing, degrees.
        centre_deg: f64,
        /// Standard deviation, degrees.
        sd_deg: f64,
        /// Cut either side, degrees.
        cut_deg: f64,
    },
    /// Even about a bearing.
    Even {
        /// Middle, degrees.
        centre_deg: f64,
        /// Half-width, degrees.
        half_width_deg: f64,
    },
}

impl Bearings {
    fn centre_deg(&self) -> f64 {
        match *self {
            Bearings::FallLine { centre_deg, .. } | Bearings::Even { centre_deg, .. } => centre_deg,
        }
    }

    fn limit_deg(&self) -> f64 {
        match *self {
            Bearings::FallLine { cut_deg, .. } => cut_deg,
            Bearings::Even { half_width_deg, .. } => half_width_deg,
        }
    }

    /// Probability of a bearing between two offsets from the middle, degrees.
    pub fn share(&self, from_deg: f64, to_deg: f64) -> f64 {
        let limit = self.limit_deg();
        let (from, to) = (from_deg.clamp(-limit, limit), to_deg.clamp(-limit, limit));
        match *self {
            Bearings::Even { half_width_deg, .. } => (to - from) / (2.0 * half_width_deg),
            Bearings::FallLine { sd_deg, .. } => normal_cdf(to / sd_deg) - normal_cdf(from / sd_deg),
        }
    }
}

/// A point of a stretch as the source sees it: metres east and north of the source, and metres below it.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct SeenPoint {
    /// East of the source, m.
    pub east_m: f64,
    /// North of the source, m.
    pub north_m: f64,
    /// Below the source, m; negative above.
    pub drop_m: f64,
}

impl SeenPoint {
    /// Horizontal distance, m.
    pub fn distance_m(&self) -> f64 {
        (self.east_m * self.east_m + self.north_m * self.north_m).sqrt()
    }

    /// Bearing from the source, degrees.
    pub fn bearing_deg(&self) -> f64 {
        libm::atan2(self.east_m, self.north_m).to_degrees()
    }
}

/// Signed difference of two bearings, degrees, in [-180, 180).
pub fn bearing_difference_deg(a_deg: f64, b_deg: f64) -> f64 {
    (a_deg - b_deg + 180.0).rem_euclid(360.0) - 180.0
}

/// What a stretch of trail gets from one source.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct SegmentReach {
    /// P_seg.
    pub p_segment: f64,
    /// Steepest reach angle found on the stretch within the bearings, degrees.
    pub steepest_deg: Option<f64>,
    /// Horizontal distance there, m.
    pub distance_m: f64,
    /// Drop there, m.
    pub drop_m: f64,
    /// Whether rays ran over ground of which the raster knows nothing.
    pub terrain_gap: bool,
    /// Whether the raster, and not the bare angle, stopped every ray that would have counted.
    pub shielded: bool,
}

/// Two-point Gauss rule on [0, 1].
const GAUSS: [f64; 2] = [0.211_324_865_405_187_1, 0.788_675_134_594_812_9];

/// P_seg of the chain `points` (`[n_points]`, in order, 5 m or closer where heights bend).
///
/// `rays` gives the least angle on the way where there is terrain. `height_sd_m` widens the angle. A stretch that runs
/// straight down from the source spans no bearing at all; it counts as wide as the block, `block_width_m`, at its
/// nearest point.
pub fn segment_reach(
    points: &[SeenPoint],
    bearings: &Bearings,
    angle: &ReachAngle,
    height_sd_m: f64,
    block_width_m: f64,
    rays: Option<&RayCaster<'_>>,
) -> SegmentReach {
    let mut result = SegmentReach::default();
    let nearest = points.iter().copied().min_by(|a, b| a.distance_m().total_cmp(&b.distance_m()));
    let Some(nearest) = nearest else { return result };
    if distance_to_chain_m(points) <= ON_TRAIL_M && nearest.drop_m >= 0.0 {
        return SegmentReach { p_segment: 1.0, steepest_deg: Some(90.0), drop_m: nearest.drop_m, ..result };
    }
    let limit = bearings.limit_deg();
    let centre = bearings.centre_deg();
    // Offsets of the vertices, unwrapped along the chain so that a piece never spans the far side by mistake.
    let offsets: Vec<f64> = points.iter().map(|p| bearing_difference_deg(p.bearing_deg(), centre)).collect();
    let pieces: Vec<(f64, f64, SeenPoint, SeenPoint)> = (1..points.len())
        .filter_map(|i| {
            let (a, b) = (offsets[i - 1], offsets[i]);
            let turn = bearing_difference_deg(b, a);
            let (low, high) = (a.min(a + turn), a.max(a + turn));
            (turn != 0.0 && high > -limit && low < limit).then_some((low, high, points[i - 1], points[i]))
        })
        .collect();
    let mut cuts: Vec<f64> = pieces.iter().flat_map(|p| [p.0, p.1]).map(|c| c.clamp(-limit, limit)).collect();
    cuts.sort_by(f64::total_cmp);
    cuts.dedup();
    let (mut open, mut blocked) = (false, false);
    for pair in cuts.windows(2) {
        let bins = ((pair[1] - pair[0]) / BIN_DEG).ceil().max(1.0);
        for bin in 0..bins as usize {
            let from = pair[0] + (pair[1] - pair[0]) * bin as f64 / bins;
            let to = pair[0] + (pair[1] - pair[0]) * (bin + 1) as f64 / bins;
            let weight = bearings.share(from, to);
            if weight <= 0.0 {
                continue;
            }
            let mut p_bin = 0.0;
            for node in GAUSS {
                let offset = from + (to - from) * node;
                let psi = (centre + offset).to_radians();
                let (sin, cos) = (libm::sin(psi), libm::cos(psi));
                let mut best = 0.0f64;
                for (low, high, a, b) in &pieces {
                    if offset < *low || offset > *high {
                        continue;
                    }
                    let Some((distance_m, drop_m)) = meet(a, b, sin, cos) else { continue };
                    let bare = reach_angle_deg(drop_m, distance_m);
                    let way = rays.map(|r| r.least_angle(sin, cos, distance_m));
                    let theta = way.as_ref().map_or(bare, |w| bare.min(w.least_deg));
                    result.terrain_gap |= way.is_some_and(|w| w.gap);
                    let widening =
                        if height_sd_m > 0.0 { height_error_deg(height_sd_m, drop_m, distance_m) } else { 0.0 };
                    let p = angle.probability(theta, widening);
                    if angle.probability(bare, widening) >= SHIELD_COUNTED {
                        if p < SHIELD_COUNTED { blocked = true } else { open = true }
                    }
                    best = best.max(p);
                    if result.steepest_deg.is_none_or(|s| theta > s) {
                        (result.steepest_deg, result.distance_m, result.drop_m) = (Some(theta), distance_m, drop_m);
                    }
                }
                p_bin += 0.5 * best;
            }
            result.p_segment += weight * p_bin;
        }
    }
    result.shielded = blocked && !open;
    let nearest_m = nearest.distance_m();
    let (low, high) = offsets.iter().fold((f64::INFINITY, f64::NEG_INFINITY), |(l, h), o| (l.min(*o), h.max(*o)));
    let block_deg = 2.0 * libm::atan(0.5 * block_width_m / nearest_m).to_degrees();
    if high - low < block_deg {
        let middle = 0.5 * (low + high);
        let share = bearings.share(middle - 0.5 * block_deg, middle + 0.5 * block_deg);
        let psi = (centre + middle).to_radians();
        for point in points {
            let bare = reach_angle_deg(point.drop_m, point.distance_m());
            let theta = match rays.map(|r| r.least_angle(libm::sin(psi), libm::cos(psi), point.distance_m())) {
                Some(way) => bare.min(way.least_deg),
                None => bare,
            };
            let widening = height_error_deg(height_sd_m, point.drop_m, point.distance_m());
            let p = share * angle.probability(theta, widening);
            if p > result.p_segment {
                result.p_segment = p;
                (result.steepest_deg, result.distance_m, result.drop_m) =
                    (Some(theta), point.distance_m(), point.drop_m);
            }
        }
    }
    result
}

/// Probability under which a ray counts as stopped when it is said that ground shields a stretch.
const SHIELD_COUNTED: f64 = 1e-3;

/// Where a ray of direction (sin, cos) meets the piece a-b: distance and drop.
fn meet(a: &SeenPoint, b: &SeenPoint, sin: f64, cos: f64) -> Option<(f64, f64)> {
    // Component across the ray; it changes sign where the piece crosses it.
    let across = |p: &SeenPoint| p.east_m * cos - p.north_m * sin;
    let (ca, cb) = (across(a), across(b));
    if ca == cb {
        return None;
    }
    let t = (ca / (ca - cb)).clamp(0.0, 1.0);
    let mix = |x: f64, y: f64| x + t * (y - x);
    let along = mix(a.east_m, b.east_m) * sin + mix(a.north_m, b.north_m) * cos;
    (along > 0.0).then(|| (along, mix(a.drop_m, b.drop_m)))
}

/// Least horizontal distance from the source to a chain, m.
pub fn distance_to_chain_m(points: &[SeenPoint]) -> f64 {
    let mut least = points.iter().map(SeenPoint::distance_m).fold(f64::INFINITY, f64::min);
    for pair in points.windows(2) {
        let (de, dn) = (pair[1].east_m - pair[0].east_m, pair[1].north_m - pair[0].north_m);
        let length2 = de * de + dn * dn;
        if length2 > 0.0 {
            let t = (-(pair[0].east_m * de + pair[0].north_m * dn) / length2).clamp(0.0, 1.0);
            let (e, n) = (pair[0].east_m + t * de, pair[0].north_m + t * dn);
            least = least.min((e * e + n * n).sqrt());
        }
    }
    least
}

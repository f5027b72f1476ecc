//! How one boulder stands and where it may go, in the detail that a probe prints: factors of safety today and after the
//! changes of the horizon, and every stretch of trail in its reach.
//!
//! The factors are those of the middle of every input (readings as they were taken, friction and uplift at their
//! medians). After the changes: the support gone, half the seat gone on burnt duff, the scar measured at the base or the
//! mean base retreat of the draws, a wet spell of median uplift, shaking where the settings ask for it. They show which
//! mode is weakest; the likelihood comes from the draws, not from these.
//!
//! Energy line: dh = drop - d tan a, v = sqrt(2 g dh), E = m g dh, at the mean reach angle of the ground and at the minimum
//! shadow angle (see [`crate::rockfall::reach`]).

use super::Model;
use super::summary::DrawSummary;
use crate::rock::Property;
use crate::rockfall::friction::{UNKNOWN_CONTACT, contact_index};
use crate::rockfall::place::Placed;
use crate::rockfall::reach::{EnergyLine, ReachAngle, SHADOW_ANGLE_DEG, energy_line};
use crate::rockfall::release::{StaticsInputs, half_sizes};
use crate::rockfall::statics::{SEAT_MIN_M, ellipsoid_m3, overturn_fs, roll_fs, slide_fs, undercut_to_overturn_m};
use crate::rockfall::terrain::Terrain;
use crate::settings::RockfallSettings;
use crate::site::{Boulder, Contact, GroundAfter, Kind, Trail};
use crate::trail::exposure::{ReachSource, SegmentIndex, exposures};
use crate::trail::segments::{Segment, cut, fill_heights};

/// Factors of safety of one state. `None` where the mode is not possible in that state.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Factors {
    /// Against sliding: only without a seat.
    pub slide: Option<f64>,
    /// Against overturning.
    pub overturn: Option<f64>,
    /// Against rolling out of the seat: only with one.
    pub roll: Option<f64>,
    /// Loss of base that is left before it overturns, m; negative past overturning.
    pub undercut_left_m: Option<f64>,
}

/// Both states.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Statics {
    /// Today, dry, as if nothing held it from below.
    pub today: Factors,
    /// After the changes of the horizon.
    pub after: Factors,
    /// Base retreat that `after` was computed with, m.
    pub base_retreat_m: f64,
    /// Slope that was used, degrees.
    pub slope_deg: f64,
}

/// Middle of the guesses for what a record leaves open, as shares (see [`crate::rockfall::release`]).
const SETBACK_SHARE: f64 = 0.65;
const HEIGHT_SHARE: f64 = 0.95;
const SEAT_SHARE: f64 = 0.15;
/// Middle of the share of a seat that burnt duff loses.
const SEAT_LOST: f64 = 0.5;

/// Factors of safety at the middle of the inputs; `None` for an outcrop, or without a slope or a size.
pub fn statics(inputs: &StaticsInputs<'_>, base_retreat_m: f64, settings: &RockfallSettings) -> Option<Statics> {
    let (slope_deg, radius_m) = (inputs.slope_deg?, inputs.radius_m?);
    if inputs.kind == Kind::Outcrop {
        return None;
    }
    let record = inputs.standing;
    let (half_short_m, half_others_m) = half_sizes(inputs, radius_m);
    let contact = record.contact.map(contact_index).unwrap_or_else(likeliest_contact);
    let friction_rad = settings.friction_deg[contact].median().to_radians();
    let setback_m = record.centroid_setback_m.unwrap_or(SETBACK_SHARE * half_others_m);
    let height_m = record.centroid_height_m.unwrap_or(HEIGHT_SHARE * half_short_m);
    let seat_m = record.seat_depth_m.unwrap_or(SEAT_SHARE * radius_m);
    let slope_rad = slope_deg.to_radians();
    let factors = |setback_m: f64, seat_m: f64, k: f64, uplift: f64| Factors {
        slide: (seat_m < SEAT_MIN_M).then(|| slide_fs(friction_rad, slope_rad, k, uplift)),
        overturn: Some(overturn_fs(setback_m, height_m, slope_rad, k)),
        roll: (seat_m >= SEAT_MIN_M).then(|| roll_fs(radius_m, seat_m, slope_rad, k)),
        undercut_left_m: Some(undercut_to_overturn_m(setback_m, height_m, slope_rad, k)),
    };
    let retreat_m = record.base_scar_m.unwrap_or(base_retreat_m);
    let seat_after_m = if record.contact == Some(Contact::BurntDuff) { seat_m * (1.0 - SEAT_LOST) } else { seat_m };
    Some(Statics {
        today: factors(setback_m, seat_m, 0.0, 0.0),
        after: factors(setback_m - retreat_m, seat_after_m, settings.shaking_k, settings.uplift_share.median()),
        base_retreat_m: retreat_m,
        slope_deg,
    })
}

fn likeliest_contact() -> usize {
    (0..UNKNOWN_CONTACT.len()).fold(0, |best, i| if UNKNOWN_CONTACT[i] > UNKNOWN_CONTACT[best] { i } else { best })
}

/// One stretch of trail as one boulder sees it.
#[derive(Debug, Clone, PartialEq)]
pub struct Stretch {
    /// Trail.
    pub trail_id: String,
    /// Number of the segment along its trail.
    pub segment: usize,
    /// Metres along the trail.
    pub from_m: f64,
    /// Metres along the trail.
    pub to_m: f64,
    /// Least horizontal distance, m.
    pub nearest_m: f64,
    /// Its reach; `None` where a height is missing, so that it cannot be judged.
    pub reach: Option<StretchReach>,
}

/// Figures of a stretch that could be judged, at the point of the steepest angle.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct StretchReach {
    /// P_seg.
    pub p_segment: f64,
    /// Reach angle, degrees; `None` where no bearing of the boulder meets the stretch.
    pub angle_deg: Option<f64>,
    /// Horizontal distance there, m.
    pub distance_m: f64,
    /// Drop there, m.
    pub drop_m: f64,
    /// Mean reach angle over the boulder's ground, degrees.
    pub mean_angle_deg: f64,
    /// Energy line at the mean; `None` where it runs under the ground.
    pub at_mean: Option<EnergyLine>,
    /// Energy line at the minimum shadow angle.
    pub at_shadow: Option<EnergyLine>,
    /// Rising ground keeps the boulder away.
    pub shielded: bool,
    /// The raster has gaps on the way.
    pub terrain_gap: bool,
}

/// Share of falls from which a stretch is listed.
const LISTED_SHARE: f64 = 1e-6;

/// A boulder in its surroundings.
#[derive(Debug, Clone, Copy)]
pub struct Surroundings<'a> {
    /// Trails of the run.
    pub trails: &'a [Trail],
    /// Elevation raster.
    pub terrain: Option<&'a Terrain>,
    /// Barest state of the ground that a covering burn reports.
    pub ground: Option<GroundAfter>,
}

impl Model {
    /// Mean over the draws of the base retreat, were the base in the heated face, m.
    pub fn mean_base_retreat_m(&self, draws: &[DrawSummary]) -> f64 {
        let sum: f64 = draws.iter().map(|d| super::slope::spall_draw(d, 0.5).base_retreat_m).sum();
        if draws.is_empty() { 0.0 } else { sum / draws.len() as f64 }
    }

    /// Mass of a boulder at the median density of its rock, kg; `None` without a size.
    pub fn mass_kg(&self, boulder: &Boulder) -> Option<f64> {
        let (rock, _) = *self.rocks_of(&boulder.rock).first()?;
        let own = boulder.heating.properties.iter().rev().find(|(p, _)| *p == Property::Density).map(|(_, v)| *v);
        let density =
            own.unwrap_or_else(|| self.tables.rocks[rock].rock.figure(Property::Density).distribution.median());
        let axes_m = boulder.axes_m.or(boulder.radius_m.map(|r| [2.0 * r; 3]))?;
        Some(density * ellipsoid_m3(axes_m))
    }

    /// Every stretch within reach of a boulder, trail by trail. `width_m` is the block's width.
    pub fn stretches(
        &self,
        boulder: &Boulder,
        placed: &Placed,
        width_m: f64,
        around: Surroundings<'_>,
    ) -> Vec<Stretch> {
        let settings = &self.settings;
        let mut segments: Vec<Segment> =
            around.trails.iter().enumerate().flat_map(|(i, t)| cut(t, i, settings.trail.segment_m)).collect();
        if let Some(terrain) = around.terrain {
            for segment in &mut segments {
                fill_heights(segment, terrain, settings.rockfall.height_tolerance_m);
            }
        }
        let index = SegmentIndex::new(&segments);
        let angle = ReachAngle::new(&settings.rockfall, around.ground);
        let source = ReachSource { position: boulder.position, placed, width_m, angle: &angle };
        let mass_kg = self.mass_kg(boulder).unwrap_or(f64::NAN);
        let (mean_deg, shadow_deg) = (angle.central_mean_deg, SHADOW_ANGLE_DEG);
        exposures(&source, &index, around.terrain, &settings.rockfall, settings.trail.looked_at_m)
            .into_iter()
            .filter(|e| e.reach.is_none_or(|r| r.p_segment >= LISTED_SHARE || r.shielded))
            .map(|e| {
                let segment = &segments[e.segment];
                let reach = e.reach.map(|r| {
                    let line = |a: f64| r.steepest_deg.and_then(|_| energy_line(a, r.drop_m, r.distance_m, mass_kg));
                    StretchReach {
                        p_segment: r.p_segment,
                        angle_deg: r.steepest_deg,
                        distance_m: r.distance_m,
                        drop_m: r.drop_m,
                        mean_angle_deg: mean_deg,
                        at_mean: line(mean_deg),
                        at_shadow: line(shadow_deg),
                        shielded: r.shielded,
                        terrain_gap: r.terrain_gap,
                    }
                });
                Stretch {
                    trail_id: around.trails[segment.trail].id.clone(),
                    segment: segment.number,
                    from_m: segment.from_m,
                    to_m: segment.to_m,
                    nearest_m: e.distance_m,
                    reach,
                }
            })
            .collect()
    }
}

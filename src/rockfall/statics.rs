//! Stability of one rigid boulder on a plane: sliding, rolling out of its seat, overturning.
//!
//! FS_slide    = tan phi (cos b - k sin b - r_u cos b) / (sin b + k cos b)
//! FS_roll     = tan a / tan(b + atan k),  cos a = (r - t)/r
//! FS_overturn = x_c / (h_c tan(b + atan k))
//! u*          = x_c - h_c tan(b + atan k)
//!
//! b slope, phi contact friction, r_u uplift share of the weight's normal part, k horizontal pseudo-static coefficient,
//! r radius, t seat depth, x_c distance along the slope from the downslope contact edge to the foot of the centroid's
//! perpendicular, h_c height of the centroid above the contact plane, u* loss of base that overturns it.
//!
//! Assumptions: rigid, plane contact, no cohesion, no side restraint, slow. Sliding is possible only without a seat
//! (t under [`SEAT_MIN_M`]) and without a support; a round boulder in a seat leaves it by rolling over the lip. FS_roll
//! is the ratio of the moments about the lip (arms r sin a and r cos a), so FS_roll < 1 is b + atan k > a.
//! Valid for 0 <= b < 90 deg, k >= 0. Sources: limit equilibrium (textbook); block toppling by the same overturning
//! rule, Goodman & Bray 1976 (recalled); seat rule derived here. `k` overstates overturning by short shaking.

use crate::site::word_enum;

/// Seat depth from which a boulder counts as seated, m.
pub const SEAT_MIN_M: f64 = 0.01;

word_enum! {
    /// How a boulder, or a part of it, comes loose.
    Mode {
        /// Slides on its contact.
        Slide = "slide",
        /// Overturns about its downslope edge.
        Overturn = "overturn",
        /// Rolls out of its seat.
        Roll = "roll",
        /// Sheds a loose slab or split part.
        Fragment = "fragment",
    }
}

/// Factor of safety against sliding; angles in radians. Infinite on level ground without shaking.
///
/// ```
/// use spallcast::rockfall::statics::slide_fs;
/// // 35 deg friction on a 30 deg slope: tan 35 / tan 30.
/// let fs = slide_fs(35f64.to_radians(), 30f64.to_radians(), 0.0, 0.0);
/// assert!((fs - 1.21280).abs() < 5e-6);
/// ```
pub fn slide_fs(friction_rad: f64, slope_rad: f64, shaking_k: f64, uplift_share: f64) -> f64 {
    let (sin, cos) = (libm::sin(slope_rad), libm::cos(slope_rad));
    let driving = sin + shaking_k * cos;
    if driving <= 0.0 {
        return f64::INFINITY;
    }
    libm::tan(friction_rad) * (cos - shaking_k * sin - uplift_share * cos).max(0.0) / driving
}

/// Factor of safety against overturning about the downslope edge.
pub fn overturn_fs(setback_m: f64, centroid_height_m: f64, slope_rad: f64, shaking_k: f64) -> f64 {
    let arm = centroid_height_m * tan_with_shaking(libm::tan(slope_rad), shaking_k);
    if arm <= 0.0 { f64::INFINITY } else { setback_m / arm }
}

/// Loss of base width that overturns the boulder, m; negative when it is past overturning already.
pub fn undercut_to_overturn_m(setback_m: f64, centroid_height_m: f64, slope_rad: f64, shaking_k: f64) -> f64 {
    setback_m - centroid_height_m * tan_with_shaking(libm::tan(slope_rad), shaking_k)
}

/// Slope at which a round boulder of `radius_m` rolls out of a seat of depth `seat_m`, rad: acos((r - t)/r).
///
/// ```
/// use spallcast::rockfall::statics::seat_angle_rad;
/// assert!((seat_angle_rad(0.5, 0.10).to_degrees() - 36.870).abs() < 5e-4);
/// ```
pub fn seat_angle_rad(radius_m: f64, seat_m: f64) -> f64 {
    libm::acos(((radius_m - seat_m) / radius_m).clamp(-1.0, 1.0))
}

/// Factor of safety against rolling out of the seat: the ratio of the moments about the lip.
pub fn roll_fs(radius_m: f64, seat_m: f64, slope_rad: f64, shaking_k: f64) -> f64 {
    let driving = tan_with_shaking(libm::tan(slope_rad), shaking_k);
    if driving <= 0.0 { f64::INFINITY } else { seat_tangent(radius_m, seat_m) / driving }
}

/// tan of the seat angle, without a call to a trigonometric function; infinite from half-buried up.
pub(crate) fn seat_tangent(radius_m: f64, seat_m: f64) -> f64 {
    let cos = (radius_m - seat_m) / radius_m;
    if cos <= 0.0 { f64::INFINITY } else { (1.0 - cos * cos).max(0.0).sqrt() / cos }
}

/// tan(b + atan k) from tan b; infinite where the sum reaches a right angle.
#[inline]
pub(crate) fn tan_with_shaking(tan_slope: f64, shaking_k: f64) -> f64 {
    if shaking_k == 0.0 {
        return tan_slope;
    }
    let below = 1.0 - shaking_k * tan_slope;
    if below <= 0.0 { f64::INFINITY } else { (tan_slope + shaking_k) / below }
}

/// Volume of an ellipsoid of three full axes, m3.
///
/// ```
/// assert!((spallcast::rockfall::statics::ellipsoid_m3([1.2, 0.9, 0.7]) - 0.39584).abs() < 5e-6);
/// ```
pub fn ellipsoid_m3(axes_m: [f64; 3]) -> f64 {
    core::f64::consts::PI / 6.0 * axes_m[0] * axes_m[1] * axes_m[2]
}

/// One state of one boulder in one draw, in the form in which no trigonometric function is needed.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Stance {
    pub(crate) tan_slope: f64,
    pub(crate) tan_friction: f64,
    pub(crate) setback_m: f64,
    pub(crate) centroid_height_m: f64,
    pub(crate) radius_m: f64,
    pub(crate) seat_m: f64,
}

/// What is asked of it.
#[derive(Debug, Clone, Copy, Default)]
pub(crate) struct Demand {
    pub(crate) shaking_k: f64,
    pub(crate) uplift_share: f64,
}

impl Stance {
    /// Whether any mode has a factor of safety under 1 without a support.
    #[inline(always)]
    pub(crate) fn fails(&self, demand: Demand) -> bool {
        self.fails_under(tan_with_shaking(self.tan_slope, demand.shaking_k), demand)
    }

    /// [`Stance::fails`] where tan(b + atan k) is known. Without branches, so that loops over draws run in vector registers.
    #[inline(always)]
    pub(crate) fn fails_under(&self, tan: f64, demand: Demand) -> bool {
        let overturns = self.setback_m < self.centroid_height_m * tan;
        let rise = self.radius_m - self.seat_m;
        // tan a < tan b with tan a = sqrt(r2 - c2)/c, squared to spare the root; both sides are positive.
        let sunk = self.radius_m * self.radius_m - rise * rise;
        let rolls = (rise > 0.0) & (tan > 0.0) & (sunk < (rise * tan) * (rise * tan));
        let normal = (1.0 - demand.shaking_k * self.tan_slope - demand.uplift_share).max(0.0);
        let slides = self.tan_friction * normal < self.tan_slope + demand.shaking_k;
        let seated = self.seat_m >= SEAT_MIN_M;
        overturns | (seated & rolls) | (!seated & slides)
    }

    /// The mode with the least factor of safety.
    pub(crate) fn weakest(&self, demand: Demand) -> Mode {
        let tan = tan_with_shaking(self.tan_slope, demand.shaking_k);
        let overturn = self.setback_m / (self.centroid_height_m * tan);
        let (other, mode) = if self.seat_m >= SEAT_MIN_M {
            (seat_tangent(self.radius_m, self.seat_m) / tan, Mode::Roll)
        } else {
            let normal = (1.0 - demand.shaking_k * self.tan_slope - demand.uplift_share).max(0.0);
            (self.tan_friction * normal / (self.tan_slope + demand.shaking_k), Mode::Slide)
        };
        if overturn < other { Mode::Overturn } else { mode }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Angles of the grid may sit on the edge of failure, where rounding decides; those are left out by this much.
    const EDGE: f64 = 1e-9;

    #[test]
    fn the_tangent_form_agrees_with_the_angles() {
        let mut compared = 0;
        for slope in [5.0, 18.0, 31.0, 47.0, 70.0] {
            for seat in [0.0, 0.02, 0.1, 0.3, 0.9] {
                for k in [0.0, 0.1, 0.4] {
                    for setback in [0.1, 0.4, 0.9] {
                        let (b, phi, r, h) = (f64::to_radians(slope), 33f64.to_radians(), 0.6, 0.5);
                        let stance = Stance {
                            tan_slope: libm::tan(b),
                            tan_friction: libm::tan(phi),
                            setback_m: setback,
                            centroid_height_m: h,
                            radius_m: r,
                            seat_m: seat,
                        };
                        let other = if seat >= SEAT_MIN_M { roll_fs(r, seat, b, k) } else { slide_fs(phi, b, k, 0.05) };
                        let least = other.min(overturn_fs(setback, h, b, k));
                        if (least - 1.0).abs() < EDGE {
                            continue;
                        }
                        let demand = Demand { shaking_k: k, uplift_share: 0.05 };
                        assert_eq!(stance.fails(demand), least < 1.0, "{slope} {seat} {k} {setback}");
                        assert_eq!(stance.weakest(demand) == Mode::Overturn, overturn_fs(setback, h, b, k) < other);
                        compared += 1;
                    }
                }
            }
        }
        assert_eq!(compared, 5 * 5 * 3 * 3);
    }
}

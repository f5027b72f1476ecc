//! Slabs and splits that come loose on a steep face: sources of their own.
//!
//! p_fragment = P(slab or split) x share of faces steeper than the friction of a fresh split
//! V          = min( (pi/4) b^2 h, V_boulder/2 )
//!
//! h thickness and b breadth of the plate, not wider than the heated patch; a split part without a plate breadth is the cap
//! of height h of the sphere, (pi/3) h2 (3 r - h). The share is triangular (assumption):
//! boulder .3/.5/.8, outcrop .6/.8/1. The plate is taken as a disc, because the heated patch is; no part that comes loose is
//! larger than half of the boulder (it would be the boulder that moves).

use super::SpallDraw;
use crate::ensemble::distribution::Distribution;

/// Share of a boulder's faces steeper than the friction of a fresh split (assumption).
pub const BOULDER_FACE_SHARE: Distribution = Distribution::triangular(0.3, 0.5, 0.8);
/// The same for an outcrop (assumption).
pub const OUTCROP_FACE_SHARE: Distribution = Distribution::triangular(0.6, 0.8, 1.0);

/// Volume of the part that came loose in a draw, m3; 0 when nothing did.
///
/// ```
/// use spallcast::rockfall::{SpallDraw, fragment::fragment_m3};
/// let draw = SpallDraw { slab_or_split: true, fragment_depth_m: 0.02, slab_breadth_m: 0.2,
///     patch_breadth_limit_m: 0.5, ..SpallDraw::unharmed(0.5) };
/// assert!((fragment_m3(&draw, Some(1.0)) - 6.283e-4).abs() < 1e-7);
/// ```
pub fn fragment_m3(draw: &SpallDraw, radius_m: Option<f64>) -> f64 {
    if !draw.slab_or_split {
        return 0.0;
    }
    let (breadth_m, depth_m) = (plate_breadth_m(draw), draw.fragment_depth_m);
    let plate_m3 = match radius_m {
        // A split part has no plate breadth: the cap of that height of the sphere.
        Some(r) if breadth_m <= 0.0 => core::f64::consts::FRAC_PI_3 * depth_m * depth_m * (3.0 * r - depth_m).max(0.0),
        _ => core::f64::consts::FRAC_PI_4 * breadth_m * breadth_m * depth_m,
    };
    match radius_m {
        Some(r) => plate_m3.min(core::f64::consts::PI * 2.0 / 3.0 * r * r * r),
        None => plate_m3,
    }
}

/// Breadth of the plate of a draw, not wider than the heated patch, m.
pub fn plate_breadth_m(draw: &SpallDraw) -> f64 {
    draw.slab_breadth_m.min(draw.patch_breadth_limit_m)
}

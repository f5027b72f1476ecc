//! A recorded weathering rind or loose sheet.
//!
//! Buckling of a sheet of thickness h over a debonded radius a (Hutchinson & Suo 1992, recalled):
//!
//! s_c = 1.2235 E/(1 - nu^2) (h/a)^2,   which is a rise of dT_b = 1.2235 (h/a)^2 / (alpha (1 + nu))
//!
//! The sheet also lets go where the normal tension at its base reaches its plane's strength, .2 to .5 of the fresh one
//! (judgement). a/h is triangular 8/15/30 (assumption). Thickness is the recorded rind.

/// Buckling constant of a clamped circular sheet.
const CLAMPED_CIRCLE: f64 = 1.2235;

/// Critical mean compression of the sheet, Pa, for stiffness `youngs_pa` and debonded radius over thickness `slenderness`.
pub fn buckling_stress_pa(youngs_pa: f64, poisson: f64, slenderness: f64) -> f64 {
    CLAMPED_CIRCLE * youngs_pa / (1.0 - poisson * poisson) / (slenderness * slenderness)
}

/// Rise that buckles the sheet, K.
///
/// ```
/// let rise = spallcast::spall::rind::buckling_rise_k(8e-6, 0.24, 20.0);
/// assert!((rise - 1.2235 / 400.0 / (8e-6 * 1.24)).abs() < 1e-9);
/// ```
pub fn buckling_rise_k(expansion_per_k: f64, poisson: f64, slenderness: f64) -> f64 {
    CLAMPED_CIRCLE / (slenderness * slenderness) / (expansion_per_k * (1.0 + poisson))
}

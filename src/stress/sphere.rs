//! Tension normal to the surface of a hot-skinned sphere, and the factor for a face heated only on a cap.
//!
//! With s(z) the skin stress, r = R - z and p = r/R (Timoshenko & Goodier, recalled, with s for alpha E dT/(1 - nu)):
//!
//! s_n(z) = (2/R) [ J(z)/p^3 - J(R) (1/p^3 - 1) ],   J(z) = integral from 0 to z of s p^2 dz
//!
//! which is s_r of the solid sphere; near the surface it is (2/R) times the force above z. Under a convex face heated on
//! the share f of the boulder it is multiplied by (derived, axisymmetric finite elements of a sphere heated on a cap)
//!
//! c = 1 - .34 (1 - f) (1 - exp(-(d/R)/.037)),   d = N/s(0)
//!
//! Checked for d/R .01 to .14 and f .15 to 1; see `docs/validation.md` for where it fails.

use crate::numerics::lanes::Lanes;

/// Range in which the cap factor was checked: skin depth over radius, and heated share.
pub const CAP_FACTOR_SKIN: std::ops::RangeInclusive<f64> = 0.01..=0.14;
/// See [`CAP_FACTOR_SKIN`].
pub const CAP_FACTOR_SHARE: std::ops::RangeInclusive<f64> = 0.15..=1.0;

/// Powers of p = 1 - z/R at the nodes of a grid, which do not change while it is marched.
#[derive(Debug, Clone)]
pub struct Shells {
    /// 2/R, 1/m.
    two_over_radius: Lanes,
    /// p^2, zero beyond the centre, `[n]`.
    squared: Vec<Lanes>,
    /// 1/p^3, `[n]`.
    inverse_cubed: Vec<Lanes>,
}

impl Shells {
    /// Powers at `depth_m` `[n]` for eight spheres of curvature 1/R; 0 is a flat face.
    pub fn new(depth_m: &[Lanes], curvature_per_m: Lanes) -> Shells {
        let p = |z: &Lanes, least: f64| (Lanes::ONE - *z * curvature_per_m).max(Lanes::splat(least));
        Shells {
            two_over_radius: curvature_per_m * 2.0,
            squared: depth_m.iter().map(|z| p(z, 0.0) * p(z, 0.0)).collect(),
            inverse_cubed: depth_m
                .iter()
                .map(|z| {
                    let p = p(z, 1e-3);
                    Lanes::ONE / (p * p * p)
                })
                .collect(),
        }
    }

    /// Normal tension at every node, `[n]`, into `tension_pa`; zero on a flat face. Stress is zero from node `active` on.
    #[inline(always)]
    pub fn normal_tension(&self, depth_m: &[Lanes], stress_pa: &[Lanes], active: usize, tension_pa: &mut [Lanes]) {
        let n = depth_m.len();
        let active = active.min(n);
        let mut cumulative = Lanes::ZERO;
        let mut above = stress_pa[0] * self.squared[0];
        tension_pa[0] = Lanes::ZERO;
        for i in 1..active {
            let here = stress_pa[i] * self.squared[i];
            cumulative += (above + here) * (depth_m[i] - depth_m[i - 1]) * 0.5;
            tension_pa[i] = cumulative;
            above = here;
        }
        if active < n {
            cumulative += above * (depth_m[active] - depth_m[active - 1]) * 0.5;
        }
        let whole = cumulative;
        for i in 1..active {
            tension_pa[i] = self.two_over_radius * ((tension_pa[i] - whole) * self.inverse_cubed[i] + whole);
        }
        tension_pa[active..].fill(self.two_over_radius * whole);
    }
}

/// Factor c for a cap.
///
/// ```
/// use spallcast::stress::sphere::cap_factor;
/// assert_eq!(cap_factor(1.0, 0.05), 1.0);
/// assert!((cap_factor(0.3, 0.05) - (1.0 - 0.34 * 0.7 * (1.0 - (-0.05f64 / 0.037).exp()))).abs() < 1e-14);
/// ```
pub fn cap_factor(heated_share: f64, skin_over_radius: f64) -> f64 {
    1.0 - 0.34 * (1.0 - heated_share) * -libm::expm1(-skin_over_radius / 0.037)
}

/// Radius of the circle that bounds a cap of the share `f` of a sphere's surface, over R: 2 sqrt(f (1 - f)), R from a
/// hemisphere on.
pub fn cap_radius(heated_share: f64, radius_m: f64) -> f64 {
    if heated_share >= 0.5 { radius_m } else { 2.0 * radius_m * (heated_share * (1.0 - heated_share)).sqrt() }
}

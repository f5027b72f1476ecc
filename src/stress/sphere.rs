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

use crate::heat::grid::Grid;
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
    /// p^2 dz/di, zero beyond the centre, `[n]`.
    squared_m: Vec<Lanes>,
    /// 1/p^3, `[n]`.
    inverse_cubed: Vec<Lanes>,
}

impl Shells {
    /// Powers on a grid `[n]` for eight spheres of curvature 1/R; 0 is a flat face.
    pub fn new(grid: &Grid, curvature_per_m: Lanes) -> Shells {
        let p = |z: &Lanes, least: f64| (Lanes::ONE - *z * curvature_per_m).max(Lanes::splat(least));
        Shells {
            two_over_radius: curvature_per_m * 2.0,
            squared_m: grid
                .depth_m
                .iter()
                .zip(&grid.depth_per_index_m)
                .map(|(z, per_index)| p(z, 0.0) * p(z, 0.0) * *per_index)
                .collect(),
            inverse_cubed: grid
                .depth_m
                .iter()
                .map(|z| {
                    let p = p(z, 1e-3);
                    Lanes::ONE / (p * p * p)
                })
                .collect(),
        }
    }

    /// Normal tension at every node, `[n]`, into `tension_pa`; zero on a flat face. Stress is zero from node `active` on.
    ///
    /// J is summed cell by cell from cubics in the index: (13 (y_i + y_{i+1}) - y_{i-1} - y_{i+2})/24.
    #[inline(always)]
    pub fn normal_tension(&self, stress_pa: &[Lanes], active: usize, tension_pa: &mut [Lanes]) {
        let n = stress_pa.len();
        let y = |i: usize| if i < n { stress_pa[i] * self.squared_m[i] } else { Lanes::ZERO };
        let reach = (active + 2).min(n);
        let (mut here, mut next) = (y(0), y(1));
        // A parabola carries the profile beyond the face.
        let mut before = (here - next) * 3.0 + y(2);
        let mut whole = Lanes::ZERO;
        tension_pa[0] = Lanes::ZERO;
        for i in 1..reach {
            let after = y(i + 1);
            whole += ((here + next) * 13.0 - before - after) * (1.0 / 24.0);
            tension_pa[i] = whole;
            (before, here, next) = (here, next, after);
        }
        for i in 1..reach {
            tension_pa[i] = self.two_over_radius * ((tension_pa[i] - whole) * self.inverse_cubed[i] + whole);
        }
        tension_pa[reach..].fill(self.two_over_radius * whole);
    }
}

/// Factor c for a cap.
///
/// ```
/// use spallcast::{numerics::lanes::Lanes, stress::sphere::cap_factor};
/// let factor = |f: f64, d: f64| cap_factor(Lanes::splat(f), Lanes::splat(d)).0[0];
/// assert_eq!(factor(1.0, 0.05), 1.0);
/// assert!((factor(0.3, 0.05) - (1.0 - 0.34 * 0.7 * (1.0 - (-0.05f64 / 0.037).exp()))).abs() < 1e-14);
/// ```
#[inline(always)]
pub fn cap_factor(heated_share: Lanes, skin_over_radius: Lanes) -> Lanes {
    let thin = (skin_over_radius * (-1.0 / 0.037)).exp();
    Lanes::ONE - (Lanes::ONE - heated_share) * (Lanes::ONE - thin) * 0.34
}

/// Radius of the circle that bounds a cap of the share `f` of a sphere's surface, over R: 2 sqrt(f (1 - f)), R from a
/// hemisphere on.
pub fn cap_radius(heated_share: f64, radius_m: f64) -> f64 {
    if heated_share >= 0.5 { radius_m } else { 2.0 * radius_m * (heated_share * (1.0 - heated_share)).sqrt() }
}

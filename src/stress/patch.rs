//! Tension normal to a flat face below a heated patch, from the point solutions of Flamant and Cerruti (derived).
//!
//! strip of half-width a:  D(z) = (4 N/pi) a z^2 / (a^2 + z^2)^2,      maximum N/(pi a) at z = a
//! disc of radius a:       D(z) = 3 N a^2 z^2 / (a^2 + z^2)^(5/2),     maximum .558 N/a at z = .82 a
//!
//! N membrane force of the heated skin N/m, z depth m. These hold for a skin that is thin beside the patch; at a skin of
//! a tenth of the patch radius they are a quarter to a third too high. A skin of any thickness is a stack of sheets, each
//! at its own depth c (derived from nuclei of strain in a half-space; within 1 % of finite elements), with lengths over a:
//!
//! disc:   D = (1/a) integral s(c) { -[(1+(z-c)^2)^-3/2 - (1+(z+c)^2)^-3/2]/2 + 3 z (z+c) (1+(z+c)^2)^-5/2 } dc
//! strip:  D = (1/(pi a)) integral s(c) { -1/(1+(z-c)^2) + 1/(1+(z+c)^2) + 4 z (z+c)/(1+(z+c)^2)^2 } dc

use crate::heat::grid::Grid;
use crate::numerics::lanes::Lanes;

/// Plan of a heated patch.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Plan {
    /// Long and narrow, such as along a log.
    Strip,
    /// About as long as wide.
    Disc,
}

impl Plan {
    /// Tension at depth `z_m` for a unit membrane force, 1/m.
    ///
    /// ```
    /// use spallcast::stress::patch::Plan;
    /// assert!((Plan::Strip.tension_per_force(0.2, 0.2) - 1.0 / (std::f64::consts::PI * 0.2)).abs() < 1e-12);
    /// ```
    #[inline(always)]
    pub fn tension_per_force(self, half_width_m: f64, z_m: f64) -> f64 {
        let (a, z2) = (half_width_m, z_m * z_m);
        let q = a * a + z2;
        match self {
            Plan::Strip => 4.0 / core::f64::consts::PI * a * z2 / (q * q),
            Plan::Disc => 3.0 * a * a * z2 / (q * q * q.sqrt()),
        }
    }

    /// Depth of the largest tension over the half-width: 1 for a strip, sqrt(2/3) for a disc.
    pub fn peak_depth(self) -> f64 {
        match self {
            Plan::Strip => 1.0,
            Plan::Disc => 0.816_496_580_927_726,
        }
    }

    /// Largest tension for a unit force and half-width.
    pub fn peak_tension_per_force(self, half_width_m: f64) -> f64 {
        self.tension_per_force(half_width_m, self.peak_depth() * half_width_m)
    }

    /// Tension at depth `z_m` of a sheet of unit force at depth `c_m`, 1/m; the thin-skin form for a sheet at the face.
    ///
    /// ```
    /// use spallcast::stress::patch::Plan;
    /// for plan in [Plan::Disc, Plan::Strip] {
    ///     let (sheet, thin) = (plan.sheet_tension(0.3, 0.2, 0.0), plan.tension_per_force(0.3, 0.2));
    ///     assert!((sheet - thin).abs() < 1e-12);
    /// }
    /// ```
    pub fn sheet_tension(self, half_width_m: f64, z_m: f64, c_m: f64) -> f64 {
        let (z, c) = (z_m / half_width_m, c_m / half_width_m);
        let (near, far) = (1.0 + (z - c) * (z - c), 1.0 + (z + c) * (z + c));
        match self {
            Plan::Strip => {
                (-1.0 / near + 1.0 / far + 4.0 * z * (z + c) / (far * far)) / (core::f64::consts::PI * half_width_m)
            }
            Plan::Disc => {
                let (near3, far3) = (near * near.sqrt(), far * far.sqrt());
                (-0.5 / near3 + 0.5 / far3 + 3.0 * z * (z + c) / (far3 * far)) / half_width_m
            }
        }
    }
}

/// Depths over the half-width at which the stack of sheets is asked. The peak moves deeper as the skin thickens; between
/// them it errs by under 2 %.
const TRIED: [f64; 6] = [0.6, 0.8, 1.0, 1.25, 1.6, 2.1];

/// What the sheets of a grid add at the depths that are tried.
#[derive(Debug, Clone)]
pub struct Stack {
    /// Tension at each tried depth for a unit stress at each node, `[n]`.
    per_stress: Vec<[Lanes; TRIED.len()]>,
}

impl Stack {
    /// A stack on a grid `[n]` under patches of `half_width_m`, asked within `within_m` of the face.
    pub fn new(plan: Plan, half_width_m: Lanes, within_m: Lanes, grid: &Grid) -> Stack {
        let sheet = |i: usize, tried: f64| {
            Lanes::from_fn(|l| {
                let (a, c) = (half_width_m.0[l], grid.depth_m[i].0[l]);
                plan.sheet_tension(a, (tried * a).min(within_m.0[l]), c)
            }) * grid.weight_m(i)
        };
        Stack { per_stress: (0..grid.len()).map(|i| TRIED.map(|t| sheet(i, t))).collect() }
    }

    /// Largest tension below a skin, Pa. `stress_pa` is `[n]` and zero from node `active` on.
    #[inline(always)]
    pub fn largest_tension_pa(&self, stress_pa: &[Lanes], active: usize) -> Lanes {
        let mut sums = [Lanes::ZERO; TRIED.len()];
        for (stress, per_stress) in stress_pa.iter().zip(&self.per_stress).take(active) {
            for (sum, per_stress) in sums.iter_mut().zip(per_stress) {
                *sum += *stress * *per_stress;
            }
        }
        sums.into_iter().fold(Lanes::ZERO, Lanes::max)
    }
}

//! Stress in a skin restrained in its own plane, and its membrane force.
//!
//! s(z) = E (eps(T) - eps(T0)) / (1 - nu),   N = integral of s dz
//!
//! Symbols: s compression Pa, E Young's modulus Pa, eps free thermal strain, T0 the boulder's own initial temperature K,
//! nu Poisson's ratio, N membrane force N/m, z depth m. Timoshenko & Goodier (recalled). Stiffness on heating lies between
//! the cold value and the residual value after heating, so a draw takes one of two branches: E = E20, or E = E20 R(Tmax)
//! with Tmax the hottest temperature that the rock at that depth has seen. Elastic: no creep, no micro-cracking beyond R.
//! For constant properties N = E alpha H / ((1 - nu) rho c) with H the absorbed heat: force follows dose.

use crate::heat::grid::Grid;
use crate::numerics::lanes::Lanes;
use crate::numerics::table::{UniformPair, UniformTable};

/// Temperature range of the tables, K; their knots fall on whole tens of Celsius, where the catalogue's do.
const FROM_K: f64 = 203.15;
const TO_K: f64 = 1603.15;
const SEGMENTS: usize = 560;

/// A node counts as cold while it is within this of the start in every draw, K.
const COLD_RISE_K: f64 = 0.01;

/// Strain and residual stiffness of one rock, tabulated for the march.
#[derive(Debug, Clone, PartialEq)]
pub struct SkinLaw {
    strain_over_expansion_k: UniformTable,
    both: UniformPair,
}

impl SkinLaw {
    /// Tables of a rock's free strain over its expansion at 20 C (K) and of its residual stiffness over the cold one.
    pub fn new(strain_over_expansion_k: impl Fn(f64) -> f64, stiffness_factor: impl Fn(f64) -> f64) -> SkinLaw {
        let strain_over_expansion_k = UniformTable::new(FROM_K, TO_K, SEGMENTS, strain_over_expansion_k);
        let stiffness_factor = UniformTable::new(FROM_K, TO_K, SEGMENTS, stiffness_factor);
        SkinLaw { both: UniformPair::of(&strain_over_expansion_k, &stiffness_factor), strain_over_expansion_k }
    }

    /// Free strain over the expansion at 20 C, K.
    pub fn strain_over_expansion_k(&self, t_k: f64) -> f64 {
        self.strain_over_expansion_k.at(t_k).0
    }

    /// Stress of every node, `[n]`, into `stress_pa`; returns the largest of each draw and the number of nodes before the
    /// first that is cold in every draw, from which on the stress is zero.
    #[inline(always)]
    pub fn stress(
        &self,
        draws: &SkinDraws,
        temperature_k: &[Lanes],
        hottest_k: &[Lanes],
        stress_pa: &mut [Lanes],
    ) -> (Lanes, usize) {
        let mut largest = Lanes::ZERO;
        for i in 0..temperature_k.len() {
            if i > 0 && (hottest_k[i] - draws.start_k).largest() < COLD_RISE_K {
                stress_pa[i..].fill(Lanes::ZERO);
                return (largest, i);
            }
            let (strain, factor) = self.both.at_lanes(temperature_k[i], hottest_k[i]);
            let stiffness = Lanes::ONE + draws.residual_branch * (factor - Lanes::ONE);
            let s = draws.restraint_pa_per_k * (strain - draws.start_strain_k) * stiffness;
            stress_pa[i] = s;
            largest = largest.max(s);
        }
        (largest, temperature_k.len())
    }
}

/// What the skin of eight draws is made of.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct SkinDraws {
    /// alpha20 E20 / (1 - nu), Pa/K.
    pub restraint_pa_per_k: Lanes,
    /// Initial temperature, K.
    pub start_k: Lanes,
    /// Free strain over expansion at the initial temperature, K.
    pub start_strain_k: Lanes,
    /// 1 on the residual branch of stiffness, 0 on the cold one.
    pub residual_branch: Lanes,
}

/// Membrane force of a profile, N/m. `stress_pa` is `[n]` and zero from node `active` on.
#[inline(always)]
pub fn membrane_force_n_m(grid: &Grid, stress_pa: &[Lanes], active: usize) -> Lanes {
    let mut force = Lanes::ZERO;
    for i in 0..active {
        force += stress_pa[i] * grid.weight_m(i);
    }
    force
}

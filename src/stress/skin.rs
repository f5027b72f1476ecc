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
use crate::numerics::table::UniformTable;

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
    stiffness_factor: UniformTable,
}

impl SkinLaw {
    /// Tables of a rock's free strain over its expansion at 20 C (K) and of its residual stiffness over the cold one.
    pub fn new(strain_over_expansion_k: impl Fn(f64) -> f64, stiffness_factor: impl Fn(f64) -> f64) -> SkinLaw {
        SkinLaw {
            strain_over_expansion_k: UniformTable::new(FROM_K, TO_K, SEGMENTS, strain_over_expansion_k),
            stiffness_factor: UniformTable::new(FROM_K, TO_K, SEGMENTS, stiffness_factor),
        }
    }

    /// Free strain over the expansion at 20 C, K.
    pub fn strain_over_expansion_k(&self, t_k: f64) -> f64 {
        self.strain_over_expansion_k.at(t_k).0
    }
}

/// The skin of eight draws at the nodes of a grid.
#[derive(Debug, Clone)]
pub struct Skin {
    /// Compression, Pa, `[n]`.
    pub stress_pa: Vec<Lanes>,
    /// E/E20 of the draw's branch, and the hottest temperature that it was looked up for, `[n]`.
    stiffness: Vec<(Lanes, Lanes)>,
}

impl Skin {
    /// A skin without stress on `n` nodes.
    pub fn new(n: usize) -> Skin {
        Skin { stress_pa: vec![Lanes::ZERO; n], stiffness: vec![(Lanes::ONE, Lanes::ZERO); n] }
    }

    /// Brings the stress of every node in line with its temperature; returns the largest of each draw and the number of
    /// nodes before the first that is cold in every draw, from which on the stress is zero.
    #[inline(always)]
    pub fn update(
        &mut self,
        law: &SkinLaw,
        draws: &SkinDraws,
        temperature_k: &[Lanes],
        hottest_k: &[Lanes],
    ) -> (Lanes, usize) {
        let mut largest = Lanes::ZERO;
        for i in 0..temperature_k.len() {
            if i > 0 && (hottest_k[i] - draws.start_k).largest() < COLD_RISE_K {
                self.stress_pa[i..].fill(Lanes::ZERO);
                return (largest, i);
            }
            let (stiffness, known_for) = &mut self.stiffness[i];
            if known_for.differs(hottest_k[i]) {
                let (factor, _) = law.stiffness_factor.at_lanes(hottest_k[i]);
                (*stiffness, *known_for) = (Lanes::ONE + draws.residual_branch * (factor - Lanes::ONE), hottest_k[i]);
            }
            let (strain, _) = law.strain_over_expansion_k.at_lanes(temperature_k[i]);
            let s = draws.restraint_pa_per_k * (strain - draws.start_strain_k) * *stiffness;
            self.stress_pa[i] = s;
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

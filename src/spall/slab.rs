//! Slabs and splits: tension normal to the surface against tensile strength.
//!
//! Drive D(z): for boulders the larger of the convex term c s_n(z) ([`crate::stress::sphere`]) and the patch term
//! ([`crate::stress::patch`]); for flat faces the patch term alone. Its largest value within a quarter radius of the face
//! is held against one of two strengths (judgement, .5/.5), each times the residual law at the cracking depth:
//!
//! volume-scaled  UTS w (Vref/V)^(1/m),  Vref 1e-5 m3, V = f 4 pi R^2 x 20 mm, m 8 or 12
//! flaw-limited   min(UTS w, K_IC sqrt(pi/(4 a))) for a penny-shaped flaw of radius a by weathering (assumption)
//!
//! A slab is as thick as the depth where D reaches .9 of its largest value at first passage; under a governing patch, .8 to
//! 1 of the patch radius. A boulder under .5 m radius splits when the section average 2 f N/R reaches 1.5 strengths.
//! Adding convex and patch terms would be nearer the finite elements for caps under f .05 (up to 25 % low as it is).

use crate::heat::grid::Grid;
use crate::numerics::cubic;
use crate::numerics::lanes::{LANES, Lanes};
use crate::numerics::table::UniformTable;
use crate::site::Weathering;
use crate::stress::patch::{Plan, Stack};
use crate::stress::sphere;

/// Reference volume of tensile tests, m3, and depth of the stressed skin, m (judgement).
const REFERENCE_VOLUME_M3: f64 = 1e-5;
const STRESSED_DEPTH_M: f64 = 0.020;
/// Size exponents (judgement): the two of the ensemble at equal weight, and the middle one of the medians.
pub const SIZE_MODULI: [f64; 2] = [8.0, 12.0];
/// See [`SIZE_MODULI`].
pub const SIZE_MODULUS_MIDDLE: f64 = 10.0;
/// Scatter of slab depth between draws, geometric standard deviation (judgement).
pub const DEPTH_GSD: f64 = 1.6;
/// Share of the largest drive that marks the cracking depth.
const CRACKING_SHARE: f64 = 0.9;
/// The drive is judged within this share of the radius.
const JUDGED_SHARE_OF_RADIUS: f64 = 0.25;
/// Splits: strength factor, and largest radius, m.
pub const SPLIT_FACTOR: f64 = 1.5;
/// See [`SPLIT_FACTOR`].
pub const SPLIT_RADIUS_MAX_M: f64 = 0.5;

/// Radius of the flaw that limits strength, m (assumption).
pub fn flaw_radius_m(weathering: Weathering) -> f64 {
    match weathering {
        Weathering::Fresh => 0.020,
        Weathering::Slight => 0.040,
        Weathering::Moderate => 0.080,
        Weathering::High => 0.150,
    }
}

/// Factors of weathering on strengths and on stiffness (judgement).
pub fn weathering_factors(weathering: Weathering) -> (f64, f64) {
    match weathering {
        Weathering::Fresh => (1.0, 1.0),
        Weathering::Slight => (0.8, 0.95),
        Weathering::Moderate => (0.6, 0.8),
        Weathering::High => (0.4, 0.6),
    }
}

/// Volume-scaled strength, Pa. `tensile_pa` already holds the weathering factor.
///
/// ```
/// use spallcast::spall::slab::volume_scaled_pa;
/// // Granite of the worked table: 8 MPa, R .75 m, f .6, m 10 gives 3.2 MPa.
/// assert!((volume_scaled_pa(8e6, 0.6, 0.75, 10.0) / 3.2e6 - 1.0).abs() < 0.02);
/// ```
pub fn volume_scaled_pa(tensile_pa: f64, heated_share: f64, radius_m: f64, modulus: f64) -> f64 {
    let volume = heated_share * 4.0 * core::f64::consts::PI * radius_m * radius_m * STRESSED_DEPTH_M;
    tensile_pa * libm::pow(REFERENCE_VOLUME_M3 / volume, 1.0 / modulus)
}

/// Flaw-limited strength, Pa.
pub fn flaw_limited_pa(tensile_pa: f64, toughness_pa_sqrt_m: f64, flaw_radius_m: f64) -> f64 {
    tensile_pa.min(toughness_pa_sqrt_m * (core::f64::consts::PI / (4.0 * flaw_radius_m)).sqrt())
}

/// Residual tensile strength and toughness of one rock over the cold ones, by the temperature reached, K.
#[derive(Debug, Clone, PartialEq)]
pub struct StrengthLaw {
    tensile: UniformTable,
    toughness: UniformTable,
}

impl StrengthLaw {
    /// Tables of the two laws.
    pub fn new(tensile: impl Fn(f64) -> f64, toughness: impl Fn(f64) -> f64) -> StrengthLaw {
        const FROM_K: f64 = 203.15;
        const TO_K: f64 = 1603.15;
        const SEGMENTS: usize = 560;
        StrengthLaw {
            tensile: UniformTable::new(FROM_K, TO_K, SEGMENTS, tensile),
            toughness: UniformTable::new(FROM_K, TO_K, SEGMENTS, toughness),
        }
    }

    /// Strength over the cold one where the rock has reached `hottest_k`.
    pub fn factor(&self, toughness_limited: bool, hottest_k: f64) -> f64 {
        if toughness_limited { self.toughness.at(hottest_k).0 } else { self.tensile.at(hottest_k).0 }
    }

    /// [`StrengthLaw::factor`] of eight draws, `toughness_limited` 1 or 0.
    #[inline(always)]
    pub fn factors(&self, toughness_limited: Lanes, hottest_k: Lanes) -> Lanes {
        let (toughness, _) = self.toughness.at_lanes(hottest_k);
        let (tensile, _) = self.tensile.at_lanes(hottest_k);
        Lanes::where_greater(toughness_limited, Lanes::ZERO, toughness, tensile)
    }
}

/// Geometry that turns a hot skin into normal tension, per draw.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Face {
    /// 1/R; 0 on a flat face.
    pub curvature_per_m: Lanes,
    /// Heated share f of the boulder.
    pub heated_share: Lanes,
    /// Plan of the heated patch.
    pub plan: Plan,
    /// Half-width or radius of the patch, m.
    pub patch_m: Lanes,
}

/// The drive of one moment.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Drive {
    /// Largest tension within the judged depth, Pa.
    pub largest_pa: Lanes,
    /// The convex part of it, after the cap factor, Pa.
    pub convex_pa: Lanes,
    /// Thickness of the hot skin N/s(0), m.
    pub skin_m: Lanes,
}

/// A face on a grid: what does not change while it is marched.
#[derive(Debug, Clone)]
pub struct FaceOnGrid {
    face: Face,
    shells: sphere::Shells,
    /// 1 at the nodes within the judged depth, 0 below, `[n]`; empty on a flat face, which has no convex term.
    within: Vec<Lanes>,
    /// Place of the judged depth in the grid.
    judged: [cubic::Place; LANES],
    judged_m: Lanes,
    /// Thin-skin tension under the patch for a unit force, 1/m.
    thin_per_m: Lanes,
    stack: Option<Stack>,
}

impl FaceOnGrid {
    /// A face on a grid.
    pub fn new(face: Face, grid: &Grid) -> FaceOnGrid {
        let flat = face.curvature_per_m.largest() <= 0.0;
        let judged_m = face.curvature_per_m.map(|c| if c > 0.0 { JUDGED_SHARE_OF_RADIUS / c } else { f64::INFINITY });
        let within = |z: &Lanes| Lanes::where_greater(*z, judged_m, Lanes::ZERO, Lanes::ONE);
        FaceOnGrid {
            face,
            shells: sphere::Shells::new(grid, face.curvature_per_m),
            within: if flat { Vec::new() } else { grid.depth_m.iter().map(within).collect() },
            judged: std::array::from_fn(|l| cubic::Place::new(grid.len(), grid.index_at(l, judged_m.0[l]))),
            judged_m,
            thin_per_m: Lanes::from_fn(|l| {
                let patch = face.patch_m.0[l];
                face.plan.tension_per_force(patch, (face.plan.peak_depth() * patch).min(judged_m.0[l]))
            }),
            stack: None,
        }
    }

    /// Normal tension of every node into `tension_pa` `[n]` (convex term alone, after the cap factor), and the drive.
    /// Stress is zero from node `active` on.
    #[inline(always)]
    pub fn drive(
        &mut self,
        grid: &Grid,
        stress_pa: &[Lanes],
        active: usize,
        force_n_m: Lanes,
        tension_pa: &mut [Lanes],
    ) -> Drive {
        let skin_m = force_n_m / stress_pa[0].max(Lanes::ONE);
        let mut convex = Lanes::ZERO;
        if self.within.is_empty() {
            tension_pa.fill(Lanes::ZERO);
        } else {
            self.shells.normal_tension(stress_pa, active, tension_pa);
            let skin_over_radius = (skin_m * self.face.curvature_per_m).max(Lanes::ZERO);
            let factor = sphere::cap_factor(self.face.heated_share, skin_over_radius);
            for (within, tension) in self.within.iter().zip(tension_pa.iter_mut()) {
                *tension *= factor;
                convex = convex.max(*within * *tension);
            }
            // The judged depth lies between nodes.
            convex = convex.max(Lanes::from_fn(|l| self.judged[l].within(tension_pa, l)));
        }
        // The thin-skin form is an upper bound: where even that does not govern, the stack of sheets does not.
        let thin = force_n_m * self.thin_per_m;
        let mut largest = convex;
        if (thin - convex).largest() > 0.0 {
            let (face, judged_m) = (&self.face, self.judged_m);
            let stack = self.stack.get_or_insert_with(|| Stack::new(face.plan, face.patch_m, judged_m, grid));
            let patch = stack.largest_tension_pa(stress_pa, active);
            largest = Lanes::where_greater(thin, convex, convex.max(patch), convex);
        }
        Drive { largest_pa: largest, convex_pa: convex, skin_m }
    }

    /// Broken index in the grid at which the drive of one draw reaches .9 of its largest value. `patch_depth` is the share
    /// of the patch radius used where the patch governs.
    pub fn cracking_index(
        &self,
        lane: usize,
        drive: &Drive,
        grid: &Grid,
        tension_pa: &[Lanes],
        patch_depth: f64,
    ) -> f64 {
        debug_assert!(lane < LANES);
        let largest = drive.largest_pa.0[lane];
        if drive.convex_pa.0[lane] < largest {
            return grid.index_at(lane, patch_depth * self.face.patch_m.0[lane]);
        }
        let mark = CRACKING_SHARE * largest;
        match tension_pa.iter().position(|d| d.0[lane] >= mark) {
            Some(node) if node > 0 => cubic::crossing(tension_pa, lane, node - 1, mark),
            _ => 0.0,
        }
    }
}

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

use crate::numerics::lanes::{LANES, Lanes};
use crate::numerics::table::UniformTable;
use crate::site::Weathering;
use crate::stress::patch::Plan;
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

impl Face {
    /// Deepest point at which the drive is judged, m.
    fn judged_depth_m(&self, lane: usize) -> f64 {
        let curvature = self.curvature_per_m.0[lane];
        if curvature > 0.0 { JUDGED_SHARE_OF_RADIUS / curvature } else { f64::INFINITY }
    }

    /// Normal tension of every node into `tension_pa` `[n]` (convex term alone, after the cap factor), and the drive.
    /// Stress is zero from node `active` on.
    #[inline(always)]
    pub fn drive(
        &self,
        shells: &sphere::Shells,
        depth_m: &[Lanes],
        stress_pa: &[Lanes],
        active: usize,
        force_n_m: Lanes,
        tension_pa: &mut [Lanes],
    ) -> Drive {
        shells.normal_tension(depth_m, stress_pa, active, tension_pa);
        let skin_m = force_n_m / stress_pa[0].max(Lanes::ONE);
        let factor = Lanes::from_fn(|l| {
            sphere::cap_factor(self.heated_share.0[l], (skin_m.0[l] * self.curvature_per_m.0[l]).max(0.0))
        });
        let judged = Lanes::from_fn(|l| self.judged_depth_m(l));
        let mut convex = Lanes::ZERO;
        for (z, tension) in depth_m.iter().zip(tension_pa.iter_mut()) {
            *tension *= factor;
            convex = convex.max(Lanes::where_greater(*z, judged, Lanes::ZERO, *tension));
        }
        // The judged depth lies between nodes.
        for l in 0..LANES {
            let below = depth_m.partition_point(|z| z.0[l] <= judged.0[l]);
            if (1..depth_m.len()).contains(&below) {
                let (z0, z1) = (depth_m[below - 1].0[l], depth_m[below].0[l]);
                let (t0, t1) = (tension_pa[below - 1].0[l], tension_pa[below].0[l]);
                let at = t0 + (t1 - t0) * (judged.0[l] - z0) / (z1 - z0);
                convex.0[l] = convex.0[l].max(at);
            }
        }
        let patch = Lanes::from_fn(|l| {
            // The thin-skin form is an upper bound: where even that does not govern, the stack of sheets does not.
            let z = (self.plan.peak_depth() * self.patch_m.0[l]).min(judged.0[l]);
            if force_n_m.0[l] * self.plan.tension_per_force(self.patch_m.0[l], z) <= convex.0[l] {
                return 0.0;
            }
            let skin = depth_m[..active].iter().zip(&stress_pa[..active]).map(|(z, s)| (z.0[l], s.0[l]));
            self.plan.largest_tension_pa(self.patch_m.0[l], judged.0[l], skin)
        });
        Drive { largest_pa: convex.max(patch), convex_pa: convex, skin_m }
    }

    /// Depth at which the drive of one draw reaches .9 of its largest value, m. `patch_depth` is the share of the patch
    /// radius used where the patch governs.
    pub fn cracking_depth_m(
        &self,
        lane: usize,
        drive: &Drive,
        depth_m: &[Lanes],
        tension_pa: &[Lanes],
        patch_depth: f64,
    ) -> f64 {
        debug_assert!(lane < LANES);
        let largest = drive.largest_pa.0[lane];
        if drive.convex_pa.0[lane] < largest {
            return patch_depth * self.patch_m.0[lane];
        }
        let mark = CRACKING_SHARE * largest;
        let (mut z0, mut d0) = (0.0, 0.0);
        for (z, d) in depth_m.iter().zip(tension_pa).map(|(z, d)| (z.0[lane], d.0[lane])) {
            if d >= mark {
                return z0 + (z - z0) * (mark - d0) / (d - d0);
            }
            (z0, d0) = (z, d);
        }
        z0
    }
}

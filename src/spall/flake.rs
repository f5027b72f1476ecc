//! Flakes: Weibull statistics of surface compression.
//!
//! P = 1 - exp(-B),   B = (pi C^2 / s0^m) integral of x^2 s(x)^m dx
//! s0 = chi UCS V^(1/m) / Gamma(1 + 1/m),   V = 2.5e-4 m3
//!
//! A site is a disc of radius C x at depth x. Symbols: B risk of a site, C flaw coefficient, s skin compression Pa, m
//! scatter of compressive strength within one boulder, chi spalling over laboratory strength, UCS Pa, V laboratory volume.
//! The median site lets go when B = ln 2, at a mean depth of (integral x^3 s^m)/(integral x^2 s^m). Line of Preston &
//! White 1934, Dey & Kranz 1985, Rauenzahn & Tester 1989 (form recalled, re-derived). Constant stress gradient gives
//! about Gamma(3) in depth. A flake is not thinner than a grain nor than the energy floor K^2 (1 + nu) / s^2 (derived from
//! h >= Gc E / ((1 - nu) s^2) with Gc = K^2 (1 - nu^2) / E). The grain counts up to half a millimetre: coarse granite
//! does shed flakes thinner than its grains, which cleave.
//!
//! Discs that would not fit into the heated patch are left out: C x up to the patch radius. Only hours of contact bring the
//! stress so deep, where the hot rock has lost its stiffness at the face.
//!
//! Quadrature: the sum over the nodes of x^2 s^m dx/di. In the index of a sinh grid the integrand is a smooth bump that
//! vanishes at both ends, where the sum is all but exact. It stops where s has fallen to .35 of its largest value; of an
//! exponential profile that drops 1 % of B at m = 8, .2 % at m = 10 and nothing to speak of from 12 on.

use crate::heat::grid::Grid;
use crate::numerics::lanes::Lanes;

/// Volume of a laboratory specimen, m3 (judgement).
pub const LABORATORY_VOLUME_M3: f64 = 2.5e-4;
/// Risk at which the median site lets go.
pub const MEDIAN_RISK: f64 = core::f64::consts::LN_2;
/// Flaw coefficients and their weights (judgement).
pub const FLAW_COEFFICIENTS: [(f64, f64); 3] = [(5.0, 0.3), (10.0, 0.5), (15.0, 0.2)];
/// Weights of the low, middle and high flakable share (judgement).
pub const FLAKABLE_WEIGHTS: [f64; 3] = [0.25, 0.5, 0.25];
/// Share of the largest stress below which the tail is dropped.
const TAIL: f64 = 0.35;
/// (s/s0)^m below which a skin of any thickness gives less than a millionth of a site's risk.
const COLD_DENSITY: f64 = 1e-7;
/// Scale stress s0 of the site statistics, Pa m^(3/m).
pub fn scale_stress(spalling_share: f64, compressive_strength_pa: f64, m: f64) -> f64 {
    spalling_share * compressive_strength_pa * libm::pow(LABORATORY_VOLUME_M3, 1.0 / m) / libm::tgamma(1.0 + 1.0 / m)
}

/// What eight draws flake by.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct FlakeDraws {
    /// Scatter m; one per rock.
    pub modulus: f64,
    /// 1/s0.
    pub per_scale: Lanes,
    /// pi C^2.
    pub site_area: Lanes,
    /// One grain, m.
    pub grain_m: f64,
    /// K^2 (1 + nu), Pa2 m: over s^2 it is the energy floor.
    pub energy_floor_pa2_m: Lanes,
    /// Risk from which the flaked share of the face counts.
    pub counted_risk: Lanes,
    /// Depth of the largest disc that fits into the heated patch, patch radius over C, m.
    pub deepest_m: Lanes,
}

/// Weights of the nodes of a grid in the risk of a site.
#[derive(Debug, Clone)]
pub struct Sites {
    /// pi C^2 x^2 dx/di of the discs that fit into the patch, m3, `[n]`.
    second_m3: Vec<Lanes>,
}

impl Sites {
    /// Weights on a grid `[n]`. Of the node in whose cell the largest disc ends, the part of the cell above that counts.
    pub fn new(draws: &FlakeDraws, grid: &Grid) -> Sites {
        let depth = &grid.depth_m;
        let n = depth.len();
        let second = |i: usize| {
            let from = if i > 0 { (depth[i - 1] + depth[i]) * 0.5 } else { depth[0] };
            let to = if i + 1 < n { (depth[i] + depth[i + 1]) * 0.5 } else { depth[i] };
            let share = ((draws.deepest_m - from) / (to - from)).max(Lanes::ZERO).min(Lanes::ONE);
            draws.site_area * depth[i] * depth[i] * grid.depth_per_index_m[i] * share
        };
        Sites { second_m3: (0..n).map(second).collect() }
    }

    /// Risk of a site and mean depth of its disc, m, for a profile. `depth_m` and `stress_pa` are `[n]`, face first.
    #[inline(always)]
    pub fn risk(
        &self,
        draws: &FlakeDraws,
        depth_m: &[Lanes],
        stress_pa: &[Lanes],
        largest_pa: Lanes,
    ) -> (Lanes, Lanes) {
        if power((largest_pa * draws.per_scale).max(Lanes::ZERO), draws.modulus).largest() < COLD_DENSITY {
            return (Lanes::ZERO, Lanes::ZERO);
        }
        let cut = largest_pa * TAIL;
        let mut second = Lanes::ZERO;
        let mut third = Lanes::ZERO;
        let mut started = false;
        for i in 0..stress_pa.len() {
            // Past the hot skin in every draw?
            let beyond = (stress_pa[i] - cut).largest() < 0.0;
            if beyond && started {
                break;
            }
            started = started || !beyond;
            let stress = (stress_pa[i] * draws.per_scale).max(Lanes::ZERO);
            let density = self.second_m3[i] * power(stress, draws.modulus);
            second += density;
            third += density * depth_m[i];
        }
        (second, third / second.max(Lanes::splat(f64::MIN_POSITIVE)))
    }
}

/// x^m: by repeated squaring for whole m, which every catalogue rock has; by `libm` otherwise.
#[inline(always)]
fn power(x: Lanes, m: f64) -> Lanes {
    let whole = m as u32;
    if f64::from(whole) != m {
        return x.map(|x| libm::pow(x, m));
    }
    let mut result = Lanes::ONE;
    let mut square = x;
    let mut bits = whole;
    loop {
        if bits & 1 == 1 {
            result *= square;
        }
        bits >>= 1;
        if bits == 0 {
            return result;
        }
        square *= square;
    }
}

/// Largest floor that a grain sets, m (judgement).
const GRAIN_FLOOR_M: f64 = 0.5e-3;

/// Thickness of a flake: its mean depth, not under a grain (half a millimetre at most) nor the energy floor at stress `stress_pa`.
pub fn thickness_m(mean_depth_m: f64, grain_m: f64, energy_floor_pa2_m: f64, stress_pa: f64) -> f64 {
    mean_depth_m.max(grain_m.min(GRAIN_FLOOR_M)).max(energy_floor_pa2_m / (stress_pa * stress_pa))
}

/// Closed check form: face rise at which B = ln 2 for a constant gradient q/k and linear strain (derived).
///
/// dT^(1 + 3/m) = [(1 - nu) s0/(alpha E)] [.693/(2 pi C^2)]^(1/m) [m q/k]^(3/m)
pub fn closed_form_rise_k(
    restraint_pa_per_k: f64,
    scale_stress: f64,
    m: f64,
    flaw_coefficient: f64,
    gradient_k_m: f64,
) -> f64 {
    let site = MEDIAN_RISK / (2.0 * core::f64::consts::PI * flaw_coefficient * flaw_coefficient);
    let right = scale_stress / restraint_pa_per_k * libm::pow(site, 1.0 / m) * libm::pow(m * gradient_k_m, 3.0 / m);
    libm::pow(right, 1.0 / (1.0 + 3.0 / m))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn whole_and_broken_powers_agree() {
        let x = Lanes::splat(0.87);
        for m in [8.0, 10.0, 13.0, 20.0] {
            assert!((power(x, m).0[0] / libm::pow(0.87, m) - 1.0).abs() < 1e-13);
        }
        assert_eq!(power(x, 9.5).0[0], libm::pow(0.87, 9.5));
    }
}

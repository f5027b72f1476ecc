//! The laws of eight draws of one rock, as the march needs them.
//!
//! Heat content per volume is measured as an equivalent temperature v:
//!
//! rho c20 (v - T20) = integral from T20 to T of rho c dT,   T20 = 293.15 K
//!
//! so v = T where c is constant, and T(v) is one curve per rock, shared by its draws. Resistivity w = 1/k [m K/W] rather
//! than conductivity is carried, because two half-distances in series add.
//!
//! Moisture (physics: moisture rule) multiplies the conductivity of still-moist rock by (k_w/k_a)^(phi S), adds
//! phi S rho_w c_w to the heat capacity, and takes the latent heat between 95 and 105 C; rock that has passed 105 C stays
//! dry. First heating lowers the conductivity of crystalline quartz-bearing rock on cooling by up to a quarter.

use crate::numerics::lanes::{LANES, Lanes};
use crate::numerics::table::{UniformTable, interpolate};
use crate::units::{ICE_POINT_K, WATER_DENSITY_KG_M3, WATER_HEAT_CAPACITY_J_M3_K, WATER_LATENT_HEAT_J_KG};

/// Temperature to which catalogue values refer, K.
pub const REFERENCE_K: f64 = 293.15;
/// Conductivity of water and of air in the pores, W/mK (recalled).
const PORE_WATER_W_M_K: f64 = 0.60;
const PORE_AIR_W_M_K: f64 = 0.026;
/// Between these the pore water boils off, K.
const DRYING_FROM_K: f64 = 95.0 + ICE_POINT_K;
const DRYING_TO_K: f64 = 105.0 + ICE_POINT_K;
/// Range of the T(v) curve, K, and its segments: the linear interpolation then errs by less than 2 mK.
const CURVE_FROM_K: f64 = 200.0;
const CURVE_TO_K: f64 = 2600.0;
const CURVE_SEGMENTS: usize = 1024;
/// Spacing of the knots kept for moist rock, K.
const KNOT_SPACING_K: f64 = 5.0;
/// First-heating damage: share of conductivity lost at most, and the peak temperatures between which it grows.
const DAMAGE_MAX: f64 = 0.25;
const DAMAGE_FROM_K: f64 = 100.0 + ICE_POINT_K;
const DAMAGE_SPAN_K: f64 = 400.0;
/// Cooling below the peak over which the damaged value takes over, K (assumption: keeps the law continuous).
const DAMAGE_BLEND_K: f64 = 20.0;

/// T(v) of one rock.
#[derive(Debug, Clone, PartialEq)]
pub struct HeatCurve {
    table: UniformTable,
    /// `(v, T)` knots of the exact curve at 5 K spacing, for moist rock.
    knots: Vec<(f64, f64)>,
}

impl HeatCurve {
    /// Curve of a rock whose specific heat over its 20 C value is `ratio(T)`.
    pub fn new(ratio: impl Fn(f64) -> f64) -> HeatCurve {
        const STEP_K: f64 = 0.5;
        let mut knots = Vec::new();
        let mut v = REFERENCE_K;
        let mut t = REFERENCE_K;
        // Trapezoids of half a kelvin: exact for a ratio that is linear between knots at whole kelvins.
        while t > CURVE_FROM_K {
            v -= 0.5 * STEP_K * (ratio(t) + ratio(t - STEP_K));
            t -= STEP_K;
        }
        while t < CURVE_TO_K {
            knots.push((v, t));
            v += 0.5 * STEP_K * (ratio(t) + ratio(t + STEP_K));
            t += STEP_K;
        }
        let (from, to) = (knots[0].0, knots[knots.len() - 1].0);
        let table = UniformTable::new(from, to, CURVE_SEGMENTS, |v| interpolate(&knots, v));
        let knots = knots.into_iter().step_by((KNOT_SPACING_K / STEP_K) as usize).collect();
        HeatCurve { table, knots }
    }

    /// Constant specific heat: T = v.
    pub fn constant() -> HeatCurve {
        HeatCurve::new(|_| 1.0)
    }

    /// Equivalent temperature of a temperature, K.
    pub fn content(&self, t_k: f64) -> f64 {
        // Invert the table itself, so that content and temperature agree to rounding.
        let knot = ((t_k - CURVE_FROM_K) / KNOT_SPACING_K).round().clamp(0.0, (self.knots.len() - 1) as f64);
        let mut v = self.knots[knot as usize].0;
        for _ in 0..8 {
            let (t, slope) = self.table.at(v);
            let next = v - (t - t_k) / slope;
            if next == v {
                break;
            }
            v = next;
        }
        v
    }
}

/// Thermal resistivity of eight draws.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Resistivity {
    /// w = a + b T; the law of Vosteen & Schellschmidt 2003, and constant conductivity with b = 0.
    Linear {
        /// m K/W.
        a: Lanes,
        /// m/W.
        b: Lanes,
    },
    /// k = a + b/T, the form of Sekiguchi 1984.
    Reciprocal {
        /// W/mK.
        a: Lanes,
        /// W/m.
        b: Lanes,
    },
    /// k = k20 c/c20: constant diffusivity.
    WithCapacity {
        /// 1/k20, m K/W.
        at_reference: Lanes,
    },
}

/// Pore water of eight draws.
#[derive(Debug, Clone, PartialEq)]
pub struct PoreWater {
    /// Conductivity of moist over dry rock.
    conductivity_factor: Lanes,
    /// v of rock that has just lost its water, less that of dry rock at the same temperature, K.
    offset_k: Lanes,
    /// `(v, T)` of moist rock, per draw.
    curves: Vec<Vec<(f64, f64)>>,
}

/// Laws of eight draws of one rock.
#[derive(Debug, Clone)]
pub struct Material<'a> {
    /// Volumetric heat capacity at 20 C, J/m3K.
    pub capacity_j_m3_k: Lanes,
    /// Resistivity.
    pub resistivity: Resistivity,
    /// T(v).
    pub curve: &'a HeatCurve,
    /// Pore water, when moist.
    pub water: Option<PoreWater>,
    /// Whether first heating lowers the conductivity on cooling.
    pub first_heating_damage: bool,
}

impl PoreWater {
    /// Water filling the share `saturation` of the pores.
    pub fn new(curve: &HeatCurve, porosity: Lanes, saturation: f64, capacity_j_m3_k: Lanes) -> PoreWater {
        let share = porosity * saturation;
        let sensible = share * WATER_HEAT_CAPACITY_J_M3_K / capacity_j_m3_k;
        let latent_k = share * (WATER_DENSITY_KG_M3 * WATER_LATENT_HEAT_J_KG) / capacity_j_m3_k;
        let log_ratio = libm::log(PORE_WATER_W_M_K / PORE_AIR_W_M_K);
        let moist = |l: usize, v_dry: f64, t: f64| {
            let boiled = ((t - DRYING_FROM_K) / (DRYING_TO_K - DRYING_FROM_K)).clamp(0.0, 1.0);
            v_dry + sensible.0[l] * (t.min(DRYING_TO_K) - REFERENCE_K) + latent_k.0[l] * boiled
        };
        let extra = |t: f64| Lanes::from_fn(|l| moist(l, 0.0, t));
        let curves = (0..LANES)
            .map(|l| {
                let mut knots: Vec<f64> = curve.knots.iter().map(|k| k.1).filter(|t| *t < DRYING_FROM_K).collect();
                knots.extend([DRYING_FROM_K, DRYING_TO_K]);
                knots.into_iter().map(|t| (moist(l, curve.content(t), t), t)).collect()
            })
            .collect();
        PoreWater { conductivity_factor: share.map(|s| libm::exp(s * log_ratio)), offset_k: extra(DRYING_TO_K), curves }
    }
}

impl Material<'_> {
    /// Temperature and dT/dv at heat content `v` of rock whose hottest moment so far was `hottest_k`.
    #[inline(always)]
    pub fn temperature(&self, v: Lanes, hottest_k: Lanes) -> (Lanes, Lanes) {
        match &self.water {
            None => self.curve.table.at_lanes(v),
            Some(water) => self.moist_temperature(water, v, hottest_k),
        }
    }

    fn moist_temperature(&self, water: &PoreWater, v: Lanes, hottest_k: Lanes) -> (Lanes, Lanes) {
        let (mut t, mut slope) = self.curve.table.at_lanes(v - water.offset_k);
        for l in 0..LANES {
            let knots = &water.curves[l];
            if hottest_k.0[l] < DRYING_TO_K && v.0[l] < knots[knots.len() - 1].0 {
                let upper = knots.partition_point(|k| k.0 <= v.0[l]).clamp(1, knots.len() - 1);
                let ((v0, t0), (v1, t1)) = (knots[upper - 1], knots[upper]);
                let moist_slope = (t1 - t0) / (v1 - v0);
                t.0[l] = t0 + moist_slope * (v.0[l] - v0);
                // The slope only steers the step, whose order does not depend on it. While water boils off T hardly
                // moves with v, but a step that leaves the plateau would then run away: never below the dry slope.
                slope.0[l] = slope.0[l].max(moist_slope);
            }
        }
        (t, slope)
    }

    /// Heat content of rock at a uniform `t_k`, never heated before.
    pub fn content(&self, t_k: Lanes) -> Lanes {
        Lanes::from_fn(|l| match &self.water {
            None => self.curve.content(t_k.0[l]),
            Some(water) => {
                let swapped: Vec<(f64, f64)> = water.curves[l].iter().map(|k| (k.1, k.0)).collect();
                interpolate(&swapped, t_k.0[l])
            }
        })
    }

    /// Resistivity of intact, dry rock at `t_k` where dT/dv is `slope`.
    #[inline(always)]
    pub fn resistivity(&self, t_k: Lanes, slope: Lanes) -> Lanes {
        match self.resistivity {
            Resistivity::Linear { a, b } => a + b * t_k,
            Resistivity::Reciprocal { a, b } => t_k / (a * t_k + b),
            Resistivity::WithCapacity { at_reference } => at_reference * slope,
        }
    }

    /// Whether the conductivity of a node depends on its history.
    pub fn remembers(&self) -> bool {
        self.first_heating_damage || self.water.is_some()
    }

    /// Factor on the conductivity of rock at `t_k` whose hottest moment was `hottest_k`.
    #[inline(always)]
    pub fn conductivity_factor(&self, t_k: Lanes, hottest_k: Lanes) -> Lanes {
        let mut factor = Lanes::ONE;
        if self.first_heating_damage {
            let damage =
                ((hottest_k - Lanes::splat(DAMAGE_FROM_K)) * (1.0 / DAMAGE_SPAN_K)).max(Lanes::ZERO).min(Lanes::ONE);
            let cooled = ((hottest_k - t_k) * (1.0 / DAMAGE_BLEND_K)).max(Lanes::ZERO).min(Lanes::ONE);
            factor -= damage * cooled * DAMAGE_MAX;
        }
        if let Some(water) = &self.water {
            factor *= Lanes::where_greater(Lanes::splat(DRYING_TO_K), hottest_k, water.conductivity_factor, Lanes::ONE);
        }
        factor
    }
}

//! Heat exchange at the face.
//!
//! q = e (G - sigma T^4) + h (Tg - T) + q0 - min( hw (T - 373 K), qw ) where T > 373 K
//!
//! Symbols: q net flux into the rock W/m2, e emissivity of the rock, G incident irradiance W/m2, sigma the
//! Stefan-Boltzmann constant, T face temperature K, h convective coefficient W/m2K, Tg gas temperature K, q0 a
//! prescribed flux W/m2, hw the coefficient of boiling rain (assumption) and qw what the rain can take at most W/m2. The
//! rock always re-radiates with its full emissivity.

use crate::numerics::lanes::Lanes;
use crate::units::STEFAN_BOLTZMANN_W_M2_K4;

/// Everything the face exchanges with, at one moment, per draw.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Exchange {
    /// Emissivity of the rock.
    pub emissivity: Lanes,
    /// Incident irradiance, W/m2.
    pub irradiance_w_m2: Lanes,
    /// Convective coefficient, W/m2K.
    pub h_w_m2_k: Lanes,
    /// Gas temperature, K.
    pub gas_k: Lanes,
    /// Prescribed net flux, W/m2.
    pub flux_w_m2: Lanes,
    /// What rain can take at most, W/m2; 0 without rain.
    pub rain_cap_w_m2: Lanes,
}

/// Coefficient of heat taken by rain that boils on a face, W/m2K (assumption).
const RAIN_H_W_M2_K: f64 = 1000.0;
/// Rain takes heat above this, K.
const BOILING_K: f64 = 373.15;

impl Exchange {
    /// Net flux into a face at `face_k`, W/m2.
    ///
    /// ```
    /// use spallcast::{heat::boundary::Exchange, numerics::lanes::Lanes};
    /// let fire = Exchange {
    ///     emissivity: Lanes::ONE, irradiance_w_m2: Lanes::splat(1000.0), h_w_m2_k: Lanes::splat(10.0),
    ///     gas_k: Lanes::splat(400.0), flux_w_m2: Lanes::ZERO, rain_cap_w_m2: Lanes::ZERO,
    /// };
    /// let q = fire.flux_into(Lanes::splat(300.0)).0[0];
    /// assert!((q - (1000.0 - 5.670374419e-8 * 300f64.powi(4) + 10.0 * 100.0)).abs() < 1e-9);
    /// ```
    #[inline(always)]
    pub fn flux_into(&self, face_k: Lanes) -> Lanes {
        self.emissivity * (self.irradiance_w_m2 - face_k.fourth() * STEFAN_BOLTZMANN_W_M2_K4)
            + self.h_w_m2_k * (self.gas_k - face_k)
            + self.flux_w_m2
            - ((face_k - Lanes::splat(BOILING_K)) * RAIN_H_W_M2_K).max(Lanes::ZERO).min(self.rain_cap_w_m2)
    }

    /// How fast that flux falls as the face warms, -dq/dT = 4 e sigma T^3 + h, W/m2K.
    #[inline(always)]
    pub fn stiffness_w_m2_k(&self, face_k: Lanes) -> Lanes {
        self.emissivity * (face_k * face_k * face_k) * (4.0 * STEFAN_BOLTZMANN_W_M2_K4) + self.h_w_m2_k
    }
}

/// A history of exchange, cut into legs at whose joints it may jump or bend.
pub trait SurfaceForcing {
    /// Number of legs; the last one is open-ended.
    fn legs(&self) -> usize;

    /// The times at which the march stops within a leg.
    fn leg(&self, leg: usize) -> Leg;

    /// Exchange at time `t_s` (per draw, from the start of the history) of the leg; `live`, 0 to 1, scales the fire's
    /// part for draws whose fuel is running out.
    fn exchange(&self, leg: usize, t_s: Lanes, live: Lanes) -> Exchange;
}

/// How a leg is divided into steps. Times per draw, s, from the start of the history; a leg of no length takes no time.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Leg {
    /// When it starts.
    pub start_s: Lanes,
    /// When it ends; for [`Spacing::Growing`], not used.
    pub end_s: Lanes,
    /// How many steps.
    pub steps: usize,
    /// How the steps are spread.
    pub spacing: Spacing,
}

/// How the steps of a leg are spread.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Spacing {
    /// All alike.
    Even,
    /// Each step longer than the last by one factor, as if the leg had begun a `lead` l before its start s:
    /// t_j = s - l + l ((e - s + l)/l)^(j/N), e its end. The lead is above zero.
    Geometric {
        /// Lead, s.
        lead_s: Lanes,
    },
    /// t_j = start + (end - start) (j/N)^2: short steps after the joint.
    Squared,
    /// The first step, and the factor from each step to the next; goes on until the observer has seen enough or the
    /// number of steps is used up.
    Growing {
        /// First step, s.
        first_s: Lanes,
        /// Factor from step to step.
        factor: f64,
    },
}

impl Leg {
    /// The same leg in `refine` times as many steps.
    pub fn refined(mut self, refine: usize) -> Leg {
        if let Spacing::Growing { first_s, factor } = self.spacing {
            let finer = libm::pow(factor, 1.0 / refine as f64);
            // The first `refine` fine steps cover the first coarse one: first = fine (finer^refine - 1)/(finer - 1).
            let share = if factor == 1.0 { 1.0 / refine as f64 } else { (finer - 1.0) / (factor - 1.0) };
            self.spacing = Spacing::Growing { first_s: first_s * share, factor: finer };
        }
        self.steps *= refine;
        self
    }

    /// Step lengths in order, s, per draw.
    pub fn step_lengths(&self) -> StepLengths {
        let n = self.steps as f64;
        let factor = match self.spacing {
            Spacing::Geometric { lead_s } => Lanes::from_fn(|l| {
                let (lead, whole) = (lead_s.0[l], self.end_s.0[l] - self.start_s.0[l]);
                if whole > 0.0 { libm::pow((whole + lead) / lead, 1.0 / n) } else { 1.0 }
            }),
            Spacing::Growing { factor, .. } => Lanes::splat(factor),
            Spacing::Even | Spacing::Squared => Lanes::ONE,
        };
        StepLengths { leg: *self, factor, taken: 0, time_s: self.start_s, last_s: Lanes::ZERO }
    }
}

/// Iterator over the step lengths of a leg.
#[derive(Debug, Clone)]
pub struct StepLengths {
    leg: Leg,
    factor: Lanes,
    taken: usize,
    time_s: Lanes,
    last_s: Lanes,
}

impl Iterator for StepLengths {
    type Item = Lanes;

    #[inline(always)]
    fn next(&mut self) -> Option<Lanes> {
        if self.taken == self.leg.steps {
            return None;
        }
        self.taken += 1;
        let n = self.leg.steps as f64;
        let whole = self.leg.end_s - self.leg.start_s;
        let step = match self.leg.spacing {
            Spacing::Even => whole / n,
            Spacing::Squared => whole * ((2 * self.taken - 1) as f64 / (n * n)),
            Spacing::Geometric { .. } if self.taken == self.leg.steps => self.leg.end_s - self.time_s,
            Spacing::Geometric { lead_s } if self.taken == 1 => lead_s * (self.factor - Lanes::ONE),
            Spacing::Geometric { .. } => self.last_s * self.factor,
            Spacing::Growing { first_s, .. } if self.taken == 1 => first_s,
            Spacing::Growing { .. } => self.last_s * self.factor,
        };
        let step = step.max(Lanes::ZERO);
        self.last_s = step;
        self.time_s += step;
        Some(step)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn leg(spacing: Spacing, steps: usize) -> Leg {
        Leg { start_s: Lanes::splat(2.0), end_s: Lanes::splat(32.0), steps, spacing }
    }

    #[test]
    fn steps_of_a_leg_fill_it() {
        for spacing in [Spacing::Even, Spacing::Geometric { lead_s: Lanes::splat(2.0) }, Spacing::Squared] {
            let total: f64 = leg(spacing, 7).step_lengths().map(|d| d.0[3]).sum();
            assert!((total - 30.0).abs() < 1e-12, "{spacing:?}: {total}");
        }
        let geometric: Vec<f64> =
            leg(Spacing::Geometric { lead_s: Lanes::splat(2.0) }, 4).step_lengths().map(|d| d.0[0]).collect();
        assert!((geometric[1] / geometric[0] - 2.0).abs() < 1e-12);
    }

    #[test]
    fn a_refined_growing_leg_reaches_the_same_times() {
        let coarse = leg(Spacing::Growing { first_s: Lanes::splat(3.0), factor: 1.5 }, 6);
        let end = |l: Leg| l.step_lengths().map(|d| d.0[0]).sum::<f64>();
        assert!((end(coarse) / end(coarse.refined(5)) - 1.0).abs() < 1e-12);
    }
}

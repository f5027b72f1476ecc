//! The history of a fire at a face: a pulse, or a measured series.
//!
//! G(t) = sigma Ta^4 + g(t) (G - sigma Ta^4),   Tg(t) = Ta + g(t) (Tg - Ta)
//! g(t) = (t/tg)^2 until tg; 1 until t_r; exp(-(t - t_r)/tau) after
//!
//! Symbols: G plateau irradiance W/m2, Ta ambient K, Tg gas temperature K, tg growth time s, t_r residence s, tau decay
//! time s. g multiplies (G - sigma Ta^4) and (Tg - Ta), never a flame temperature. Where the residence exceeds the
//! flaming cap of its class the excess is a residual stage: the flames fade onto its own level with the decay time (a drop
//! at once would take their decay away, and a longer fire would heat less). The class's convective coefficient lasts
//! through the decay and then gives way to that of still air. Sources: physics and fire pages; shape and decay are judgement.

use crate::heat::boundary::{Exchange, Leg, Spacing, SurfaceForcing};
use crate::numerics::lanes::{LANES, Lanes};
use crate::units::STEFAN_BOLTZMANN_W_M2_K4;

/// Convective coefficient once the fire is over, W/m2K (judgement).
pub const H_AFTER_W_M2_K: f64 = 12.0;
/// The fire's own convection lasts while g is above this, then fades into still air (assumption; keeping it through the
/// decay is what the check values of the class medians were made with).
const EMBERS: f64 = 0.05;
/// Growth where neither flame length nor spread rate is known: this share of the residence, at most this long (judgement).
pub const GROWTH_SHARE: f64 = 0.25;
/// See [`GROWTH_SHARE`], s.
pub const GROWTH_MAX_S: f64 = 60.0;
/// Residual burning after the flaming cap: irradiance W/m2, gas K, convective coefficient W/m2K (judgement).
pub const RESIDUAL_IRRADIANCE_W_M2: f64 = 15e3;
/// See [`RESIDUAL_IRRADIANCE_W_M2`].
pub const RESIDUAL_GAS_K: f64 = 450.0 + 273.15;
/// See [`RESIDUAL_IRRADIANCE_W_M2`].
pub const RESIDUAL_H_W_M2_K: f64 = 10.0;

/// Steps of each leg. `tests/step_plan.rs` shows the error they leave on every class.
const GROWTH_STEPS: usize = 8;
const PLATEAU_STEPS: usize = 18;
const RESIDUAL_STEPS: usize = 15;
const DECAY_STEPS_MAX: usize = 36;
/// Lead of the plateau's steps as a share of the growth time, and of the residual stage's as a share of the decay time.
const PLATEAU_LEAD_SHARE: f64 = 0.4;
const RESIDUAL_LEAD_SHARE: f64 = 0.2;
/// First step of the decay as a share of its time constant, and the growth from step to step.
const DECAY_FIRST_SHARE: f64 = 0.035;
const DECAY_FACTOR: f64 = 1.25;

/// Level of exchange at a plateau, per draw.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Level {
    /// Incident irradiance, W/m2.
    pub irradiance_w_m2: Lanes,
    /// Gas temperature, K.
    pub gas_k: Lanes,
    /// Convective coefficient, W/m2K.
    pub h_w_m2_k: Lanes,
}

/// A pulse for eight draws.
#[derive(Debug, Clone, PartialEq)]
pub struct Pulse {
    /// End of growth, s.
    pub growth_s: Lanes,
    /// End of flaming, s.
    pub flaming_s: Lanes,
    /// End of the residence, s; later than `flaming_s` where there is a residual stage.
    pub residence_s: Lanes,
    /// Decay time, s.
    pub decay_s: Lanes,
    /// The flaming plateau.
    pub flaming: Level,
    /// The residual plateau.
    pub residual: Level,
    /// Ambient temperature, K.
    pub ambient_k: Lanes,
    /// Emissivity of the rock.
    pub emissivity: Lanes,
    /// Heat that rain takes at most while the face is above 100 C after the fire, W/m2; 0 without rain.
    pub rain_cap_w_m2: f64,
}

const GROWTH: usize = 0;
const PLATEAU: usize = 1;
const RESIDUAL: usize = 2;
const DECAY: usize = 3;

impl Pulse {
    /// Growth time of a residence where nothing else is known.
    ///
    /// ```
    /// use spallcast::fire::pulse::Pulse;
    /// assert_eq!(Pulse::growth_time_s(40.0), 10.0);
    /// assert_eq!(Pulse::growth_time_s(5400.0), 60.0);
    /// ```
    pub fn growth_time_s(residence_s: f64) -> f64 {
        (GROWTH_SHARE * residence_s).min(GROWTH_MAX_S)
    }

    /// The level at `t_s` from the end of flaming on: the residual one and what is left of the flames above it. At the end
    /// of flaming itself it is the flaming one, so a pulse without a residual stage decays from there.
    #[inline(always)]
    fn level_after_flaming(&self, t_s: Lanes) -> Level {
        let flames = ((self.flaming_s - t_s) / self.decay_s).exp();
        let fade = |flaming: Lanes, residual: Lanes| residual + flames * (flaming - residual);
        Level {
            irradiance_w_m2: fade(self.flaming.irradiance_w_m2, self.residual.irradiance_w_m2),
            gas_k: fade(self.flaming.gas_k, self.residual.gas_k),
            h_w_m2_k: fade(self.flaming.h_w_m2_k, self.residual.h_w_m2_k),
        }
    }
}

impl SurfaceForcing for Pulse {
    fn legs(&self) -> usize {
        4
    }

    fn leg(&self, leg: usize) -> Leg {
        match leg {
            GROWTH => Leg { start_s: Lanes::ZERO, end_s: self.growth_s, steps: GROWTH_STEPS, spacing: Spacing::Even },
            PLATEAU => Leg {
                start_s: self.growth_s,
                end_s: self.flaming_s,
                steps: PLATEAU_STEPS,
                spacing: Spacing::Geometric { lead_s: self.growth_s * PLATEAU_LEAD_SHARE },
            },
            RESIDUAL => {
                let none = (0..LANES).all(|l| self.residence_s.0[l] <= self.flaming_s.0[l]);
                Leg {
                    start_s: self.flaming_s,
                    end_s: self.residence_s,
                    steps: if none { 0 } else { RESIDUAL_STEPS },
                    spacing: Spacing::Geometric { lead_s: self.decay_s * RESIDUAL_LEAD_SHARE },
                }
            }
            _ => Leg {
                start_s: self.residence_s,
                end_s: self.residence_s,
                steps: DECAY_STEPS_MAX,
                spacing: Spacing::Growing { first_s: self.decay_s * DECAY_FIRST_SHARE, factor: DECAY_FACTOR },
            },
        }
    }

    #[inline(always)]
    fn exchange(&self, leg: usize, t_s: Lanes, live: Lanes) -> Exchange {
        let (g, level, h) = match leg {
            GROWTH => {
                let share = t_s / self.growth_s;
                (share * share, self.flaming, self.flaming.h_w_m2_k)
            }
            PLATEAU => (Lanes::ONE, self.flaming, self.flaming.h_w_m2_k),
            RESIDUAL => {
                let level = self.level_after_flaming(t_s);
                (Lanes::ONE, level, level.h_w_m2_k)
            }
            _ => {
                let level = self.level_after_flaming(self.residence_s);
                let g = ((self.residence_s - t_s) / self.decay_s).exp();
                let fire = (g * (1.0 / EMBERS)).min(Lanes::ONE);
                (g, level, Lanes::splat(H_AFTER_W_M2_K) + fire * (level.h_w_m2_k - Lanes::splat(H_AFTER_W_M2_K)))
            }
        };
        let g = g * live;
        let ambient = self.ambient_k.fourth() * STEFAN_BOLTZMANN_W_M2_K4;
        Exchange {
            emissivity: self.emissivity,
            irradiance_w_m2: ambient + g * (level.irradiance_w_m2 - ambient),
            h_w_m2_k: h,
            gas_k: self.ambient_k + g * (level.gas_k - self.ambient_k),
            flux_w_m2: Lanes::ZERO,
            rain_cap_w_m2: Lanes::splat(if leg == DECAY { self.rain_cap_w_m2 } else { 0.0 }),
        }
    }
}

/// A measured series of exchange, the same for every draw but for emissivity.
#[derive(Debug, Clone, PartialEq)]
pub struct Series {
    /// Times, s, from 0, ascending.
    pub time_s: Vec<f64>,
    /// Exchange at those times.
    pub rows: Vec<SeriesRow>,
}

/// One row of a series. SI.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct SeriesRow {
    /// Emissivity in force.
    pub emissivity: f64,
    /// Irradiance, W/m2.
    pub irradiance_w_m2: f64,
    /// Gas temperature, K.
    pub gas_k: f64,
    /// Convective coefficient, W/m2K.
    pub h_w_m2_k: f64,
    /// Prescribed net flux, W/m2.
    pub flux_w_m2: f64,
}

/// Coefficient that ties the face to a measured surface temperature, W/m2K: at 1 MW/m2 the face lags by 1 mK.
pub const TIED_FACE_W_M2_K: f64 = 1e9;
/// Steps over a series: at most this many in all, and at most and at least these in one interval.
const SERIES_STEPS_MAX: usize = 40_000;
const INTERVAL_STEPS: std::ops::RangeInclusive<usize> = 2..=240;

impl SurfaceForcing for Series {
    fn legs(&self) -> usize {
        self.time_s.len() - 1
    }

    fn leg(&self, leg: usize) -> Leg {
        let steps = (SERIES_STEPS_MAX / self.legs()).clamp(*INTERVAL_STEPS.start(), *INTERVAL_STEPS.end());
        Leg {
            start_s: Lanes::splat(self.time_s[leg]),
            end_s: Lanes::splat(self.time_s[leg + 1]),
            steps,
            spacing: Spacing::Squared,
        }
    }

    fn exchange(&self, leg: usize, t_s: Lanes, _live: Lanes) -> Exchange {
        let (t0, t1) = (self.time_s[leg], self.time_s[leg + 1]);
        let (a, b) = (&self.rows[leg], &self.rows[leg + 1]);
        let share = (t_s - Lanes::splat(t0)) / (t1 - t0);
        let between = |from: f64, to: f64| Lanes::splat(from) + share * (to - from);
        Exchange {
            emissivity: between(a.emissivity, b.emissivity),
            irradiance_w_m2: between(a.irradiance_w_m2, b.irradiance_w_m2),
            h_w_m2_k: between(a.h_w_m2_k, b.h_w_m2_k),
            gas_k: between(a.gas_k, b.gas_k),
            flux_w_m2: between(a.flux_w_m2, b.flux_w_m2),
            rain_cap_w_m2: Lanes::ZERO,
        }
    }
}

//! A whole history: legs, steps, the energy guard, and an observer that sees every step.

use super::boundary::SurfaceForcing;
use super::column::Column;
use super::material::Material;
use super::step::Stepper;
use crate::numerics::lanes::Lanes;

/// What an observer is shown after every step.
#[derive(Debug, Clone, Copy)]
pub struct Moment {
    /// Time from the start, s, per draw.
    pub time_s: Lanes,
    /// Length of the step just taken, s, per draw.
    pub step_s: Lanes,
    /// Net flux into the face now, W/m2; its mean over the step where the face is tied to a temperature.
    pub flux_w_m2: Lanes,
    /// Heat absorbed since the start, J/m2 of face.
    pub absorbed_j_m2: Lanes,
    /// Which leg the step belongs to.
    pub leg: usize,
}

/// Whether the observer has seen enough. Only the open-ended last leg asks.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Verdict {
    /// Go on.
    Continue,
    /// The rest of the history cannot change anything.
    Enough,
}

/// Sees every step and may strip the face.
pub trait Observer {
    /// Looks at the column after a step.
    fn see(&mut self, column: &mut Column, moment: &Moment) -> Verdict;

    /// Is told once that the march is over.
    fn finish(&mut self, _moment: &Moment) {}
}

/// What a march took.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Account {
    /// Steps taken.
    pub steps: usize,
    /// Heat absorbed through the face, J/m2.
    pub absorbed_j_m2: Lanes,
    /// Gross of that, the sum of the absolute exchange, J/m2: the scale of the energy error.
    pub exchanged_j_m2: Lanes,
    /// Per draw: the fire ended early because the absorbed heat reached its limit.
    pub fuel_spent: Lanes,
}

/// From this coefficient on the face is tied to the gas temperature, W/m2K: a microkelvin of face temperature then weighs
/// watts, so the flux now would be rounding and the mean over the step is shown.
const TIED_FROM_W_M2_K: f64 = 1e6;

/// How a history is marched.
#[derive(Debug, Clone, Copy)]
pub struct March {
    /// Steps per planned step; 1 in a run, more for a reference.
    pub refine: usize,
    /// Most heat that may be absorbed, J/m2; infinity where unknown.
    pub absorbed_limit_j_m2: Lanes,
}

impl March {
    /// Marches the column through the forcing.
    ///
    /// The energy guard looks at each step before it is taken: where the heat it would bring at the larger of the flux now
    /// and the flux at its end exceeds what is left, the fire's part of that step is scaled
    /// down to it, and the fire is out afterwards. Scaling the fire's part by s leaves at most s of the flux, so the limit holds.
    #[inline(always)]
    pub fn run(
        &self,
        column: &mut Column,
        material: &Material,
        forcing: &impl SurfaceForcing,
        stepper: &mut Stepper,
        observer: &mut impl Observer,
    ) -> Account {
        let guarded = self.absorbed_limit_j_m2.0.iter().any(|l| l.is_finite());
        let mut account =
            Account { steps: 0, absorbed_j_m2: Lanes::ZERO, exchanged_j_m2: Lanes::ZERO, fuel_spent: Lanes::ZERO };
        let mut live = Lanes::ONE;
        let last = forcing.legs() - 1;
        let mut seen = None;
        for leg in 0..=last {
            let plan = forcing.leg(leg).refined(self.refine);
            let mut time_s = plan.start_s;
            let mut now = forcing.exchange(leg, time_s, live);
            for step_s in plan.step_lengths() {
                let end_s = time_s + step_s;
                let mut then = forcing.exchange(leg, end_s, live);
                if guarded {
                    let face = column.temperature_k[0];
                    let left = self.absorbed_limit_j_m2 - account.absorbed_j_m2;
                    let wish = now.flux_into(face).max(then.flux_into(face)) * step_s;
                    let share = Lanes::where_greater(wish, left, live * left.max(Lanes::ZERO) / wish, live);
                    let spent = Lanes::where_greater(live, share, Lanes::ONE, Lanes::ZERO);
                    if spent.largest() > 0.0 {
                        account.fuel_spent = account.fuel_spent.max(spent);
                        now = forcing.exchange(leg, time_s, share);
                        then = forcing.exchange(leg, end_s, share);
                        live = Lanes::where_greater(spent, Lanes::ZERO, Lanes::ZERO, live);
                    }
                }
                let absorbed = stepper.step(column, material, &now, &then, step_s);
                account.steps += 1;
                account.absorbed_j_m2 += absorbed;
                account.exchanged_j_m2 += absorbed.abs();
                time_s = end_s;
                // A fire that has just gone out is out from here on.
                now = if account.fuel_spent.largest() > 0.0 { forcing.exchange(leg, time_s, live) } else { then };
                let moment = Moment {
                    time_s,
                    step_s,
                    flux_w_m2: Lanes::where_greater(
                        now.h_w_m2_k,
                        Lanes::splat(TIED_FROM_W_M2_K),
                        absorbed / step_s,
                        now.flux_into(column.temperature_k[0]),
                    ),
                    absorbed_j_m2: account.absorbed_j_m2,
                    leg,
                };
                seen = Some(moment);
                if observer.see(column, &moment) == Verdict::Enough && leg == last {
                    break;
                }
            }
        }
        if let Some(moment) = seen {
            observer.finish(&moment);
        }
        account
    }
}

//! Follows the families of eight draws through a march.
//!
//! After every step: skin stress, membrane force, drive; then flake, slab, split and rind are asked in turn. First
//! passage between two steps is placed by linear interpolation. When a slab lets go, the plate leaves during the fire with
//! the settings' probability: the rock below becomes the face, heating goes on and it may slab and flake in turn; if it
//! stays it shields the rock below, and no further slab follows. Its own outer skin can still flake.

use super::flake::{self, FlakeDraws, MEDIAN_RISK, Sites};
use super::outcome::{Event, Events, Family, Outcome, SLABS_MAX};
use super::slab::{Drive, Face, FaceOnGrid, SPLIT_FACTOR, SPLIT_RADIUS_MAX_M, StrengthLaw};
use super::vapour;
use crate::heat::column::Column;
use crate::heat::grid::Grid;
use crate::heat::march::{Account, Moment, Observer, Verdict};
use crate::heat::material::Material;
use crate::numerics::cubic;
use crate::numerics::lanes::{LANES, Lanes};
use crate::stress::skin::{Skin, SkinDraws, SkinLaw, membrane_force_n_m};
use crate::units::ICE_POINT_K;

/// A march whose fire is over may stop once no draw can spall any more; `tests/step_plan.rs` shows that none does. Once
/// the face gives heat off, stress at the face and force fall, and no rock gets hotter than the face has been. A drive
/// below this share of the strength of rock as hot as that comes to nothing.
const HARMLESS: f64 = 0.95;
/// So does any drive that has fallen below this share of its largest value under a face colder than this, K.
const PAST_PEAK: f64 = 0.95;
const COLD_FACE_K: f64 = 100.0 + ICE_POINT_K;
/// A drive below this share of the strength of the face is not followed closely.
const FAR_BELOW: f64 = 0.7;

/// What one draw is held against in tension.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct SlabDraw {
    /// Cold strength, Pa.
    pub strength_pa: f64,
    /// The strength is limited by toughness, so the toughness law applies to it when hot.
    pub toughness_limited: bool,
    /// Factor on the slab depth from scatter.
    pub depth_factor: f64,
    /// Slab depth over patch radius where the patch governs.
    pub patch_depth: f64,
    /// Uniform number that decides whether plates leave.
    pub leaves_u: f64,
    /// Boulder radius, m; `None` on a flat face, which cannot split.
    pub radius_m: Option<f64>,
}

/// What one draw's rind is held against.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct RindDraw {
    /// Recorded depth, m.
    pub depth_m: f64,
    /// Mean compression that buckles it, Pa.
    pub buckling_pa: f64,
    /// Strength of its plane over that of fresh rock.
    pub plane_share: f64,
}

/// Pore pressure of one draw.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct WetDraw {
    /// Porosity.
    pub porosity: f64,
}

/// Laws and draws of one batch.
pub struct WatchDraws<'a> {
    /// Strain and stiffness of the rock.
    pub skin_law: &'a SkinLaw,
    /// Skin of the draws.
    pub skin: SkinDraws,
    /// Flakes.
    pub flake: FlakeDraws,
    /// Geometry of the face.
    pub face: Face,
    /// Slabs.
    pub slab: [SlabDraw; LANES],
    /// Rinds, where recorded.
    pub rind: Option<[RindDraw; LANES]>,
    /// Pore pressure, where wet.
    pub wet: Option<[WetDraw; LANES]>,
    /// Residual strength of the rock.
    pub strength_law: &'a StrengthLaw,
    /// Probability that a plate leaves.
    pub leaves_probability: f64,
    /// Slabs that may follow one another.
    pub generations_max: usize,
}

/// State of one draw between steps.
#[derive(Debug, Clone, Copy)]
struct DrawState {
    /// Drive less strength at the previous step, Pa.
    margin_pa: f64,
    /// Slab depth at the previous step, and its index in the grid when it was last looked at.
    depth_m: f64,
    index: f64,
    risk: f64,
    risk_s: f64,
    flake_depth_m: f64,
    flake_stress_pa: f64,
    slabs: usize,
    leaves_u: f64,
    /// A plate that stayed shields the face, or the generations are used up.
    done: bool,
    split: bool,
    rind_gone: bool,
}

/// Largest values so far.
#[derive(Debug, Clone, Copy)]
struct Peaks {
    surface_k: Lanes,
    flux_w_m2: Lanes,
    absorbed_j_m2: Lanes,
    stress_pa: Lanes,
    drive_pa: Lanes,
    /// Of the drive, before any plate has left.
    tension_pa: Lanes,
}

/// The observer.
pub struct Watch<'a> {
    draws: &'a WatchDraws<'a>,
    material: &'a Material<'a>,
    face: FaceOnGrid,
    sites: Sites,
    skin: Skin,
    tension_pa: Vec<Lanes>,
    state: [DrawState; LANES],
    outcome: [Outcome; LANES],
    peaks: Peaks,
    /// Cold strength, Pa, and 1 where toughness limits it.
    strength_pa: Lanes,
    toughness_limited: Lanes,
    /// Section average that splits a boulder per membrane force, 1/m; 0 where it is too large to split or a flat face.
    section_per_m: Lanes,
    /// 1 once a plate has left.
    stripped: Lanes,
    /// Face temperature at the previous step, K.
    surface_k: Lanes,
    /// Force and drive of the last step, for probes.
    last: (Lanes, Drive),
}

impl<'a> Watch<'a> {
    /// A watch over a batch on a grid.
    pub fn new(draws: &'a WatchDraws<'a>, material: &'a Material<'a>, grid: &Grid) -> Watch<'a> {
        let n = grid.len();
        let state = std::array::from_fn(|l| DrawState {
            margin_pa: -draws.slab[l].strength_pa,
            depth_m: 0.0,
            index: 0.0,
            risk: 0.0,
            risk_s: 0.0,
            flake_depth_m: 0.0,
            flake_stress_pa: 0.0,
            slabs: 0,
            leaves_u: draws.slab[l].leaves_u,
            done: draws.generations_max == 0,
            split: false,
            rind_gone: draws.rind.is_none(),
        });
        let outcome = std::array::from_fn(|l| Outcome {
            peak_surface_k: 0.0,
            peak_flux_w_m2: 0.0,
            absorbed_j_m2: 0.0,
            peak_stress_pa: 0.0,
            peak_tension_pa: 0.0,
            strength_pa: draws.slab[l].strength_pa,
            skin_over_radius: 0.0,
            flaked_sites: 0.0,
            fuel_spent: false,
            events: Events::default(),
        });
        let zero = Lanes::ZERO;
        Watch {
            draws,
            material,
            face: FaceOnGrid::new(draws.face, grid),
            sites: Sites::new(&draws.flake, grid),
            skin: Skin::new(n),
            tension_pa: vec![zero; n],
            state,
            outcome,
            peaks: Peaks {
                surface_k: zero,
                flux_w_m2: zero,
                absorbed_j_m2: zero,
                stress_pa: zero,
                drive_pa: zero,
                tension_pa: zero,
            },
            strength_pa: Lanes::from_fn(|l| draws.slab[l].strength_pa),
            toughness_limited: Lanes::from_fn(|l| f64::from(u8::from(draws.slab[l].toughness_limited))),
            section_per_m: Lanes::from_fn(|l| match draws.slab[l].radius_m {
                Some(radius) if radius < SPLIT_RADIUS_MAX_M => 2.0 * draws.face.heated_share.0[l] / radius,
                _ => 0.0,
            }),
            stripped: zero,
            surface_k: zero,
            last: (zero, Drive { largest_pa: zero, convex_pa: zero, skin_m: zero }),
        }
    }

    /// Skin stress of every node at the last step, Pa, `[n]`.
    pub fn stress_pa(&self) -> &[Lanes] {
        &self.skin.stress_pa
    }

    /// Membrane force and drive at the last step.
    pub fn force_and_drive(&self) -> (Lanes, Drive) {
        self.last
    }

    /// What the draws did; nothing spalls below the floors of exposure.
    pub fn outcomes(mut self, account: &Account) -> [Outcome; LANES] {
        for (l, outcome) in self.outcome.iter_mut().enumerate() {
            outcome.peak_surface_k = self.peaks.surface_k.0[l];
            outcome.peak_flux_w_m2 = self.peaks.flux_w_m2.0[l];
            outcome.absorbed_j_m2 = self.peaks.absorbed_j_m2.0[l];
            outcome.peak_stress_pa = self.peaks.stress_pa.0[l];
            outcome.peak_tension_pa = self.peaks.tension_pa.0[l];
            outcome.flaked_sites = -libm::expm1(-self.state[l].risk);
            outcome.fuel_spent = account.fuel_spent.0[l] > 0.0;
            if !outcome.above_floor() {
                outcome.events = Events::default();
                outcome.flaked_sites = 0.0;
            }
        }
        self.outcome
    }

    fn see_flake(&mut self, lane: usize, moment: &Moment, risk: f64, depth_m: f64, stress_pa: f64, surface_k: f64) {
        let draws = &self.draws.flake;
        let before_k = self.surface_k.0[lane];
        let state = &mut self.state[lane];
        let outcome = &mut self.outcome[lane];
        if state.risk < MEDIAN_RISK && risk >= MEDIAN_RISK {
            // Under a steady flux the rise, the depth and B are powers of time, so ln B is close to linear in ln t.
            let share =
                if state.risk > 0.0 { libm::log(MEDIAN_RISK / state.risk) / libm::log(risk / state.risk) } else { 1.0 };
            let mean = between_powers(state.flake_depth_m, depth_m, share);
            let end_s = moment.time_s.0[lane];
            let stress = state.flake_stress_pa + share * (stress_pa - state.flake_stress_pa);
            outcome.events.push(Event {
                family: Family::Flake,
                time_s: between_powers(end_s - moment.step_s.0[lane], end_s, share),
                depth_m: flake::thickness_m(mean, draws.grain_m, draws.energy_floor_pa2_m.0[lane], stress),
                surface_k: before_k + share * (surface_k - before_k),
            });
        }
        state.risk = risk;
        state.risk_s = moment.time_s.0[lane];
        state.flake_depth_m = depth_m;
        state.flake_stress_pa = stress_pa;
    }

    /// A draw whose median site never let go but whose flaked share counts: the thickness at its largest risk.
    fn close_flake(&mut self, lane: usize) {
        let draws = &self.draws.flake;
        let state = &self.state[lane];
        if state.risk < MEDIAN_RISK && state.risk >= draws.counted_risk.0[lane] {
            let floor = draws.energy_floor_pa2_m.0[lane];
            self.outcome[lane].events.push(Event {
                family: Family::Flake,
                time_s: state.risk_s,
                depth_m: flake::thickness_m(state.flake_depth_m, draws.grain_m, floor, state.flake_stress_pa),
                surface_k: self.peaks.surface_k.0[lane],
            });
        }
    }

    /// Strength of a draw whose cracking depth has reached `hottest_k`.
    fn strength_pa(&self, lane: usize, hottest_k: f64) -> f64 {
        let slab = &self.draws.slab[lane];
        let factor = self.draws.strength_law.factor(slab.toughness_limited, hottest_k);
        slab.strength_pa * factor
    }

    /// Slab of one draw; returns the thickness to strip when a plate leaves.
    fn see_slab(&mut self, lane: usize, column: &Column, moment: &Moment, drive: &Drive, weakest: f64) -> Option<f64> {
        let slab = self.draws.slab[lane];
        let largest = drive.largest_pa.0[lane];
        // The crack lies below the face, which is hotter and weaker: far below the face's own strength nothing can happen.
        if largest < FAR_BELOW * weakest {
            self.state[lane].margin_pa = largest - weakest;
            self.state[lane].depth_m = 0.0;
            return None;
        }
        let known = self.state[lane].index;
        if known > 0.0 {
            // The depth where it would crack moves inward: where it was last, rock was hotter and weaker than where it is.
            let node = (known as usize).min(column.hottest_k.len() - 2);
            let share = known - node as f64;
            let (above, below) = (column.hottest_k[node].0[lane], column.hottest_k[node + 1].0[lane]);
            let strength = self.strength_pa(lane, above + share * (below - above));
            if largest < FAR_BELOW * strength {
                self.state[lane].margin_pa = largest - strength;
                self.state[lane].depth_m = 0.0;
                return None;
            }
        }
        let index = self.face.cracking_index(lane, drive, &column.grid, &self.tension_pa, slab.patch_depth);
        self.state[lane].index = index;
        let depth = column.grid.depth_at(lane, index);
        let hottest = cubic::at_within(&column.hottest_k, lane, index);
        let margin = largest - self.strength_pa(lane, hottest);
        let (before_k, surface_k) = (self.surface_k.0[lane], column.temperature_k[0].0[lane]);
        let state = &mut self.state[lane];
        if margin < 0.0 {
            state.margin_pa = margin;
            state.depth_m = depth;
            return None;
        }
        let share = if state.margin_pa < 0.0 { -state.margin_pa / (margin - state.margin_pa) } else { 0.0 };
        let from = if state.depth_m > 0.0 { state.depth_m } else { depth };
        let thickness = slab.depth_factor * (from + share * (depth - from));
        let thickness = slab.radius_m.map_or(thickness, |r| thickness.min(0.5 * r));
        let outcome = &mut self.outcome[lane];
        if let (0, Some(radius)) = (state.slabs, slab.radius_m) {
            outcome.skin_over_radius = drive.skin_m.0[lane] / radius;
        }
        outcome.events.push(Event {
            family: Family::Slab,
            time_s: moment.time_s.0[lane] - (1.0 - share) * moment.step_s.0[lane],
            depth_m: thickness,
            surface_k: before_k + share * (surface_k - before_k),
        });
        state.slabs += 1;
        let p = self.draws.leaves_probability;
        let leaves = state.leaves_u < p;
        // What is left of the uniform number is uniform again, for the next plate.
        state.leaves_u = if leaves { state.leaves_u / p } else { (state.leaves_u - p) / (1.0 - p) };
        state.done = !leaves || state.slabs >= self.draws.generations_max.min(SLABS_MAX);
        state.margin_pa = 0.0;
        state.depth_m = 0.0;
        state.index = 0.0;
        leaves.then_some(thickness)
    }

    /// Whether nothing more can happen to a draw once the fire is over; `weakest` is the strength of rock as hot as the face
    /// has been, Pa.
    fn is_over(&self, lane: usize, moment: &Moment, drive: &Drive, force_n_m: f64, weakest: f64) -> bool {
        let state = &self.state[lane];
        let largest = drive.largest_pa.0[lane];
        if self.surface_k.0[lane] < COLD_FACE_K && largest < PAST_PEAK * self.peaks.drive_pa.0[lane] {
            return true;
        }
        if moment.flux_w_m2.0[lane] >= 0.0 || !state.rind_gone || self.draws.wet.is_some() {
            return false;
        }
        let harmless = HARMLESS * weakest;
        let splits = !state.split && self.section_per_m.0[lane] * force_n_m >= SPLIT_FACTOR * harmless;
        !splits && (state.done || largest < harmless)
    }

    fn see_split(&mut self, lane: usize, column: &Column, moment: &Moment, force_n_m: f64) {
        let Some(radius) = self.draws.slab[lane].radius_m else { return };
        let average = self.section_per_m.0[lane] * force_n_m;
        let core_k = column.hottest_k[column.hottest_k.len() - 1].0[lane];
        if average > 0.0 && average >= SPLIT_FACTOR * self.strength_pa(lane, core_k) {
            self.state[lane].split = true;
            self.outcome[lane].events.push(Event {
                family: Family::Split,
                time_s: moment.time_s.0[lane],
                depth_m: 0.5 * radius,
                surface_k: column.temperature_k[0].0[lane],
            });
        }
    }

    fn see_rind(&mut self, lane: usize, column: &Column, moment: &Moment) {
        let Some(rind) = self.draws.rind.as_ref().map(|r| r[lane]) else { return };
        let grid = &column.grid;
        let index = grid.index_at(lane, rind.depth_m);
        // Mean compression of the rind, by Simpson's rule in the index.
        let steps = 2 * (index as usize + 1);
        let part = index / steps as f64;
        let force: f64 = (0..=steps)
            .map(|j| {
                let here = part * j as f64;
                let weight = if j == 0 || j == steps { 1.0 } else { [2.0, 4.0][j % 2] };
                let per_index = cubic::at(&grid.depth_per_index_m, lane, here);
                weight * part / 3.0 * per_index * cubic::at(&self.skin.stress_pa, lane, here)
            })
            .sum();
        let tension = cubic::at_within(&self.tension_pa, lane, index);
        let face = &self.draws.face;
        let patch = self.last.0.0[lane] * face.plan.tension_per_force(face.patch_m.0[lane], rind.depth_m);
        let hottest = cubic::at_within(&column.hottest_k, lane, index);
        let plane = rind.plane_share * self.strength_pa(lane, hottest);
        if force / rind.depth_m >= rind.buckling_pa || tension.max(patch) >= plane {
            self.state[lane].rind_gone = true;
            self.outcome[lane].events.push(Event {
                family: Family::Rind,
                time_s: moment.time_s.0[lane],
                depth_m: rind.depth_m,
                surface_k: column.temperature_k[0].0[lane],
            });
        }
    }

    /// Adds pore pressure to the drive of wet draws.
    fn add_vapour(&mut self, column: &Column, moment: &Moment, drive: &mut Drive) {
        let Some(wet) = &self.draws.wet else { return };
        for (l, wet) in wet.iter().enumerate() {
            let mut largest = drive.convex_pa.0[l];
            for i in 1..self.tension_pa.len() {
                let z = column.grid.depth_m[i].0[l];
                let t = column.temperature_k[i].0[l];
                let pressure = vapour::tension_pa(wet.porosity, z, t, moment.time_s.0[l]);
                self.tension_pa[i].0[l] += pressure;
                if z * self.draws.face.curvature_per_m.0[l] <= 0.25 {
                    largest = largest.max(self.tension_pa[i].0[l]);
                }
            }
            drive.convex_pa.0[l] = largest;
            drive.largest_pa.0[l] = drive.largest_pa.0[l].max(largest);
        }
    }
}

/// Between two positive values at a share of the way between their logarithms; the end where the start is zero.
fn between_powers(start: f64, end: f64, share: f64) -> f64 {
    if start > 0.0 { start * libm::pow(end / start, share) } else { end }
}

impl Observer for Watch<'_> {
    #[inline(always)]
    fn see(&mut self, column: &mut Column, moment: &Moment) -> Verdict {
        let grid = &column.grid;
        let draws = self.draws;
        let (largest, active) = self.skin.update(draws.skin_law, &draws.skin, &column.temperature_k, &column.hottest_k);
        let stress_pa = &self.skin.stress_pa;
        let force = membrane_force_n_m(grid, stress_pa, active);
        let mut drive = self.face.drive(grid, stress_pa, active, force, &mut self.tension_pa);
        self.add_vapour(column, moment, &mut drive);
        self.last = (force, drive);
        let (risk, flake_depth) = self.sites.risk(&draws.flake, &grid.depth_m, &self.skin.stress_pa, largest);
        let surface_k = column.temperature_k[0];
        // The strength of rock as hot as the face has been: no rock of the draw is weaker.
        let weakest = self.strength_pa * draws.strength_law.factors(self.toughness_limited, column.hottest_k[0]);
        let average = self.section_per_m * force;
        let peaks = &mut self.peaks;
        peaks.surface_k = peaks.surface_k.max(surface_k);
        peaks.flux_w_m2 = peaks.flux_w_m2.max(moment.flux_w_m2);
        peaks.absorbed_j_m2 = peaks.absorbed_j_m2.max(moment.absorbed_j_m2);
        peaks.stress_pa = peaks.stress_pa.max(largest);
        let whole = Lanes::where_greater(self.stripped, Lanes::ZERO, Lanes::ZERO, drive.largest_pa);
        peaks.tension_pa = peaks.tension_pa.max(whole);
        peaks.drive_pa = peaks.drive_pa.max(drive.largest_pa);
        let mut stripped = false;
        for l in 0..LANES {
            if risk.0[l] > self.state[l].risk {
                self.see_flake(l, moment, risk.0[l], flake_depth.0[l], largest.0[l], surface_k.0[l]);
            }
            if !self.state[l].rind_gone && self.stripped.0[l] == 0.0 {
                self.see_rind(l, column, moment);
            }
            if !self.state[l].split && average.0[l] >= SPLIT_FACTOR * weakest.0[l] {
                self.see_split(l, column, moment, force.0[l]);
            }
            if !self.state[l].done
                && let Some(thickness) = self.see_slab(l, column, moment, &drive, weakest.0[l])
            {
                column.strip(self.material, l, thickness);
                self.stripped.0[l] = 1.0;
                stripped = true;
            }
        }
        self.surface_k = column.temperature_k[0];
        let enough = !stripped && (0..LANES).all(|l| self.is_over(l, moment, &drive, force.0[l], weakest.0[l]));
        if enough { Verdict::Enough } else { Verdict::Continue }
    }

    fn finish(&mut self, _moment: &Moment) {
        for l in 0..LANES {
            self.close_flake(l);
        }
    }
}

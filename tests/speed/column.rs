//! Our side of `compare.py`: a median crown fire on a granite half-space, its face temperatures at every step of the
//! ensemble's plan, and the time of one draw. Prints JSON.
//!
//! `cargo bench --bench column`
//!
//! The temperatures are those of conduction alone, without the loss of conductivity on cooling, so that the same problem can
//! be given to other solvers. The time is that of [`batch::run`] on eight such draws, over eight: march, stress and spall.

use std::hint::black_box;
use std::time::Instant;

#[path = "../support/medians.rs"]
mod medians;

use medians::{boulder, corner, table, tables};
use spallcast::assess::batch::{self, Constant, Resolution};
use spallcast::fire::exposure::ExposureClass;
use spallcast::heat::column::Column;
use spallcast::heat::march::{Moment, Observer, Verdict};
use spallcast::numerics::lanes::{LANES, Lanes};
use spallcast::settings::SpallSettings;

/// End of the comparison, s: the fire's convection still lasts, so the boundary is one formula.
const END_S: f64 = 195.0;
/// Timed runs; the best counts, for the machine is shared.
const TRIES: usize = 200;

struct Recorder {
    rows: Vec<(f64, f64)>,
}

impl Observer for Recorder {
    fn see(&mut self, column: &mut Column, moment: &Moment) -> Verdict {
        if moment.time_s.0[0] <= END_S {
            self.rows.push((moment.time_s.0[0], column.temperature_k[0].0[0]));
            return Verdict::Continue;
        }
        Verdict::Enough
    }
}

fn main() {
    let tables = tables();
    let (granite, body) = (table(&tables, "granite"), boulder(0.75));
    let draw = corner(granite, &body, ExposureClass::Crown, (0.5, 0.5));
    let draws = [draw; LANES];
    let settings = SpallSettings::default();
    let mut material = batch::material(&draws, &body, granite, &granite.curve, Constant::default());
    material.first_heating_damage = false;
    let pulse = batch::pulse(&draws, &settings);
    let whole_s = pulse.residence_s + pulse.decay_s * batch::DECAY_LENGTHS;
    let grid = batch::grid(&draws, &body, pulse.residence_s, whole_s, &Resolution::RUN);
    let nodes = grid.len();
    let mut recorder = Recorder { rows: Vec::new() };
    let (start, limit) = (Lanes::splat(draw.ambient_k), Lanes::splat(f64::INFINITY));
    batch::march(&material, &pulse, grid, start, limit, &Resolution::RUN, &mut recorder);

    let mut best_s = f64::INFINITY;
    let mut steps = 0;
    for _ in 0..TRIES {
        let clock = Instant::now();
        let result = black_box(batch::run(black_box(&draws), &body, granite, &settings, &Resolution::RUN));
        best_s = best_s.min(clock.elapsed().as_secs_f64());
        steps = result.account.steps;
    }
    let rows: Vec<String> = recorder.rows.iter().map(|(t, k)| format!("[{t:?}, {k:?}]")).collect();
    println!(
        "{{\"us_per_draw\": {:?}, \"nodes\": {nodes}, \"steps\": {steps}, \"irradiance_w_m2\": {:?}, \"gas_k\": {:?}, \
         \"h_w_m2_k\": {:?}, \"growth_s\": {:?}, \"residence_s\": {:?}, \"decay_s\": {:?}, \"ambient_k\": {:?}, \
         \"emissivity\": {:?}, \"diffusivity_m2_s\": {:?}, \"density_kg_m3\": {:?}, \"specific_heat_j_kg_k\": {:?}, \
         \"face\": [{}]}}",
        best_s * 1e6 / LANES as f64,
        draw.irradiance_w_m2,
        draw.gas_k,
        draw.h_w_m2_k,
        draw.growth_s,
        draw.residence_s,
        draw.decay_s,
        draw.ambient_k,
        draw.emissivity,
        draw.diffusivity_m2_s,
        draw.density_kg_m3,
        draw.specific_heat_j_kg_k,
        rows.join(", ")
    );
}

//! CPU time of one boulder's ensemble, per draw, beside a plain scalar conduction solve run in the same process.
//!
//! `cargo bench --bench assess_boulder`

use std::hint::black_box;
use std::time::Instant;

use spallcast::assess::Model;
use spallcast::fire::exposure::ExposureClass;
use spallcast::rock::catalogue::Catalogue;
use spallcast::settings::Settings;
use spallcast::site::{Boulder, HeatingRecord, Kind, Position, RockChoice, StandingRecord};

fn boulder(rock: &str, class: ExposureClass, radius_m: f64) -> Boulder {
    Boulder {
        id: "bench".into(),
        position: Position { lon_deg: 0.0, lat_deg: 0.0, height_m: None },
        rock: RockChoice::Named(rock.into()),
        kind: Kind::Boulder,
        radius_m: Some(radius_m),
        axes_m: None,
        heating: HeatingRecord { exposure: Some(class), ..HeatingRecord::default() },
        standing: StandingRecord::default(),
    }
}

/// The baseline: 64 graded cells, 150 implicit steps, temperature-dependent conductivity, one draw, no lanes.
fn scalar_solve(seed: f64) -> f64 {
    const CELLS: usize = 64;
    const STEPS: usize = 150;
    let (mut t, mut c, mut d) = ([300.0; CELLS], [0.0; CELLS], [0.0; CELLS]);
    let dx: Vec<f64> = (0..CELLS).map(|i| 2e-4 * libm::pow(1.08, i as f64)).collect();
    let mut dt = 0.05 + seed * 1e-3;
    for _ in 0..STEPS {
        let k: Vec<f64> = t.iter().map(|t| 3.0 / (0.99 + 0.0016 * (t - 273.15))).collect();
        let g = |i: usize| 2.0 / (dx[i] / k[i] + dx[i + 1] / k[i + 1]);
        let (mut below, mut right) = (0.0, 0.0);
        for i in 0..CELLS {
            let up = if i > 0 { g(i - 1) } else { 35.0 + 4.0 * 5.1e-8 * t[0] * t[0] * t[0] };
            let down = if i + 1 < CELLS { g(i) } else { 0.0 };
            let capacity = 2.1e6 * dx[i] / dt;
            let mut rhs = capacity * t[i];
            if i == 0 {
                let flux = 0.9 * (120e3 - 5.67e-8 * t[0] * t[0] * t[0] * t[0]) + 35.0 * (1273.0 - t[0]);
                rhs += flux + up * t[0];
            }
            let pivot = capacity + up + down - if i > 0 { up * below } else { 0.0 };
            below = down / pivot;
            right = (rhs + if i > 0 { up * right } else { 0.0 }) / pivot;
            (c[i], d[i]) = (below, right);
        }
        t[CELLS - 1] = d[CELLS - 1];
        for i in (0..CELLS - 1).rev() {
            t[i] = d[i] + c[i] * t[i + 1];
        }
        dt *= 1.02;
    }
    t[0]
}

fn main() {
    let settings = Settings::default();
    let draws = settings.draws as f64;
    let model = Model::new(settings, Catalogue::embedded()).expect("the default mixture is in the catalogue");
    let start = Instant::now();
    let solves = 2000;
    for i in 0..solves {
        black_box(scalar_solve(black_box(i as f64)));
    }
    let scalar_us = start.elapsed().as_secs_f64() * 1e6 / f64::from(solves);
    println!("scalar conduction solve, 64 cells x 150 steps: {scalar_us:.1} us");
    for class in ExposureClass::ALL {
        let b = boulder("granite", *class, 0.75);
        black_box(model.assess(&b, &[]));
        let start = Instant::now();
        let runs = 5;
        for _ in 0..runs {
            black_box(model.assess(black_box(&b), &[]));
        }
        let us = start.elapsed().as_secs_f64() * 1e6 / f64::from(runs) / draws;
        println!("{:20} {us:7.2} us per draw, {:.3} of the scalar solve", class.word(), us / scalar_us);
    }
}

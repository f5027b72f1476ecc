//! Heat in through the face against heat in the rock, over cases where every law is at work.
//!
//! Reference: the balance itself (hand calculation): interior fluxes cancel in pairs, so the two agree to rounding
//! whatever the step. The independent check is the trapezoid of the reported flux, which carries the time error.

#[path = "support/medians.rs"]
mod medians;
mod support;

use medians::{boulder, corner, table, tables};
use spallcast::assess::batch::{self, Constant, Resolution, WatchInputs};
use spallcast::assess::draws::{Body, Draw};
use spallcast::assess::tables::Tables;
use spallcast::fire::exposure::ExposureClass;
use spallcast::heat::column::Column;
use spallcast::heat::march::{Account, Moment, Observer, Verdict};
use spallcast::numerics::lanes::{LANES, Lanes};
use spallcast::settings::SpallSettings;
use spallcast::site::Moisture;
use spallcast::spall::outcome::Family;
use spallcast::spall::watch::Watch;

/// Share of the exchanged heat: the contract's accuracy. Rounding leaves a thousandth of it.
const BALANCE: f64 = 1e-6;
/// Trapezoid of the flux over a march of 40 steps per planned step: the time error of the trapezoid on the steps.
const TRAPEZOID: f64 = 1e-3;

/// Keeps the integral of the reported flux by trapezoids.
struct Meter<'a> {
    watch: Watch<'a>,
    last_flux: Lanes,
    integral_j_m2: Lanes,
}

impl Observer for Meter<'_> {
    fn see(&mut self, column: &mut Column, moment: &Moment) -> Verdict {
        self.integral_j_m2 += (self.last_flux + moment.flux_w_m2) * moment.step_s * 0.5;
        self.last_flux = moment.flux_w_m2;
        self.watch.see(column, moment)
    }
}

struct Result {
    /// Heat gained and removed less heat absorbed, over heat exchanged; worst lane.
    balance: f64,
    /// Trapezoid less absorbed, over exchanged; worst lane.
    trapezoid: f64,
    account: Account,
    slabs: usize,
    removed_j_m2: f64,
    fuel_spent: bool,
    sphere: bool,
    hottest_k: f64,
}

fn run(tables: &Tables, rock: &str, body: &Body, draws: &[Draw; LANES], refine: usize) -> Result {
    let table = table(tables, rock);
    let settings = SpallSettings::default();
    let material = batch::material(draws, body, table, &table.curve, Constant::default());
    let pulse = batch::pulse(draws, &settings);
    let inputs = WatchInputs::new(draws, body, table, &table.skin, &table.strength, &settings);
    let resolution = Resolution { refine, ..Resolution::RUN };
    let whole = pulse.residence_s + pulse.decay_s * batch::DECAY_LENGTHS;
    let grid = batch::grid(draws, body, pulse.residence_s, whole, &resolution);
    let sphere = grid.curvature_per_m.0[0] > 0.0;
    let limit = Lanes::from_fn(|l| draws[l].absorbed_limit_j_m2);
    let start = Lanes::from_fn(|l| draws[l].ambient_k);
    let mut meter = Meter { watch: inputs.watch(&material, &grid), last_flux: Lanes::ZERO, integral_j_m2: Lanes::ZERO };
    let (column, account) = batch::march(&material, &pulse, grid, start, limit, &resolution, &mut meter);
    let heat = column.heat_j_m2(&material) + column.removed_j_m2;
    let worst = |a: Lanes| ((a - account.absorbed_j_m2) / account.exchanged_j_m2).abs().largest();
    let (balance, trapezoid, removed_j_m2) = (worst(heat), worst(meter.integral_j_m2), column.removed_j_m2.largest());
    let outcomes = meter.watch.outcomes(&account);
    Result {
        balance,
        trapezoid,
        account,
        slabs: outcomes.iter().map(|o| o.events.of(Family::Slab).count()).sum(),
        removed_j_m2,
        fuel_spent: outcomes.iter().any(|o| o.fuel_spent),
        sphere,
        hottest_k: outcomes.iter().map(|o| o.peak_surface_k).fold(0.0, f64::max),
    }
}

/// Eight draws of a class between its corners; plates stay or leave as asked.
fn draws(tables: &Tables, rock: &str, body: &Body, class: ExposureClass, leaves_u: f64) -> [Draw; LANES] {
    std::array::from_fn(|l| {
        let share = 0.1 + 0.1 * l as f64;
        Draw { leaves_u, ..corner(table(tables, rock), body, class, (share, 1.0 - share)) }
    })
}

#[test]
fn balance_closes_on_every_law() {
    let tables = tables();
    let mut cases = 0;
    let (mut spheres, mut stripped) = (0, 0);
    for rock in ["granite", "sandstone", "chalk", "rhyolite", "basalt"] {
        for class in ExposureClass::ALL {
            for (moisture, radius_m, leaves_u) in [
                (Moisture::Dry, 0.75, 0.9),
                (Moisture::Dry, 0.75, 0.1),
                (Moisture::Damp, 0.4, 0.1),
                (Moisture::Wet, 0.12, 0.9),
                (Moisture::Dry, 0.05, 0.9),
            ] {
                let body = Body { moisture, ..boulder(radius_m) };
                let r = run(&tables, rock, &body, &draws(&tables, rock, &body, *class, leaves_u), 1);
                let name = format!("{rock}, {}, {moisture:?}, {radius_m} m, leaves {leaves_u}", class.word());
                assert!(r.balance < BALANCE, "{name}: {}", r.balance);
                assert!(r.hottest_k < 1600.0, "{name}: {} K, hotter than any flame", r.hottest_k);
                assert!(r.account.exchanged_j_m2.0.iter().all(|q| *q > 0.0), "{name}: nothing was exchanged");
                spheres += usize::from(r.sphere);
                stripped += usize::from(r.removed_j_m2 > 0.0);
                cases += 1;
            }
        }
    }
    assert_eq!(cases, 5 * 8 * 5);
    assert!(spheres > 20, "only {spheres} batches conducted in a sphere");
    assert!(stripped > 20, "only {stripped} batches lost a plate");
}

#[test]
fn reported_flux_adds_up_to_the_absorbed_heat() {
    let tables = tables();
    let mut worst = 0.0f64;
    for rock in ["granite", "chalk"] {
        for class in [ExposureClass::Grass, ExposureClass::Crown, ExposureClass::LogContact] {
            for moisture in [Moisture::Dry, Moisture::Wet] {
                let body = Body { moisture, ..boulder(0.75) };
                let r = run(&tables, rock, &body, &draws(&tables, rock, &body, class, 0.9), 40);
                assert!(r.trapezoid < TRAPEZOID, "{rock}, {}, {moisture:?}: {}", class.word(), r.trapezoid);
                worst = worst.max(r.trapezoid);
            }
        }
    }
    println!("trapezoid of the flux less absorbed heat: {worst:.1e} of the exchanged heat");
}

#[test]
fn no_face_takes_more_than_its_fuel_can_give() {
    // Limit .3 H w with H 18 MJ/kg (judgement; fire rules, step 7), for thin fuels under a hot class.
    let tables = tables();
    let body = boulder(0.75);
    for class in [ExposureClass::Crown, ExposureClass::HeavyDeadWood, ExposureClass::LogContact] {
        for fuel_kg_m2 in [0.2, 0.5, 1.0] {
            let limit = 0.3 * 18.0e6 * fuel_kg_m2;
            let mut batch = draws(&tables, "granite", &body, class, 0.9);
            let free = run(&tables, "granite", &body, &batch, 1);
            batch.iter_mut().for_each(|d| d.absorbed_limit_j_m2 = limit);
            let r = run(&tables, "granite", &body, &batch, 1);
            let most = r.account.absorbed_j_m2.largest();
            assert!(most <= limit * (1.0 + 1e-12), "{} {fuel_kg_m2}: {most} above {limit}", class.word());
            let would_be_spent = free.account.absorbed_j_m2.largest() > limit;
            assert!(!would_be_spent || r.fuel_spent, "{} {fuel_kg_m2}: the guard slept", class.word());
            assert!(r.balance < BALANCE, "balance {}", r.balance);
        }
    }
}

#[test]
fn plates_that_leave_take_their_heat_along() {
    let tables = tables();
    let body = boulder(0.75);
    let batch = draws(&tables, "sandstone", &body, ExposureClass::LogContact, 0.01);
    let r = run(&tables, "sandstone", &body, &batch, 1);
    assert!(r.slabs > 8, "{} slabs", r.slabs);
    assert!(r.removed_j_m2 > 1e6, "{} J/m2", r.removed_j_m2);
    assert!(r.balance < BALANCE, "balance {}", r.balance);
}

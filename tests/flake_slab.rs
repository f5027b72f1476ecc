//! Flakes, slabs, rinds and vapour against closed forms, quadrature and a steam library.

#[path = "support/reference.rs"]
mod reference;
mod support;

use spallcast::heat::boundary::Exchange;
use spallcast::heat::grid::Grid;
use spallcast::heat::material::HeatCurve;
use spallcast::numerics::lanes::Lanes;
use spallcast::spall::flake::{FlakeDraws, LABORATORY_VOLUME_M3, MEDIAN_RISK, Sites, closed_form_rise_k, scale_stress};
use spallcast::spall::rind::{buckling_rise_k, buckling_stress_pa};
use spallcast::spall::slab::{flaw_limited_pa, volume_scaled_pa};
use spallcast::spall::steam::saturation_pressure_pa;
use spallcast::stress::skin::membrane_force_n_m;
use spallcast::stress::sphere::Shells;
use support::{Steady, constant_rock, nothing, run};

/// Integrals on a fine grid: what the tail below .35 of the face's stress holds, for m of 8 and from 10 on.
const INTEGRAL_8: f64 = 0.011;
const INTEGRAL: f64 = 0.0025;
/// The check form takes s = s(0) exp(-x/L), a profile that the conduction solver does not make.
/// The tail counts here too, threefold on the mean depth.
const CHECK_FORM: f64 = 2.5e-3;
/// Rise at the first median flake under steady flux, from the solver's own profile.
const FIRST_MEDIAN: f64 = 2e-3;
const DOSE: f64 = 1e-3;
const PLATEAU: f64 = 0.01;
/// Fit of Wagner & Pruss against IAPWS-95.
const STEAM: f64 = 1e-3;

/// A draw with the scale stress 1 Pa and a site area of 1.
fn unit_draws(m: f64) -> FlakeDraws {
    FlakeDraws {
        modulus: m,
        per_scale: Lanes::ONE,
        site_area: Lanes::ONE,
        grain_m: 0.0,
        energy_floor_pa2_m: Lanes::ZERO,
        counted_risk: Lanes::ZERO,
        deepest_m: Lanes::splat(f64::INFINITY),
    }
}

/// A stretch that leaves a grid all but even.
const EVEN: f64 = 1e-4;

/// Risk and mean depth of a profile on a grid.
fn risk(draws: &FlakeDraws, grid: &Grid, stress: &[Lanes]) -> (Lanes, Lanes) {
    Sites::new(draws, grid).risk(draws, &grid.depth_m, stress, stress[0])
}

/// int x^2 s^m dx and its mean depth for a profile of unit length.
fn integral(m: f64, s: impl Fn(f64) -> f64, end: f64) -> (f64, f64) {
    const CELLS: usize = 4000;
    let grid = Grid::new(CELLS + 1, Lanes::splat(end), EVEN, Lanes::ZERO);
    let stress: Vec<Lanes> = grid.depth_m.iter().map(|x| Lanes::splat(s(x.0[0]))).collect();
    let (b, mean) = risk(&unit_draws(m), &grid, &stress);
    (b.0[0], mean.0[0])
}

fn ierfc(x: f64) -> f64 {
    (-x * x).exp() / std::f64::consts::PI.sqrt() - x * libm::erfc(x)
}

#[test]
fn integrals_of_four_profiles() {
    // Reference: mpmath quadrature, flake_integral.py. Lengths in L; constant flux has s = ierfc(x/2)/ierfc(0), constant
    // surface temperature s = erfc(x/2), with L = sqrt(kappa t).
    let rows = reference::table("flake_integral.csv");
    assert_eq!(rows.len(), 32);
    let mut broken = 0;
    for row in &rows {
        let m = row.number("weibull_modulus");
        let shape: fn(f64) -> f64 = match row.text("profile") {
            "exponential" => |x| (-x).exp(),
            "ramp" => |x| (1.0 - x).max(0.0),
            "constant_flux" => |x| ierfc(x) / ierfc(0.0),
            "constant_surface" => |x| libm::erfc(x),
            other => panic!("profile {other}"),
        };
        let (b, mean) = integral(m, shape, 3.0);
        let name = format!("{} m {m}", row.text("profile"));
        let limit = if m < 10.0 { INTEGRAL_8 } else { INTEGRAL };
        assert!((b / row.number("i2") - 1.0).abs() < limit, "{name}: {b} against {}", row.number("i2"));
        assert!((mean / row.number("mean_depth") - 1.0).abs() < 3.0 * limit, "{name}: mean depth {mean}");
        broken += usize::from(m.fract() != 0.0);
    }
    assert_eq!(broken, 4, "half-integer moduli");
}

#[test]
fn check_form_on_exponential_profiles_and_its_gamma_depth() {
    let mut compared = 0;
    for m in [10.0, 14.0, 20.0] {
        for (gradient, flaw) in [(5e3, 5.0), (20e3, 10.0), (60e3, 15.0)] {
            let (restraint, s0) = (0.5e6, 60e6);
            let rise = closed_form_rise_k(restraint, s0, m, flaw, gradient);
            // s = restraint rise exp(-x/L) with L = rise/gradient: its risk must be ln 2 and its mean depth 3 L/m.
            let length = rise / gradient;
            const CELLS: usize = 2000;
            let grid = Grid::new(CELLS + 1, Lanes::splat(2.0 * length), EVEN, Lanes::ZERO);
            let stress: Vec<Lanes> =
                grid.depth_m.iter().map(|x| Lanes::splat(restraint * rise * (-x.0[0] / length).exp())).collect();
            let draws = FlakeDraws {
                per_scale: Lanes::splat(1.0 / s0),
                site_area: Lanes::splat(std::f64::consts::PI * flaw * flaw),
                ..unit_draws(m)
            };
            let (b, mean) = risk(&draws, &grid, &stress);
            assert!((b.0[0] / MEDIAN_RISK - 1.0).abs() < CHECK_FORM, "m {m}: {}", b.0[0]);
            assert!((mean.0[0] / (3.0 * length / m) - 1.0).abs() < 3.0 * CHECK_FORM, "m {m}: depth {}", mean.0[0]);
            compared += 1;
        }
    }
    assert_eq!(compared, 9);
}

#[test]
fn first_median_flake_under_steady_flux() {
    // Reference: mpmath, full constant-flux profile, flake_integral.py. Here the profile is the solver's.
    let rows = reference::table("flake_first_median.csv");
    assert_eq!(rows.len(), 5);
    for row in &rows {
        let m = row.number("weibull_modulus");
        let s0 = scale_stress(row.number("spalling_to_laboratory_strength"), row.number("compressive_strength_pa"), m);
        assert!((s0 / row.number("scale_s0_pa_m3_1_m") - 1.0).abs() < 1e-8, "scale stress {s0}");
        let restraint =
            row.number("expansion_per_k") * row.number("youngs_modulus_pa") / (1.0 - row.number("poissons_ratio"));
        let flaw = row.number("flaw_radius_over_depth");
        let (k, q) = (row.number("conductivity_w_m_k"), row.number("flux_w_m2"));
        let draws = FlakeDraws {
            per_scale: Lanes::splat(1.0 / s0),
            site_area: Lanes::splat(std::f64::consts::PI * flaw * flaw),
            ..unit_draws(m)
        };
        let rho_c = 2.0e6;
        let curve = HeatCurve::constant();
        let rock = constant_rock(&curve, k, rho_c);
        let exchange = Exchange { flux_w_m2: Lanes::splat(q), ..nothing() };
        // ln B by time; bisection for ln 2.
        let at = |t: f64| {
            let (column, _) = run(
                &rock,
                &Steady { exchange, end_s: t, steps: 200 },
                300.0,
                240,
                8.0 * (k / rho_c * t).sqrt(),
                4.0,
                0.0,
            );
            let stress: Vec<Lanes> =
                column.temperature_k.iter().map(|t| (*t - Lanes::splat(300.0)) * restraint).collect();
            let (b, mean) = risk(&draws, &column.grid, &stress);
            (b.0[0], mean.0[0], column.temperature_k[0].0[0] - 300.0)
        };
        let (mut low, mut high) = (1.0, 20_000.0);
        for _ in 0..40 {
            let middle = f64::sqrt(low * high);
            if at(middle).0 < MEDIAN_RISK { low = middle } else { high = middle }
        }
        let (_, mean, rise) = at(low);
        let name = row.text("rock");
        assert!((rise / row.number("rise_full_k") - 1.0).abs() < FIRST_MEDIAN, "{name}: rise {rise}");
        assert!((mean * 1e3 / row.number("mean_depth_full_mm") - 1.0).abs() < 2.0 * FIRST_MEDIAN, "{name}: {mean}");
        let check = closed_form_rise_k(restraint, s0, m, flaw, q / k);
        assert!((check / row.number("rise_check_form_k") - 1.0).abs() < 1e-3, "{name}: check form {check}");
    }
    assert!((LABORATORY_VOLUME_M3 - 2.5e-4).abs() < 1e-18);
}

#[test]
fn force_follows_dose_and_tension_its_plateau() {
    // N = E alpha H / ((1 - nu) rho c), whatever the flux's history or the conductivity (derived); plateau 2 N/R.
    let (restraint, rho_c, radius) = (8e-6 * 50e9 / (1.0 - 0.24), 2.0e6, 5.0);
    let mut compared = 0;
    for k in [1.0, 2.5, 5.0] {
        for (q, t) in [(20e3, 50.0), (5e3, 200.0), (100e3, 10.0)] {
            let curve = HeatCurve::constant();
            let rock = constant_rock(&curve, k, rho_c);
            let exchange = Exchange { flux_w_m2: Lanes::splat(q), ..nothing() };
            let depth = 8.0 * (k / rho_c * t).sqrt();
            let (column, account) = run(&rock, &Steady { exchange, end_s: t, steps: 100 }, 300.0, 200, depth, 4.0, 0.0);
            let stress: Vec<Lanes> =
                column.temperature_k.iter().map(|t| (*t - Lanes::splat(300.0)) * restraint).collect();
            let force = membrane_force_n_m(&column.grid, &stress, stress.len()).0[0];
            let exact = restraint * account.absorbed_j_m2.0[0] / rho_c;
            assert!((force / exact - 1.0).abs() < DOSE, "k {k}: {force} against {exact}");
            // On a large sphere the tension below the skin is 2 N/R.
            let mut tension = vec![Lanes::ZERO; stress.len()];
            let shells = Shells::new(&column.grid, Lanes::splat(1.0 / radius));
            shells.normal_tension(&stress, stress.len(), &mut tension);
            let largest = tension.iter().map(|t| t.0[0]).fold(0.0, f64::max);
            assert!((largest / (2.0 * force / radius) - 1.0).abs() < PLATEAU, "k {k}: {largest}");
            compared += 1;
        }
    }
    assert_eq!(compared, 9);
}

#[test]
fn strengths_and_buckling_by_hand() {
    // (1e-5/(.6 4 pi .75^2 .02))^(1/10) 8 MPa = 8 (1.179e-4)^.1 = 3.237 MPa.
    assert!((volume_scaled_pa(8e6, 0.6, 0.75, 10.0) / 3.237e6 - 1.0).abs() < 1e-3);
    // 1.5 MPa sqrt(m) on a 150 mm flaw: 1.5 sqrt(pi/.6) = 3.432 MPa; a strong flawless rock keeps its own strength.
    assert!((flaw_limited_pa(8e6, 1.5e6, 0.150) / 3.432e6 - 1.0).abs() < 1e-3);
    assert_eq!(flaw_limited_pa(3e6, 1.5e6, 0.150), 3e6);
    // h/a 1/15, alpha 8e-6, nu .24: 1.2235/225/(8e-6 1.24) = 548.2 K; h/a 1/30: a quarter of it.
    assert!((buckling_rise_k(8e-6, 0.24, 15.0) - 548.2).abs() < 0.1);
    assert!((buckling_rise_k(8e-6, 0.24, 30.0) - 137.0).abs() < 0.1);
    // The stress form is the same statement: s_c = E alpha dT/(1 - nu).
    let rise = buckling_rise_k(8e-6, 0.24, 15.0);
    let stress = 50e9 * 8e-6 * rise / (1.0 - 0.24);
    assert!((buckling_stress_pa(50e9, 0.24, 15.0) / stress - 1.0).abs() < 1e-12);
}

#[test]
fn steam_against_an_independent_library() {
    let rows = reference::table("steam.csv");
    assert_eq!(rows.len(), 20);
    for row in &rows {
        let here = saturation_pressure_pa(row.number("temperature_c") + 273.15);
        let expected = row.number("saturation_pressure_iapws95_pa");
        assert!((here / expected - 1.0).abs() < STEAM, "{} C: {here}", row.number("temperature_c"));
    }
}

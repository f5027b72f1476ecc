//! Slab and sphere under convection, and the face held at a temperature, against closed forms.
//!
//! References: series of 60 terms in 30-digit arithmetic (`series_solutions.py`); first eigenvalues and coefficients as in
//! Incropera & DeWitt, table 5.1 (recalled, held in `series_first_term.csv`); half-space of Carslaw & Jaeger 1959 (recalled).

#[path = "support/reference.rs"]
mod reference;
mod support;

use spallcast::fire::pulse::TIED_FACE_W_M2_K;
use spallcast::heat::boundary::Exchange;
use spallcast::heat::material::HeatCurve;
use spallcast::numerics::lanes::Lanes;
use spallcast::numerics::table::interpolate;
use support::{Steady, constant_rock, nothing, run};

/// Difference in (T - Tgas)/(T0 - Tgas), which runs from 1 to 0: the contract's accuracy is .002.
const THETA: f64 = 0.001;
/// Handbook columns carry four decimals: half of the last, and rounding.
const HANDBOOK: f64 = 0.51e-4;
/// Share of the rise at a face held at a temperature.
const HELD_FACE: f64 = 0.001;

const K: f64 = 2.5;
const RHO_C: f64 = 2.0e6;
/// Half-thickness of the slab and radius of the sphere, m: a cobble.
const SIZE_M: f64 = 0.05;
const T0: f64 = 300.0;
const GAS: f64 = 700.0;

type Solved = ((String, f64, f64), Vec<(f64, f64)>);

#[test]
fn slab_and_sphere_under_convection() {
    let rows = reference::table("series_full.csv");
    assert_eq!(rows.len(), 588);
    let curve = HeatCurve::constant();
    let rock = constant_rock(&curve, K, RHO_C);
    let mut compared = 0;
    let mut worst = 0.0f64;
    // The last case solved: shape, Biot and Fourier number, and its profile.
    let mut solved: Option<Solved> = None;
    for row in &rows {
        let key = (row.text("shape").to_owned(), row.number("biot"), row.number("fourier"));
        if solved.as_ref().is_none_or(|(k, _)| *k != key) {
            let (shape, biot, fourier) = &key;
            let exchange =
                Exchange { h_w_m2_k: Lanes::splat(biot * K / SIZE_M), gas_k: Lanes::splat(GAS), ..nothing() };
            let forcing = Steady { exchange, end_s: fourier * SIZE_M * SIZE_M * RHO_C / K, steps: 400 };
            let curvature = if shape == "sphere" { 1.0 / SIZE_M } else { 0.0 };
            let (column, _) = run(&rock, &forcing, T0, 240, SIZE_M, 4.0, curvature);
            solved = Some((key.clone(), column.profile(0)));
        }
        let profile = &solved.as_ref().unwrap().1;
        let depth = (1.0 - row.number("place")) * SIZE_M;
        let theta = (interpolate(profile, depth) - GAS) / (T0 - GAS);
        let error = (theta - row.number("theta")).abs();
        assert!(error <= THETA, "{key:?} at {}: {theta} against {}", row.number("place"), row.number("theta"));
        worst = worst.max(error);
        compared += 1;
    }
    assert_eq!(compared, rows.len());
    println!("series: {compared} rows, worst {worst:.6}");
}

#[test]
fn late_cooling_follows_the_first_term_of_the_handbook() {
    // theta at the centre = C1 exp(-zeta1^2 Fo) once Fo is above .2.
    let rows = reference::table("series_first_term.csv");
    assert_eq!(rows.len(), 14);
    let curve = HeatCurve::constant();
    let rock = constant_rock(&curve, K, RHO_C);
    let (mut held, mut handbook) = (0, 0);
    for row in &rows {
        let (biot, fourier) = (row.number("biot"), 0.8);
        let exchange = Exchange { h_w_m2_k: Lanes::splat(biot * K / SIZE_M), gas_k: Lanes::splat(GAS), ..nothing() };
        let forcing = Steady { exchange, end_s: fourier * SIZE_M * SIZE_M * RHO_C / K, steps: 400 };
        let curvature = if row.text("shape") == "sphere" { 1.0 / SIZE_M } else { 0.0 };
        let (column, _) = run(&rock, &forcing, T0, 240, SIZE_M, 4.0, curvature);
        let centre = column.temperature_k[column.grid.len() - 1].0[0];
        let theta = (centre - GAS) / (T0 - GAS);
        let (zeta, c) = (row.number("zeta1"), row.number("c1"));
        assert!((theta - c * (-zeta * zeta * fourier).exp()).abs() <= THETA, "{} {biot}: {theta}", row.text("shape"));
        held += 1;
        let recalled = row.maybe("zeta1_handbook_recalled").zip(row.maybe("c1_handbook_recalled"));
        if let Some((z, c1)) = recalled {
            assert!((z - zeta).abs() <= HANDBOOK && (c1 - c).abs() <= HANDBOOK, "{biot}: {z} {c1}");
            handbook += 1;
        }
    }
    assert_eq!((held, handbook), (14, 10));
}

#[test]
fn half_space_under_three_boundaries() {
    let rows = reference::table("half_space.csv");
    assert_eq!(rows.len(), 126);
    let curve = HeatCurve::constant();
    let mut compared = 0;
    let mut worst = 0.0f64;
    for row in &rows {
        let (k, rho_c) = (row.number("conductivity_w_m_k"), row.number("heat_capacity_j_m3_k"));
        let (start_k, drive, t) =
            (row.number("initial_c") + 273.15, row.number("drive_c_or_w_m2"), row.number("time_s"));
        let exchange = match row.text("boundary") {
            // The face is tied to its temperature by a large coefficient, as a measured surface series is.
            "surface_temperature" => {
                Exchange { h_w_m2_k: Lanes::splat(TIED_FACE_W_M2_K), gas_k: Lanes::splat(drive + 273.15), ..nothing() }
            }
            "flux" => Exchange { flux_w_m2: Lanes::splat(drive), ..nothing() },
            "convection" => Exchange {
                h_w_m2_k: Lanes::splat(row.number("h_w_m2_k")),
                gas_k: Lanes::splat(drive + 273.15),
                ..nothing()
            },
            other => panic!("boundary {other}"),
        };
        let rock = constant_rock(&curve, k, rho_c);
        let depth = (8.0 * (k / rho_c * t).sqrt()).max(2.0 * row.number("depth_mm") * 1e-3);
        let (column, _) = run(&rock, &Steady { exchange, end_s: t, steps: 400 }, start_k, 320, depth, 4.0, 0.0);
        let rise = match row.text("boundary") {
            "surface_temperature" => drive + 273.15 - start_k,
            _ => column.temperature_k[0].0[0] - start_k,
        };
        let here = interpolate(&column.profile(0), row.number("depth_mm") * 1e-3) - 273.15;
        let error = ((here - row.number("temperature_c")) / rise).abs();
        assert!(
            error <= HELD_FACE,
            "{} {t} s {} mm: {here} against {}",
            row.text("boundary"),
            row.number("depth_mm"),
            row.number("temperature_c")
        );
        worst = worst.max(error);
        compared += 1;
    }
    assert_eq!(compared, rows.len());
    println!("half-space: {compared} rows, worst {worst:.6} of the rise");
}

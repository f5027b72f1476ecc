//! Conduction against closed forms: Carslaw & Jaeger 1959, section 2.4 to 2.9 (recalled), and the scheme's own order.

mod support;
use spallcast::heat::boundary::Exchange;
use spallcast::heat::material::HeatCurve;
use spallcast::numerics::lanes::Lanes;
use support::{Steady, constant_rock, nothing, run};

const K: f64 = 2.5;
const RHO_C: f64 = 2.12e6;
const T0: f64 = 293.15;
/// Share of the surface rise by which a converged run may differ: the contract's accuracy is 0.2 %.
const RISE_TOLERANCE: f64 = 0.0005;

/// ierfc(x) = exp(-x^2)/sqrt(pi) - x erfc(x).
fn ierfc(x: f64) -> f64 {
    (-x * x).exp() / std::f64::consts::PI.sqrt() - x * libm::erfc(x)
}

#[test]
fn constant_flux_into_a_half_space() {
    let curve = HeatCurve::constant();
    let rock = constant_rock(&curve, K, RHO_C);
    let (q, t) = (50e3, 60.0);
    let kappa = K / RHO_C;
    let forcing = Steady { exchange: Exchange { flux_w_m2: Lanes::splat(q), ..nothing() }, end_s: t, steps: 200 };
    let depth = 8.0 * (kappa * t).sqrt();
    let (column, account) = run(&rock, &forcing, T0, 200, depth, 3.0, 0.0);
    let surface = 2.0 * q / K * (kappa * t / std::f64::consts::PI).sqrt();
    for (z, temperature) in column.profile(0) {
        let exact = 2.0 * q / K * (kappa * t).sqrt() * ierfc(z / (2.0 * (kappa * t).sqrt()));
        assert!(
            (temperature - T0 - exact).abs() < RISE_TOLERANCE * surface,
            "z {z}: {} against {exact}",
            temperature - T0
        );
    }
    assert!((account.absorbed_j_m2.0[0] / (q * t) - 1.0).abs() < 1e-12);
}

#[test]
fn convection_into_a_half_space() {
    // fire.md-like check: h 100, gas 900 C, T0 20 C, 600 s, effusivity 2302.2: 538.6 C.
    let curve = HeatCurve::constant();
    let rock = constant_rock(&curve, K, RHO_C);
    let (h, gas, t) = (100.0, 900.0 + 273.15, 600.0);
    let forcing = Steady {
        exchange: Exchange { h_w_m2_k: Lanes::splat(h), gas_k: Lanes::splat(gas), ..nothing() },
        end_s: t,
        steps: 200,
    };
    let kappa = K / RHO_C;
    let (column, _) = run(&rock, &forcing, T0, 200, 8.0 * (kappa * t).sqrt(), 3.0, 0.0);
    let b = h * t.sqrt() / (K * RHO_C).sqrt();
    let exact = (gas - T0) * (1.0 - (b * b).exp() * libm::erfc(b));
    assert!((exact - (538.6 - 20.0)).abs() < 0.1);
    let rise = column.temperature_k[0].0[0] - T0;
    assert!((rise - exact).abs() < RISE_TOLERANCE * exact, "{rise} against {exact}");
}

/// Error of the surface rise under convection against the closed form.
fn convection_error(nodes: usize, steps: usize) -> f64 {
    let curve = HeatCurve::constant();
    let rock = constant_rock(&curve, K, RHO_C);
    let (h, gas, t) = (100.0, 1173.15, 600.0);
    let exchange = Exchange { h_w_m2_k: Lanes::splat(h), gas_k: Lanes::splat(gas), ..nothing() };
    let kappa = K / RHO_C;
    let (column, _) = run(&rock, &Steady { exchange, end_s: t, steps }, T0, nodes, 8.0 * (kappa * t).sqrt(), 3.0, 0.0);
    let b = h * t.sqrt() / (K * RHO_C).sqrt();
    column.temperature_k[0].0[0] - T0 - (gas - T0) * (1.0 - (b * b).exp() * libm::erfc(b))
}

#[test]
fn observed_order_is_two_in_time_and_three_in_space() {
    // Time: differences between successive halvings on one fine grid, so that the grid's error cancels.
    let e: Vec<f64> = [40, 80, 160].iter().map(|s| convection_error(400, *s)).collect();
    let order = ((e[0] - e[1]) / (e[1] - e[2])).log2();
    println!("time {e:?} order {order}");
    assert!((1.8..2.3).contains(&order), "order in time {order}");
    // Space: fourth inside, third from the face cell on; here the face leads.
    let e: Vec<f64> = [21, 41, 81].iter().map(|n| convection_error(*n, 3000)).collect();
    let order = ((e[0] - e[1]) / (e[1] - e[2])).log2();
    println!("space {e:?} order {order}");
    assert!((2.8..4.2).contains(&order), "order in space {order}");
}

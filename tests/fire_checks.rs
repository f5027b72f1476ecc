//! The fire rules against the check table of the method, formula by formula, and the crown response of a granite.
//!
//! Sources beside each row; "hand" is a hand calculation from the formula.

#[path = "support/reference.rs"]
mod reference;
mod support;

use spallcast::assess::batch::DECAY_LENGTHS;
use spallcast::fire::flame;
use spallcast::fire::pulse::{Level, Pulse};
use spallcast::heat::boundary::Exchange;
use spallcast::heat::column::Column;
use spallcast::heat::grid::Grid;
use spallcast::heat::march::{March, Moment, Observer, Verdict};
use spallcast::heat::material::HeatCurve;
use spallcast::heat::step::Stepper;
use spallcast::numerics::lanes::Lanes;
use spallcast::units::STEFAN_BOLTZMANN_W_M2_K4;
use support::{Steady, constant_rock, nothing, run};

/// Half a unit of the last printed digit of the check table, and a little.
const PRINTED: f64 = 0.51;
/// The table says 2 % for the crown response.
const CROWN: f64 = 0.02;

struct Check {
    what: &'static str,
    value: f64,
    expected: f64,
    /// One unit of the last printed digit.
    digit: f64,
}

fn check(what: &'static str, value: f64, expected: f64, digit: f64) -> Check {
    Check { what, value, expected, digit }
}

/// Rise of the face of a half-space of effusivity 2302.2 under a steady exchange.
fn face_rise_k(exchange: Exchange, time_s: f64) -> f64 {
    let (k, rho_c) = (2.5, 2302.2f64.powi(2) / 2.5);
    let curve = HeatCurve::constant();
    let rock = constant_rock(&curve, k, rho_c);
    let forcing = Steady { exchange, end_s: time_s, steps: 300 };
    let (column, _) = run(&rock, &forcing, 293.15, 240, 8.0 * (k / rho_c * time_s).sqrt(), 4.0, 0.0);
    column.temperature_k[0].0[0] - 293.15
}

#[test]
fn every_row_of_the_check_table() {
    let black = |t: f64| STEFAN_BOLTZMANN_W_M2_K4 * t.powi(4) / 1e3;
    // EN 1991-1-2, 3.1: 273 offset and sigma 5.67e-8. Ours has 273.15 and CODATA 2018, a difference of .03 %: the gas is
    // given at 800 C + 273 K and the radiation is scaled to their sigma.
    let net = |emissivity: f64, h: f64| {
        let exchange = Exchange {
            emissivity: Lanes::splat(emissivity),
            irradiance_w_m2: Lanes::splat(STEFAN_BOLTZMANN_W_M2_K4 * 1073f64.powi(4)),
            h_w_m2_k: Lanes::splat(h),
            gas_k: Lanes::splat(1073.0),
            ..nothing()
        };
        exchange.flux_into(Lanes::splat(373.0)).0[0] / 1e3
    };
    let flux = Exchange { flux_w_m2: Lanes::splat(50e3), ..nothing() };
    let gas = Exchange { h_w_m2_k: Lanes::splat(100.0), gas_k: Lanes::splat(1173.15), ..nothing() };
    let rows = [
        check("residence of a 6 mm particle (Anderson 1969)", flame::particle_residence_s(0.006), 113.4, 0.1),
        check("384/S, S 1500 1/ft (Anderson 1969)", flame::particle_residence_from_ratio_s(1500.0), 15.36, 0.01),
        check("I = H w R (Byram 1959), kW/m", flame::fireline_intensity_w_m(18e6, 1.2, 0.1) / 1e3, 2160.0, 1.0),
        check(".0775 I^.46 at 500 kW/m (Byram 1959)", flame::flame_length_m(500e3), 1.352, 0.001),
        check(".0775 I^.46 at 10 000 kW/m (Byram 1959)", flame::flame_length_m(10_000e3), 5.362, 0.001),
        check("259.8 L^2.174 at 1 m (hand)", flame::intensity_of_flame_w_m(1.0) / 1e3, 259.8, 0.1),
        check("EN 1991-1-2 external curve, 5 min", flame::en_external_fire_c(5.0), 588.46, 0.01),
        check("EN 1991-1-2 external curve, 30 min", flame::en_external_fire_c(30.0), 679.97, 0.01),
        check("EN 1991-1-2 standard curve, 5 min", flame::en_standard_fire_c(5.0), 576.41, 0.01),
        check("EN 1991-1-2 standard curve, 30 min", flame::en_standard_fire_c(30.0), 841.80, 0.01),
        check("EN 1991-1-2 net convective flux, kW/m2", net(0.0, 25.0), 17.500, 0.001),
        check(
            "EN 1991-1-2 net radiative flux, kW/m2",
            net(0.8, 0.0) * 5.67e-8 / STEFAN_BOLTZMANN_W_M2_K4,
            59.249,
            0.001,
        ),
        check("sigma T^4 at 1000 K (hand)", black(1000.0), 56.70, 0.01),
        check("sigma T^4 at 1200 K (hand)", black(1200.0), 117.58, 0.01),
        check("flame emissivity, 1 m (recalled)", flame::flame_emissivity(1.0), 0.393, 0.001),
        check("flame emissivity, 3 m (recalled)", flame::flame_emissivity(3.0), 0.777, 0.001),
        check("view of a front, base (recalled)", flame::front_view_factor(100.0, 10.0, 10.0, 0.0), 0.3520, 0.0001),
        check("view of a front, middle (recalled)", flame::front_view_factor(100.0, 10.0, 10.0, 5.0), 0.4456, 0.0001),
        check("2 q sqrt(t/pi)/e (Carslaw & Jaeger 1959), K", face_rise_k(flux, 60.0), 189.8, 0.1),
        check("convective face (Carslaw & Jaeger 1959), C", face_rise_k(gas, 600.0) + 20.0, 538.6, 0.1),
        check("adiabatic face (hand), C", flame::adiabatic_surface_k(0.9, 70e3, 1173.15, 30.0) - 273.15, 794.0, 1.0),
        check("rain, 10 mm/h (hand), kW/m2", flame::rain_cap_w_m2(10.0) / 1e3, 7.20, 0.01),
    ];
    assert_eq!(rows.len(), 22, "values of the check table, the crown response apart");
    for row in &rows {
        let error = (row.value - row.expected).abs() / row.digit;
        assert!(error <= PRINTED, "{}: {} against {}", row.what, row.value, row.expected);
    }
    // The trap in public code: 384/S is minutes.
    assert!(rows[1].value > 15.0);
}

/// Hottest temperature at three depths.
struct Peaks {
    depth_m: [f64; 3],
    peak_k: [f64; 3],
}

impl Observer for Peaks {
    fn see(&mut self, column: &mut Column, _moment: &Moment) -> Verdict {
        let profile = column.profile(0);
        for (peak, z) in self.peak_k.iter_mut().zip(self.depth_m) {
            *peak = peak.max(spallcast::numerics::table::interpolate(&profile, z));
        }
        Verdict::Continue
    }
}

#[test]
fn crown_response_of_a_granite_at_three_depths() {
    // k 2.5, rho c 2.12e6 constant, class medians: 413, 211 and 136 C at 0, 10 and 20 mm within 2 %. The independent
    // reference (pulse_peaks.csv) shows that the class's h through the decay is what gives these; so does this pulse
    // until its exchange has faded to a twentieth.
    let ambient_k = 298.15;
    let level =
        Level { irradiance_w_m2: Lanes::splat(120e3), gas_k: Lanes::splat(1273.15), h_w_m2_k: Lanes::splat(35.0) };
    let pulse = Pulse {
        growth_s: Lanes::splat(11.25),
        flaming_s: Lanes::splat(45.0),
        residence_s: Lanes::splat(45.0),
        decay_s: Lanes::splat(60.0),
        flaming: level,
        residual: level,
        ambient_k: Lanes::splat(ambient_k),
        emissivity: Lanes::splat(0.9),
        rain_cap_w_m2: 0.0,
    };
    let curve = HeatCurve::constant();
    let rock = constant_rock(&curve, 2.5, 2.12e6);
    let depth = 6.0 * (2.5 / 2.12e6 * (45.0 + DECAY_LENGTHS * 60.0f64)).sqrt();
    let mut column =
        Column::uniform(Grid::new(240, Lanes::splat(depth), 6.0, Lanes::ZERO), &rock, Lanes::splat(ambient_k));
    let mut peaks = Peaks { depth_m: [0.0, 0.010, 0.020], peak_k: [0.0; 3] };
    let march = March { refine: 10, absorbed_limit_j_m2: Lanes::splat(f64::INFINITY) };
    let mut stepper = Stepper::new(&column.grid, &rock);
    march.run(&mut column, &rock, &pulse, &mut stepper, &mut peaks);
    let rows = reference::table("pulse_peaks.csv");
    assert_eq!(rows.len(), 15);
    let row = rows.iter().find(|r| r.text("reading") == "constant_class_h_25").expect("the reading of the table");
    let mut compared = 0;
    for (i, (column, printed)) in
        [("peak_0mm_c", 413.0), ("peak_10mm_c", 211.0), ("peak_20mm_c", 136.0)].into_iter().enumerate()
    {
        let here = peaks.peak_k[i] - 273.15;
        assert!((here / printed - 1.0).abs() <= CROWN, "{column}: {here} against {printed}");
        // Against SciPy on the same pulse, tighter; the difference is the h of still air once the fire has faded.
        assert!((here / row.number(column) - 1.0).abs() <= 0.002, "{column}: {here} against {}", row.number(column));
        compared += 1;
    }
    assert_eq!(compared, 3);
}

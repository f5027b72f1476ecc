//! Normal tension in the sphere, under a cap and under a patch, against closed forms and finite elements.
//!
//! References: Timoshenko & Goodier (recalled) for the solid sphere; axisymmetric finite elements by scikit-fem,
//! `stress_sphere_fem.py`, whose own error is under .3 %.

#[path = "support/reference.rs"]
mod reference;

use spallcast::heat::grid::Grid;
use spallcast::numerics::lanes::Lanes;
use spallcast::stress::patch::{Plan, Stack};
use spallcast::stress::sphere::{CAP_FACTOR_SHARE, CAP_FACTOR_SKIN, Shells, cap_factor};

/// A stretch that leaves a grid all but even.
const EVEN: f64 = 1e-4;
/// Of alpha E dT/(1 - nu): 2000 even cells, the centre left out.
const SPHERE: f64 = 5e-5;
/// The finite elements of the whole sphere against the closed form.
const SPHERE_FEM: f64 = 2e-4;
/// The physics page claims 4 % for the cap factor in its range; it holds for exponential profiles below d/R .14 and up to
/// 6 % over both profiles. The asserted numbers are the ones found.
const CAP_EXPONENTIAL: f64 = 5.5;
const CAP_BOTH: f64 = 6.5;
/// Closed forms of the patch against quadrature of the point solutions.
const PATCH: f64 = 1e-6;

/// Tension at evenly spaced depths of a unit sphere with skin stress `s(x)`.
fn sphere(s: impl Fn(f64) -> f64) -> Vec<(f64, f64)> {
    const CELLS: usize = 2000;
    let grid = Grid::new(CELLS + 1, Lanes::ONE, EVEN, Lanes::ONE);
    let stress: Vec<Lanes> = grid.depth_m.iter().map(|x| Lanes::splat(s(x.0[0]))).collect();
    let mut tension = vec![Lanes::ZERO; grid.len()];
    Shells::new(&grid, Lanes::ONE).normal_tension(&stress, grid.len(), &mut tension);
    grid.depth_m.iter().zip(&tension).map(|(x, t)| (x.0[0], t.0[0])).collect()
}

fn at(profile: &[(f64, f64)], x: f64) -> f64 {
    spallcast::numerics::table::interpolate(profile, x)
}

/// erfc(x/(d sqrt pi)) and exp(-x/d) both have a force of d.
fn skin(profile: &str, d: f64) -> Box<dyn Fn(f64) -> f64> {
    match profile {
        "exponential" => Box::new(move |x| (-x / d).exp()),
        "erfc" => Box::new(move |x| libm::erfc(x / (d * std::f64::consts::PI.sqrt()))),
        other => panic!("profile {other}"),
    }
}

#[test]
fn uniform_and_parabolic_spheres() {
    // A sphere that is evenly hot is free of stress.
    for (x, tension) in sphere(|_| 1.0) {
        assert!(x > 0.9 || tension.abs() < SPHERE, "{x}: {tension}");
    }
    // T = (r/R)^2: s_r = (2/5)(1 - (r/R)^2) (hand calculation from the two integrals).
    for (x, tension) in sphere(|x| (1.0 - x) * (1.0 - x)) {
        let exact = 0.4 * (1.0 - (1.0 - x) * (1.0 - x));
        assert!(x > 0.9 || (tension - exact).abs() < SPHERE, "{x}: {tension} against {exact}");
    }
}

#[test]
fn radial_profiles_against_finite_elements() {
    let rows = reference::table("sphere_profile.csv");
    assert_eq!(rows.len(), 50);
    let mut compared = 0;
    let mut worst = 0.0f64;
    for row in &rows {
        let name = row.text("profile");
        let d = || name.rsplit('_').next().unwrap().parse::<f64>();
        let profile: Box<dyn Fn(f64) -> f64> = match name {
            "uniform" => Box::new(|_| 1.0),
            "parabolic_hot_skin" => Box::new(|x| (1.0 - x) * (1.0 - x)),
            "parabolic_hot_core" => Box::new(|x| 1.0 - (1.0 - x) * (1.0 - x)),
            n if n.starts_with("erfc") => skin("erfc", d().unwrap()),
            n if n.starts_with("exponential") => skin("exponential", d().unwrap()),
            other => panic!("profile {other}"),
        };
        let here = at(&sphere(profile), row.number("depth_over_radius"));
        let (closed, fem) = (row.number("radial_closed"), row.number("radial_fem"));
        assert!((here - closed).abs() < SPHERE, "{name}: {here} against {closed}");
        assert!((here - fem).abs() < SPHERE_FEM, "{name}: {here} against finite elements {fem}");
        worst = worst.max((here - fem).abs());
        compared += 1;
    }
    assert_eq!(compared, rows.len());
    println!("sphere profiles: {compared} rows, worst {worst:.1e} of alpha E dT/(1 - nu)");
}

#[test]
fn cap_factor_holds_in_its_range_and_fails_as_stated() {
    let rows = reference::table("cap_factor.csv");
    assert_eq!(rows.len(), 106);
    // Largest and smallest deviation, %, by group.
    let mut inside = [(0.0f64, 0.0f64); 2];
    let (mut small_thin, mut small_tenth, mut thick) = (0.0f64, 0.0f64, 0.0f64);
    let mut counted = 0;
    for row in &rows {
        let (d, f) = (row.number("d_over_radius"), row.number("heated_share"));
        // Largest tension within a quarter radius, as the drive is judged.
        let closed = sphere(skin(row.text("profile"), d))
            .into_iter()
            .filter(|(x, _)| *x <= 0.25)
            .map(|(_, t)| t)
            .fold(0.0, f64::max);
        assert!((closed / row.number("closed_max") - 1.0).abs() < 1e-3, "{d} {f}: {closed}");
        let deviation =
            (cap_factor(Lanes::splat(f), Lanes::splat(d)).0[0] * closed / row.number("fem_max") - 1.0) * 100.0;
        assert!((deviation - row.number("deviation_c_pct")).abs() < 0.2, "{d} {f}: {deviation}");
        counted += 1;
        if CAP_FACTOR_SKIN.contains(&d) && CAP_FACTOR_SHARE.contains(&f) {
            let group = &mut inside[usize::from(row.text("profile") == "erfc")];
            *group = (group.0.min(deviation), group.1.max(deviation));
            let limit = if row.text("profile") == "erfc" { CAP_BOTH } else { CAP_EXPONENTIAL };
            assert!(deviation.abs() <= limit, "{} d/R {d}, f {f}: {deviation} %", row.text("profile"));
        } else if f <= 0.05 && d <= 0.1 {
            small_thin = small_thin.min(deviation);
        } else if f == 0.1 && d <= 0.1 {
            small_tenth = small_tenth.min(deviation);
        } else if f >= 0.1 && d >= 0.2 {
            thick = thick.max(deviation);
        }
    }
    assert_eq!(counted, rows.len());
    println!("cap factor inside its range: exponential {:?} %, erfc {:?} %", inside[0], inside[1]);
    println!("outside: f <= .05 {small_thin:.0} %, f .1 {small_tenth:.0} %, d/R >= .2 {thick:.0} %");
    // Where it fails, so that the page stays true: small caps are underrated by up to 39 %, thick skins overrated by 20 %.
    assert!((-40.0..-35.0).contains(&small_thin), "{small_thin}");
    assert!((-11.0..0.0).contains(&small_tenth), "{small_tenth}");
    assert!((15.0..22.0).contains(&thick), "{thick}");
}

/// Sheets are tried at a few depths, up to 2 % below the peak between them, and the elements themselves are good to 1 %.
const STACK: f64 = 0.03;

#[test]
fn patch_maxima_and_where_the_thin_form_fails() {
    // Closed maxima: N/(pi a) at z = a for the strip, .558 N/a at .82 a for the disc (hand calculation).
    let a = 0.3;
    assert!((Plan::Strip.peak_tension_per_force(a) * std::f64::consts::PI * a - 1.0).abs() < 1e-12);
    assert!((Plan::Disc.peak_tension_per_force(a) * a - 0.5577).abs() < 1e-4);
    for plan in [Plan::Strip, Plan::Disc] {
        let peak = plan.peak_tension_per_force(a);
        for z in [0.98, 0.99, 1.01, 1.02].map(|s| s * plan.peak_depth() * a) {
            assert!(plan.tension_per_force(a, z) < peak, "{plan:?} {z}");
        }
    }
    let rows = reference::table("patch.csv");
    assert_eq!(rows.len(), 28);
    let (mut points, mut elements) = (0, 0);
    for row in &rows {
        let plan = if row.text("patch") == "disc" { Plan::Disc } else { Plan::Strip };
        if let Some(depth) = row.maybe("depth") {
            let here = plan.tension_per_force(1.0, depth);
            assert!((here / row.number("point_solutions") - 1.0).abs() < PATCH, "{plan:?} {depth}: {here}");
            points += 1;
        } else {
            let (skin, fem) = (row.number("skin_over_half_width"), row.number("fem_max"));
            let high = (plan.peak_tension_per_force(1.0) / fem - 1.0) * 100.0;
            assert!((high - row.number("deviation_thin_pct")).abs() < 0.1, "{plan:?} {skin}: {high}");
            // The thin form is an upper bound that is within 15 % for skins under a twentieth of the patch.
            assert!(high > 0.0 && (skin > 0.05 || high < 15.0), "{plan:?} {skin}: {high} %");
            // The stack of sheets holds for every skin: unit force, s(0) = 1/d.
            let stress = |c: f64| match row.text("profile") {
                "exponential" => libm::exp(-c / skin) / skin,
                _ => libm::erfc(c / (skin * std::f64::consts::PI.sqrt())) / skin,
            };
            let grid = Grid::new(400, Lanes::splat(10.0 * skin), EVEN, Lanes::ZERO);
            let sheets: Vec<Lanes> = grid.depth_m.iter().map(|c| Lanes::splat(stress(c.0[0]))).collect();
            let stack = Stack::new(plan, Lanes::ONE, Lanes::splat(f64::INFINITY), &grid);
            let stacked = stack.largest_tension_pa(&sheets, grid.len()).0[0];
            assert!((stacked / fem - 1.0).abs() < STACK, "{plan:?} {skin}: {stacked} against {fem}");
            elements += 1;
        }
    }
    assert_eq!((points, elements), (8, 20));
}

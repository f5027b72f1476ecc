//! Temperature laws against published forms and figures evaluated beforehand.

use approx::assert_relative_eq;
use spallcast::rock::laws::{self, Resistivity, VosteenForm};
use spallcast::rock::{Catalogue, ConductivityLaw, Property};
use spallcast::units::{STEFAN_BOLTZMANN_W_M2_K4, kelvin};

/// Published figures carry four or five digits; this is their rounding (relative).
const ROUNDING: f64 = 1e-4;
/// Figures given to a part in a thousand (relative).
const THOUSANDTH: f64 = 1e-3;
/// Handbook arithmetic on three-digit figures (relative).
const HANDBOOK: f64 = 5e-3;
/// Algebra in doubles: a few dozen operations, each good to 1e-16 (relative).
const ALGEBRA: f64 = 1e-13;
/// Basalt specific heat of the mineral mixture against measured basalt: modal spread of basalts (relative).
const BASALT_MODES: f64 = 0.03;
/// Catalogue rows are rounded medians of a Monte Carlo over k, rho and c (relative).
const DIFFUSIVITY_ROW: f64 = 0.02;

fn close(found: f64, expected: f64, tolerance: f64) {
    assert_relative_eq!(found, expected, epsilon = 0.0, max_relative = tolerance);
}

/// How a row of the published check values is held.
enum Held {
    /// Computed here: value found, value expected, relative tolerance.
    Values(Vec<(f64, f64, f64)>),
    /// Catalogue medians (found) inside a range.
    Inside(Vec<f64>, f64, f64),
    /// Not part of the rock catalogue; held elsewhere or not used by the program.
    Elsewhere(&'static str),
}

/// Every row of the project's list of published check values for rock, with its source.
fn published_rows() -> Vec<(&'static str, &'static str, Held)> {
    use Held::{Elsewhere, Inside, Values};
    let catalogue = Catalogue::embedded();
    let median = |rock: &str, p| catalogue.rock(rock).unwrap().figure(p).distribution.centre;
    let crystalline = |t_c| laws::vosteen(3.0, t_c, VosteenForm::Crystalline);
    let sekiguchi = |t_c| laws::sekiguchi(3.0, kelvin(t_c));
    let quartz = |t_c| 100.0 * laws::quartz_linear_strain(kelvin(20.0), kelvin(t_c));
    let basalt_ratio = |t_k| catalogue.rock("basalt").unwrap().specific_heat_ratio(t_k);
    let drury = ["granite", "gneiss", "schist", "basalt", "gabbro", "andesite", "rhyolite"];
    vec![
        ("Stefan-Boltzmann constant", "CODATA 2018", Values(vec![(STEFAN_BOLTZMANN_W_M2_K4, 5.670374419e-8, ALGEBRA)])),
        ("molar gas constant", "CODATA 2018", Elsewhere("no formula of the program uses it")),
        (
            "black-body flux at 1073.15 K",
            "sigma T^4",
            Values(vec![(STEFAN_BOLTZMANN_W_M2_K4 * 1073.15_f64.powi(4), 75206.2, 1e-5)]),
        ),
        (
            "diffusivity at 298.15 K, m2/s",
            "Whittington et al. 2009",
            Values(vec![(laws::whittington_diffusivity(298.15), 1.8407e-6, ROUNDING)]),
        ),
        (
            "specific heat at 298.15 K",
            "Whittington et al. 2009",
            Values(vec![(laws::whittington_specific_heat(298.15), 761.1, 0.1 / 761.1)]),
        ),
        (
            "specific heat at 1073.15 K",
            "Whittington et al. 2009",
            Values(vec![(laws::whittington_specific_heat(1073.15), 1190.3, 0.1 / 1190.3)]),
        ),
        (
            "crystalline k25 3.0: k0, k(100), k(300), k(500)",
            "Vosteen & Schellschmidt 2003",
            Values(vec![
                (laws::vosteen_k0(3.0, VosteenForm::Crystalline), 3.0825, ROUNDING),
                (crystalline(100.0), 2.6717, ROUNDING),
                (crystalline(300.0), 2.0810, ROUNDING),
                (crystalline(500.0), 1.7042, ROUNDING),
            ]),
        ),
        (
            "k20 3.0: k(20), k(300), k(600)",
            "Sekiguchi 1984",
            Values(vec![
                (sekiguchi(20.0), 2.9997, ROUNDING),
                (sekiguchi(300.0), 2.2921, ROUNDING),
                (sekiguchi(600.0), 2.0376, ROUNDING),
            ]),
        ),
        (
            "felsic A + B/(350 + T) at 20 and 500 C",
            "Zoth & Haenel 1988 in Clauser & Huenges 1995",
            Values(vec![
                (laws::zoth_haenel_felsic(20.0), 2.8211, ROUNDING),
                (laws::zoth_haenel_felsic(500.0), 1.5894, ROUNDING),
            ]),
        ),
        ("granite at 400 C", "Seipold 1998", Values(vec![(laws::seipold_granite(400.0), 2.1053, ROUNDING)])),
        (
            "specific heat ratio at 100, 300, 500, 800 C",
            "Waples & Waples 2004",
            Values(
                [(100.0, 1.1575), (300.0, 1.4201), (500.0, 1.5414), (800.0, 1.5837)]
                    .map(|(t_c, ratio)| (laws::waples_ratio(t_c), ratio, ROUNDING))
                    .to_vec(),
            ),
        ),
        (
            // 880.606 at 400 K over 742 at 300 K (the same report, as quoted in the catalogue's locator), against the
            // ratio of the catalogue's mineral mixture: a cross-check of the table, not of a formula.
            "basalt specific heat at 400 K over 300 K",
            "Robertson & Hemingway 1995",
            Values(vec![(basalt_ratio(400.0) / basalt_ratio(300.0), 880.606 / 742.0, BASALT_MODES)]),
        ),
        (
            "quartz strain 20 to 300, 500, 573, 600 C, percent",
            "Holland & Powell 2011",
            Values(
                [(300.0, 0.4172), (500.0, 0.8882), (573.0, 1.3383), (600.0, 1.3921)]
                    .map(|(t_c, percent)| (quartz(t_c), percent, THOUSANDTH))
                    .to_vec(),
            ),
        ),
        (
            "Barre granite diffusivity",
            "Incropera & DeWitt A.3",
            Values(vec![(laws::diffusivity(2.79, 2630.0, 775.0), 1.369e-6, HANDBOOK)]),
        ),
        (
            "Halston marble diffusivity",
            "Incropera & DeWitt A.3",
            Values(vec![(laws::diffusivity(2.80, 2680.0, 830.0), 1.259e-6, HANDBOOK)]),
        ),
        (
            "diffusivity of crystalline rock",
            "Drury 1987",
            Inside(drury.map(|r| median(r, Property::Diffusivity)).to_vec(), 0.6e-6, 1.9e-6),
        ),
        (
            "Weibull modulus of basalt from scatter",
            "Schultz 1995",
            Values(vec![(laws::weibull_modulus_from_scatter(14.5, 3.3), 4.83, 0.01 / 4.83)]),
        ),
        ("dry air at 300 K", "CoolProp", Elsewhere("no formula of the program uses air properties")),
        ("semi-infinite solid, constant flux", "Carslaw & Jaeger 1959", Elsewhere("held by the conduction tests")),
    ]
}

#[test]
fn published_check_values() {
    let rows = published_rows();
    assert_eq!(rows.len(), 19, "rows of the check list");
    let (mut computed, mut elsewhere) = (0, 0);
    for (quantity, source, held) in rows {
        println!("{quantity} [{source}]");
        match held {
            Held::Values(values) => {
                computed += 1;
                assert!(!values.is_empty());
                for (found, expected, tolerance) in values {
                    close(found, expected, tolerance);
                }
            }
            Held::Inside(found, least, most) => {
                computed += 1;
                assert!(found.iter().all(|v| (least..=most).contains(v)), "{found:?}");
            }
            Held::Elsewhere(why) => {
                println!("  not here: {why}");
                elsewhere += 1;
            }
        }
    }
    assert_eq!((computed, elsewhere), (16, 3));
}

#[test]
fn every_law_passes_through_the_sampled_value() {
    let mut cases = 0;
    for law in ConductivityLaw::ALL {
        for k20 in [0.2, 0.3, 0.5, 0.95, 1.5, 2.5, 2.9, 5.3, 8.0, 10.0] {
            let w = laws::resistivity(law, k20);
            close(laws::conductivity(&w, kelvin(20.0)), k20, ALGEBRA);
            cases += 1;
        }
    }
    assert_eq!(cases, 40);
}

/// A rock whose 20 C value lies on the published law of k25 = 2.5 follows that law: k0 = .53 x 2.5 + .5 sqrt(1.13 x 6.25 -
/// .42 x 2.5) (crystalline), k(T) = k0/(.99 + T(.003 - .0042/k0)), by hand.
#[test]
fn the_law_through_k20_is_the_published_one() {
    // Four turns of the anchoring leave two digits each.
    const ANCHORING: f64 = 1e-7;
    let by_hand = |linear: f64, square: f64, first: f64, a: f64, b: f64, t_c: f64| {
        let k0 = linear * 2.5 + 0.5 * (square * 6.25 - first * 2.5).sqrt();
        k0 / (0.99 + t_c * (a - b / k0))
    };
    for t_c in [20.0, 100.0, 300.0, 500.0, 700.0] {
        let crystalline = |t: f64| by_hand(0.53, 1.13, 0.42, 0.003, 0.0042, t);
        let w = laws::resistivity(ConductivityLaw::Crystalline, crystalline(20.0));
        close(laws::conductivity(&w, kelvin(t_c)), crystalline(t_c), ANCHORING);
        let sedimentary = |t: f64| by_hand(0.54, 1.16, 0.39, 0.0034, 0.0039, t);
        let w = laws::resistivity(ConductivityLaw::Sedimentary, sedimentary(20.0));
        close(laws::conductivity(&w, kelvin(t_c)), sedimentary(t_c), ANCHORING);
    }
}

#[test]
fn resistivity_is_linear_and_clamped() {
    for law in [ConductivityLaw::Crystalline, ConductivityLaw::Sedimentary] {
        let Resistivity::Linear { w0, w1_per_k } = laws::resistivity(law, 3.0) else { panic!("Vosteen is linear") };
        assert!(w0 > 0.0 && w1_per_k > 0.0);
        // Below k0 = b/a (1.4 and 1.15) the slope is clamped at 0: constant. The root's argument is negative below .37.
        for k20 in [0.2, 0.3, 0.9] {
            let Resistivity::Linear { w0, w1_per_k } = laws::resistivity(law, k20) else { panic!() };
            assert_eq!(w1_per_k, 0.0);
            close(w0, 1.0 / k20, ALGEBRA);
        }
    }
    close(laws::vosteen_k0(0.3, VosteenForm::Crystalline), 0.53 * 0.3, ALGEBRA);
    let constant = Resistivity::Linear { w0: 1.0 / 1.6, w1_per_k: 0.0 };
    assert_eq!(laws::resistivity(ConductivityLaw::Constant, 1.6), constant);
}

#[test]
fn sekiguchi_of_chalk_rises_and_never_stops_conducting() {
    // Unclamped at .95: the scaled law is the published one times k20/k(20).
    let w = laws::resistivity(ConductivityLaw::LowConductivity, 0.95);
    let scale = 0.95 / laws::sekiguchi(0.95, kelvin(20.0));
    close(laws::conductivity(&w, kelvin(500.0)), scale * laws::sekiguchi(0.95, kelvin(500.0)), ROUNDING);
    assert!(laws::conductivity(&w, kelvin(500.0)) > 0.95);
    let mut cases = 0;
    for k20 in [0.2, 0.3, 0.5, 0.56, 0.8, 1.9] {
        let w = laws::resistivity(ConductivityLaw::LowConductivity, k20);
        for t_c in [-50.0, -20.0, 0.0, 20.0, 400.0, 1300.0] {
            assert!(laws::conductivity(&w, kelvin(t_c)) >= 0.0999 * k20, "k20 {k20} at {t_c} C");
            cases += 1;
        }
    }
    assert_eq!(cases, 36);
}

/// Mineral mixtures of the table against two average-crust fits, away from the quartz peak (Waples & Waples 2004;
/// Whittington et al. 2009).
#[test]
fn catalogue_ratios_agree_with_independent_laws() {
    // A rock differs from average rock by about a tenth; the worst is printed.
    const ROCK_TO_AVERAGE: f64 = 0.12;
    let catalogue = Catalogue::embedded();
    let mut worst = (0.0_f64, String::new());
    let mut cases = 0;
    for rock in catalogue.rocks() {
        for t_c in [100.0, 200.0, 300.0, 400.0, 700.0] {
            let table = rock.specific_heat_ratio(kelvin(t_c));
            let whittington =
                laws::whittington_specific_heat(kelvin(t_c)) / laws::whittington_specific_heat(kelvin(20.0));
            for (law, other) in [("Waples", laws::waples_ratio(t_c)), ("Whittington", whittington)] {
                let off = (table / other - 1.0).abs();
                if off > worst.0 {
                    worst = (off, format!("{} at {t_c} C against {law}", rock.name));
                }
                cases += 1;
            }
        }
    }
    println!("worst {:.1} %: {}", 100.0 * worst.0, worst.1);
    assert_eq!(cases, 160);
    assert!(worst.0 < ROCK_TO_AVERAGE, "{worst:?}");
}

#[test]
fn diffusivity_rows_are_the_ratio_of_their_three_rows() {
    let catalogue = Catalogue::embedded();
    let mut worst = (0.0_f64, String::new());
    for rock in catalogue.rocks() {
        let median = |p: Property| rock.figure(p).distribution.centre;
        let computed = laws::diffusivity(
            median(Property::Conductivity),
            median(Property::Density),
            median(Property::SpecificHeat),
        );
        let off = (median(Property::Diffusivity) / computed - 1.0).abs();
        if off > worst.0 {
            worst = (off, rock.name.clone());
        }
    }
    println!("worst {:.2} %: {}", 100.0 * worst.0, worst.1);
    assert!(worst.0 < DIFFUSIVITY_ROW, "{worst:?}");
}

/// Straight lines between rows of the table; ends as stated in the catalogue's head.
#[test]
fn tables_are_interpolated_and_extended_as_stated() {
    // A kelvin scale shifted by 273.15 costs a few 1e-16 x 1000 (relative).
    const SHIFT: f64 = 1e-11;
    let catalogue = Catalogue::embedded();
    let granite = catalogue.rock("granite").unwrap();
    let strain = |t_c| granite.strain_over_expansion(kelvin(t_c));
    let ratio = |t_c| granite.specific_heat_ratio(kelvin(t_c));
    for (found, expected) in [
        (strain(60.0), 41.95),                        // half of 83.9
        (strain(575.0), 0.5 * (747.4 + 883.1)),       // between 550 and 600 C
        (strain(0.0), -83.9 * 20.0 / 80.0),           // first segment carried on
        (strain(1000.0), 1155.9 + (1155.9 - 1067.2)), // last segment carried on
        (ratio(0.0), 1.0 - 0.1623 * 20.0 / 80.0),     // first segment carried on
        (ratio(1200.0), 1.5920),                      // last row held
        (ratio(900.0), 1.5920),
        (ratio(850.0), 0.5 * (1.6092 + 1.5920)),
    ] {
        close(found, expected, SHIFT);
    }
    for rock in catalogue.rocks() {
        assert_eq!(rock.strain_over_expansion(kelvin(20.0)), 0.0, "{}", rock.name);
        assert_eq!(rock.specific_heat_ratio(kelvin(20.0)), 1.0, "{}", rock.name);
        assert_eq!((rock.heat_ratio.len(), rock.strain_over_expansion_k.len()), (11, 11), "{}", rock.name);
        for pair in rock.strain_over_expansion_k.windows(2) {
            assert!(pair[1].0 > pair[0].0 && pair[1].1 > pair[0].1, "{}", rock.name);
        }
    }
}

/// Anchors: limestone at 600 C keeps .16 of its tension and .38 of its compression; basalt at 450 C .78 of its
/// stiffness and .80 of its compression (read for the residual table). Granite by hand from the form.
#[test]
fn residual_laws_meet_their_anchors() {
    // Anchors are read from scattered plots to two digits; the fit passes through all nodes at once (share).
    const ANCHOR: f64 = 0.05;
    let catalogue = Catalogue::embedded();
    let laws = |rock: &str| catalogue.rock(rock).unwrap().residual;
    let rows = [
        (laws("limestone").tensile_strength.factor(kelvin(600.0)), 0.16),
        (laws("limestone").compressive_strength.factor(kelvin(600.0)), 0.38),
        (laws("basalt").youngs_modulus.factor(kelvin(450.0)), 0.78),
        (laws("basalt").compressive_strength.factor(kelvin(450.0)), 0.80),
    ];
    for (found, anchor) in rows {
        println!("{found:.3} against {anchor}");
        assert!((found - anchor).abs() < ANCHOR, "{found} against {anchor}");
    }
    // Granite stiffness, T50 443, w 147, floor .07, at 443 C: .07 + .93 (1 + exp(-423/147))/2.
    let expected = 0.07 + 0.93 * (1.0 + (-423.0_f64 / 147.0).exp()) / 2.0;
    close(laws("granite").youngs_modulus.factor(kelvin(443.0)), expected, 1e-12);
    for rock in catalogue.rocks() {
        let r = rock.residual;
        for law in [r.youngs_modulus, r.compressive_strength, r.tensile_strength, r.fracture_toughness] {
            assert_eq!(law.factor(kelvin(20.0)), 1.0);
            assert_eq!(law.factor(kelvin(-40.0)), 1.0);
            let path: Vec<f64> = (0..=60).map(|i| law.factor(kelvin(20.0 + 20.0 * f64::from(i)))).collect();
            assert!(path.windows(2).all(|p| p[1] < p[0]), "{} does not fall", rock.name);
            assert!((law.factor(kelvin(5000.0)) - law.floor).abs() < 1e-6);
        }
    }
}

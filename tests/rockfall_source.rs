//! The statics and the conditional ensemble against closed forms and an independent simulation.
//!
//! Sources: closed forms worked by hand or with SciPy 1.17.1 as noted; the release table comes from an independent
//! NumPy simulation of two million draws a row, kept as `tests/reference/release.py` with its output.

use spallcast::ensemble::distribution::Distribution;
use spallcast::flag::Flag;
use spallcast::rockfall::SpallDraw;
use spallcast::rockfall::points::{StaticDim, StaticPoints};
use spallcast::rockfall::release::{Origin, StaticsInputs, assess_source};
use spallcast::rockfall::source::{Cause, SourceBasis, SourceOutcome, SourceSummary, wilson_95};
use spallcast::rockfall::statics::{Mode, overturn_fs, seat_angle_rad, slide_fs, undercut_to_overturn_m};
use spallcast::settings::RockfallSettings;
use spallcast::site::{Contact, Kind, StandingRecord, Support};

/// Default number of thermal draws.
const DRAWS: usize = 512;
/// Agreement asked of the release table at the default draws, absolute (the reference's own simulation error).
const TABLE_TOLERANCE: f64 = 0.005;
/// Half a unit in the last printed place of a five-figure check value.
const FIVE_FIGURES: f64 = 6e-6;

fn cool(n: usize) -> Vec<SpallDraw> {
    (0..n).map(|d| SpallDraw::unharmed((d as f64 + 0.5) / n as f64)).collect()
}

fn standing(slope: f64, contact: Contact, support: Support, seat: f64, setback: f64, height: f64) -> StandingRecord {
    StandingRecord {
        slope_deg: Some(slope),
        contact: Some(contact),
        seat_depth_m: Some(seat),
        centroid_setback_m: Some(setback),
        centroid_height_m: Some(height),
        support: Some(support),
        ..StandingRecord::default()
    }
}

fn inputs(record: &StandingRecord, radius_m: f64) -> StaticsInputs<'_> {
    StaticsInputs {
        kind: Kind::Boulder,
        radius_m: Some(radius_m),
        axes_m: None,
        slope_deg: record.slope_deg,
        slope_origin: Origin::Recorded,
        standing: record,
    }
}

fn assess(record: &StandingRecord, radius_m: f64, draws: &[SpallDraw], settings: &RockfallSettings) -> SourceSummary {
    let points = StaticPoints::new(draws.len(), 1, settings);
    assess_source(&inputs(record, radius_m), draws, &points, settings, 180.0)
}

#[test]
fn closed_forms() {
    let rad = f64::to_radians;
    // (value, expected): hand calculation from the equations in `rockfall::statics`.
    let rows = [
        (slide_fs(rad(35.0), rad(30.0), 0.0, 0.0), 1.21280),
        (slide_fs(rad(35.0), rad(30.0), 0.1, 0.0), 0.97406),
        (overturn_fs(0.6, 1.0, rad(35.0), 0.0), 0.85689),
        (undercut_to_overturn_m(0.6, 0.7, rad(32.0), 0.0), 0.16259),
    ];
    for (value, expected) in rows {
        assert!((value - expected).abs() < FIVE_FIGURES, "{value} against {expected}");
    }
    // Half a unit of the third decimal of a degree.
    for (seat, expected) in [(0.10, 36.870), (0.05, 25.842)] {
        let value = seat_angle_rad(0.5, seat).to_degrees();
        assert!((value - expected).abs() < 5e-4, "{value} against {expected}");
    }
}

#[test]
fn release_table() {
    use Contact::{BurntDuff, CoarseSoil};
    // slope, contact, support, seat, setback, height, share kept, p_release: independent simulation, radius .75 m.
    let rows = [
        (33.0, BurntDuff, Support::BurntThrough, 0.15, 0.5, 0.6, 1.0, 0.746),
        (33.0, BurntDuff, Support::Charred, 0.15, 0.5, 0.6, 1.0, 0.415),
        (26.0, BurntDuff, Support::None, 0.15, 0.8, 0.6, 0.988, 0.493),
        (34.0, BurntDuff, Support::None, 0.15, 0.8, 0.6, 0.739, 0.790),
        (30.0, CoarseSoil, Support::None, 0.0, 0.6, 0.6, 0.952, 0.097),
    ];
    assert_eq!(rows.len(), 5);
    let settings = RockfallSettings::default();
    for seed in 1..=5 {
        let points = StaticPoints::new(DRAWS, seed, &settings);
        for (slope, contact, support, seat, setback, height, kept, expected) in rows {
            let record = standing(slope, contact, support, seat, setback, height);
            let summary = assess_source(&inputs(&record, 0.75), &cool(DRAWS), &points, &settings, 180.0);
            let p = summary.p_release.expect("a likelihood");
            assert!((p - expected).abs() <= TABLE_TOLERANCE, "seed {seed} slope {slope}: {p} against {expected}");
            let share = summary.kept_share.expect("a share");
            assert!((share - kept).abs() <= TABLE_TOLERANCE, "seed {seed} slope {slope}: kept {share} against {kept}");
            assert_eq!(summary.basis, SourceBasis::Measured);
            assert_eq!(summary.p_source, summary.p_release, "a cool boulder sheds no plate");
        }
    }
}

/// `tests/reference/release.py`: plain random draws by NumPy, four million a row, over more kinds of contact and support.
#[test]
fn release_agrees_with_plain_random_draws() {
    let text = std::fs::read_to_string("tests/reference/release.csv").unwrap();
    let mut reader = csv::ReaderBuilder::new().comment(Some(b'#')).from_reader(text.as_bytes());
    let settings = RockfallSettings::default();
    let points = StaticPoints::new(DRAWS, 1, &settings);
    let mut rows = 0;
    for row in reader.deserialize::<(f64, String, String, f64, f64, f64, f64, f64, f64)>() {
        let (slope, contact, support, radius, seat, setback, height, kept, expected) = row.unwrap();
        let (contact, support) = (Contact::parse(&contact).unwrap(), Support::parse(&support).unwrap());
        let record = standing(slope, contact, support, seat, setback, height);
        let summary = assess_source(&inputs(&record, radius), &cool(DRAWS), &points, &settings, 180.0);
        assert!((summary.kept_share.unwrap() - kept).abs() <= TABLE_TOLERANCE, "{slope} {contact:?} {support:?}");
        let p = summary.p_release.unwrap();
        assert!((p - expected).abs() <= TABLE_TOLERANCE, "{slope} {contact:?} {support:?}: {p} against {expected}");
        rows += 1;
    }
    assert_eq!(rows, 9);
}

#[test]
fn contradicted_geometry_gets_no_number() {
    let record = standing(58.0, Contact::FineSoil, Support::None, 0.0, 0.1, 0.6);
    let summary = assess(&record, 0.75, &cool(DRAWS), &RockfallSettings::default());
    assert_eq!(summary.outcome, SourceOutcome::CheckMeasurements { kept_share: 0.0 });
    assert!(summary.flags.contains(&Flag::CheckMeasurements));
    assert_eq!((summary.p_source, summary.p_source_high, summary.p_fragment), (None, None, None));
    assert!(summary.sentence().starts_with("Check measurements"));
    // The same boulder behind a support is no contradiction.
    let held = standing(58.0, Contact::FineSoil, Support::Charred, 0.0, 0.1, 0.6);
    assert_eq!(assess(&held, 0.75, &cool(DRAWS), &RockfallSettings::default()).kept_share, Some(1.0));
}

/// Friction N(35, 3.5) against slope N(31, 2): D = phi - b is N(4, sqrt(3.5^2 + 2^2)). P(D < 0) = Phi(-.99228) = .16053.
/// 3 deg steeper, given that it stands: (Phi((3 - 4)/4.0311) - .16053)/(1 - .16053) = .28769.
#[test]
fn conditional_release_closed_form() {
    let phi = Distribution::normal(35.0, 3.5);
    let settings = RockfallSettings { slope_sd_deg: 2.0, wet_spell_probability: 0.0, ..RockfallSettings::default() };
    let settings = RockfallSettings { friction_deg: [phi; 5], ..settings };
    // Without a seat, far from overturning: only sliding is left; the first reading shows who stands today.
    let record = standing(31.0, Contact::CoarseSoil, Support::None, 0.0, 5.0, 0.5);
    let summary = assess(&record, 0.75, &cool(DRAWS), &settings);
    let rejected = 1.0 - summary.kept_share.expect("a share");
    assert!((rejected - 0.16053).abs() < TABLE_TOLERANCE, "{rejected}");
    // 3 deg steeper, as shaking by k = tan 3 deg: FS < 1 is then phi < b + 3 deg exactly.
    let shaken = RockfallSettings { shaking_k: 3f64.to_radians().tan(), ..settings };
    let summary = assess(&record, 0.75, &cool(DRAWS), &shaken);
    let p = summary.p_release.expect("a likelihood");
    assert!((p - 0.28769).abs() < TABLE_TOLERANCE, "{p}");
    assert_eq!(summary.main_cause(), Some(Cause::Shaking));
    assert_eq!(summary.main_mode(), Some(Mode::Slide));
    assert!(summary.flags.contains(&Flag::ShakingConsidered));
}

#[test]
fn shares_add_up_and_strata_average_to_the_whole() {
    let settings = RockfallSettings::default();
    let draws: Vec<SpallDraw> = (0..DRAWS)
        .map(|d| {
            let u = (d as f64 + 0.5) / DRAWS as f64;
            SpallDraw {
                base_retreat_m: 0.2 * u,
                slab_or_split: u > 0.6,
                fragment_depth_m: 0.03,
                patch_breadth_limit_m: 0.5,
                slab_breadth_m: 0.3,
                fire_severity_u: u,
                heated_fraction: 0.7,
            }
        })
        .collect();
    let record = standing(28.0, Contact::CoarseSoil, Support::Scorched, 0.12, 0.5, 0.6);
    let summary = assess(&record, 0.75, &draws, &settings);
    let (p, release, fragment) = (summary.p_source.unwrap(), summary.p_release.unwrap(), summary.p_fragment.unwrap());
    assert!((summary.mode_share.iter().sum::<f64>() - 1.0).abs() < 1e-12);
    assert!((summary.cause_share.iter().sum::<f64>() - 1.0).abs() < 1e-12);
    assert!(p >= release.max(fragment) && p <= release + fragment);
    assert!((summary.strata.unwrap().mean(settings.wet_spell_probability) - p).abs() < 1e-12);
    // 40 % of draws shed a plate; mean face share (.3 + .5 + .8)/3.
    assert!((fragment - 0.4 * 1.6 / 3.0).abs() < TABLE_TOLERANCE, "{fragment}");
    // A hotter fire takes more of the base and sheds more plates.
    let strata = summary.strata.unwrap();
    assert!(strata.p[15] > strata.p[1] + 0.1);
}

/// A boulder that spalled deep in a draw loses its base in that draw: base loss and support loss are independent here,
/// so the joint figure is the closed form of the draws, not of their mean.
#[test]
fn base_retreat_is_joint_with_the_spall_draw() {
    let settings =
        RockfallSettings { slope_sd_deg: 0.0, geometry_rel_sd: 0.0, wet_spell_probability: 0.0, ..Default::default() };
    // u* = .5 - .6 tan 30 = .1536 m: a loss above it overturns, below it does not.
    let record = standing(30.0, Contact::Rock, Support::None, 0.3, 0.5, 0.6);
    let draws: Vec<SpallDraw> = (0..DRAWS)
        .map(|d| SpallDraw {
            base_retreat_m: if d % 4 == 0 { 0.16 } else { 0.01 },
            heated_fraction: 0.5,
            ..SpallDraw::unharmed((d as f64 + 0.5) / DRAWS as f64)
        })
        .collect();
    let summary = assess(&record, 0.75, &draws, &settings);
    // One draw in four loses enough, and its base is heated in half of those: 1/8. The mean loss (.0475 m) would move nothing.
    assert!((summary.p_release.unwrap() - 0.125).abs() < TABLE_TOLERANCE);
    assert_eq!((summary.main_mode(), summary.main_cause()), (Some(Mode::Overturn), Some(Cause::BaseRetreat)));
    // A measured scar replaces the draws.
    for (scar, expected) in [(0.15, 0.0), (0.16, 1.0)] {
        let scarred = StandingRecord { base_scar_m: Some(scar), ..record.clone() };
        let summary = assess(&scarred, 0.75, &draws, &settings);
        assert_eq!(summary.p_release, Some(expected));
        assert!(summary.flags.contains(&Flag::BaseScarMeasured));
    }
}

#[test]
fn trends() {
    let settings = RockfallSettings::default();
    let p = |record: &StandingRecord| assess(record, 0.75, &cool(DRAWS), &settings).p_release.unwrap();
    let at = |support| p(&standing(33.0, Contact::BurntDuff, support, 0.15, 0.5, 0.6));
    let by_support = [Support::Sound, Support::Scorched, Support::Charred, Support::BurntThrough].map(at);
    assert!(by_support.windows(2).all(|w| w[1] > w[0] + 0.03), "{by_support:?}");
    let slopes =
        [28.0, 31.0, 34.0, 37.0].map(|b| p(&standing(b, Contact::BurntDuff, Support::Charred, 0.15, 0.5, 0.6)));
    assert!(slopes.windows(2).all(|w| w[1] > w[0]), "{slopes:?}");
    let seats = [0.05, 0.1, 0.2, 0.3].map(|t| p(&standing(28.0, Contact::BurntDuff, Support::Charred, t, 0.9, 0.6)));
    assert!(seats.windows(2).all(|w| w[1] < w[0]), "{seats:?}");
}

#[test]
fn partial_and_bare_records() {
    let settings = RockfallSettings::default();
    let half = StandingRecord { slope_deg: Some(32.0), ..StandingRecord::default() };
    let summary = assess(&half, 0.6, &cool(DRAWS), &settings);
    assert_eq!(summary.basis, SourceBasis::Partial);
    assert!(summary.flags.contains(&Flag::SourcePartial));
    assert!(summary.p_source.unwrap() > 0.0);
    let bare = StandingRecord::default();
    let summary = assess(&bare, 0.6, &cool(DRAWS), &settings);
    assert_eq!(summary.basis, SourceBasis::None);
    assert_eq!((summary.p_source, summary.p_release, summary.p_fragment), (None, None, None));
    assert_eq!(summary.outcome, SourceOutcome::NotRecorded { missing: vec!["slope_deg"] });
    // A slope from the raster is an estimate, so a full record with it is still partial, and flagged.
    let full = standing(30.0, Contact::Rock, Support::None, 0.1, 0.6, 0.6);
    let filled = StaticsInputs { slope_origin: Origin::Raster, ..inputs(&full, 0.75) };
    let points = StaticPoints::new(DRAWS, 1, &settings);
    let summary = assess_source(&filled, &cool(DRAWS), &points, &settings, 180.0);
    assert_eq!(summary.basis, SourceBasis::Partial);
    assert!(summary.flags.contains(&Flag::SlopeFromTerrain));
    // An outcrop does not move as a whole.
    let outcrop = StaticsInputs { kind: Kind::Outcrop, radius_m: None, ..inputs(&half, 0.6) };
    let summary = assess_source(&outcrop, &cool(DRAWS), &points, &settings, 180.0);
    assert_eq!((summary.p_release, summary.p_source, summary.basis), (None, Some(0.0), SourceBasis::Partial));
}

#[test]
fn interval_rests_on_thermal_draws() {
    let record = standing(33.0, Contact::BurntDuff, Support::Charred, 0.15, 0.5, 0.6);
    let summary = assess(&record, 0.75, &cool(64), &RockfallSettings::default());
    let p = summary.p_source.unwrap();
    assert_eq!((summary.p_source_low.unwrap(), summary.p_source_high.unwrap()), wilson_95(p, 64.0));
}

#[test]
fn a_pinned_input_moves_the_answer_its_way() {
    let settings = RockfallSettings::default();
    let record = standing(31.0, Contact::BurntDuff, Support::Charred, 0.15, 0.5, 0.6);
    let points = StaticPoints::new(DRAWS, 1, &settings);
    let p = |u: f64| {
        let held = points.pinned(StaticDim::Slope, u, 1, &settings);
        assess_source(&inputs(&record, 0.75), &cool(DRAWS), &held, &settings, 180.0).p_release.unwrap()
    };
    assert!(p(0.9) > p(0.5) && p(0.5) > p(0.1));
}

//! The catalogue, the names people write, a user's own rocks, the physical ranges.

use std::collections::BTreeSet;

use sha2::{Digest, Sha256};
use spallcast::bounds::{BOUNDS, bound};
use spallcast::ensemble::distribution::{Distribution, Shape};
use spallcast::output::rock_table;
use spallcast::rock::{Basis, Catalogue, ConductivityLaw, Property, Resolution, RockError};
use spallcast::settings::{Settings, UserRock};

const ROCKS: [&str; 16] = [
    "granite",
    "basalt",
    "andesite",
    "rhyolite",
    "gabbro",
    "gneiss",
    "schist",
    "quartzite",
    "sandstone",
    "limestone",
    "dolomite",
    "marble",
    "slate",
    "conglomerate",
    "chalk",
    "chert",
];
/// Products and ratios of a few doubles (relative).
const ALGEBRA: f64 = 1e-12;

fn near(found: f64, expected: f64) {
    assert!((found / expected - 1.0).abs() < ALGEBRA, "{found} is not {expected}");
}

#[test]
fn sixteen_rocks_by_thirteen_properties() {
    let catalogue = Catalogue::embedded();
    let names: Vec<&str> = catalogue.rocks().iter().map(|r| r.name.as_str()).collect();
    assert_eq!(names, ROCKS);
    let mut figures = 0;
    for rock in catalogue.rocks() {
        for property in Property::ALL {
            let figure = rock.figure(property);
            let d = figure.distribution;
            assert!(!figure.source.is_empty(), "{} {} has no source", rock.name, property.key());
            assert!(d.lower < d.centre && d.centre < d.upper, "{} {}", rock.name, property.key());
            assert_eq!(d.spread > 0.0, d.shape != Shape::Triangular, "{} {}", rock.name, property.key());
            let bound = property.bound();
            for value in [d.lower, d.centre, d.upper] {
                let input = value / property.si_per_input();
                assert!(bound.holds(input), "{} {} {input}: {}", rock.name, property.key(), bound.message());
            }
            figures += 1;
        }
        let [low, middle, high] = rock.spall.flakable_share;
        assert!(0.0 < low && low < middle && middle < high && high <= 1.0, "{}", rock.name);
        assert!(rock.spall.grain_m >= 2e-5 && rock.spall.grain_m <= 5e-3, "{}", rock.name);
        assert!(!rock.law_source.is_empty());
    }
    assert_eq!(figures, 16 * 13);
}

/// Read off the table by eye: a shift of columns or of properties shows here.
#[test]
fn figures_stand_where_they_belong() {
    let catalogue = Catalogue::embedded();
    let rows = [
        ("granite", Property::Density, 2640.0),
        ("granite", Property::Diffusivity, 1.42e-6),
        ("granite", Property::Emissivity, 0.9),
        ("basalt", Property::YoungsModulus, 7e10),
        ("rhyolite", Property::Porosity, 0.105),
        ("sandstone", Property::TensileStrength, 4e6),
        ("limestone", Property::Expansion, 7e-6),
        ("chalk", Property::Conductivity, 0.95),
        ("chert", Property::CompressiveStrength, 3e8),
        ("marble", Property::SpecificHeat, 840.0),
        ("gabbro", Property::FractureToughness, 2.6e6),
        ("slate", Property::PoissonsRatio, 0.22),
        ("gneiss", Property::WeibullModulus, 7.0),
    ];
    assert_eq!(rows.map(|r| r.1).into_iter().collect::<BTreeSet<_>>().len(), 13);
    for (rock, property, centre) in rows {
        assert_eq!(catalogue.rock(rock).unwrap().figure(property).distribution.centre, centre, "{rock} {property:?}");
    }
    let granite = catalogue.rock("granite").unwrap();
    assert_eq!(granite.spall.weibull_modulus_compression, 20.0);
    assert_eq!(granite.spall.grain_m, 0.002);
    assert_eq!(granite.figure(Property::FractureToughness).basis, Basis::Recalled);
}

#[test]
fn laws_and_classes_by_rock() {
    let catalogue = Catalogue::embedded();
    let with = |law| -> BTreeSet<&str> {
        catalogue.rocks().iter().filter(|r| r.law == law).map(|r| r.name.as_str()).collect()
    };
    let set = |names: &[&'static str]| names.iter().copied().collect::<BTreeSet<&str>>();
    let crystalline = ["granite", "gneiss", "schist", "quartzite", "basalt", "gabbro", "marble"];
    assert_eq!(with(ConductivityLaw::Crystalline), set(&crystalline));
    let sedimentary = ["sandstone", "limestone", "dolomite", "conglomerate", "chert", "slate"];
    assert_eq!(with(ConductivityLaw::Sedimentary), set(&sedimentary));
    assert_eq!(with(ConductivityLaw::Constant), set(&["andesite", "rhyolite"]));
    assert_eq!(with(ConductivityLaw::LowConductivity), set(&["chalk"]));
    let loses: Vec<&str> = catalogue.rocks().iter().filter(|r| r.loses_diffusivity).map(|r| r.name.as_str()).collect();
    assert_eq!(loses, ["granite", "gneiss", "schist", "quartzite"]);
    let class = |rock: &str| catalogue.rock(rock).unwrap().residual_class.clone();
    assert_eq!(class("rhyolite"), "felsic_crystalline");
    assert_eq!(class("andesite"), "mafic");
    assert_eq!(class("conglomerate"), "clastic");
    assert_eq!(class("chalk"), "carbonate");
}

#[test]
fn default_mixture_names_catalogue_rocks() {
    let catalogue = Catalogue::embedded();
    let mixture = Settings::default().unknown_rock;
    assert_eq!(mixture.len(), 6);
    assert!(mixture.iter().all(|(rock, _)| catalogue.rock(rock).is_some()));
}

/// A change of a figure must change [`Catalogue::VERSION`]: write the new digest and the new version together.
#[test]
fn version_changes_with_the_tables() {
    let mut digest = Sha256::new();
    for table in [
        include_str!("../src/rock/tables/rock_properties.csv"),
        include_str!("../src/rock/tables/rock_temperature_ratios.csv"),
        include_str!("../src/rock/tables/rock_residual_strength.csv"),
        include_str!("../src/rock/tables/spall_parameters.csv"),
        include_str!("../src/rock/tables/rock_laws.csv"),
    ] {
        digest.update(table.as_bytes());
    }
    let hex: String = digest.finalize().iter().map(|b| format!("{b:02x}")).collect();
    let known = "d7c0eff29554c778f8607d85a46b19f83b4a2dc7604292546189d688bba52431";
    assert_eq!((Catalogue::VERSION, hex.as_str()), ("1", known));
}

/// One line a rock: what people write for it (common practice, no source; mappings are judgement).
const WRITTEN: [(&str, &str); 16] = [
    (
        "granite",
        "granite|Granite| GRANITES |granodiorite|Grano-diorite|tonalite|quartz monzonite|monzonite|diorite|syenite|\
         pegmatite|granito|weathered granite|Coarse-grained biotite granite|granite (biotite)|granite?|gd",
    ),
    ("gabbro", "diabase|Dolerite|amphibolite|gabro"),
    ("basalt", "metabasalt|meta-basalt|basalts|Columbia River Basalt|vesicular basalt|basaltic andesite"),
    ("andesite", "dacite|volcanic breccia"),
    ("rhyolite", "tuff|Welded Tuff|welded_tuff|ash-flow tuff|Bishop Tuff|ignimbrite|rhyodacite"),
    ("gneiss", "gneissic|granite gneiss|Augen-gneiss|gneisses|migmatite"),
    ("schist", "mica schist|schists|phyllite"),
    ("quartzite", "qtzite|Qtzt|orthoquartzite"),
    ("sandstone", "ss|SS|sst|sand stone|arkose|Navajo Sandstone|grès|graywacke|siltstone"),
    ("limestone", "ls|LST|lime-stone|Kalkstein|caliza|travertine"),
    ("dolomite", "dolostone|dol."),
    ("marble", "mármol|Marbles"),
    ("slate", "shale|mudstone|argillite"),
    ("conglomerate", "breccia|cgl"),
    ("chalk", "Kreide|chk"),
    ("chert", "flint|cherts"),
];

#[test]
fn names_that_people_write() {
    let catalogue = Catalogue::embedded();
    let mut names = 0;
    for (rock, written) in WRITTEN {
        for text in written.split('|') {
            assert_eq!(catalogue.resolve(text), Resolution::Rock(rock.to_owned()), "{text:?}");
            names += 1;
        }
    }
    assert_eq!(names, 75);
}

#[test]
fn names_that_say_unknown() {
    let catalogue = Catalogue::embedded();
    let rows =
        ["", "  ", "unknown", "Unknown", "UNK", "?", "??", "-", "--", "n/a", "N.A.", "na", "not recorded", "null"];
    for text in rows.into_iter().chain(["rock", "weathered rock"]) {
        assert_eq!(catalogue.resolve(text), Resolution::Unknown, "{text:?}");
    }
}

#[test]
fn names_that_are_not_decided() {
    let catalogue = Catalogue::embedded();
    let nearest = |text: &str| match catalogue.resolve(text) {
        Resolution::NotFound { nearest } => nearest,
        other => panic!("{text:?} is {other:?}"),
    };
    let rows: [(&str, &[&str]); 8] = [
        ("granite or gneiss", &["granite", "gneiss"]),
        ("limestone/dolomite", &["limestone", "dolomite"]),
        ("not granite", &["granite"]),
        ("volcanic", &["basalt", "andesite", "rhyolite"]),
        ("volcanics", &["basalt", "andesite", "rhyolite"]),
        ("Schiefer", &["schist", "slate"]),
        ("carbonate rock", &["limestone", "dolomite"]),
        ("pumice", &["rhyolite"]),
    ];
    for (text, expected) in rows {
        assert_eq!(nearest(text), expected, "{text:?}");
    }
    // Misspellings are answered, never taken.
    for (text, best) in [
        ("grantie", "granite"),
        ("granodiorte", "granodiorite"),
        ("sandstne", "sandstone"),
        ("limstone", "limestone"),
        ("basaltt", "basalt"),
        ("ryholite", "rhyolite"),
        ("Navajo Sandstne", "sandstone"),
        ("conglomerte", "conglomerate"),
    ] {
        assert_eq!(nearest(text).first().map(String::as_str), Some(best), "{text:?}");
    }
    assert!(nearest("zzzzzzzz").is_empty());
    assert!(nearest("12345").is_empty());
}

#[test]
fn every_alias_leads_where_its_row_says() {
    let catalogue = Catalogue::embedded();
    let mut aliases = 0;
    for rock in ROCKS {
        for alias in catalogue.aliases_of(rock) {
            assert_eq!(catalogue.resolve(&alias.alias), Resolution::Rock(rock.to_owned()), "{}", alias.alias);
            assert!(!alias.why.is_empty(), "{}", alias.alias);
            aliases += 1;
        }
    }
    let rows = include_str!("../src/rock/tables/aliases.csv").lines().count() - 1;
    assert_eq!(aliases, rows);
    assert!(rows > 300, "{rows}");
}

fn user(name: &str, like: &str, figures: Vec<(Property, Distribution)>) -> UserRock {
    UserRock { name: name.into(), like: like.into(), figures, source: "own tests".into(), aliases: Vec::new() }
}

fn refused(wish: UserRock) -> String {
    Catalogue::embedded().with_user_rocks(&[wish]).expect_err("must be refused").to_string()
}

#[test]
fn a_user_overrides_a_rock() {
    let wish = user("Granite", "granite", vec![(Property::TensileStrength, Distribution::point(6e6))]);
    let embedded = Catalogue::embedded();
    let catalogue = embedded.clone().with_user_rocks(&[wish]).unwrap();
    assert_eq!(catalogue.rocks().len(), 16);
    let granite = catalogue.rock("granite").unwrap();
    let figure = granite.figure(Property::TensileStrength);
    assert_eq!(figure.distribution.median(), 6e6);
    assert_eq!((figure.basis, figure.source.as_str()), (Basis::Assumption, "own tests"));
    assert_eq!(granite.figure(Property::Density), embedded.rock("granite").unwrap().figure(Property::Density));
    assert_eq!(catalogue.resolve("granodiorite"), Resolution::Rock("granite".into()));
}

#[test]
fn a_user_adds_a_rock() {
    let mut wish =
        user("Ridge Tonalite", "granodiorite", vec![(Property::Density, Distribution::normal(2750.0, 30.0))]);
    wish.aliases = vec!["RT".into(), "tonalite".into()];
    let second = user("lower ridge", "Ridge Tonalite", vec![]);
    let catalogue = Catalogue::embedded().with_user_rocks(&[wish, second]).unwrap();
    assert_eq!(catalogue.rocks().len(), 18);
    for text in ["ridge tonalite", "Ridge-Tonalite", "rt", "tonalite"] {
        assert_eq!(catalogue.resolve(text), Resolution::Rock("Ridge Tonalite".into()), "{text}");
    }
    let rock = catalogue.rock("Ridge Tonalite").unwrap();
    assert_eq!(rock.like.as_deref(), Some("granite"));
    // Open ends are closed at the physical range, 800 to 4500 kg/m3.
    let d = rock.figure(Property::Density).distribution;
    assert_eq!((d.lower, d.upper), (800.0, 4500.0));
    assert_eq!(catalogue.rock("lower ridge").unwrap().figure(Property::Density).distribution, d);
}

/// k 3.5 with granite's rho 2640 and c 775: 3.5/(2640 x 775), log spread sqrt(.1^2 + (40/2640)^2 + (40/775)^2).
#[test]
fn diffusivity_follows_what_the_user_changed() {
    // Medians of the truncated normals against their means (relative).
    const MEDIAN_TO_MEAN: f64 = 1e-3;
    let lognormal = |median: f64, gsd: f64| Distribution::lognormal(median, gsd);
    let wish = user("a", "granite", vec![(Property::Conductivity, lognormal(3.5, 0.1_f64.exp()))]);
    let catalogue = Catalogue::embedded().with_user_rocks(&[wish]).unwrap();
    let figure = catalogue.rock("a").unwrap().figure(Property::Diffusivity);
    assert!((figure.distribution.centre / (3.5 / (2640.0 * 775.0)) - 1.0).abs() < MEDIAN_TO_MEAN);
    near(figure.distribution.spread, (0.01_f64 + (40.0_f64 / 2640.0).powi(2) + (40.0_f64 / 775.0).powi(2)).sqrt());
    assert_eq!(figure.basis, Basis::Derived);
    let wish = user("b", "granite", vec![(Property::Diffusivity, lognormal(2e-6, 1.2))]);
    let catalogue = Catalogue::embedded().with_user_rocks(&[wish]).unwrap();
    let figure = catalogue.rock("b").unwrap().figure(Property::Conductivity);
    assert!((figure.distribution.centre / (2e-6 * 2640.0 * 775.0) - 1.0).abs() < MEDIAN_TO_MEAN);
    let both = |kappa: f64| {
        vec![(Property::Diffusivity, lognormal(kappa, 1.2)), (Property::Conductivity, Distribution::point(2.9))]
    };
    assert!(Catalogue::embedded().with_user_rocks(&[user("c", "granite", both(1.6e-6))]).is_ok());
    assert!(refused(user("c", "granite", both(3e-6))).contains("differ by more than 30 %"));
}

#[test]
fn nonsense_is_refused_with_a_reason() {
    let point = Distribution::point;
    let message = |property, d| refused(user("ridge", "granite", vec![(property, d)]));
    assert_eq!(
        message(Property::Diffusivity, point(-2.1e-6)),
        "rock \"ridge\": diffusivity_mm2_s is -2.1, expected 0.1 to 10 mm2/s"
    );
    // GPa written where Pa stands.
    assert!(message(Property::YoungsModulus, point(50.0)).contains("expected 0.1 to 200 GPa"));
    assert!(message(Property::PoissonsRatio, point(0.6)).contains("expected 0 to 0.49"));
    assert!(message(Property::Density, point(f64::NAN)).contains("density_kg_m3 is NaN"));
    assert!(message(Property::Density, Distribution::normal(2600.0, -1.0)).contains("spread"));
    assert!(message(Property::Density, Distribution::normal(2600.0, f64::NAN)).contains("spread"));
    let reversed = Distribution { shape: Shape::Normal, centre: 2600.0, spread: 50.0, lower: 2700.0, upper: 2500.0 };
    assert!(message(Property::Density, reversed).contains("must rise"));
    assert!(message(Property::Porosity, Distribution::triangular(0.1, 0.2, 0.9)).contains("porosity is 0.9"));
    let zero = Distribution { shape: Shape::Lognormal, centre: 0.0, spread: 0.1, lower: 0.0, upper: 0.5 };
    assert!(message(Property::Porosity, zero).contains("median above 0"));
    assert!(refused(user("ridge", "grantie", vec![])).contains("nearest: granite"));
    assert!(refused(user("ridge", "", vec![])).contains("no catalogue rock"));
    assert!(refused(user(" ?", "granite", vec![])).contains("no usable name"));
    assert!(refused(user("unknown", "granite", vec![])).contains("not known"));
    let twice = vec![(Property::Porosity, point(0.1)), (Property::Porosity, point(0.2))];
    assert!(refused(user("ridge", "granite", twice)).contains("given twice"));
    let mut thief = user("ridge", "granite", vec![]);
    thief.aliases = vec!["Basalt".into()];
    assert!(refused(thief).contains("already names \"basalt\""));
    let pair = [user("ridge", "granite", vec![]), user("Ridge", "basalt", vec![])];
    assert!(matches!(Catalogue::embedded().with_user_rocks(&pair), Err(RockError::Twice { .. })));
}

/// Numeric columns of the contract, burns, boulders and trails.
const COLUMNS: &str = "residence_min residence_gsd fireline_intensity_kw_m flame_length_m spread_rate_m_min \
                       fuel_load_kg_m2 longitude latitude elevation_m diameter_m axis_a_m axis_b_m axis_c_m \
                       diffusivity_mm2_s diffusivity_gsd heated_fraction standoff_m log_diameter_m rind_mm slope_deg \
                       downslope_azimuth_deg seat_depth_m centroid_setback_m centroid_height_m base_scar_mm \
                       elevation_sd_m passages_per_day walking_speed_m_s standing_minutes draws horizon_days";

#[test]
fn ranges_stand_once_and_rise() {
    let names: BTreeSet<&str> = BOUNDS.iter().map(|b| b.name).collect();
    assert_eq!(names.len(), BOUNDS.len());
    for b in BOUNDS {
        assert!(b.min < b.max && b.holds(b.min) && b.holds(b.max), "{}", b.name);
        assert!(!b.holds(f64::NAN) && !b.holds(f64::INFINITY) && !b.holds(b.min - 1.0), "{}", b.name);
    }
    let columns: Vec<&str> = COLUMNS.split_whitespace().collect();
    assert_eq!(columns.len(), 31);
    for name in columns.into_iter().chain(Property::ALL.map(Property::input_name)) {
        assert!(bound(name).is_some(), "{name} has no range");
    }
    assert!(bound("diffusivity").is_none());
    assert_eq!(bound("expansion_per_k").unwrap().message(), "expected 5e-7 to 4e-5 1/K");
    assert_eq!(bound("heated_fraction").unwrap().message(), "expected 0.01 to 1");
}

#[test]
fn property_names_lead_back() {
    for property in Property::ALL {
        assert_eq!(Property::from_key(property.key()), Some(property));
        assert_eq!(Property::parse(property.input_name()), Some(property));
        assert_eq!(property.bound().unit, property.input_unit());
    }
    assert_eq!(Property::parse("density"), None);
}

#[test]
fn the_table_is_complete_as_json_and_as_text() {
    let catalogue = Catalogue::embedded();
    let value: serde_json::Value = serde_json::from_str(&rock_table::json(&catalogue, None)).unwrap();
    let rocks = value["rocks"].as_array().unwrap();
    assert_eq!(rocks.len(), 16);
    let mut figures = 0;
    for rock in rocks {
        for figure in rock["figures"].as_array().unwrap() {
            for key in ["property", "distribution", "basis", "source"] {
                assert!(!figure[key].as_str().unwrap().is_empty(), "{key}");
            }
            assert!(["centre", "lower", "upper"].iter().all(|k| figure[k].is_number()));
            figures += 1;
        }
        assert_eq!(rock["temperature_rows"].as_array().unwrap().len(), 11);
        assert_eq!(rock["residual"]["laws"].as_array().unwrap().len(), 4);
    }
    assert_eq!(figures, 208);
    // Input units, without the noise of a change of unit: granite's diffusivity 1.42e-6 m2/s, modulus 5e10 Pa.
    let granite = rocks[0]["figures"].as_array().unwrap();
    let of = |name: &str| granite.iter().find(|f| f["property"] == name).unwrap()["centre"].as_f64().unwrap();
    assert_eq!((of("diffusivity_mm2_s"), of("youngs_modulus_gpa")), (1.42, 50.0));
    let text = rock_table::text(&catalogue, None);
    for rock in catalogue.rocks() {
        for property in Property::ALL {
            assert!(text.contains(&rock.figure(property).source), "{} {property:?}", rock.name);
        }
    }
    let one = rock_table::text(&catalogue, catalogue.rock("chalk"));
    assert!(one.contains("low_conductivity") && !one.contains("granite\n"));
}

//! The catalogue: embedded tables to rocks, a user's own rocks on top, a rock by name.
//!
//! Tables (`tables/`): `rock_properties.csv` (distribution, basis, source and locator of each figure),
//! `rock_temperature_ratios.csv` (specific heat over its 20 C value; thermal strain over the 20 C expansion),
//! `rock_residual_strength.csv`, `spall_parameters.csv`, `rock_laws.csv`, and the names of [`super::alias`].
//! Kelvin and SI from here on.
//!
//! Between table rows: straight lines. Below 20 C the first segment is carried on, for both columns. Above the last row
//! (900 C) the specific heat ratio is held and the strain carried on along its last segment.

use std::collections::BTreeMap;

use serde::Deserialize;
use thiserror::Error;

use super::alias::{self, Alias, Names, Resolution};
use super::laws::{self, ConductivityLaw};
use super::residual::{ResidualLaw, ResidualLaws};
use super::{Property, residual};
use crate::ensemble::distribution::{Distribution, Shape};
use crate::settings::UserRock;
use crate::units::kelvin;

/// What a figure rests on. Never promoted without reading the source.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Basis {
    /// Read in the publication.
    Published,
    /// Part read, part recalled or judged.
    Mixed,
    /// Recalled from memory; check before citing.
    Recalled,
    /// Computed from other figures.
    Derived,
    /// No measurement behind the exact number.
    Judgement,
    /// An assumption that the settings can change; also every figure a user supplies.
    Assumption,
}

impl Basis {
    /// Every basis.
    pub const ALL: [Basis; 6] =
        [Basis::Published, Basis::Mixed, Basis::Recalled, Basis::Derived, Basis::Judgement, Basis::Assumption];

    /// The word in tables and outputs.
    pub const fn word(self) -> &'static str {
        match self {
            Basis::Published => "published",
            Basis::Mixed => "mixed",
            Basis::Recalled => "recalled",
            Basis::Derived => "derived",
            Basis::Judgement => "judgement",
            Basis::Assumption => "assumption",
        }
    }

    /// The basis of that word.
    pub fn parse(word: &str) -> Option<Basis> {
        Basis::ALL.into_iter().find(|b| b.word() == word)
    }
}

/// One figure of the catalogue: a distribution between boulders, and what it rests on.
#[derive(Debug, Clone, PartialEq)]
pub struct Figure {
    /// Scatter between boulders, SI.
    pub distribution: Distribution,
    /// What it rests on.
    pub basis: Basis,
    /// Where it comes from.
    pub source: String,
    /// Where in the source, or what was read there.
    pub locator: String,
}

/// Parameters of the flake family.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct SpallParameters {
    /// Weibull modulus of compressive strength inside one boulder.
    pub weibull_modulus_compression: f64,
    /// Spalling strength over mean laboratory strength.
    pub spalling_to_laboratory_strength: f64,
    /// Grain size, m: no flake is thinner.
    pub grain_m: f64,
    /// Share of the surface that can flake: low, middle, high.
    pub flakable_share: [f64; 3],
    /// What they rest on.
    pub basis: Basis,
}

impl SpallParameters {
    /// Weights of the three flakable shares (judgement).
    pub const FLAKABLE_SHARE_WEIGHTS: [f64; 3] = [0.25, 0.5, 0.25];
}

/// One rock.
#[derive(Debug, Clone, PartialEq)]
pub struct Rock {
    /// Its key, and the name in outputs.
    pub name: String,
    /// How its conductivity follows temperature.
    pub law: ConductivityLaw,
    /// What the choice of law rests on.
    pub law_basis: Basis,
    /// Where the law comes from.
    pub law_source: String,
    /// Temperature (K) and specific heat over its 20 C value.
    pub heat_ratio: Vec<(f64, f64)>,
    /// Temperature (K) and thermal strain from 20 C over the expansion at 20 C (K).
    pub strain_over_expansion_k: Vec<(f64, f64)>,
    /// What heating leaves.
    pub residual: ResidualLaws,
    /// The class of its residual laws.
    pub residual_class: String,
    /// Flake parameters.
    pub spall: SpallParameters,
    /// Loses diffusivity after heating (crystalline, with quartz; the list is an assumption).
    pub loses_diffusivity: bool,
    /// The catalogue rock a user's rock started from.
    pub like: Option<String>,
    figures: Vec<Figure>,
}

impl Rock {
    /// The figure of a property.
    pub fn figure(&self, property: Property) -> &Figure {
        &self.figures[property as usize]
    }

    /// Specific heat at `t_k` (K) over that at 20 C.
    ///
    /// ```
    /// let catalogue = spallcast::rock::Catalogue::embedded();
    /// let granite = catalogue.rock("granite").unwrap();
    /// // halfway between 1.1623 at 100 C and 1.2961 at 200 C
    /// assert!((granite.specific_heat_ratio(423.15) - 1.2292).abs() < 1e-12);
    /// ```
    pub fn specific_heat_ratio(&self, t_k: f64) -> f64 {
        let (last_k, last) = self.heat_ratio[self.heat_ratio.len() - 1];
        if t_k >= last_k { last } else { along(&self.heat_ratio, t_k) }
    }

    /// Free thermal strain from 20 C to `t_k` (K), over the expansion at 20 C (K). Negative below 20 C.
    pub fn strain_over_expansion(&self, t_k: f64) -> f64 {
        along(&self.strain_over_expansion_k, t_k)
    }
}

/// Straight lines through `rows` (rising abscissa, two or more), the end segments carried on.
fn along(rows: &[(f64, f64)], x: f64) -> f64 {
    let after = rows[1..rows.len() - 1].partition_point(|r| r.0 <= x) + 1;
    let ((x0, y0), (x1, y1)) = (rows[after - 1], rows[after]);
    y0 + (y1 - y0) * (x - x0) / (x1 - x0)
}

/// Why a user's rock is refused.
#[derive(Debug, Clone, PartialEq, Error)]
#[allow(missing_docs)]
pub enum RockError {
    #[error("a rock of the settings has no usable name ({name:?}); give it letters, such as \"ridge granite\"")]
    Nameless { name: String },
    #[error("rock {name:?}: that word means the rock is not known; choose another name")]
    MeansUnknown { name: String },
    #[error("rock {name:?} is defined twice; keep one")]
    Twice { name: String },
    #[error("rock {name:?}: like is {like:?}, which is no catalogue rock; {}", suggestion(nearest))]
    Base { name: String, like: String, nearest: Vec<String> },
    #[error("rock {name:?}: {property} is given twice; keep one")]
    FigureTwice { name: String, property: &'static str },
    #[error("rock {name:?}: {property} is {found}, {expected}")]
    OutOfRange { name: String, property: &'static str, found: String, expected: String },
    #[error("rock {name:?}: {property}: {why}")]
    Malformed { name: String, property: &'static str, why: &'static str },
    #[error(
        "rock {name:?}: diffusivity_mm2_s {given_mm2_s:.3} and conductivity / (density x specific heat) {computed_mm2_s:.3} \
         differ by more than {tolerance_percent:.0} %; leave one of the four out"
    )]
    Diffusivity { name: String, given_mm2_s: f64, computed_mm2_s: f64, tolerance_percent: f64 },
    #[error("rock {name:?}: alias {alias:?} already names {taken_by:?}; override that rock by its own name instead")]
    AliasTaken { name: String, alias: String, taken_by: String },
}

fn suggestion(nearest: &[String]) -> String {
    if nearest.is_empty() {
        "the command `rocks` lists them".to_owned()
    } else {
        format!("nearest: {}", nearest.join(", "))
    }
}

/// Largest ratio between a user's diffusivity and the one of the user's conductivity, density and specific heat, less
/// one (assumption: about the repeatability of the three measurements together).
const DIFFUSIVITY_TOLERANCE: f64 = 0.3;

/// The rocks that are known in a run.
#[derive(Debug, Clone)]
pub struct Catalogue {
    rocks: Vec<Rock>,
    names: Names,
}

impl Catalogue {
    /// Version of the embedded tables; changes with every change of a figure.
    pub const VERSION: &'static str = "1";

    /// The embedded catalogue.
    ///
    /// # Panics
    /// If an embedded table is broken, which tests rule out.
    pub fn embedded() -> Catalogue {
        let rocks = read_rocks();
        let names = Names::embedded(rocks.iter().map(|r| r.name.as_str()));
        Catalogue { rocks, names }
    }

    /// Every rock, in catalogue order, the user's own last.
    pub fn rocks(&self) -> &[Rock] {
        &self.rocks
    }

    /// The rock of that key (as in [`Rock::name`]); no aliases.
    pub fn rock(&self, key: &str) -> Option<&Rock> {
        self.rocks.iter().find(|r| r.name == key)
    }

    /// The catalogue rock that a written name means.
    ///
    /// ```
    /// use spallcast::rock::{Catalogue, Resolution};
    /// let catalogue = Catalogue::embedded();
    /// assert_eq!(catalogue.resolve("Granodiorite"), Resolution::Rock("granite".to_owned()));
    /// assert_eq!(catalogue.resolve("n/a"), Resolution::Unknown);
    /// ```
    pub fn resolve(&self, text: &str) -> Resolution {
        self.names.resolve(text)
    }

    /// The aliases that lead to a rock, with their basis.
    pub fn aliases_of(&self, key: &str) -> Vec<&Alias> {
        self.names.aliases().iter().filter(|a| a.rock == key).collect()
    }

    /// The catalogue with a user's rocks: a catalogue rock's own name overrides it, any other name adds a rock.
    ///
    /// Figures that were not given come from the rock it is `like`. Where conductivity, density or specific heat are
    /// given and diffusivity is not, diffusivity is k/(rho c) of the new figures; where diffusivity is given and
    /// conductivity is not, conductivity is kappa rho c. Open truncations are closed at the physical range.
    ///
    /// # Errors
    /// [`RockError`] for a name, base, figure or alias that cannot be used; nothing is changed then.
    pub fn with_user_rocks(mut self, user: &[UserRock]) -> Result<Catalogue, RockError> {
        let mut seen: Vec<String> = Vec::new();
        for wish in user {
            let name = self.user_name(wish)?;
            if seen.contains(&alias::fold(&name)) {
                return Err(RockError::Twice { name });
            }
            let rock = self.user_rock(wish, &name)?;
            seen.push(alias::fold(&name));
            match self.rocks.iter_mut().find(|r| r.name == name) {
                Some(old) => *old = rock,
                None => {
                    self.names.add_rock(&name);
                    self.rocks.push(rock);
                }
            }
            for further in &wish.aliases {
                if let Some(taken_by) = self.names.rock_named(further).filter(|r| *r != name) {
                    return Err(RockError::AliasTaken { name, alias: further.clone(), taken_by: taken_by.to_owned() });
                }
                if alias::means_unknown(further) {
                    return Err(RockError::MeansUnknown { name: further.clone() });
                }
                self.names.add_alias(further, &name, Basis::Assumption, "named by the user");
            }
        }
        Ok(self)
    }

    /// The key of a user's rock: an embedded key where it is one, else as written.
    fn user_name(&self, wish: &UserRock) -> Result<String, RockError> {
        let name = wish.name.trim();
        if alias::means_unknown(name) {
            return Err(if alias::fold(name).is_empty() {
                RockError::Nameless { name: wish.name.clone() }
            } else {
                RockError::MeansUnknown { name: name.to_owned() }
            });
        }
        Ok(self.names.rock_named(name).unwrap_or(name).to_owned())
    }

    fn user_rock(&self, wish: &UserRock, name: &str) -> Result<Rock, RockError> {
        let base_key = match self.resolve(&wish.like) {
            Resolution::Rock(key) => key,
            Resolution::Unknown => {
                return Err(RockError::Base { name: name.to_owned(), like: wish.like.clone(), nearest: Vec::new() });
            }
            Resolution::NotFound { nearest } => {
                return Err(RockError::Base { name: name.to_owned(), like: wish.like.clone(), nearest });
            }
        };
        let base = self.rock(&base_key).expect("a resolved name is a rock of the catalogue");
        let mut rock = base.clone();
        rock.name = name.to_owned();
        rock.like = Some(base_key);
        let mut given = BTreeMap::new();
        for &(property, distribution) in &wish.figures {
            let figure = Figure {
                distribution: checked(name, property, distribution)?,
                basis: Basis::Assumption,
                source: if wish.source.trim().is_empty() { "settings" } else { wish.source.trim() }.to_owned(),
                locator: "supplied by the user".to_owned(),
            };
            if given.insert(property, ()).is_some() {
                return Err(RockError::FigureTwice { name: name.to_owned(), property: property.input_name() });
            }
            rock.figures[property as usize] = figure;
        }
        reconcile(&mut rock, &given)?;
        Ok(rock)
    }
}

/// A user's distribution, checked and closed at the physical range.
fn checked(name: &str, property: Property, wish: Distribution) -> Result<Distribution, RockError> {
    let malformed = |why| Err(RockError::Malformed { name: name.to_owned(), property: property.input_name(), why });
    let bound = property.bound();
    let unit = property.si_per_input();
    let (min, max) = (bound.min * unit, bound.max * unit);
    let out_of_range = |value: f64| {
        Err(RockError::OutOfRange {
            name: name.to_owned(),
            property: property.input_name(),
            found: format!("{}", tidy(value / unit)),
            expected: bound.message(),
        })
    };
    // One part in 1e12: input units times a factor need not land on the bound itself.
    let slack = 1e-12 * max.abs();
    let inside = |value: f64| value >= min - slack && value <= max + slack;
    if !inside(wish.centre) {
        return out_of_range(wish.centre);
    }
    if !wish.spread.is_finite() || wish.spread < 0.0 {
        return malformed("the spread must be a number of 0 or above");
    }
    if wish.shape == Shape::Lognormal && wish.centre <= 0.0 {
        return malformed("a lognormal needs a median above 0");
    }
    if wish.lower.is_nan() || wish.upper.is_nan() || wish.lower > wish.centre || wish.upper < wish.centre {
        return malformed("lower, centre and upper must rise");
    }
    let open_below = wish.lower == f64::NEG_INFINITY || (wish.shape == Shape::Lognormal && wish.lower == 0.0);
    let open_above = wish.upper == f64::INFINITY;
    if wish.shape == Shape::Triangular && (open_below || open_above) {
        return malformed("a triangular distribution needs finite lower and upper");
    }
    if !open_below && !inside(wish.lower) {
        return out_of_range(wish.lower);
    }
    if !open_above && !inside(wish.upper) {
        return out_of_range(wish.upper);
    }
    Ok(Distribution {
        lower: if open_below { min.min(wish.centre) } else { wish.lower },
        upper: if open_above { max.max(wish.centre) } else { wish.upper },
        ..wish
    })
}

/// Keeps kappa = k/(rho c) after a user has changed some of the four.
fn reconcile(rock: &mut Rock, given: &BTreeMap<Property, ()>) -> Result<(), RockError> {
    let has = |p: Property| given.contains_key(&p);
    let three = [Property::Conductivity, Property::Density, Property::SpecificHeat];
    let of = |rock: &Rock, p: Property| rock.figure(p).distribution;
    if has(Property::Diffusivity) {
        let kappa = of(rock, Property::Diffusivity);
        if has(Property::Conductivity) {
            let computed = laws::diffusivity(
                of(rock, Property::Conductivity).median(),
                of(rock, Property::Density).median(),
                of(rock, Property::SpecificHeat).median(),
            );
            let ratio = kappa.median() / computed;
            if ratio.max(1.0 / ratio) > 1.0 + DIFFUSIVITY_TOLERANCE {
                let mm2_s = Property::Diffusivity.si_per_input();
                return Err(RockError::Diffusivity {
                    name: rock.name.clone(),
                    given_mm2_s: kappa.median() / mm2_s,
                    computed_mm2_s: computed / mm2_s,
                    tolerance_percent: 100.0 * DIFFUSIVITY_TOLERANCE,
                });
            }
        } else {
            let centre =
                kappa.median() * of(rock, Property::Density).median() * of(rock, Property::SpecificHeat).median();
            let spread = quadrature(rock, [Property::Diffusivity, Property::Density, Property::SpecificHeat]);
            derive(rock, Property::Conductivity, centre, spread, "kappa rho c of this rock's figures")?;
        }
    } else if three.into_iter().any(has) {
        let centre = laws::diffusivity(
            of(rock, Property::Conductivity).median(),
            of(rock, Property::Density).median(),
            of(rock, Property::SpecificHeat).median(),
        );
        let spread = quadrature(rock, three);
        derive(rock, Property::Diffusivity, centre, spread, "k/(rho c) of this rock's figures")?;
    }
    Ok(())
}

/// Log spread of a product of independent figures.
fn quadrature(rock: &Rock, properties: [Property; 3]) -> f64 {
    let log_sd = |p: Property| {
        let d = rock.figure(p).distribution;
        match d.shape {
            Shape::Lognormal => d.spread,
            Shape::Normal => d.spread / d.centre,
            Shape::Triangular => {
                let (a, m, b) = (d.lower, d.centre, d.upper);
                ((a * a + b * b + m * m - a * b - a * m - b * m) / 18.0).sqrt() / ((a + m + b) / 3.0)
            }
        }
    };
    properties.into_iter().map(|p| log_sd(p) * log_sd(p)).sum::<f64>().sqrt()
}

fn derive(rock: &mut Rock, property: Property, centre: f64, spread: f64, how: &str) -> Result<(), RockError> {
    let wish = Distribution { shape: Shape::Lognormal, centre, spread, lower: 0.0, upper: f64::INFINITY };
    rock.figures[property as usize] = Figure {
        distribution: checked(&rock.name, property, wish)?,
        basis: Basis::Derived,
        source: how.to_owned(),
        locator: "log spreads added in quadrature".to_owned(),
    };
    Ok(())
}

/// A number without the last bits that a change of unit leaves, for people.
pub(crate) fn tidy(value: f64) -> f64 {
    if value.is_finite() { format!("{value:.11e}").parse().expect("a formatted number is a number") } else { value }
}

const PROPERTIES: &str = include_str!("tables/rock_properties.csv");
const RATIOS: &str = include_str!("tables/rock_temperature_ratios.csv");
const RESIDUALS: &str = include_str!("tables/rock_residual_strength.csv");
const SPALL: &str = include_str!("tables/spall_parameters.csv");
const LAWS: &str = include_str!("tables/rock_laws.csv");

#[derive(Deserialize)]
struct PropertyRow {
    rock: String,
    property: String,
    distribution: String,
    centre: f64,
    spread: Option<f64>,
    lower: f64,
    upper: f64,
    basis: String,
    source: String,
    locator: String,
}

#[derive(Deserialize)]
struct RatioRow {
    rock: String,
    temperature_c: f64,
    specific_heat_ratio: f64,
    strain_over_expansion20_k: f64,
}

#[derive(Deserialize)]
struct ResidualRow {
    class: String,
    rocks: String,
    property: String,
    t50_c: f64,
    width_c: f64,
    floor: f64,
}

#[derive(Deserialize)]
struct SpallRow {
    rock: String,
    weibull_modulus_compression: f64,
    spalling_to_laboratory_strength: f64,
    grain_mm: f64,
    flakable_share_low: f64,
    flakable_share_mid: f64,
    flakable_share_high: f64,
    basis: String,
}

#[derive(Deserialize)]
struct LawRow {
    rock: String,
    conductivity_law: String,
    diffusivity_lost_after_heating: String,
    basis: String,
    source: String,
}

/// The rows of an embedded table.
pub(super) fn rows<T: serde::de::DeserializeOwned>(table: &str, name: &str) -> Vec<T> {
    csv::Reader::from_reader(table.as_bytes())
        .deserialize()
        .map(|row| row.unwrap_or_else(|e| panic!("embedded table {name}: {e}")))
        .collect()
}

/// The basis of a table cell.
pub(super) fn basis(word: &str) -> Basis {
    Basis::parse(word).unwrap_or_else(|| panic!("embedded tables: no basis {word:?}"))
}

fn read_rocks() -> Vec<Rock> {
    let figures: Vec<PropertyRow> = rows(PROPERTIES, "rock_properties.csv");
    let ratios: Vec<RatioRow> = rows(RATIOS, "rock_temperature_ratios.csv");
    let residuals: Vec<ResidualRow> = rows(RESIDUALS, "rock_residual_strength.csv");
    let spalls: Vec<SpallRow> = rows(SPALL, "spall_parameters.csv");
    let laws: Vec<LawRow> = rows(LAWS, "rock_laws.csv");
    let mut names: Vec<&str> = Vec::new();
    for row in &figures {
        if !names.contains(&row.rock.as_str()) {
            names.push(&row.rock);
        }
    }
    names
        .into_iter()
        .map(|name| {
            let law = laws.iter().find(|r| r.rock == name).unwrap_or_else(|| panic!("rock_laws.csv lacks {name}"));
            let column = |value: fn(&RatioRow) -> f64| -> Vec<(f64, f64)> {
                ratios.iter().filter(|r| r.rock == name).map(|r| (kelvin(r.temperature_c), value(r))).collect()
            };
            let (residual_class, residual) = read_residual(&residuals, name);
            Rock {
                name: name.to_owned(),
                law: ConductivityLaw::parse(&law.conductivity_law)
                    .unwrap_or_else(|| panic!("rock_laws.csv: {:?}", law.conductivity_law)),
                law_basis: basis(&law.basis),
                law_source: law.source.clone(),
                heat_ratio: column(|r| r.specific_heat_ratio),
                strain_over_expansion_k: column(|r| r.strain_over_expansion20_k),
                residual,
                residual_class,
                spall: read_spall(&spalls, name),
                loses_diffusivity: match law.diffusivity_lost_after_heating.as_str() {
                    "yes" => true,
                    "no" => false,
                    other => panic!("rock_laws.csv: {other:?} is neither yes nor no"),
                },
                like: None,
                figures: Property::ALL.into_iter().map(|p| read_figure(&figures, name, p)).collect(),
            }
        })
        .collect()
}

fn read_figure(rows: &[PropertyRow], rock: &str, property: Property) -> Figure {
    let mut found = rows.iter().filter(|r| r.rock == rock && r.property == property.key());
    let row = found.next().unwrap_or_else(|| panic!("rock_properties.csv lacks {} of {rock}", property.key()));
    assert!(found.next().is_none(), "rock_properties.csv: {} of {rock} stands twice", property.key());
    let (shape, spread) = match (row.distribution.as_str(), row.spread) {
        ("lognormal", Some(spread)) => (Shape::Lognormal, spread),
        ("normal", Some(spread)) => (Shape::Normal, spread),
        ("triangular", None) => (Shape::Triangular, 0.0),
        (other, _) => panic!("rock_properties.csv: {} of {rock}: distribution {other:?}", property.key()),
    };
    Figure {
        distribution: Distribution { shape, centre: row.centre, spread, lower: row.lower, upper: row.upper },
        basis: basis(&row.basis),
        source: row.source.clone(),
        locator: row.locator.clone(),
    }
}

fn read_residual(rows: &[ResidualRow], rock: &str) -> (String, ResidualLaws) {
    let of = |property: &str| {
        rows.iter()
            .find(|r| r.property == property && r.rocks.split(' ').any(|name| name == rock))
            .unwrap_or_else(|| panic!("rock_residual_strength.csv lacks {property} of {rock}"))
    };
    let law = |property: &str| {
        let row = of(property);
        ResidualLaw { t50_k: kelvin(row.t50_c), width_k: row.width_c, floor: row.floor }
    };
    let laws = ResidualLaws {
        youngs_modulus: law("youngs_modulus"),
        compressive_strength: law("compressive_strength"),
        tensile_strength: law("tensile_strength"),
        fracture_toughness: law("fracture_toughness"),
    };
    (of("youngs_modulus").class.clone(), laws)
}

fn read_spall(rows: &[SpallRow], rock: &str) -> SpallParameters {
    let row = rows.iter().find(|r| r.rock == rock).unwrap_or_else(|| panic!("spall_parameters.csv lacks {rock}"));
    SpallParameters {
        weibull_modulus_compression: row.weibull_modulus_compression,
        spalling_to_laboratory_strength: row.spalling_to_laboratory_strength,
        grain_m: row.grain_mm / crate::units::MM_PER_M,
        flakable_share: [row.flakable_share_low, row.flakable_share_mid, row.flakable_share_high],
        basis: basis(&row.basis),
    }
}

/// Basis of the residual constants and where they come from.
pub const RESIDUAL_BASIS: (Basis, &str) = (Basis::Recalled, residual::SOURCE);

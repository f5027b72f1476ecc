//! The catalogue as text and as JSON: centres, spreads, laws, source and basis of every figure.
//!
//! Figures are written in the units in which a user can set them (mm2/s, GPa, MPa, C, mm). Pure: catalogue in, text out.

use serde::Serialize;

use crate::ensemble::distribution::{Distribution, Shape};
use crate::rock::catalogue::{RESIDUAL_BASIS, tidy};
use crate::rock::{Basis, Catalogue, Property, ResidualLaw, Rock};
use crate::units::{MM_PER_M, celsius};

/// The whole catalogue as it is written to JSON.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct CatalogueTable {
    /// Version of the embedded tables.
    pub catalogue_version: &'static str,
    /// What each basis word means.
    pub basis_words: Vec<BasisRow>,
    /// The rocks.
    pub rocks: Vec<RockRow>,
}

/// A basis word and its meaning.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct BasisRow {
    /// The word.
    pub basis: &'static str,
    /// Its meaning.
    pub meaning: &'static str,
}

/// One rock.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct RockRow {
    /// Its key.
    pub rock: String,
    /// The catalogue rock a user's rock started from; null for the catalogue's own.
    pub like: Option<String>,
    /// Every figure.
    pub figures: Vec<FigureRow>,
    /// How conductivity follows temperature.
    pub conductivity_law: LawRow,
    /// Whether diffusivity is lower after heating (assumption).
    pub loses_diffusivity_after_heating: bool,
    /// Specific heat ratio and strain by temperature.
    pub temperature_rows: Vec<TemperatureRow>,
    /// What the temperature rows rest on.
    pub temperature_rows_basis: &'static str,
    /// Where the temperature rows come from.
    pub temperature_rows_source: &'static str,
    /// What heating leaves.
    pub residual: ResidualRow,
    /// Flake parameters.
    pub spall: SpallRow,
    /// Names that are taken for this rock.
    pub aliases: Vec<AliasRow>,
}

/// One figure, in input units.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct FigureRow {
    /// Input name of the property.
    pub property: &'static str,
    /// Unit; empty for a plain number.
    pub unit: &'static str,
    /// `lognormal`, `normal` or `triangular`.
    pub distribution: &'static str,
    /// Median, mean or mode.
    pub centre: f64,
    /// Standard deviation: of the logarithm for a lognormal, in the unit for a normal, null for a triangular.
    pub spread: Option<f64>,
    /// Lower truncation.
    pub lower: f64,
    /// Upper truncation.
    pub upper: f64,
    /// Basis word.
    pub basis: &'static str,
    /// Source.
    pub source: String,
    /// Where in the source, or what was read there.
    pub locator: String,
}

/// The conductivity law.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct LawRow {
    /// Its word.
    pub law: &'static str,
    /// Its equation.
    pub equation: &'static str,
    /// Basis word.
    pub basis: &'static str,
    /// Source.
    pub source: String,
}

/// Specific heat ratio and strain at one temperature.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct TemperatureRow {
    /// Temperature, C.
    pub temperature_c: f64,
    /// Specific heat over its 20 C value.
    pub specific_heat_ratio: f64,
    /// Thermal strain from 20 C over the expansion at 20 C, K.
    pub strain_over_expansion_k: f64,
}

/// Residual laws of a rock's class.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct ResidualRow {
    /// The class.
    pub class: String,
    /// The equation.
    pub equation: &'static str,
    /// Basis word.
    pub basis: &'static str,
    /// Source.
    pub source: &'static str,
    /// One row a property.
    pub laws: Vec<ResidualLawRow>,
}

/// One residual law.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct ResidualLawRow {
    /// What it scales.
    pub property: &'static str,
    /// Middle of the fall, C.
    pub t50_c: f64,
    /// Width of the fall, K.
    pub width_k: f64,
    /// Share left at the end.
    pub floor: f64,
}

/// Flake parameters.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct SpallRow {
    /// Weibull modulus of compressive strength inside one boulder.
    pub weibull_modulus_compression: f64,
    /// Spalling strength over mean laboratory strength.
    pub spalling_to_laboratory_strength: f64,
    /// Grain size, mm.
    pub grain_mm: f64,
    /// Share of the surface that can flake: low, middle, high.
    pub flakable_share: [f64; 3],
    /// Basis word.
    pub basis: &'static str,
}

/// A name taken for a rock.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct AliasRow {
    /// The name.
    pub alias: String,
    /// Basis word.
    pub basis: &'static str,
    /// Why.
    pub why: String,
}

const TEMPERATURE_BASIS: &str = "derived";
const TEMPERATURE_SOURCE: &str = "mineral mixtures by rock; specific heat cross-checked by Waples & Waples 2004, quartz strain by the Landau form of Holland & Powell 2011";
const RESIDUAL_EQUATION: &str = "r + (1-r)(1 + exp((20-T50)/w))/(1 + exp((T-T50)/w)), T in C, the temperature reached";

fn meaning(basis: Basis) -> &'static str {
    match basis {
        Basis::Published => "read in the publication",
        Basis::Mixed => "part read, part recalled or judged",
        Basis::Recalled => "recalled from memory; check before citing",
        Basis::Derived => "computed from other figures",
        Basis::Judgement => "no measurement behind the exact number",
        Basis::Assumption => "an assumption that the settings can change, or a figure the user supplied",
    }
}

fn shape_word(shape: Shape) -> &'static str {
    match shape {
        Shape::Lognormal => "lognormal",
        Shape::Normal => "normal",
        Shape::Triangular => "triangular",
    }
}

impl CatalogueTable {
    /// The table of `rocks`, in their order.
    pub fn of<'a>(catalogue: &Catalogue, rocks: impl IntoIterator<Item = &'a Rock>) -> CatalogueTable {
        CatalogueTable {
            catalogue_version: Catalogue::VERSION,
            basis_words: Basis::ALL.into_iter().map(|b| BasisRow { basis: b.word(), meaning: meaning(b) }).collect(),
            rocks: rocks.into_iter().map(|rock| rock_row(catalogue, rock)).collect(),
        }
    }
}

fn rock_row(catalogue: &Catalogue, rock: &Rock) -> RockRow {
    let (basis, source) = RESIDUAL_BASIS;
    let law = |property, law: ResidualLaw| ResidualLawRow {
        property,
        t50_c: tidy(celsius(law.t50_k)),
        width_k: law.width_k,
        floor: law.floor,
    };
    RockRow {
        rock: rock.name.clone(),
        like: rock.like.clone(),
        figures: Property::ALL.into_iter().map(|p| figure_row(rock, p)).collect(),
        conductivity_law: LawRow {
            law: rock.law.word(),
            equation: rock.law.equation(),
            basis: rock.law_basis.word(),
            source: rock.law_source.clone(),
        },
        loses_diffusivity_after_heating: rock.loses_diffusivity,
        temperature_rows: (rock.heat_ratio.iter())
            .zip(&rock.strain_over_expansion_k)
            .map(|(&(t_k, ratio), &(_, strain))| TemperatureRow {
                temperature_c: tidy(celsius(t_k)),
                specific_heat_ratio: ratio,
                strain_over_expansion_k: strain,
            })
            .collect(),
        temperature_rows_basis: TEMPERATURE_BASIS,
        temperature_rows_source: TEMPERATURE_SOURCE,
        residual: ResidualRow {
            class: rock.residual_class.clone(),
            equation: RESIDUAL_EQUATION,
            basis: basis.word(),
            source,
            laws: vec![
                law("youngs_modulus", rock.residual.youngs_modulus),
                law("compressive_strength", rock.residual.compressive_strength),
                law("tensile_strength", rock.residual.tensile_strength),
                law("fracture_toughness", rock.residual.fracture_toughness),
            ],
        },
        spall: SpallRow {
            weibull_modulus_compression: rock.spall.weibull_modulus_compression,
            spalling_to_laboratory_strength: rock.spall.spalling_to_laboratory_strength,
            grain_mm: tidy(rock.spall.grain_m * MM_PER_M),
            flakable_share: rock.spall.flakable_share,
            basis: rock.spall.basis.word(),
        },
        aliases: (catalogue.aliases_of(&rock.name).into_iter())
            .map(|a| AliasRow { alias: a.alias.clone(), basis: a.basis.word(), why: a.why.clone() })
            .collect(),
    }
}

fn figure_row(rock: &Rock, property: Property) -> FigureRow {
    let figure = rock.figure(property);
    let Distribution { shape, centre, spread, lower, upper } = figure.distribution;
    let input = |si: f64| tidy(si / property.si_per_input());
    FigureRow {
        property: property.input_name(),
        unit: property.input_unit(),
        distribution: shape_word(shape),
        centre: input(centre),
        spread: match shape {
            Shape::Lognormal => Some(spread),
            Shape::Normal => Some(input(spread)),
            Shape::Triangular => None,
        },
        lower: input(lower),
        upper: input(upper),
        basis: figure.basis.word(),
        source: figure.source.clone(),
        locator: figure.locator.clone(),
    }
}

/// The catalogue as indented JSON, complete, ending in a line feed. `only` limits it to those rocks (by key).
///
/// # Panics
/// Never: the table holds finite numbers and text.
pub fn json(catalogue: &Catalogue, only: Option<&Rock>) -> String {
    let table = table(catalogue, only);
    serde_json::to_string_pretty(&table).expect("a table of numbers and text is JSON") + "\n"
}

fn table(catalogue: &Catalogue, only: Option<&Rock>) -> CatalogueTable {
    match only {
        Some(rock) => CatalogueTable::of(catalogue, [rock]),
        None => CatalogueTable::of(catalogue, catalogue.rocks()),
    }
}

/// The catalogue as text: an overview of centres, then every figure of every rock. `only` limits it to one rock.
pub fn text(catalogue: &Catalogue, only: Option<&Rock>) -> String {
    let table = table(catalogue, only);
    let mut out = format!(
        "Rock catalogue, version {}: {} rocks, {} figures each.\n\n",
        table.catalogue_version,
        table.rocks.len(),
        Property::ALL.len()
    );
    overview(&mut out, &table.rocks);
    for rock in &table.rocks {
        details(&mut out, rock);
    }
    out.push_str("\nBasis:\n");
    for row in &table.basis_words {
        out.push_str(&format!("  {:<11} {}\n", row.basis, row.meaning));
    }
    out.push_str("Spread: standard deviation of the logarithm for a lognormal, in the unit for a normal.\n");
    out
}

/// Column heads of the overview, in the order of [`Property::ALL`].
const HEADS: [&str; 13] = ["rho", "k", "c", "kappa", "alpha", "E", "nu", "UCS", "UTS", "m", "K_IC", "phi", "eps"];

fn overview(out: &mut String, rocks: &[RockRow]) {
    let width = name_width(rocks);
    out.push_str(&format!("{:<width$}", "centres"));
    for head in HEADS {
        out.push_str(&format!(" {head:>8}"));
    }
    out.push_str(&format!("\n{:<width$}", ""));
    for property in Property::ALL {
        out.push_str(&format!(" {:>8}", short_unit(property)));
    }
    out.push('\n');
    for rock in rocks {
        out.push_str(&format!("{:<width$}", rock.rock));
        for figure in &rock.figures {
            out.push_str(&format!(" {:>8}", number(figure.centre)));
        }
        out.push('\n');
    }
}

fn name_width(rocks: &[RockRow]) -> usize {
    rocks.iter().map(|r| r.rock.chars().count()).max().unwrap_or(0).max("centres".len()) + 1
}

fn short_unit(property: Property) -> &'static str {
    match property {
        Property::FractureToughness => "MPa m^.5",
        other => other.input_unit(),
    }
}

fn details(out: &mut String, rock: &RockRow) {
    out.push_str(&format!("\n{}", rock.rock));
    if let Some(like) = &rock.like {
        out.push_str(&format!(" (the user's own, like {like})"));
    }
    out.push('\n');
    let law = &rock.conductivity_law;
    out.push_str(&format!("  conductivity: {}: {} [{}: {}]\n", law.law, law.equation, law.basis, law.source));
    if rock.loses_diffusivity_after_heating {
        out.push_str("  loses up to a quarter of its diffusivity after heating [list of rocks: assumption]\n");
    }
    out.push_str(&format!(
        "  specific heat and strain: table of {} temperatures [{}: {}]\n",
        rock.temperature_rows.len(),
        rock.temperature_rows_basis,
        rock.temperature_rows_source
    ));
    let laws: Vec<String> = (rock.residual.laws.iter())
        .map(|l| {
            format!("{} {}/{}/{}", l.property.replace('_', " "), number(l.t50_c), number(l.width_k), number(l.floor))
        })
        .collect();
    out.push_str(&format!(
        "  after heating, class {} (T50 C/width K/floor): {} [{}: {}]\n",
        rock.residual.class,
        laws.join(", "),
        rock.residual.basis,
        rock.residual.source
    ));
    let spall = &rock.spall;
    let [low, middle, high] = spall.flakable_share.map(number);
    out.push_str(&format!(
        "  flakes: Weibull modulus in compression {}, spalling/laboratory strength {}, grain {} mm, flakable share {low}/{middle}/{high} [{}]\n",
        number(spall.weibull_modulus_compression),
        number(spall.spalling_to_laboratory_strength),
        number(spall.grain_mm),
        spall.basis
    ));
    for figure in &rock.figures {
        let locator = if figure.locator.is_empty() { String::new() } else { format!(" ({})", figure.locator) };
        out.push_str(&format!(
            "  {:<30} {:>9} spread {:>8}  {:>9} to {:<9} {:<10} {:<10} {}{locator}\n",
            figure.property,
            number(figure.centre),
            figure.spread.map_or_else(|| "-".to_owned(), number),
            number(figure.lower),
            number(figure.upper),
            figure.distribution,
            figure.basis,
            figure.source,
        ));
    }
    let names: Vec<&str> = rock.aliases.iter().map(|a| a.alias.as_str()).collect();
    if !names.is_empty() {
        out.push_str(&format!("  also written: {}\n", names.join(", ")));
    }
}

/// A figure to four significant digits.
fn number(value: f64) -> String {
    if value == 0.0 {
        return "0".to_owned();
    }
    if value.abs() < 1e-3 || value.abs() >= 1e6 {
        return format!("{}", Exponent(value));
    }
    let rounded: f64 = format!("{value:.3e}").parse().expect("a formatted number is a number");
    format!("{rounded}")
}

/// A number with an exponent and as many digits as it needs, four at most.
struct Exponent(f64);

impl std::fmt::Display for Exponent {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        let rounded: f64 = format!("{:.3e}", self.0).parse().map_err(|_| std::fmt::Error)?;
        write!(f, "{rounded:e}")
    }
}

//! A rock of the settings file: what it starts from, and the figures it changes.
//!
//! ```toml
//! [rocks.ridge_granite]
//! like = "granite"
//! source = "our own tests, 2026"
//! aliases = ["ridge gr"]
//! density_kg_m3 = 2655                                         # exactly this
//! tensile_strength_mpa = { median = 9, gsd = 1.3 }             # lognormal
//! porosity = { mean = 0.012, sd = 0.004, lower = 0.002 }       # normal, cut
//! emissivity = { low = 0.85, mode = 0.9, high = 0.95 }         # triangular
//! ```

use std::borrow::Cow;

use toml::Spanned;
use toml::de::{DeTable, DeValue};

use super::columns::{fold, nearest};
use super::setting_values::Reader;
use super::values::show;
use crate::ensemble::distribution::{Distribution, Shape};
use crate::rock::Property;
use crate::settings::UserRock;

/// Largest geometric standard deviation of a figure: a factor of five either way says that nothing is known.
const GSD_MAX: f64 = 5.0;

/// Reads one rock; `None` when something in it was refused.
pub(super) fn read(
    reader: &mut Reader<'_>,
    name: &Spanned<Cow<'_, str>>,
    value: &Spanned<DeValue<'_>>,
) -> Option<UserRock> {
    let prefix = format!("rocks.{}", show(name.get_ref()));
    let DeValue::Table(table) = value.get_ref() else {
        let at = reader.at(value);
        reader.refuse(
            "rock_unusable",
            &prefix,
            at,
            "a table of figures",
            "write [rocks.NAME] and the figures below it",
        );
        return None;
    };
    let mut rock = UserRock {
        name: name.get_ref().to_string(),
        like: name.get_ref().to_string(),
        figures: Vec::new(),
        source: String::new(),
        aliases: Vec::new(),
    };
    let mut whole = true;
    for (key, value) in table {
        let word = fold(key.get_ref());
        let label = format!("{prefix}.{}", show(&word));
        match word.as_str() {
            "like" => whole &= reader.text(&label, value).map(|t| rock.like = t).is_some(),
            "source" => whole &= reader.text(&label, value).map(|t| rock.source = t).is_some(),
            "aliases" => whole &= reader.texts(&label, value).map(|t| rock.aliases = t).is_some(),
            _ => match Property::parse(&word) {
                Some(property) => match figure(reader, &label, property, value) {
                    Some(figure) => rock.figures.push((property, figure)),
                    None => whole = false,
                },
                None => {
                    let known = Property::ALL.iter().map(|p| p.input_name()).chain(["like", "source", "aliases"]);
                    let remedy = match nearest(&word, known) {
                        Some(near) => format!("did you mean {near:?}?"),
                        None => "see docs/inputs.md for the names of the figures".to_owned(),
                    };
                    let at = (key.span(), "no known figure".to_owned());
                    reader.refuse(
                        "setting_unknown",
                        &label,
                        at,
                        "a catalogue property, like, source or aliases",
                        &remedy,
                    );
                    whole = false;
                }
            },
        }
    }
    if rock.source.is_empty() && whole {
        let at = (name.span(), "without a source".to_owned());
        let remedy = "add source = \"...\": results must be traceable";
        reader.refuse("source_missing", &prefix, at, "where the figures come from", remedy);
        return None;
    }
    rock.figures.sort_by_key(|(property, _)| *property);
    whole.then_some(rock)
}

/// One figure, SI.
fn figure(
    reader: &mut Reader<'_>,
    label: &str,
    property: Property,
    value: &Spanned<DeValue<'_>>,
) -> Option<Distribution> {
    let bound = property.bound();
    let (limits, range) = ((bound.min, bound.max), bound.range());
    let si = property.si_per_input();
    let DeValue::Table(table) = value.get_ref() else {
        return reader.number(label, value, limits, &range).map(|x| Distribution::point(x * si));
    };
    let mut get = |name: &str, limits, range: &str| match member(table, name) {
        Some(value) => reader.number(&format!("{label}.{name}"), value, limits, range).map(Some),
        None => Some(None),
    };
    let lower = get("lower", limits, &range)?;
    let upper = get("upper", limits, &range)?;
    let (median, mean) = (get("median", limits, &range)?, get("mean", limits, &range)?);
    let gsd = get("gsd", (1.0, GSD_MAX), "1 to 5")?;
    let sd = get("sd", (0.0, bound.max - bound.min), "0 or more")?;
    let (low, mode, high) = (get("low", limits, &range)?, get("mode", limits, &range)?, get("high", limits, &range)?);
    let known = ["lower", "upper", "median", "mean", "gsd", "sd", "low", "mode", "high"];
    let stranger = table.iter().any(|(key, _)| !known.contains(&key.get_ref().as_ref()));
    let (lower_si, upper_si) = (lower.unwrap_or(bound.min) * si, upper.unwrap_or(bound.max) * si);
    let figure = match (median, gsd, mean, sd, low, mode, high) {
        (Some(median), Some(gsd), None, None, None, None, None) => Some(Distribution {
            shape: Shape::Lognormal,
            centre: median * si,
            spread: libm::log(gsd),
            lower: lower_si,
            upper: upper_si,
        }),
        (None, None, Some(mean), Some(sd), None, None, None) => Some(Distribution {
            shape: Shape::Normal,
            centre: mean * si,
            spread: sd * si,
            lower: lower_si,
            upper: upper_si,
        }),
        (None, None, None, None, Some(low), Some(mode), Some(high)) if lower.is_none() && upper.is_none() => {
            Some(Distribution::triangular(low * si, mode * si, high * si))
        }
        _ => None,
    };
    let figure = figure.filter(|f| !stranger && f.lower <= f.centre && f.centre <= f.upper);
    if figure.is_none() {
        let expected =
            "a number, or median and gsd, or mean and sd (both with optional lower and upper), or low, mode and high";
        let at = reader.at(value);
        reader.refuse("figure_unreadable", label, at, expected, "write one of these forms, in rising order");
    }
    figure
}

fn member<'t, 'i>(table: &'t DeTable<'i>, name: &str) -> Option<&'t Spanned<DeValue<'i>>> {
    table.iter().find(|(key, _)| key.get_ref() == name).map(|(_, value)| value)
}

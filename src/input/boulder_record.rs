//! What a boulder's record says: its columns, and each group of them as domain types in SI.
//!
//! Size: the radius of the sphere of equal volume, R = (a b c)^(1/3) / 2 of the full axes, or half the diameter. Axes win
//! over a diameter; a difference above 30 % is a warning.

use super::values::{Record, show};
use crate::diagnostic::Severity;
use crate::fire::exposure::ExposureClass;
use crate::rock::{Catalogue, Property, Resolution};
use crate::site::{Contact, HeatingRecord, Kind, Moisture, RockChoice, StandingRecord, Support, Weathering};
use crate::units::{M2_S_PER_MM2_S, MM_PER_M, SECONDS_PER_MINUTE};

/// Columns of a boulder besides the catalogue's properties.
const COLUMNS: [&str; 30] = [
    "boulder_id",
    "rock",
    "diameter_m",
    "axis_a_m",
    "axis_b_m",
    "axis_c_m",
    "kind",
    "diffusivity_mm2_s",
    "diffusivity_gsd",
    "residence_min",
    "exposure",
    "heated_fraction",
    "standoff_m",
    "log_diameter_m",
    "weathering",
    "rind_mm",
    "moisture",
    "slope_deg",
    "downslope_azimuth_deg",
    "contact",
    "seat_depth_m",
    "centroid_setback_m",
    "centroid_height_m",
    "support",
    "base_scar_mm",
    "elevation_m",
    "elevation_sd_m",
    "observed_on",
    "longitude",
    "latitude",
];
/// Difference between diameter and axes from which it is worth a warning: neither a tape nor an eye is that far off.
const SIZE_DISAGREEMENT: f64 = 0.3;
/// Difference between a diffusivity and the one its companions imply from which it is worth a warning.
const PROPERTY_DISAGREEMENT: f64 = 0.1;
/// Standard remedy for an optional value.
const OR_EMPTY: &str = "correct it, or leave it empty when it was not recorded";

/// Every column of a boulder.
pub(super) fn columns() -> Vec<&'static str> {
    COLUMNS.into_iter().chain(Property::ALL.iter().map(|p| p.input_name())).collect()
}

/// The rock of a record; `None` when its name is not known, which refuses the record.
pub(super) fn rock(record: &mut Record<'_>, catalogue: &Catalogue) -> Option<RockChoice> {
    let Some(text) = record.text("rock") else { return Some(RockChoice::Mixture) };
    match catalogue.resolve(&text) {
        Resolution::Rock(key) => Some(RockChoice::Named(key)),
        Resolution::Unknown => Some(RockChoice::Mixture),
        Resolution::NotFound { nearest } => {
            let remedy = "write \"unknown\" when it was not recorded, or add the rock to the settings file";
            let expected = match nearest.len() {
                0 => "a catalogue rock or alias (the command `rocks` lists them)".to_owned(),
                _ => format!("a catalogue rock or alias, for example {}", nearest.join(", ")),
            };
            record.refuse("rock_unknown", "rock", &format!("{:?}", show(&text)), &expected, remedy);
            None
        }
    }
}

/// Radius of the sphere of equal volume and the axes, longest first.
pub(super) fn size(record: &mut Record<'_>, kind: Kind) -> (Option<f64>, Option<[f64; 3]>) {
    let remedy = "measure it again, or leave it empty and give the other size";
    let diameter = record.number("diameter_m", remedy);
    let axes = ["axis_a_m", "axis_b_m", "axis_c_m"].map(|name| record.number(name, remedy));
    let given = axes.iter().flatten().count();
    let before = record.refusals.len();
    if let [Some(a), Some(b), Some(c)] = axes {
        let mut sorted = [a, b, c];
        sorted.sort_by(|x, y| y.total_cmp(x));
        if sorted != [a, b, c] {
            record.note(
                "axes_sorted",
                "axis_a_m, axis_b_m, axis_c_m",
                &format!("{a}, {b}, {c}"),
                "longest first",
                "they were sorted",
            );
        }
        let of_axes = libm::cbrt(a * b * c);
        if let Some(d) = diameter.filter(|d| (d / of_axes).max(of_axes / d) > 1.0 + SIZE_DISAGREEMENT) {
            record.warn(
                "sizes_disagree",
                "diameter_m",
                &format!("{d}"),
                &format!("about {of_axes:.2} from the three axes"),
                "check both; the axes were used",
            );
        }
        return (Some(of_axes / 2.0), Some(sorted));
    }
    if given > 0 && diameter.is_some() {
        record.warn(
            "axes_incomplete",
            "axis_a_m, axis_b_m, axis_c_m",
            &format!("given {given} of 3 times"),
            "all three or none",
            "the diameter was used",
        );
    }
    if diameter.is_none() && kind == Kind::Boulder && before == record.refusals.len() {
        let found = match given {
            0 => "there is no size".to_owned(),
            n => format!("only {n} of three axes are given"),
        };
        let finding = record
            .finding(Severity::Refusal, "size_missing")
            .found(found)
            .expected("diameter_m, or axis_a_m, axis_b_m and axis_c_m")
            .remedy("measure it; only an outcrop may be recorded without a size");
        record.refusals.push(finding);
    }
    (diameter.map(|d| d / 2.0), None)
}

/// What bears on heating.
pub(super) fn heating(record: &mut Record<'_>, rock: &str) -> HeatingRecord {
    let catalogue = format!("remove it to use the catalogue value for {rock}");
    let exposure = "correct it, or remove it to use the burn's";
    let diffusivity = record.number("diffusivity_mm2_s", &catalogue).map(|x| x * M2_S_PER_MM2_S);
    let properties: Vec<(Property, f64)> = Property::ALL
        .into_iter()
        .filter(|p| *p != Property::Diffusivity)
        .filter_map(|p| record.number(p.input_name(), &catalogue).map(|x| (p, x * p.si_per_input())))
        .collect();
    let figure = |wanted| properties.iter().find(|(p, _)| *p == wanted).map(|(_, x)| *x);
    if let (Some(given), Some(k), Some(density), Some(heat)) =
        (diffusivity, figure(Property::Conductivity), figure(Property::Density), figure(Property::SpecificHeat))
    {
        let implied = k / (density * heat);
        if (given / implied).max(implied / given) > 1.0 + PROPERTY_DISAGREEMENT {
            record.warn(
                "properties_disagree",
                "diffusivity_mm2_s",
                &format!("{}", given / M2_S_PER_MM2_S),
                &format!("about {:.2} from conductivity, density and specific heat", implied / M2_S_PER_MM2_S),
                "give at most three of the four",
            );
        }
    }
    HeatingRecord {
        diffusivity_m2_s: diffusivity,
        diffusivity_gsd: record.number("diffusivity_gsd", &catalogue),
        residence_s: record.number("residence_min", exposure).map(|x| x * SECONDS_PER_MINUTE),
        exposure: record.word("exposure", ExposureClass::parse, ExposureClass::ALL, ExposureClass::word),
        heated_fraction: record
            .number("heated_fraction", "give the share of the surface from 0 to 1, or leave it empty"),
        standoff_m: record.number("standoff_m", OR_EMPTY),
        log_diameter_m: record.number("log_diameter_m", OR_EMPTY),
        weathering: record.word("weathering", Weathering::parse, Weathering::ALL, Weathering::word),
        rind_m: record.number("rind_mm", OR_EMPTY).map(|x| x / MM_PER_M),
        moisture: record.word("moisture", Moisture::parse, Moisture::ALL, Moisture::word),
        properties,
    }
}

/// How it stands.
pub(super) fn standing(record: &mut Record<'_>) -> StandingRecord {
    let azimuth = "give degrees from true north, 0 to 360, or leave it empty";
    StandingRecord {
        slope_deg: record.number("slope_deg", "give degrees along the fall line, not per cent, or leave it empty"),
        downslope_azimuth_deg: record.number("downslope_azimuth_deg", azimuth),
        contact: record.word("contact", Contact::parse, Contact::ALL, Contact::word),
        seat_depth_m: record.number("seat_depth_m", OR_EMPTY),
        centroid_setback_m: record.number("centroid_setback_m", OR_EMPTY),
        centroid_height_m: record.number("centroid_height_m", OR_EMPTY),
        support: record.word("support", Support::parse, Support::ALL, Support::word),
        base_scar_m: record.number("base_scar_mm", OR_EMPTY).map(|x| x / MM_PER_M),
        elevation_sd_m: record.number("elevation_sd_m", OR_EMPTY),
        observed_on: record.date("observed_on"),
    }
}

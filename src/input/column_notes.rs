//! What each input column is: for the schema, the template and whoever wants to know. Ranges are in [`crate::bounds`].

use crate::bounds::{self, Bound};
use crate::fire::exposure::ExposureClass;
use crate::rock::Property;
use crate::site::{Contact, GroundAfter, Kind, Moisture, Support, Weathering};

/// What a column may hold; every column may be empty or `null` besides.
#[derive(Debug, Clone, PartialEq)]
pub enum ColumnKind {
    /// The record's own name: text or a number.
    Name,
    /// Free text.
    Text,
    /// A day, ISO 8601.
    Day,
    /// A number in the range of [`bounds`].
    Number(&'static Bound),
    /// One of these words.
    Words(Vec<&'static str>),
}

/// One input column.
#[derive(Debug, Clone, PartialEq)]
pub struct ColumnNote {
    /// Its name.
    pub name: &'static str,
    /// What it may hold.
    pub kind: ColumnKind,
    /// What it means.
    pub meaning: &'static str,
}

fn note(name: &'static str, kind: ColumnKind, meaning: &'static str) -> ColumnNote {
    ColumnNote { name, kind, meaning }
}

fn number(name: &'static str, meaning: &'static str) -> ColumnNote {
    let bound = bounds::bound(name).unwrap_or_else(|| panic!("the range table lacks {name}"));
    note(name, ColumnKind::Number(bound), meaning)
}

fn words<T: Copy>(name: &'static str, all: &[T], word: fn(T) -> &'static str, meaning: &'static str) -> ColumnNote {
    note(name, ColumnKind::Words(all.iter().map(|w| word(*w)).collect()), meaning)
}

fn property_meaning(property: Property) -> &'static str {
    match property {
        Property::Density => "Density, measured on this boulder.",
        Property::Conductivity => "Thermal conductivity at 20 C, measured on this boulder.",
        Property::SpecificHeat => "Specific heat at 20 C, measured on this boulder.",
        Property::Diffusivity => "Thermal diffusivity at 20 C, measured on this boulder.",
        Property::Expansion => "Coefficient of linear thermal expansion at 20 C, measured on this boulder.",
        Property::YoungsModulus => "Young's modulus at 20 C, measured on this boulder.",
        Property::PoissonsRatio => "Poisson's ratio, measured on this boulder.",
        Property::CompressiveStrength => "Uniaxial compressive strength at 20 C, measured on this boulder.",
        Property::TensileStrength => "Tensile strength at 20 C, measured on this boulder.",
        Property::WeibullModulus => "Weibull modulus of the tensile strength, measured on this boulder.",
        Property::FractureToughness => "Fracture toughness at 20 C, measured on this boulder.",
        Property::Porosity => "Porosity as a share of the volume, measured on this boulder.",
        Property::Emissivity => "Thermal emissivity of the face, measured on this boulder.",
    }
}

/// Columns of a boulder, in the order of the template. `longitude` and `latitude` are columns of a table only; GeoJSON
/// has the geometry.
pub fn boulder_columns() -> Vec<ColumnNote> {
    let mut columns = vec![
        note("boulder_id", ColumnKind::Name, "Name of the boulder, unique; a feature id will do instead."),
        number("longitude", "Longitude, WGS 84. In a table only."),
        number("latitude", "Latitude, WGS 84. In a table only."),
        number("elevation_m", "Height above sea level; wins over the height of the coordinate."),
        number("elevation_sd_m", "Standard deviation of that height."),
        note(
            "rock",
            ColumnKind::Text,
            "Name of the catalogue or an alias; unknown or empty for the mixture of the settings.",
        ),
        words("kind", Kind::ALL, Kind::word, "A detached boulder (default) or an outcrop, taken as flat."),
        number("diameter_m", "Diameter."),
        number("axis_a_m", "Longest full axis; the axes win over a diameter."),
        number("axis_b_m", "Middle full axis."),
        number("axis_c_m", "Shortest full axis."),
        number("residence_min", "Residence time of the fire at this boulder; without it that of the burn."),
        words("exposure", ExposureClass::ALL, ExposureClass::word, "Exposure class at this boulder."),
        number("heated_fraction", "Heated share of the surface."),
        number("standoff_m", "Clear distance between flames and face."),
        number("log_diameter_m", "Diameter of a log that burnt against the boulder."),
        words("weathering", Weathering::ALL, Weathering::word, "State of weathering of the outer rock."),
        number("rind_mm", "Thickness of a weathering rind or loose sheet."),
        words("moisture", Moisture::ALL, Moisture::word, "Pore water at the time of the fire."),
        number("diffusivity_gsd", "Geometric standard deviation of the recorded diffusivity."),
        number("slope_deg", "Slope of the ground along the fall line."),
        number("downslope_azimuth_deg", "Bearing downslope, from true north."),
        words("contact", Contact::ALL, Contact::word, "What the boulder stands on."),
        number("seat_depth_m", "Depth of the seat in the ground."),
        number("centroid_setback_m", "How far the centroid lies behind the downhill edge of the footing."),
        number("centroid_height_m", "Height of the centroid above the footing."),
        words("support", Support::ALL, Support::word, "What holds it from below, and its state."),
        number("base_scar_mm", "Depth of fresh spalling at the base."),
        note("observed_on", ColumnKind::Day, "Day of the visit."),
    ];
    columns.extend(Property::ALL.iter().map(|p| number(p.input_name(), property_meaning(*p))));
    columns
}

/// Properties of a burn.
pub fn burn_columns() -> Vec<ColumnNote> {
    vec![
        note("burn_id", ColumnKind::Name, "Name of the burn, unique; a feature id will do instead."),
        number("residence_min", "Residence time of the fire."),
        number("residence_gsd", "Geometric standard deviation of the residence time."),
        words(
            "exposure",
            ExposureClass::ALL,
            ExposureClass::word,
            "Exposure class; inferred from the residence without it.",
        ),
        number("fireline_intensity_kw_m", "Fireline intensity."),
        number("flame_length_m", "Flame length."),
        number("spread_rate_m_min", "Rate of spread."),
        number("fuel_load_kg_m2", "Fuel consumed per area; caps the heat."),
        note("burned_on", ColumnKind::Day, "Day of the fire."),
        words("ground_after", GroundAfter::ALL, GroundAfter::word, "State of the ground cover after the fire."),
    ]
}

/// Properties of a trail.
pub fn trail_columns() -> Vec<ColumnNote> {
    vec![
        note("trail_id", ColumnKind::Name, "Name of the trail, unique; a feature id will do instead."),
        note("name", ColumnKind::Text, "The name people use."),
        number("passages_per_day", "Passages a day, all users together."),
        number("walking_speed_m_s", "Speed of a passage."),
        number("standing_minutes", "How long one person stands on a stretch, where people stop."),
    ]
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::collections::BTreeSet;

    fn names(notes: &[ColumnNote]) -> BTreeSet<&'static str> {
        let names: BTreeSet<_> = notes.iter().map(|n| n.name).collect();
        assert_eq!(names.len(), notes.len(), "a column is described twice");
        names
    }

    #[test]
    fn every_column_that_is_read_is_described_and_no_other() {
        let read = |columns: &[&'static str]| columns.iter().copied().collect::<BTreeSet<_>>();
        assert_eq!(names(&boulder_columns()), read(&super::super::boulder_record::columns()));
        assert_eq!(names(&burn_columns()), read(&super::super::burns::COLUMNS));
        assert_eq!(names(&trail_columns()), read(&super::super::trails::COLUMNS));
    }
}

//! The physical range of every numeric input: one table, one message.
//!
//! A value outside its range is refused where it is read. Ranges are those a practitioner would call impossible or a slip
//! of unit beyond (judgement throughout; a range is no claim about what is usual). Both ends are allowed. Units are
//! those of the input's own name.
//!
//! Refuses: NaN and infinities, whatever the range.

/// The range of one input.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Bound {
    /// Name of the column, property or setting.
    pub name: &'static str,
    /// Its unit; empty for a plain number.
    pub unit: &'static str,
    /// Least value allowed, in that unit.
    pub min: f64,
    /// Greatest value allowed, in that unit.
    pub max: f64,
}

impl Bound {
    /// Whether `value` (input unit) is allowed. NaN and infinities are not.
    pub fn holds(&self, value: f64) -> bool {
        value.is_finite() && value >= self.min && value <= self.max
    }

    /// The range as text, `0.1 to 10`; for findings about a column whose name carries the unit.
    pub fn range(&self) -> String {
        format!("{} to {}", plain(self.min), plain(self.max))
    }

    /// The one message about a value outside: `expected 0.1 to 10 mm2/s`.
    ///
    /// ```
    /// let bound = spallcast::bounds::bound("diffusivity_mm2_s").unwrap();
    /// assert_eq!(bound.message(), "expected 0.1 to 10 mm2/s");
    /// assert_eq!(bound.range(), "0.1 to 10");
    /// ```
    pub fn message(&self) -> String {
        if self.unit.is_empty() {
            format!("expected {}", self.range())
        } else {
            format!("expected {} {}", self.range(), self.unit)
        }
    }
}

/// A number as people write it: small ones with an exponent.
fn plain(value: f64) -> String {
    if value != 0.0 && value.abs() < 1e-3 { format!("{value:e}") } else { format!("{value}") }
}

/// The range of an input, by its name; `None` for a name that is no numeric input.
pub fn bound(name: &str) -> Option<&'static Bound> {
    BOUNDS.iter().find(|b| b.name == name)
}

const fn row(name: &'static str, unit: &'static str, min: f64, max: f64) -> Bound {
    Bound { name, unit, min, max }
}

/// Every range. A name that several records share (`residence_min`) stands once.
pub const BOUNDS: &[Bound] = &[
    // Place. The lowest dry land lies at -430 m, the highest summit at 8849 m.
    row("longitude", "degrees", -180.0, 180.0),
    row("latitude", "degrees", -90.0, 90.0),
    row("elevation_m", "m", -450.0, 9000.0),
    row("elevation_sd_m", "m", 0.0, 100.0),
    // Size: from a fist to the largest free boulders.
    row("diameter_m", "m", 0.05, 60.0),
    row("axis_a_m", "m", 0.02, 60.0),
    row("axis_b_m", "m", 0.02, 60.0),
    row("axis_c_m", "m", 0.02, 60.0),
    // Heating.
    row("diffusivity_gsd", "", 1.0, 5.0),
    // A grass front of about a second; a month of smouldering.
    row("residence_min", "min", 0.02, 43_200.0),
    row("residence_gsd", "", 1.0, 5.0),
    row("heated_fraction", "", 0.01, 1.0),
    row("standoff_m", "m", 0.0, 500.0),
    row("log_diameter_m", "m", 0.02, 10.0),
    row("rind_mm", "mm", 0.1, 1000.0),
    // Fire.
    row("fireline_intensity_kw_m", "kW/m", 1.0, 200_000.0),
    row("flame_length_m", "m", 0.05, 150.0),
    row("spread_rate_m_min", "m/min", 0.001, 600.0),
    row("fuel_load_kg_m2", "kg/m2", 0.01, 500.0),
    // Standing.
    row("slope_deg", "degrees", 0.0, 90.0),
    row("downslope_azimuth_deg", "degrees", 0.0, 360.0),
    row("seat_depth_m", "m", 0.0, 30.0),
    // Negative: the centroid already stands out beyond the edge.
    row("centroid_setback_m", "m", -30.0, 60.0),
    row("centroid_height_m", "m", 0.01, 60.0),
    row("base_scar_mm", "mm", 0.0, 5000.0),
    // Trails.
    row("passages_per_day", "passages a day", 0.0, 100_000.0),
    row("walking_speed_m_s", "m/s", 0.05, 40.0),
    row("standing_minutes", "min", 0.0, 1440.0),
    // Catalogue properties.
    row("density_kg_m3", "kg/m3", 800.0, 4500.0),
    row("conductivity_w_m_k", "W/mK", 0.2, 10.0),
    row("specific_heat_j_kg_k", "J/kgK", 400.0, 1500.0),
    row("diffusivity_mm2_s", "mm2/s", 0.1, 10.0),
    row("expansion_per_k", "1/K", 5e-7, 4e-5),
    row("youngs_modulus_gpa", "GPa", 0.1, 200.0),
    row("poissons_ratio", "", 0.0, 0.49),
    row("compressive_strength_mpa", "MPa", 0.5, 1000.0),
    row("tensile_strength_mpa", "MPa", 0.02, 100.0),
    row("weibull_modulus", "", 1.0, 60.0),
    row("fracture_toughness_mpa_sqrt_m", "MPa sqrt(m)", 0.01, 10.0),
    row("porosity", "", 0.0, 0.6),
    row("emissivity", "", 0.3, 1.0),
    // Probe and its series.
    row("initial_c", "C", -60.0, 90.0),
    row("depths_mm", "mm", 0.0, 30_000.0),
    row("times_s", "s", 0.0, 1e7),
    row("time_s", "s", 0.0, 1e7),
    row("surface_c", "C", -60.0, 1500.0),
    row("flux_kw_m2", "kW/m2", -300.0, 1000.0),
    row("irradiance_kw_m2", "kW/m2", 0.0, 1000.0),
    row("gas_c", "C", -60.0, 2000.0),
    row("h_w_m2k", "W/m2K", 0.0, 1000.0),
    // Run and settings.
    row("draws", "", 1.0, 65_536.0),
    row("threads", "", 1.0, 1024.0),
    row("horizon_days", "days", 1.0, 3650.0),
    row("flake_share_counted", "", 1e-6, 1.0),
    row("slab_leaves_probability", "", 0.0, 1.0),
    row("slab_generations_max", "", 1.0, 50.0),
    row("rain_mm_h", "mm/h", 0.0, 500.0),
    row("flame_front_width_m", "m", 1.0, 10_000.0),
    row("shaking_k", "", 0.0, 1.0),
    row("wet_spell_probability", "", 0.0, 1.0),
    row("reach_mean_deg", "degrees", 5.0, 60.0),
    row("reach_sd_deg", "degrees", 0.1, 20.0),
    row("bearing_sd_deg", "degrees", 0.1, 90.0),
    row("bearing_cut_deg", "degrees", 1.0, 90.0),
    row("unknown_bearing_deg", "degrees", 1.0, 180.0),
    row("friction_deg", "degrees", 1.0, 80.0),
    row("uplift_share", "", 0.0, 0.9),
    row("slope_sd_deg", "degrees", 0.0, 20.0),
    row("raster_slope_sd_deg", "degrees", 0.0, 30.0),
    row("geometry_rel_sd", "", 0.0, 1.0),
    row("seat_sd_m", "m", 0.0, 1.0),
    row("seat_rel_sd", "", 0.0, 1.0),
    row("kept_share_min", "", 0.001, 0.5),
    row("boulder_face_share", "", 0.0, 1.0),
    row("outcrop_face_share", "", 0.0, 1.0),
    row("bare_ground_factor", "", 1.0, 3.0),
    row("severe_ground_factor", "", 1.0, 3.0),
    row("height_sd_m", "m", 0.0, 100.0),
    row("height_tolerance_m", "m", 0.0, 1000.0),
    row("unknown_height_reach_m", "m", 0.0, 10_000.0),
    row("in_reach_share", "", 1e-6, 1.0),
    row("burnt_through_share", "", 1e-6, 1.0),
    row("looked_at_m", "m", 0.0, 10_000.0),
    row("passages_per_day_assumed", "passages a day", 0.0, 100_000.0),
    row("segment_m", "m", 5.0, 2000.0),
    row("keep_closed_at", "", 1e-12, 1.0),
    row("look_first_at", "", 1e-12, 1.0),
    row("warn_at", "", 1e-12, 1.0),
    row("vulnerability", "", 0.0, 1.0),
    row("person_width_m", "m", 0.1, 5.0),
    row("review_days", "days", 1.0, 3650.0),
    row("mixture_weight", "", 0.0, 1.0),
];

//! The names of the settings file, and where each of them goes. Ranges are in [`crate::bounds`].

use super::settings::RunFile;
use crate::ensemble::distribution::Distribution;
use crate::settings::RockfallSettings;

/// Subjects that may have a table of their own.
pub(super) const SUBJECTS: [&str; 3] = ["spall", "rockfall", "trail"];

/// A numeric setting: its name, its subject, whether it must be whole, and where it goes. Ranges are in [`crate::bounds`].
pub(super) struct Numeric(
    pub(super) &'static str,
    pub(super) &'static str,
    pub(super) bool,
    pub(super) fn(&mut RunFile, f64),
);

/// Every numeric setting.
pub(super) const NUMERIC: &[Numeric] = &[
    Numeric("draws", "", true, |r, x| r.settings.draws = x as usize),
    Numeric("threads", "", true, |r, x| r.threads = Some(x as usize)),
    Numeric("horizon_days", "", false, |r, x| r.settings.horizon_days = x),
    Numeric("flake_share_counted", "spall", false, |r, x| r.settings.spall.flake_share_counted = x),
    Numeric("slab_leaves_probability", "spall", false, |r, x| r.settings.spall.slab_leaves_probability = x),
    Numeric("slab_generations_max", "spall", true, |r, x| r.settings.spall.slab_generations_max = x as usize),
    Numeric("rain_mm_h", "spall", false, |r, x| r.settings.spall.rain_mm_h = x),
    Numeric("flame_front_width_m", "spall", false, |r, x| r.settings.spall.flame_front_width_m = x),
    Numeric("shaking_k", "rockfall", false, |r, x| r.settings.rockfall.shaking_k = x),
    Numeric("wet_spell_probability", "rockfall", false, |r, x| r.settings.rockfall.wet_spell_probability = x),
    Numeric("reach_mean_deg", "rockfall", false, |r, x| r.settings.rockfall.reach_mean_deg = x),
    Numeric("reach_sd_deg", "rockfall", false, |r, x| r.settings.rockfall.reach_sd_deg = x),
    Numeric("bearing_sd_deg", "rockfall", false, |r, x| r.settings.rockfall.bearing_sd_deg = x),
    Numeric("bearing_cut_deg", "rockfall", false, |r, x| r.settings.rockfall.bearing_cut_deg = x),
    Numeric("segment_m", "trail", false, |r, x| r.settings.trail.segment_m = x),
    Numeric("keep_closed_at", "trail", false, |r, x| r.settings.trail.keep_closed_at = x),
    Numeric("look_first_at", "trail", false, |r, x| r.settings.trail.look_first_at = x),
    Numeric("warn_at", "trail", false, |r, x| r.settings.trail.warn_at = x),
    Numeric("vulnerability", "trail", false, |r, x| r.settings.trail.vulnerability = x),
    Numeric("walking_speed_m_s", "trail", false, |r, x| r.settings.trail.walking_speed_m_s = x),
    Numeric("person_width_m", "trail", false, |r, x| r.settings.trail.person_width_m = x),
    Numeric("review_days", "trail", false, |r, x| r.settings.trail.review_days = x),
    Numeric("unknown_bearing_deg", "rockfall", false, |r, x| r.settings.rockfall.unknown_bearing_deg = x),
    Numeric("slope_sd_deg", "rockfall", false, |r, x| r.settings.rockfall.slope_sd_deg = x),
    Numeric("raster_slope_sd_deg", "rockfall", false, |r, x| r.settings.rockfall.raster_slope_sd_deg = x),
    Numeric("geometry_rel_sd", "rockfall", false, |r, x| r.settings.rockfall.geometry_rel_sd = x),
    Numeric("seat_sd_m", "rockfall", false, |r, x| r.settings.rockfall.seat_sd_m = x),
    Numeric("seat_rel_sd", "rockfall", false, |r, x| r.settings.rockfall.seat_rel_sd = x),
    Numeric("kept_share_min", "rockfall", false, |r, x| r.settings.rockfall.kept_share_min = x),
    Numeric("bare_ground_factor", "rockfall", false, |r, x| r.settings.rockfall.bare_ground_factor = x),
    Numeric("height_sd_m", "rockfall", false, |r, x| r.settings.rockfall.height_sd_m = x),
    Numeric("height_tolerance_m", "rockfall", false, |r, x| r.settings.rockfall.height_tolerance_m = x),
    Numeric("unknown_height_reach_m", "rockfall", false, |r, x| r.settings.rockfall.unknown_height_reach_m = x),
    Numeric("in_reach_share", "trail", false, |r, x| r.settings.trail.in_reach_share = x),
    Numeric("burnt_through_share", "trail", false, |r, x| r.settings.trail.burnt_through_share = x),
    Numeric("looked_at_m", "trail", false, |r, x| r.settings.trail.looked_at_m = x),
    Numeric("passages_per_day_assumed", "trail", false, |r, x| r.settings.trail.passages_per_day_assumed = x),
];

/// A setting of the subject `rockfall` that is triangular (lower end, mode, upper end), and where it goes.
pub(super) struct Triangular(pub(super) &'static str, pub(super) fn(&mut RockfallSettings, Distribution));

/// Every triangular setting.
pub(super) const TRIANGULAR: &[Triangular] = &[
    Triangular("uplift_share", |r, d| r.uplift_share = d),
    Triangular("boulder_face_share", |r, d| r.boulder_face_share = d),
    Triangular("outcrop_face_share", |r, d| r.outcrop_face_share = d),
    Triangular("severe_ground_factor", |r, d| r.severe_ground_factor = d),
];

/// Names that are not numbers.
pub(super) const OTHER: [&str; 15] = [
    "burn",
    "boulders",
    "trails",
    "terrain",
    "out",
    "seed",
    "format",
    "strict",
    "quiet",
    "json_log",
    "as_of",
    "unknown_rock",
    "rocks",
    "friction_deg",
    "support_loss",
];

//! Everything that a run may change, with its default and the basis of the default.
//!
//! `input::settings` reads these from a TOML file and the command line; the model reads them from here. A default that
//! is marked (A) is an assumption of ours with no publication behind the number.

use crate::ensemble::distribution::Distribution;
use crate::rock::Property;
use crate::rockfall::{fragment, friction};

/// The whole run's settings.
#[derive(Debug, Clone, PartialEq)]
pub struct Settings {
    /// Draws of the ensemble; a multiple of [`Settings::REPLICATES`].
    pub draws: usize,
    /// Seed of the point set.
    pub seed: u64,
    /// Horizon of the source likelihood, days.
    pub horizon_days: f64,
    /// Spall model.
    pub spall: SpallSettings,
    /// Rockfall source and reach.
    pub rockfall: RockfallSettings,
    /// Trail segments and proposals.
    pub trail: TrailSettings,
    /// Shares of rocks for "unknown": catalogue key and weight, weights summing to 1.
    pub unknown_rock: Vec<(String, f64)>,
    /// Rocks of the user's own, overriding or adding to the catalogue.
    pub rocks: Vec<UserRock>,
}

/// A rock of the settings file: what it starts from and what it changes.
#[derive(Debug, Clone, PartialEq)]
pub struct UserRock {
    /// Its name.
    pub name: String,
    /// The catalogue rock it starts from; its own name when it overrides one.
    pub like: String,
    /// Changed figures, SI.
    pub figures: Vec<(Property, Distribution)>,
    /// Where the figures come from, as the user states it.
    pub source: String,
    /// Further names that field people write.
    pub aliases: Vec<String>,
}

/// Settings of the spall model.
#[derive(Debug, Clone, PartialEq)]
pub struct SpallSettings {
    /// Flaked share of the heated face from which a draw counts as flaked (A: about what a field party records).
    pub flake_share_counted: f64,
    /// Probability that a slab leaves during the fire (A).
    pub slab_leaves_probability: f64,
    /// Slabs that may follow one another (A).
    pub slab_generations_max: usize,
    /// Rain during cooling, mm/h; 0 is none.
    pub rain_mm_h: f64,
    /// Width of the flame front for the stand-off view factor, m (A).
    pub flame_front_width_m: f64,
}

impl Default for SpallSettings {
    fn default() -> Self {
        SpallSettings {
            flake_share_counted: 0.01,
            slab_leaves_probability: 0.5,
            slab_generations_max: 6,
            rain_mm_h: 0.0,
            flame_front_width_m: 100.0,
        }
    }
}

/// Settings of the rockfall source and its reach.
#[derive(Debug, Clone, PartialEq)]
pub struct RockfallSettings {
    /// Horizontal pseudo-static coefficient; 0 is no shaking.
    pub shaking_k: f64,
    /// Probability of a wet spell within the horizon (A).
    pub wet_spell_probability: f64,
    /// Mean of the reach angle, degrees (A).
    pub reach_mean_deg: f64,
    /// Standard deviation of the reach angle, degrees (A).
    pub reach_sd_deg: f64,
    /// Standard deviation of the travel bearing, degrees (A).
    pub bearing_sd_deg: f64,
    /// Cut of the travel bearing either side, degrees (A).
    pub bearing_cut_deg: f64,
    /// Half-width of the even spread of bearings where the downslope bearing is unknown, degrees (A).
    pub unknown_bearing_deg: f64,
    /// Friction by contact in the order of `Contact::ALL`, degrees (mixed; see `rockfall::friction`).
    pub friction_deg: [Distribution; 5],
    /// Chance that a support is gone within the horizon, in the order of `Support::ALL` (A).
    pub support_loss: [f64; 5],
    /// Uplift share of the normal weight in a wet spell (A).
    pub uplift_share: Distribution,
    /// Standard deviation of a slope read on the ground, degrees (A).
    pub slope_sd_deg: f64,
    /// Standard deviation of a slope taken from the raster, degrees (A: a cell is wider than a boulder's footing).
    pub raster_slope_sd_deg: f64,
    /// Relative standard deviation of setback and centroid height (A).
    pub geometry_rel_sd: f64,
    /// Least standard deviation of a seat depth, m (A).
    pub seat_sd_m: f64,
    /// Relative standard deviation of a seat depth (A).
    pub seat_rel_sd: f64,
    /// Share of draws that must stand today, else the measurements are in doubt.
    pub kept_share_min: f64,
    /// Share of a boulder's faces steeper than the friction of a fresh split (A).
    pub boulder_face_share: Distribution,
    /// The same for an outcrop (A).
    pub outcrop_face_share: Distribution,
    /// Factor on run-out over bare ground: 1.17 from a cleared stand (published).
    pub bare_ground_factor: f64,
    /// Factor on run-out over severely burnt ground (A).
    pub severe_ground_factor: Distribution,
    /// Standard deviation of heights where the record gives none, m; 0 leaves the angle as it is.
    pub height_sd_m: f64,
    /// Recorded height and raster may differ by this much, m; beyond, the raster is used and the height flagged (A).
    pub height_tolerance_m: f64,
    /// Within this distance a boulder whose height is unknown may reach a trail, m (A).
    pub unknown_height_reach_m: f64,
}

impl Default for RockfallSettings {
    fn default() -> Self {
        RockfallSettings {
            shaking_k: 0.0,
            wet_spell_probability: 0.9,
            reach_mean_deg: 34.0,
            reach_sd_deg: 4.0,
            bearing_sd_deg: 10.0,
            bearing_cut_deg: 30.0,
            unknown_bearing_deg: 45.0,
            friction_deg: friction::FRICTION_DEG,
            support_loss: friction::SUPPORT_LOSS,
            uplift_share: Distribution::triangular(0.0, 0.05, 0.15),
            slope_sd_deg: 2.0,
            raster_slope_sd_deg: 5.0,
            geometry_rel_sd: 0.15,
            seat_sd_m: 0.02,
            seat_rel_sd: 0.2,
            kept_share_min: 0.05,
            boulder_face_share: fragment::BOULDER_FACE_SHARE,
            outcrop_face_share: fragment::OUTCROP_FACE_SHARE,
            bare_ground_factor: 1.17,
            severe_ground_factor: Distribution::triangular(1.0, 1.17, 1.40),
            height_sd_m: 0.0,
            height_tolerance_m: 30.0,
            unknown_height_reach_m: 500.0,
        }
    }
}

/// Settings of trail segments and proposals. Thresholds are on the upper 95 % value of the death chance per passage.
#[derive(Debug, Clone, PartialEq)]
pub struct TrailSettings {
    /// Length of a segment, m.
    pub segment_m: f64,
    /// At or above: keep closed (A).
    pub keep_closed_at: f64,
    /// At or above: closed until a qualified person has looked (A).
    pub look_first_at: f64,
    /// At or above: open with warning, no stopping (A).
    pub warn_at: f64,
    /// Chance that a person hit in the open dies. AGS 2000 recommends 0.5 of .1 to .7 (published).
    pub vulnerability: f64,
    /// Walking speed where the trail does not say, m/s (A).
    pub walking_speed_m_s: f64,
    /// Width of a person, m (A).
    pub person_width_m: f64,
    /// Share of falls that must reach a stretch for an unassessed boulder to count as within reach (A: about the share
    /// beyond 22 degrees).
    pub in_reach_share: f64,
    /// Share from which a burnt-through support keeps a stretch closed until looked at (A).
    pub burnt_through_share: f64,
    /// A stretch farther than this from every listed boulder counts as not looked at, m (A).
    pub looked_at_m: f64,
    /// Passages a day where the trail does not say, for the inspection order only (A).
    pub passages_per_day_assumed: f64,
    /// Days until the next review of a proposal (A).
    pub review_days: f64,
    /// Day on which the run is made, ISO 8601; review dates count from it. `None`: the day of the run.
    pub as_of: Option<jiff::civil::Date>,
}

impl Default for TrailSettings {
    fn default() -> Self {
        TrailSettings {
            segment_m: 50.0,
            keep_closed_at: 1e-5,
            look_first_at: 1e-6,
            warn_at: 1e-7,
            vulnerability: 0.5,
            walking_speed_m_s: 1.0,
            person_width_m: 0.5,
            in_reach_share: 1e-3,
            burnt_through_share: 0.01,
            looked_at_m: 300.0,
            passages_per_day_assumed: 10.0,
            review_days: 30.0,
            as_of: None,
        }
    }
}

impl Settings {
    /// Independent scrambles whose spread gives the printed sampling error.
    pub const REPLICATES: usize = 16;
    /// Largest number of draws: the point set has 65,536 points a replicate at most; this is far below.
    pub const DRAWS_MAX: usize = 65_536;

    /// The draws that are run for a wish of `draws`: rounded up to whole replicates.
    ///
    /// ```
    /// assert_eq!(spallcast::settings::Settings::whole_replicates(100), 112);
    /// assert_eq!(spallcast::settings::Settings::whole_replicates(512), 512);
    /// ```
    pub fn whole_replicates(draws: usize) -> usize {
        draws.max(1).div_ceil(Self::REPLICATES) * Self::REPLICATES
    }
}

impl Default for Settings {
    fn default() -> Self {
        let mixture = ["granite", "gneiss", "basalt", "rhyolite", "sandstone", "limestone"];
        Settings {
            draws: 512,
            seed: 1,
            horizon_days: 180.0,
            spall: SpallSettings::default(),
            rockfall: RockfallSettings::default(),
            trail: TrailSettings::default(),
            unknown_rock: mixture.iter().map(|r| ((*r).to_owned(), 1.0 / mixture.len() as f64)).collect(),
            rocks: Vec::new(),
        }
    }
}

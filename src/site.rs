//! What a field party brings back, checked and in SI: boulders, burns, trails.
//!
//! These are the domain types between `input` (text to types) and `assess` (types to numbers). Every value here has
//! passed its range in [`crate::bounds`]; a value that was not recorded is `None`, never a default: defaults belong to
//! the model and are applied, and flagged, where they are used.

use geo::MultiPolygon;
use jiff::civil::Date;

use crate::fire::exposure::ExposureClass;
use crate::rock::Property;

/// A point on the ground, WGS 84.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Position {
    /// Longitude, degrees east, -180 to 180.
    pub lon_deg: f64,
    /// Latitude, degrees north, -90 to 90.
    pub lat_deg: f64,
    /// Height above the datum, m, when recorded.
    pub height_m: Option<f64>,
}

/// A set of words of which a record may use one.
macro_rules! word_enum {
    ($(#[$meta:meta])* $name:ident { $($(#[$vmeta:meta])* $variant:ident = $word:literal),+ $(,)? }) => {
        $(#[$meta])*
        #[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
        pub enum $name { $($(#[$vmeta])* $variant),+ }
        impl $name {
            /// Every variant, in the order of severity or of the contract.
            pub const ALL: &'static [$name] = &[$($name::$variant),+];
            /// The word used in files.
            pub fn word(self) -> &'static str { match self { $($name::$variant => $word),+ } }
            /// Reads the word, ignoring case and surrounding space, with `-` and space taken as `_`.
            pub fn parse(text: &str) -> Option<$name> {
                let key = text.trim().to_ascii_lowercase().replace(['-', ' '], "_");
                $name::ALL.iter().copied().find(|v| v.word() == key)
            }
        }
    };
}
pub(crate) use word_enum;

word_enum! {
    /// What kind of rock body the record describes.
    Kind {
        /// A detached block, heated on a convex face.
        Boulder = "boulder",
        /// A face of bedrock, taken as flat.
        Outcrop = "outcrop",
    }
}
word_enum! {
    /// State of weathering of the outer rock.
    Weathering { /// No visible change.
        Fresh = "fresh", /// Discoloured.
        Slight = "slight", /// Weakened, still rings.
        Moderate = "moderate", /// Crumbles at edges.
        High = "high" }
}
word_enum! {
    /// Pore water at the time of the fire.
    Moisture { /// No pore water.
        Dry = "dry", /// Half saturated.
        Damp = "damp", /// Saturated.
        Wet = "wet" }
}
word_enum! {
    /// What the boulder stands on.
    Contact { /// Rock on rock.
        Rock = "rock", /// Gravel, sand.
        CoarseSoil = "coarse_soil", /// Silt, clay.
        FineSoil = "fine_soil", /// Burnt duff or ash.
        BurntDuff = "burnt_duff", /// Wood.
        Wood = "wood" }
}
word_enum! {
    /// State of what holds the boulder from below (log, root, stump, chock stone).
    Support { /// Nothing holds it.
        None = "none", /// Unburnt.
        Sound = "sound", /// Bark and surface burnt.
        Scorched = "scorched", /// Deeply burnt.
        Charred = "charred", /// Burnt through.
        BurntThrough = "burnt_through" }
}
word_enum! {
    /// State of the ground cover after the fire.
    GroundAfter { /// As before.
        Intact = "intact", /// Cover gone.
        Bare = "bare", /// High severity.
        Severe = "severe" }
}

/// Which rock a record names.
#[derive(Debug, Clone, PartialEq, Eq, Hash)]
pub enum RockChoice {
    /// A catalogue key (after aliases are resolved), for example `granite`.
    Named(String),
    /// `unknown` or missing: the settings' mixture is used and flagged.
    Mixture,
}

/// What the record says that bears on heating. SI; `None` where silent.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct HeatingRecord {
    /// Median thermal diffusivity at 20 C, m2/s.
    pub diffusivity_m2_s: Option<f64>,
    /// Geometric standard deviation of the diffusivity, from 1 up.
    pub diffusivity_gsd: Option<f64>,
    /// Residence time at this boulder, s.
    pub residence_s: Option<f64>,
    /// Exposure class at this boulder.
    pub exposure: Option<ExposureClass>,
    /// Heated share of the surface, 0 to 1.
    pub heated_fraction: Option<f64>,
    /// Distance from the edge of the flames, m.
    pub standoff_m: Option<f64>,
    /// Diameter of a log or stump that burnt against the rock, m.
    pub log_diameter_m: Option<f64>,
    /// State of weathering.
    pub weathering: Option<Weathering>,
    /// Depth of a weathering rind or lamina, m.
    pub rind_m: Option<f64>,
    /// Pore water.
    pub moisture: Option<Moisture>,
    /// Catalogue properties measured on this boulder, SI, in the order of [`Property::ALL`], each at most once.
    pub properties: Vec<(Property, f64)>,
}

/// What the record says about how the boulder stands. SI; `None` where silent.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct StandingRecord {
    /// Slope along the fall line, degrees.
    pub slope_deg: Option<f64>,
    /// Downslope bearing from true north, degrees clockwise, 0 to 360.
    pub downslope_azimuth_deg: Option<f64>,
    /// What it stands on.
    pub contact: Option<Contact>,
    /// Seat depth, m.
    pub seat_depth_m: Option<f64>,
    /// Distance along the slope from the downslope contact edge to the foot of the centroid's perpendicular, m.
    pub centroid_setback_m: Option<f64>,
    /// Centroid height above the contact plane, m.
    pub centroid_height_m: Option<f64>,
    /// State of the support.
    pub support: Option<Support>,
    /// Depth of a scar measured at the base, m.
    pub base_scar_m: Option<f64>,
    /// Standard deviation of the height, m.
    pub elevation_sd_m: Option<f64>,
    /// Day of the last look.
    pub observed_on: Option<Date>,
}

/// One boulder or outcrop of the inventory.
#[derive(Debug, Clone, PartialEq)]
pub struct Boulder {
    /// Its own name, unique in the inventory.
    pub id: String,
    /// Where it is; the footprint's interior point when a footprint was given. Height from `elevation_m` or the
    /// coordinate's third number.
    pub position: Position,
    /// Which rock.
    pub rock: RockChoice,
    /// Boulder or outcrop.
    pub kind: Kind,
    /// Radius of the sphere of equal volume, m; `None` only for an outcrop without a size.
    pub radius_m: Option<f64>,
    /// The three axes (full lengths, longest first), m, when recorded.
    pub axes_m: Option<[f64; 3]>,
    /// What bears on heating.
    pub heating: HeatingRecord,
    /// How it stands.
    pub standing: StandingRecord,
}

/// One burn unit.
#[derive(Debug, Clone, PartialEq)]
pub struct Burn {
    /// Its own name.
    pub id: String,
    /// Its perimeter, lon/lat degrees, rings closed, exterior counter-clockwise; cut at the antimeridian.
    pub area: MultiPolygon<f64>,
    /// Median residence time, s.
    pub residence_s: Option<f64>,
    /// Geometric standard deviation of the residence time.
    pub residence_gsd: Option<f64>,
    /// Exposure class.
    pub exposure: Option<ExposureClass>,
    /// Fireline intensity, W/m.
    pub fireline_intensity_w_m: Option<f64>,
    /// Flame length, m.
    pub flame_length_m: Option<f64>,
    /// Rate of spread, m/s.
    pub spread_rate_m_s: Option<f64>,
    /// Fuel load, kg/m2.
    pub fuel_load_kg_m2: Option<f64>,
    /// Day of the fire.
    pub burned_on: Option<Date>,
    /// State of the ground after it.
    pub ground_after: Option<GroundAfter>,
}

/// One trail, road or crew line.
#[derive(Debug, Clone, PartialEq)]
pub struct Trail {
    /// Its own name.
    pub id: String,
    /// The name people use.
    pub name: Option<String>,
    /// Its parts in order, each of two positions or more.
    pub lines: Vec<Vec<Position>>,
    /// Passages a day.
    pub passages_per_day: Option<f64>,
    /// Walking speed, m/s.
    pub walking_speed_m_s: Option<f64>,
    /// Time that one person stands still within a segment, s.
    pub standing_s: Option<f64>,
}

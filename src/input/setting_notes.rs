//! What each setting is: meaning, default and basis, for the schema and the template. Ranges are in [`crate::bounds`];
//! defaults are read from [`Settings::default`].

use crate::bounds::{self, Bound};
use crate::ensemble::distribution::Distribution;
use crate::settings::Settings;
use crate::site::{Contact, Support};

/// What a setting may hold.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum SettingKind {
    /// A number in a range.
    Number(&'static Bound),
    /// A whole number in a range.
    Whole(&'static Bound),
    /// A whole number from 0 up.
    Seed,
    /// Three numbers in rising order, each in the range: lower end, mode, upper end.
    Triangle(&'static Bound),
    /// A table of such triples by contact.
    TrianglesByContact(&'static Bound),
    /// A table of chances by support.
    ChancesBySupport,
    /// A table of weights by rock.
    Weights,
    /// Rocks of the user's own by name.
    Rocks,
    /// A path.
    Path,
    /// Text, or an array of texts.
    Texts,
    /// True or false.
    Switch,
    /// A day, ISO 8601.
    Day,
}

/// One setting.
#[derive(Debug, Clone, PartialEq)]
pub struct SettingNote {
    /// Its name.
    pub name: &'static str,
    /// The table it may stand in besides the top level: `spall`, `rockfall`, `trail`, or empty.
    pub subject: &'static str,
    /// What it may hold.
    pub kind: SettingKind,
    /// Its value as TOML: the default, or an example.
    pub toml: String,
    /// What holds without it, where [`SettingNote::toml`] is an example.
    pub otherwise: Option<&'static str>,
    /// What it means.
    pub meaning: &'static str,
    /// What the default rests on.
    pub basis: &'static str,
}

const ASSUMPTION: &str = "assumption";
const CHOICE: &str = "a choice of the run";

fn bound(name: &str) -> &'static Bound {
    bounds::bound(name).unwrap_or_else(|| panic!("the range table lacks {name}"))
}

/// A number as TOML that reads back as the same number.
fn number(x: f64) -> String {
    if x != 0.0 && x.abs() < 1e-3 { format!("{x:e}") } else { format!("{x}") }
}

fn triple(d: &Distribution) -> String {
    format!("[{}, {}, {}]", number(d.lower), number(d.centre), number(d.upper))
}

fn real(
    name: &'static str,
    subject: &'static str,
    value: f64,
    basis: &'static str,
    meaning: &'static str,
) -> SettingNote {
    let kind = SettingKind::Number(bound(name));
    SettingNote { name, subject, kind, toml: number(value), otherwise: None, meaning, basis }
}

fn whole(
    name: &'static str,
    subject: &'static str,
    value: usize,
    basis: &'static str,
    meaning: &'static str,
) -> SettingNote {
    let kind = SettingKind::Whole(bound(name));
    SettingNote { name, subject, kind, toml: value.to_string(), otherwise: None, meaning, basis }
}

fn triangle(name: &'static str, value: &Distribution, basis: &'static str, meaning: &'static str) -> SettingNote {
    let kind = SettingKind::Triangle(bound(name));
    SettingNote { name, subject: "rockfall", kind, toml: triple(value), otherwise: None, meaning, basis }
}

fn example(
    name: &'static str,
    kind: SettingKind,
    toml: &str,
    otherwise: &'static str,
    meaning: &'static str,
) -> SettingNote {
    SettingNote { name, subject: "", kind, toml: toml.to_owned(), otherwise: Some(otherwise), meaning, basis: CHOICE }
}

/// Every setting, in the order of the template.
pub fn setting_notes() -> Vec<SettingNote> {
    let settings = Settings::default();
    let mut notes = run(&settings);
    notes.extend(spall(&settings));
    notes.extend(rockfall(&settings));
    notes.extend(trail(&settings));
    notes
}

fn run(settings: &Settings) -> Vec<SettingNote> {
    let weights: Vec<String> = settings.unknown_rock.iter().map(|(rock, w)| format!("{rock} = {w}")).collect();
    let off = |name, meaning| SettingNote {
        name,
        subject: "",
        kind: SettingKind::Switch,
        toml: "false".to_owned(),
        otherwise: None,
        meaning,
        basis: CHOICE,
    };
    vec![
        example("burn", SettingKind::Path, "\"burn.geojson\"", "give --burn", "Burn perimeters."),
        example(
            "boulders",
            SettingKind::Path,
            "\"boulders.csv\"",
            "give --boulders",
            "Boulder inventory; \"-\" is standard input.",
        ),
        example("trails", SettingKind::Path, "\"trails.geojson\"", "no trails", "Trails, roads, crew lines."),
        example("terrain", SettingKind::Path, "\"terrain.tif\"", "no raster", "Elevation raster, GeoTIFF in metres."),
        example(
            "out",
            SettingKind::Path,
            "\"results\"",
            "give --out",
            "Folder of the results; \"-\" is standard output.",
        ),
        SettingNote {
            name: "format",
            subject: "",
            kind: SettingKind::Texts,
            toml: "[\"geojson\"]".to_owned(),
            otherwise: None,
            meaning: "Formats to write: geojson, gpkg.",
            basis: CHOICE,
        },
        whole("draws", "", settings.draws, "sampling error", "Draws of the ensemble; rounded up to a multiple of 16."),
        SettingNote {
            name: "seed",
            subject: "",
            kind: SettingKind::Seed,
            toml: settings.seed.to_string(),
            otherwise: None,
            meaning: "Seed of the point set; equal seed and inputs give equal bytes.",
            basis: CHOICE,
        },
        example(
            "threads",
            SettingKind::Whole(bound("threads")),
            "2",
            "one per core",
            "Threads; they do not change the results.",
        ),
        real("horizon_days", "", settings.horizon_days, ASSUMPTION, "Days that the source likelihood refers to."),
        off("strict", "Fail, writing nothing, when any boulder is not assessed."),
        off("quiet", "Print nothing but errors."),
        off("json_log", "Write messages as one JSON object a line."),
        SettingNote {
            name: "unknown_rock",
            subject: "",
            kind: SettingKind::Weights,
            toml: format!("{{ {} }}", weights.join(", ")),
            otherwise: None,
            meaning: "Rocks and weights for a boulder whose rock is not known; scaled to a sum of 1.",
            basis: ASSUMPTION,
        },
        SettingNote {
            name: "rocks",
            subject: "",
            kind: SettingKind::Rocks,
            toml: "{ ridge_granite = { like = \"granite\", source = \"own tests\", density_kg_m3 = 2655 } }".to_owned(),
            otherwise: Some("the catalogue alone"),
            meaning: "Rocks of your own: what each starts from, what was measured, and its source.",
            basis: CHOICE,
        },
    ]
}

fn spall(settings: &Settings) -> Vec<SettingNote> {
    let s = &settings.spall;
    vec![
        real(
            "flake_share_counted",
            "spall",
            s.flake_share_counted,
            ASSUMPTION,
            "Flaked share of the heated face from which a draw counts as flaked.",
        ),
        real(
            "slab_leaves_probability",
            "spall",
            s.slab_leaves_probability,
            ASSUMPTION,
            "Chance that a loosened slab leaves while the fire still burns.",
        ),
        whole(
            "slab_generations_max",
            "spall",
            s.slab_generations_max,
            ASSUMPTION,
            "Slabs that may follow one another.",
        ),
        real("rain_mm_h", "spall", s.rain_mm_h, CHOICE, "Rain during cooling; 0 is none."),
        real(
            "flame_front_width_m",
            "spall",
            s.flame_front_width_m,
            ASSUMPTION,
            "Width of the flame front for the view factor of a stand-off.",
        ),
    ]
}

fn rockfall(settings: &Settings) -> Vec<SettingNote> {
    let r = &settings.rockfall;
    let subject = "rockfall";
    let friction: Vec<String> =
        Contact::ALL.iter().map(|c| format!("{} = {}", c.word(), triple(&r.friction_deg[*c as usize]))).collect();
    let loss: Vec<String> =
        Support::ALL.iter().map(|s| format!("{} = {}", s.word(), number(r.support_loss[*s as usize]))).collect();
    vec![
        real("shaking_k", subject, r.shaking_k, CHOICE, "Horizontal pseudo-static coefficient; 0 is no shaking."),
        real(
            "wet_spell_probability",
            subject,
            r.wet_spell_probability,
            ASSUMPTION,
            "Chance of a wet spell within the horizon.",
        ),
        real("reach_mean_deg", subject, r.reach_mean_deg, ASSUMPTION, "Mean of the reach angle."),
        real("reach_sd_deg", subject, r.reach_sd_deg, ASSUMPTION, "Standard deviation of the reach angle."),
        real("bearing_sd_deg", subject, r.bearing_sd_deg, ASSUMPTION, "Standard deviation of the travel bearing."),
        real("bearing_cut_deg", subject, r.bearing_cut_deg, ASSUMPTION, "Cut of the travel bearing either side."),
        real(
            "unknown_bearing_deg",
            subject,
            r.unknown_bearing_deg,
            ASSUMPTION,
            "Half-width of the even spread of bearings where the downslope bearing is not known.",
        ),
        SettingNote {
            name: "friction_deg",
            subject,
            kind: SettingKind::TrianglesByContact(bound("friction_deg")),
            toml: format!("{{ {} }}", friction.join(", ")),
            otherwise: None,
            meaning: "Friction angle by contact: lower end, mode, upper end.",
            basis: "mixed; see docs/rockfall.md",
        },
        SettingNote {
            name: "support_loss",
            subject,
            kind: SettingKind::ChancesBySupport,
            toml: format!("{{ {} }}", loss.join(", ")),
            otherwise: None,
            meaning: "Chance that a support is gone within the horizon, by its state.",
            basis: ASSUMPTION,
        },
        triangle("uplift_share", &r.uplift_share, ASSUMPTION, "Uplift share of the normal weight in a wet spell."),
        real("slope_sd_deg", subject, r.slope_sd_deg, ASSUMPTION, "Standard deviation of a slope read on the ground."),
        real(
            "raster_slope_sd_deg",
            subject,
            r.raster_slope_sd_deg,
            ASSUMPTION,
            "Standard deviation of a slope taken from the raster.",
        ),
        real(
            "geometry_rel_sd",
            subject,
            r.geometry_rel_sd,
            ASSUMPTION,
            "Relative standard deviation of setback and centroid height.",
        ),
        real("seat_sd_m", subject, r.seat_sd_m, ASSUMPTION, "Least standard deviation of a seat depth."),
        real("seat_rel_sd", subject, r.seat_rel_sd, ASSUMPTION, "Relative standard deviation of a seat depth."),
        real(
            "kept_share_min",
            subject,
            r.kept_share_min,
            ASSUMPTION,
            "Share of draws that must stand today, else the measurements are in doubt.",
        ),
        triangle(
            "boulder_face_share",
            &r.boulder_face_share,
            ASSUMPTION,
            "Share of a boulder's faces steeper than the friction of a fresh split.",
        ),
        triangle("outcrop_face_share", &r.outcrop_face_share, ASSUMPTION, "The same for an outcrop."),
        real(
            "bare_ground_factor",
            subject,
            r.bare_ground_factor,
            "published, from a cleared stand; see docs/rockfall.md",
            "Factor on run-out over bare ground.",
        ),
        triangle(
            "severe_ground_factor",
            &r.severe_ground_factor,
            ASSUMPTION,
            "Factor on run-out over severely burnt ground.",
        ),
        real(
            "height_sd_m",
            subject,
            r.height_sd_m,
            CHOICE,
            "Standard deviation of heights where the record gives none; 0 leaves the angle as it is.",
        ),
        real(
            "height_tolerance_m",
            subject,
            r.height_tolerance_m,
            ASSUMPTION,
            "Recorded height and raster may differ by this much; beyond, the raster is used and the height flagged.",
        ),
        real(
            "unknown_height_reach_m",
            subject,
            r.unknown_height_reach_m,
            ASSUMPTION,
            "Within this distance a boulder whose height is not known may reach a trail.",
        ),
    ]
}

fn trail(settings: &Settings) -> Vec<SettingNote> {
    let t = &settings.trail;
    let subject = "trail";
    let limit = "assumption; the land manager's to set, on the upper 95 % value of the death chance per passage";
    vec![
        SettingNote {
            name: "as_of",
            subject,
            kind: SettingKind::Day,
            toml: "\"2026-09-21\"".to_owned(),
            otherwise: Some("the day of the run"),
            meaning: "Day that the run stands for; review dates count from it.",
            basis: CHOICE,
        },
        real("segment_m", subject, t.segment_m, ASSUMPTION, "Length of a stretch."),
        real("keep_closed_at", subject, t.keep_closed_at, limit, "At or above: keep closed."),
        real(
            "look_first_at",
            subject,
            t.look_first_at,
            limit,
            "At or above: closed until a qualified person has looked.",
        ),
        real("warn_at", subject, t.warn_at, limit, "At or above: open with warning, no stopping."),
        real(
            "vulnerability",
            subject,
            t.vulnerability,
            "published: AGS 2000 recommends 0.5 of 0.1 to 0.7",
            "Chance that a person hit in the open dies.",
        ),
        real(
            "walking_speed_m_s",
            subject,
            t.walking_speed_m_s,
            ASSUMPTION,
            "Walking speed where the trail does not say.",
        ),
        real("person_width_m", subject, t.person_width_m, ASSUMPTION, "Width of a person."),
        real(
            "in_reach_share",
            subject,
            t.in_reach_share,
            ASSUMPTION,
            "Share of falls that must reach a stretch for an unassessed boulder to count as within reach.",
        ),
        real(
            "burnt_through_share",
            subject,
            t.burnt_through_share,
            ASSUMPTION,
            "Share from which a burnt-through support keeps a stretch closed until looked at.",
        ),
        real(
            "looked_at_m",
            subject,
            t.looked_at_m,
            ASSUMPTION,
            "A stretch farther than this from every listed boulder counts as not looked at.",
        ),
        real(
            "passages_per_day_assumed",
            subject,
            t.passages_per_day_assumed,
            ASSUMPTION,
            "Passages a day where the trail does not say, for the order of inspection only.",
        ),
        real("review_days", subject, t.review_days, ASSUMPTION, "Days until the next review of a proposal."),
    ]
}

#[cfg(test)]
mod tests {
    use super::super::setting_names::{NUMERIC, OTHER, TRIANGULAR};
    use super::*;
    use std::collections::BTreeSet;

    #[test]
    fn every_setting_that_is_read_is_described_and_no_other() {
        let notes = setting_notes();
        let described: BTreeSet<_> = notes.iter().map(|n| n.name).collect();
        assert_eq!(described.len(), notes.len(), "a setting is described twice");
        let read: BTreeSet<_> =
            NUMERIC.iter().map(|n| n.0).chain(TRIANGULAR.iter().map(|t| t.0)).chain(OTHER).collect();
        assert_eq!(described, read);
        for numeric in NUMERIC {
            let note = notes.iter().find(|n| n.name == numeric.0).expect("described");
            assert_eq!(note.subject, numeric.1, "{}", note.name);
            assert_eq!(matches!(note.kind, SettingKind::Whole(_)), numeric.2, "{}", note.name);
        }
    }
}

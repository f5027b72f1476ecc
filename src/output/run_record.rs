//! `run.json`: what was run on what, with which settings, and what came of it.
//!
//! The record holds everything that a run needs to be repeated or defended: versions, every option and setting, the hash
//! of every input and result, counts by reason and remark, all findings, and the cautions. Times are here and nowhere else,
//! so that layers stay equal to the byte. Settings are in the units of the program (SI); names carry the unit.

use std::collections::BTreeMap;

use serde::{Serialize, Serializer};

use super::cautions;
use super::directory::WrittenFile;
use super::fields::BoulderResult;
use crate::assess::Status;
use crate::diagnostic::{Diagnostic, Severity};
use crate::ensemble::distribution::{Distribution, Shape};
use crate::flag::Flag;
use crate::input::InputFile;
use crate::rock::{Catalogue, Property};
use crate::settings::{RockfallSettings, Settings, SpallSettings, TrailSettings, UserRock};

/// Everything that `run.json` holds, in its order.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct RunRecord {
    /// Name of the program.
    pub program: &'static str,
    /// Its version.
    pub program_version: &'static str,
    /// Version of the catalogue.
    pub catalogue_version: &'static str,
    /// When the run began, ISO 8601.
    pub started_at: Option<String>,
    /// Day until which the figures may be used without looking again, ISO 8601.
    pub valid_until: Option<String>,
    /// Seed of the point set.
    pub seed: u64,
    /// Draws of the ensemble.
    pub draws: usize,
    /// Options as used, from flags, settings file or default.
    pub options: OptionsRecord,
    /// Settings as used, complete.
    pub settings: SettingsRecord,
    /// Inputs.
    pub inputs: Vec<InputRecord>,
    /// What came of the boulders.
    pub counts: RunCounts,
    /// Times, in the order of the run.
    pub timings: Vec<PhaseRecord>,
    /// Every finding.
    pub diagnostics: Vec<DiagnosticRecord>,
    /// The cautions that go with every result.
    pub cautions: Vec<&'static str>,
    /// What was written, this record aside.
    pub files: Vec<WrittenFile>,
}

impl RunRecord {
    /// A record with versions, settings and cautions; the rest is empty and filled by the run.
    pub fn new(settings: &Settings) -> Self {
        RunRecord {
            program: "spallcast",
            program_version: env!("CARGO_PKG_VERSION"),
            catalogue_version: Catalogue::VERSION,
            started_at: None,
            valid_until: None,
            seed: settings.seed,
            draws: settings.draws,
            options: OptionsRecord::default(),
            settings: SettingsRecord::of(settings),
            inputs: Vec::new(),
            counts: RunCounts::default(),
            timings: Vec::new(),
            diagnostics: Vec::new(),
            cautions: cautions::sentences(),
            files: Vec::new(),
        }
    }

    /// Adds one input.
    pub fn input(&mut self, role: &'static str, file: &InputFile, records: Option<u64>) {
        let InputFile { name, bytes, sha256 } = file;
        self.inputs.push(InputRecord { role, name: name.clone(), bytes: *bytes, sha256: sha256.clone(), records });
    }

    /// Adds findings.
    pub fn findings<'d>(&mut self, findings: impl IntoIterator<Item = &'d Diagnostic>) {
        self.diagnostics.extend(findings.into_iter().map(DiagnosticRecord::of));
    }

    /// Adds the time of one phase.
    pub fn timing(&mut self, phase: &'static str, seconds: f64) {
        self.timings.push(PhaseRecord { phase, seconds });
    }

    /// The record as indented JSON, ending in a line feed.
    ///
    /// # Panics
    /// Never: the record holds numbers and text.
    pub fn json(&self) -> String {
        serde_json::to_string_pretty(self).expect("a record of numbers and text is JSON") + "\n"
    }
}

/// Options as used. Paths are as the user gave them; `-` is a standard stream.
#[derive(Debug, Clone, Default, PartialEq, Serialize)]
pub struct OptionsRecord {
    /// `--burn`.
    pub burn: Option<String>,
    /// `--boulders`.
    pub boulders: Option<String>,
    /// `--trails`.
    pub trails: Option<String>,
    /// `--terrain`.
    pub terrain: Option<String>,
    /// `--settings`.
    pub settings: Option<String>,
    /// `--out`.
    pub out: Option<String>,
    /// `--threads`.
    pub threads: Option<usize>,
    /// `--format`.
    pub format: Vec<String>,
    /// `--strict`.
    pub strict: bool,
    /// `--quiet`.
    pub quiet: bool,
    /// `--json-log`.
    pub json_log: bool,
}

/// One input.
#[derive(Debug, Clone, PartialEq, Eq, Serialize)]
pub struct InputRecord {
    /// What it was read as: `burn`, `boulders`, `trails`, `terrain`, `settings`.
    pub role: &'static str,
    /// Its name as the user gave it.
    pub name: String,
    /// Its length, bytes.
    pub bytes: u64,
    /// SHA-256 of its bytes, lower-case hexadecimal.
    pub sha256: String,
    /// Records in it; null where that means nothing.
    pub records: Option<u64>,
}

/// What came of the boulders.
#[derive(Debug, Clone, Default, PartialEq, Eq, Serialize)]
pub struct RunCounts {
    /// Records read.
    pub records: u64,
    /// Boulders with figures.
    pub assessed: u64,
    /// Boulders without.
    pub not_assessed: u64,
    /// Of the latter, how many for which reason; codes as in `docs/inputs.md`, and those of [`reason_code`].
    pub not_assessed_by_reason: BTreeMap<&'static str, u64>,
    /// Boulders with a source likelihood.
    pub with_source: u64,
    /// How many boulders carry which flag.
    pub by_flag: BTreeMap<&'static str, u64>,
}

impl RunCounts {
    /// Counts one boulder.
    pub fn add(&mut self, result: &BoulderResult) {
        self.records += 1;
        match reason_code(result) {
            None => self.assessed += 1,
            Some(code) => {
                self.not_assessed += 1;
                *self.not_assessed_by_reason.entry(code).or_default() += 1;
            }
        }
        self.with_source += u64::from(result.source.p_source.is_some());
        for flag in result.flags() {
            *self.by_flag.entry(Flag::code(flag)).or_default() += 1;
        }
    }

    /// Counts of a whole run.
    pub fn of<'r>(results: impl IntoIterator<Item = &'r BoulderResult>) -> Self {
        let mut counts = Self::default();
        results.into_iter().for_each(|r| counts.add(r));
        counts
    }
}

/// Why a boulder was not assessed, as a code: that of the finding that refused its record, `outside_burns`, or
/// `no_fire_recorded` for a boulder within a burn of which neither says how it burnt. `None` when it was assessed.
pub fn reason_code(result: &BoulderResult) -> Option<&'static str> {
    match (result.assessment.status, &result.feature.boulder) {
        (Status::Assessed, _) => None,
        (Status::NotAssessed, Err(finding)) => Some(finding.code),
        (Status::NotAssessed, Ok(_)) if result.within.is_empty() => Some("outside_burns"),
        (Status::NotAssessed, Ok(_)) => Some("no_fire_recorded"),
    }
}

/// Time of one phase.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct PhaseRecord {
    /// Its name.
    pub phase: &'static str,
    /// Its wall time, s.
    pub seconds: f64,
}

/// One finding.
#[derive(Debug, Clone, PartialEq, Eq, Serialize)]
pub struct DiagnosticRecord {
    /// `note`, `warning` or `refused`.
    pub severity: &'static str,
    /// Its code, listed in `docs/inputs.md`.
    pub code: &'static str,
    /// The file as the user named it.
    pub file: String,
    /// Kind of record; empty for the file as a whole.
    pub record: &'static str,
    /// The record's name.
    pub id: Option<String>,
    /// Line in the file, from 1.
    pub line: Option<u64>,
    /// The property or column.
    pub property: Option<String>,
    /// What stood there.
    pub found: Option<String>,
    /// What was expected.
    pub expected: Option<String>,
    /// What to do.
    pub remedy: Option<String>,
    /// The whole message, one sentence.
    pub message: String,
}

impl DiagnosticRecord {
    /// From a finding.
    pub fn of(finding: &Diagnostic) -> Self {
        let message = finding.to_string();
        let Diagnostic { severity, code, file, record, id, line, property, found, expected, remedy } = finding.clone();
        let severity = Severity::word(severity);
        DiagnosticRecord { severity, code, file, record, id, line, property, found, expected, remedy, message }
    }
}

/// Every setting. Taken apart without a rest pattern, so that a new setting cannot be left out.
#[derive(Debug, Clone, PartialEq, Serialize)]
#[allow(missing_docs, reason = "fields are those of `settings`, documented there")]
pub struct SettingsRecord {
    pub draws: usize,
    pub seed: u64,
    pub horizon_days: f64,
    pub spall: SpallSettingsRecord,
    pub rockfall: RockfallSettingsRecord,
    pub trail: TrailSettingsRecord,
    /// Catalogue key and weight, in the order of the settings.
    #[serde(serialize_with = "pairs")]
    pub unknown_rock: Vec<(String, f64)>,
    pub rocks: Vec<UserRockRecord>,
}

impl SettingsRecord {
    /// From the run's settings.
    pub fn of(settings: &Settings) -> Self {
        let Settings { draws, seed, horizon_days, spall, rockfall, trail, unknown_rock, rocks } = settings;
        SettingsRecord {
            draws: *draws,
            seed: *seed,
            horizon_days: *horizon_days,
            spall: SpallSettingsRecord::of(spall),
            rockfall: RockfallSettingsRecord::of(rockfall),
            trail: TrailSettingsRecord::of(trail),
            unknown_rock: unknown_rock.clone(),
            rocks: rocks.iter().map(UserRockRecord::of).collect(),
        }
    }
}

fn pairs<S: Serializer>(pairs: &[(String, f64)], serializer: S) -> Result<S::Ok, S::Error> {
    serializer.collect_map(pairs.iter().map(|(name, weight)| (name, weight)))
}

/// A record of plain settings: the fields of a settings struct under their own names.
macro_rules! mirror {
    ($(#[$meta:meta])* $record:ident of $settings:ident { $($field:ident: $kind:ty),+ $(,)? }) => {
        $(#[$meta])*
        #[derive(Debug, Clone, PartialEq, Serialize)]
        #[allow(missing_docs, reason = "fields are those of `settings`, documented there")]
        pub struct $record { $(pub $field: $kind),+ }
        impl $record {
            fn of(settings: &$settings) -> Self {
                let $settings { $($field),+ } = settings.clone();
                $record { $($field: $field.into()),+ }
            }
        }
    };
}

mirror! {
    /// Settings of the spall model.
    SpallSettingsRecord of SpallSettings {
        flake_share_counted: f64,
        slab_leaves_probability: f64,
        slab_generations_max: usize,
        rain_mm_h: f64,
        flame_front_width_m: f64,
    }
}
mirror! {
    /// Settings of the rockfall source and its reach.
    RockfallSettingsRecord of RockfallSettings {
        shaking_k: f64,
        wet_spell_probability: f64,
        reach_mean_deg: f64,
        reach_sd_deg: f64,
        bearing_sd_deg: f64,
        bearing_cut_deg: f64,
        unknown_bearing_deg: f64,
        friction_deg: DistributionRecords,
        support_loss: [f64; 5],
        uplift_share: DistributionRecord,
        slope_sd_deg: f64,
        raster_slope_sd_deg: f64,
        geometry_rel_sd: f64,
        seat_sd_m: f64,
        seat_rel_sd: f64,
        kept_share_min: f64,
        boulder_face_share: DistributionRecord,
        outcrop_face_share: DistributionRecord,
        bare_ground_factor: f64,
        severe_ground_factor: DistributionRecord,
        height_sd_m: f64,
        height_tolerance_m: f64,
        unknown_height_reach_m: f64,
    }
}
mirror! {
    /// Settings of trail segments and proposals.
    TrailSettingsRecord of TrailSettings {
        segment_m: f64,
        keep_closed_at: f64,
        look_first_at: f64,
        warn_at: f64,
        vulnerability: f64,
        walking_speed_m_s: f64,
        person_width_m: f64,
        in_reach_share: f64,
        burnt_through_share: f64,
        looked_at_m: f64,
        passages_per_day_assumed: f64,
        review_days: f64,
        as_of: DayRecord,
    }
}

/// A day, ISO 8601, or null.
#[derive(Debug, Clone, PartialEq, Eq, Serialize)]
#[serde(transparent)]
pub struct DayRecord(Option<String>);

impl From<Option<jiff::civil::Date>> for DayRecord {
    fn from(day: Option<jiff::civil::Date>) -> Self {
        DayRecord(day.map(|d| d.to_string()))
    }
}

/// A rock of the user's own.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct UserRockRecord {
    /// Its name.
    pub name: String,
    /// The catalogue rock it starts from.
    pub like: String,
    /// Changed figures.
    pub figures: Vec<FigureRecord>,
    /// Where they come from, as the user states it.
    pub source: String,
    /// Further names.
    pub aliases: Vec<String>,
}

impl UserRockRecord {
    fn of(rock: &UserRock) -> Self {
        let UserRock { name, like, figures, source, aliases } = rock.clone();
        UserRockRecord { name, like, figures: figures.iter().map(FigureRecord::of).collect(), source, aliases }
    }
}

/// One figure of a user's rock, SI.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct FigureRecord {
    /// The property, by its key in the catalogue.
    pub property: &'static str,
    /// Its SI unit.
    pub unit: &'static str,
    /// Its distribution.
    #[serde(flatten)]
    pub distribution: DistributionRecord,
}

impl FigureRecord {
    fn of((property, distribution): &(Property, Distribution)) -> Self {
        FigureRecord { property: property.key(), unit: property.unit(), distribution: (*distribution).into() }
    }
}

/// A distribution.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct DistributionRecord {
    /// `lognormal`, `normal` or `triangular`.
    pub distribution: &'static str,
    /// Median, mean or mode.
    pub centre: f64,
    /// Standard deviation of ln x (lognormal) or of x (normal); 0 for a triangular figure.
    pub spread: f64,
    /// Lower end; null when there is none.
    pub lower: Option<f64>,
    /// Upper end; null when there is none.
    pub upper: Option<f64>,
}

impl From<Distribution> for DistributionRecord {
    fn from(d: Distribution) -> Self {
        let distribution = match d.shape {
            Shape::Lognormal => "lognormal",
            Shape::Normal => "normal",
            Shape::Triangular => "triangular",
        };
        let finite = |x: f64| x.is_finite().then_some(x);
        DistributionRecord {
            distribution,
            centre: d.centre,
            spread: d.spread,
            lower: finite(d.lower),
            upper: finite(d.upper),
        }
    }
}

/// Several distributions, in the order of the words they belong to.
#[derive(Debug, Clone, PartialEq, Serialize)]
#[serde(transparent)]
pub struct DistributionRecords(Vec<DistributionRecord>);

impl<const N: usize> From<[Distribution; N]> for DistributionRecords {
    fn from(all: [Distribution; N]) -> Self {
        DistributionRecords(all.into_iter().map(Into::into).collect())
    }
}

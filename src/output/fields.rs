//! The field registry: every column of the boulder layer, in the order of the layer, defined once.
//!
//! A [`Field`] holds name, unit, JSON type, meaning and the function that reads it from a result. The GeoJSON writers, the
//! tables, the schema and the page iterate over it, so a new field is one entry here.
//!
//! **Units.** Results are SI; a field converts to field units (C, mm, MPa, MJ/m2).
//!
//! **Rounding.** Numbers keep six significant digits ([`significant`]): correctly rounded decimal, by the standard library's
//! own formatting, which is the same on every platform. Six digits are far below any sampling error and keep layers small.
//!
//! **Missing.** What was not computed is [`Value::Null`], never 0. A number that is not finite is null as well.

use std::borrow::Cow;
use std::collections::BTreeSet;
use std::io::{self, Write};

use geojson::GeometryValue;

use crate::assess::{Assessment, HeatSummary, SpallSummary};
use crate::flag::{self, Flag};
use crate::input::BoulderFeature;
use crate::units::{J_PER_MJ, MM_PER_M, PA_PER_MPA, celsius};

/// What a field holds, in field units.
#[derive(Debug, Clone, PartialEq)]
pub enum Value<'a> {
    /// Not computed, or not known.
    Null,
    /// Yes or no.
    Bool(bool),
    /// A count.
    Integer(u64),
    /// A measured or computed figure, already rounded; finite when made by [`number`].
    Number(f64),
    /// A word or a sentence.
    Text(Cow<'a, str>),
}

impl<'a> Value<'a> {
    /// Text, borrowed where it can be.
    pub fn text(text: impl Into<Cow<'a, str>>) -> Self {
        Value::Text(text.into())
    }

    /// Text or null.
    pub fn text_or_null(text: Option<impl Into<Cow<'a, str>>>) -> Self {
        text.map_or(Value::Null, |t| Value::Text(t.into()))
    }

    /// The value as JSON.
    ///
    /// # Errors
    /// Those of the writer.
    pub fn write_json(&self, out: &mut dyn Write) -> io::Result<()> {
        match self {
            Value::Null => out.write_all(b"null"),
            Value::Bool(yes) => serde_json::to_writer(out, yes).map_err(Into::into),
            Value::Integer(n) => serde_json::to_writer(out, n).map_err(Into::into),
            // `serde_json` writes null for a number that is not finite.
            Value::Number(x) => serde_json::to_writer(out, x).map_err(Into::into),
            Value::Text(text) => serde_json::to_writer(out, text).map_err(Into::into),
        }
    }
}

/// The type of a field in JSON; every field may be null besides.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum JsonType {
    /// A number.
    Number,
    /// A whole number.
    Integer,
    /// Text.
    Text,
    /// True or false.
    Bool,
}

impl JsonType {
    /// The word of JSON Schema.
    pub fn word(self) -> &'static str {
        match self {
            JsonType::Number => "number",
            JsonType::Integer => "integer",
            JsonType::Text => "string",
            JsonType::Bool => "boolean",
        }
    }
}

/// One column of a layer or table whose rows are `R`.
#[derive(Debug)]
pub struct Field<R> {
    /// Its name, with its unit as suffix.
    pub name: &'static str,
    /// Its unit; empty for words, counts, shares and likelihoods.
    pub unit: &'static str,
    /// Its JSON type.
    pub kind: JsonType,
    /// What it means, in one sentence.
    pub meaning: &'static str,
    /// Reads it from a row.
    pub value: for<'a> fn(&'a R) -> Value<'a>,
}

// By hand: deriving would ask the same of `R`.
impl<R> Clone for Field<R> {
    fn clone(&self) -> Self {
        *self
    }
}
impl<R> Copy for Field<R> {}

/// Six significant digits, correctly rounded; null for a number that is not finite.
///
/// ```
/// use spallcast::output::fields::{Value, number};
/// assert_eq!(number(123.456_789), Value::Number(123.457));
/// assert_eq!(number(f64::NAN), Value::Null);
/// ```
pub fn number(x: f64) -> Value<'static> {
    match x.is_finite() {
        true => Value::Number(significant(x)),
        false => Value::Null,
    }
}

/// A finite number to six significant digits; minus zero becomes zero.
pub fn significant(x: f64) -> f64 {
    let rounded: f64 = format!("{x:.5e}").parse().expect("a formatted number is a number");
    rounded + 0.0
}

fn optional(x: Option<f64>) -> Value<'static> {
    x.map_or(Value::Null, number)
}

/// What is said about a boulder as a rockfall source, as the layer shows it. The default is a boulder without any.
#[derive(Debug, Clone, PartialEq)]
pub struct SourceColumns {
    /// Likelihood that it, or a part of it, moves within the horizon.
    pub p_source: Option<f64>,
    /// Lower end of its 95 % interval.
    pub p_source_low: Option<f64>,
    /// Upper end of its 95 % interval.
    pub p_source_high: Option<f64>,
    /// Likelihood that the boulder itself moves.
    pub p_release: Option<f64>,
    /// Likelihood that a loose slab or split part moves.
    pub p_fragment: Option<f64>,
    /// How it would most likely move.
    pub mode: Option<&'static str>,
    /// How much of its standing was recorded: `measured`, `partial`, `none`.
    pub basis: &'static str,
    /// Median volume of the loose parts, m3.
    pub fragment_m3_p50: Option<f64>,
    /// Why it would move or why there is no number, one sentence; joined to the boulder's reason.
    pub reason: Option<String>,
    /// Remarks; joined to the boulder's flags.
    pub flags: BTreeSet<Flag>,
}

impl Default for SourceColumns {
    fn default() -> Self {
        SourceColumns {
            p_source: None,
            p_source_low: None,
            p_source_high: None,
            p_release: None,
            p_fragment: None,
            mode: None,
            basis: "none",
            fragment_m3_p50: None,
            reason: None,
            flags: BTreeSet::new(),
        }
    }
}

/// One boulder as the layers show it: its record as it came, and everything said about it.
#[derive(Debug, Clone)]
pub struct BoulderResult {
    /// The record: geometry and properties as they came.
    pub feature: BoulderFeature,
    /// Heating and spalling.
    pub assessment: Assessment,
    /// Standing.
    pub source: SourceColumns,
    /// Place in the order of inspection, from 1; `None` in a stream, which has no last boulder to rank against.
    pub inspection_rank: Option<u64>,
    /// The horizon that source likelihoods refer to, days.
    pub horizon_days: f64,
    /// The burns whose perimeter holds the boulder, by their place in the burn file.
    pub within: Vec<usize>,
}

impl BoulderResult {
    /// A boulder without source, rank or burns yet.
    pub fn new(feature: BoulderFeature, assessment: Assessment, horizon_days: f64) -> Self {
        let source = SourceColumns::default();
        BoulderResult { feature, assessment, source, inspection_rank: None, horizon_days, within: Vec::new() }
    }

    /// A record that was refused: not assessed, with the refusal as its reason.
    ///
    /// # Panics
    /// When the record was not refused.
    pub fn refused(feature: BoulderFeature, horizon_days: f64) -> Self {
        let reason = feature.boulder.as_ref().expect_err("the record was refused").sentence();
        Self::new(feature, Assessment::not_assessed(reason), horizon_days)
    }

    /// The boulder's name, or an empty text when the record has none.
    pub fn id(&self) -> &str {
        self.feature.id.as_deref().unwrap_or_default()
    }

    /// Longitude and latitude, degrees: the standpoint, or the first position of a refused record's geometry.
    pub fn place_deg(&self) -> Option<(f64, f64)> {
        if let Ok(boulder) = &self.feature.boulder {
            return Some((boulder.position.lon_deg, boulder.position.lat_deg));
        }
        let first = match &self.feature.geometry.as_ref()?.value {
            GeometryValue::Point { coordinates } => coordinates,
            GeometryValue::MultiPoint { coordinates } | GeometryValue::LineString { coordinates } => {
                coordinates.first()?
            }
            GeometryValue::Polygon { coordinates } | GeometryValue::MultiLineString { coordinates } => {
                coordinates.first()?.first()?
            }
            GeometryValue::MultiPolygon { coordinates } => coordinates.first()?.first()?.first()?,
            GeometryValue::GeometryCollection { .. } => return None,
        };
        match first.as_slice() {
            [lon, lat, ..] => Some((*lon, *lat)),
            _ => None,
        }
    }

    /// All remarks: heating, spalling and standing.
    pub fn flags(&self) -> BTreeSet<Flag> {
        self.assessment.flags.union(&self.source.flags).copied().collect()
    }

    /// The main reason for the numbers or for their absence.
    pub fn reason(&self) -> Cow<'_, str> {
        match &self.source.reason {
            None => Cow::Borrowed(&self.assessment.reason),
            Some(source) if self.assessment.reason.is_empty() => Cow::Borrowed(source),
            Some(source) => Cow::Owned(format!("{}. {source}", self.assessment.reason.trim_end_matches('.'))),
        }
    }
}

fn heat(result: &BoulderResult, read: fn(&HeatSummary) -> f64) -> Value<'static> {
    optional(result.assessment.heat.as_ref().map(read))
}

fn spall(result: &BoulderResult, read: fn(&SpallSummary) -> Option<f64>) -> Value<'static> {
    optional(result.assessment.spall.as_ref().and_then(read))
}

/// One entry of a registry: name, unit, type, meaning, source.
macro_rules! field {
    ($name:literal, $unit:literal, $kind:ident, $meaning:literal, $value:expr) => {
        $crate::output::fields::Field {
            name: $name,
            unit: $unit,
            kind: $crate::output::fields::JsonType::$kind,
            meaning: $meaning,
            value: $value,
        }
    };
}
pub(crate) use field;

/// Result columns of `boulders.geojson`, in their order, after the properties of the input.
pub const BOULDER_FIELDS: &[Field<BoulderResult>] = &[
    field!("status", "", Text, "`assessed` or `not_assessed`; the latter means unknown, never open.", |r| {
        Value::text(r.assessment.status.word())
    }),
    field!("reason", "", Text, "Main reason for the figures, or why there are none.", |r| Value::Text(r.reason())),
    field!(
        "burn_id",
        "",
        Text,
        "Burn that governs; null when the record's own residence or class was run outside every burn.",
        |r| { Value::text_or_null(r.assessment.burn_id.as_deref()) }
    ),
    field!("exposure_used", "", Text, "Exposure class that was run; two joined by `+` for an inferred mix.", |r| {
        Value::text_or_null(r.assessment.exposure_used.as_deref())
    }),
    field!("exposure_inferred", "", Bool, "Whether the class was inferred from the residence time.", |r| {
        r.assessment.exposure_inferred.map_or(Value::Null, Value::Bool)
    }),
    field!("peak_surface_c_p05", "C", Number, "Highest temperature of the face, 5 % quantile over the draws.", |r| {
        heat(r, |h| celsius(h.peak_surface_k.p05))
    }),
    field!("peak_surface_c_p50", "C", Number, "Highest temperature of the face, median.", |r| {
        heat(r, |h| celsius(h.peak_surface_k.p50))
    }),
    field!("peak_surface_c_p95", "C", Number, "Highest temperature of the face, 95 % quantile.", |r| {
        heat(r, |h| celsius(h.peak_surface_k.p95))
    }),
    field!("absorbed_mj_m2_p50", "MJ/m2", Number, "Net heat taken in by the face, median.", |r| {
        heat(r, |h| h.absorbed_j_m2_p50 / J_PER_MJ)
    }),
    field!(
        "heated_depth_mm",
        "mm",
        Number,
        "Depth of noticeable warming, sqrt(diffusivity x residence), median.",
        |r| { heat(r, |h| h.heated_depth_m * MM_PER_M) }
    ),
    field!("peak_skin_stress_mpa_p50", "MPa", Number, "Highest compression at the face, median.", |r| {
        heat(r, |h| h.peak_skin_stress_pa_p50 / PA_PER_MPA)
    }),
    field!("p_spall", "", Number, "Likelihood that it spalled in any way.", |r| spall(r, |s| Some(s.p_spall))),
    field!("p_flake", "", Number, "Likelihood that flakes came off more than the counted share of the face.", |r| {
        spall(r, |s| Some(s.p_flake))
    }),
    field!("p_slab", "", Number, "Likelihood of a slab.", |r| spall(r, |s| Some(s.p_slab))),
    field!("p_split", "", Number, "Likelihood that it split.", |r| spall(r, |s| Some(s.p_split))),
    field!("p_rind", "", Number, "Likelihood that it let go at its rind; null where no rind was recorded.", |r| {
        spall(r, |s| s.p_rind)
    }),
    field!(
        "spall_thickness_mm",
        "mm",
        Number,
        "Expected thickness of the thickest piece, given that it spalls.",
        |r| { spall(r, |s| Some(s.thickness_m? * MM_PER_M)) }
    ),
    field!("spall_thickness_mm_p05", "mm", Number, "The same, 5 % quantile.", |r| {
        spall(r, |s| Some(s.thickness_quantiles_m?.p05 * MM_PER_M))
    }),
    field!("spall_thickness_mm_p50", "mm", Number, "The same, median.", |r| {
        spall(r, |s| Some(s.thickness_quantiles_m?.p50 * MM_PER_M))
    }),
    field!("spall_thickness_mm_p95", "mm", Number, "The same, 95 % quantile.", |r| {
        spall(r, |s| Some(s.thickness_quantiles_m?.p95 * MM_PER_M))
    }),
    field!("flake_thickness_mm", "mm", Number, "Expected thickness of a flake, given that it flakes.", |r| {
        spall(r, |s| Some(s.flake_thickness_m? * MM_PER_M))
    }),
    field!("slab_thickness_mm", "mm", Number, "Expected thickness of one plate, given a slab.", |r| {
        spall(r, |s| Some(s.slab_thickness_m? * MM_PER_M))
    }),
    field!("loss_mm", "mm", Number, "Expected loss averaged over the heated face, whether it spalls or not.", |r| {
        spall(r, |s| Some(s.loss_m * MM_PER_M))
    }),
    field!("p_spall_se", "", Number, "Sampling error of `p_spall` (standard error over the replicates).", |r| {
        spall(r, |s| Some(s.p_spall_se))
    }),
    field!("spall_thickness_mm_se", "mm", Number, "Sampling error of `spall_thickness_mm`.", |r| {
        spall(r, |s| Some(s.thickness_se_m? * MM_PER_M))
    }),
    field!("p_source", "", Number, "Likelihood that the boulder or a part of it moves within the horizon.", |r| {
        optional(r.source.p_source)
    }),
    field!("p_source_low", "", Number, "Lower end of its 95 % interval.", |r| optional(r.source.p_source_low)),
    field!("p_source_high", "", Number, "Upper end of its 95 % interval.", |r| optional(r.source.p_source_high)),
    field!("p_release", "", Number, "Likelihood that the boulder itself moves within the horizon.", |r| {
        optional(r.source.p_release)
    }),
    field!("p_fragment", "", Number, "Likelihood that a loose slab or split part moves within the horizon.", |r| {
        optional(r.source.p_fragment)
    }),
    field!("source_mode", "", Text, "How it would most likely move.", |r| Value::text_or_null(r.source.mode)),
    field!("source_basis", "", Text, "How much of its standing was recorded: `measured`, `partial` or `none`.", |r| {
        Value::text(r.source.basis)
    }),
    field!("fragment_m3_p50", "m3", Number, "Volume of the loose parts, median over the draws that have one.", |r| {
        optional(r.source.fragment_m3_p50)
    }),
    field!("horizon_days", "days", Number, "Time that the source likelihoods refer to.", |r| number(r.horizon_days)),
    field!("inspection_rank", "", Integer, "Place in the order of inspection, from 1; null in a stream.", |r| {
        r.inspection_rank.map_or(Value::Null, Value::Integer)
    }),
    field!("flags", "", Text, "Remarks as codes separated by semicolons; empty when there is none.", |r| {
        Value::text(flag::codes(&r.flags()))
    }),
];

/// A registry as a Markdown table: name, unit, type, meaning.
pub fn markdown<R>(fields: &[Field<R>]) -> String {
    let mut table = String::from("| field | unit | type | meaning |\n|---|---|---|---|\n");
    for f in fields {
        table.push_str(&format!("| `{}` | {} | {} | {} |\n", f.name, f.unit, f.kind.word(), f.meaning));
    }
    table
}

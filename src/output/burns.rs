//! What is said about a burn: counts, shares and its worst boulders.
//!
//! A record belongs to every burn whose perimeter holds it, refused records with a position included. Means are over the
//! assessed boulders of the burn and null without one. Values are added in rising order, so the order of the file does not
//! show in the last digit.

use serde_json::value::RawValue;

use super::fields::{BoulderResult, Field, Value, field, number};
use crate::assess::{SpallSummary, Status};
use crate::input::Properties;
use crate::input::burns::Burns;
use crate::numerics::quantile::{mean, quantile_sorted, sorted};
use crate::site::Burn;
use crate::units::MM_PER_M;

/// How many of its worst boulders a burn names.
pub const WORST_NAMED: usize = 5;
/// Likelihood that counts as more likely than not.
const LIKELY: f64 = 0.5;

/// One burn as the layer shows it.
#[derive(Debug, Clone)]
pub struct BurnResult {
    /// The burn.
    pub burn: Burn,
    /// Its properties as they came.
    pub properties: Properties,
    /// Its feature's `id` member as written.
    pub feature_id: Option<Box<RawValue>>,
    /// What its boulders come to.
    pub summary: BurnSummary,
}

/// What the boulders of one burn come to. SI.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct BurnSummary {
    /// Records inside the perimeter.
    pub boulders: u64,
    /// Of these, assessed.
    pub assessed: u64,
    /// Mean likelihood of spalling.
    pub p_spall_mean: Option<f64>,
    /// Share of assessed boulders with a likelihood of one half or more.
    pub share_spall_over_half: Option<f64>,
    /// Mean likelihood of flakes.
    pub p_flake_mean: Option<f64>,
    /// Mean likelihood of a slab.
    pub p_slab_mean: Option<f64>,
    /// Mean likelihood of a split.
    pub p_split_mean: Option<f64>,
    /// Mean likelihood of letting go at the rind, over boulders with a recorded rind.
    pub p_rind_mean: Option<f64>,
    /// Median over boulders of the expected spall thickness, m.
    pub thickness_m_median: Option<f64>,
    /// Mean expected loss, m.
    pub loss_m_mean: Option<f64>,
    /// Largest expected loss, m.
    pub loss_m_max: Option<f64>,
    /// Boulders with a source likelihood.
    pub with_source: u64,
    /// Mean source likelihood over these.
    pub p_source_mean: Option<f64>,
    /// Names of the boulders that spalled most, the worst first.
    pub worst_boulders: Vec<String>,
}

/// Every burn of a file with what its boulders come to.
pub fn burn_results(burns: &Burns, results: &[BoulderResult]) -> Vec<BurnResult> {
    let summaries = summarise_burns(burns.burns.len(), results);
    (burns.burns.iter().zip(&burns.kept).zip(summaries))
        .map(|((burn, kept), summary)| BurnResult {
            burn: burn.clone(),
            properties: kept.properties.clone(),
            feature_id: kept.feature_id.clone(),
            summary,
        })
        .collect()
}

/// Summaries of `burns` burns, in the order of the burn file.
pub fn summarise_burns(burns: usize, results: &[BoulderResult]) -> Vec<BurnSummary> {
    let mut members: Vec<Vec<&BoulderResult>> = vec![Vec::new(); burns];
    for result in results {
        for burn in &result.within {
            members[*burn].push(result);
        }
    }
    members.iter().map(|m| summarise(m)).collect()
}

fn summarise(members: &[&BoulderResult]) -> BurnSummary {
    let spalls: Vec<(&BoulderResult, &SpallSummary)> =
        members.iter().filter_map(|r| r.assessment.spall.as_ref().map(|s| (*r, s))).collect();
    let values = |read: fn(&SpallSummary) -> Option<f64>| sorted(spalls.iter().filter_map(|(_, s)| read(s)).collect());
    let of = |read| mean(&values(read));
    let thickness = values(|s| s.thickness_m);
    let sources = sorted(members.iter().filter_map(|r| r.source.p_source).collect());
    BurnSummary {
        boulders: members.len() as u64,
        assessed: members.iter().filter(|r| r.assessment.status == Status::Assessed).count() as u64,
        p_spall_mean: of(|s| Some(s.p_spall)),
        share_spall_over_half: of(|s| Some(f64::from(u8::from(s.p_spall >= LIKELY)))),
        p_flake_mean: of(|s| Some(s.p_flake)),
        p_slab_mean: of(|s| Some(s.p_slab)),
        p_split_mean: of(|s| Some(s.p_split)),
        p_rind_mean: of(|s| s.p_rind),
        thickness_m_median: (!thickness.is_empty()).then(|| quantile_sorted(&thickness, 0.5)),
        loss_m_mean: of(|s| Some(s.loss_m)),
        loss_m_max: values(|s| Some(s.loss_m)).last().copied(),
        with_source: sources.len() as u64,
        p_source_mean: mean(&sources),
        worst_boulders: worst(spalls),
    }
}

/// Names of the boulders that spalled most: by likelihood, then expected loss, then name.
fn worst(mut spalls: Vec<(&BoulderResult, &SpallSummary)>) -> Vec<String> {
    spalls.sort_by(|(a, of_a), (b, of_b)| {
        (of_b.p_spall.total_cmp(&of_a.p_spall))
            .then(of_b.loss_m.total_cmp(&of_a.loss_m))
            .then_with(|| a.id().cmp(b.id()))
    });
    spalls.iter().take(WORST_NAMED).map(|(r, _)| r.id().to_owned()).collect()
}

fn optional(x: Option<f64>) -> Value<'static> {
    x.map_or(Value::Null, number)
}

/// Result columns of `burns.geojson`, in their order, after the properties of the input.
pub const BURN_FIELDS: &[Field<BurnResult>] = &[
    field!("boulders", "", Integer, "Records inside the perimeter, refused ones with a position included.", |r| {
        Value::Integer(r.summary.boulders)
    }),
    field!("assessed", "", Integer, "Of these, boulders with figures.", |r| Value::Integer(r.summary.assessed)),
    field!("not_assessed", "", Integer, "Of these, boulders without figures; unknown, never open.", |r| {
        Value::Integer(r.summary.boulders - r.summary.assessed)
    }),
    field!(
        "p_spall_mean",
        "",
        Number,
        "Mean likelihood of spalling; expected share of the assessed boulders that spalled.",
        |r| { optional(r.summary.p_spall_mean) }
    ),
    field!("share_spall_over_half", "", Number, "Share of the assessed boulders with `p_spall` of 0.5 or more.", |r| {
        optional(r.summary.share_spall_over_half)
    }),
    field!("p_flake_mean", "", Number, "Mean likelihood of flakes.", |r| optional(r.summary.p_flake_mean)),
    field!("p_slab_mean", "", Number, "Mean likelihood of a slab.", |r| optional(r.summary.p_slab_mean)),
    field!("p_split_mean", "", Number, "Mean likelihood of a split.", |r| optional(r.summary.p_split_mean)),
    field!(
        "p_rind_mean",
        "",
        Number,
        "Mean likelihood of letting go at the rind, over boulders with a recorded rind.",
        |r| { optional(r.summary.p_rind_mean) }
    ),
    field!("spall_thickness_mm_median", "mm", Number, "Median over the boulders of `spall_thickness_mm`.", |r| {
        optional(r.summary.thickness_m_median.map(|x| x * MM_PER_M))
    }),
    field!("loss_mm_mean", "mm", Number, "Mean over the boulders of `loss_mm`.", |r| {
        optional(r.summary.loss_m_mean.map(|x| x * MM_PER_M))
    }),
    field!("loss_mm_max", "mm", Number, "Largest `loss_mm`.", |r| {
        optional(r.summary.loss_m_max.map(|x| x * MM_PER_M))
    }),
    field!("with_source", "", Integer, "Boulders with a source likelihood.", |r| Value::Integer(r.summary.with_source)),
    field!("p_source_mean", "", Number, "Mean over these of `p_source`.", |r| optional(r.summary.p_source_mean)),
    field!(
        "worst_boulders",
        "",
        Text,
        "Boulders that spalled most, by likelihood and then expected loss, five at most, separated by semicolons.",
        |r| { Value::text(r.summary.worst_boulders.join(";")) }
    ),
];

//! `trails.geojson`: one line per segment.

use super::fields::{Field, Value, field, number};
use crate::trail::judge::SegmentResult;
use crate::trail::segments::Segment;

/// One segment as the layer shows it.
#[derive(Debug, Clone)]
pub struct SegmentRow {
    /// Its trail's id.
    pub trail_id: String,
    /// Its trail's name.
    pub name: Option<String>,
    /// Where it lies.
    pub segment: Segment,
    /// What was found.
    pub result: SegmentResult,
}

fn optional(x: Option<f64>) -> Value<'static> {
    x.map_or(Value::Null, number)
}

/// Tenths of a metre along the trail.
fn along(metres: f64) -> Value<'static> {
    number((metres * 10.0).round() / 10.0)
}

/// Every column of the trail layer, in order.
pub const TRAIL_FIELDS: &[Field<SegmentRow>] = &[
    field!("trail_id", "", Text, "The trail.", |r| Value::text(r.trail_id.as_str())),
    field!("name", "", Text, "The name people use; null when the input has none.", |r| Value::text_or_null(
        r.name.as_deref()
    )),
    field!("segment", "", Integer, "Number of the stretch along the trail, from 1.", |r| Value::Integer(
        r.segment.number as u64
    )),
    field!("from_m", "m", Number, "Where the stretch begins, metres along the trail.", |r| along(r.segment.from_m)),
    field!("to_m", "m", Number, "Where it ends.", |r| along(r.segment.to_m)),
    field!(
        "p_any",
        "",
        Number,
        "Likelihood that at least one block reaches the stretch within the horizon; boulders share the fire and the wet spell.",
        |r| optional(r.result.combined.as_ref().map(|c| c.p_any))
    ),
    field!(
        "p_any_low",
        "",
        Number,
        "Lower bound: the likeliest single boulder at the lower end of its interval.",
        |r| optional(r.result.combined.as_ref().map(|c| c.p_any_low))
    ),
    field!(
        "p_any_high",
        "",
        Number,
        "Upper bound: all boulders added up at the upper ends of their intervals, at most 1.",
        |r| optional(r.result.combined.as_ref().map(|c| c.p_any_high))
    ),
    field!(
        "p_any_independent",
        "",
        Number,
        "The same likelihood if every boulder moved for reasons of its own.",
        |r| optional(r.result.combined.as_ref().map(|c| c.p_any_independent))
    ),
    field!(
        "boulder_ids",
        "",
        Text,
        "Contributing boulders, the largest contribution first, unassessed ones after them; separated by semicolons.",
        |r| Value::text(r.result.boulder_ids.join(";"))
    ),
    field!("death_chance_per_passage", "", Number, "Chance that one walk along the stretch ends in death.", |r| {
        optional(r.result.people.as_ref().map(|p| p.per_passage))
    }),
    field!("death_chance_per_passage_p95", "", Number, "Its upper 95 % value, on which the proposal rests.", |r| {
        optional(r.result.people.as_ref().map(|p| p.per_passage_p95))
    }),
    field!(
        "death_chance_standing_p95",
        "",
        Number,
        "The upper 95 % value for one person who stands as long as the trail says; null when it does not say.",
        |r| optional(r.result.people.as_ref().and_then(|p| p.per_stop_p95))
    ),
    field!(
        "season_casualties",
        "",
        Number,
        "Expected deaths within the horizon over all passages; null when the trail does not say how many.",
        |r| optional(r.result.people.as_ref().and_then(|p| p.season))
    ),
    field!("proposal", "", Text, "What is proposed to the land manager; a proposal, not an order.", |r| Value::text(
        r.result.decision.proposal.word()
    )),
    field!("reason", "", Text, "Why, in plain words.", |r| Value::text(r.result.decision.reason.as_str())),
    field!("horizon_days", "days", Number, "The days that the likelihoods refer to.", |r| number(
        r.result.horizon_days
    )),
    field!("review_on", "", Text, "Day of the next review, ISO 8601.", |r| Value::text(r.result.review_on.to_string())),
    field!("reopens_when", "", Text, "What would allow the stretch to reopen, or the next step.", |r| Value::text(
        r.result.decision.reopens_when.as_str()
    )),
    field!("decided_by", "", Text, "Left empty for the person who decides.", |_| Value::text("")),
];

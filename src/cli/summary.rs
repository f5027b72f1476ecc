//! The closing lines of a run: what a tired person can act on.

use std::path::Path;

use jiff::civil::Date;
use spallcast::output::{BoulderResult, RunRecord, SegmentRow};
use spallcast::trail::proposal::Proposal;

/// How many boulders and stretches are named.
const NAMED: usize = 10;
const STRETCHES: usize = 3;

/// The lines, most of them no longer than a terminal is wide.
pub fn lines(
    results: &[BoulderResult],
    order: &[usize],
    rows: &[SegmentRow],
    record: &RunRecord,
    folder: &Path,
    valid_until: Date,
) -> Vec<String> {
    let counts = &record.counts;
    let mut lines = vec![format!(
        "{} boulders: {} assessed, {} not, {} with a source likelihood",
        counts.records, counts.assessed, counts.not_assessed, counts.with_source
    )];
    if counts.not_assessed > 0 {
        let reasons: Vec<String> =
            counts.not_assessed_by_reason.iter().map(|(code, n)| format!("{n} {}", code.replace('_', " "))).collect();
        lines.push(format!("not assessed: {}", reasons.join(", ")));
    }
    let first: Vec<&str> = order.iter().take(NAMED).map(|i| results[*i].id()).collect();
    lines.push(format!("look first at: {}", first.join(", ")));
    if !rows.is_empty() {
        let count = |p: Proposal| rows.iter().filter(|r| r.result.decision.proposal == p).count();
        let proposals: Vec<String> =
            Proposal::ALL.iter().filter(|p| count(**p) > 0).map(|p| format!("{} {}", count(*p), p.word())).collect();
        lines.push(format!("{} trail stretches: {}", rows.len(), proposals.join(", ")));
        let mut worst: Vec<&SegmentRow> = rows.iter().filter(|r| r.result.people.is_some()).collect();
        let chance = |r: &SegmentRow| r.result.people.as_ref().map_or(0.0, |p| p.per_passage_p95);
        worst.sort_by(|a, b| chance(b).total_cmp(&chance(a)));
        for row in worst.iter().take(STRETCHES).filter(|r| chance(r) > 0.0) {
            lines.push(format!(
                "  {} {:.0} to {:.0} m: {}, up to {:.1e} per passage",
                row.trail_id,
                row.segment.from_m,
                row.segment.to_m,
                row.result.decision.proposal.word(),
                chance(row)
            ));
        }
    }
    lines.push(format!(
        "results in {}; look again by {valid_until} and after rain, frost, shaking or fresh rocks",
        folder.display()
    ));
    lines.push("a screening from field notes: a licensed professional confirms, and local rules stand".to_owned());
    lines
}

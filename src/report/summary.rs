//! The first screen: metres by proposal, the worst stretches, the boulders to look at first, why some were not assessed.

use super::classes::{PROPOSAL_CLASSES, legend_place, weight};
use crate::output::{BoulderResult, RunCounts, SegmentRow};
use crate::trail::proposal::{Proposal, one_in};

/// How many stretches are named.
const WORST_NAMED: usize = 5;
/// How many boulders are named.
const FIRST_NAMED: usize = 10;
/// How many boulders of a stretch are named.
const NAMED_OF_STRETCH: usize = 3;

/// Trail length under one proposal.
#[derive(Debug, Clone, PartialEq)]
pub struct ProposalMetres {
    /// Its place in the legend.
    pub at: usize,
    /// Its words.
    pub word: &'static str,
    /// Length, whole metres.
    pub metres: String,
    /// Share of all trail metres, percent.
    pub share: String,
}

/// One of the worst stretches: neighbouring segments of one trail with one proposal.
#[derive(Debug, Clone, PartialEq)]
pub struct WorstStretch {
    /// Place in the rows of its segment with the largest chance.
    pub at: usize,
    /// The trail's name, or its id.
    pub trail: String,
    /// Metres along the trail.
    pub from_m: String,
    /// Metres along the trail.
    pub to_m: String,
    /// Place of its proposal in the legend.
    pub proposal: usize,
    /// Its proposal.
    pub word: &'static str,
    /// Where it is worst, with likelihood, chance and first boulders, in words.
    pub chance: String,
}

/// A boulder by name.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct NamedBoulder {
    /// Its place in the order of inspection, from 0.
    pub at: usize,
    /// Its name.
    pub name: String,
}

/// How many were not assessed for one reason.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct ReasonCount {
    /// How many.
    pub count: String,
    /// The reason in words.
    pub words: String,
}

/// Trail metres by proposal, every proposal once, in the order of the legend.
pub fn proposal_metres(rows: &[SegmentRow]) -> Vec<ProposalMetres> {
    let total: f64 = rows.iter().map(|r| r.segment.length_m()).sum();
    (PROPOSAL_CLASSES.iter().enumerate())
        .map(|(at, class)| {
            let of_class = rows.iter().filter(|r| r.result.decision.proposal == class.proposal);
            let metres: f64 = of_class.map(|r| r.segment.length_m()).sum();
            let share = if total > 0.0 { 100.0 * metres / total } else { 0.0 };
            ProposalMetres { at, word: class.proposal.word(), metres: whole(metres), share: format!("{share:.1}") }
        })
        .collect()
}

/// A length in whole metres, in groups of three digits.
fn whole(metres: f64) -> String {
    // An empty sum is minus zero.
    grouped(&format!("{:.0}", metres + 0.0))
}

/// A count in groups of three digits.
///
/// ```
/// assert_eq!(spallcast::report::summary::count(1_234_567), "1,234,567");
/// ```
pub fn count(count: u64) -> String {
    grouped(&count.to_string())
}

fn grouped(digits: &str) -> String {
    let mut grouped = String::new();
    for (i, c) in digits.chars().enumerate() {
        if i > 0 && (digits.len() - i).is_multiple_of(3) {
            grouped.push(',');
        }
        grouped.push(c);
    }
    grouped
}

/// The upper chance per passage; 0 orders a segment without one last.
fn chance(row: &SegmentRow) -> f64 {
    row.result.people.as_ref().map_or(0.0, |p| p.per_passage_p95)
}

/// The stretches with the most restrictive proposals, the largest chance first; neither "no limit" nor unknown ones.
pub fn worst_stretches(rows: &[SegmentRow]) -> Vec<WorstStretch> {
    let limited = |r: &SegmentRow| !matches!(r.result.decision.proposal, Proposal::NoLimit | Proposal::NotAssessed);
    let joined = |a: &SegmentRow, b: &SegmentRow| {
        a.trail_id == b.trail_id && a.result.decision.proposal == b.result.decision.proposal
    };
    let mut start = 0;
    let mut worst: Vec<(usize, &[SegmentRow])> = Vec::new();
    for stretch in rows.chunk_by(joined) {
        if limited(&stretch[0]) {
            let (at, _) = (stretch.iter().enumerate())
                .max_by(|(i, a), (j, b)| chance(a).total_cmp(&chance(b)).then(j.cmp(i)))
                .expect("a chunk has a row");
            worst.push((start + at, stretch));
        }
        start += stretch.len();
    }
    worst.sort_by(|(i, a), (j, b)| {
        let of = |s: &[SegmentRow]| weight(s[0].result.decision.proposal);
        of(a).cmp(&of(b)).then(chance(&rows[*j]).total_cmp(&chance(&rows[*i]))).then(i.cmp(j))
    });
    worst.into_iter().take(WORST_NAMED).map(|(at, stretch)| worst_stretch(at, &rows[at], stretch)).collect()
}

fn worst_stretch(at: usize, row: &SegmentRow, stretch: &[SegmentRow]) -> WorstStretch {
    let proposal = row.result.decision.proposal;
    let mut parts = Vec::new();
    if let Some(c) = &row.result.combined {
        parts.push(format!("rock arrives {}, at most {}", likelihood(c.p_any), likelihood(c.p_any_high)));
    }
    if let Some(p) = row.result.people.as_ref().filter(|p| p.per_passage_p95 > 0.0) {
        parts.push(format!("death per passage at most {}", one_in(p.per_passage_p95)));
    }
    let ids = &row.result.boulder_ids;
    if !ids.is_empty() {
        let mut names = ids.iter().take(NAMED_OF_STRETCH).cloned().collect::<Vec<_>>().join(", ");
        if ids.len() > NAMED_OF_STRETCH {
            names.push_str(&format!(" and {} more", ids.len() - NAMED_OF_STRETCH));
        }
        parts.push(names);
    }
    let (from_m, to_m) = (whole(row.segment.from_m), whole(row.segment.to_m));
    let chance = match stretch.len() {
        1 => parts.join("; "),
        _ => format!("most at {from_m} to {to_m} m: {}", parts.join("; ")),
    };
    WorstStretch {
        at,
        trail: row.name.clone().unwrap_or_else(|| row.trail_id.clone()),
        from_m: whole(stretch[0].segment.from_m),
        to_m: whole(stretch[stretch.len() - 1].segment.to_m),
        proposal: legend_place(proposal),
        word: proposal.word(),
        chance,
    }
}

/// A likelihood at reading distance; never a bare 0 or 100 %.
fn likelihood(p: f64) -> String {
    match p {
        p if p < 0.005 => "<1 %".to_owned(),
        p if p > 0.995 => ">99 %".to_owned(),
        p => format!("{:.0} %", 100.0 * p),
    }
}

/// Stretches of unknown standing: how many, and their length in whole metres.
pub fn unknown_stretches(rows: &[SegmentRow]) -> (usize, String) {
    let unknown: Vec<f64> = (rows.iter())
        .filter(|r| r.result.decision.proposal == Proposal::NotAssessed)
        .map(|r| r.segment.length_m())
        .collect();
    (unknown.len(), whole(unknown.iter().sum()))
}

/// The boulders that come first in the order of inspection.
pub fn first_boulders(results: &[BoulderResult], order: &[usize]) -> Vec<NamedBoulder> {
    let named = |(at, index): (usize, &usize)| {
        let id = results[*index].id();
        NamedBoulder { at, name: if id.is_empty() { "(no name)".to_owned() } else { id.to_owned() } }
    };
    order.iter().take(FIRST_NAMED).enumerate().map(named).collect()
}

/// Why boulders were not assessed, the most frequent reason first.
pub fn reasons(counts: &RunCounts) -> Vec<ReasonCount> {
    let mut reasons: Vec<(&&str, &u64)> = counts.not_assessed_by_reason.iter().collect();
    reasons.sort_by(|a, b| b.1.cmp(a.1).then(a.0.cmp(b.0)));
    reasons.into_iter().map(|(code, n)| ReasonCount { count: count(*n), words: code.replace('_', " ") }).collect()
}

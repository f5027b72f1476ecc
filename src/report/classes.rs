//! Classes of the map, the legend and the styles: one table each.
//!
//! Graded colours: five steps of cividis (Nunez, Anderton and Renslow 2018, PLoS ONE 13(7), e0199239), dark for heavy.
//! Categories: Okabe and Ito 2008, "Color Universal Design". Class limits are ours (assumption).

use serde::Serialize;

use crate::trail::proposal::Proposal;

/// One class of source likelihood.
#[derive(Debug, Clone, Copy, PartialEq, Serialize)]
pub struct SourceClass {
    /// Its key in the page.
    pub key: &'static str,
    /// Smallest likelihood in it; the next class's is outside.
    pub from: f64,
    /// Its words.
    pub words: &'static str,
    /// Its colour on a light ground, `#rrggbb`.
    pub colour: &'static str,
}

/// Classes by `p_source`, the lightest first.
pub const SOURCE_CLASSES: [SourceClass; 5] = [
    SourceClass { key: "s0", from: 0.0, words: "below 5 %", colour: "#fde737" },
    SourceClass { key: "s1", from: 0.05, words: "5 to 20 %", colour: "#bcae6c" },
    SourceClass { key: "s2", from: 0.2, words: "20 to 50 %", colour: "#7c7b78" },
    SourceClass { key: "s3", from: 0.5, words: "50 to 80 %", colour: "#414d6b" },
    SourceClass { key: "s4", from: 0.8, words: "80 % and more", colour: "#00224e" },
];

/// How one proposal is drawn.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct ProposalClass {
    /// The proposal.
    pub proposal: Proposal,
    /// Its colour, `#rrggbb`.
    pub colour: &'static str,
}

/// Proposals in the order of the legend; unknown stands apart at the end and looks like none of the others.
pub const PROPOSAL_CLASSES: [ProposalClass; 5] = [
    ProposalClass { proposal: Proposal::KeepClosed, colour: "#d55e00" },
    ProposalClass { proposal: Proposal::LookFirst, colour: "#e69f00" },
    ProposalClass { proposal: Proposal::Warn, colour: "#56b4e9" },
    ProposalClass { proposal: Proposal::NoLimit, colour: "#b9b4ac" },
    ProposalClass { proposal: Proposal::NotAssessed, colour: "#cc79a7" },
];

/// Place of a proposal in the legend.
pub fn legend_place(proposal: Proposal) -> usize {
    PROPOSAL_CLASSES.iter().position(|c| c.proposal == proposal).expect("every proposal has a class")
}

/// Weight of a proposal, 0 for the most restrictive; unknown weighs more than every kind of open.
pub fn weight(proposal: Proposal) -> usize {
    Proposal::ALL.iter().rev().position(|p| *p == proposal).expect("every proposal is listed")
}

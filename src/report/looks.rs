//! How the classes of [`super::classes`] look in a map program: mark, size, dashes. Limits and colours are the page's.
//!
//! Spall thickness and the reach of stretches, which the page does not colour, take the four-class sequential ramp
//! "Oranges" of Brewer 2003 (ColorBrewer, recalled): from light to dark, so that order survives grey print. No green:
//! nothing here vouches for a stretch. Class limits are ours (assumption).

use super::classes::{self, PROPOSAL_CLASSES};
use crate::trail::proposal::Proposal;

/// A mark on a map.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Mark {
    /// A circle.
    Circle,
    /// A square.
    Square,
    /// A triangle.
    Triangle,
    /// A star.
    Star,
    /// A cross, `x`.
    Cross,
}

impl Mark {
    /// Its name among the well-known marks of SLD.
    pub fn word(self) -> &'static str {
        match self {
            Mark::Circle => "circle",
            Mark::Square => "square",
            Mark::Triangle => "triangle",
            Mark::Star => "star",
            Mark::Cross => "x",
        }
    }
}

/// A class of a likelihood or a thickness: from its lower limit (included) to its upper one (left out, but for the last).
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Class {
    /// Lower limit.
    pub from: f64,
    /// Upper limit.
    pub to: f64,
    /// What stands in the key.
    pub label: &'static str,
    /// Fill.
    pub colour: &'static str,
    /// Shape.
    pub mark: Mark,
    /// Size of the mark, or width of the line, px.
    pub size_px: u32,
}

const fn class(from: f64, to: f64, label: &'static str, colour: &'static str, mark: Mark, size_px: u32) -> Class {
    Class { from, to, label, colour, mark, size_px }
}

const fn source(i: usize, mark: Mark, size_px: u32) -> Class {
    let here = classes::SOURCE_CLASSES[i];
    let to = if i + 1 < classes::SOURCE_CLASSES.len() { classes::SOURCE_CLASSES[i + 1].from } else { 1.0 };
    class(here.from, to, here.words, here.colour, mark, size_px)
}

/// Classes of `p_source`, in rising order.
pub const SOURCE_CLASSES: [Class; 5] = [
    source(0, Mark::Circle, 7),
    source(1, Mark::Circle, 9),
    source(2, Mark::Square, 11),
    source(3, Mark::Triangle, 14),
    source(4, Mark::Star, 18),
];

/// Classes of `spall_thickness_mm`, in rising order.
pub const THICKNESS_CLASSES: [Class; 4] = [
    class(0.0, 5.0, "spall: below 5 mm", "#feedde", Mark::Circle, 7),
    class(5.0, 20.0, "spall: 5 to 20 mm", "#fdbe85", Mark::Circle, 10),
    class(20.0, 100.0, "spall: 20 to 100 mm", "#fd8d3c", Mark::Circle, 14),
    class(100.0, 100_000.0, "spall: 100 mm and more", "#d94701", Mark::Circle, 19),
];

/// Classes of `p_any` of a stretch, in rising order.
pub const REACH_CLASSES: [Class; 4] = [
    class(0.0, 0.01, "reached: below 1 %", "#fdbe85", Mark::Circle, 2),
    class(0.01, 0.1, "reached: 1 to 10 %", "#fd8d3c", Mark::Circle, 4),
    class(0.1, 0.5, "reached: 10 to 50 %", "#d94701", Mark::Circle, 6),
    class(0.5, 1.0, "reached: 50 % and more", "#7f2704", Mark::Circle, 9),
];

/// Fill and outline of what was not assessed: never the look of a low class.
pub const NOT_ASSESSED_COLOUR: &str = PROPOSAL_CLASSES[4].colour;
/// Mark of a boulder without figures.
pub const NOT_ASSESSED_MARK: Mark = Mark::Cross;
/// Outline of every mark: dark on any ground.
pub const OUTLINE: &str = "#222222";

/// How a proposal is drawn.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct ProposalLook {
    /// The proposal.
    pub proposal: Proposal,
    /// Colour of the line.
    pub colour: &'static str,
    /// Dashes and gaps, px; empty for a solid line.
    pub dashes: &'static str,
    /// Width, px.
    pub width_px: u32,
}

const fn look(i: usize, dashes: &'static str, width_px: u32) -> ProposalLook {
    let class = PROPOSAL_CLASSES[i];
    ProposalLook { proposal: class.proposal, colour: class.colour, dashes, width_px }
}

/// Looks of the proposals, in the order of the page's legend.
pub const PROPOSAL_LOOKS: [ProposalLook; 5] =
    [look(0, "", 8), look(1, "14 4", 7), look(2, "8 3 2 3", 5), look(3, "", 3), look(4, "2 6", 6)];

/// The class that holds a value; `None` outside all of them.
///
/// ```
/// use spallcast::report::looks::{SOURCE_CLASSES, class_of};
/// assert_eq!(class_of(&SOURCE_CLASSES, 0.1).unwrap().label, "5 to 20 %");
/// assert_eq!(class_of(&SOURCE_CLASSES, 1.0).unwrap().label, "80 % and more");
/// assert!(class_of(&SOURCE_CLASSES, f64::NAN).is_none());
/// ```
pub fn class_of(classes: &[Class], value: f64) -> Option<&Class> {
    let last = classes.len().checked_sub(1)?;
    classes
        .iter()
        .enumerate()
        .find(|(i, c)| value >= c.from && (value < c.to || *i == last && value <= c.to))
        .map(|c| c.1)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn classes_meet_without_gaps_and_every_proposal_has_a_look_of_its_own() {
        for classes in [&SOURCE_CLASSES[..], &THICKNESS_CLASSES[..], &REACH_CLASSES[..]] {
            assert!(classes.windows(2).all(|w| w[0].to == w[1].from && w[0].size_px < w[1].size_px), "{classes:?}");
            assert_eq!(classes[0].from, 0.0);
        }
        for proposal in Proposal::ALL {
            assert_eq!(PROPOSAL_LOOKS.iter().filter(|l| l.proposal == *proposal).count(), 1, "{}", proposal.word());
        }
        // In grey print: no two share both dashes and width.
        let mut looks: Vec<_> = PROPOSAL_LOOKS.iter().map(|l| (l.dashes, l.width_px)).collect();
        looks.sort_unstable();
        looks.dedup();
        assert_eq!(looks.len(), PROPOSAL_LOOKS.len());
    }
}

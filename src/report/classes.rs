//! Classes of likelihood and kinds of proposal with their colour and shape: one list for the page and the styles.
//!
//! **Likelihoods** take the four-class sequential ramp "Oranges" of Brewer 2003 (ColorBrewer, recalled): one hue, from
//! light to dark, so that order survives grey print and colour blindness; each class has a shape and a size of its own.
//! **Proposals** take hues of Okabe and Ito 2008 with dashes and widths of their own. No green: nothing here vouches for
//! a stretch. Class limits are ours (assumption).

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

/// Classes of `p_source`, in rising order.
pub const SOURCE_CLASSES: [Class; 4] = [
    class(0.0, 0.01, "moves: below 1 %", "#feedde", Mark::Circle, 9),
    class(0.01, 0.1, "moves: 1 to 10 %", "#fdbe85", Mark::Square, 10),
    class(0.1, 0.5, "moves: 10 to 50 %", "#fd8d3c", Mark::Triangle, 13),
    class(0.5, 1.0, "moves: 50 % and more", "#d94701", Mark::Star, 17),
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
pub const NOT_ASSESSED_COLOUR: &str = "#000000";
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

/// Looks of the proposals, the most restrictive first.
pub const PROPOSAL_LOOKS: [ProposalLook; 5] = [
    ProposalLook { proposal: Proposal::KeepClosed, colour: "#d55e00", dashes: "", width_px: 8 },
    ProposalLook { proposal: Proposal::LookFirst, colour: "#e69f00", dashes: "14 4", width_px: 7 },
    ProposalLook { proposal: Proposal::NotAssessed, colour: "#000000", dashes: "2 6", width_px: 6 },
    ProposalLook { proposal: Proposal::Warn, colour: "#cc79a7", dashes: "8 3 2 3", width_px: 5 },
    ProposalLook { proposal: Proposal::NoLimit, colour: "#0072b2", dashes: "", width_px: 2 },
];

/// The class that holds a value; `None` outside all of them.
///
/// ```
/// use spallcast::report::classes::{SOURCE_CLASSES, class_of};
/// assert_eq!(class_of(&SOURCE_CLASSES, 0.1).unwrap().label, "moves: 10 to 50 %");
/// assert_eq!(class_of(&SOURCE_CLASSES, 1.0).unwrap().label, "moves: 50 % and more");
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
        for classes in [SOURCE_CLASSES, THICKNESS_CLASSES, REACH_CLASSES] {
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

//! The cautions that go with every layer, table and page. `docs/cautions.md` says the same at length.

/// One caution.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Caution {
    /// The caution in a few words; the heading in `docs/cautions.md`.
    pub title: &'static str,
    /// The caution as a sentence that stands alone.
    pub text: &'static str,
}

/// Every caution, in the order of `docs/cautions.md`.
pub const CAUTIONS: &[Caution] = &[
    Caution {
        title: "A screening, not a site study.",
        text: "This is a screening from field notes and defaults, not a site study; it says where to look first.",
    },
    Caution {
        title: "Where and how likely, not when.",
        text: "Likelihoods say where and how likely within the stated horizon; nothing here foretells the day.",
    },
    Caution {
        title: "Only what was looked at.",
        text: "Only recorded boulders have figures; a slope without records is a gap, not good news.",
    },
    Caution {
        title: "\"Not assessed\" means unknown.",
        text: "\"Not assessed\" means unknown and never open; a value that was not computed is null.",
    },
    Caution {
        title: "Valid to a date.",
        text: "Figures and proposals are valid to their date; after it they are out of force until somebody looks again.",
    },
    Caution {
        title: "Look again after a change:",
        text: "Look again after rain, after the first freeze, after shaking, and wherever fresh rocks lie on the ground.",
    },
    Caution {
        title: "Local evidence overrules angles.",
        text: "Where boulders have come to rest farther out than the reach angle suggests, believe the boulders.",
    },
    Caution {
        title: "Dead trees are not included.",
        text: "Dead trees, debris flow, flood, ash, and rock from slopes without records are not included.",
    },
    Caution {
        title: "Measuring is exposure.",
        text: "Whoever stands under an unstable rock to measure it is in its path; decide first whether the number is worth it.",
    },
    Caution {
        title: "Straight rays see no ridge.",
        text: "Without an elevation raster, ridges and valleys between boulder and trail were not checked.",
    },
    Caution {
        title: "Assumptions are shown.",
        text: "A figure marked \"assumption\" has no publication behind it; it stands in the settings so that local knowledge can replace it.",
    },
    Caution {
        title: "The program proposes. People decide.",
        text: "The program proposes and people decide; \"decided by\" is left empty for the person who does.",
    },
    Caution {
        title: "A licensed professional confirms",
        text: "A licensed professional confirms sources, failure mode and reach, and signs; local codes and the land manager's rules stand above this.",
    },
];

/// The sentences alone.
pub fn sentences() -> Vec<&'static str> {
    CAUTIONS.iter().map(|c| c.text).collect()
}

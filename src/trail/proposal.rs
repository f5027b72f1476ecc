//! The word for a segment, with its reason and what would allow reopening.
//!
//! Limits are the land manager's settings on the upper 95 % value of the death chance per passage. On top of them, in rising order:
//! - a stop's chance at or above the warning limit: at least "open with warning" (without stopping the passage's figure governs);
//! - a listed boulder within reach that has no likelihood, or no height to judge it by, or no listed boulder near at all:
//!   at least "not assessed", which therefore outranks every kind of open;
//! - a burnt-through support whose boulder reaches the segment with more than the set share: at least "closed until looked at".
//!
//! A segment that is both over a closing limit and partly unassessed keeps the closing word, and the reason says both.
//! Proposes, never orders; the deciding is left to the land manager.

use crate::settings::TrailSettings;
use crate::site::word_enum;

word_enum! {
    /// What is proposed, from the least to the most restrictive.
    Proposal {
        /// Nothing found that asks for a limit.
        NoLimit = "no limit from this screening",
        /// Open with warning, no stopping.
        Warn = "open with warning",
        /// Nobody knows.
        NotAssessed = "not assessed",
        /// Closed until a qualified person has looked.
        LookFirst = "closed until looked at",
        /// Keep closed.
        KeepClosed = "keep closed",
    }
}

/// A boulder named in a reason.
#[derive(Debug, Clone, PartialEq)]
pub struct Named {
    /// Its id.
    pub id: String,
    /// Why, for example its source sentence or why it has no likelihood.
    pub why: String,
    /// P_seg, where judged.
    pub p_segment: Option<f64>,
}

/// What the word is chosen from.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Evidence {
    /// Name of the trail as people use it.
    pub trail_name: String,
    /// Metres along the trail.
    pub from_m: f64,
    /// Metres along the trail.
    pub to_m: f64,
    /// Main figure; `None` when nothing assessed is in reach.
    pub p_any: Option<f64>,
    /// Upper death chance per passage.
    pub per_passage_p95: f64,
    /// Upper death chance per stop.
    pub per_stop_p95: Option<f64>,
    /// Assessed boulders in reach, largest share first.
    pub contributors: Vec<Named>,
    /// Boulders within reach without a likelihood, or whose reach could not be judged.
    pub unassessed: Vec<Named>,
    /// Boulders with burnt-through supports above the set share.
    pub burnt_through: Vec<Named>,
    /// Boulders that rising ground keeps from the segment.
    pub shielded: Vec<String>,
    /// Whether any listed boulder lies within the looked-at distance or reaches the segment.
    pub listed_near: bool,
    /// Whether straight rays were used.
    pub without_terrain: bool,
    /// Whether the raster has gaps on the way.
    pub terrain_gap: bool,
    /// Whether a contributing boulder's bearing is unknown.
    pub bearing_unknown: bool,
    /// Horizon, days.
    pub horizon_days: f64,
}

/// The word, its reason, and what would change it.
#[derive(Debug, Clone, PartialEq)]
pub struct Decision {
    /// The word.
    pub proposal: Proposal,
    /// Why, in sentences to be read aloud.
    pub reason: String,
    /// What would allow reopening.
    pub reopens_when: String,
}

/// Chooses the word.
pub fn choose(evidence: &Evidence, limits: &TrailSettings) -> Proposal {
    let p = evidence.per_passage_p95;
    let mut word = if p >= limits.keep_closed_at {
        Proposal::KeepClosed
    } else if p >= limits.look_first_at {
        Proposal::LookFirst
    } else if p >= limits.warn_at || evidence.per_stop_p95.is_some_and(|s| s >= limits.warn_at) {
        Proposal::Warn
    } else {
        Proposal::NoLimit
    };
    if !evidence.unassessed.is_empty() || !evidence.listed_near {
        word = word.max(Proposal::NotAssessed);
    }
    if !evidence.burnt_through.is_empty() {
        word = word.max(Proposal::LookFirst);
    }
    word
}

/// A small chance as "1 in N", two figures; "none found" at zero.
///
/// ```
/// use spallcast::trail::proposal::one_in;
/// assert_eq!(one_in(3.2e-6), "1 in 310,000");
/// assert_eq!(one_in(1e-5), "1 in 100,000");
/// assert_eq!(one_in(0.5), "1 in 2");
/// ```
pub fn one_in(chance: f64) -> String {
    if chance <= 0.0 {
        return "none found".to_owned();
    }
    let n = 1.0 / chance;
    if n > 1e15 {
        return "less than 1 in a million million".to_owned();
    }
    let unit = libm::pow(10.0, libm::floor(libm::log10(n * (1.0 + 1e-12))) - 1.0).max(1.0);
    let digits = format!("{:.0}", (n / unit).round() * unit);
    let mut text = String::from("1 in ");
    for (i, digit) in digits.chars().enumerate() {
        if i > 0 && (digits.len() - i) % 3 == 0 {
            text.push(',');
        }
        text.push(digit);
    }
    text
}

/// A likelihood in words: "62 in 100", "less than 1 in 100".
fn in_hundred(p: f64) -> String {
    if p < 0.01 { "less than 1 in 100".to_owned() } else { format!("{:.0} in 100", 100.0 * p) }
}

/// Names of boulders, at most four, then how many more.
fn names<'a>(ids: impl ExactSizeIterator<Item = &'a str>) -> String {
    const SHOWN: usize = 4;
    let count = ids.len();
    let shown: Vec<&str> = ids.take(SHOWN).collect();
    let noun = if count == 1 { "boulder" } else { "boulders" };
    let list = match (shown.split_last(), count > SHOWN) {
        (None, _) => return "no boulder".to_owned(),
        (Some(_), true) => format!("{} and {} more", shown.join(", "), count - SHOWN),
        (Some((last, [])), false) => (*last).to_owned(),
        (Some((last, rest)), false) => format!("{} and {last}", rest.join(", ")),
    };
    format!("{noun} {list}")
}

fn of(list: &[Named]) -> String {
    names(list.iter().map(|n| n.id.as_str()))
}

/// Ends a text as a sentence.
fn sentence(text: &str) -> String {
    let text = text.trim();
    if text.ends_with(['.', '!', '?']) { text.to_owned() } else { format!("{text}.") }
}

/// Chooses the word and writes its reason.
pub fn decide(evidence: &Evidence, limits: &TrailSettings) -> Decision {
    let proposal = choose(evidence, limits);
    let e = evidence;
    let mut text: Vec<String> = Vec::new();
    let place = format!("{}, metres {:.0} to {:.0}", e.trail_name, e.from_m, e.to_m);
    if let (Some(p_any), Some(first)) = (e.p_any, e.contributors.first()) {
        let verb = if e.contributors.len() == 1 { "reaches" } else { "may reach" };
        text.push(format!(
            "{place}: {} {verb} this stretch; the chance that rock arrives within {:.0} days is {}.",
            of(&e.contributors),
            e.horizon_days,
            in_hundred(p_any)
        ));
        text.push(format!("Boulder {}: {}", first.id, sentence(&first.why)));
        text.push(format!(
            "For one person walking through, the chance of being killed is at most {} (upper 95 % value).",
            one_in(e.per_passage_p95)
        ));
        let limit = match proposal {
            Proposal::KeepClosed => Some((limits.keep_closed_at, "keeping it closed")),
            Proposal::LookFirst if e.per_passage_p95 >= limits.look_first_at => {
                Some((limits.look_first_at, "closing it until a qualified person has looked"))
            }
            Proposal::Warn if e.per_passage_p95 >= limits.warn_at => {
                Some((limits.warn_at, "a warning without stopping"))
            }
            _ => None,
        };
        if let Some((limit, what)) = limit {
            text.push(format!("That is at or above {}, the limit set for {what}.", one_in(limit)));
        }
        if let Some(stop) = e.per_stop_p95 {
            let over = if stop >= limits.warn_at { ", at or above the limit set for a warning" } else { "" };
            text.push(format!(
                "For one person who stops here as long as the trail record says it is {}{over}.",
                one_in(stop)
            ));
        }
    } else if e.listed_near {
        text.push(format!("{place}: no assessed boulder of the inventory reaches this stretch."));
    } else {
        text.push(format!(
            "{place}: the inventory lists no boulder within {:.0} m, so nobody is known to have looked above this stretch.",
            limits.looked_at_m
        ));
    }
    if !e.burnt_through.is_empty() {
        text.push(format!("What held {} is burnt through.", of(&e.burnt_through)));
    }
    if let Some(first) = e.unassessed.first() {
        let verb = if e.unassessed.len() == 1 { "has" } else { "have" };
        text.push(format!(
            "Within reach, {} {verb} no likelihood; {}: {}",
            of(&e.unassessed),
            first.id,
            sentence(&first.why)
        ));
    }
    if !e.shielded.is_empty() {
        text.push(format!("Rising ground keeps {} from it.", names(e.shielded.iter().map(String::as_str))));
    }
    if e.without_terrain && (!e.contributors.is_empty() || !e.unassessed.is_empty()) {
        text.push("Reach was judged along straight lines; ridges and valleys between were not checked.".to_owned());
    }
    if e.terrain_gap {
        text.push("The elevation raster has gaps on the way, which were not checked.".to_owned());
    }
    if e.bearing_unknown {
        text.push(
            "A fall line is not recorded; falls were taken as even over a quarter circle towards this stretch."
                .to_owned(),
        );
    }
    if matches!(proposal, Proposal::NoLimit | Proposal::Warn) {
        text.push("Only boulders of the inventory were looked at.".to_owned());
    }
    Decision { proposal, reason: text.join(" "), reopens_when: reopens_when(e, proposal) }
}

fn reopens_when(e: &Evidence, proposal: Proposal) -> String {
    match proposal {
        Proposal::NoLimit => {
            "Nothing is closed by this screening; look again after rain, the first freeze, shaking or fresh rocks."
                .to_owned()
        }
        Proposal::Warn => "The warning can go when a new run with later measurements falls below the limit.".to_owned(),
        Proposal::NotAssessed if e.unassessed.is_empty() => {
            "When someone has looked above this stretch and its boulders, or their absence, are in the inventory."
                .to_owned()
        }
        Proposal::NotAssessed => {
            format!("When what is missing for {} has been recorded and the run repeated.", of(&e.unassessed))
        }
        Proposal::LookFirst | Proposal::KeepClosed => {
            let mut who: Vec<&Named> = Vec::new();
            for n in e.burnt_through.iter().chain(&e.contributors).chain(&e.unassessed) {
                if !who.iter().any(|w| w.id == n.id) {
                    who.push(n);
                }
            }
            format!(
                "When a qualified person has looked at {} and the land manager accepts what was found, or a new run with \
                 later measurements falls below the limit.",
                names(who.iter().map(|n| n.id.as_str()).collect::<Vec<_>>().into_iter())
            )
        }
    }
}

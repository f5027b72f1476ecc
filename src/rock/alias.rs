//! What field people write for a rock, folded to a catalogue rock.
//!
//! Folding: case, accents, spaces, hyphens and punctuation are ignored, then plural endings. In order: the words that
//! mean "not known"; a rock or alias (`tables/aliases.csv`, each with its basis); words that name a group of rocks
//! rather than one (`tables/rock_groups.csv`), answered with candidates; then the text without qualifiers of colour,
//! grain and state (`tables/qualifiers.csv`); then a proper name that ends in a rock ("Navajo Sandstone"). Text that
//! names two rocks is never decided here. A misspelling is never taken for a rock: it is answered with near names.

use std::collections::BTreeMap;

use serde::Deserialize;

use super::catalogue::{Basis, basis, rows};

/// What a written rock name means.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Resolution {
    /// A rock of the catalogue, by its key.
    Rock(String),
    /// The record says that the rock is not known.
    Unknown,
    /// No rock of the catalogue.
    NotFound {
        /// Names that can be written instead, best first; may be empty.
        nearest: Vec<String>,
    },
}

/// One alias and what it rests on.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Alias {
    /// As people write it.
    pub alias: String,
    /// The catalogue rock it is taken for.
    pub rock: String,
    /// What the mapping rests on.
    pub basis: Basis,
    /// Why.
    pub why: String,
}

#[derive(Deserialize)]
struct AliasRow {
    alias: String,
    rock: String,
    basis: String,
    why: String,
}

#[derive(Deserialize)]
struct GroupRow {
    word: String,
    candidates: String,
}

#[derive(Deserialize)]
struct QualifierRow {
    word: String,
}

const ALIASES: &str = include_str!("tables/aliases.csv");
const GROUPS: &str = include_str!("tables/rock_groups.csv");
const QUALIFIERS: &str = include_str!("tables/qualifiers.csv");

/// Words that mean the rock is not known (common practice, no source), folded.
const UNKNOWN: [&str; 34] = [
    "unknown",
    "unk",
    "unkn",
    "ukn",
    "na",
    "nan",
    "none",
    "null",
    "nil",
    "nd",
    "nr",
    "tbd",
    "notknown",
    "notrecorded",
    "notdetermined",
    "notidentified",
    "notnoted",
    "notspecified",
    "unspecified",
    "unidentified",
    "undetermined",
    "unrecorded",
    "uncertain",
    "unsure",
    "dontknow",
    "other",
    "various",
    "mixed",
    "rock",
    "stone",
    "boulder",
    "outcrop",
    "bedrock",
    "x",
];

/// Words that join or deny: text that holds one is not a proper name.
const JOINING: [&str; 14] =
    ["and", "or", "not", "no", "with", "over", "on", "in", "vs", "versus", "maybe", "possibly", "non", "like"];

/// Names shorter than this are not offered for misspellings.
const SUGGESTED_FROM: usize = 4;
/// Similarity (1 is equal) from which a name is offered (judgement).
const SIMILAR: f64 = 0.6;
/// Names offered at most.
const SUGGESTIONS: usize = 3;

/// The words of a text: lower case, accents off, everything but letters and digits a gap.
fn words(text: &str) -> Vec<String> {
    let plain: String = text.chars().flat_map(char::to_lowercase).map(plain_letter).collect();
    plain.split(|c: char| !c.is_alphanumeric()).filter(|w| !w.is_empty()).map(str::to_owned).collect()
}

/// The letter without its accent, for the languages of the alias table.
fn plain_letter(c: char) -> char {
    match c {
        'á' | 'à' | 'â' | 'ä' | 'ã' | 'å' => 'a',
        'é' | 'è' | 'ê' | 'ë' => 'e',
        'í' | 'ì' | 'î' | 'ï' => 'i',
        'ó' | 'ò' | 'ô' | 'ö' | 'õ' => 'o',
        'ú' | 'ù' | 'û' | 'ü' => 'u',
        'ñ' => 'n',
        'ç' => 'c',
        other => other,
    }
}

/// A text as it is compared: its words run together.
pub(super) fn fold(text: &str) -> String {
    words(text).concat()
}

/// Whether a text means "not known".
pub(super) fn means_unknown(text: &str) -> bool {
    let folded = fold(text);
    folded.is_empty() || UNKNOWN.contains(&folded.as_str())
}

/// A folded text and its singular forms.
fn singulars(folded: &str) -> impl Iterator<Item = String> {
    let stems = [folded.strip_suffix('s'), folded.strip_suffix("es")];
    let long = folded.len() > 3;
    std::iter::once(folded.to_owned()).chain(stems.into_iter().flatten().filter(move |_| long).map(str::to_owned))
}

/// Every name by which a run knows its rocks.
#[derive(Debug, Clone)]
pub(super) struct Names {
    /// Folded rock keys to keys.
    rocks: BTreeMap<String, String>,
    /// Folded aliases to their place in `aliases`.
    index: BTreeMap<String, usize>,
    aliases: Vec<Alias>,
    groups: BTreeMap<String, Vec<String>>,
    qualifiers: Vec<String>,
}

impl Names {
    pub(super) fn embedded<'a>(keys: impl Iterator<Item = &'a str>) -> Names {
        let mut names = Names {
            rocks: keys.map(|k| (fold(k), k.to_owned())).collect(),
            index: BTreeMap::new(),
            aliases: Vec::new(),
            groups: BTreeMap::new(),
            qualifiers: rows::<QualifierRow>(QUALIFIERS, "qualifiers.csv").into_iter().map(|r| fold(&r.word)).collect(),
        };
        for row in rows::<AliasRow>(ALIASES, "aliases.csv") {
            assert!(names.rocks.contains_key(&row.rock), "aliases.csv: {} leads to no rock", row.alias);
            assert!(!names.index.contains_key(&fold(&row.alias)), "aliases.csv: {} stands twice", row.alias);
            assert!(!names.rocks.contains_key(&fold(&row.alias)), "aliases.csv: {} is a rock", row.alias);
            names.add_alias(&row.alias, &row.rock, basis(&row.basis), &row.why);
        }
        for row in rows::<GroupRow>(GROUPS, "rock_groups.csv") {
            let folded = fold(&row.word);
            assert!(names.named(&folded).is_none(), "rock_groups.csv: {} already names a rock", row.word);
            let candidates: Vec<String> = row.candidates.split_whitespace().map(str::to_owned).collect();
            assert!(candidates.iter().all(|c| names.rocks.contains_key(c)), "rock_groups.csv: {}", row.word);
            names.groups.insert(folded, candidates);
        }
        names
    }

    pub(super) fn add_rock(&mut self, key: &str) {
        self.rocks.insert(fold(key), key.to_owned());
    }

    pub(super) fn add_alias(&mut self, alias: &str, rock: &str, basis: Basis, why: &str) {
        self.index.insert(fold(alias), self.aliases.len());
        self.aliases.push(Alias { alias: alias.to_owned(), rock: rock.to_owned(), basis, why: why.to_owned() });
    }

    pub(super) fn aliases(&self) -> &[Alias] {
        &self.aliases
    }

    /// The rock whose own key (not an alias) is written.
    pub(super) fn rock_named(&self, text: &str) -> Option<&str> {
        self.rocks.get(&fold(text)).map(String::as_str)
    }

    /// The rock that a folded text names, by key or alias, singular or plural.
    fn named(&self, folded: &str) -> Option<&str> {
        singulars(folded).find_map(|form| match self.rocks.get(&form) {
            Some(key) => Some(key.as_str()),
            None => self.index.get(&form).map(|&at| self.aliases[at].rock.as_str()),
        })
    }

    pub(super) fn resolve(&self, text: &str) -> Resolution {
        if means_unknown(text) {
            return Resolution::Unknown;
        }
        let all = words(text);
        if let Some(key) = self.named(&all.concat()) {
            return Resolution::Rock(key.to_owned());
        }
        if let Some(candidates) = self.group(&all.concat()) {
            return Resolution::NotFound { nearest: candidates };
        }
        let kept: Vec<String> = all.iter().filter(|w| !self.qualifiers.contains(w)).cloned().collect();
        let bare = kept.concat();
        if bare.is_empty() || means_unknown(&bare) {
            return Resolution::Unknown;
        }
        if let Some(key) = self.named(&bare) {
            return Resolution::Rock(key.to_owned());
        }
        if let Some(candidates) = self.group(&bare) {
            return Resolution::NotFound { nearest: candidates };
        }
        self.proper_name(&kept)
    }

    fn group(&self, folded: &str) -> Option<Vec<String>> {
        singulars(folded).find_map(|form| self.groups.get(&form).cloned())
    }

    /// A name of several words: the rock it ends in, when no other word speaks against it.
    fn proper_name(&self, words: &[String]) -> Resolution {
        let mut mentioned: Vec<String> = Vec::new();
        for word in words.iter().filter(|w| w.len() >= SUGGESTED_FROM) {
            let found = self.named(word).map(|key| vec![key.to_owned()]).or_else(|| self.group(word));
            for key in found.into_iter().flatten() {
                if !mentioned.contains(&key) {
                    mentioned.push(key);
                }
            }
        }
        let last = words.last().filter(|w| w.len() >= SUGGESTED_FROM).and_then(|w| self.named(w));
        let joined = words.iter().any(|w| JOINING.contains(&w.as_str()));
        match (last, mentioned.as_slice()) {
            (Some(key), [only]) if only == key && !joined => Resolution::Rock(key.to_owned()),
            (_, []) => Resolution::NotFound { nearest: self.near(words) },
            _ => Resolution::NotFound { nearest: mentioned },
        }
    }

    /// Names close to the words, run together or one by one, best first.
    fn near(&self, words: &[String]) -> Vec<String> {
        let mut wanted = vec![words.concat()];
        wanted.extend(words.iter().filter(|w| w.len() >= SUGGESTED_FROM).cloned());
        let closeness =
            |folded: &str| wanted.iter().map(|w| strsim::normalized_damerau_levenshtein(folded, w)).fold(0.0, f64::max);
        let keys = self.rocks.iter().map(|(f, key)| (f, key.as_str()));
        let aliases = self.index.iter().map(|(f, &at)| (f, self.aliases[at].alias.as_str()));
        let mut scored: Vec<(f64, &str)> = keys
            .chain(aliases)
            .filter(|(folded, _)| folded.len() >= SUGGESTED_FROM)
            .map(|(folded, name)| (closeness(folded), name))
            .filter(|(score, _)| *score >= SIMILAR)
            .collect();
        scored.sort_by(|a, b| b.0.total_cmp(&a.0).then(a.1.cmp(b.1)));
        scored.into_iter().take(SUGGESTIONS).map(|(_, name)| name.to_owned()).collect()
    }
}

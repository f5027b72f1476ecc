//! Which names a file may use, and what to say about names that look misspelt.
//!
//! A name is known when it equals a known one but for case, surrounding space and `-` or space for `_`. A name within one
//! or two letters of a known one is left unused, with a warning, once a file. Everything else passes through in silence.

use std::collections::HashMap;

use crate::diagnostic::{Diagnostic, Severity};

/// Different names that are remembered, and spoken about, of one file.
const NAMES_MAX: usize = 10_000;

/// The names of one kind of record, and what was said about them already.
pub(crate) struct Columns {
    record: &'static str,
    known: Vec<&'static str>,
    seen: HashMap<String, Option<&'static str>>,
    /// Findings about names, once a file.
    pub(crate) findings: Vec<Diagnostic>,
}

impl Columns {
    /// The names that records of this kind may use.
    pub(crate) fn new(record: &'static str, known: Vec<&'static str>) -> Self {
        Columns { record, known, seen: HashMap::new(), findings: Vec::new() }
    }

    /// The known name that `name` stands for.
    pub(crate) fn canonical(&mut self, file: &str, line: u64, name: &str) -> Option<&'static str> {
        if let Some(known) = self.seen.get(name) {
            return *known;
        }
        let key = fold(name);
        // Names come from the file: a file with a new name in every feature must not fill the memory.
        if self.seen.len() >= NAMES_MAX {
            return self.known.iter().copied().find(|k| *k == key);
        }
        let known = self.known.iter().copied().find(|k| *k == key);
        let finding = |severity, code| {
            Diagnostic::new(severity, code, file)
                .about(self.record, None)
                .at_line(Some(line))
                .property(name, "no known name")
        };
        if let Some(known) = known.filter(|k| *k != name) {
            self.findings.push(
                finding(Severity::Note, "column_name_adapted")
                    .expected(format!("{known:?}"))
                    .remedy(format!("it was read as {known:?}")),
            );
        } else if known.is_none()
            && let Some(near) = nearest(&key, self.known.iter().copied())
        {
            self.findings.push(
                finding(Severity::Warning, "column_misspelt")
                    .expected(format!("{near:?}"))
                    .remedy(format!("rename it to {near:?} if that is what it means; it was not used")),
            );
        }
        self.seen.insert(name.to_owned(), known);
        known
    }
}

/// A name as it is compared.
pub(crate) fn fold(name: &str) -> String {
    name.trim().to_ascii_lowercase().replace(['-', ' '], "_")
}

/// The known name nearest to a misspelt one: one edit for short names, two for names of eight letters or more.
pub(crate) fn nearest<'k>(name: &str, known: impl Iterator<Item = &'k str>) -> Option<&'k str> {
    if name.len() < 3 || name.len() > 60 {
        return None;
    }
    let limit = if name.len() >= 8 { 2 } else { 1 };
    known
        .filter(|k| k.len().abs_diff(name.len()) <= limit)
        .map(|k| (strsim::damerau_levenshtein(name, k), k))
        .filter(|(n, k)| *n <= limit && *n < k.len() / 2)
        .min()
        .map(|(_, k)| k)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn misspelt_names_are_reported_once() {
        let mut columns = Columns::new("boulder", vec!["diameter_m", "rock"]);
        assert_eq!(columns.canonical("f", 1, "diamter_m"), None);
        assert_eq!(columns.canonical("f", 2, "diamter_m"), None);
        assert_eq!(columns.canonical("f", 1, " Rock"), Some("rock"));
        assert_eq!(columns.canonical("f", 1, "team_note"), None);
        let codes: Vec<_> = columns.findings.iter().map(|f| f.code).collect();
        assert_eq!(codes, ["column_misspelt", "column_name_adapted"]);
    }
}

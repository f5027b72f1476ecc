//! Single values of a settings file: numbers, text, switches, paths; each with its line and its message.

use std::ops::Range;
use std::path::{Path, PathBuf};

use toml::Spanned;
use toml::de::DeValue;

use super::values::show;
use crate::bounds;
use crate::diagnostic::{Diagnostic, Severity};
use crate::ensemble::distribution::Distribution;

/// The line of a byte, from 1.
pub(super) fn line_of(content: &str, at: usize) -> u64 {
    1 + content.as_bytes()[..at.min(content.len())].iter().filter(|&&b| b == b'\n').count() as u64
}

/// Reads the values of one settings file and collects what is wrong with them.
pub(super) struct Reader<'a> {
    pub(super) name: &'a str,
    pub(super) content: &'a str,
    pub(super) folder: &'a Path,
    pub(super) errors: Vec<(Diagnostic, Range<usize>)>,
    pub(super) notes: Vec<Diagnostic>,
    pub(super) given: Vec<String>,
}

impl Reader<'_> {
    pub(super) fn finding(&self, severity: Severity, code: &'static str, span: Range<usize>) -> Diagnostic {
        Diagnostic::new(severity, code, self.name)
            .about("setting", None)
            .at_line(Some(line_of(self.content, span.start)))
    }

    /// Records an error about one setting.
    pub(super) fn refuse(
        &mut self,
        code: &'static str,
        property: &str,
        at: (Range<usize>, String),
        expected: &str,
        remedy: &str,
    ) {
        let (span, found) = at;
        let finding = self
            .finding(Severity::Refusal, code, span.clone())
            .property(property, found)
            .expected(expected)
            .remedy(remedy);
        self.errors.push((finding, span));
    }

    /// Where a value stands and what it is.
    pub(super) fn at(&self, value: &Spanned<DeValue<'_>>) -> (Range<usize>, String) {
        let span = value.span();
        let text = self.content.get(span.clone()).unwrap_or_default();
        (span, show(text.trim()))
    }

    /// A number within `min` to `max`.
    pub(super) fn number(
        &mut self,
        key: &str,
        value: &Spanned<DeValue<'_>>,
        (min, max): (f64, f64),
        range: &str,
    ) -> Option<f64> {
        let parsed = match value.get_ref() {
            DeValue::Integer(i) if i.radix() == 10 => i.as_str().replace('_', "").parse::<f64>().ok(),
            DeValue::Float(f) => f.as_str().replace('_', "").parse::<f64>().ok(),
            DeValue::String(text) => text.trim().parse::<f64>().ok().filter(|x| x.is_finite()).inspect(|_| {
                let note = self
                    .finding(Severity::Note, "number_as_text", value.span())
                    .property(key, show(text))
                    .expected("a number without quotes")
                    .remedy("it was read as that number");
                self.notes.push(note);
            }),
            _ => None,
        };
        let remedy = "correct it, or delete the line to use the default";
        match parsed {
            Some(x) if (min..=max).contains(&x) => Some(x),
            Some(x) if !x.is_finite() => {
                self.refuse("not_finite", key, self.at(value), range, remedy);
                None
            }
            Some(_) => {
                self.refuse("value_out_of_range", key, self.at(value), range, remedy);
                None
            }
            None => {
                self.refuse("not_a_number", key, self.at(value), range, remedy);
                None
            }
        }
    }

    /// Text that is not empty.
    pub(super) fn text(&mut self, key: &str, value: &Spanned<DeValue<'_>>) -> Option<String> {
        match value.get_ref() {
            DeValue::String(text) if !text.trim().is_empty() => Some(text.trim().to_owned()),
            _ => {
                self.refuse(
                    "not_text",
                    key,
                    self.at(value),
                    "text in quotes",
                    "write it in quotes, or delete the line",
                );
                None
            }
        }
    }

    /// Text, or several in an array; one text may hold several separated by commas.
    pub(super) fn texts(&mut self, key: &str, value: &Spanned<DeValue<'_>>) -> Option<Vec<String>> {
        let list = match value.get_ref() {
            DeValue::Array(items) => items.iter().map(|item| self.text(key, item)).collect::<Option<Vec<_>>>()?,
            _ => vec![self.text(key, value)?],
        };
        let split = list.iter().flat_map(|t| t.split(',')).map(|t| t.trim().to_owned()).filter(|t| !t.is_empty());
        Some(split.collect())
    }

    pub(super) fn flag(&mut self, key: &str, value: &Spanned<DeValue<'_>>) -> Option<bool> {
        if let DeValue::Boolean(flag) = value.get_ref() {
            return Some(*flag);
        }
        self.refuse("not_a_switch", key, self.at(value), "true or false", "write true or false without quotes");
        None
    }

    pub(super) fn path(&mut self, key: &str, value: &Spanned<DeValue<'_>>) -> Option<PathBuf> {
        let text = self.text(key, value)?;
        Some(if text == "-" { PathBuf::from(text) } else { self.folder.join(text) })
    }

    /// A triangular distribution `[lower end, mode, upper end]`, each within the range of `bound`.
    pub(super) fn triangle(
        &mut self,
        key: &str,
        bound: &'static str,
        value: &Spanned<DeValue<'_>>,
    ) -> Option<Distribution> {
        let range = bounds::bound(bound).unwrap_or_else(|| panic!("the range table lacks {bound}"));
        if let DeValue::Array(corners) = value.get_ref()
            && corners.len() == 3
        {
            let corners =
                corners.iter().map(|c| self.number(key, c, (range.min, range.max), &range.range())).collect::<Vec<_>>();
            let [Some(low), Some(mode), Some(high)] = corners[..] else { return None };
            if low <= mode && mode <= high {
                return Some(Distribution::triangular(low, mode, high));
            }
        }
        let expected = format!("[lower end, mode, upper end] within {}", range.range());
        self.refuse("figure_unreadable", key, self.at(value), &expected, "write three numbers in rising order");
        None
    }

    /// The members of a table whose names are words of a set.
    pub(super) fn by_word<'t, 'i, T: Copy>(
        &mut self,
        key: &str,
        value: &'t Spanned<DeValue<'i>>,
        parse: fn(&str) -> Option<T>,
        all: &[T],
        word: fn(T) -> &'static str,
    ) -> Vec<(T, &'t Spanned<DeValue<'i>>)> {
        let words = all.iter().map(|w| word(*w)).collect::<Vec<_>>().join(", ");
        let DeValue::Table(table) = value.get_ref() else {
            let expected = format!("a table with any of {words}");
            self.refuse("figure_unreadable", key, self.at(value), &expected, "write a table, or delete the line");
            return Vec::new();
        };
        let mut members = Vec::new();
        for (name, value) in table {
            match parse(name.get_ref()) {
                Some(choice) => members.push((choice, value)),
                None => {
                    let at = (name.span(), "no known word".to_owned());
                    let label = format!("{key}.{}", show(name.get_ref()));
                    self.refuse("setting_unknown", &label, at, &words, "use one of these words");
                }
            }
        }
        members
    }
}

//! One value of one record: number, word, date or name, with its range and its one message.
//!
//! A recognised value that cannot be read, or lies outside its range in [`crate::bounds`], refuses the record: it is
//! never dropped in silence. `null` and empty text mean "not recorded". A number written as text is read, with a note.

use std::borrow::Cow;

use jiff::civil::Date;
use serde_json::value::RawValue;

use super::columns::Columns;
use crate::bounds;
use crate::diagnostic::{Diagnostic, Severity};

/// Text of the user's shortened to one printable line for a message.
pub(crate) fn show(text: &str) -> String {
    const LONGEST: usize = 60;
    let mut shown: String = text.chars().take(LONGEST).map(|c| if c.is_control() { ' ' } else { c }).collect();
    if text.chars().nth(LONGEST).is_some() {
        shown.push('…');
    }
    shown
}

/// A value as JSON means it.
pub(crate) enum Value<'a> {
    /// `null`, or text that is empty.
    Missing,
    /// A number, as written.
    Number(&'a str),
    /// Text, without surrounding space.
    Text(String),
    /// `true`, `false`, an array or an object, as written.
    Other(&'a str),
}

/// What a raw JSON value is.
pub(crate) fn value(raw: &RawValue) -> Value<'_> {
    let json = raw.get();
    match json.as_bytes().first() {
        Some(b'n') => Value::Missing,
        Some(b'"') => {
            let text: String = serde_json::from_str(json).unwrap_or_default();
            match text.trim() {
                "" => Value::Missing,
                text => Value::Text(text.to_owned()),
            }
        }
        Some(b'-' | b'0'..=b'9') => Value::Number(json),
        _ => Value::Other(json),
    }
}

/// The recognised values of one record, and what was found wrong with them.
pub(crate) struct Record<'a> {
    file: &'a str,
    kind: &'static str,
    line: u64,
    id: Option<String>,
    values: Vec<(&'static str, &'a RawValue)>,
    /// What refuses the record.
    pub(crate) refusals: Vec<Diagnostic>,
    /// What is only worth saying.
    pub(crate) remarks: Vec<Diagnostic>,
}

impl<'a> Record<'a> {
    /// Sorts out which of the properties are known.
    pub(crate) fn new(
        file: &'a str,
        kind: &'static str,
        line: u64,
        columns: &mut Columns,
        properties: &[(Cow<'a, str>, &'a RawValue)],
    ) -> Self {
        let mut record =
            Record { file, kind, line, id: None, values: Vec::new(), refusals: Vec::new(), remarks: Vec::new() };
        for (name, raw) in properties {
            let Some(known) = columns.canonical(file, line, name) else { continue };
            if record.values.iter().any(|(k, _)| *k == known) {
                record.refuse("duplicate_key", known, "given twice", "one column", "delete one of the two");
            } else {
                record.values.push((known, raw));
            }
        }
        record
    }

    /// Reads the record's own name from its column, else from the feature's id; refuses the record without one.
    pub(crate) fn identify(&mut self, column: &'static str, feature_id: Option<&RawValue>) -> Option<String> {
        let of_column = self.raw(column).map(|raw| (column, raw));
        for (name, raw) in of_column.into_iter().chain(feature_id.map(|raw| ("id", raw))) {
            match value(raw) {
                Value::Missing => {}
                Value::Text(text) => self.id = Some(text),
                Value::Number(number) => self.id = Some(number.to_owned()),
                Value::Other(json) => {
                    self.refuse("id_unreadable", name, &show(json), "text or a number", "give the record a plain name");
                    return None;
                }
            }
            if self.id.is_some() {
                return self.id.clone();
            }
        }
        let finding = self
            .finding(Severity::Refusal, "id_missing")
            .found(format!("there is no {column}"))
            .expected(format!("a {column} or a feature id"))
            .remedy("give the record a name of its own, so that results can be traced to it");
        self.refusals.push(finding);
        None
    }

    /// A finding about this record.
    pub(crate) fn finding(&self, severity: Severity, code: &'static str) -> Diagnostic {
        Diagnostic::new(severity, code, self.file).about(self.kind, self.id.as_deref()).at_line(Some(self.line))
    }

    /// Refuses the record for one property.
    pub(crate) fn refuse(&mut self, code: &'static str, property: &str, found: &str, expected: &str, remedy: &str) {
        let finding = self.finding(Severity::Refusal, code).property(property, found).expected(expected).remedy(remedy);
        self.refusals.push(finding);
    }

    /// Warns about one property.
    pub(crate) fn warn(&mut self, code: &'static str, property: &str, found: &str, expected: &str, remedy: &str) {
        let finding = self.finding(Severity::Warning, code).property(property, found).expected(expected).remedy(remedy);
        self.remarks.push(finding);
    }

    fn raw(&self, name: &str) -> Option<&'a RawValue> {
        self.values.iter().find(|(known, _)| *known == name).map(|(_, raw)| *raw)
    }

    /// Notes a repair of one property.
    pub(crate) fn note(&mut self, code: &'static str, property: &str, found: &str, expected: &str, remedy: &str) {
        let finding = self.finding(Severity::Note, code).property(property, found).expected(expected).remedy(remedy);
        self.remarks.push(finding);
    }

    /// A number in the unit of its name, within its range. `remedy` is what to do when it is not.
    pub(crate) fn number(&mut self, name: &'static str, remedy: &str) -> Option<f64> {
        self.raw(name)?;
        let range = bounds::bound(name).unwrap_or_else(|| panic!("the range table lacks {name}"));
        self.number_within(name, (range.min, range.max), &|| range.range(), remedy)
    }

    /// A coordinate column: any finite number, judged as a pair later.
    pub(crate) fn coordinate(&mut self, name: &'static str, remedy: &str) -> Option<f64> {
        self.number_within(name, (f64::MIN, f64::MAX), &|| "decimal degrees".to_owned(), remedy)
    }

    /// The plain number of a column, without findings.
    pub(crate) fn peek(&self, name: &str) -> Option<f64> {
        match value(self.raw(name)?) {
            Value::Number(number) => number.parse().ok().filter(|x: &f64| x.is_finite()),
            _ => None,
        }
    }

    fn number_within(
        &mut self,
        name: &'static str,
        (min, max): (f64, f64),
        expected: &dyn Fn() -> String,
        remedy: &str,
    ) -> Option<f64> {
        let raw = self.raw(name)?;
        // The ordinary case, without building any text.
        if let Value::Number(number) = value(raw)
            && let Some(x) = number.parse::<f64>().ok().filter(|x| (min..=max).contains(x))
        {
            // Negative zero is zero.
            return Some(x + 0.0);
        }
        let (number, found) = match value(raw) {
            Value::Missing => return None,
            Value::Number(number) => (number.parse::<f64>().ok(), number.to_owned()),
            Value::Text(text) => {
                let number = text.parse::<f64>().ok();
                if number.is_some_and(f64::is_finite) {
                    let note = self
                        .finding(Severity::Note, "number_as_text")
                        .property(name, format!("{:?}", show(&text)))
                        .expected("a number without quotes")
                        .remedy("it was read as that number");
                    self.remarks.push(note);
                }
                (number, format!("{:?}", show(&text)))
            }
            Value::Other(json) => (None, json.to_owned()),
        };
        let found = show(&found);
        match number {
            None => {
                self.refuse("not_a_number", name, &found, &expected(), &number_remedy(&found, remedy));
                None
            }
            Some(x) if !x.is_finite() => {
                self.refuse("not_finite", name, &found, &expected(), remedy);
                None
            }
            Some(x) if !(min..=max).contains(&x) => {
                self.refuse("value_out_of_range", name, &found, &expected(), remedy);
                None
            }
            Some(x) => Some(x + 0.0),
        }
    }

    /// One of a set of words.
    pub(crate) fn word<T: Copy + 'static>(
        &mut self,
        name: &'static str,
        parse: fn(&str) -> Option<T>,
        all: &[T],
        word: fn(T) -> &'static str,
    ) -> Option<T> {
        let found = match value(self.raw(name)?) {
            Value::Missing => return None,
            Value::Text(text) => match parse(&text) {
                Some(choice) => return Some(choice),
                None => format!("{:?}", show(&text)),
            },
            Value::Number(json) | Value::Other(json) => show(json),
        };
        let words: Vec<&str> = all.iter().map(|w| word(*w)).collect();
        let near = super::columns::nearest(&super::columns::fold(found.trim_matches('"')), words.iter().copied());
        let remedy = match near {
            Some(near) => format!("did you mean {near:?}? Correct it, or leave it empty when it was not recorded"),
            None => "use one of these words, or leave it empty when it was not recorded".to_owned(),
        };
        self.refuse("word_unknown", name, &found, &words.join(", "), &remedy);
        None
    }

    /// A calendar day, from an ISO 8601 date or date and time.
    pub(crate) fn date(&mut self, name: &'static str) -> Option<Date> {
        let found = match value(self.raw(name)?) {
            Value::Missing => return None,
            Value::Text(text) => match iso_day(&text) {
                Some(day) => return Some(day),
                None => format!("{:?}", show(&text)),
            },
            Value::Number(json) | Value::Other(json) => show(json),
        };
        let expected = "an ISO 8601 date such as 2026-08-14";
        self.refuse("date_unreadable", name, &found, expected, "write year-month-day, or leave it empty");
        None
    }

    /// Free text; a number counts as its digits.
    pub(crate) fn text(&mut self, name: &'static str) -> Option<String> {
        match value(self.raw(name)?) {
            Value::Missing => None,
            Value::Text(text) => Some(text),
            Value::Number(number) => Some(number.to_owned()),
            Value::Other(json) => {
                self.refuse("not_text", name, &show(json), "text", "write it as plain text");
                None
            }
        }
    }
}

/// The day of an ISO 8601 date, or of a date and time as the clock on the spot showed it.
pub(crate) fn iso_day(text: &str) -> Option<Date> {
    let day: Date = text.get(..10)?.parse().ok()?;
    let rest = &text[10..];
    let whole = rest.is_empty()
        || text.parse::<jiff::civil::DateTime>().is_ok()
        || (rest.starts_with(['T', 't', ' ']) && text.parse::<jiff::Timestamp>().is_ok());
    // A field party writes the present century or the one before.
    (whole && (1900..=2100).contains(&day.year())).then_some(day)
}

/// What to do about text that is no number.
fn number_remedy(found: &str, otherwise: &str) -> String {
    let text = found.trim_matches('"');
    let digits = text.starts_with(|c: char| c.is_ascii_digit() || matches!(c, '-' | '+' | '.'));
    if digits && text.contains(',') {
        "use a point for decimals and nothing for thousands".to_owned()
    } else if digits && text.trim_end_matches(|c: char| !c.is_ascii_digit()).parse::<f64>().is_ok() {
        "remove the unit; it is part of the column name".to_owned()
    } else {
        otherwise.to_owned()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn days_are_read_with_and_without_a_time() {
        let day = jiff::civil::date(2026, 8, 14);
        for text in ["2026-08-14", "2026-08-14T10:00:00", "2026-08-14T23:30:00-07:00", "2026-08-14 10:00:00Z"] {
            assert_eq!(iso_day(text), Some(day), "{text}");
        }
        for text in ["14.08.2026", "2026-02-30", "20260814", "2026-08-14x", "9999-01-01", "", "août 2026 ééééééé"]
        {
            assert_eq!(iso_day(text), None, "{text}");
        }
    }

    #[test]
    fn remedies_name_the_likely_cause() {
        assert!(number_remedy("\"1,2\"", "x").contains("point"));
        assert!(number_remedy("\"1.2 m\"", "x").contains("unit"));
        assert_eq!(number_remedy("\"big\"", "x"), "x");
    }
}

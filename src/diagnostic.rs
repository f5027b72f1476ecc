//! What the program tells people about their records: one finding, one sentence.
//!
//! A finding names where it was found, what stood there, what was expected and what to do. It never stops a run by
//! itself: the reader decides whether a feature is lost ([`Severity::Refusal`]), usable with a remark
//! ([`Severity::Note`], [`Severity::Warning`]), or whether the whole run is unusable (an `Err` of the reader).

use std::fmt;

/// How much a finding weighs.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Severity {
    /// Read with a small repair that changes nothing of substance, such as a number written as text.
    Note,
    /// Used, but the reader should know: the value is suspicious or its meaning was inferred.
    Warning,
    /// The feature cannot be used; it comes out as not assessed with this finding as its reason.
    Refusal,
}

impl Severity {
    /// The word used in files and messages.
    pub fn word(self) -> &'static str {
        match self {
            Severity::Note => "note",
            Severity::Warning => "warning",
            Severity::Refusal => "refused",
        }
    }
}

/// One finding about one file, feature or property.
#[derive(Debug, Clone, PartialEq)]
pub struct Diagnostic {
    /// How much it weighs.
    pub severity: Severity,
    /// A short stable code for machines, for example `value_out_of_range`; listed in `docs/inputs.md`.
    pub code: &'static str,
    /// The file as the user named it, or `standard input`.
    pub file: String,
    /// The kind of record, `boulder`, `burn`, `trail`, `raster`, `setting` or empty for the file as a whole.
    pub record: &'static str,
    /// The record's own name, when it has one.
    pub id: Option<String>,
    /// Line in the file (from 1), when known.
    pub line: Option<u64>,
    /// The property or column, when the finding is about one.
    pub property: Option<String>,
    /// What stood there, already shortened and made printable.
    pub found: Option<String>,
    /// What was expected, with unit or allowed range.
    pub expected: Option<String>,
    /// What the user can do about it.
    pub remedy: Option<String>,
}

impl Diagnostic {
    /// A finding about a file; the builder methods below narrow it down.
    pub fn new(severity: Severity, code: &'static str, file: impl Into<String>) -> Self {
        Diagnostic {
            severity,
            code,
            file: file.into(),
            record: "",
            id: None,
            line: None,
            property: None,
            found: None,
            expected: None,
            remedy: None,
        }
    }

    /// Names the record the finding is about.
    pub fn about(mut self, record: &'static str, id: Option<&str>) -> Self {
        self.record = record;
        self.id = id.map(str::to_owned);
        self
    }

    /// Adds the line of the file.
    pub fn at_line(mut self, line: Option<u64>) -> Self {
        self.line = line;
        self
    }

    /// Names the property and what stood in it.
    pub fn property(mut self, name: &str, found: impl Into<String>) -> Self {
        self.property = Some(name.to_owned());
        self.found = Some(found.into());
        self
    }

    /// Says what stood there, for findings that are not about one property.
    pub fn found(mut self, found: impl Into<String>) -> Self {
        self.found = Some(found.into());
        self
    }

    /// Says what was expected.
    pub fn expected(mut self, expected: impl Into<String>) -> Self {
        self.expected = Some(expected.into());
        self
    }

    /// Says what to do.
    pub fn remedy(mut self, remedy: impl Into<String>) -> Self {
        self.remedy = Some(remedy.into());
        self
    }

    /// The finding without its file and record: the text that a feature carries as its reason.
    ///
    /// ```
    /// use spallcast::diagnostic::{Diagnostic, Severity};
    /// let d = Diagnostic::new(Severity::Refusal, "value_out_of_range", "boulders.geojson")
    ///     .about("boulder", Some("A-17"))
    ///     .property("diameter_m", "-1")
    ///     .expected("0.05 to 50")
    ///     .remedy("measure it again or remove the record");
    /// assert_eq!(d.sentence(), "diameter_m is -1, expected 0.05 to 50; measure it again or remove the record");
    /// assert_eq!(d.to_string(), format!("boulders.geojson: boulder \"A-17\": {}", d.sentence()));
    /// ```
    pub fn sentence(&self) -> String {
        let mut text = String::new();
        match (&self.property, &self.found) {
            (Some(property), Some(found)) => text.push_str(&format!("{property} is {found}")),
            (Some(property), None) => text.push_str(property),
            (None, Some(found)) => text.push_str(found),
            (None, None) => text.push_str(self.code),
        }
        if let Some(expected) = &self.expected {
            text.push_str(&format!(", expected {expected}"));
        }
        if let Some(remedy) = &self.remedy {
            text.push_str(&format!("; {remedy}"));
        }
        text
    }
}

impl fmt::Display for Diagnostic {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}", self.file)?;
        if let Some(line) = self.line {
            write!(f, ":{line}")?;
        }
        write!(f, ": ")?;
        match (self.record, &self.id) {
            ("", _) => {}
            (record, Some(id)) => write!(f, "{record} {id:?}: ")?,
            (record, None) => write!(f, "{record}: ")?,
        }
        f.write_str(&self.sentence())
    }
}

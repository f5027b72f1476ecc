//! Input: text to checked records. GeoJSON, CSV and the settings file; findings instead of silence.
//!
//! ```text
//! text        bytes to text: hash, byte-order mark, Windows-1252, line numbers
//! geojson     text to features, one at a time      csv   text to rows, one at a time
//! columns     which names are known, which look misspelt
//! values      one value: number, word, date; its range and its message
//! geometry    positions, rings, footprints, the antimeridian
//! boulders, burns, trails   features and rows to domain types
//! terrain     a GeoTIFF to an elevation raster
//! settings    the TOML file to the run's settings and options
//! ```
//!
//! One wrong feature never stops a run: it comes out with a refusal. A file that cannot be used at all is an
//! [`InputError`]. `docs/inputs.md` lists columns, ranges and decisions.

mod boulder_record;
pub mod boulders;
pub mod burns;
pub mod column_notes;
mod columns;
mod csv;
mod geojson;
mod geojson_errors;
mod geometry;
mod properties;
pub mod series;
mod setting_names;
pub mod setting_notes;
mod setting_values;
pub mod settings;
pub mod terrain;
mod terrain_lzw;
mod text;
pub mod trails;
mod user_rocks;
mod values;

use std::fmt;
use std::fs::File;
use std::io;
use std::path::Path;

use crate::diagnostic::{Diagnostic, Severity};

pub use boulders::{BoulderFeature, Duplicates, read_boulders, read_boulders_from, refuse_duplicates};
pub use burns::read_burns;
pub use properties::Properties;
pub use series::read_series;
pub use settings::{RunFile, read_settings};
pub use trails::read_trails;

use text::{Text, TextProblem};

/// How standard input is named in messages.
pub const STANDARD_INPUT: &str = "standard input";

/// One input as the run record names it.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct InputFile {
    /// The file as the user named it, or [`STANDARD_INPUT`].
    pub name: String,
    /// Its length, bytes.
    pub bytes: u64,
    /// SHA-256 of its bytes, lower-case hexadecimal.
    pub sha256: String,
}

/// Why a file cannot be used at all: the run is unusable and nothing is written.
#[derive(Debug, Clone, PartialEq)]
pub struct InputError {
    /// The cause: where, what was found, what was expected, what to do.
    pub finding: Box<Diagnostic>,
    /// Further findings of the same weight, such as each wrong ring of a burn file.
    pub others: Vec<Diagnostic>,
    /// The text around it, for files that are small enough to quote.
    excerpt: Option<Box<Excerpt>>,
}

/// The piece of a file that an error points at.
#[derive(Debug, Clone, PartialEq)]
struct Excerpt {
    text: String,
    span: std::ops::Range<usize>,
}

impl InputError {
    fn new(finding: Diagnostic) -> Self {
        InputError { finding: Box::new(finding), others: Vec::new(), excerpt: None }
    }

    fn quoting(mut self, text: &str, span: Option<std::ops::Range<usize>>) -> Self {
        self.excerpt = span
            .filter(|s| s.start <= s.end && s.end <= text.len())
            .map(|span| Box::new(Excerpt { text: text.to_owned(), span }));
        self
    }

    /// Every finding, the cause first.
    pub fn findings(&self) -> impl Iterator<Item = &Diagnostic> {
        std::iter::once(&*self.finding).chain(&self.others)
    }
}

impl fmt::Display for InputError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        self.finding.fmt(f)?;
        match self.others.len() {
            0 => Ok(()),
            n => write!(f, " (and {n} more of this kind)"),
        }
    }
}

impl std::error::Error for InputError {}

impl miette::Diagnostic for InputError {
    fn code<'a>(&'a self) -> Option<Box<dyn fmt::Display + 'a>> {
        Some(Box::new(self.finding.code))
    }
    fn source_code(&self) -> Option<&dyn miette::SourceCode> {
        self.excerpt.as_ref().map(|e| &e.text as &dyn miette::SourceCode)
    }
    fn labels(&self) -> Option<Box<dyn Iterator<Item = miette::LabeledSpan> + '_>> {
        let excerpt = self.excerpt.as_ref()?;
        Some(Box::new(std::iter::once(miette::LabeledSpan::new_with_span(
            Some("here".to_owned()),
            miette::SourceSpan::from(excerpt.span.clone()),
        ))))
    }
}

/// Findings grouped for people: of each code the first few and how many there were, in order of first sight.
///
/// ```
/// use spallcast::diagnostic::{Diagnostic, Severity};
/// use spallcast::input::Digest;
/// let mut digest = Digest::new(2);
/// for _ in 0..5 {
///     digest.add(Diagnostic::new(Severity::Note, "number_as_text", "b.csv"));
/// }
/// let group = &digest.groups()[0];
/// assert_eq!((group.code, group.count, group.first.len()), ("number_as_text", 5, 2));
/// ```
#[derive(Debug, Clone)]
pub struct Digest {
    keep: usize,
    groups: Vec<DigestGroup>,
}

/// Findings of one code and severity.
#[derive(Debug, Clone)]
pub struct DigestGroup {
    /// Their code.
    pub code: &'static str,
    /// Their weight.
    pub severity: Severity,
    /// How many there were.
    pub count: u64,
    /// The first of them.
    pub first: Vec<Diagnostic>,
}

impl Digest {
    /// Keeps the first `keep` findings of each code.
    pub fn new(keep: usize) -> Self {
        Digest { keep, groups: Vec::new() }
    }

    /// Counts one finding.
    pub fn add(&mut self, finding: Diagnostic) {
        let keep = self.keep;
        let group = self.group(&finding);
        group.count += 1;
        if group.first.len() < keep {
            group.first.push(finding);
        }
    }

    /// Counts one finding without keeping it; how many of its kind there have been.
    pub fn count(&mut self, finding: &Diagnostic) -> u64 {
        let group = self.group(finding);
        group.count += 1;
        group.count
    }

    fn group(&mut self, finding: &Diagnostic) -> &mut DigestGroup {
        let known = self.groups.iter().position(|g| g.code == finding.code && g.severity == finding.severity);
        let at = known.unwrap_or_else(|| {
            self.groups.push(DigestGroup {
                code: finding.code,
                severity: finding.severity,
                count: 0,
                first: Vec::new(),
            });
            self.groups.len() - 1
        });
        &mut self.groups[at]
    }

    /// The groups in order of first sight.
    pub fn groups(&self) -> &[DigestGroup] {
        &self.groups
    }

    /// Whether nothing was found.
    pub fn is_empty(&self) -> bool {
        self.groups.is_empty()
    }
}

/// Opens a file for reading, with its name as the user gave it.
fn open(path: &Path) -> Result<(Text, String), InputError> {
    let name = path.display().to_string();
    let refuse = |code, found: String, remedy: &str| {
        InputError::new(
            Diagnostic::new(Severity::Refusal, code, name.clone())
                .found(found)
                .expected("a readable file")
                .remedy(remedy),
        )
    };
    match std::fs::metadata(path) {
        Ok(m) if m.is_dir() => Err(refuse("file_unreadable", "this is a directory".into(), "name the file inside it")),
        Ok(_) => match File::open(path) {
            Ok(file) => Ok((Text::new(file), name)),
            Err(e) => Err(refuse("file_unreadable", format!("cannot be opened: {e}"), "check who may read it")),
        },
        Err(e) if e.kind() == io::ErrorKind::NotFound => {
            Err(refuse("file_missing", "there is no such file".into(), "check the name and the folder"))
        }
        Err(e) => {
            Err(refuse("file_unreadable", format!("cannot be opened: {e}"), "check the name and who may read it"))
        }
    }
}

/// A reading error as the message the user needs.
fn reading_error(name: &str, error: &io::Error) -> InputError {
    let finding = |code| Diagnostic::new(Severity::Refusal, code, name);
    let problem = error.get_ref().and_then(|e| e.downcast_ref::<TextProblem>());
    InputError::new(match problem {
        Some(p @ TextProblem::NotText { .. }) => finding("not_text")
            .found(format!("this is {p}"))
            .expected("GeoJSON, CSV or TOML as UTF-8 text")
            .remedy("export the layer as GeoJSON (WGS 84) or save the sheet as CSV in UTF-8"),
        Some(p @ TextProblem::Nul { line }) => finding("not_text")
            .at_line(Some(*line))
            .found(format!("there is {p}"))
            .expected("text in UTF-8")
            .remedy("export the file again; this one is damaged or not text"),
        Some(p @ TextProblem::TooLong { line }) => finding("record_too_long")
            .at_line(Some(*line))
            .found(format!("there is {p}"))
            .expected("features and rows of ordinary size")
            .remedy("look for a missing closing quote or bracket, or split the feature"),
        None => finding("file_unreadable")
            .found(format!("reading failed: {error}"))
            .expected("a readable file")
            .remedy("check the disk or the pipe and run again"),
    })
}

/// The finding about bytes that were not UTF-8.
fn foreign_bytes(name: &str, text: &Text) -> Option<Diagnostic> {
    text.foreign_line().map(|line| {
        Diagnostic::new(Severity::Warning, "not_utf8", name)
            .at_line(Some(line))
            .found("some bytes are not UTF-8 and were read as Windows-1252 (Latin-1)")
            .expected("UTF-8")
            .remedy("check names with accents, or save the file as UTF-8")
    })
}

/// The finding about a file with no record in it.
fn nothing_inside(name: &str, what: &str) -> Diagnostic {
    Diagnostic::new(Severity::Warning, "empty_collection", name)
        .found("the file holds no record")
        .expected(format!("at least one {what}"))
        .remedy("check the export if that is not what you meant")
}

/// Length and SHA-256 of a file that is not text.
///
/// # Errors
/// When it cannot be read.
pub fn hashed(path: &Path) -> Result<InputFile, InputError> {
    use sha2::{Digest as _, Sha256};
    let name = path.display().to_string();
    let mut hasher = Sha256::new();
    let copied = File::open(path).and_then(|mut file| io::copy(&mut file, &mut hasher));
    let bytes = copied.map_err(|e| reading_error(&name, &e))?;
    let sha256 = hasher.finalize().iter().map(|b| format!("{b:02x}")).collect();
    Ok(InputFile { name, bytes, sha256 })
}

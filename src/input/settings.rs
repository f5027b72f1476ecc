//! The settings file (TOML): every option of the command line and every setting of the model.
//!
//! Names are flat (`draws = 1024`, `segment_m = 25`); a setting may also stand in the table of its subject (`[spall]`,
//! `[rockfall]`, `[trail]`). `[unknown_rock]` gives the mixture for an unknown rock, `[rocks.NAME]` a rock of the user's
//! own. Paths are relative to the folder of the settings file, so that a file and its layers can be moved together.
//! A name that is not known is an error with the nearest known one: a setting never fails in silence. Every error is
//! collected and shown with its line.

use std::io::Read;
use std::ops::Range;
use std::path::{Path, PathBuf};

use toml::Spanned;
use toml::de::{DeTable, DeValue};

use super::columns::{fold, nearest};
use super::setting_names::{NUMERIC, Numeric, OTHER, SUBJECTS, TRIANGULAR, Triangular};
use super::setting_values::{Reader, line_of};
use super::values::{iso_day, show};
use super::{InputError, InputFile, foreign_bytes, open, reading_error, user_rocks};
use crate::bounds;
use crate::diagnostic::{Diagnostic, Severity};
use crate::rock::{Catalogue, Resolution};
use crate::settings::{RockfallSettings, Settings};
use crate::site::{Contact, Support};

/// Longest settings file, bytes; a thousand rocks of the user's own stay below it.
const LONGEST: u64 = 4 * 1024 * 1024;

/// What a settings file said. An option is `None` where the file is silent; settings hold their defaults there.
#[derive(Debug, Clone)]
pub struct RunFile {
    /// `burn`: the burn file.
    pub burn: Option<PathBuf>,
    /// `boulders`: the boulder file, or `-` for standard input.
    pub boulders: Option<PathBuf>,
    /// `trails`: the trail file.
    pub trails: Option<PathBuf>,
    /// `terrain`: the elevation raster.
    pub terrain: Option<PathBuf>,
    /// `out`: the folder of the results, or `-` for standard output.
    pub out: Option<PathBuf>,
    /// `threads`.
    pub threads: Option<usize>,
    /// `format`: the formats asked for.
    pub format: Option<Vec<String>>,
    /// `strict`.
    pub strict: Option<bool>,
    /// `quiet`.
    pub quiet: Option<bool>,
    /// `json_log`.
    pub json_log: Option<bool>,
    /// The settings of the model, defaults where the file is silent.
    pub settings: Settings,
    /// The catalogue with the file's own rocks.
    pub catalogue: Catalogue,
    /// Notes and warnings.
    pub findings: Vec<Diagnostic>,
    /// The file as the run record names it.
    pub file: InputFile,
}

/// Reads a settings file.
///
/// # Errors
/// When the file cannot be read, is not TOML, names an unknown setting, or holds a value out of range. All such errors
/// of the file are in the one that is returned.
pub fn read_settings(path: &Path) -> Result<RunFile, InputError> {
    let (text, name) = open(path)?;
    let mut content = String::new();
    text.clone().take(LONGEST + 1).read_to_string(&mut content).map_err(|e| reading_error(&name, &e))?;
    let file = text.finish(&name).map_err(|e| reading_error(&name, &e))?;
    let folder = path.parent().unwrap_or(Path::new(""));
    if content.len() as u64 > LONGEST {
        return Err(InputError::new(
            Diagnostic::new(Severity::Refusal, "file_too_long", name)
                .found(format!("the settings file has {} bytes", file.bytes))
                .expected(format!("at most {LONGEST}"))
                .remedy("check that this is the settings file"),
        ));
    }
    let mut run = parse_settings(&content, &name, folder, file)?;
    run.findings.extend(foreign_bytes(&name, &text));
    Ok(run)
}

fn parse_settings(content: &str, name: &str, folder: &Path, file: InputFile) -> Result<RunFile, InputError> {
    let table = DeTable::parse(content).map_err(|e| {
        let line = e.span().map(|s| line_of(content, s.start));
        let finding = Diagnostic::new(Severity::Refusal, "not_toml", name)
            .at_line(line)
            .found(format!("not TOML: {}", show(e.message())))
            .expected("lines such as: draws = 512")
            .remedy("put text in quotes, numbers without, and each name once");
        InputError::new(finding).quoting(content, e.span())
    })?;
    let mut run = RunFile {
        burn: None,
        boulders: None,
        trails: None,
        terrain: None,
        out: None,
        threads: None,
        format: None,
        strict: None,
        quiet: None,
        json_log: None,
        settings: Settings::default(),
        catalogue: Catalogue::embedded(),
        findings: Vec::new(),
        file,
    };
    let mut reader = Reader { name, content, folder, errors: Vec::new(), notes: Vec::new(), given: Vec::new() };
    let mut mixture = None;
    for (key, value) in table.get_ref() {
        let word = fold(key.get_ref());
        match (word.as_str(), value.get_ref()) {
            (subject, DeValue::Table(inner)) if SUBJECTS.contains(&subject) => {
                for (key, value) in inner {
                    reader.setting(&mut run, subject, key, value);
                }
            }
            ("unknown_rock", DeValue::Table(inner)) => mixture = Some(reader.mixture(inner, key.span())),
            ("rocks", DeValue::Table(inner)) => {
                for (rock, value) in inner {
                    if let Some(rock) = user_rocks::read(&mut reader, rock, value) {
                        run.settings.rocks.push(rock);
                    }
                }
            }
            _ => reader.setting(&mut run, "", key, value),
        }
    }
    if reader.errors.is_empty() {
        match Catalogue::embedded().with_user_rocks(&run.settings.rocks) {
            Ok(catalogue) => run.catalogue = catalogue,
            Err(e) => {
                let finding = reader
                    .finding(Severity::Refusal, "rock_unusable", 0..0)
                    .at_line(None)
                    .property("rocks", "not usable")
                    .expected("rocks that the catalogue can take up")
                    .remedy(e.to_string());
                reader.errors.push((finding, 0..0));
            }
        }
        if let Some(mixture) = mixture {
            run.settings.unknown_rock = reader.resolve_mixture(&run.catalogue, mixture);
        }
        reader.check_together(&run.settings);
    }
    run.findings = reader.notes;
    reader.errors.sort_by_key(|(_, span)| span.start);
    let mut errors = reader.errors.into_iter();
    match errors.next() {
        None => Ok(run),
        Some((first, span)) => {
            let mut error = InputError::new(first).quoting(content, (span.end > 0).then_some(span));
            error.others = errors.map(|(finding, _)| finding).collect();
            Err(error)
        }
    }
}

/// The mixture as written: names, weights and where they stand.
struct Mixture {
    weights: Vec<(String, f64, Range<usize>)>,
    span: Range<usize>,
}

impl Reader<'_> {
    /// Reads one setting, given flat or in the table of `subject`.
    fn setting(
        &mut self,
        run: &mut RunFile,
        subject: &str,
        key: &Spanned<std::borrow::Cow<'_, str>>,
        value: &Spanned<DeValue<'_>>,
    ) {
        let word = fold(key.get_ref());
        let word = word.as_str();
        if self.given.iter().any(|g| g == word) {
            let at = (key.span(), "given twice".to_owned());
            return self.refuse("duplicate_key", word, at, "each setting once", "delete one of the two");
        }
        self.given.push(word.to_owned());
        if let Some(Numeric(name, _, whole, set)) =
            NUMERIC.iter().find(|n| n.0 == word && (subject.is_empty() || subject == n.1))
        {
            let bound = bounds::bound(name).unwrap_or_else(|| panic!("the range table lacks {name}"));
            let range = if *whole { format!("a whole number, {}", bound.range()) } else { bound.range() };
            if let Some(x) = self.number(name, value, (bound.min, bound.max), &range) {
                if *whole && x.fract() != 0.0 {
                    let remedy = "write it without decimals";
                    return self.refuse("not_whole", name, self.at(value), &range, remedy);
                }
                set(run, x);
            }
            return;
        }
        if matches!(subject, "" | "rockfall") {
            let rockfall = &mut run.settings.rockfall;
            if let Some(Triangular(name, set)) = TRIANGULAR.iter().find(|t| t.0 == word) {
                if let Some(triangle) = self.triangle(name, name, value) {
                    set(rockfall, triangle);
                }
                return;
            }
            match word {
                "friction_deg" => return self.friction(rockfall, value),
                "support_loss" => return self.support_loss(rockfall, value),
                _ => {}
            }
        }
        match (subject, word) {
            ("", "burn") => run.burn = self.path(word, value),
            ("", "boulders") => run.boulders = self.path(word, value),
            ("", "trails") => run.trails = self.path(word, value),
            ("", "terrain") => run.terrain = self.path(word, value),
            ("", "out") => run.out = self.path(word, value),
            ("", "strict") => run.strict = self.flag(word, value),
            ("", "quiet") => run.quiet = self.flag(word, value),
            ("", "json_log") => run.json_log = self.flag(word, value),
            ("", "format") => run.format = self.texts(word, value),
            ("", "seed") => match value.get_ref() {
                DeValue::Integer(i) if u64::from_str_radix(&i.as_str().replace('_', ""), i.radix()).is_ok() => {
                    run.settings.seed =
                        u64::from_str_radix(&i.as_str().replace('_', ""), i.radix()).expect("just read");
                }
                _ => self.refuse("not_whole", word, self.at(value), "a whole number, 0 or more", "write digits only"),
            },
            ("" | "trail", "as_of") => {
                let text = match value.get_ref() {
                    DeValue::Datetime(day) => day.to_string(),
                    DeValue::String(text) => text.trim().to_string(),
                    _ => String::new(),
                };
                match iso_day(&text) {
                    Some(day) => run.settings.trail.as_of = Some(day),
                    None => self.refuse(
                        "date_unreadable",
                        word,
                        self.at(value),
                        "an ISO 8601 date such as 2026-08-14",
                        "write year-month-day",
                    ),
                }
            }
            _ => {
                let known = NUMERIC.iter().map(|n| n.0).chain(OTHER).chain(SUBJECTS);
                let shown =
                    if subject.is_empty() { key.get_ref().to_string() } else { format!("{subject}.{}", key.get_ref()) };
                let remedy = match nearest(word, known.clone()) {
                    _ if known.clone().any(|k| k == word) => {
                        format!("{word:?} does not belong there; write it at the top, before the first table")
                    }
                    Some(near) => format!("did you mean {near:?}?"),
                    None => "delete the line, or see docs/inputs.md for the names".to_owned(),
                };
                let at = (key.span(), "no known setting".to_owned());
                self.refuse("setting_unknown", &show(&shown), at, "a setting of docs/inputs.md", &remedy);
            }
        }
    }

    /// Friction by contact: `{ burnt_duff = [20, 27, 34] }`.
    fn friction(&mut self, rockfall: &mut RockfallSettings, value: &Spanned<DeValue<'_>>) {
        for (contact, value) in self.by_word("friction_deg", value, Contact::parse, Contact::ALL, Contact::word) {
            if let Some(triangle) = self.triangle(&format!("friction_deg.{}", contact.word()), "friction_deg", value) {
                rockfall.friction_deg[contact as usize] = triangle;
            }
        }
    }

    /// Chance of losing a support by its state: `{ charred = 0.5 }`.
    fn support_loss(&mut self, rockfall: &mut RockfallSettings, value: &Spanned<DeValue<'_>>) {
        for (support, value) in self.by_word("support_loss", value, Support::parse, Support::ALL, Support::word) {
            let label = format!("support_loss.{}", support.word());
            if let Some(chance) = self.number(&label, value, (0.0, 1.0), "0 to 1") {
                rockfall.support_loss[support as usize] = chance;
            }
        }
    }

    /// Weights of the mixture as written, with the spans of their names.
    fn mixture(&mut self, table: &DeTable<'_>, span: Range<usize>) -> Mixture {
        let mut weights = Vec::new();
        for (rock, value) in table {
            let key = format!("unknown_rock.{}", rock.get_ref());
            if let Some(weight) = self.number(&show(&key), value, (0.0, 1e9), "a weight, 0 or more")
                && weight > 0.0
            {
                weights.push((rock.get_ref().to_string(), weight, rock.span()));
            }
        }
        Mixture { weights, span }
    }

    /// Weights that sum to 1, by catalogue key.
    fn resolve_mixture(&mut self, catalogue: &Catalogue, Mixture { weights, span }: Mixture) -> Vec<(String, f64)> {
        let total: f64 = weights.iter().map(|w| w.1).sum();
        if weights.is_empty() {
            let at = (span, "without a rock".to_owned());
            self.refuse(
                "mixture_empty",
                "unknown_rock",
                at,
                "at least one rock and its weight",
                "add one, or delete the table",
            );
            return Vec::new();
        }
        if (total - 1.0).abs() > 1e-9 {
            let note = self
                .finding(Severity::Note, "weights_scaled", span)
                .property("unknown_rock", format!("weights of sum {total}"))
                .expected("a sum of 1")
                .remedy("they were scaled to it");
            self.notes.push(note);
        }
        let mut mixture: Vec<(String, f64)> = Vec::new();
        for (rock, weight, span) in weights {
            match catalogue.resolve(&rock) {
                Resolution::Rock(key) => match mixture.iter_mut().find(|m| m.0 == key) {
                    Some(known) => known.1 += weight / total,
                    None => mixture.push((key, weight / total)),
                },
                Resolution::Unknown | Resolution::NotFound { .. } => {
                    let at = (span, format!("{:?}", show(&rock)));
                    let remedy = "use a name that the command `rocks` lists, or add the rock under [rocks]";
                    self.refuse("rock_unknown", "unknown_rock", at, "a rock of the catalogue", remedy);
                }
            }
        }
        // The order of the file must not matter to the draws.
        mixture.sort_by(|a, b| a.0.cmp(&b.0));
        mixture
    }

    /// What only makes sense together.
    fn check_together(&mut self, settings: &Settings) {
        let t = &settings.trail;
        if !(t.keep_closed_at > t.look_first_at && t.look_first_at > t.warn_at) {
            let at = (0..0, format!("{:e}, {:e}, {:e}", t.keep_closed_at, t.look_first_at, t.warn_at));
            let names = "keep_closed_at, look_first_at, warn_at";
            self.refuse("limits_out_of_order", names, at, "falling values", "give the three limits from high to low");
        }
    }
}

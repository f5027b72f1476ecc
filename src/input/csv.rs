//! Text to table rows, one at a time: RFC 4180 with the habits of spreadsheets.
//!
//! Comma, semicolon and tab are told apart by the header. A row with too few or too many cells is one wrong record, not
//! the end of the file. Cells become JSON values for the layer: plain finite numbers as numbers, empty as null, the rest
//! as text.

use std::ops::ControlFlow;

use super::columns::fold;
use super::text::Text;
use super::values::show;
use super::{InputError, reading_error};
use crate::diagnostic::{Diagnostic, Severity};

/// Longest digits that a 64-bit float carries without loss; longer ones stay text.
const DIGITS_MAX: usize = 15;

/// One row: name and cell, in the order of the header.
pub(crate) struct Row {
    /// Its place among the rows, from 0.
    pub(crate) index: usize,
    /// Its first line, from 1.
    pub(crate) line: u64,
    /// Names and JSON values.
    pub(crate) cells: Vec<(String, String)>,
    /// Why the row cannot be used, when its cells do not match the header: what was found and what to do.
    pub(crate) ragged: Option<(String, &'static str)>,
}

/// What the table was like.
pub(crate) struct Table {
    /// Rows handed on.
    pub(crate) rows: usize,
    /// Findings about the table as a whole.
    pub(crate) findings: Vec<Diagnostic>,
}

/// Reads every row; `needed` are columns without which the table is unusable, `known` those that must not occur twice.
pub(crate) fn read_rows(
    text: &Text,
    name: &str,
    needed: &[&str],
    known: &[&str],
    each: &mut dyn FnMut(Row) -> ControlFlow<()>,
) -> Result<Table, InputError> {
    let unusable = |code| Diagnostic::new(Severity::Refusal, code, name);
    let mut findings = Vec::new();
    let head = text.head().map_err(|e| reading_error(name, &e))?;
    let delimiter = delimiter(&String::from_utf8_lossy(&head), needed);
    text.start_record();
    let mut reader = ::csv::ReaderBuilder::new().flexible(true).delimiter(delimiter).from_reader(text.clone());
    let header = reader.headers().map_err(|e| csv_error(name, e))?.clone();
    if header.iter().all(|h| h.trim().is_empty()) {
        return Err(InputError::new(
            unusable("file_empty")
                .found("the file has no header row")
                .expected(format!("a header with {}", needed.join(", ")))
                .remedy("save the sheet as CSV with column names in the first row"),
        ));
    }
    let mut names: Vec<String> = Vec::new();
    for (at, cell) in header.iter().enumerate() {
        let cell = cell.trim();
        let mut column = if cell.is_empty() { format!("column_{}", at + 1) } else { cell.to_owned() };
        if names.iter().any(|n| fold(n) == fold(&column)) {
            if known.contains(&fold(&column).as_str()) {
                return Err(InputError::new(
                    unusable("duplicate_column")
                        .at_line(Some(1))
                        .found(format!("the column {:?} occurs twice", show(&column)))
                        .expected("each column once")
                        .remedy("delete or rename one of the two"),
                ));
            }
            let base = column.clone();
            let mut n = 2;
            while names.iter().any(|known| fold(known) == fold(&column)) {
                column = format!("{base}_{n}");
                n += 1;
            }
            findings.push(
                Diagnostic::new(Severity::Note, "column_renamed", name)
                    .at_line(Some(1))
                    .found(format!("the column {:?} occurs twice", show(&base)))
                    .expected("each column once")
                    .remedy(format!("the later one was kept as {:?}", show(&column))),
            );
        }
        names.push(column);
    }
    let missing: Vec<&str> = needed.iter().copied().filter(|n| !names.iter().any(|h| fold(h) == *n)).collect();
    if !missing.is_empty() {
        let header = show(&names.join(", "));
        return Err(InputError::new(
            unusable("column_missing")
                .at_line(Some(1))
                .found(format!("no column {} among: {header}", missing.join(", ")))
                .expected(format!("columns {} (degrees, WGS 84)", needed.join(", ")))
                .remedy("name the columns so in the first row; lon, lat, x, y or projected metres are not guessed"),
        ));
    }
    if delimiter != b',' {
        let word = if delimiter == b';' { "semicolons" } else { "tabs" };
        findings.push(
            Diagnostic::new(Severity::Note, "other_delimiter", name)
                .at_line(Some(1))
                .found(format!("cells are separated by {word}"))
                .expected("commas")
                .remedy("read as such; numbers still need a decimal point"),
        );
    }
    let (mut rows, mut blank) = (0, 0_u64);
    let mut record = ::csv::StringRecord::new();
    loop {
        text.start_record();
        if !reader.read_record(&mut record).map_err(|e| csv_error(name, e))? {
            break;
        }
        if record.iter().all(|c| c.trim().is_empty()) {
            blank += 1;
            continue;
        }
        let line = record.position().map_or(0, ::csv::Position::line);
        let row = Row { index: rows, line, cells: cells(&names, &record), ragged: ragged(&names, &record) };
        rows += 1;
        if each(row).is_break() {
            break;
        }
    }
    if blank > 0 {
        findings.push(
            Diagnostic::new(Severity::Note, "blank_rows", name)
                .found(format!("{blank} rows hold no value"))
                .expected("one record a row")
                .remedy("they were passed over"),
        );
    }
    Ok(Table { rows, findings })
}

/// The delimiter that makes the needed columns appear in the header; a comma otherwise.
fn delimiter(head: &str, needed: &[&str]) -> u8 {
    let first = head.lines().find(|l| !l.trim().is_empty()).unwrap_or_default();
    let found =
        |d: char| first.split(d).filter(|c| needed.contains(&fold(c.trim().trim_matches('"')).as_str())).count();
    let count = |d: char| first.matches(d).count();
    let best = [',', ';', '\t'].into_iter().rev().max_by_key(|&d| (found(d), count(d))).unwrap_or(',');
    best as u8
}

fn ragged(names: &[String], record: &::csv::StringRecord) -> Option<(String, &'static str)> {
    let surplus = record.iter().skip(names.len()).any(|c| !c.trim().is_empty());
    (record.len() < names.len() || surplus).then(|| {
        let newline = record.iter().any(|c| c.contains('\n'));
        let remedy = if newline {
            "look for a missing closing quote in this row"
        } else {
            "check the row for a missing or unquoted comma"
        };
        (format!("the row has {} cells", record.len()), remedy)
    })
}

fn cells(names: &[String], record: &::csv::StringRecord) -> Vec<(String, String)> {
    names.iter().enumerate().map(|(at, n)| (n.clone(), cell_json(record.get(at).unwrap_or("")))).collect()
}

/// A cell as JSON: null, a number exactly as written, or text.
fn cell_json(cell: &str) -> String {
    let plain = cell.trim();
    if plain.is_empty() {
        "null".to_owned()
    } else if is_plain_number(plain) {
        plain.to_owned()
    } else {
        serde_json::to_string(cell).expect("a string is always JSON")
    }
}

/// Digits with an optional sign and point, as JSON allows them, short enough to survive as a float.
fn is_plain_number(text: &str) -> bool {
    let digits = text.strip_prefix('-').unwrap_or(text);
    let (whole, part) = digits.split_once('.').map_or((digits, None), |(w, p)| (w, Some(p)));
    let all_digits = |s: &str| !s.is_empty() && s.bytes().all(|b| b.is_ascii_digit());
    all_digits(whole)
        && part.is_none_or(all_digits)
        && (whole == "0" || !whole.starts_with('0'))
        && whole.len() + part.map_or(0, str::len) <= DIGITS_MAX
}

fn csv_error(name: &str, error: ::csv::Error) -> InputError {
    match error.into_kind() {
        ::csv::ErrorKind::Io(e) => reading_error(name, &e),
        kind => InputError::new(
            Diagnostic::new(Severity::Refusal, "not_csv", name)
                .found(format!("the table cannot be read: {kind:?}"))
                .expected("CSV as UTF-8 text")
                .remedy("save the sheet as CSV again"),
        ),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn cells_keep_what_a_float_would_lose() {
        let cases = [
            ("", "null"),
            ("  ", "null"),
            ("1.50", "1.50"),
            ("-0.25", "-0.25"),
            (" 7 ", "7"),
            ("007", "\"007\""),
            ("1e5", "\"1e5\""),
            ("+1", "\"+1\""),
            (".5", "\".5\""),
            ("12345678901234567890", "\"12345678901234567890\""),
            ("NaN", "\"NaN\""),
            ("a \"b\"", "\"a \\\"b\\\"\""),
        ];
        for (cell, json) in cases {
            assert_eq!(cell_json(cell), json, "{cell}");
        }
        assert_eq!(cases.len(), 12);
    }

    #[test]
    fn delimiters_are_told_by_the_header() {
        let needed = ["longitude", "latitude"];
        assert_eq!(delimiter("id,longitude,latitude\n", &needed), b',');
        assert_eq!(delimiter("id;longitude;latitude\n", &needed), b';');
        assert_eq!(delimiter("id\t\"longitude\"\tlatitude\n", &needed), b'\t');
        assert_eq!(delimiter("", &needed), b',');
    }
}

//! What is wrong with a GeoJSON file as a whole, in the words the user needs.

use serde_json::error::Category;

use super::text::Text;
use super::values::show;
use super::{InputError, reading_error};
use crate::diagnostic::{Diagnostic, Severity};

/// A refusal when a `crs` member names anything but WGS 84 with longitude first.
pub(super) fn wrong_crs(name: &str, line: u64, crs: &str) -> Option<Diagnostic> {
    let value: serde_json::Value = serde_json::from_str(crs).unwrap_or(serde_json::Value::Bool(false));
    let system = value.pointer("/properties/name").unwrap_or(&value).as_str().unwrap_or_default().to_ascii_uppercase();
    let last = system.rsplit([':', '/']).next().unwrap_or_default();
    let joined: String = system.chars().filter(char::is_ascii_alphanumeric).collect();
    if value.is_null() || matches!(last, "CRS84" | "CRS84H" | "4326" | "4979") || joined == "WGS84" {
        return None;
    }
    Some(
        unusable(name, "wrong_crs")
            .at_line(Some(line))
            .found(format!("the crs member is {}", show(if system.is_empty() { crs } else { &system })))
            .expected("WGS 84 (CRS84) or no crs member")
            .remedy("export the layer again in WGS 84, longitude then latitude, degrees"),
    )
}

pub(super) fn unusable(name: &str, code: &'static str) -> Diagnostic {
    Diagnostic::new(Severity::Refusal, code, name)
}

pub(super) fn empty(name: &str) -> InputError {
    InputError::new(
        unusable(name, "file_empty")
            .found("the file is empty")
            .expected("a GeoJSON FeatureCollection")
            .remedy("export the layer again"),
    )
}

/// What to add when the damage looks like a number that JSON does not know.
pub(super) fn literal_hint(nearby: &str) -> &'static str {
    let has = |word: &str| nearby.contains(word);
    if has("NaN") || has("nan") || has("Infinity") || has("inf") || nearby.trim_end().ends_with(['N', 'I']) {
        " (JSON has no NaN or Infinity)"
    } else {
        ""
    }
}

/// A JSON error of a whole file as the message the user needs.
pub(super) fn json_error(name: &str, error: serde_json::Error, text: &Text) -> InputError {
    let (line, column) = (error.line() as u64, error.column());
    let nearby = text.nearby();
    let finding = match error.classify() {
        Category::Io => return reading_error(name, &std::io::Error::from(error)),
        Category::Eof => unusable(name, "truncated")
            .found(format!("the file ends too early, at line {line}, column {column}"))
            .expected("closing brackets: the end of a GeoJSON FeatureCollection")
            .remedy("copy or export the file again; it was cut off"),
        Category::Syntax => unusable(name, "not_json")
            .found(format!(
                "not JSON at line {line}, column {column}, near {}{}",
                show(nearby.trim()),
                literal_hint(&nearby)
            ))
            .expected("a GeoJSON FeatureCollection")
            .remedy("write missing numbers as null and check brackets and quotes, or export the file again"),
        Category::Data => unusable(name, "not_a_collection")
            .found(format!("line {line}, column {column}: {}", plain(&error)))
            .expected("a GeoJSON FeatureCollection with an array of features")
            .remedy("export the layer as GeoJSON (RFC 7946, WGS 84)"),
    };
    InputError::new(finding.at_line(Some(line.max(1))))
}

/// The message of a JSON error without its place.
fn plain(error: &serde_json::Error) -> String {
    let message = error.to_string();
    message.split(" at line ").next().unwrap_or_default().to_owned()
}

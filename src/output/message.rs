//! Messages as JSON, one object a line, for `--json-log`.

use serde::Serialize;

use crate::diagnostic::Diagnostic;

#[derive(Serialize)]
struct Line<'a> {
    level: &'a str,
    message: &'a str,
    #[serde(skip_serializing_if = "Option::is_none")]
    code: Option<&'a str>,
    #[serde(skip_serializing_if = "Option::is_none")]
    file: Option<&'a str>,
    #[serde(skip_serializing_if = "Option::is_none")]
    record: Option<&'a str>,
    #[serde(skip_serializing_if = "Option::is_none")]
    id: Option<&'a str>,
    #[serde(skip_serializing_if = "Option::is_none")]
    line: Option<u64>,
    #[serde(skip_serializing_if = "Option::is_none")]
    property: Option<&'a str>,
    #[serde(skip_serializing_if = "Option::is_none")]
    found: Option<&'a str>,
    #[serde(skip_serializing_if = "Option::is_none")]
    expected: Option<&'a str>,
    #[serde(skip_serializing_if = "Option::is_none")]
    remedy: Option<&'a str>,
}

/// One message as a line of JSON, without its line end. `finding` adds where, what, expected and remedy as members.
pub fn json_line(level: &str, message: &str, finding: Option<&Diagnostic>) -> String {
    let text = |f: fn(&Diagnostic) -> Option<&str>| finding.and_then(f);
    let line = Line {
        level,
        message,
        code: text(|f| Some(f.code)),
        file: text(|f| Some(&f.file)),
        record: text(|f| Some(f.record).filter(|r| !r.is_empty())),
        id: text(|f| f.id.as_deref()),
        line: finding.and_then(|f| f.line),
        property: text(|f| f.property.as_deref()),
        found: text(|f| f.found.as_deref()),
        expected: text(|f| f.expected.as_deref()),
        remedy: text(|f| f.remedy.as_deref()),
    };
    serde_json::to_string(&line).expect("plain strings and numbers are always JSON")
}

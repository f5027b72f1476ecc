//! Talk to the user: on standard error, plain without a terminal, one JSON object a line when asked.

use std::io::{IsTerminal, Write};

use spallcast::diagnostic::{Diagnostic, Severity};
use spallcast::input::{Digest, InputError};
use spallcast::output::message::json_line;

/// How many findings of one kind are printed; all of them are in the run record.
const SHOWN_OF_A_KIND: usize = 5;

/// Where messages go and how.
#[derive(Debug, Clone, Copy, Default)]
pub struct Messages {
    /// Only errors.
    pub quiet: bool,
    /// One JSON object a line.
    pub json: bool,
}

impl Messages {
    /// A sentence for the user.
    pub fn say(&self, text: &str) {
        if self.quiet {
            return;
        }
        if self.json {
            self.json_line("message", text, None);
        } else {
            line(text);
        }
    }

    /// An error; always shown.
    pub fn error(&self, text: &str) {
        if self.json {
            self.json_line("error", text, None);
        } else {
            line(&format!("spallcast: {text}"));
        }
    }

    /// An unusable input, with the place in the file where that helps.
    pub fn input_error(&self, error: InputError) {
        if self.json {
            error.findings().for_each(|f| self.json_line("error", &f.to_string(), Some(f)));
        } else if std::io::stderr().is_terminal() {
            line(&format!("{:?}", miette::Report::new(error)));
        } else {
            error.findings().for_each(|f| line(&format!("spallcast: {f}")));
        }
    }

    /// Findings, grouped by kind.
    pub fn findings<'a>(&self, findings: impl IntoIterator<Item = &'a Diagnostic>) {
        if self.quiet {
            return;
        }
        if self.json {
            findings.into_iter().for_each(|f| self.json_line(f.severity.word(), &f.to_string(), Some(f)));
            return;
        }
        let mut digest = Digest::new(SHOWN_OF_A_KIND);
        findings.into_iter().for_each(|f| digest.add(f.clone()));
        for group in digest.groups() {
            group.first.iter().for_each(finding_line);
            let more = group.count - group.first.len() as u64;
            if more > 0 {
                line(&format!("  and {more} more of this kind; `spallcast check --json-log` lists all"));
            }
        }
    }

    /// Findings as they come, for streams: of each kind the first few, and at the end how many more there were.
    pub fn running(&self) -> RunningFindings {
        RunningFindings { messages: *self, digest: Digest::new(0) }
    }

    fn json_line(&self, level: &str, text: &str, finding: Option<&Diagnostic>) {
        line(&json_line(level, text, finding));
    }
}

/// Findings of a stream, counted by kind and shown while they are few.
#[derive(Debug)]
pub struct RunningFindings {
    messages: Messages,
    digest: Digest,
}

impl RunningFindings {
    /// Shows or counts one.
    pub fn add(&mut self, finding: &Diagnostic) {
        if self.messages.quiet {
            return;
        }
        if self.messages.json {
            self.messages.json_line(finding.severity.word(), &finding.to_string(), Some(finding));
            return;
        }
        if self.digest.count(finding) <= SHOWN_OF_A_KIND as u64 {
            finding_line(finding);
        }
    }

    /// Tells how many were not shown.
    pub fn end(&self) {
        for group in self.digest.groups() {
            let more = group.count.saturating_sub(SHOWN_OF_A_KIND as u64);
            if more > 0 {
                line(&format!("  and {more} more `{}`; --json-log lists all", group.code));
            }
        }
    }
}

fn finding_line(finding: &Diagnostic) {
    let word = match finding.severity {
        Severity::Note => "note: ",
        Severity::Warning => "warning: ",
        Severity::Refusal => "refused: ",
    };
    line(&format!("{word}{finding}"));
}

/// A line on standard error; a closed one is no reason to stop.
fn line(text: &str) {
    let _ = writeln!(std::io::stderr().lock(), "{text}");
}

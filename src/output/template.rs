//! An empty boulder table and a settings file to fill in, generated from the tables that the readers use.
//!
//! A table has no room for comments: what its columns mean stands in a page of its own. In the settings file every setting
//! stands on a line of its own behind `#` with its default (or an example); a line takes effect when its `#` is removed.
//! Prose begins with `# `, a setting with `#` and its name. Names stand flat, so that each line works alone.

use crate::bounds::Bound;
use crate::input::column_notes::{ColumnKind, ColumnNote, boulder_columns};
use crate::input::setting_notes::{SettingKind, SettingNote, setting_notes};

/// Widest line of prose.
const WIDTH: usize = 110;

/// The files of a template: name and text.
pub fn files() -> [(&'static str, String); 3] {
    [("boulders.csv", boulder_header()), ("columns.txt", columns_page()), ("settings.toml", settings_file())]
}

/// A boulder table without boulders: the header alone.
pub fn boulder_header() -> String {
    let names: Vec<&str> = boulder_columns().iter().map(|c| c.name).collect();
    names.join(",") + "\n"
}

/// The template as one text: a settings file that begins with the header of the table as a comment.
pub fn one_text() -> String {
    let header = boulder_header();
    format!(
        "# The header of an empty boulder table, all columns (write the files with: spallcast template DIR):\n# {header}\n{}",
        settings_file()
    )
}

fn range(bound: &Bound) -> String {
    if bound.unit.is_empty() { bound.range() } else { format!("{} {}", bound.range(), bound.unit) }
}

/// What each column of the boulder table is.
pub fn columns_page() -> String {
    let mut page = String::from(
        "Columns of boulders.csv. Needed: boulder_id, longitude, latitude, and a size (a boulder's diameter or axes).\n\
         Leave a cell empty when the value was not recorded; never write 0 for it. Columns that are not used may be\n\
         deleted; columns of your own pass through to the results.\n\n",
    );
    for ColumnNote { name, kind, meaning } in boulder_columns() {
        let holds = match kind {
            ColumnKind::Name => "text or a number".to_owned(),
            ColumnKind::Text => "text".to_owned(),
            ColumnKind::Day => "a day, such as 2026-08-14".to_owned(),
            ColumnKind::Number(bound) => range(bound),
            ColumnKind::Words(words) => words.join(", "),
        };
        page.push_str(&format!("{name}\n    {meaning}\n    {holds}\n"));
    }
    page
}

/// The settings file.
pub fn settings_file() -> String {
    let mut text = String::from(
        "# Settings of spallcast. Remove the # before a name to make a line count; a flag on the command line wins.\n\
         # Paths are relative to the folder of this file.\n",
    );
    let mut subject = None;
    for note in setting_notes() {
        if subject != Some(note.subject) {
            text.push_str(match note.subject {
                "spall" => "\n# ---- Spall model ----\n",
                "rockfall" => "\n# ---- Rockfall source and reach ----\n",
                "trail" => "\n# ---- Trails and proposals ----\n",
                _ => "\n# ---- The run ----\n",
            });
            subject = Some(note.subject);
        }
        text.push('\n');
        text.push_str(&prose(&sentences(&note)));
        text.push_str(&format!("#{} = {}\n", note.name, note.toml));
    }
    text
}

fn sentences(note: &SettingNote) -> String {
    let mut said = note.meaning.to_owned();
    match note.kind {
        SettingKind::Number(bound) => said.push_str(&format!(" Range: {}.", range(bound))),
        SettingKind::Whole(bound) => said.push_str(&format!(" Whole, range: {}.", range(bound))),
        SettingKind::Seed => said.push_str(" Whole, 0 or more."),
        SettingKind::Triangle(bound) => {
            said.push_str(&format!(" [lower end, mode, upper end], range: {}.", range(bound)))
        }
        SettingKind::TrianglesByContact(bound) => said.push_str(&format!(" Range: {}.", range(bound))),
        SettingKind::ChancesBySupport => said.push_str(" Range: 0 to 1."),
        SettingKind::Weights | SettingKind::Rocks | SettingKind::Path | SettingKind::Texts | SettingKind::Switch => {}
        SettingKind::Day => said.push_str(" Year-month-day."),
    }
    match note.otherwise {
        Some(otherwise) => said.push_str(&format!(" Without it: {otherwise}. The line is an example.")),
        None => said.push_str(&format!(" Default: {}. Basis: {}.", note.toml, note.basis)),
    }
    said
}

/// Prose as comment lines.
fn prose(text: &str) -> String {
    let mut lines = String::new();
    let mut line = String::from("#");
    for word in text.split(' ') {
        if line.len() + 1 + word.len() > WIDTH {
            lines.push_str(&line);
            lines.push('\n');
            line = String::from("#");
        }
        line.push(' ');
        line.push_str(word);
    }
    lines + &line + "\n"
}

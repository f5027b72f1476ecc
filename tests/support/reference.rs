//! Reads the reference tables under `tests/reference/`.
#![allow(dead_code, reason = "each suite uses the part it needs")]

use std::path::Path;

/// One row: header names beside cells.
pub struct Row {
    names: csv::StringRecord,
    cells: csv::StringRecord,
}

impl Row {
    /// A cell as text.
    pub fn text(&self, name: &str) -> &str {
        let column = self.names.iter().position(|n| n == name).unwrap_or_else(|| panic!("no column {name}"));
        &self.cells[column]
    }

    /// A cell as a number.
    pub fn number(&self, name: &str) -> f64 {
        self.text(name).parse().unwrap_or_else(|_| panic!("{name}: {:?} is no number", self.text(name)))
    }

    /// A cell as a number; `None` where it is empty.
    pub fn maybe(&self, name: &str) -> Option<f64> {
        (!self.text(name).is_empty()).then(|| self.number(name))
    }
}

/// All rows of a table; lines that start with `#` are remarks.
pub fn table(file: &str) -> Vec<Row> {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/reference").join(file);
    let mut reader = csv::ReaderBuilder::new().comment(Some(b'#')).from_path(path).unwrap();
    let names = reader.headers().unwrap().clone();
    reader.records().map(|r| Row { names: names.clone(), cells: r.unwrap() }).collect()
}

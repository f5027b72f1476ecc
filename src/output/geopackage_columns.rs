//! Input properties as columns of a table: names without clashes, types by what the values are.

use std::collections::{HashMap, HashSet};

use serde_json::Value as Json;

use crate::input::Properties;

/// One cell.
#[derive(Debug, Clone, PartialEq)]
pub(super) enum Cell {
    Null,
    Integer(i64),
    Real(f64),
    Text(String),
}

/// What the values of a column have been so far; each covers those before it.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
enum Kind {
    Nothing,
    Switch,
    Integer,
    Real,
    Text,
}

impl Kind {
    fn of(value: &Json) -> Kind {
        match value {
            Json::Null => Kind::Nothing,
            Json::Bool(_) => Kind::Switch,
            Json::Number(n) if n.is_i64() => Kind::Integer,
            Json::Number(_) => Kind::Real,
            Json::String(_) | Json::Array(_) | Json::Object(_) => Kind::Text,
        }
    }

    /// The kind that holds values of both.
    fn with(self, other: Kind) -> Kind {
        let (low, high) = if self <= other { (self, other) } else { (other, self) };
        // A switch among numbers is neither.
        if low == Kind::Switch && matches!(high, Kind::Integer | Kind::Real) { Kind::Text } else { high }
    }

    fn declared(self) -> &'static str {
        match self {
            Kind::Switch => "BOOLEAN",
            Kind::Integer => "INTEGER",
            Kind::Real => "DOUBLE",
            Kind::Nothing | Kind::Text => "TEXT",
        }
    }

    fn cell(self, value: &Json) -> Cell {
        match (self, value) {
            (_, Json::Null) => Cell::Null,
            (Kind::Text | Kind::Nothing, Json::String(text)) => Cell::Text(text.clone()),
            (Kind::Text | Kind::Nothing, other) => Cell::Text(other.to_string()),
            (_, Json::Bool(yes)) => Cell::Integer(i64::from(*yes)),
            (Kind::Integer, Json::Number(n)) => n.as_i64().map_or(Cell::Null, Cell::Integer),
            (_, Json::Number(n)) => n.as_f64().filter(|x| x.is_finite()).map_or(Cell::Null, Cell::Real),
            (_, other) => Cell::Text(other.to_string()),
        }
    }
}

struct Column {
    /// Name in the input.
    input: String,
    /// Name in the table.
    name: String,
    kind: Kind,
}

/// The input columns of one layer.
pub(super) struct InputColumns {
    columns: Vec<Column>,
    /// Column of the properties beyond the limit, as JSON.
    rest: Option<String>,
}

fn parsed(properties: &Properties) -> Vec<(String, Json)> {
    let value = |raw: &str| serde_json::from_str(raw).unwrap_or(Json::Null);
    properties.entries().into_iter().map(|(name, raw)| (name.into_owned(), value(raw.get()))).collect()
}

/// A name that SQLite does not yet know, letters compared without case, from `input`.
fn free_name(input: &str, taken: &mut HashSet<String>) -> String {
    // A NUL cannot stand in SQL text.
    let mut name = input.replace('\0', " ");
    while name.is_empty() || !taken.insert(name.to_ascii_lowercase()) {
        name.insert_str(0, "input_");
    }
    name
}

impl InputColumns {
    /// The columns that hold these records, in the order in which their names first occur.
    pub(super) fn of<'p>(
        records: impl Iterator<Item = &'p Properties>,
        taken: impl Iterator<Item = &'static str>,
        most: usize,
    ) -> InputColumns {
        let mut taken: HashSet<String> = taken.map(str::to_ascii_lowercase).collect();
        let mut columns: Vec<Column> = Vec::new();
        let mut places: HashMap<String, usize> = HashMap::new();
        let mut beyond = false;
        for record in records {
            for (input, value) in parsed(record) {
                let kind = Kind::of(&value);
                if let Some(place) = places.get(&input) {
                    let column = &mut columns[*place];
                    column.kind = column.kind.with(kind);
                } else if columns.len() < most {
                    places.insert(input.clone(), columns.len());
                    let name = free_name(&input, &mut taken);
                    columns.push(Column { input, name, kind });
                } else {
                    beyond = true;
                }
            }
        }
        let rest = beyond.then(|| free_name("input_properties", &mut taken));
        InputColumns { columns, rest }
    }

    /// Their declarations in SQL.
    pub(super) fn declarations(&self) -> Vec<String> {
        let quoted = |name: &str, kind: &str| format!("\"{}\" {kind}", name.replace('"', "\"\""));
        let columns = self.columns.iter().map(|c| quoted(&c.name, c.kind.declared()));
        columns.chain(self.rest.iter().map(|r| quoted(r, "TEXT"))).collect()
    }

    /// Name and description of each.
    pub(super) fn descriptions(&self) -> Vec<(String, String)> {
        let columns = self.columns.iter().map(|c| (c.name.clone(), format!("As it came in the input: {}.", c.input)));
        let rest = self.rest.iter().map(|r| (r.clone(), "Further properties of the input, as JSON.".to_owned()));
        columns.chain(rest).collect()
    }

    /// The cells of one record, in the order of the declarations.
    pub(super) fn cells(&self, properties: &Properties) -> Vec<Cell> {
        let mut values: HashMap<String, Json> = parsed(properties).into_iter().collect();
        let mut cells: Vec<Cell> = self
            .columns
            .iter()
            .map(|c| values.remove(&c.input).map_or(Cell::Null, |value| c.kind.cell(&value)))
            .collect();
        if self.rest.is_some() {
            let left: serde_json::Map<String, Json> = values.into_iter().collect();
            cells.push(if left.is_empty() { Cell::Null } else { Cell::Text(Json::Object(left).to_string()) });
        }
        cells
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn names_do_not_clash_and_types_follow_the_values() {
        let one = Properties::from_pairs([("Status", "\"x\""), ("n", "1"), ("b", "true"), ("N", "2"), ("mixed", "1")]);
        let two = Properties::from_pairs([("n", "1.5"), ("b", "false"), ("mixed", "true"), ("a", "[1]"), ("z", "0")]);
        let columns = InputColumns::of([&one, &two].into_iter(), ["status"].into_iter(), 6);
        let expected = [
            "\"input_Status\" TEXT",
            "\"n\" DOUBLE",
            "\"b\" BOOLEAN",
            "\"input_N\" INTEGER",
            "\"mixed\" TEXT",
            "\"a\" TEXT",
            "\"input_properties\" TEXT",
        ];
        assert_eq!(columns.declarations(), expected);
        let text = |t: &str| Cell::Text(t.to_owned());
        let cells = columns.cells(&two);
        let (null, real) = (Cell::Null, Cell::Real(1.5));
        assert_eq!(cells, [null.clone(), real, Cell::Integer(0), null, text("true"), text("[1]"), text("{\"z\":0}")]);
    }
}

//! What goes in and what comes out, for machines: JSON Schema 2020-12 of the inputs and settings, and the output fields.
//!
//! Everything is generated from the tables that the readers and writers use. The schema is narrower than the readers in
//! one respect: they also take words in any case and, with a note, numbers written as text.
//!
//! Keywords of ours begin with `x-`: `x-unit` and `x-basis` on a property, `x-outputs` for the output fields.

use serde_json::{Map, Value, json};

use super::burns::BURN_FIELDS;
use super::fields::{BOULDER_FIELDS, Field};
use super::inspection::INSPECTION_COLUMNS;
use super::trails::TRAIL_FIELDS;
use crate::bounds::Bound;
use crate::input::column_notes::{ColumnKind, ColumnNote, boulder_columns, burn_columns, trail_columns};
use crate::input::setting_notes::{SettingKind, SettingNote, setting_notes};
use crate::rock::Property;
use crate::site::{Contact, Support};

const DIALECT: &str = "https://json-schema.org/draft/2020-12/schema";

/// The parts of the schema that can be asked for alone.
pub const PARTS: [&str; 5] = ["boulders", "burns", "trails", "settings", "outputs"];

fn ranged(kind: &str, bound: &Bound) -> Map<String, Value> {
    let mut schema = Map::new();
    schema.insert("type".to_owned(), json!(kind));
    schema.insert("minimum".to_owned(), json!(bound.min));
    schema.insert("maximum".to_owned(), json!(bound.max));
    if !bound.unit.is_empty() {
        schema.insert("x-unit".to_owned(), json!(bound.unit));
    }
    schema
}

/// The same, with `null` allowed for "not recorded".
fn or_null(mut schema: Map<String, Value>) -> Map<String, Value> {
    let kinds = match schema.get("type") {
        Some(Value::Array(kinds)) => kinds.clone(),
        Some(kind) => vec![kind.clone()],
        None => Vec::new(),
    };
    if !kinds.is_empty() {
        schema.insert("type".to_owned(), json!(kinds.into_iter().chain([json!("null")]).collect::<Vec<_>>()));
    }
    schema
}

fn object(value: Value) -> Map<String, Value> {
    match value {
        Value::Object(map) => map,
        other => unreachable!("only objects are built here, not {other}"),
    }
}

fn column(note: &ColumnNote) -> Value {
    let schema = match &note.kind {
        ColumnKind::Name => object(json!({ "type": ["string", "number"] })),
        ColumnKind::Text => object(json!({ "type": "string" })),
        ColumnKind::Day => object(json!({ "type": "string", "format": "date" })),
        ColumnKind::Number(bound) => ranged("number", bound),
        ColumnKind::Words(words) => {
            let words: Vec<Value> = words.iter().map(|w| json!(w)).chain([Value::Null]).collect();
            object(json!({ "enum": words }))
        }
    };
    let mut schema = or_null(schema);
    schema.insert("description".to_owned(), json!(note.meaning));
    Value::Object(schema)
}

/// A layer: features of these geometries with these properties. Unknown properties pass through.
fn layer(title: &str, geometries: &[&str], columns: &[ColumnNote]) -> Value {
    let properties: Map<String, Value> =
        columns.iter().filter(|c| !in_table_only(c.name)).map(|c| (c.name.to_owned(), column(c))).collect();
    json!({
        "title": title,
        "description": "A GeoJSON FeatureCollection (RFC 7946), WGS 84, longitude then latitude, degrees.",
        "type": "object",
        "required": ["type", "features"],
        "properties": {
            "type": { "const": "FeatureCollection" },
            "features": {
                "type": "array",
                "items": {
                    "type": "object",
                    "required": ["type", "geometry", "properties"],
                    "properties": {
                        "type": { "const": "Feature" },
                        "id": { "type": ["string", "number"] },
                        "geometry": {
                            "type": "object",
                            "required": ["type", "coordinates"],
                            "properties": { "type": { "enum": geometries }, "coordinates": { "type": "array" } }
                        },
                        "properties": { "type": ["object", "null"], "properties": properties }
                    }
                }
            }
        }
    })
}

/// Columns that a table has and a feature's geometry replaces.
fn in_table_only(name: &str) -> bool {
    matches!(name, "longitude" | "latitude")
}

fn triangle(bound: &Bound) -> Value {
    json!({
        "type": "array", "items": ranged("number", bound), "minItems": 3, "maxItems": 3,
        "$comment": "lower end, mode, upper end, in rising order"
    })
}

fn table_by(words: impl Iterator<Item = &'static str>, value: &Value) -> Value {
    let properties: Map<String, Value> = words.map(|w| (w.to_owned(), value.clone())).collect();
    json!({ "type": "object", "properties": properties, "additionalProperties": false })
}

/// A figure of a user's own rock: a number or a distribution.
fn figure() -> Value {
    let number = json!({ "type": "number" });
    json!({ "anyOf": [
        number,
        { "type": "object", "properties": {
            "median": number, "gsd": number, "mean": number, "sd": number, "low": number, "mode": number, "high": number,
            "lower": number, "upper": number
        }, "additionalProperties": false }
    ] })
}

fn user_rock() -> Value {
    let mut properties: Map<String, Value> =
        Property::ALL.iter().map(|p| (p.input_name().to_owned(), figure())).collect();
    properties.insert("like".to_owned(), json!({ "type": "string", "description": "The rock it starts from." }));
    properties.insert("source".to_owned(), json!({ "type": "string", "description": "Where its figures come from." }));
    properties.insert("aliases".to_owned(), json!({ "type": ["array", "string"], "items": { "type": "string" } }));
    json!({ "type": "object", "required": ["source"], "properties": properties })
}

fn setting(note: &SettingNote) -> Value {
    let mut schema = object(match note.kind {
        SettingKind::Number(bound) => Value::Object(ranged("number", bound)),
        SettingKind::Whole(bound) => Value::Object(ranged("integer", bound)),
        SettingKind::Seed => json!({ "type": "integer", "minimum": 0 }),
        SettingKind::Triangle(bound) => triangle(bound),
        SettingKind::TrianglesByContact(bound) => table_by(Contact::ALL.iter().map(|c| c.word()), &triangle(bound)),
        SettingKind::ChancesBySupport => {
            let chance = json!({ "type": "number", "minimum": 0, "maximum": 1 });
            table_by(Support::ALL.iter().map(|s| s.word()), &chance)
        }
        SettingKind::Weights => {
            json!({ "type": "object", "minProperties": 1, "additionalProperties": { "type": "number", "minimum": 0 } })
        }
        SettingKind::Rocks => json!({ "type": "object", "additionalProperties": user_rock() }),
        SettingKind::Path => json!({ "type": "string" }),
        SettingKind::Texts => json!({ "type": ["string", "array"], "items": { "type": "string" } }),
        SettingKind::Switch => json!({ "type": "boolean" }),
        SettingKind::Day => json!({ "type": "string", "format": "date" }),
    });
    schema.insert("description".to_owned(), json!(note.meaning));
    schema.insert("x-basis".to_owned(), json!(note.basis));
    if note.otherwise.is_none()
        && let Ok(table) = format!("x = {}", note.toml).parse::<toml::Table>()
        && let Ok(default) = serde_json::to_value(&table["x"])
    {
        schema.insert("default".to_owned(), default);
    }
    Value::Object(schema)
}

fn settings() -> Value {
    let notes = setting_notes();
    let of = |subject: &str| -> Map<String, Value> {
        notes.iter().filter(|n| n.subject == subject).map(|n| (n.name.to_owned(), setting(n))).collect()
    };
    let mut properties: Map<String, Value> = notes.iter().map(|n| (n.name.to_owned(), setting(n))).collect();
    for subject in ["spall", "rockfall", "trail"] {
        let table = json!({ "type": "object", "properties": of(subject), "additionalProperties": false });
        properties.insert(subject.to_owned(), table);
    }
    json!({
        "title": "Settings file (TOML)",
        "description": "Names stand at the top, or in the table of their subject, once.",
        "type": "object",
        "properties": properties,
        "additionalProperties": false
    })
}

fn fields<R>(fields: &[Field<R>]) -> Value {
    fields
        .iter()
        .map(|f| {
            let unit = (!f.unit.is_empty()).then_some(f.unit);
            json!({ "name": f.name, "unit": unit, "type": [f.kind.word(), "null"], "meaning": f.meaning })
        })
        .collect()
}

/// The output fields of every layer and table, in their order; a unit is null for words, counts, shares and likelihoods.
pub fn outputs() -> Value {
    json!({
        "boulders.geojson": fields(BOULDER_FIELDS),
        "burns.geojson": fields(BURN_FIELDS),
        "trails.geojson": fields(TRAIL_FIELDS),
        "inspection.csv": fields(INSPECTION_COLUMNS),
    })
}

fn definition(part: &str) -> Option<Value> {
    Some(match part {
        "boulders" => {
            layer("Boulder inventory", &["Point", "Polygon", "MultiPoint", "MultiPolygon"], &boulder_columns())
        }
        "burns" => layer("Burn perimeters", &["Polygon", "MultiPolygon"], &burn_columns()),
        "trails" => layer("Trails", &["LineString", "MultiLineString"], &trail_columns()),
        "settings" => settings(),
        _ => return None,
    })
}

/// The whole document: definitions of the inputs and settings under `$defs`, the output fields under `x-outputs`. A
/// document of one of the layers or a settings file validates against the root.
pub fn document() -> Value {
    let inputs = &PARTS[..4];
    let definitions: Map<String, Value> =
        inputs.iter().map(|p| ((*p).to_owned(), definition(p).expect("a part of the list"))).collect();
    json!({
        "$schema": DIALECT,
        "title": format!("Inputs, settings and output fields of spallcast {}", env!("CARGO_PKG_VERSION")),
        "anyOf": inputs.iter().map(|p| json!({ "$ref": format!("#/$defs/{p}") })).collect::<Vec<_>>(),
        "$defs": definitions,
        "x-outputs": outputs(),
    })
}

/// A schema as indented text, ending in a line feed.
pub fn text(schema: &Value) -> String {
    format!("{schema:#}\n")
}

/// One part of [`PARTS`] as a document of its own; `None` for another word.
pub fn part(name: &str) -> Option<Value> {
    if name == "outputs" {
        return Some(outputs());
    }
    let mut schema = object(definition(name)?);
    schema.insert("$schema".to_owned(), json!(DIALECT));
    Some(Value::Object(schema))
}

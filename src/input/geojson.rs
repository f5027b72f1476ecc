//! Text to GeoJSON features, one at a time: RFC 7946 documents, newline-delimited features, RFC 8142 sequences.
//!
//! A document is walked by a visitor that hands on each element of `features` as raw text with its line, so memory is one
//! feature and a wrong feature costs only itself. Damage to the JSON of a document itself (truncation, `NaN`) makes the
//! file unusable, with line and column. In the line-by-line layouts each line stands alone, and so does its damage.

use std::borrow::Cow;
use std::fmt;
use std::ops::ControlFlow;

use serde::de::{DeserializeSeed, IgnoredAny, MapAccess, SeqAccess, Visitor};
use serde_json::value::RawValue;

use super::geojson_errors::{empty, json_error, literal_hint, unusable, wrong_crs};
use super::properties::{REPEATED, object_entries};
use super::text::Text;
use super::values::show;
use super::{InputError, reading_error};
use crate::diagnostic::{Diagnostic, Severity};

/// Deepest nesting of arrays and objects in one feature; a MultiPolygon needs six.
const DEPTH_MAX: usize = 64;
/// Record separator of RFC 8142.
const RECORD_SEPARATOR: u8 = 0x1E;

/// How features follow one another in the text.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Layout {
    /// One JSON document (or several features one after the other, however they are broken into lines).
    Document,
    /// One feature a line.
    Lines,
    /// One feature after each record separator.
    Sequence,
}

/// One feature, not looked into yet.
pub(crate) struct RawFeature<'a> {
    /// Its place in the file, from 0.
    pub(crate) index: usize,
    /// Its first line in the file, from 1.
    pub(crate) line: u64,
    /// Its text.
    pub(crate) text: &'a str,
}

/// What a feature holds.
pub(crate) struct Parts<'a> {
    pub(crate) geometry: Option<&'a RawValue>,
    pub(crate) properties: Vec<(Cow<'a, str>, &'a RawValue)>,
    pub(crate) id: Option<&'a RawValue>,
}

/// What is called for each feature; breaking ends the reading without an error.
pub(crate) type EachFeature<'f> = dyn FnMut(RawFeature<'_>) -> ControlFlow<()> + 'f;

/// The layout that the name and the first bytes suggest; `None` when it is not JSON at all.
pub(crate) fn layout(name: &str, head: &[u8]) -> Option<Layout> {
    let head = String::from_utf8_lossy(head);
    let body = head.trim_start();
    let extension = name.rsplit_once('.').map(|(_, e)| e.to_ascii_lowercase()).unwrap_or_default();
    if body.as_bytes().first() == Some(&RECORD_SEPARATOR) {
        return Some(Layout::Sequence);
    }
    let json_name = matches!(extension.as_str(), "geojson" | "json" | "geojsonl" | "geojsons" | "jsonl" | "ndjson");
    if !body.starts_with(['{', '[']) && !json_name {
        return None;
    }
    let line_name = matches!(extension.as_str(), "geojsonl" | "geojsons" | "jsonl" | "ndjson");
    let first = |word: &str| body.find(word).unwrap_or(usize::MAX);
    if first("\"FeatureCollection\"") < first("\"Feature\"")
        || (!line_name && first("\"features\"") < first("\"Feature\""))
    {
        return Some(Layout::Document);
    }
    let (line, rest) = body.split_once('\n').unwrap_or((body, ""));
    let line_is_whole = serde_json::from_str::<IgnoredAny>(line).is_ok() && !rest.trim().is_empty();
    let piped_feature = name == super::STANDARD_INPUT && body.starts_with('{') && first("\"Feature\"") < line.len();
    Some(if line_name || line_is_whole || piped_feature { Layout::Lines } else { Layout::Document })
}

/// Reads every feature. Returns how many there were.
pub(crate) fn read_features(
    text: &Text,
    name: &str,
    layout: Layout,
    each: &mut EachFeature<'_>,
) -> Result<usize, InputError> {
    match layout {
        Layout::Document => read_document(text, name, each),
        Layout::Lines => read_records(text, name, b'\n', each),
        Layout::Sequence => read_records(text, name, RECORD_SEPARATOR, each),
    }
}

fn read_records(text: &Text, name: &str, separator: u8, each: &mut EachFeature<'_>) -> Result<usize, InputError> {
    let mut record = Vec::new();
    let mut index = 0;
    while let Some(line) = text.next_record(separator, &mut record).map_err(|e| reading_error(name, &e))? {
        let whole = String::from_utf8_lossy(&record);
        // Separators are also allowed before each line of newline-delimited text.
        let body = whole.trim_matches(|c: char| c.is_ascii_whitespace() || c == char::from(RECORD_SEPARATOR));
        if body.is_empty() {
            continue;
        }
        let before = &whole[..body.as_ptr() as usize - whole.as_ptr() as usize];
        let line = line + before.matches('\n').count() as u64;
        let flow = each(RawFeature { index, line, text: body });
        index += 1;
        if flow.is_break() {
            break;
        }
    }
    Ok(index)
}

fn read_document(text: &Text, name: &str, each: &mut EachFeature<'_>) -> Result<usize, InputError> {
    text.start_record();
    let mut reader = serde_json::Deserializer::from_reader(text.clone());
    let mut walk = Walk { text, name, each, count: 0, stopped: false, refusal: None };
    match reader.end() {
        Ok(()) => return Err(empty(name)),
        Err(e) if e.is_io() => return Err(json_error(name, e, text)),
        Err(_) => {}
    }
    loop {
        let what = walk.deserialize(&mut reader);
        if walk.stopped {
            return Ok(walk.count);
        }
        if let Some(refusal) = walk.refusal.take() {
            return Err(InputError::new(refusal));
        }
        let what = what.map_err(|e| json_error(name, e, text))?;
        match (reader.end(), what) {
            (Ok(()), _) => return Ok(walk.count),
            (Err(_), Top::Feature) => {}
            (Err(e), Top::Collection) => return Err(json_error(name, e, text)),
        }
        walk.text.start_record();
    }
}

/// What one top-level value was.
enum Top {
    Collection,
    Feature,
}

/// Walks one top-level value.
struct Walk<'w, 'f> {
    text: &'w Text,
    name: &'w str,
    each: &'w mut EachFeature<'f>,
    count: usize,
    stopped: bool,
    refusal: Option<Diagnostic>,
}

impl Walk<'_, '_> {
    /// Hands on one feature; an error when the reading must end here.
    fn hand_on<E: serde::de::Error>(&mut self, line: u64, text: &str) -> Result<(), E> {
        let flow = (self.each)(RawFeature { index: self.count, line, text });
        self.count += 1;
        self.text.start_record();
        if flow.is_break() {
            self.stopped = true;
            return Err(E::custom("stopped"));
        }
        Ok(())
    }

    fn refuse<E: serde::de::Error>(&mut self, finding: Diagnostic) -> E {
        self.refusal = Some(finding);
        E::custom("refused")
    }
}

impl<'de> DeserializeSeed<'de> for &mut Walk<'_, '_> {
    type Value = Top;
    fn deserialize<D: serde::Deserializer<'de>>(self, deserializer: D) -> Result<Top, D::Error> {
        deserializer.deserialize_map(self)
    }
}

impl<'de> Visitor<'de> for &mut Walk<'_, '_> {
    type Value = Top;

    fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str("a GeoJSON FeatureCollection")
    }

    fn visit_map<A: MapAccess<'de>>(self, mut map: A) -> Result<Top, A::Error> {
        let line = self.text.line();
        let mut kind: Option<Box<RawValue>> = None;
        let mut members: Vec<(String, Box<RawValue>)> = Vec::new();
        let mut collection = false;
        let mut other_format = None;
        while let Some(key) = map.next_key::<String>()? {
            match key.as_str() {
                "features" if collection => {
                    let finding = unusable(self.name, "not_a_collection")
                        .at_line(Some(self.text.line()))
                        .found("the member \"features\" occurs twice")
                        .expected("one array of features")
                        .remedy("merge the two arrays");
                    return Err(self.refuse(finding));
                }
                "features" => {
                    collection = true;
                    self.text.start_record();
                    map.next_value_seed(Elements(self))?;
                }
                "type" => kind = Some(map.next_value()?),
                "crs" => {
                    let at = self.text.line();
                    let crs: Box<RawValue> = map.next_value()?;
                    if let Some(finding) = wrong_crs(self.name, at, crs.get()) {
                        return Err(self.refuse(finding));
                    }
                }
                "geometry" | "properties" | "id" => members.push((key, map.next_value()?)),
                _ => {
                    if matches!(key.as_str(), "arcs" | "objects") {
                        other_format = Some("TopoJSON");
                    } else if matches!(key.as_str(), "geometryType" | "spatialReference") {
                        other_format = Some("the JSON of a feature service");
                    }
                    map.next_value::<IgnoredAny>()?;
                }
            }
            if !collection {
                self.text.start_record();
            }
        }
        let word = kind.as_ref().map_or("", |k| k.get().trim_matches('"'));
        match (word, collection) {
            ("FeatureCollection", true) if other_format.is_none() => Ok(Top::Collection),
            ("Feature", false) => {
                let pairs = members.iter().map(|(k, v)| format!("{k:?}:{}", v.get())).collect::<Vec<_>>().join(",");
                let comma = if pairs.is_empty() { "" } else { "," };
                self.hand_on(line, &format!("{{\"type\":\"Feature\"{comma}{pairs}}}"))?;
                Ok(Top::Feature)
            }
            _ => {
                let found = match (other_format, kind.as_ref()) {
                    (Some(format), _) => format!("this looks like {format}"),
                    (None, Some(_)) if word == "FeatureCollection" => "the member \"features\" is missing".to_owned(),
                    (None, Some(k)) => format!("the type is {}", show(k.get())),
                    (None, None) => "the member \"type\" is missing".to_owned(),
                };
                let remedy = match word {
                    "Point" | "LineString" | "Polygon" | "MultiPoint" | "MultiLineString" | "MultiPolygon"
                    | "GeometryCollection" => "wrap the geometry in a Feature with its properties",
                    _ => "export the layer as GeoJSON (RFC 7946, WGS 84)",
                };
                let finding = unusable(self.name, "not_a_collection")
                    .at_line(Some(line))
                    .found(found)
                    .expected("a GeoJSON object of type \"FeatureCollection\" with \"features\"")
                    .remedy(remedy);
                Err(self.refuse(finding))
            }
        }
    }
}

/// The elements of `features`.
struct Elements<'e, 'w, 'f>(&'e mut Walk<'w, 'f>);

impl<'de> DeserializeSeed<'de> for Elements<'_, '_, '_> {
    type Value = ();
    fn deserialize<D: serde::Deserializer<'de>>(self, deserializer: D) -> Result<(), D::Error> {
        deserializer.deserialize_seq(self)
    }
}

impl<'de> Visitor<'de> for Elements<'_, '_, '_> {
    type Value = ();

    fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str("an array of features")
    }

    fn visit_seq<A: SeqAccess<'de>>(self, mut seq: A) -> Result<(), A::Error> {
        while let Some((line, text)) = seq.next_element_seed(Element(self.0.text))? {
            self.0.hand_on(line, text.get())?;
        }
        Ok(())
    }
}

/// One element as raw text with its line.
struct Element<'w>(&'w Text);

impl<'de> DeserializeSeed<'de> for Element<'_> {
    type Value = (u64, Box<RawValue>);
    fn deserialize<D: serde::Deserializer<'de>>(self, deserializer: D) -> Result<Self::Value, D::Error> {
        let line = self.0.line();
        Ok((line, serde::Deserialize::deserialize(deserializer)?))
    }
}

/// Takes a feature apart. The error is a refusal of this feature alone.
pub(crate) fn parts<'a>(
    feature: &RawFeature<'a>,
    name: &str,
    record: &'static str,
) -> Result<Parts<'a>, Box<Diagnostic>> {
    let refuse = |code, found: String, expected: &str, remedy: &str| {
        let finding = Diagnostic::new(Severity::Refusal, code, name).about(record, None).at_line(Some(feature.line));
        let found = format!("feature {} {found}", feature.index + 1);
        Box::new(finding.found(found).expected(expected).remedy(remedy))
    };
    if depth(feature.text) > DEPTH_MAX {
        return Err(refuse(
            "nesting_too_deep",
            format!("nests arrays or objects more than {DEPTH_MAX} deep"),
            "a plain feature",
            "remove the nested property or repair the geometry",
        ));
    }
    let not_json = |e: &serde_json::Error| match e.to_string() {
        message if message.starts_with(REPEATED) => refuse(
            "duplicate_key",
            format!("names {} twice in one object", message[REPEATED.len()..].split(" at line").next().unwrap_or("")),
            "each name once",
            "delete one of the two",
        ),
        message => refuse(
            "not_json",
            format!("is not a JSON object: {message}{}", literal_hint(feature.text)),
            "one GeoJSON Feature",
            "write missing numbers as null and check brackets and quotes",
        ),
    };
    let members = object_entries(feature.text).map_err(|e| not_json(&e))?;
    let member = |key: &str| members.iter().find(|(k, _)| k == key).map(|(_, v)| *v).filter(|v| v.get() != "null");
    let kind = member("type").map_or("", RawValue::get);
    if kind != "\"Feature\"" {
        let found = if kind.is_empty() { "has no type".to_owned() } else { format!("has the type {}", show(kind)) };
        return Err(refuse("not_a_feature", found, "the type \"Feature\"", "write one feature per element"));
    }
    if let Some(crs) = member("crs").and_then(|crs| wrong_crs(name, feature.line, crs.get())) {
        return Err(Box::new(crs));
    }
    let properties = match member("properties") {
        None => Vec::new(),
        Some(p) if p.get().starts_with('{') => object_entries(p.get()).map_err(|e| not_json(&e))?,
        Some(p) => {
            let found = format!("has properties {}", show(p.get()));
            return Err(refuse("not_a_feature", found, "properties as an object or null", "write names and values"));
        }
    };
    Ok(Parts { geometry: member("geometry"), properties, id: member("id") })
}

/// Deepest nesting in a JSON text, strings aside.
fn depth(json: &str) -> usize {
    let (mut depth, mut deepest, mut quoted, mut escaped) = (0_usize, 0, false, false);
    for byte in json.bytes() {
        match byte {
            _ if escaped => escaped = false,
            b'\\' if quoted => escaped = true,
            b'"' => quoted = !quoted,
            b'{' | b'[' if !quoted => {
                depth += 1;
                deepest = deepest.max(depth);
            }
            b'}' | b']' if !quoted => depth = depth.saturating_sub(1),
            _ => {}
        }
    }
    deepest
}

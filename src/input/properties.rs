//! The properties of a feature as they came in, kept for the way out.

use std::borrow::Cow;
use std::fmt;

use serde::de::{Deserializer as _, MapAccess, Visitor};
use serde_json::value::RawValue;

/// Input properties in their order, each value exactly as it was written.
///
/// Held as one compact JSON object, because a large inventory keeps every one of them until the layer is written.
///
/// ```
/// use spallcast::input::Properties;
/// let p = Properties::from_pairs([("rock", "\"granite\""), ("n", "1.50")]);
/// assert_eq!(p.as_json(), r#"{"rock":"granite","n":1.50}"#);
/// assert_eq!(p.get("n").unwrap().get(), "1.50");
/// ```
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Properties(Box<str>);

impl Default for Properties {
    fn default() -> Self {
        Properties("{}".into())
    }
}

impl Properties {
    /// From names and JSON values as text, in order. The values must be valid JSON.
    pub fn from_pairs<'a>(pairs: impl IntoIterator<Item = (&'a str, &'a str)>) -> Self {
        let mut json = String::from("{");
        for (name, value) in pairs {
            if json.len() > 1 {
                json.push(',');
            }
            json.push_str(&serde_json::to_string(name).expect("a string is always JSON"));
            json.push(':');
            json.push_str(value);
        }
        json.push('}');
        Properties(json.into())
    }

    /// Names and values in their order, each value exactly as it was written.
    pub fn entries(&self) -> Vec<(Cow<'_, str>, &RawValue)> {
        object_entries(&self.0).expect("properties are one JSON object without repeated names")
    }

    /// One value as it was written.
    pub fn get(&self, name: &str) -> Option<&RawValue> {
        self.entries().into_iter().find(|(n, _)| n == name).map(|(_, value)| value)
    }

    /// The whole object as JSON text.
    pub fn as_json(&self) -> &str {
        &self.0
    }
}

/// Names and values of a JSON object, in order. A name that occurs twice is an error that names it.
pub(crate) fn object_entries(json: &str) -> Result<Vec<(Cow<'_, str>, &RawValue)>, serde_json::Error> {
    struct Entries;
    impl<'de> Visitor<'de> for Entries {
        type Value = Vec<(Cow<'de, str>, &'de RawValue)>;
        fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
            f.write_str("an object")
        }
        fn visit_map<A: MapAccess<'de>>(self, mut map: A) -> Result<Self::Value, A::Error> {
            let mut entries: Self::Value = Vec::new();
            while let Some(Name(name)) = map.next_key()? {
                entries.push((name, map.next_value()?));
            }
            let mut names: Vec<&str> = entries.iter().map(|(n, _)| n.as_ref()).collect();
            names.sort_unstable();
            if let Some(pair) = names.windows(2).find(|w| w[0] == w[1]) {
                return Err(serde::de::Error::custom(format!("{REPEATED}{:?}", pair[0])));
            }
            Ok(entries)
        }
    }
    let mut reader = serde_json::Deserializer::from_str(json);
    let entries = reader.deserialize_map(Entries)?;
    reader.end()?;
    Ok(entries)
}

/// How the error of [`object_entries`] begins when a name occurs twice.
pub(crate) const REPEATED: &str = "the name occurs twice: ";

/// A name, borrowed where the text holds no escapes.
#[derive(serde::Deserialize)]
struct Name<'a>(#[serde(borrow)] Cow<'a, str>);

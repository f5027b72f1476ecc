//! The built program and its files, for the suites that run it from outside.
#![allow(dead_code, reason = "each suite uses the part it needs")]

use std::collections::BTreeMap;
use std::path::{Path, PathBuf};
use std::process::Output;

use assert_cmd::Command;
use serde_json::Value;

/// The program, in an environment without colour wishes.
pub fn spallcast() -> Command {
    let mut command = Command::cargo_bin("spallcast").expect("cargo builds the program before its tests");
    command.env_remove("NO_COLOR").env_remove("CLICOLOR_FORCE").env_remove("FORCE_COLOR");
    command
}

/// Runs it and hands back what it printed and how it ended.
pub fn run(arguments: &[&str]) -> Output {
    spallcast().args(arguments).output().expect("the program starts")
}

/// Exit code, with what was said on standard error where it is not the expected one.
pub fn ends_with(output: &Output, code: i32) {
    let said = String::from_utf8_lossy(&output.stderr);
    assert_eq!(output.status.code(), Some(code), "standard error: {said}");
    assert!(!said.contains("panicked"), "{said}");
}

/// A file of `fixtures/`.
pub fn fixture(name: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures").join(name)
}

/// A path as an argument.
pub fn text(path: &Path) -> &str {
    path.to_str().expect("test folders have plain names")
}

/// A layer of a results folder.
pub fn layer(path: &Path) -> Value {
    let bytes = std::fs::read(path).unwrap_or_else(|e| panic!("{}: {e}", path.display()));
    serde_json::from_slice(&bytes).unwrap_or_else(|e| panic!("{}: {e}", path.display()))
}

/// Properties of the features of a layer.
pub fn rows(layer: &Value) -> Vec<&Value> {
    layer["features"].as_array().expect("a layer has features").iter().map(|f| &f["properties"]).collect()
}

/// Properties of boulders by id. Ids that stand twice are left out: a file of any order may hold either first.
pub fn by_id<'a>(rows: impl IntoIterator<Item = &'a Value>) -> BTreeMap<String, Value> {
    let mut found: BTreeMap<String, Vec<Value>> = BTreeMap::new();
    for row in rows {
        let id = row["boulder_id"].as_str().expect("every row keeps its id").to_owned();
        found.entry(id).or_default().push(row.clone());
    }
    found.into_iter().filter(|(_, rows)| rows.len() == 1).map(|(id, mut rows)| (id, rows.remove(0))).collect()
}

/// Asserts that two rows hold the same, but for the members named.
pub fn same_row(id: &str, a: &Value, b: &Value, except: &[&str]) {
    let (a, b) = (a.as_object().expect("a row"), b.as_object().expect("a row"));
    assert_eq!(a.keys().collect::<Vec<_>>(), b.keys().collect::<Vec<_>>(), "{id}");
    for (name, value) in a {
        if !except.contains(&name.as_str()) {
            assert_eq!(value, &b[name], "{id}: {name}");
        }
    }
}

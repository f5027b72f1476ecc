//! `schema`, `template`, `completions` and `man`, from outside.

use std::fs;
use std::path::Path;

use assert_cmd::Command;
use serde_json::Value;
use spallcast::input::{Duplicates, read_boulders, read_settings};
use spallcast::output::template;
use spallcast::rock::Catalogue;
use spallcast::settings::Settings;

fn spallcast(arguments: &[&str]) -> std::process::Output {
    Command::cargo_bin("spallcast").expect("the program is built").args(arguments).output().expect("it runs")
}

fn stdout(arguments: &[&str]) -> String {
    let output = spallcast(arguments);
    assert_eq!(output.status.code(), Some(0), "{arguments:?}: {}", String::from_utf8_lossy(&output.stderr));
    String::from_utf8(output.stdout).expect("text")
}

/// A setting's line without its mark; `None` for prose.
fn setting(line: &str) -> Option<&str> {
    let rest = line.strip_prefix('#')?;
    (rest.starts_with(|c: char| c.is_ascii_lowercase()) && rest.contains(" = ")).then_some(rest)
}

#[test]
fn every_line_of_the_template_reads_back_as_the_default() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("settings.toml");
    let text = template::settings_file();
    let live: Vec<&str> = text.lines().filter_map(setting).collect();
    assert_eq!(live.len(), 56, "every setting stands on one line");
    // As it is: all comments, all defaults.
    fs::write(&path, &text).expect("written");
    let untouched = read_settings(&path).expect("comments only");
    assert_eq!(untouched.settings, Settings::default());
    // All lines at once, examples included.
    fs::write(&path, live.join("\n")).expect("written");
    let run = read_settings(&path).expect("the template is readable");
    let mut settings = run.settings;
    assert!(settings.trail.as_of.take().is_some());
    assert_eq!(settings.rocks.len(), 1, "the example rock");
    settings.rocks.clear();
    let mut expected = Settings::default();
    settings.unknown_rock.iter_mut().zip(sorted(&expected.unknown_rock)).for_each(|(read, default)| {
        assert_eq!(read.0, default.0);
        assert!((read.1 - default.1).abs() < 1e-15, "{read:?}");
    });
    settings.unknown_rock.clear();
    expected.unknown_rock.clear();
    assert_eq!(settings, expected);
    // Each line alone.
    for line in live {
        fs::write(&path, line).expect("written");
        read_settings(&path).unwrap_or_else(|e| panic!("{line}: {e}"));
    }
}

fn sorted(weights: &[(String, f64)]) -> Vec<(String, f64)> {
    let mut weights = weights.to_vec();
    weights.sort_by(|a, b| a.0.cmp(&b.0));
    weights
}

#[test]
fn the_template_says_default_range_and_basis() {
    let text = template::settings_file();
    let at = text.find("#reach_mean_deg = 34").expect("the setting with its default");
    let above: Vec<&str> = text[..at].lines().rev().take(1).collect();
    assert_eq!(above, ["# Mean of the reach angle. Range: 5 to 60 degrees. Default: 34. Basis: assumption."]);
    for line in text.lines() {
        assert!(line.is_empty() || line.starts_with('#'), "{line:?} would take effect");
    }
}

#[test]
fn a_template_folder_is_written_once_and_its_table_reads() {
    let folder = tempfile::tempdir().expect("a folder");
    let target = folder.path().join("new");
    let shown = stdout(&["template", target.to_str().expect("text")]);
    assert_eq!(shown.lines().count(), 3);
    let mut seen = 0;
    read_boulders(&target.join("boulders.csv"), &Catalogue::embedded(), Duplicates::RefuseLater, |_| {
        seen += 1;
        std::ops::ControlFlow::Continue(())
    })
    .expect("a header alone is a table");
    assert_eq!(seen, 0);
    let columns = fs::read_to_string(target.join("columns.txt")).expect("columns");
    assert!(columns.contains("diameter_m\n    Diameter.\n    0.05 to 60 m\n"), "{columns}");
    fs::write(target.join("boulders.csv"), "mine").expect("written");
    let again = spallcast(&["template", target.to_str().expect("text")]);
    assert_eq!(again.status.code(), Some(1));
    assert_eq!(fs::read_to_string(target.join("boulders.csv")).expect("kept"), "mine");
}

#[test]
fn the_printed_template_is_a_settings_file_below_the_header_of_the_table() {
    let text = stdout(&["template"]);
    assert!(text.contains("\n# boulder_id,longitude,latitude,"));
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("settings.toml");
    fs::write(&path, text).expect("written");
    assert_eq!(read_settings(&path).expect("readable").settings, Settings::default());
}

#[test]
fn the_schema_holds_ranges_units_words_and_every_output_field() {
    let schema: Value = serde_json::from_str(&stdout(&["schema"])).expect("JSON");
    assert_eq!(schema["$schema"], "https://json-schema.org/draft/2020-12/schema");
    let boulder = &schema["$defs"]["boulders"]["properties"]["features"]["items"]["properties"]["properties"];
    let kappa = &boulder["properties"]["diffusivity_mm2_s"];
    assert_eq!((kappa["minimum"].as_f64(), kappa["maximum"].as_f64()), (Some(0.1), Some(10.0)));
    assert_eq!(kappa["x-unit"], "mm2/s");
    assert!(boulder["properties"]["support"]["enum"].as_array().expect("words").contains(&"burnt_through".into()));
    assert_eq!(schema["$defs"]["settings"]["properties"]["trail"]["properties"]["segment_m"]["default"], 50);
    let outputs: Value = serde_json::from_str(&stdout(&["schema", "outputs"])).expect("JSON");
    assert_eq!(outputs, schema["x-outputs"]);
    for (layer, fields) in [
        ("boulders.geojson", spallcast::output::BOULDER_FIELDS.len()),
        ("burns.geojson", spallcast::output::BURN_FIELDS.len()),
        ("trails.geojson", spallcast::output::TRAIL_FIELDS.len()),
    ] {
        assert_eq!(outputs[layer].as_array().expect("fields").len(), fields, "{layer}");
    }
    let depth = outputs["boulders.geojson"].as_array().expect("fields").iter().find(|f| f["name"] == "heated_depth_mm");
    assert_eq!(depth.expect("the field")["unit"], "mm");
    assert_eq!(spallcast(&["schema", "nonsense"]).status.code(), Some(2));
}

#[test]
fn completions_and_manual_pages_name_every_flag() {
    for shell in ["bash", "zsh", "fish", "powershell", "elvish"] {
        let text = stdout(&["completions", shell]);
        assert!(text.contains("horizon-days"), "{shell}: no flag of assess");
    }
    let folder = tempfile::tempdir().expect("a folder");
    stdout(&["man", folder.path().to_str().expect("text")]);
    let page = |name: &str| {
        let path: &Path = &folder.path().join(name);
        fs::read_to_string(path).unwrap_or_else(|e| panic!("{name}: {e}"))
    };
    assert!(page("spallcast.1").contains(".TH spallcast"));
    for command in ["assess", "check", "probe", "rocks", "demo", "schema", "template"] {
        assert!(page(&format!("spallcast-{command}.1")).starts_with(".ie"), "{command}");
    }
    assert!(page("spallcast-assess.1").contains("horizon\\-days"));
}

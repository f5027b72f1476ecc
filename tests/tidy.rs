//! Holds the rules of the house: where things may stand, what may import what, which words may not appear.
//!
//! Each rule is a function from files to findings. Each test first plants a fault and sees the rule find it, then runs
//! the rule over the tree. `docs/architecture.md` says why the rules are as they are.

use std::collections::BTreeSet;
use std::fs;
use std::path::{Path, PathBuf};

/// Longest source file, in lines. Ask at 600, split at 900.
const LINES_MAX: usize = 900;
/// Entries of the top level, dotfiles and ignored folders aside.
const TOP_LEVEL: [&str; 9] =
    ["Cargo.lock", "Cargo.toml", "DEVELOPERS.md", "LICENSE", "README.md", "docs", "fixtures", "src", "tests"];
/// Folders and files of `src/` that compute: no files, no formats, no printing.
const PHYSICS: [&str; 10] =
    ["numerics", "ensemble", "rock", "fire", "heat", "stress", "spall", "rockfall", "trail", "assess"];
/// What each module of the library may import from the crate. Itself is always allowed.
const MAY_IMPORT: [(&str, &str); 21] = [
    ("units", ""),
    ("bounds", "units"),
    ("numerics", "bounds units"),
    ("ensemble", "numerics bounds units settings"), // settings: the number of replicates
    ("flag", ""),
    ("diagnostic", ""),
    ("site", "fire rock bounds units"),
    ("settings", "ensemble rock fire rockfall bounds units"),
    ("rock", "ensemble numerics bounds units settings site diagnostic"),
    ("heat", "rock numerics ensemble bounds units"),
    ("stress", "heat rock numerics ensemble bounds units"),
    ("fire", "heat rock numerics ensemble bounds units site settings flag"),
    ("spall", "stress heat rock numerics ensemble bounds units site settings flag"),
    ("rockfall", "spall stress heat rock numerics ensemble bounds units site settings flag"),
    ("trail", "rockfall spall stress heat rock numerics ensemble bounds units site settings flag"),
    ("assess", "trail rockfall spall stress fire heat rock numerics ensemble bounds units site settings flag"),
    ("input", "BELOW"),
    ("output", "BELOW input"), // input: records go out with the geometry and properties they came with
    ("report", "BELOW output input"),
    ("lib", "ANY"),
    ("main", "ANY"),
];
/// What `BELOW` stands for in [`MAY_IMPORT`]: everything under the edges of the program.
const BELOW: &str = "assess trail rockfall spall stress fire heat rock numerics ensemble bounds units site settings flag \
                     diagnostic";
/// Words of the `basis` column.
const BASES: [&str; 6] = ["published", "mixed", "recalled", "derived", "judgement", "assumption"];

/// A text file of the tree: path from the root with forward slashes, and its text.
struct File {
    path: String,
    text: String,
}

impl File {
    fn planted(path: &str, text: &str) -> File {
        File { path: path.to_owned(), text: text.to_owned() }
    }

    /// The module of `src/` that the file belongs to: `heat` for `src/heat/grid.rs` and for `src/heat.rs`.
    fn module(&self) -> Option<&str> {
        let rest = self.path.strip_prefix("src/")?;
        Some(rest.split('/').next().unwrap_or(rest).trim_end_matches(".rs"))
    }

    fn is_rust(&self) -> bool {
        self.path.ends_with(".rs")
    }

    /// Code lines with their numbers, comments cut off (a `//` after a colon is part of an address).
    fn code(&self) -> impl Iterator<Item = (usize, &str)> {
        self.text.lines().enumerate().map(|(i, line)| {
            let cut = line.match_indices("//").map(|(at, _)| at).find(|&at| !line[..at].ends_with(':'));
            (i + 1, &line[..cut.unwrap_or(line.len())])
        })
    }
}

fn root() -> &'static Path {
    Path::new(env!("CARGO_MANIFEST_DIR"))
}

fn walk(folder: &Path, into: &mut Vec<PathBuf>) {
    let mut entries: Vec<_> =
        fs::read_dir(folder).expect("readable folder").map(|e| e.expect("entry").path()).collect();
    entries.sort();
    for path in entries {
        let name = path.file_name().expect("named").to_string_lossy().into_owned();
        match path.is_dir() {
            true if name.starts_with("__") || name == ".venv" => {}
            true => walk(&path, into),
            false => into.push(path),
        }
    }
}

/// Text files under the given top-level names whose extension is one of `extensions` (`""` is none).
fn files(tops: &[&str], extensions: &[&str]) -> Vec<File> {
    let mut paths = Vec::new();
    for top in tops {
        let path = root().join(top);
        match path.is_dir() {
            true => walk(&path, &mut paths),
            false if path.exists() => paths.push(path),
            false => {}
        }
    }
    let wanted = |p: &PathBuf| extensions.contains(&p.extension().map_or("", |e| e.to_str().unwrap_or("?")));
    let found: Vec<File> = paths
        .into_iter()
        .filter(wanted)
        .map(|p| File {
            path: p.strip_prefix(root()).expect("under the root").to_string_lossy().replace('\\', "/"),
            text: String::from_utf8_lossy(&fs::read(&p).expect("readable file")).into_owned(),
        })
        .collect();
    assert!(!found.is_empty(), "no file with {extensions:?} under {tops:?}: the rule would hold nothing");
    found
}

fn sources() -> Vec<File> {
    files(&["src"], &["rs"])
}

/// True where `word` stands in `line` with no letter, digit or underscore on either side.
fn has_word(line: &str, word: &str) -> bool {
    let part = |c: Option<char>| c.is_some_and(|c| c.is_alphanumeric() || c == '_');
    let edge = |c: Option<char>| part(c);
    line.match_indices(word).any(|(at, _)| {
        let before = part(word.chars().next()) && edge(line[..at].chars().next_back());
        let after = part(word.chars().next_back()) && edge(line[at + word.len()..].chars().next());
        !before && !after
    })
}

/// Where any of `words` stands in the code of a file that `applies`.
fn words_in_code(files: &[File], applies: impl Fn(&File) -> bool, words: &[&str]) -> Vec<String> {
    let mut found = Vec::new();
    for file in files.iter().filter(|f| f.is_rust() && applies(f)) {
        for (number, line) in file.code() {
            for word in words.iter().filter(|w| has_word(line, w)) {
                found.push(format!("{}:{number}: {word}", file.path));
            }
        }
    }
    found
}

/// Plants one fault that the rule must find, then holds the tree to the rule.
fn hold(rule: impl Fn(&[File]) -> Vec<String>, planted: File, tree: &[File], help: &str) {
    assert_eq!(rule(&[planted]).len(), 1, "the rule does not find the fault planted for it: {help}");
    let found = rule(tree);
    assert!(found.is_empty(), "{help}\n  {}", found.join("\n  "));
}

fn is_physics(file: &File) -> bool {
    file.module().is_some_and(|m| PHYSICS.contains(&m))
}

#[test]
fn physics_prints_nothing_and_knows_no_file_or_format() {
    let words =
        ["println!", "eprintln!", "print!", "eprint!", "std::fs", "fs::", "geojson::", "use geojson", "serde_json"];
    hold(
        |f| words_in_code(f, is_physics, &words),
        File::planted("src/heat/grid.rs", "let x = 1;\nserde_json::to_string(&x);\n"),
        &sources(),
        "these modules compute and nothing else; read in src/input, write in src/output, print in src/cli:",
    );
}

#[test]
fn every_module_opens_with_its_doc() {
    let rule = |files: &[File]| {
        let opens = |f: &&File| !f.text.trim_start_matches('\u{feff}').starts_with("//!");
        files.iter().filter(opens).map(|f| f.path.clone()).collect::<Vec<_>>()
    };
    let tree = files(&["src", "tests"], &["rs"]);
    hold(
        rule,
        File::planted("src/a.rs", "use std::fmt;\n"),
        &tree,
        "open each module with `//!` and what it computes:",
    );
}

#[test]
fn no_file_is_too_long() {
    let rule = |files: &[File]| {
        let long = |f: &&File| f.text.lines().count() > LINES_MAX;
        files.iter().filter(long).map(|f| format!("{}: {} lines", f.path, f.text.lines().count())).collect::<Vec<_>>()
    };
    let tree = files(&["src", "tests"], &["rs", "py", "sh", "html", "js", "css"]);
    let planted = File::planted("src/a.rs", &"\n".repeat(LINES_MAX + 1));
    hold(rule, planted, &tree, &format!("split files over {LINES_MAX} lines by what they are about:"));
}

/// Names at the top level that are neither agreed, nor dotfiles, nor ignored by `.gitignore` (`/name`).
fn top_level_faults(names: &BTreeSet<String>, ignored: &BTreeSet<String>) -> Vec<String> {
    let agreed: BTreeSet<String> = TOP_LEVEL.iter().map(|s| (*s).to_owned()).collect();
    let extra = names.iter().filter(|n| !agreed.contains(*n) && !ignored.contains(*n) && !n.starts_with('.'));
    let missing = agreed.iter().filter(|n| !names.contains(*n));
    extra.map(|n| format!("{n} should not be here")).chain(missing.map(|n| format!("{n} is missing"))).collect()
}

#[test]
fn top_level_is_exactly_the_agreed_list() {
    let ignore = fs::read_to_string(root().join(".gitignore")).expect(".gitignore");
    let ignored: BTreeSet<String> = ignore.lines().filter_map(|l| l.strip_prefix('/')).map(str::to_owned).collect();
    let names: BTreeSet<String> = fs::read_dir(root())
        .expect("root")
        .map(|e| e.expect("entry").file_name().to_string_lossy().into_owned())
        .collect();
    let mut planted = names.clone();
    planted.insert("notes.txt".to_owned());
    planted.remove("LICENSE");
    assert!(top_level_faults(&planted, &ignored).len() >= 2, "the rule does not find an extra and a missing entry");
    let found = top_level_faults(&names, &ignored);
    assert!(found.is_empty(), "keep the top level to {TOP_LEVEL:?}:\n  {}", found.join("\n  "));
}

/// Modules named after `crate::` or `spallcast::` in a line, groups in braces included.
fn imports(line: &str) -> Vec<String> {
    let mut found = Vec::new();
    for root in ["crate::", "spallcast::"] {
        for (at, _) in line.match_indices(root) {
            let rest = &line[at + root.len()..];
            let list = match rest.strip_prefix('{') {
                Some(group) => group.split('}').next().unwrap_or(group).split(',').collect::<Vec<_>>(),
                None => vec![rest],
            };
            for item in list {
                let name: String = item.trim().chars().take_while(|c| c.is_alphanumeric() || *c == '_').collect();
                if name.chars().next().is_some_and(char::is_lowercase) && name != "word_enum" {
                    found.push(name);
                }
            }
        }
    }
    found
}

fn import_faults(files: &[File]) -> Vec<String> {
    let mut found = Vec::new();
    for file in files.iter().filter(|f| f.is_rust()) {
        let Some(module) = file.module().filter(|m| *m != "cli") else { continue };
        let Some((_, allowed)) = MAY_IMPORT.iter().find(|(name, _)| *name == module) else {
            found.push(format!("{}: module {module} is not in the table of this test", file.path));
            continue;
        };
        let allowed = allowed.replace("BELOW", BELOW);
        for (number, line) in file.code() {
            for name in imports(line) {
                if name != module && allowed != "ANY" && !allowed.split_whitespace().any(|a| a == name) {
                    found.push(format!("{}:{number}: {module} may not import {name}", file.path));
                }
            }
        }
    }
    found
}

#[test]
fn imports_point_one_way() {
    let planted = File::planted("src/heat/solver.rs", "use crate::{units, fire};\n");
    let help = "cli -> input, output, report -> assess -> trail -> rockfall -> spall -> stress -> heat -> rock, numerics \
                -> bounds, units; heat takes a forcing, so it need not know fire; ensemble knows no physics:";
    hold(import_faults, planted, &sources(), help);
    assert_eq!(import_faults(&[File::planted("src/ensemble/a.rs", "crate::heat::x();\n")]).len(), 1);
    assert_eq!(import_faults(&[File::planted("src/newcomer.rs", "//! x\n")]).len(), 1, "unknown modules must be named");
}

#[test]
fn the_library_does_not_declare_cli() {
    let rule = |files: &[File]| words_in_code(files, |f| f.path == "src/lib.rs", &["mod cli"]);
    hold(rule, File::planted("src/lib.rs", "pub mod cli;\n"), &sources(), "declare cli in main.rs alone:");
}

#[test]
fn only_the_edges_see_serde() {
    let edges = ["input", "output", "report", "rock"];
    let rule = |files: &[File]| {
        let inside = |f: &File| f.module().is_some_and(|m| !edges.contains(&m));
        words_in_code(files, inside, &["serde", "serde_json", "Serialize", "Deserialize"])
    };
    let planted = File::planted("src/site.rs", "use serde::Thing;\n");
    hold(rule, planted, &sources(), "formats belong to src/input, src/output, src/report and the catalogue loader:");
}

#[test]
fn only_cli_prints_exits_reads_the_environment_and_owns_threads() {
    let words = [
        "println!",
        "eprintln!",
        "print!",
        "eprint!",
        "dbg!",
        "std::env",
        "env::var",
        "env::args",
        "rayon",
        "std::thread",
        "thread::spawn",
        "std::process",
        "process::exit",
    ];
    let rule = |files: &[File]| words_in_code(files, |f| f.module().is_some_and(|m| m != "cli" && m != "main"), &words);
    let planted = File::planted("src/output/layer.rs", "std::process::exit(1)\n");
    let found = rule(&[planted]);
    assert_eq!(found.len(), 2, "both spellings of the planted fault are found: {found:?}");
    let found = rule(&sources());
    assert!(found.is_empty(), "leave this to src/cli and src/main.rs:\n  {}", found.join("\n  "));
}

/// Words that no file of the project may hold, in two halves each, so that this list does not hold them either.
const FORBIDDEN: [(&str, &str); 15] = [
    ("is sa", "fe"),
    ("are sa", "fe"),
    ("safe", " to"),
    ("perfectly sa", "fe"),
    ("TO", "DO"),
    ("FIX", "ME"),
    ("lec", "ture"),
    ("lec", "tures"),
    ("ses", "sion"),
    ("hel", "per"),
    ("hel", "pers"),
    ("ag", "ent"),
    ("ag", "ents"),
    ("lorem ip", "sum"),
    ("/work/sha", "red"),
];

fn forbidden_faults(files: &[File]) -> Vec<String> {
    let words: Vec<String> = FORBIDDEN.iter().map(|(a, b)| format!("{a}{b}").to_lowercase()).collect();
    let mut found = Vec::new();
    for file in files {
        for (i, line) in file.text.lines().enumerate() {
            let line = line.to_lowercase();
            for word in words.iter().filter(|w| has_word(&line, w)) {
                found.push(format!("{}:{}: {word:?}", file.path, i + 1));
            }
        }
    }
    found
}

#[test]
fn forbidden_words_do_not_appear() {
    let text: String = ["This slope is sa", "fe now.\n"].concat();
    let tree = files(
        &["src", "tests", "docs", "fixtures", "README.md", "DEVELOPERS.md", ".ci"],
        &["rs", "md", "toml", "py", "sh", "html", "css", "js", "sld", "txt", ""],
    );
    let help = "the program proposes and never vouches, is finished where it says so, and speaks of itself alone:";
    hold(forbidden_faults, File::planted("docs/a.md", &text), &tree, help);
    for (a, b) in FORBIDDEN {
        let planted = File::planted("docs/a.md", &format!("x {a}{b}."));
        assert!(!forbidden_faults(&[planted]).is_empty(), "{a}{b} is not found");
    }
}

#[test]
fn no_test_is_ignored() {
    let word = ["#[ig", "nore"].concat();
    let rule = |files: &[File]| words_in_code(files, |_| true, &[&word]);
    let planted = File::planted("tests/a.rs", &format!("{word}]\nfn x() {{}}\n"));
    hold(
        rule,
        planted,
        &files(&["src", "tests"], &["rs"]),
        "a test that never runs holds nothing; repair or delete it:",
    );
}

#[test]
fn the_licence_is_there_and_agrees_with_the_package() {
    let licence = fs::read_to_string(root().join("LICENSE")).expect("LICENSE stands at the top level");
    let manifest = fs::read_to_string(root().join("Cargo.toml")).expect("Cargo.toml");
    assert!(manifest.contains("license = \"MIT\""), "Cargo.toml names the licence that LICENSE holds");
    assert!(licence.contains("MIT License") && licence.contains("WITHOUT WARRANTY"), "LICENSE holds the MIT text");
}

/// Rows of a catalogue table whose basis is not one of the six words, or that name no source without saying why.
fn basis_faults(files: &[File]) -> Vec<String> {
    let mut found = Vec::new();
    for file in files {
        let mut reader = csv::Reader::from_reader(file.text.as_bytes());
        let headers = reader.headers().expect("header").clone();
        let column = |name: &str| headers.iter().position(|h| h == name);
        let Some(basis) = column("basis") else { continue };
        for (i, row) in reader.records().enumerate() {
            let row = row.expect("well-formed row");
            let word = row.get(basis).unwrap_or("");
            let sourced = column("source").is_none_or(|c| !row.get(c).unwrap_or("").trim().is_empty());
            if !BASES.contains(&word) || (!sourced && !["judgement", "assumption"].contains(&word)) {
                found.push(format!("{}: row {}: basis {word:?}, sourced: {sourced}", file.path, i + 1));
            }
        }
    }
    found
}

#[test]
fn every_catalogue_row_says_what_it_rests_on() {
    let planted = File::planted("src/rock/tables/a.csv", "rock,basis,source\ngranite,published,\n");
    let tree = files(&["src"], &["csv"]);
    assert!(tree.len() >= 5, "the embedded tables are found: {}", tree.len());
    hold(basis_faults, planted, &tree, "give each row a basis of the list and, unless it is a judgement, a source:");
}

/// Relative links of Markdown pages that lead nowhere.
fn link_faults(files: &[File]) -> Vec<String> {
    let mut found = Vec::new();
    for file in files {
        let folder = root().join(&file.path).parent().expect("a file has a folder").to_path_buf();
        for (i, line) in file.text.lines().enumerate() {
            for (at, _) in line.match_indices("](") {
                let target = line[at + 2..].split([')', '#']).next().unwrap_or("");
                if !target.is_empty() && !target.contains(':') && !folder.join(target).exists() {
                    found.push(format!("{}:{}: {target}", file.path, i + 1));
                }
            }
        }
    }
    found
}

#[test]
fn every_link_of_the_docs_leads_somewhere() {
    let planted = File::planted("docs/a.md", "See [there](nowhere.md).\n");
    let tree = files(&["docs", "fixtures", "README.md", "DEVELOPERS.md"], &["md"]);
    hold(link_faults, planted, &tree, "repair or remove the link:");
}

#[test]
fn every_data_folder_says_where_its_data_come_from() {
    let mut lacking = Vec::new();
    let mut folders = 0;
    for entry in fs::read_dir(root().join("fixtures")).expect("fixtures") {
        let path = entry.expect("entry").path();
        if path.is_dir() {
            folders += 1;
            let page = fs::read_to_string(path.join("README.md")).unwrap_or_default().to_lowercase();
            for word in ["origin", "licence", "made"] {
                if !page.contains(word) {
                    lacking.push(format!("{}: README.md does not say {word:?}", path.display()));
                }
            }
        }
    }
    assert!(folders > 0, "there is at least one data folder");
    assert!(lacking.is_empty(), "state origin, licence, date and how made:\n  {}", lacking.join("\n  "));
}

//! The folder of the results: all or nothing, nobody's file lost, clear words when it cannot be.

use std::collections::BTreeMap;
use std::fs;
use std::io::{self, Write};
use std::path::Path;

use spallcast::output::directory::{OutputDirectory, OutputError, WrittenFile};

/// Names and contents of a folder, `.partial` included.
fn content(folder: &Path) -> BTreeMap<String, String> {
    let read = |e: fs::DirEntry| match e.path().is_dir() {
        true => "a folder".to_owned(),
        false => fs::read_to_string(e.path()).expect("text"),
    };
    (fs::read_dir(folder).expect("a folder"))
        .map(|e| e.expect("an entry"))
        .map(|e| (e.file_name().into_string().expect("a name"), read(e)))
        .collect()
}

fn expected<const N: usize>(pairs: [(&str, &str); N]) -> BTreeMap<String, String> {
    pairs.map(|(a, b)| (a.to_owned(), b.to_owned())).into()
}

fn put(out: &mut OutputDirectory, name: &str, text: &str) -> WrittenFile {
    out.write(name, |w| w.write_all(text.as_bytes())).expect("written")
}

/// Writes these results and a run record that lists them, as a run does.
fn run(folder: &Path, files: &[(&str, &str)]) -> spallcast::output::Committed {
    let mut out = OutputDirectory::prepare(folder, &[]).expect("a usable folder");
    for (name, text) in files {
        put(&mut out, name, text);
    }
    let record = serde_json::json!({ "files": out.written() }).to_string();
    put(&mut out, "run.json", &record);
    out.commit().expect("committed")
}

#[test]
fn results_appear_together_at_the_end_with_their_hashes() {
    let temp = tempfile::tempdir().expect("a folder");
    let folder = temp.path().join("deep/er");
    let mut out = OutputDirectory::prepare(&folder, &[]).expect("made where missing");
    let file = put(&mut out, "boulders.geojson", "abc");
    // SHA-256 of "abc": FIPS 180-2, appendix B.1.
    assert_eq!(file.sha256, "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad");
    assert_eq!((file.name.as_str(), file.bytes), ("boulders.geojson", 3));
    assert_eq!(content(&folder), expected([(".partial", "a folder")]), "nothing is to be seen before the end");
    let done = out.commit().expect("committed");
    assert_eq!(done.files, [file]);
    assert_eq!(content(&folder), expected([("boulders.geojson", "abc")]));
}

#[test]
fn a_run_that_fails_leaves_the_old_results_and_nothing_else() {
    let temp = tempfile::tempdir().expect("a folder");
    run(temp.path(), &[("boulders.geojson", "old"), ("burns.geojson", "old too")]);
    let before = content(temp.path());
    let mut out = OutputDirectory::prepare(temp.path(), &[]).expect("usable");
    put(&mut out, "boulders.geojson", "new");
    // The second result fails half way, as on a full disk.
    let full = out.write("burns.geojson", |w| {
        w.write_all(&vec![b'x'; 1 << 20])?;
        Err(io::ErrorKind::StorageFull.into())
    });
    let message = full.expect_err("the disk is full").to_string();
    assert!(message.contains("burns.geojson") && message.contains("disk is full"), "{message}");
    drop(out);
    assert_eq!(content(temp.path()), before);
}

#[test]
fn a_failed_run_takes_the_folders_it_made_away_again() {
    let temp = tempfile::tempdir().expect("a folder");
    let mut out = OutputDirectory::prepare(&temp.path().join("a/b/c"), &[]).expect("usable");
    put(&mut out, "boulders.geojson", "new");
    drop(out);
    assert_eq!(content(temp.path()), expected([]));
}

#[test]
fn a_commit_that_fails_half_way_puts_everything_back() {
    let temp = tempfile::tempdir().expect("a folder");
    run(temp.path(), &[("a.csv", "old a"), ("b.csv", "old b"), ("c.csv", "old c"), ("trails.geojson", "old trails")]);
    fs::write(temp.path().join("b.csv"), "old b, edited").expect("edited");
    let before = content(temp.path());
    let mut out = OutputDirectory::prepare(temp.path(), &[]).expect("usable");
    for name in ["a.csv", "b.csv", "c.csv", "run.json"] {
        put(&mut out, name, "new");
    }
    // One of the files under way vanishes: the move of a.csv works, that of b.csv does not.
    fs::remove_file(temp.path().join(".partial/b.csv")).expect("there");
    let error = out.commit().expect_err("a file is missing");
    assert!(error.to_string().contains("b.csv"), "{error}");
    assert_eq!(content(temp.path()), before);
}

#[test]
fn what_a_killed_commit_moved_aside_is_put_back() {
    let temp = tempfile::tempdir().expect("a folder");
    fs::create_dir_all(temp.path().join(".partial/aside")).expect("made");
    fs::create_dir_all(temp.path().join(".partial/replaced")).expect("made");
    fs::write(temp.path().join(".partial/aside/boulders.geojson"), "old").expect("written");
    fs::write(temp.path().join(".partial/replaced/burns.geojson"), "older").expect("written");
    fs::write(temp.path().join(".partial/burns.geojson"), "half").expect("written");
    fs::write(temp.path().join("boulders.geojson"), "new").expect("written");
    drop(OutputDirectory::prepare(temp.path(), &[]).expect("usable"));
    assert_eq!(content(temp.path()), expected([("boulders.geojson", "old")]));
}

#[test]
fn two_runs_do_not_write_into_one_folder() {
    let temp = tempfile::tempdir().expect("a folder");
    let mut first = OutputDirectory::prepare(temp.path(), &[]).expect("usable");
    let second = OutputDirectory::prepare(temp.path(), &[]).expect_err("busy");
    assert!(matches!(second, OutputError::Busy(_)), "{second}");
    put(&mut first, "a.csv", "a");
    first.commit().expect("the first is not disturbed");
    assert_eq!(content(temp.path()), expected([("a.csv", "a")]));
    drop(OutputDirectory::prepare(temp.path(), &[]).expect("free again"));
}

#[test]
fn a_stale_result_goes_and_a_file_of_the_user_stays() {
    let temp = tempfile::tempdir().expect("a folder");
    run(temp.path(), &[("boulders.geojson", "1"), ("trails.geojson", "trails"), ("report.html", "page")]);
    fs::write(temp.path().join("notes.txt"), "mine").expect("written");
    fs::write(temp.path().join("report.html"), "page, with remarks").expect("edited");
    let done = run(temp.path(), &[("boulders.geojson", "2")]);
    assert_eq!(done.removed, ["trails.geojson"]);
    let after = content(temp.path());
    assert!(!after.contains_key("trails.geojson"), "it would look current");
    assert_eq!(after["boulders.geojson"], "2");
    assert_eq!(after["notes.txt"], "mine");
    assert_eq!(after["report.html"], "page, with remarks", "edited by hand: left alone");
}

#[test]
fn a_file_that_no_run_record_lists_is_never_removed() {
    let temp = tempfile::tempdir().expect("a folder");
    fs::write(temp.path().join("trails.geojson"), "the survey").expect("written");
    let outside = temp.path().join("outside.txt");
    fs::write(&outside, "x").expect("written");
    let results = temp.path().join("results");
    fs::create_dir(&results).expect("made");
    // A run record that lists a path outside the folder, and one that is no record at all.
    let hash = "2d711642b726b04401627ca9fbac32f5c8530fb1903cc4db02258717921a4881"; // SHA-256 of "x"
    let listed = format!(r#"{{"files":[{{"name":"../outside.txt","bytes":1,"sha256":"{hash}"}}]}}"#);
    for record in [listed.as_str(), "not JSON", r#"{"files":7}"#] {
        fs::write(results.join("run.json"), record).expect("written");
        let done = run(&results, &[("boulders.geojson", "1")]);
        assert_eq!(done.removed, Vec::<String>::new());
    }
    assert!(outside.exists());
    run(temp.path(), &[("boulders.geojson", "1")]);
    assert_eq!(fs::read_to_string(temp.path().join("trails.geojson")).expect("there"), "the survey");
}

#[test]
fn a_result_edited_by_hand_is_kept_beside_the_new_one() {
    let temp = tempfile::tempdir().expect("a folder");
    run(temp.path(), &[("trails.geojson", "1")]);
    for round in 1..=2 {
        let edit = format!("decided in round {round}");
        fs::write(temp.path().join("trails.geojson"), &edit).expect("edited");
        let done = run(temp.path(), &[("trails.geojson", "2")]);
        assert_eq!(done.kept_edits, [format!("edited-{round}-trails.geojson")]);
        let after = content(temp.path());
        assert_eq!(after["trails.geojson"], "2");
        assert_eq!(after[&format!("edited-{round}-trails.geojson")], edit);
    }
    let done = run(temp.path(), &[("trails.geojson", "3")]);
    assert_eq!(done.kept_edits, Vec::<String>::new(), "not edited this time");
}

#[test]
fn an_input_is_never_replaced() {
    let temp = tempfile::tempdir().expect("a folder");
    let input = temp.path().join("trails.geojson");
    fs::write(&input, "the survey").expect("written");
    let mut out = OutputDirectory::prepare(temp.path(), &[&input]).expect("usable");
    assert!(out.check_names(["boulders.geojson"]).is_ok());
    let early = out.check_names(["boulders.geojson", "trails.geojson"]).expect_err("known before any work");
    assert!(matches!(early, OutputError::WouldReplaceInput(_)), "{early}");
    assert!(out.write("trails.geojson", |w| w.write_all(b"new")).is_err());
    drop(out);
    assert_eq!(content(temp.path()), expected([("trails.geojson", "the survey")]));
}

#[test]
fn a_folder_that_cannot_be_used_is_refused_before_any_work() {
    let temp = tempfile::tempdir().expect("a folder");
    let file = temp.path().join("file");
    fs::write(&file, "x").expect("written");
    for path in [file.clone(), file.join("below")] {
        let error = OutputDirectory::prepare(&path, &[]).expect_err("a file is in the way");
        assert!(matches!(error, OutputError::NotADirectory(_)), "{error}");
        assert!(error.to_string().contains("file"), "{error}");
    }
    fs::create_dir(temp.path().join("boulders.geojson")).expect("made");
    let mut out = OutputDirectory::prepare(temp.path(), &[]).expect("usable as such");
    let error = out.write("boulders.geojson", |w| w.write_all(b"x")).expect_err("a folder is in the way");
    assert!(matches!(error, OutputError::FolderInTheWay(_)), "{error}");
}

#[test]
fn system_errors_become_messages_that_say_what_to_do() {
    let path = Path::new("results/boulders.geojson");
    let message = |kind: io::ErrorKind| OutputError::new(path, "writing", kind.into()).to_string();
    for kind in [io::ErrorKind::StorageFull, io::ErrorKind::QuotaExceeded] {
        assert!(message(kind).contains("free space"), "{}", message(kind));
    }
    for kind in [io::ErrorKind::PermissionDenied, io::ErrorKind::ReadOnlyFilesystem] {
        assert!(message(kind).contains("--out"), "{}", message(kind));
    }
    let other = message(io::ErrorKind::Interrupted);
    assert!(other.contains("writing failed") && other.contains("unchanged"), "{other}");
    assert!(message(io::ErrorKind::StorageFull).starts_with("results/boulders.geojson: "));
}

/// A file system that takes nothing more, where the machine offers one.
#[cfg(target_os = "linux")]
#[test]
fn a_full_device_is_told_from_other_errors() {
    let mut full = fs::OpenOptions::new().write(true).open("/dev/full").expect("Linux has it");
    let error = full.write_all(b"x").expect_err("it is full");
    let error = OutputError::new(Path::new("a.csv"), "writing", error);
    assert!(matches!(error, OutputError::DiskFull(_)), "{error}");
}

#[test]
fn a_library_may_write_to_a_path_of_its_own() {
    let temp = tempfile::tempdir().expect("a folder");
    let mut out = OutputDirectory::prepare(temp.path(), &[]).expect("usable");
    let file = out.write_at("a.db", |path| fs::write(path, "abc")).expect("readable").expect("written");
    assert_eq!(file.bytes, 3);
    let failed = out.write_at("b.db", |_| Err::<(), _>("no")).expect("not a matter of the folder");
    assert_eq!(failed, Err("no"));
    out.commit().expect("committed");
    assert_eq!(content(temp.path()), expected([("a.db", "abc")]));
}

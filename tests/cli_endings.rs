//! How a run ends when it cannot go on: a reader that leaves, an interruption, a disk without room. A short message, the
//! exit code of the contract, no half-written folder, no panic.
#![cfg(unix)]

#[path = "support/program.rs"]
mod program;

use std::io::{BufRead, BufReader, Read, Write};
use std::path::{Path, PathBuf};
use std::process::{Child, Command, ExitStatus, Stdio};
use std::time::{Duration, Instant};

use program::{spallcast, text};
use tempfile::TempDir;

/// How long a run may take to end once there is a reason to: far more than it needs, so that only a hang fails.
const PATIENCE: Duration = Duration::from_secs(120);

fn folder_with_burn() -> (TempDir, PathBuf) {
    let folder = TempDir::new().expect("a folder");
    let ring = "[[-119.6,37.6],[-119.4,37.6],[-119.4,37.8],[-119.6,37.8],[-119.6,37.6]]";
    let burn = format!(
        "{{\"type\":\"FeatureCollection\",\"features\":[{{\"type\":\"Feature\",\"geometry\":{{\"type\":\"Polygon\",\
         \"coordinates\":[{ring}]}},\"properties\":{{\"burn_id\":\"b\",\"exposure\":\"crown\",\"residence_min\":3}}}}]}}"
    );
    let path = folder.path().join("burn.geojson");
    std::fs::write(&path, burn).expect("written");
    (folder, path)
}

/// One record a line. `cases` is the number of thermal cases: many make a run long.
fn records(n: usize, cases: usize) -> String {
    (0..n)
        .map(|i| {
            let diameter_m = 0.5 + 0.001 * (i % cases) as f64;
            format!(
                "{{\"type\":\"Feature\",\"geometry\":{{\"type\":\"Point\",\"coordinates\":[-119.5,37.7]}},\"properties\":\
                 {{\"boulder_id\":\"B-{i}\",\"rock\":\"granite\",\"diameter_m\":{diameter_m},\"slope_deg\":30}}}}\n"
            )
        })
        .collect()
}

/// Ends the run if the test gives up on it.
struct Running(Child);

impl Running {
    fn start(command: &mut Command) -> Running {
        Running(command.stdin(Stdio::piped()).stderr(Stdio::piped()).spawn().expect("starts"))
    }

    /// Hands the input in from a thread of its own; whoever does not take it all is no fault of the test.
    fn feed(&mut self, input: String) {
        let mut stdin = self.0.stdin.take().expect("piped");
        std::thread::spawn(move || {
            let _ = stdin.write_all(input.as_bytes());
        });
    }

    fn signal(&self, name: &str) {
        let sent = Command::new("kill").args(["-s", name, &self.0.id().to_string()]).status().expect("kill starts");
        assert!(sent.success());
    }

    fn end(mut self) -> (ExitStatus, String) {
        let start = Instant::now();
        let status = loop {
            match self.0.try_wait().expect("can be waited for") {
                Some(status) => break status,
                None if start.elapsed() > PATIENCE => panic!("the run did not end"),
                None => std::thread::sleep(Duration::from_millis(5)),
            }
        };
        let mut said = String::new();
        self.0.stderr.take().expect("piped").read_to_string(&mut said).expect("UTF-8");
        assert!(!said.contains("panicked"), "{said}");
        (status, said)
    }
}

impl Drop for Running {
    fn drop(&mut self) {
        let _ = self.0.kill();
        let _ = self.0.wait();
    }
}

fn program() -> Command {
    Command::new(assert_cmd::cargo::cargo_bin("spallcast"))
}

fn stream(burn: &Path) -> Command {
    let mut command = program();
    command.args(["assess", "--burn", text(burn), "--boulders", "-", "--out", "-", "--draws", "16"]);
    command
}

/// Everything in a folder, hidden entries too.
fn entries(folder: &Path) -> Vec<String> {
    let entries = std::fs::read_dir(folder).expect("a folder");
    let mut names: Vec<String> =
        entries.map(|e| e.expect("an entry").file_name().to_string_lossy().into_owned()).collect();
    names.sort();
    names
}

#[test]
fn a_reader_that_leaves_after_a_line_is_a_good_end() {
    let (_folder, burn) = folder_with_burn();
    let mut run = Running::start(stream(&burn).stdout(Stdio::piped()));
    run.feed(records(60_000, 3));
    let mut lines = BufReader::new(run.0.stdout.take().expect("piped"));
    let mut first = String::new();
    lines.read_line(&mut first).expect("a line");
    assert!(first.contains("\"boulder_id\":\"B-0\""), "{first}");
    drop(lines);
    let (status, said) = run.end();
    assert_eq!((status.code(), said.trim()), (Some(0), ""), "as after `| head -1`");
}

#[test]
fn a_reader_that_leaves_is_noticed_while_the_input_stays_open() {
    let (_folder, burn) = folder_with_burn();
    let mut run = Running::start(stream(&burn).stdout(Stdio::piped()));
    drop(run.0.stdout.take());
    // Two chunks and more; then the pipe says nothing and stays open.
    let mut stdin = run.0.stdin.take().expect("piped");
    stdin.write_all(records(3000, 1).as_bytes()).expect("taken");
    let (status, said) = run.end();
    assert_eq!((status.code(), said.trim()), (Some(0), ""));
    drop(stdin);
}

#[test]
fn an_interrupted_stream_ends_at_a_line() {
    for (signal, stays_open) in [("INT", false), ("TERM", true)] {
        let (_folder, burn) = folder_with_burn();
        let mut run = Running::start(stream(&burn).stdout(Stdio::piped()));
        let mut stdin = run.0.stdin.take().expect("piped");
        let feeding = std::thread::spawn(move || {
            let _ = stdin.write_all(records(if stays_open { 2048 } else { 200_000 }, 3).as_bytes());
            stdin
        });
        let mut lines = BufReader::new(run.0.stdout.take().expect("piped"));
        let mut output = String::new();
        lines.read_line(&mut output).expect("a line");
        run.signal(signal);
        lines.read_to_string(&mut output).expect("UTF-8");
        let (status, said) = run.end();
        drop(feeding.join());
        assert_eq!(status.code(), Some(1), "{signal}: {said}");
        assert_eq!(said.lines().count(), 1, "{said}");
        assert!(said.contains("interrupted"), "{said}");
        assert!(output.ends_with("}}\n"), "{signal}: the last line is whole");
        assert!(output.lines().count() < 200_000, "it did not run to the end");
        for line in output.lines() {
            let _: serde::de::IgnoredAny = serde_json::from_str(line).expect("each line is a record");
        }
    }
}

#[test]
fn an_interrupted_run_leaves_no_trace_and_old_results_whole() {
    for signal in ["INT", "TERM"] {
        let (folder, burn) = folder_with_burn();
        let boulders = folder.path().join("boulders.ndjson");
        std::fs::write(&boulders, records(20_000, 20_000)).expect("written");
        let before = entries(folder.path());
        let out = folder.path().join("made").join("results");
        let mut command = program();
        command.args(["assess", "--burn", text(&burn), "--boulders", text(&boulders), "--out", text(&out)]);
        let run = Running::start(&mut command);
        // The folder is tried before the long part: once it is there, the run is in it.
        let start = Instant::now();
        while !out.exists() {
            assert!(start.elapsed() < PATIENCE, "the run never began");
            std::thread::sleep(Duration::from_millis(2));
        }
        run.signal(signal);
        let (status, said) = run.end();
        assert_eq!(status.code(), Some(1), "{signal}: {said}");
        assert!(said.lines().any(|l| l.contains("interrupted") && l.contains("nothing was written")), "{said}");
        assert_eq!(said.matches("interrupted").count(), 1, "it is said once: {said}");
        assert_eq!(entries(folder.path()), before, "{signal}: the folders that were made are gone");
    }
}

/// Files over this many blocks of 512 bytes are refused to the run, as on a full disk.
const FILE_BLOCKS: &str = "40";

#[test]
#[cfg(feature = "gpkg")]
fn a_full_disk_leaves_no_trace_and_old_results_whole() {
    let (folder, burn) = folder_with_burn();
    let boulders = folder.path().join("boulders.ndjson");
    std::fs::write(&boulders, records(100, 2)).expect("written");
    let out = folder.path().join("results");
    let assess = |limit: &str, formats: &str| {
        // The shell ignores the signal of the limit, so that the program sees the error of the write.
        let script = format!("trap '' XFSZ; ulimit -f {limit}; exec \"$0\" \"$@\"");
        let mut command = Command::new("sh");
        command.arg("-c").arg(script).arg(assert_cmd::cargo::cargo_bin("spallcast"));
        command.args(["assess", "--burn", text(&burn), "--boulders", text(&boulders), "--out", text(&out)]);
        command.args(["--draws", "16", "--format", formats]).output().expect("starts")
    };
    let full = assess(FILE_BLOCKS, "geojson");
    let said = String::from_utf8_lossy(&full.stderr).into_owned();
    assert_eq!(full.status.code(), Some(1), "{said}");
    assert!(said.contains("the disk is full") && !said.contains("panicked"), "{said}");
    assert!(!out.exists(), "the folder that was made for the run is gone");

    let good = assess("unlimited", "geojson,gpkg");
    assert_eq!(good.status.code(), Some(0), "{}", String::from_utf8_lossy(&good.stderr));
    let contents = || -> Vec<(String, Vec<u8>)> {
        entries(&out).into_iter().map(|n| (n.clone(), std::fs::read(out.join(n)).expect("readable"))).collect()
    };
    let before = contents();
    let size = |package: bool| {
        let of_kind = before.iter().filter(|(name, _)| name.ends_with(".gpkg") == package);
        of_kind.map(|(_, bytes)| bytes.len()).max().expect("written")
    };
    // Room for every text and not for the package: there the database meets the limit.
    let between = size(false) + 4096;
    assert!(between < size(true), "the package is the largest file: {} and {}", size(false), size(true));
    for limit in [FILE_BLOCKS.to_owned(), (between / 512).to_string()] {
        let full = assess(&limit, "geojson,gpkg");
        let said = String::from_utf8_lossy(&full.stderr).into_owned();
        assert_eq!(full.status.code(), Some(1), "{limit}: {said}");
        assert!(said.contains("disk") && !said.contains("panicked"), "{limit}: {said}");
        assert!(contents() == before, "{limit}: the old results are as they were");
    }
}

#[test]
#[cfg(target_os = "linux")]
fn a_stream_into_a_full_device_fails_with_one_sentence() {
    let (_folder, burn) = folder_with_burn();
    let full = std::fs::OpenOptions::new().write(true).open("/dev/full").expect("Linux has it");
    let mut run = Running::start(stream(&burn).stdout(full));
    run.feed(records(5000, 2));
    let (status, said) = run.end();
    assert_eq!(status.code(), Some(1), "{said}");
    assert!(said.contains("cannot write") && said.contains("disk"), "{said}");
    assert_eq!(said.lines().count(), 1, "{said}");
}

#[test]
fn a_stream_tells_a_kind_of_finding_a_few_times_and_counts_the_rest() {
    let (_folder, burn) = folder_with_burn();
    let input: String = records(3000, 1).replace("\"slope_deg\":30", "\"slope_deg\":\"30\"");
    let mut command = spallcast();
    command.args(["assess", "--burn", text(&burn), "--boulders", "-", "--out", "-", "--draws", "16"]);
    let output = command.write_stdin(input).output().expect("starts");
    let said = String::from_utf8(output.stderr).expect("UTF-8");
    assert_eq!(said.lines().filter(|l| l.starts_with("note: ")).count(), 5, "{said}");
    assert!(said.contains("and 2995 more `number_as_text`"), "{said}");
}

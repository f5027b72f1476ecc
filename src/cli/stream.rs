//! Boulders in, boulders out, one line each, in constant memory.
//!
//! One thread reads, the pool works on what was read and writes its lines into memory, and this one hands them on in the
//! order of the input. Few chunks are under way at a time, so that memory does not grow with the stream; what does is the table
//! of names that were used (see [`spallcast::input::boulders`]).

use std::io::{self, Write};
use std::ops::ControlFlow;
use std::sync::mpsc::{SyncSender, sync_channel};

use rayon::prelude::*;

use spallcast::assess::Model;
use spallcast::input::boulders::Summary;
use spallcast::input::terrain::read_terrain;
use spallcast::input::{BoulderFeature, Duplicates, read_burns};
use spallcast::output::{BoulderResult, RunCounts, write_boulder_line};
use spallcast::rock::catalogue::Catalogue;

use super::assess::{Shared, read_inventory, source_columns};
use super::exit::{Exit, Stop};
use super::interrupt;
use super::messages::{Messages, RunningFindings};
use super::plan::{Plan, Source};

/// Boulders that are run at a time: enough to keep the threads busy, few enough to hold.
const CHUNK: usize = 1024;
/// Chunks that are read ahead.
const AHEAD: usize = 1;
/// What an interrupted stream leaves.
const LEFT: &str = "every line that was written is whole";

/// Runs a checked plan from records to lines.
pub fn run(plan: &Plan, messages: &Messages) -> Result<Exit, Stop> {
    if plan.trails.is_some() {
        return Err(Stop::Usage(
            "--out - writes boulders only; name a folder to get trails, which need all boulders at once".to_owned(),
        ));
    }
    if plan.strict {
        return Err(Stop::Usage(
            "--strict needs a folder for --out: a stream cannot take back what it wrote".to_owned(),
        ));
    }
    interrupt::watch(*messages, LEFT);
    let burns = read_burns(&plan.burn)?;
    messages.findings(plan.findings.iter().chain(&burns.findings));
    let terrain = plan
        .terrain
        .as_ref()
        .map(|path| read_terrain(path).map_err(|e| Stop::Failed(e.to_string())))
        .transpose()?
        .map(|read| read.terrain);
    let model = Model::new(plan.settings.clone(), plan.catalogue.clone()).map_err(|e| Stop::Failed(e.to_string()))?;
    let shared = Shared::new(&model, &burns.burns, terrain.as_ref());
    let (sender, chunks) = sync_channel(AHEAD);
    let (source, catalogue) = (plan.boulders.clone(), plan.catalogue.clone());
    // Not a scoped thread: when the output breaks, nobody waits for a reader that waits for its pipe.
    let reader = std::thread::spawn(move || read_chunks(&source, &catalogue, &sender));
    let mut findings = messages.running();
    let mut counts = RunCounts::default();
    let mut out = io::stdout().lock();
    for chunk in chunks {
        write_chunk(chunk, &shared, &mut out, &mut counts, &mut findings)?;
    }
    let read = reader.join().unwrap_or_else(|panic| std::panic::resume_unwind(panic));
    findings.end();
    messages.findings(&read?.findings);
    messages.say(&format!("{} boulders, {} assessed, {} not", counts.records, counts.assessed, counts.not_assessed));
    Ok(if counts.not_assessed > 0 { Exit::Partly } else { Exit::Done })
}

/// Reads to the end, or until nobody takes the chunks any more.
fn read_chunks(
    source: &Source,
    catalogue: &Catalogue,
    sender: &SyncSender<Vec<BoulderFeature>>,
) -> Result<Summary, Stop> {
    let mut chunk = Vec::with_capacity(CHUNK);
    let read = read_inventory(source, catalogue, Duplicates::RefuseLater, |feature| {
        chunk.push(feature);
        if chunk.len() == CHUNK && sender.send(std::mem::replace(&mut chunk, Vec::with_capacity(CHUNK))).is_err() {
            return ControlFlow::Break(());
        }
        ControlFlow::Continue(())
    });
    // What stands before damage in the input is still worth its lines.
    let _ = sender.send(chunk);
    read.map(|(summary, _)| summary)
}

/// Runs a chunk over the threads and writes its lines, all of them or, when the output breaks, as many as it took.
fn write_chunk(
    chunk: Vec<BoulderFeature>,
    shared: &Shared<'_>,
    out: &mut impl Write,
    counts: &mut RunCounts,
    findings: &mut RunningFindings,
) -> io::Result<()> {
    let lines = chunk.into_par_iter().map(|feature| -> io::Result<(BoulderResult, Vec<u8>)> {
        let worked = shared.work(feature);
        let source = source_columns(&worked);
        let mut result = BoulderResult::new(worked.feature, worked.assessment, shared.model.settings.horizon_days);
        result.source = source;
        let mut line = Vec::with_capacity(2048);
        write_boulder_line(&mut line, &result)?;
        Ok((result, line))
    });
    let lines: Vec<_> = lines.collect::<io::Result<_>>()?;
    let mut bytes = Vec::with_capacity(lines.iter().map(|(_, line)| line.len()).sum());
    for (result, line) in lines {
        result.feature.remarks.iter().chain(result.feature.boulder.as_ref().err()).for_each(|f| findings.add(f));
        counts.add(&result);
        bytes.extend_from_slice(&line);
    }
    let _whole_lines = interrupt::hold();
    out.write_all(&bytes)?;
    out.flush()
}

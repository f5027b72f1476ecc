//! `assess`: reads, runs the boulders over the threads, writes.

use std::collections::BTreeSet;
use std::io::Write;
use std::ops::ControlFlow;
use std::sync::MutexGuard;
use std::time::Instant;

use indicatif::{ProgressBar, ProgressStyle};
use jiff::ToSpan;
use jiff::civil::Date;
use rayon::prelude::*;

use spallcast::assess::cases::Cases;
use spallcast::assess::cover::{Burned, Cover};
use spallcast::assess::{Assessment, Model};
use spallcast::diagnostic::{Diagnostic, Severity};
use spallcast::flag::Flag;
use spallcast::input::burns::Burns;
use spallcast::input::terrain::read_terrain;
use spallcast::input::{
    BoulderFeature, Duplicates, STANDARD_INPUT, read_boulders, read_boulders_from, read_burns, read_trails,
    refuse_duplicates,
};
use spallcast::output::burns::burn_results;
use spallcast::output::{
    BoulderResult, LayerHead, OptionsRecord, OutputDirectory, RunCounts, RunRecord, SegmentRow, SourceColumns,
    write_boulders, write_burns, write_inspection, write_trails,
};
#[cfg(feature = "gpkg")]
use spallcast::output::{PackageHead, write_geopackage};
use spallcast::report::sld;
use spallcast::report::{self, PageInputs, ProfileOfBoulder, profiles::profile};
use spallcast::rock::catalogue::Catalogue;
use spallcast::rockfall::place::{Placed, doubtful_heights, place};
use spallcast::rockfall::source::SourceSummary;
use spallcast::rockfall::terrain::Terrain;
use spallcast::settings::Settings;
use spallcast::site::{Boulder, Burn, Trail};
use spallcast::trail::judge::Judged;
use spallcast::trail::survey::{Survey, Surveyed, survey};

use super::args::AssessArgs;
use super::exit::{Exit, Stop};
use super::interrupt;
use super::messages::Messages;
use super::plan::{Plan, Source, Target};
use super::{stream, summary};

/// What an interrupted run leaves.
const LEFT: &str = "nothing was written, earlier results are as they were";

/// Runs the main job.
pub fn run(args: &AssessArgs) -> Result<Exit, Stop> {
    run_plan(Plan::assess(args)?)
}

/// Runs a checked plan.
pub fn run_plan(plan: Plan) -> Result<Exit, Stop> {
    let messages = Messages { quiet: plan.quiet, json: plan.json_log };
    if let Some(threads) = plan.threads {
        // A pool that is already there (a second run in one process) keeps its size.
        let _ = rayon::ThreadPoolBuilder::new().num_threads(threads).build_global();
    }
    match plan.out.clone() {
        Some(Target::Stream) => stream::run(&plan, &messages),
        Some(Target::Folder(folder)) => {
            interrupt::watch(messages, LEFT);
            Job::read(plan, &messages)?.finish(&folder, &messages)
        }
        None => unreachable!("a plan of assess has a target"),
    }
}

/// What is the same for every boulder of a run.
pub(super) struct Shared<'a> {
    pub(super) model: &'a Model,
    pub(super) cases: Cases<'a>,
    pub(super) burns: &'a [Burn],
    pub(super) burned: Burned<'a>,
    pub(super) terrain: Option<&'a Terrain>,
}

/// One boulder, run.
pub(super) struct Worked {
    pub(super) feature: BoulderFeature,
    pub(super) assessment: Assessment,
    source: Option<SourceSummary>,
    placed: Option<Placed>,
    within: Vec<usize>,
}

impl<'a> Shared<'a> {
    /// What the boulders of a run share; no case is solved yet.
    pub(super) fn new(model: &'a Model, burns: &'a [Burn], terrain: Option<&'a Terrain>) -> Shared<'a> {
        Shared { model, cases: Cases::new(model), burns, burned: Burned::new(burns), terrain }
    }

    /// Runs one record.
    pub(super) fn work(&self, feature: BoulderFeature) -> Worked {
        let boulder = match &feature.boulder {
            Ok(boulder) => boulder,
            Err(finding) => {
                let assessment = Assessment::not_assessed(finding.sentence());
                return Worked { feature, assessment, source: None, placed: None, within: Vec::new() };
            }
        };
        let covers = self.burned.at(&boulder.position);
        let covering: Vec<&Burn> = covers.iter().map(|(b, _)| *b).collect();
        let within =
            covering.iter().filter_map(|burn| self.burns.iter().position(|b| std::ptr::eq(b, *burn))).collect();
        let placed = place(boulder, self.terrain, &self.model.settings.rockfall);
        let case = self.cases.solve(boulder, &covering);
        let mut assessment = case.assessment.clone();
        if covers.iter().any(|(_, cover)| *cover == Cover::Edge) {
            assessment.flags.insert(Flag::OnBurnEdge);
        }
        if feature.remarks.iter().any(|r| r.severity == Severity::Warning) {
            assessment.flags.insert(Flag::ValueSuspicious);
        }
        if feature.remarks.iter().any(|r| r.code == "number_as_text") {
            assessment.flags.insert(Flag::NumberAsText);
        }
        let source = (!case.spalls.is_empty()).then(|| self.model.source_of(boulder, &placed, &case.spalls));
        Worked { assessment, source, placed: Some(placed), within, feature }
    }
}

/// The columns of a source. Flags of the place go with it where there is a source at all.
pub(super) fn source_columns(worked: &Worked) -> SourceColumns {
    let Some(source) = &worked.source else { return SourceColumns::default() };
    let mut flags = source.flags.clone();
    flags.extend(worked.placed.iter().flat_map(|p| p.flags.iter().copied()));
    SourceColumns {
        p_source: source.p_source,
        p_source_low: source.p_source_low,
        p_source_high: source.p_source_high,
        p_release: source.p_release,
        p_fragment: source.p_fragment,
        mode: source.main_mode().map(|m| m.word()),
        basis: source.basis.word(),
        fragment_m3_p50: source.fragment_m3_p50,
        reason: Some(source.sentence()),
        flags,
    }
}

/// Inputs read and boulders run, before anything is written.
struct Job {
    plan: Plan,
    record: RunRecord,
    model: Model,
    burns: Burns,
    trails: Vec<Trail>,
    terrain: Option<Terrain>,
    worked: Vec<Worked>,
    as_of: Date,
    directory: OutputDirectory,
    /// Goes after the folder: whoever interrupts waits until it is clean.
    gate: MutexGuard<'static, ()>,
    clock: Instant,
}

impl Job {
    fn read(plan: Plan, messages: &Messages) -> Result<Job, Stop> {
        let clock = Instant::now();
        let mut record = RunRecord::new(&plan.settings);
        record.started_at = Some(jiff::Timestamp::now().to_string());
        record.options = options(&plan);
        let as_of = day_of_run(&plan.settings);
        let mut findings = plan.findings.clone();
        if let Some(file) = &plan.settings_file {
            record.input("settings", file, None);
        }

        let burns = read_burns(&plan.burn)?;
        record.input("burn", &burns.file, Some(burns.burns.len() as u64));
        findings.extend(burns.findings.iter().cloned());
        let mut trails = Vec::new();
        if let Some(path) = &plan.trails {
            let read = read_trails(path)?;
            record.input("trails", &read.file, Some(read.trails.len() as u64));
            findings.extend(read.findings);
            trails = read.trails;
        }
        let mut terrain = None;
        if let Some(path) = &plan.terrain {
            let read = read_terrain(path).map_err(|e| Stop::Failed(e.to_string()))?;
            findings.extend(read.findings);
            record.input("terrain", &spallcast::input::hashed(path)?, None);
            terrain = Some(read.terrain);
        }
        let mut features: Vec<BoulderFeature> = Vec::new();
        let sink = |feature| {
            features.push(feature);
            ControlFlow::Continue(())
        };
        let (read, name) = read_inventory(&plan.boulders, &plan.catalogue, Duplicates::LeaveToCaller, sink)?;
        refuse_duplicates(&mut features, &name);
        if terrain.is_none() {
            findings.extend(doubt_heights(&mut features, &name));
        }
        record.input("boulders", &read.file, Some(read.records as u64));
        findings.extend(read.findings);
        for feature in &features {
            findings.extend(feature.remarks.iter().cloned());
            findings.extend(feature.boulder.as_ref().err().cloned());
        }
        record.findings(&findings);
        record.timing("reading", clock.elapsed().as_secs_f64());

        // The folder is tried before the long part.
        let inputs: Vec<&std::path::Path> = [Some(&plan.burn), plan.trails.as_ref(), plan.terrain.as_ref()]
            .into_iter()
            .flatten()
            .map(|p| p.as_path())
            .chain(match &plan.boulders {
                Source::File(path) => Some(path.as_path()),
                Source::Stream => None,
            })
            .collect();
        let Some(Target::Folder(folder)) = &plan.out else { unreachable!("a job writes into a folder") };
        let gate = interrupt::hold();
        let directory = OutputDirectory::prepare(folder, &inputs).map_err(|e| Stop::Failed(e.to_string()))?;
        messages.findings(&findings);

        let clock_run = Instant::now();
        let model =
            Model::new(plan.settings.clone(), plan.catalogue.clone()).map_err(|e| Stop::Failed(e.to_string()))?;
        let shared = Shared::new(&model, &burns.burns, terrain.as_ref());
        let bar = progress(features.len() as u64, messages);
        let worked: Vec<Worked> = features
            .into_par_iter()
            .map(|feature| {
                interrupt::check(LEFT)?;
                let worked = shared.work(feature);
                bar.inc(1);
                Ok(worked)
            })
            .collect::<Result<_, Stop>>()
            .inspect_err(|_| bar.finish_and_clear())?;
        bar.finish_and_clear();
        drop(shared);
        record.timing("boulders", clock_run.elapsed().as_secs_f64());
        Ok(Job { plan, record, model, burns, trails, terrain, worked, as_of, directory, gate, clock })
    }

    /// Surveys the trails, ranks, writes and sums up.
    fn finish(self, folder: &std::path::Path, messages: &Messages) -> Result<Exit, Stop> {
        let Job { plan, mut record, model, burns, trails, terrain, worked, as_of, gate, mut directory, clock } = self;
        let settings = &plan.settings;
        let clock_trails = Instant::now();
        let known: Vec<usize> = (0..worked.len()).filter(|i| worked[*i].feature.boulder.is_ok()).collect();
        let surveyed: Vec<Surveyed> = known.iter().map(|i| surveyed(&worked[*i], &burns.burns)).collect();
        let survey = survey(&trails, &surveyed, terrain.as_ref(), settings, as_of);
        drop(surveyed);
        interrupt::check(LEFT)?;
        record.timing("trails", clock_trails.elapsed().as_secs_f64());
        if survey.doubtful_trail_heights > 0 {
            record.findings([&trail_height_finding(&plan, survey.doubtful_trail_heights)]);
        }

        let mut results: Vec<BoulderResult> = worked
            .into_iter()
            .map(|worked| {
                let source = source_columns(&worked);
                let mut result = BoulderResult::new(worked.feature, worked.assessment, settings.horizon_days);
                result.within = worked.within;
                result.source = source;
                result
            })
            .collect();
        let order = rank(&mut results, &known, &survey);
        let counts = RunCounts::of(&results);
        let partly = counts.not_assessed > 0;
        if plan.strict && partly {
            return Err(Stop::Failed(format!(
                "{} of {} boulders could not be assessed, and --strict was asked for; nothing was written. Correct the \
                 records named above, or leave --strict out",
                counts.not_assessed, counts.records
            )));
        }

        let clock_writing = Instant::now();
        let valid_until = as_of.saturating_add((settings.trail.review_days.clamp(0.0, 36_500.0) as i64).days());
        let head = LayerHead {
            program_version: env!("CARGO_PKG_VERSION"),
            catalogue_version: Catalogue::VERSION,
            horizon_days: settings.horizon_days,
            valid_until: Some(valid_until),
        };
        let rows = segment_rows(&survey, &trails);
        let profiles = first_profiles(&model, &results, &order, &burns);
        let burn_rows = burn_results(&burns, &results);
        let mut write = |name: &str, fill: &mut dyn FnMut(&mut dyn Write) -> std::io::Result<()>| {
            interrupt::check(LEFT)?;
            directory.write(name, |out| fill(out)).map_err(|e| Stop::Failed(e.to_string()))
        };
        write("boulders.sld", &mut |out| out.write_all(sld::boulders().as_bytes()))?;
        write("boulders.geojson", &mut |out| write_boulders(out, &head, &results))?;
        write("burns.geojson", &mut |out| write_burns(out, &head, &burn_rows))?;
        write("inspection.csv", &mut |out| write_inspection(out, &results, &order))?;
        if plan.trails.is_some() {
            write("trails.geojson", &mut |out| write_trails(out, &head, &rows))?;
            write("trails.sld", &mut |out| out.write_all(sld::trails().as_bytes()))?;
        }
        record.valid_until = Some(valid_until.to_string());
        record.counts = counts;
        let page = report::page(&PageInputs {
            results: &results,
            order: &order,
            burns: &burn_rows,
            rows: &rows,
            record: &record,
            valid_until,
            profiles: &profiles,
        });
        write("report.html", &mut |out| out.write_all(page.as_bytes()))?;
        #[cfg(feature = "gpkg")]
        if plan.formats.iter().any(|f| f == "gpkg") {
            let trails = plan.trails.is_some().then_some(rows.as_slice());
            let head = PackageHead { layer: &head, as_of };
            directory
                .write_at("spallcast.gpkg", |path| write_geopackage(path, &results, &burn_rows, trails, &head))
                .map_err(|e| Stop::Failed(e.to_string()))?
                .map_err(|e| Stop::Failed(e.to_string()))?;
        }
        record.timing("writing", clock_writing.elapsed().as_secs_f64());
        record.timing("all", clock.elapsed().as_secs_f64());
        record.files = directory.written().to_vec();
        let text = record.json();
        directory.write("run.json", |out| out.write_all(text.as_bytes())).map_err(|e| Stop::Failed(e.to_string()))?;
        interrupt::check(LEFT)?;
        let committed = directory.commit().map_err(|e| Stop::Failed(e.to_string()))?;
        for kept in &committed.kept_edits {
            messages.say(&format!("kept a copy of an edited result: {kept}"));
        }
        drop(gate);
        for line in summary::lines(&results, &order, &rows, &record, folder, valid_until) {
            messages.say(&line);
        }
        Ok(if partly { Exit::Partly } else { Exit::Done })
    }
}

/// The inventory from wherever it comes.
pub(super) fn read_inventory(
    source: &Source,
    catalogue: &Catalogue,
    duplicates: Duplicates,
    sink: impl FnMut(BoulderFeature) -> ControlFlow<()>,
) -> Result<(spallcast::input::boulders::Summary, String), Stop> {
    Ok(match source {
        Source::File(path) => (read_boulders(path, catalogue, duplicates, sink)?, path.display().to_string()),
        Source::Stream => {
            let stdin = std::io::stdin();
            (read_boulders_from(stdin, STANDARD_INPUT, catalogue, duplicates, sink)?, STANDARD_INPUT.to_owned())
        }
    })
}

fn surveyed<'a>(worked: &'a Worked, burns: &[Burn]) -> Surveyed<'a> {
    let boulder: &Boulder = worked.feature.boulder.as_ref().expect("only boulders that could be read are surveyed");
    let not_assessed = worked.source.is_none().then_some(worked.assessment.reason.as_str());
    Surveyed {
        judged: Judged {
            boulder,
            placed: worked.placed.as_ref().expect("a boulder that could be read has a place"),
            source: worked.source.as_ref(),
            not_assessed,
        },
        // The barest ground that any covering burn reports.
        ground: worked.within.iter().filter_map(|b| burns[*b].ground_after).max(),
    }
}

/// Boulders whose heat and stress the page shows through depth.
const PROFILED: usize = 6;

/// Profiles of the first boulders in the order of inspection that were assessed.
fn first_profiles(model: &Model, results: &[BoulderResult], order: &[usize], burns: &Burns) -> Vec<ProfileOfBoulder> {
    let assessed = order.iter().map(|i| &results[*i]).filter(|r| r.assessment.heat.is_some()).take(PROFILED);
    assessed
        .filter_map(|result| {
            let boulder = result.feature.boulder.as_ref().ok()?;
            let covering: Vec<&Burn> = result.within.iter().map(|b| &burns.burns[*b]).collect();
            profile(model, boulder, &covering)
        })
        .collect()
}

/// Gives every record its rank: those that could be read by the survey, the others as if anything were possible.
fn rank(results: &mut [BoulderResult], known: &[usize], survey: &Survey) -> Vec<usize> {
    let mut order: Vec<usize> = Vec::with_capacity(results.len());
    let mut by_rank: Vec<usize> = known.to_vec();
    let rank_of: std::collections::HashMap<usize, usize> =
        known.iter().copied().zip(survey.ranks.iter().copied()).collect();
    by_rank.sort_by_key(|i| rank_of[i]);
    let known_set: BTreeSet<usize> = known.iter().copied().collect();
    let mut unread: Vec<usize> = (0..results.len()).filter(|i| !known_set.contains(i)).collect();
    let told_apart = |i: &usize| (results[*i].id().to_owned(), results[*i].feature.properties.as_json().to_owned());
    unread.sort_by_cached_key(told_apart);
    // A record that could not be read may be any boulder of the run: it stands in the middle, never last.
    let middle = by_rank.len() / 2;
    order.extend(&by_rank[..middle]);
    order.extend(unread);
    order.extend(&by_rank[middle..]);
    for (rank, index) in (1..).zip(&order) {
        results[*index].inspection_rank = Some(rank);
    }
    order
}

fn segment_rows(survey: &Survey, trails: &[Trail]) -> Vec<SegmentRow> {
    survey
        .segments
        .iter()
        .zip(&survey.results)
        .map(|(segment, result)| {
            let trail = &trails[segment.trail];
            SegmentRow {
                trail_id: trail.id.clone(),
                name: trail.name.clone(),
                segment: segment.clone(),
                result: result.clone(),
            }
        })
        .collect()
}

/// Heights that look wrong beside the others are not used for trails, so that nothing or the raster takes their place. A
/// boulder's own numbers and flags do not depend on its neighbours, so the doubt stands in the run record alone; where there
/// is a raster, each height is held against that instead.
fn doubt_heights(features: &mut [BoulderFeature], file: &str) -> Vec<Diagnostic> {
    let heights: Vec<Option<f64>> =
        features.iter().map(|f| f.boulder.as_ref().ok().and_then(|b| b.position.height_m)).collect();
    let mut findings = Vec::new();
    for (feature, doubtful) in features.iter_mut().zip(doubtful_heights(&heights)) {
        let Ok(boulder) = &mut feature.boulder else { continue };
        if doubtful && let Some(height) = boulder.position.height_m.take() {
            findings.push(
                Diagnostic::new(Severity::Warning, "height_unusual", file)
                    .about("boulder", Some(&boulder.id))
                    .property("elevation_m", height.to_string())
                    .expected("metres, like its neighbours")
                    .remedy("correct it; feet or a zero are the likely cause. It was not used"),
            );
        }
    }
    findings
}

fn trail_height_finding(plan: &Plan, count: usize) -> Diagnostic {
    let file = plan.trails.as_ref().map(|p| p.display().to_string()).unwrap_or_default();
    Diagnostic::new(Severity::Warning, "height_unusual", file)
        .about("trail", None)
        .found(format!("{count} vertices differ from the raster's height by more than the tolerance"))
        .expected("heights in metres above the raster's datum")
        .remedy("check the trail's heights; the raster's were used")
}

fn day_of_run(settings: &Settings) -> Date {
    settings.trail.as_of.unwrap_or_else(|| jiff::Zoned::now().date())
}

fn options(plan: &Plan) -> OptionsRecord {
    let text = |p: &std::path::Path| p.display().to_string();
    OptionsRecord {
        burn: Some(text(&plan.burn)),
        boulders: Some(match &plan.boulders {
            Source::File(path) => text(path),
            Source::Stream => "-".to_owned(),
        }),
        trails: plan.trails.as_deref().map(text),
        terrain: plan.terrain.as_deref().map(text),
        settings: plan.settings_file.as_ref().map(|f| f.name.clone()),
        out: match &plan.out {
            Some(Target::Folder(folder)) => Some(text(folder)),
            Some(Target::Stream) => Some("-".to_owned()),
            None => None,
        },
        threads: plan.threads,
        format: plan.formats.clone(),
        strict: plan.strict,
        quiet: plan.quiet,
        json_log: plan.json_log,
    }
}

fn progress(length: u64, messages: &Messages) -> ProgressBar {
    if messages.quiet || messages.json {
        return ProgressBar::hidden();
    }
    // Silent without a terminal.
    let style = "{bar:40} {pos}/{len} boulders, {per_sec}, {eta} left";
    ProgressBar::new(length).with_style(ProgressStyle::with_template(style).expect("the template is well formed"))
}

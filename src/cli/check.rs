//! `check`: reads everything, reports every finding, computes nothing.

use std::io::Write;
use std::ops::ControlFlow;

use spallcast::assess::cover::Burned;
use spallcast::assess::fires::fires_at;
use spallcast::diagnostic::{Diagnostic, Severity};
use spallcast::input::{
    BoulderFeature, Duplicates, read_boulders, read_boulders_from, read_burns, read_trails, refuse_duplicates,
};
use spallcast::output::message::json_line;

use super::args::CheckArgs;
use super::exit::{Exit, Stop};
use super::plan::{Plan, Source};

/// Reports on standard output: the findings are the result here.
pub fn run(args: &CheckArgs) -> Result<Exit, Stop> {
    let (plan, _) = Plan::inputs(&args.inputs)?;
    let mut findings = plan.findings.clone();
    let burns = read_burns(&plan.burn)?;
    findings.extend(burns.findings);
    let burned = Burned::new(&burns.burns);

    let mut features: Vec<BoulderFeature> = Vec::new();
    let sink = |feature| {
        features.push(feature);
        ControlFlow::Continue(())
    };
    let (summary, name) = match &plan.boulders {
        Source::File(path) => {
            (read_boulders(path, &plan.catalogue, Duplicates::LeaveToCaller, sink)?, path.display().to_string())
        }
        Source::Stream => {
            let name = spallcast::input::STANDARD_INPUT;
            let stdin = std::io::stdin();
            (read_boulders_from(stdin, name, &plan.catalogue, Duplicates::LeaveToCaller, sink)?, name.to_owned())
        }
    };
    findings.extend(summary.findings);
    refuse_duplicates(&mut features, &name);
    let mut usable = 0usize;
    for feature in features {
        findings.extend(feature.remarks);
        match feature.boulder {
            Err(finding) => findings.push(finding),
            Ok(boulder) => {
                let covering: Vec<_> = burned.at(&boulder.position).into_iter().map(|(b, _)| b).collect();
                match fires_at(&boulder, &covering, &mut Default::default()) {
                    Ok(_) => usable += 1,
                    Err(reason) => findings.push(
                        Diagnostic::new(Severity::Warning, "no_fire", &name)
                            .about("boulder", Some(&boulder.id))
                            .found(reason),
                    ),
                }
            }
        }
    }
    let mut trails = 0;
    if let Some(path) = &plan.trails {
        let read = read_trails(path)?;
        findings.extend(read.findings);
        trails = read.trails.len();
    }
    if !args.quiet {
        let mut out = std::io::stdout().lock();
        for finding in &findings {
            if args.json_log {
                writeln!(out, "{}", json_line(finding.severity.word(), &finding.to_string(), Some(finding)))?;
            } else {
                writeln!(out, "{}: {finding}", finding.severity.word())?;
            }
        }
        let count = |severity| findings.iter().filter(|f| f.severity == severity).count();
        let closing = format!(
            "{} burns, {} boulder records of which {usable} can be assessed, {trails} trails; {} refused, {} warnings, {} notes",
            burns.burns.len(),
            summary.records,
            count(Severity::Refusal),
            count(Severity::Warning),
            count(Severity::Note),
        );
        if args.json_log {
            writeln!(out, "{}", json_line("summary", &closing, None))?;
        } else {
            writeln!(out, "{closing}")?;
        }
        out.flush()?;
    }
    Ok(match (findings.is_empty(), args.strict) {
        (true, _) => Exit::Done,
        (false, true) => Exit::Failed,
        (false, false) => Exit::Partly,
    })
}

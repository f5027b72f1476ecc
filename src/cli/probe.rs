//! `probe`: one boulder or one described rock in detail.

use std::collections::BTreeSet;
use std::io::Write;
use std::ops::ControlFlow;

use spallcast::assess::Model;
use spallcast::assess::cover::Burned;
use spallcast::assess::draws::Body;
use spallcast::assess::fires::fires_at;
use spallcast::assess::probe::{self, Fixed, History, INITIAL_K};
use spallcast::assess::standing::{Surroundings, statics};
use spallcast::assess::summary::DrawSummary;
use spallcast::bounds::bound;
use spallcast::fire::exposure::ExposureClass;
use spallcast::input::terrain::read_terrain;
use spallcast::input::{Duplicates, read_boulders, read_burns, read_series, read_settings, read_trails};
use spallcast::output::probe_source::Standing;
use spallcast::output::probe_table::{self, EnsembleRun, Subject};
use spallcast::report::probe_bands;
use spallcast::report::probe_plot::{self, ProbePlot};
use spallcast::rock::Property;
use spallcast::rock::catalogue::Catalogue;
use spallcast::rockfall::place::{Placed, place};
use spallcast::rockfall::release::StaticsInputs;
use spallcast::rockfall::source::SourceBasis;
use spallcast::rockfall::terrain::Terrain;
use spallcast::settings::Settings;
use spallcast::site::{Boulder, Burn, HeatingRecord, Kind, Position, RockChoice, StandingRecord, Trail};
use spallcast::trail::judge::Judged;
use spallcast::units::{ICE_POINT_K, MM_PER_M, SECONDS_PER_MINUTE, W_PER_KW};

use super::args::ProbeArgs;
use super::exit::{Exit, Stop};
use super::messages::Messages;
use super::probe_picture;
use super::rocks::find;

/// Depths reported when none are asked for, mm.
const DEPTHS_MM: [f64; 9] = [0.0, 1.0, 2.0, 5.0, 10.0, 20.0, 50.0, 100.0, 200.0];

/// Runs a probe and prints it.
pub fn run(args: &ProbeArgs, messages: &Messages) -> Result<Exit, Stop> {
    if let Some(path) = &args.plot {
        probe_picture::check(path)?;
    }
    let file = args.inputs.settings.as_deref().map(read_settings).transpose()?;
    let (mut settings, catalogue) =
        file.map_or_else(|| (Settings::default(), Catalogue::embedded()), |f| (f.settings, f.catalogue));
    let (boulder, burns) = subject(args, &catalogue, messages)?;
    let fixed = fixed(&args.set)?;
    let depth_m: Vec<f64> = ascending("--depths-mm", args.depths_mm.as_deref().unwrap_or(&DEPTHS_MM), 0.0, 1e5)?
        .iter()
        .map(|z| z / MM_PER_M)
        .collect();
    let time_s = ascending("--times-s", args.times_s.as_deref().unwrap_or(&[]), 0.0, 1e8)?;

    let terrain = args
        .inputs
        .terrain
        .as_ref()
        .map(|path| read_terrain(path).map_err(|e| Stop::Failed(e.to_string())))
        .transpose()?
        .map(|read| read.terrain);
    let trails = args.inputs.trails.as_deref().map(read_trails).transpose()?.map(|read| read.trails);
    let placed = place(&boulder, terrain.as_ref(), &settings.rockfall);
    // A boulder of an inventory whose standing is known is a source: that takes the ensemble, with or without --draws.
    let stands = args.id.is_some()
        && args.series.is_none()
        && StaticsInputs::of(&boulder, placed.raster_slope_deg).basis() != SourceBasis::None;
    // The medians need no points of their own: the smallest set will do.
    let default_draws = stands.then_some(settings.draws);
    let wanted_draws = args.draws.map(|d| d as usize).or(default_draws).map(Settings::whole_replicates);
    settings.draws = wanted_draws.unwrap_or(Settings::REPLICATES);
    settings.seed = args.seed.unwrap_or(settings.seed);
    let model = Model::new(settings, catalogue).map_err(|e| Stop::Failed(e.to_string()))?;
    let rocks = model.rocks_of(&boulder.rock);
    let (first, _) = *rocks.first().ok_or_else(|| Stop::Usage("the rock is not in the catalogue".to_owned()))?;
    if rocks.len() > 1 {
        messages.say(&format!(
            "the rock is not recorded; the medians are those of {}, the first of the mixture",
            model.tables.rocks[first].rock.name
        ));
    }
    let table = &model.tables.rocks[first];
    let body = Body::of(&boulder);
    let covering: Vec<&Burn> = Burned::new(&burns).at(&boulder.position).into_iter().map(|(b, _)| b).collect();
    let mut boulder = boulder;
    for (property, value) in &fixed.properties {
        boulder.heating.properties.retain(|(p, _)| p != property);
        boulder.heating.properties.push((*property, *value));
    }
    let mut all_fixed = fixed.clone();
    all_fixed.properties.splice(
        0..0,
        boulder.heating.properties.iter().copied().filter(|(p, _)| !fixed.properties.iter().any(|(q, _)| q == p)),
    );
    if let (Some(kappa), false) =
        (boulder.heating.diffusivity_m2_s, fixed.properties.iter().any(|(p, _)| *p == Property::Diffusivity))
    {
        all_fixed.properties.push((Property::Diffusivity, kappa));
    }
    all_fixed.heated_share = fixed.heated_share.or(boulder.heating.heated_fraction);

    let (history, exposure) = match &args.series {
        Some(path) => {
            let emissivity = all_fixed
                .properties
                .iter()
                .find(|(p, _)| *p == Property::Emissivity)
                .map_or_else(|| table.rock.figure(Property::Emissivity).distribution.median(), |(_, v)| *v);
            let (series, _) = read_series(path, emissivity, fixed.initial_k.unwrap_or(INITIAL_K))?;
            (History::Series(series), None)
        }
        None => {
            let mut flags = BTreeSet::new();
            let fires = fires_at(&boulder, &covering, &mut flags).map_err(Stop::Failed)?;
            if fires.len() > 1 {
                messages.say("several fires or stages reach this boulder; the medians are those of the first");
            }
            let word = fires[0].exposure_word();
            (History::Fire(fires[0].clone()), Some(word))
        }
    };
    if let (History::Series(series), Some(last)) = (&history, time_s.last())
        && *last > series.time_s[series.time_s.len() - 1]
    {
        let end = series.time_s[series.time_s.len() - 1];
        return Err(Stop::Usage(format!(
            "--times-s asks for {last} s, but the series ends at {end} s after its start"
        )));
    }
    let front = model.settings.spall.flame_front_width_m;
    let median = probe::median_draw(table, &body, &history, &all_fixed, boulder.heating.log_diameter_m, front)
        .map_err(|e| Stop::Usage(e.to_string()))?;
    let mut spall = model.settings.spall.clone();
    // On the medians a plate stays where it is, so that one history is followed.
    spall.slab_leaves_probability = 0.0;
    let result = probe::run(table, &body, &history, &median, &depth_m, &time_s, &spall);
    let (ensemble, standing) = match (wanted_draws, &args.series) {
        (Some(_), Some(_)) => {
            return Err(Stop::Usage("--draws samples the fire too and cannot be combined with --series".to_owned()));
        }
        (Some(draws), None) => {
            if fixed != (Fixed { properties: fixed.properties.clone(), ..Fixed::default() }) {
                messages.say(
                    "the draws sample the start, the heated share and the fire; what --set says of them holds for the medians",
                );
            }
            let (assessment, summaries) = model.assess_with_draws(&boulder, &covering);
            let around = Around { placed, trails: trails.as_deref(), terrain: terrain.as_ref() };
            let standing = args.id.is_some().then(|| standing(&model, &boulder, &covering, &summaries, around));
            (Some(EnsembleRun { draws, seed: model.settings.seed, assessment }), standing)
        }
        (None, _) => (None, None),
    };
    let subject = Subject { name: boulder.id.clone(), rock: table.rock.name.clone(), exposure };
    if let Some(folder) = &args.csv {
        let failed = |e: String| Stop::Failed(format!("{}: {e}", folder.display()));
        let files = probe_table::csv_files(&result).map_err(|e| failed(e.to_string()))?;
        std::fs::create_dir_all(folder).map_err(|e| failed(e.to_string()))?;
        for (name, text) in files {
            std::fs::write(folder.join(name), text).map_err(|e| failed(e.to_string()))?;
        }
    }
    if let Some(path) = &args.plot {
        let deepest_m = probe_picture::deepest_m(&history, &median, body.convex_radius_m());
        let depths = probe_plot::plot_depths(&depth_m, deepest_m);
        let fine = probe::run(table, &body, &history, &median, &depths, &[], &spall);
        // The draws are those of the ensemble above, seen at fixed moments.
        let bands = match (&history, &ensemble) {
            (History::Fire(fire), Some(_)) => {
                let moments = probe_bands::moments(fine.time_s.last().copied().unwrap_or(1.0));
                Some(model.temperature_bands(&boulder, fire, &depth_m, &moments))
            }
            _ => None,
        };
        let plot = ProbePlot {
            subject: &subject,
            probe: &fine,
            curve_depth_m: &depth_m,
            curve_time_s: &time_s,
            compressive: probe_picture::strength(
                table,
                Property::CompressiveStrength,
                median.draw.compressive_strength_pa,
                &all_fixed,
            ),
            slab: probe_picture::strength(table, Property::TensileStrength, fine.outcome.strength_pa, &all_fixed),
            ensemble: ensemble.as_ref(),
            bands: bands.as_ref(),
        };
        probe_picture::write(path, &plot, args.plot_width_px)?;
    }
    let text = if args.json {
        probe_table::json(&subject, &result, ensemble.as_ref(), standing.as_ref())
    } else {
        probe_table::text(&subject, &result, ensemble.as_ref(), standing.as_ref())
    };
    let mut out = std::io::stdout().lock();
    out.write_all(text.as_bytes())?;
    out.flush()?;
    Ok(Exit::Done)
}

/// What lies around a probed boulder.
struct Around<'a> {
    placed: Placed,
    trails: Option<&'a [Trail]>,
    terrain: Option<&'a Terrain>,
}

/// The boulder as a source, its reach and what would change the answer.
fn standing(
    model: &Model,
    boulder: &Boulder,
    covering: &[&Burn],
    draws: &[DrawSummary],
    around: Around<'_>,
) -> Standing {
    let Around { placed, trails, terrain } = around;
    let source = model.source(boulder, &placed, draws);
    let inputs = StaticsInputs::of(boulder, placed.raster_slope_deg);
    let statics = statics(&inputs, model.mean_base_retreat_m(draws), &model.settings.rockfall);
    let judged = Judged { boulder, placed: &placed, source: Some(&source), not_assessed: None };
    let ground = covering.iter().filter_map(|burn| burn.ground_after).max();
    let stretches = trails
        .map(|trails| model.stretches(boulder, &placed, judged.width_m(), Surroundings { trails, terrain, ground }));
    let sensitivity = model.sensitivity(boulder, &placed, covering);
    Standing { placed, source, statics, stretches, with_terrain: terrain.is_some(), sensitivity }
}

/// The boulder to probe and the burns to place it in.
fn subject(args: &ProbeArgs, catalogue: &Catalogue, messages: &Messages) -> Result<(Boulder, Vec<Burn>), Stop> {
    let exposure = args
        .exposure
        .as_deref()
        .map(|word| {
            ExposureClass::parse(word).ok_or_else(|| {
                let known = ExposureClass::ALL.iter().map(|c| c.word()).collect::<Vec<_>>().join(", ");
                Stop::Usage(format!("--exposure {word:?} is not a class; expected one of {known}"))
            })
        })
        .transpose()?;
    let residence_s = args
        .residence_min
        .map(|minutes| in_range("--residence-min", "residence_min", minutes).map(|m| m * SECONDS_PER_MINUTE))
        .transpose()?;
    if let Some(id) = &args.id {
        let Some(path) = args.inputs.boulders.as_deref() else {
            return Err(Stop::Usage("--id needs --boulders FILE".to_owned()));
        };
        let burns = args.inputs.burn.as_deref().map(read_burns).transpose()?.map(|b| b.burns).unwrap_or_default();
        let mut found = None;
        read_boulders(path, catalogue, Duplicates::LeaveToCaller, |feature| {
            if feature.id.as_deref() == Some(id) {
                found = Some(feature);
                return ControlFlow::Break(());
            }
            ControlFlow::Continue(())
        })?;
        let feature =
            found.ok_or_else(|| Stop::Failed(format!("{}: there is no boulder {id:?} in it", path.display())))?;
        messages.findings(&feature.remarks);
        let mut boulder = feature.boulder.map_err(|finding| Stop::Failed(finding.to_string()))?;
        boulder.heating.exposure = exposure.or(boulder.heating.exposure);
        boulder.heating.residence_s = residence_s.or(boulder.heating.residence_s);
        return Ok((boulder, burns));
    }
    let name = args.rock.as_deref().unwrap_or_default();
    let rock = find(catalogue, name)?;
    let radius_m = match (args.diameter_m, args.flat) {
        (Some(diameter), false) => Some(0.5 * in_range("--diameter-m", "diameter_m", diameter)?),
        (None, true) => None,
        _ => return Err(Stop::Usage("give --diameter-m D for a boulder, or --flat for a face".to_owned())),
    };
    if exposure.is_none() && args.series.is_none() && residence_s.is_none() {
        return Err(Stop::Usage("give --exposure CLASS, --residence-min T or --series FILE.csv".to_owned()));
    }
    let size = radius_m.map_or_else(|| "flat face".to_owned(), |r| format!("boulder of {} m", 2.0 * r));
    let boulder = Boulder {
        id: format!("{}, {size}", rock.name),
        position: Position { lon_deg: 0.0, lat_deg: 0.0, height_m: None },
        rock: RockChoice::Named(rock.name.clone()),
        kind: if radius_m.is_some() { Kind::Boulder } else { Kind::Outcrop },
        radius_m,
        axes_m: None,
        heating: HeatingRecord { exposure, residence_s, ..HeatingRecord::default() },
        standing: StandingRecord::default(),
    };
    Ok((boulder, Vec::new()))
}

fn in_range(flag: &str, name: &str, value: f64) -> Result<f64, Stop> {
    let bound = bound(name).unwrap_or_else(|| panic!("the range table holds {name}"));
    if bound.holds(value) { Ok(value) } else { Err(Stop::Usage(format!("{flag} is {value}, {}", bound.message()))) }
}

fn ascending(flag: &str, values: &[f64], low: f64, high: f64) -> Result<Vec<f64>, Stop> {
    if values.iter().any(|v| !v.is_finite() || *v < low || *v > high) || values.windows(2).any(|w| w[1] <= w[0]) {
        return Err(Stop::Usage(format!("{flag} must be ascending numbers from {low} to {high}")));
    }
    Ok(values.to_vec())
}

/// Reads `--set PROPERTY=VALUE`.
fn fixed(set: &[String]) -> Result<Fixed, Stop> {
    let mut fixed = Fixed::default();
    for text in set {
        let (name, value) = text
            .split_once('=')
            .ok_or_else(|| Stop::Usage(format!("--set {text:?} has no =; write PROPERTY=VALUE")))?;
        let name = name.trim();
        let value: f64 = value
            .trim()
            .parse()
            .ok()
            .filter(|v: &f64| v.is_finite())
            .ok_or_else(|| Stop::Usage(format!("--set {name}: {value:?} is not a number")))?;
        let within = |low: f64, high: f64| {
            if (low..=high).contains(&value) {
                Ok(value)
            } else {
                Err(Stop::Usage(format!("--set {name} is {value}, expected {low} to {high}")))
            }
        };
        match name {
            "initial_c" => fixed.initial_k = Some(within(-50.0, 300.0)? + ICE_POINT_K),
            "heated_fraction" => {
                fixed.heated_share = Some(in_range("--set heated_fraction", "heated_fraction", value)?)
            }
            "irradiance_kw_m2" => fixed.irradiance_w_m2 = Some(within(0.0, 1000.0)? * W_PER_KW),
            "gas_c" => fixed.gas_k = Some(within(-50.0, 1700.0)? + ICE_POINT_K),
            "h_w_m2k" => fixed.h_w_m2_k = Some(within(0.0, 1000.0)?),
            "decay_s" => fixed.decay_s = Some(within(0.1, 1e6)?),
            // A face that does not radiate is a textbook case, not a rock; the range of records does not allow it.
            "emissivity" => fixed.properties.push((Property::Emissivity, within(0.0, 1.0)?)),
            _ => {
                let property = Property::parse(name).ok_or_else(|| {
                    let known: Vec<&str> = Property::ALL.iter().map(|p| p.bound().name).collect();
                    Stop::Usage(format!(
                        "--set {name}: not a property; expected {}, initial_c, heated_fraction, irradiance_kw_m2, gas_c, \
                         h_w_m2k or decay_s",
                        known.join(", ")
                    ))
                })?;
                let value = in_range(&format!("--set {name}"), property.bound().name, value)?;
                fixed.properties.push((property, value * property.si_per_input()));
            }
        }
    }
    Ok(fixed)
}

//! From what was typed and the settings file to a checked plan. A flag wins over the file.

use std::path::{Path, PathBuf};

use spallcast::diagnostic::Diagnostic;
use spallcast::input::{InputFile, RunFile, read_settings};
use spallcast::rock::catalogue::Catalogue;
use spallcast::settings::Settings;

use super::args::{AssessArgs, InputArgs};
use super::exit::Stop;

/// The formats that can be written.
pub const FORMATS: &[&str] = if cfg!(feature = "gpkg") { &["geojson", "gpkg"] } else { &["geojson"] };

/// Where boulders come from.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Source {
    /// A file.
    File(PathBuf),
    /// Standard input, newline-delimited.
    Stream,
}

/// Where results go.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Target {
    /// A folder of layers.
    Folder(PathBuf),
    /// Standard output, boulders only.
    Stream,
}

/// Everything a run needs, checked.
#[derive(Debug)]
pub struct Plan {
    /// Burn file.
    pub burn: PathBuf,
    /// Boulders.
    pub boulders: Source,
    /// Trails.
    pub trails: Option<PathBuf>,
    /// Elevation raster.
    pub terrain: Option<PathBuf>,
    /// Results; `None` for `check`.
    pub out: Option<Target>,
    /// Model settings.
    pub settings: Settings,
    /// Catalogue with the user's rocks.
    pub catalogue: Catalogue,
    /// The settings file, for the run record.
    pub settings_file: Option<InputFile>,
    /// What was found in it.
    pub findings: Vec<Diagnostic>,
    /// Threads; `None` is one per core.
    pub threads: Option<usize>,
    /// Formats besides GeoJSON.
    pub formats: Vec<String>,
    /// Refused records make the run fail.
    pub strict: bool,
    /// Only errors.
    pub quiet: bool,
    /// Messages as JSON.
    pub json_log: bool,
}

fn dash(path: &Path) -> bool {
    path.as_os_str() == "-"
}

impl Plan {
    /// The plan of `assess`.
    pub fn assess(args: &AssessArgs) -> Result<Plan, Stop> {
        let mut plan = Plan::inputs(&args.inputs)?;
        let file = plan.1;
        let plan_out = args.out.clone().or(file.as_ref().and_then(|f| f.out.clone()));
        let plan = &mut plan.0;
        let out = plan_out.ok_or_else(|| {
            Stop::Usage("--out is missing: name a folder for the results, or - for standard output".to_owned())
        })?;
        plan.out = Some(if dash(&out) { Target::Stream } else { Target::Folder(out) });
        if let Some(draws) = args.draws {
            plan.settings.draws = draws as usize;
        }
        plan.settings.draws = Settings::whole_replicates(plan.settings.draws);
        if let Some(seed) = args.seed {
            plan.settings.seed = seed;
        }
        if let Some(days) = args.horizon_days {
            let bound = spallcast::bounds::bound("horizon_days").expect("the range table holds horizon_days");
            if !bound.holds(days) {
                return Err(Stop::Usage(format!("--horizon-days is {days}, {}", bound.message())));
            }
            plan.settings.horizon_days = days;
        }
        let from_file = |f: fn(&RunFile) -> Option<bool>| file.as_ref().and_then(f).unwrap_or(false);
        plan.threads = args.threads.map(|t| t as usize).or(file.as_ref().and_then(|f| f.threads));
        plan.strict = args.strict || from_file(|f| f.strict);
        plan.quiet = args.quiet || from_file(|f| f.quiet);
        plan.json_log = args.json_log || from_file(|f| f.json_log);
        plan.formats = args
            .format
            .clone()
            .or(file.as_ref().and_then(|f| f.format.clone()))
            .unwrap_or_else(|| vec!["geojson".to_owned()]);
        plan.formats.iter_mut().for_each(|f| *f = f.trim().to_ascii_lowercase());
        if let Some(unknown) = plan.formats.iter().find(|f| !FORMATS.contains(&f.as_str())) {
            let known = FORMATS.join(", ");
            return Err(Stop::Usage(format!("--format {unknown} is not known; expected one or more of {known}")));
        }
        Ok(std::mem::replace(plan, Plan::empty()))
    }

    /// Inputs and settings, for every command; hands back the settings file too.
    pub fn inputs(args: &InputArgs) -> Result<(Plan, Option<RunFile>), Stop> {
        let file = args.settings.as_deref().map(read_settings).transpose()?;
        let mut plan = Plan::empty();
        if let Some(file) = &file {
            plan.settings = file.settings.clone();
            plan.catalogue = file.catalogue.clone();
            plan.settings_file = Some(file.file.clone());
            plan.findings = file.findings.clone();
        }
        let pick = |flag: &Option<PathBuf>, from: fn(&RunFile) -> &Option<PathBuf>| {
            flag.clone().or_else(|| file.as_ref().and_then(|f| from(f).clone()))
        };
        let need = |path: Option<PathBuf>, flag: &str, what: &str| {
            path.ok_or_else(|| Stop::Usage(format!("{flag} is missing: name {what}")))
        };
        plan.burn = need(pick(&args.burn, |f| &f.burn), "--burn", "the GeoJSON file of burn perimeters")?;
        let boulders = need(
            pick(&args.boulders, |f| &f.boulders),
            "--boulders",
            "the boulder inventory, or - for standard input",
        )?;
        plan.boulders = if dash(&boulders) { Source::Stream } else { Source::File(boulders) };
        plan.trails = pick(&args.trails, |f| &f.trails);
        plan.terrain = pick(&args.terrain, |f| &f.terrain);
        Ok((plan, file))
    }

    fn empty() -> Plan {
        Plan {
            burn: PathBuf::new(),
            boulders: Source::Stream,
            trails: None,
            terrain: None,
            out: None,
            settings: Settings::default(),
            catalogue: Catalogue::embedded(),
            settings_file: None,
            findings: Vec::new(),
            threads: None,
            formats: vec!["geojson".to_owned()],
            strict: false,
            quiet: false,
            json_log: false,
        }
    }
}

//! What may stand on the command line, as typed. Checked against the inputs in [`super::plan`].

use std::path::PathBuf;

use clap::{Args, Parser, Subcommand};

/// From burn perimeters and a boulder inventory to spall, rockfall-source and trail layers.
///
/// A screening aid. It proposes and never orders: a licensed professional confirms sources and reach, and local rules stand.
#[derive(Debug, Parser)]
#[command(name = "spallcast", version, max_term_width = 110, arg_required_else_help = true)]
#[command(
    after_help = "Exit codes: 0 all assessed; 1 failed, nothing written; 2 usage; 3 finished, some not assessed."
)]
pub struct Cli {
    /// What to do.
    #[command(subcommand)]
    pub command: Command,
}

/// What to do.
#[derive(Debug, Subcommand)]
pub enum Command {
    /// The main job: burns and boulders to layers, tables and a run record.
    Assess(AssessArgs),
    /// Read the same inputs, report every finding, compute nothing.
    Check(CheckArgs),
    /// One boulder or one described rock: temperature, stress and spall through time and depth.
    Probe(ProbeArgs),
    /// The catalogue: centres, spreads, laws, source and basis of each figure.
    Rocks(RocksArgs),
    /// Write the demo fire's inputs into a folder and assess them.
    Demo(DemoArgs),
    /// JSON Schema of inputs and settings, and the list of output fields with units.
    Schema(SchemaArgs),
    /// An empty boulder table and a settings file with comments.
    Template(TemplateArgs),
    /// Completions for a shell.
    #[command(hide = true)]
    Completions(CompletionsArgs),
    /// Manual pages.
    #[command(hide = true)]
    Man(ManArgs),
}

/// Inputs that several commands share.
#[derive(Debug, Args, Default, Clone)]
pub struct InputArgs {
    /// Burn perimeters, GeoJSON.
    #[arg(long, value_name = "FILE")]
    pub burn: Option<PathBuf>,
    /// Boulder inventory, GeoJSON or CSV; - reads newline-delimited GeoJSON from standard input.
    #[arg(long, value_name = "FILE")]
    pub boulders: Option<PathBuf>,
    /// Trails, GeoJSON.
    #[arg(long, value_name = "FILE")]
    pub trails: Option<PathBuf>,
    /// Elevation raster, GeoTIFF in metres.
    #[arg(long, value_name = "FILE")]
    pub terrain: Option<PathBuf>,
    /// Settings, TOML. Every option can stand in it; a flag wins.
    #[arg(long, value_name = "FILE.toml")]
    pub settings: Option<PathBuf>,
}

/// `assess`.
#[derive(Debug, Args, Default, Clone)]
pub struct AssessArgs {
    #[command(flatten)]
    pub inputs: InputArgs,
    /// Folder for the results; - writes newline-delimited boulders to standard output.
    #[arg(long, value_name = "DIR")]
    pub out: Option<PathBuf>,
    /// Draws of the ensemble, rounded up to a multiple of 16 [default: 512].
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u64).range(16..=65_536))]
    pub draws: Option<u64>,
    /// Seed of the point set [default: 1].
    #[arg(long, value_name = "N")]
    pub seed: Option<u64>,
    /// Threads [default: one per core].
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u64).range(1..=1024))]
    pub threads: Option<u64>,
    /// Days that the source likelihood refers to [default: 180].
    #[arg(long, value_name = "N")]
    pub horizon_days: Option<f64>,
    /// Formats to write, separated by commas: geojson, gpkg [default: geojson].
    #[arg(long, value_name = "LIST", value_delimiter = ',')]
    pub format: Option<Vec<String>>,
    /// Fail with exit code 1, writing nothing, when any boulder is not assessed.
    #[arg(long)]
    pub strict: bool,
    /// Print nothing but errors.
    #[arg(long)]
    pub quiet: bool,
    /// Write messages as one JSON object a line.
    #[arg(long)]
    pub json_log: bool,
}

/// `check`.
#[derive(Debug, Args)]
pub struct CheckArgs {
    #[command(flatten)]
    pub inputs: InputArgs,
    /// Write findings as one JSON object a line.
    #[arg(long)]
    pub json_log: bool,
    /// Print nothing; the exit code says it.
    #[arg(long)]
    pub quiet: bool,
    /// Exit code 1 instead of 3 when there are findings.
    #[arg(long)]
    pub strict: bool,
}

/// `probe`.
#[derive(Debug, Args)]
pub struct ProbeArgs {
    #[command(flatten)]
    pub inputs: InputArgs,
    /// Which boulder of the inventory.
    #[arg(long, requires = "boulders", conflicts_with_all = ["rock", "diameter_m", "flat"])]
    pub id: Option<String>,
    /// Rock by catalogue name or alias, instead of a boulder of an inventory.
    #[arg(long, value_name = "NAME", required_unless_present = "id")]
    pub rock: Option<String>,
    /// Diameter of a round boulder, m.
    #[arg(long, value_name = "D", conflicts_with = "flat")]
    pub diameter_m: Option<f64>,
    /// A flat face instead of a boulder.
    #[arg(long)]
    pub flat: bool,
    /// Exposure class.
    #[arg(long, value_name = "CLASS")]
    pub exposure: Option<String>,
    /// Residence time, minutes.
    #[arg(long, value_name = "T")]
    pub residence_min: Option<f64>,
    /// Measured series instead of the pulse: time_s with surface_c, or flux_kw_m2, or any of irradiance_kw_m2, gas_c, h_w_m2k.
    #[arg(long, value_name = "FILE.csv")]
    pub series: Option<PathBuf>,
    /// Fix a property, for example conductivity_w_m_k=2.5; it then stays constant with temperature. May be repeated.
    #[arg(long = "set", value_name = "PROPERTY=VALUE")]
    pub set: Vec<String>,
    /// Depths to report, mm, ascending.
    #[arg(long, value_name = "LIST", value_delimiter = ',')]
    pub depths_mm: Option<Vec<f64>>,
    /// Times to report, s, ascending.
    #[arg(long, value_name = "LIST", value_delimiter = ',')]
    pub times_s: Option<Vec<f64>>,
    /// Run the ensemble of this many draws beside the medians. A boulder of an inventory with a slope runs it anyway.
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u64).range(16..=65_536))]
    pub draws: Option<u64>,
    /// Seed of the ensemble [default: 1].
    #[arg(long, value_name = "N")]
    pub seed: Option<u64>,
    /// Print JSON.
    #[arg(long)]
    pub json: bool,
    /// Write the tables as CSV files into a folder.
    #[arg(long, value_name = "DIR")]
    pub csv: Option<PathBuf>,
    /// Draw temperature, stress and events through time and depth; the ending says which: .svg or .png.
    #[arg(long, value_name = "FILE.svg|.png")]
    pub plot: Option<PathBuf>,
    /// Width of the .png, pixels [default: 1860].
    #[arg(long, value_name = "N", requires = "plot", value_parser = clap::value_parser!(u32).range(200..=8000))]
    pub plot_width_px: Option<u32>,
}

/// `rocks`.
#[derive(Debug, Args)]
pub struct RocksArgs {
    /// Show one rock only.
    #[arg(long, value_name = "NAME")]
    pub rock: Option<String>,
    /// Settings file with rocks of the user's own.
    #[arg(long, value_name = "FILE.toml")]
    pub settings: Option<PathBuf>,
    /// Print JSON.
    #[arg(long)]
    pub json: bool,
}

/// `demo`.
#[derive(Debug, Args)]
pub struct DemoArgs {
    /// Folder to write the inputs into; results go to its `results` folder.
    #[arg(value_name = "DIR")]
    pub dir: PathBuf,
    /// Print nothing but errors.
    #[arg(long)]
    pub quiet: bool,
}

/// `schema`.
#[derive(Debug, Args)]
pub struct SchemaArgs {
    /// One part only: boulders, burns, trails, settings, outputs.
    #[arg(value_name = "PART")]
    pub part: Option<String>,
}

/// `template`.
#[derive(Debug, Args)]
pub struct TemplateArgs {
    /// Folder to write boulders.csv, columns.txt and settings.toml into; without it the template is printed.
    #[arg(value_name = "DIR")]
    pub dir: Option<PathBuf>,
}

/// `completions`.
#[derive(Debug, Args)]
pub struct CompletionsArgs {
    /// The shell.
    #[arg(value_name = "SHELL")]
    pub shell: clap_complete::Shell,
}

/// `man`.
#[derive(Debug, Args)]
pub struct ManArgs {
    /// Folder to write the pages into.
    #[arg(value_name = "DIR")]
    pub dir: PathBuf,
}

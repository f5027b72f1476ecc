//! The picture of a probe: what it needs besides the account, and its file.

use std::path::Path;

use spallcast::assess::probe::{Fixed, History, MedianDraw};
use spallcast::assess::tables::RockTable;
use spallcast::report::picture;
use spallcast::report::probe_plot::{ProbePlot, Strength};
use spallcast::rock::Property;

use super::exit::Stop;

/// Width of a PNG when none is asked for, pixels: A4 across at 160 dots per inch.
const WIDTH_PX: u32 = 1860;
/// Decay times after which a pulse no longer counts for how deep to look.
const DECAYS: f64 = 3.0;
/// Diffusion lengths beyond which nothing is felt: erfc(2.5) is 4e-4.
const LENGTHS: f64 = 5.0;

/// The two kinds of picture.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Kind {
    Svg,
    Png,
}

fn kind(path: &Path) -> Result<Kind, Stop> {
    let ending = path.extension().map(|e| e.to_string_lossy().to_ascii_lowercase()).unwrap_or_default();
    match ending.as_str() {
        "svg" => Ok(Kind::Svg),
        "png" => Ok(Kind::Png),
        _ => Err(Stop::Usage(format!("--plot {} ends in neither .svg nor .png", path.display()))),
    }
}

/// Checks the name before the work.
pub fn check(path: &Path) -> Result<(), Stop> {
    kind(path).map(|_| ())
}

/// How deep the picture looks, m.
pub fn deepest_m(history: &History, median: &MedianDraw, radius_m: Option<f64>) -> f64 {
    let draw = &median.draw;
    let time_s = match history {
        History::Fire(_) => draw.residence_s + DECAYS * draw.decay_s,
        History::Series(series) => series.time_s.last().copied().unwrap_or(1.0),
    };
    let felt = LENGTHS * (draw.diffusivity_m2_s * time_s.max(1.0)).sqrt();
    radius_m.map_or(felt, |radius| felt.min(radius))
}

/// A strength of the medians with the catalogue's spread about it; without spread where it was set.
pub fn strength(table: &RockTable, property: Property, middle_pa: f64, fixed: &Fixed) -> Strength {
    let distribution = &table.rock.figure(property).distribution;
    let set = fixed.properties.iter().any(|(p, _)| *p == property);
    let share = |u: f64| if set { 1.0 } else { distribution.quantile(u) / distribution.quantile(0.5) };
    Strength { low_pa: middle_pa * share(0.05), middle_pa, high_pa: middle_pa * share(0.95) }
}

/// Writes the picture.
pub fn write(path: &Path, plot: &ProbePlot<'_>, width_px: Option<u32>) -> Result<(), Stop> {
    let svg = plot.svg();
    let bytes = match kind(path)? {
        Kind::Svg => svg.into_bytes(),
        Kind::Png => picture::png(&svg, width_px.unwrap_or(WIDTH_PX)).map_err(|e| Stop::Failed(e.to_string()))?,
    };
    std::fs::write(path, bytes)
        .map_err(|e| Stop::Failed(format!("{}: {e}; choose a folder that may be written", path.display())))
}

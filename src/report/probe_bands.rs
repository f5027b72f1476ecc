//! The draws behind a probe's picture: one panel a depth with the 5 to 95 % band of temperature through time.
//!
//! The band and its middle line are quantiles over the draws moment by moment; the dashed curve is the run of the medians,
//! which is one history and need not be the median of all. Where one draw has no value there is no band.

use super::chart::{Axis, Panel, STROKES};
use super::probe_plot::{ProbePlot, millimetres, time_unit};
use crate::assess::bands::TemperatureBands;
use crate::units::celsius;

/// Panels side by side.
const ACROSS: usize = 3;
/// Height of a row of panels with its titles.
const ROW: f64 = 284.0;
/// Height of the head above the first row.
const HEAD: f64 = 40.0;
/// Width and height of the plotting area of one panel, and the step from panel to panel.
const PANEL: (f64, f64) = (290.0, 190.0);
const STEP: f64 = 407.0;
const LEFT: f64 = 96.0;
/// Moments at which bands are computed; denser at the start, where the face heats.
const MOMENTS: usize = 120;

/// The moments for bands up to `end_s`, s.
pub fn moments(end_s: f64) -> Vec<f64> {
    (0..=MOMENTS).map(|i| i as f64 / MOMENTS as f64).map(|share| end_s * share * share).collect()
}

/// Height that the panels of this many depths add to the picture.
pub(super) fn height(depths: usize) -> f64 {
    HEAD + ROW * depths.div_ceil(ACROSS) as f64
}

/// What the lines and bands are, in one sentence.
pub(super) fn key(bands: &TemperatureBands) -> String {
    format!(
        "Grey: 5 to 95 % of {} draws at each moment; solid line: their median; dashes: the run of the medians. \
         Depths are below the face of that moment.",
        bands.draws
    )
}

/// The panels of these depths, the first of them at height `top`.
pub(super) fn panels(
    plot: &ProbePlot<'_>,
    bands: &TemperatureBands,
    depth_m: &[f64],
    first: usize,
    top: f64,
) -> String {
    let end_s = bands.time_s.last().copied().unwrap_or(1.0);
    let (unit, word) = time_unit(end_s);
    let mut svg = String::new();
    for (i, depth) in depth_m.iter().enumerate() {
        let same = |z: &f64| (z - depth).abs() <= 1e-9;
        let Some(row) = bands.depth_m.iter().position(same) else { continue };
        let Some(j) = plot.probe.depth_m.iter().position(same) else { continue };
        let band: Vec<Option<(f64, f64, f64, f64)>> = (bands.time_s.iter().zip(&bands.temperature_k[row]))
            .map(|(t, q)| q.map(|q| (t / unit, celsius(q.p05), celsius(q.p50), celsius(q.p95))))
            .collect();
        let curve = plot.through_time(j, unit);
        let heights = band.iter().flatten().map(|p| p.3).chain(curve.iter().map(|p| p.1)).chain([0.0]);
        let x = Axis::up_to(end_s / unit, format!("time, {word}"));
        let y = Axis::over(heights, true, "temperature, °C");
        let place = (LEFT + STEP * (i % ACROSS) as f64, top + ROW * (i / ACROSS) as f64, PANEL.0, PANEL.1);
        let title = if *depth == 0.0 { "face".to_owned() } else { format!("{} below the face", millimetres(*depth)) };
        let mut panel = Panel::new(first + i, place, &title, x, y);
        panel.area(&band.iter().map(|p| p.map(|p| (p.0, p.1, p.3))).collect::<Vec<_>>());
        for piece in band.split(Option::is_none).filter(|p| p.len() > 1) {
            let middle: Vec<(f64, f64)> = piece.iter().flatten().map(|p| (p.0, p.2)).collect();
            panel.curve(&middle, STROKES[0], 2.0);
        }
        panel.curve(&curve, STROKES[1], 1.6);
        svg.push_str(&panel.finish());
    }
    svg
}

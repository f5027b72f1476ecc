//! One boulder through time and depth as one SVG: four panels that read in grey print.
//!
//! Temperature through time at several depths; temperature through depth at several times; skin stress through depth at
//! the same times against the compressive strength; tension across planes parallel to the face through time against the
//! strength of a slab. Spall events are marked. With an ensemble: the 5 to 95 % range of the face's peak and of the spall
//! thickness. Curves are told apart by dashes and letters, not by colour alone. Field units: C, mm, MPa.
//!
//! Curves, events and dots are those of the medians; the strength bands are the catalogue's 5 to 95 % quantiles, cold.

use std::fmt::Write;

use super::chart::{Anchor, Axis, Panel, STROKES, escaped};
use crate::assess::probe::Probe;
use crate::output::probe_table::{EnsembleRun, Subject};
use crate::spall::outcome::Event;
use crate::units::{MM_PER_M, PA_PER_MPA, SECONDS_PER_MINUTE, celsius};

/// Width and height of the drawing.
pub const SIZE: (f64, f64) = (1240.0, 1000.0);
/// Curves in one panel at most.
pub const CURVES_MAX: usize = STROKES.len();
/// Depths are shown down to where the rise stays below this share of the face's.
const SHOWN_RISE: f64 = 0.01;
/// Two depths get curves of their own when their peaks differ by this share of the panel.
const CURVE_APART: f64 = 0.06;
const SECONDS_PER_HOUR: f64 = 3600.0;

/// A strength with its spread, Pa.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Strength {
    /// 5 % quantile.
    pub low_pa: f64,
    /// That of the medians.
    pub middle_pa: f64,
    /// 95 % quantile.
    pub high_pa: f64,
}

/// What a plot shows.
#[derive(Debug, Clone, Copy)]
pub struct ProbePlot<'a> {
    /// Who or what was probed.
    pub subject: &'a Subject,
    /// Its account, with depths close enough together for curves.
    pub probe: &'a Probe,
    /// Depths that may get a curve through time, m; each is among those of `probe`.
    pub curve_depth_m: &'a [f64],
    /// Times that get a curve through depth, s; empty for the plot's own choice.
    pub curve_time_s: &'a [f64],
    /// Uniaxial compressive strength, cold.
    pub compressive: Strength,
    /// Strength against a slab, cold.
    pub slab: Strength,
    /// The ensemble beside the medians.
    pub ensemble: Option<&'a EnsembleRun>,
}

/// Depths close enough together for smooth curves: `asked` and 80 more, denser near the face, down to `deepest_m`.
pub fn plot_depths(asked: &[f64], deepest_m: f64) -> Vec<f64> {
    const COUNT: usize = 80;
    let share = |i: usize| i as f64 / COUNT as f64;
    let mut depths: Vec<f64> = (0..=COUNT).map(|i| deepest_m * share(i) * share(i)).collect();
    depths.extend(asked.iter().filter(|z| **z <= deepest_m));
    depths.sort_by(f64::total_cmp);
    depths.dedup();
    depths
}

/// A time as people say it.
fn time_text(seconds: f64) -> String {
    if seconds < 2.0 * SECONDS_PER_MINUTE {
        format!("{seconds:.0} s")
    } else if seconds < 2.0 * SECONDS_PER_HOUR {
        format!("{:.1} min", seconds / SECONDS_PER_MINUTE)
    } else {
        format!("{:.1} h", seconds / SECONDS_PER_HOUR)
    }
}

/// The unit of the time axis: seconds in it, and its word.
fn time_unit(end_s: f64) -> (f64, &'static str) {
    if end_s <= 5.0 * SECONDS_PER_MINUTE {
        (1.0, "s")
    } else if end_s <= 5.0 * SECONDS_PER_HOUR {
        (SECONDS_PER_MINUTE, "min")
    } else {
        (SECONDS_PER_HOUR, "h")
    }
}

fn millimetres(depth_m: f64) -> String {
    let mm = (depth_m * MM_PER_M * 10.0).round() / 10.0;
    format!("{mm} mm")
}

impl ProbePlot<'_> {
    /// The picture. Text of the user's stays text.
    pub fn svg(&self) -> String {
        let (width, height) = SIZE;
        let mut svg = format!(
            "<svg xmlns=\"http://www.w3.org/2000/svg\" viewBox=\"0 0 {width} {height}\" width=\"{width}\" \
             height=\"{height}\" font-family=\"DejaVu Sans, Verdana, Arial, sans-serif\" role=\"img\" \
             aria-label=\"Temperature, stress and spall of {0} through time and depth\">\n\
             <title>Temperature, stress and spall of {0}</title>\n\
             <rect width=\"{width}\" height=\"{height}\" fill=\"#ffffff\"/>\n",
            escaped(&self.subject.name)
        );
        let line = |svg: &mut String, y: f64, size: f64, weight: &str, text: &str| {
            let _ = writeln!(
                svg,
                "<text x=\"40\" y=\"{y}\" font-size=\"{size}\" font-weight=\"{weight}\" fill=\"#111111\">{}</text>",
                escaped(text)
            );
        };
        line(&mut svg, 38.0, 22.0, "bold", &shortened(&self.subject.name, 80));
        line(&mut svg, 62.0, 13.0, "normal", &self.heading());
        line(&mut svg, 82.0, 13.0, "normal", &self.events_line());
        svg.push_str(&self.temperature_through_time(0, (96.0, 126.0, 490.0, 350.0)));
        svg.push_str(&self.temperature_through_depth(1, (710.0, 126.0, 490.0, 350.0)));
        svg.push_str(&self.stress_through_depth(2, (710.0, 566.0, 490.0, 350.0)));
        svg.push_str(&self.tension_through_time(3, (96.0, 566.0, 490.0, 350.0)));
        line(
            &mut svg,
            984.0,
            12.0,
            "normal",
            "Curves and events are those of the medians. A screening, not a site study; a licensed professional confirms.",
        );
        svg.push_str("</svg>\n");
        svg
    }

    fn heading(&self) -> String {
        let exposure = self.subject.exposure.as_deref().unwrap_or("measured series").replace('_', " ");
        let draw = &self.probe.draw;
        format!(
            "{}, {exposure}; diffusivity {:.2} mm²/s, conducted in a {}; absorbed {:.1} MJ/m²",
            self.subject.rock,
            draw.diffusivity_m2_s * 1e6,
            if self.probe.sphere { "sphere" } else { "half-space" },
            self.probe.absorbed_j_m2 / 1e6,
        )
    }

    fn events_line(&self) -> String {
        let mut said = match self.shown_events().as_slice() {
            [] => "No spall on the medians.".to_owned(),
            events => {
                let each: Vec<String> = events.iter().map(event_text).collect();
                format!("On the medians: {}.", each.join("; "))
            }
        };
        if let Some(run) = self.ensemble
            && let Some(spall) = &run.assessment.spall
        {
            let _ = write!(said, " Of {} draws a share of {:.2} spalls.", run.draws, spall.p_spall);
        }
        said
    }

    /// Events in the order of time.
    fn shown_events(&self) -> Vec<Event> {
        let mut events = self.probe.events.clone();
        events.sort_by(|a, b| a.time_s.total_cmp(&b.time_s));
        events
    }

    fn end_s(&self) -> f64 {
        self.probe.time_s.last().copied().unwrap_or(1.0)
    }

    /// Place of the row nearest to a time.
    fn row_at(&self, time_s: f64) -> usize {
        let times = &self.probe.time_s;
        let after = times.partition_point(|t| *t < time_s).min(times.len() - 1);
        let before = after.saturating_sub(1);
        if (times[after] - time_s).abs() < (time_s - times[before]).abs() { after } else { before }
    }

    fn peak_row(&self) -> usize {
        let face = &self.probe.surface_k;
        (0..face.len()).max_by(|a, b| face[*a].total_cmp(&face[*b]).then(b.cmp(a))).unwrap_or(0)
    }

    /// Rows that get a curve through depth.
    fn curve_rows(&self) -> Vec<usize> {
        let peak_s = self.probe.time_s[self.peak_row()];
        let rest = self.end_s() - peak_s;
        let own = [0.1 * peak_s, 0.4 * peak_s, peak_s, peak_s + 0.3 * rest, peak_s + rest];
        let wanted: &[f64] = if self.curve_time_s.is_empty() { &own } else { self.curve_time_s };
        let mut rows: Vec<usize> = wanted.iter().map(|t| self.row_at(*t)).collect();
        rows.dedup();
        // Too many for one panel: the first, the last and some between.
        let all = rows.len();
        if all > CURVES_MAX {
            rows = (0..CURVES_MAX).map(|i| rows[i * (all - 1) / (CURVES_MAX - 1)]).collect();
        }
        rows
    }

    /// Depth down to which the panels show, mm.
    fn shown_mm(&self) -> f64 {
        let start = self.probe.draw.ambient_k;
        let rise = |j: usize| self.probe.temperature_k.iter().map(|row| row[j] - start).fold(0.0, f64::max);
        let depths = &self.probe.depth_m;
        let face = rise(0);
        let deepest = (0..depths.len()).rfind(|j| rise(*j) >= SHOWN_RISE * face).unwrap_or(0);
        depths[(deepest + 1).min(depths.len() - 1)] * MM_PER_M
    }

    fn place(&self, depth_m: f64) -> Option<usize> {
        self.probe.depth_m.iter().position(|z| (z - depth_m).abs() <= 1e-9)
    }

    fn temperature_axis(&self) -> Axis {
        let ranges = self.ensemble.and_then(|run| run.assessment.heat.as_ref()).map(|h| celsius(h.peak_surface_k.p95));
        let curves = self.probe.temperature_k.iter().flatten().map(|t| celsius(*t));
        Axis::over(curves.chain(ranges).chain([0.0]), true, "temperature, °C")
    }

    fn temperature_through_time(&self, number: usize, place: (f64, f64, f64, f64)) -> String {
        let (unit, word) = time_unit(self.end_s());
        let x = Axis::up_to(self.end_s() / unit, format!("time since the fire reached the rock, {word}"));
        let y = self.temperature_axis();
        let apart = CURVE_APART * (y.high - y.low);
        let mut panel = Panel::new(number, place, "Temperature through time, by depth below the face", x, y);
        let mut last_peak = f64::INFINITY;
        let mut labels = Vec::new();
        let mut strokes = STROKES.iter();
        for depth in self.curve_depth_m {
            let Some(j) = self.place(*depth) else { continue };
            let curve: Vec<(f64, f64)> = self
                .probe
                .time_s
                .iter()
                .zip(&self.probe.temperature_k)
                .map(|(t, r)| (t / unit, celsius(r[j])))
                .collect();
            let top = curve.iter().copied().fold((0.0, f64::NEG_INFINITY), |a, b| if b.1 > a.1 { b } else { a });
            if last_peak - top.1 < apart {
                continue;
            }
            let Some(stroke) = strokes.next() else { break };
            last_peak = top.1;
            panel.curve(&curve, *stroke, 2.2);
            labels.push((top, if *depth == 0.0 { "face".to_owned() } else { millimetres(*depth) }));
        }
        self.mark_events(&mut panel, unit);
        let (_, _, right, _) = panel.edges();
        for ((x, y), text) in labels {
            let (at, anchor) = match panel.at_x(x) {
                at if at > right - 70.0 => (at - 6.0, Anchor::End),
                at => (at + 8.0, Anchor::Start),
            };
            panel.text(at, panel.at_y(y) - 5.0, anchor, 12.0, "normal", &text);
        }
        self.face_range(&mut panel, self.probe.time_s[self.peak_row()] / unit, 12.0);
        panel.finish()
    }

    /// The ensemble's range of the face's peak.
    fn face_range(&self, panel: &mut Panel, x: f64, shift: f64) {
        let Some(heat) = self.ensemble.and_then(|run| run.assessment.heat.as_ref()) else { return };
        let q = heat.peak_surface_k;
        panel.upright_range(x, celsius(q.p05), celsius(q.p50), celsius(q.p95));
        let (at, top) = (panel.at_x(x), panel.at_y(celsius(q.p95)));
        let (_, _, right, _) = panel.edges();
        let (at, anchor) = if at > right - 260.0 { (at - shift, Anchor::End) } else { (at + shift, Anchor::Start) };
        panel.text(at, top + 5.0, anchor, 12.0, "normal", "peak of the face, draws, 5 to 95 %");
    }

    /// Events as upright lines with their text beside, one below the other.
    fn mark_events(&self, panel: &mut Panel, unit: f64) {
        let (_, _, right, bottom) = panel.edges();
        let events = self.shown_events();
        for event in &events {
            panel.mark(event.time_s / unit);
        }
        for (i, event) in events.iter().enumerate() {
            let at = panel.at_x(event.time_s / unit);
            let (at, anchor) = if at > right - 120.0 { (at - 9.0, Anchor::End) } else { (at + 9.0, Anchor::Start) };
            panel.text(at, bottom - 22.0 - 15.0 * (i % 4) as f64, anchor, 12.0, "normal", &event_short(event));
        }
    }

    /// Curves through depth with letters, and their key in the upper right, which falling curves leave free.
    fn through_depth(&self, panel: &mut Panel, read: impl Fn(usize, usize) -> f64) {
        let depths: Vec<f64> = self.probe.depth_m.iter().map(|z| z * MM_PER_M).collect();
        let rows = self.curve_rows();
        for (row, stroke) in rows.iter().zip(STROKES) {
            let curve: Vec<(f64, f64)> = depths.iter().enumerate().map(|(j, z)| (*z, read(*row, j))).collect();
            panel.curve(&curve, stroke, 2.2);
        }
        let (left, top, right, _) = panel.edges();
        for (i, row) in rows.iter().enumerate() {
            // Each letter a little deeper than the one before, so that they stay apart where the curves meet.
            let wanted = left + (right - left) * (0.02 + 0.028 * i as f64);
            let j = depths.partition_point(|z| panel.at_x(*z) < wanted).min(depths.len() - 1);
            let (x, y) = (panel.at_x(depths[j]), panel.at_y(read(*row, j)));
            panel.text(x, y - 4.0, Anchor::Middle, 13.0, "bold", letter(i));
        }
        for (i, (row, stroke)) in rows.iter().zip(STROKES).enumerate() {
            let y = top + 22.0 + 19.0 * i as f64;
            panel.sample(right - 158.0, y - 4.0, stroke);
            let text = format!("{}   {}", letter(i), time_text(self.probe.time_s[*row]));
            panel.text(right - 104.0, y, Anchor::Start, 12.0, "normal", &text);
        }
    }

    fn temperature_through_depth(&self, number: usize, place: (f64, f64, f64, f64)) -> String {
        let x = Axis::up_to(self.shown_mm(), "depth below the face, mm");
        let mut panel = Panel::new(number, place, "Temperature through depth, by time", x, self.temperature_axis());
        self.through_depth(&mut panel, |row, j| celsius(self.probe.temperature_k[row][j]));
        panel.finish()
    }

    fn stress_through_depth(&self, number: usize, place: (f64, f64, f64, f64)) -> String {
        let x = Axis::up_to(self.shown_mm(), "depth below the face, mm");
        let mpa = |p: f64| p / PA_PER_MPA;
        let rows = self.curve_rows();
        let shown = self.shown_mm() / MM_PER_M;
        let kept = self.probe.depth_m.iter().filter(|z| **z <= shown).count();
        let curves = rows.iter().flat_map(|r| self.probe.skin_stress_pa[*r][..kept].iter().map(|s| mpa(*s)));
        let strength = self.compressive;
        let heights: Vec<f64> = curves.chain([0.0, mpa(strength.high_pa)]).collect();
        let thickness = self.ensemble.and_then(|r| r.assessment.spall.as_ref()).and_then(|s| s.thickness_quantiles_m);
        let room = heights.iter().copied().fold(0.0, f64::max);
        let below = if thickness.is_some() { -0.26 * room } else { -0.14 * room };
        let y = Axis::over(heights.into_iter().chain([below]), false, "compression along the face, MPa");
        let mut panel = Panel::new(number, place, "Skin stress through depth, by time", x, y);
        panel.band(mpa(strength.low_pa), mpa(strength.middle_pa), mpa(strength.high_pa));
        self.through_depth(&mut panel, |row, j| mpa(self.probe.skin_stress_pa[row][j]));
        let (left, _, _, _) = panel.edges();
        let at = panel.at_y(mpa(strength.low_pa));
        panel.text(left + 120.0, at - 6.0, Anchor::Start, 12.0, "normal", "compressive strength, cold, 5 to 95 %");
        // Below the zero line, which compression leaves free.
        for (i, event) in self.shown_events().iter().enumerate() {
            let depth = event.depth_m * MM_PER_M;
            panel.lying_range(0.0, depth, depth, depth);
            let (x, y) = (panel.at_x(depth), panel.at_y(0.0) + 17.0 + 14.0 * (i % 3) as f64);
            if x < panel.edges().2 - 110.0 {
                panel.text(x + 8.0, y, Anchor::Start, 12.0, "normal", &event_short(event));
            }
        }
        if let Some(q) = thickness {
            let y = -0.22 * room;
            panel.lying_range(y, q.p05 * MM_PER_M, q.p50 * MM_PER_M, q.p95 * MM_PER_M);
            let text =
                format!("thickness, draws that spall, 5 to 95 %: {} to {}", millimetres(q.p05), millimetres(q.p95));
            panel.text(panel.edges().2 - 8.0, panel.at_y(y) - 9.0, Anchor::End, 12.0, "normal", &text);
        }
        panel.finish()
    }

    fn tension_through_time(&self, number: usize, place: (f64, f64, f64, f64)) -> String {
        let (unit, word) = time_unit(self.end_s());
        let x = Axis::up_to(self.end_s() / unit, format!("time since the fire reached the rock, {word}"));
        let mpa = |p: f64| p / PA_PER_MPA;
        let curve: Vec<(f64, f64)> =
            self.probe.time_s.iter().zip(&self.probe.normal_tension_pa).map(|(t, s)| (t / unit, mpa(*s))).collect();
        let strength = self.slab;
        let heights = curve.iter().map(|p| p.1).chain([mpa(strength.high_pa)]);
        let y = Axis::over(heights, true, "tension across planes parallel to the face, MPa");
        let mut panel = Panel::new(number, place, "Tension toward a slab, through time", x, y);
        panel.band(mpa(strength.low_pa), mpa(strength.middle_pa), mpa(strength.high_pa));
        panel.curve(&curve, STROKES[0], 2.2);
        self.mark_events(&mut panel, unit);
        let (_, _, right, _) = panel.edges();
        let at = panel.at_y(mpa(strength.low_pa));
        panel.text(right - 8.0, at - 6.0, Anchor::End, 12.0, "normal", "strength against a slab, cold, 5 to 95 %");
        panel.finish()
    }
}

fn letter(i: usize) -> &'static str {
    ["a", "b", "c", "d", "e", "f"][i % CURVES_MAX]
}

fn event_short(event: &Event) -> String {
    format!("{} {}", event.family.word(), millimetres(event.depth_m))
}

fn event_text(event: &Event) -> String {
    format!("{} after {}", event_short(event), time_text(event.time_s))
}

fn shortened(text: &str, longest: usize) -> String {
    match text.char_indices().nth(longest) {
        None => text.to_owned(),
        Some((at, _)) => format!("{}…", &text[..at]),
    }
}

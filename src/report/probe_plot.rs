//! One boulder through time and depth as one SVG: four panels that read in grey print.
//!
//! Temperature through time at several depths; temperature through depth at several times; skin stress through depth at
//! the same times against the compressive strength; tension across planes parallel to the face through time against the
//! strength of a slab. Spall events are marked. With an ensemble: the 5 to 95 % range of the spall thickness, and one panel
//! more for each depth with the band of the draws ([`super::probe_bands`]). Curves are told apart by dashes and letters,
//! not by colour alone. Field units: C, mm, MPa.
//!
//! Curves, events and dots are those of the medians; the strength bands are the catalogue's 5 to 95 % quantiles, cold.

use std::fmt::Write;

use super::chart::{Anchor, Axis, Panel, STROKES, escaped};
use super::probe_bands;
use crate::assess::bands::TemperatureBands;
use crate::assess::probe::Probe;
use crate::output::probe_table::{EnsembleRun, Subject};
use crate::spall::outcome::Event;
use crate::units::{MM_PER_M, PA_PER_MPA, SECONDS_PER_MINUTE, celsius};

/// Width and height of the drawing without bands.
pub const SIZE: (f64, f64) = (1240.0, 1000.0);
/// Curves in one panel at most.
pub const CURVES_MAX: usize = STROKES.len();
/// Depths are shown down to where the rise stays below this share of the face's.
const SHOWN_RISE: f64 = 0.01;
/// Two depths get curves of their own when their peaks differ by this share of the panel.
const CURVE_APART: f64 = 0.06;
const SECONDS_PER_HOUR: f64 = 3600.0;
/// From one event's text to the next.
const EVENT_ROW: f64 = 16.0;
/// From one row of a key to the next, and where the key begins as a share of the panel's width.
const KEY_ROW: f64 = 19.0;
const KEY_FROM: f64 = 0.64;
/// Room for an event's text beside its line.
const EVENT_TEXT: f64 = 150.0;

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
    /// Bands of the ensemble's temperatures at the depths that may get a curve.
    pub bands: Option<&'a TemperatureBands>,
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
pub(super) fn time_unit(end_s: f64) -> (f64, &'static str) {
    if end_s <= 5.0 * SECONDS_PER_MINUTE {
        (1.0, "s")
    } else if end_s <= 5.0 * SECONDS_PER_HOUR {
        (SECONDS_PER_MINUTE, "min")
    } else {
        (SECONDS_PER_HOUR, "h")
    }
}

pub(super) fn millimetres(depth_m: f64) -> String {
    let mm = (depth_m * MM_PER_M * 10.0).round() / 10.0;
    format!("{mm} mm")
}

impl ProbePlot<'_> {
    /// The picture. Text of the user's stays text.
    pub fn svg(&self) -> String {
        let (width, top) = SIZE;
        let curves = self.curve_depths();
        let height = top + self.bands.map_or(0.0, |_| probe_bands::height(curves.len()));
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
        svg.push_str(&self.temperature_through_time(0, &curves, (96.0, 126.0, 490.0, 350.0)));
        svg.push_str(&self.temperature_through_depth(1, (710.0, 126.0, 490.0, 350.0)));
        svg.push_str(&self.stress_through_depth(2, (710.0, 566.0, 490.0, 350.0)));
        svg.push_str(&self.tension_through_time(3, (96.0, 566.0, 490.0, 350.0)));
        if let Some(bands) = self.bands {
            let depths: Vec<f64> = curves.iter().map(|j| self.probe.depth_m[*j]).collect();
            line(&mut svg, top - 6.0, 16.0, "bold", "Temperature through time over the draws");
            line(&mut svg, top + 16.0, 13.0, "normal", &probe_bands::key(bands));
            svg.push_str(&probe_bands::panels(self, bands, &depths, 4, top + 52.0));
        }
        line(
            &mut svg,
            height - 16.0,
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

    /// Highest temperature at a depth, C, and when, s.
    fn peak_at(&self, j: usize) -> (f64, f64) {
        let rows = self.probe.time_s.iter().zip(&self.probe.temperature_k).map(|(t, row)| (*t, celsius(row[j])));
        rows.fold((0.0, f64::NEG_INFINITY), |a, b| if b.1 > a.1 { b } else { a })
    }

    /// Places of the depths that get a curve through time: peaks well apart, as many as there are strokes.
    fn curve_depths(&self) -> Vec<usize> {
        let y = self.temperature_axis();
        let apart = CURVE_APART * (y.high - y.low);
        let mut last_peak = f64::INFINITY;
        let mut depths = Vec::new();
        for j in self.curve_depth_m.iter().filter_map(|depth| self.place(*depth)) {
            let (_, peak) = self.peak_at(j);
            if last_peak - peak >= apart && depths.len() < CURVES_MAX {
                last_peak = peak;
                depths.push(j);
            }
        }
        depths
    }

    /// Temperature at a depth through time: time in `unit`, C.
    pub(super) fn through_time(&self, j: usize, unit: f64) -> Vec<(f64, f64)> {
        self.probe.time_s.iter().zip(&self.probe.temperature_k).map(|(t, r)| (t / unit, celsius(r[j]))).collect()
    }

    fn temperature_axis(&self) -> Axis {
        let curves = self.probe.temperature_k.iter().flatten().map(|t| celsius(*t));
        Axis::over(curves.chain([0.0]), true, "temperature, °C")
    }

    /// The axis with room for the key of the curves at its upper right: what runs there stays below the key.
    fn with_key(&self, mut axis: Axis, height: f64, read: impl Fn(usize, usize) -> f64) -> Axis {
        let rows = self.curve_rows();
        let from = KEY_FROM * self.shown_mm() / MM_PER_M;
        let beneath = rows.iter().flat_map(|row| {
            let depths = self.probe.depth_m.iter().enumerate().filter(|(_, z)| **z >= from);
            depths.map(|(j, _)| read(*row, j)).collect::<Vec<_>>()
        });
        let highest = beneath.fold(axis.low, f64::max);
        let share = (12.0 + KEY_ROW * rows.len() as f64) / height;
        axis.high = axis.high.max(axis.low + (highest - axis.low) / (1.0 - share) * 1.02);
        axis
    }

    /// The axis with room for a row a label of an event at its top.
    fn with_room(&self, mut axis: Axis, height: f64) -> Axis {
        let rows = self.shown_events().len() as f64;
        let share = (EVENT_ROW * rows / height).min(0.3);
        axis.high += (axis.high - axis.low) * share / (1.0 - share);
        axis
    }

    fn temperature_through_time(&self, number: usize, curves: &[usize], place: (f64, f64, f64, f64)) -> String {
        let (unit, word) = time_unit(self.end_s());
        let x = Axis::up_to(self.end_s() / unit, format!("time since the fire reached the rock, {word}"));
        let y = self.with_room(self.temperature_axis(), place.3);
        let mut panel = Panel::new(number, place, "Temperature through time, by depth below the face", x, y);
        for (j, stroke) in curves.iter().zip(STROKES) {
            panel.curve(&self.through_time(*j, unit), stroke, 2.2);
        }
        self.mark_events(&mut panel, unit);
        for j in curves {
            let ((time_s, peak), depth) = (self.peak_at(*j), self.probe.depth_m[*j]);
            let (x, y) = (panel.at_x(time_s / unit), panel.at_y(peak));
            let beside = [(8.0, Anchor::Start), (-6.0, Anchor::End), (24.0, Anchor::Start), (40.0, Anchor::Start)];
            let places: Vec<_> = [-5.0, -17.0, 15.0]
                .iter()
                .flat_map(|up| beside.map(|(aside, anchor)| (x + aside, y + up, anchor)))
                .collect();
            panel.label(&places, "normal", &if depth == 0.0 { "face".to_owned() } else { millimetres(depth) });
        }
        panel.finish()
    }

    /// Events as upright lines. Their texts, in the order of time, stand at the top to the right of all lines that are too
    /// near for a text between them.
    fn mark_events(&self, panel: &mut Panel, unit: f64) {
        let (_, top, right, _) = panel.edges();
        let events = self.shown_events();
        for event in &events {
            panel.mark(event.time_s / unit);
        }
        let lines: Vec<(f64, &Event)> = events.iter().map(|e| (panel.at_x(e.time_s / unit), e)).collect();
        for near in lines.chunk_by(|a, b| b.0 - a.0 < EVENT_TEXT) {
            let (first, last) = (near[0].0, near[near.len() - 1].0);
            let (x, anchor) = match last < right - EVENT_TEXT {
                true => (last + 8.0, Anchor::Start),
                false => (first - 8.0, Anchor::End),
            };
            for (_, event) in near {
                let rows = (0..events.len() + 3).map(|k| (x, top + 14.0 + EVENT_ROW * k as f64, anchor));
                let text = format!("{}, {}", event_short(event), time_text(event.time_s));
                panel.label(&rows.collect::<Vec<_>>(), "normal", &text);
            }
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
        panel.plate([right - 166.0, top + 6.0, right - 4.0, top + 12.0 + KEY_ROW * rows.len() as f64]);
        for (i, row) in rows.iter().enumerate() {
            // Each letter a little deeper than the one before, so that they stay apart where the curves meet.
            let places: Vec<_> = (0..8)
                .map(|k| left + (right - left) * (0.02 + 0.028 * (i + k) as f64))
                .map(|wanted| depths.partition_point(|z| panel.at_x(*z) < wanted).min(depths.len() - 1))
                .map(|j| (panel.at_x(depths[j]) + 2.0, panel.at_y(read(*row, j)) - 4.0, Anchor::Middle))
                .collect();
            panel.label(&places, "bold", letter(i));
        }
        for (i, (row, stroke)) in rows.iter().zip(STROKES).enumerate() {
            let y = top + 22.0 + KEY_ROW * i as f64;
            panel.sample(right - 158.0, y - 4.0, stroke);
            let text = format!("{}   {}", letter(i), time_text(self.probe.time_s[*row]));
            panel.text(right - 104.0, y, Anchor::Start, 12.0, "normal", &text);
        }
    }

    fn temperature_through_depth(&self, number: usize, place: (f64, f64, f64, f64)) -> String {
        let x = Axis::up_to(self.shown_mm(), "depth below the face, mm");
        let read = |row: usize, j: usize| celsius(self.probe.temperature_k[row][j]);
        let y = self.with_key(self.temperature_axis(), place.3, read);
        let mut panel = Panel::new(number, place, "Temperature through depth, by time", x, y);
        self.through_depth(&mut panel, read);
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
        let read = |row: usize, j: usize| mpa(self.probe.skin_stress_pa[row][j]);
        let y = Axis::over(heights.into_iter().chain([below]), false, "compression along the face, MPa");
        let y = self.with_key(y, place.3, read);
        let mut panel = Panel::new(number, place, "Skin stress through depth, by time", x, y);
        panel.band(mpa(strength.low_pa), mpa(strength.middle_pa), mpa(strength.high_pa));
        self.through_depth(&mut panel, read);
        let (left, _, _, _) = panel.edges();
        let at = panel.at_y(mpa(strength.low_pa));
        panel.label(&[(left + 120.0, at - 6.0, Anchor::Start)], "normal", "compressive strength, cold, 5 to 95 %");
        // Below the zero line, which compression leaves free.
        for event in &self.shown_events() {
            let depth = event.depth_m * MM_PER_M;
            panel.lying_range(0.0, depth, depth, depth);
            if depth > self.shown_mm() {
                continue;
            }
            let (x, y) = (panel.at_x(depth), panel.at_y(0.0) + 17.0);
            let rows = [0.0, EVENT_ROW, 2.0 * EVENT_ROW];
            let places: Vec<_> =
                rows.iter().flat_map(|r| [(x + 6.0, y + r, Anchor::Start), (x - 6.0, y + r, Anchor::End)]).collect();
            panel.label(&places, "normal", &event_short(event));
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
        let y = self.with_room(y, place.3);
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

//! Small marks of a chart as SVG: a panel with two linear axes, curves, bands, labels.
//!
//! Plain text in, plain text out; numbers are written to a tenth of a unit of the drawing.

use std::fmt::Write;

/// A way to draw a curve: told apart by its dashes alone, and by colour (Okabe and Ito 2008) where there is colour.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Stroke {
    /// Colour.
    pub colour: &'static str,
    /// Dashes and gaps; empty for a solid line.
    pub dashes: &'static str,
}

/// Six ways that stay apart in grey print.
pub const STROKES: [Stroke; 6] = [
    Stroke { colour: "#000000", dashes: "" },
    Stroke { colour: "#0072b2", dashes: "10 4" },
    Stroke { colour: "#d55e00", dashes: "3 3" },
    Stroke { colour: "#007a5a", dashes: "10 3 2 3" },
    Stroke { colour: "#9a4a78", dashes: "18 4" },
    Stroke { colour: "#555555", dashes: "2 6" },
];

/// Text that stands for itself in XML.
pub fn escaped(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.chars() {
        match c {
            '&' => out.push_str("&amp;"),
            '<' => out.push_str("&lt;"),
            '>' => out.push_str("&gt;"),
            '"' => out.push_str("&quot;"),
            '\'' => out.push_str("&#39;"),
            // XML 1.0 has no other control characters.
            c if c.is_control() || matches!(c, '\u{fffe}' | '\u{ffff}') => out.push(' '),
            c => out.push(c),
        }
    }
    out
}

/// The step between ticks that gives about `count` of them over `span`: 1, 2 or 5 times a power of ten.
///
/// ```
/// assert_eq!(spallcast::report::chart::tick_step(930.0, 6), 200.0);
/// ```
pub fn tick_step(span: f64, count: usize) -> f64 {
    let rough = span / count as f64;
    let power = libm::pow(10.0, libm::floor(libm::log10(rough)));
    let lead = rough / power;
    power
        * if lead <= 1.0 {
            1.0
        } else if lead <= 2.0 {
            2.0
        } else if lead <= 5.0 {
            5.0
        } else {
            10.0
        }
}

/// A tick's value with just the decimals that its step needs.
fn tick_text(value: f64, step: f64) -> String {
    let decimals = (-libm::floor(libm::log10(step))).clamp(0.0, 9.0) as usize;
    let text = format!("{:.*}", decimals, value + 0.0);
    if text.trim_matches(['-', '0', '.']).is_empty() { "0".to_owned() } else { text.replace('-', "\u{2212}") }
}

/// One axis: its range and what it says.
#[derive(Debug, Clone, PartialEq)]
pub struct Axis {
    /// Least value shown.
    pub low: f64,
    /// Greatest value shown.
    pub high: f64,
    /// Quantity and unit.
    pub label: String,
}

impl Axis {
    /// An axis over these values with some air; `from_zero` keeps zero at its end.
    pub fn over(values: impl IntoIterator<Item = f64>, from_zero: bool, label: impl Into<String>) -> Axis {
        let (mut low, mut high) = (f64::INFINITY, f64::NEG_INFINITY);
        for v in values.into_iter().filter(|v| v.is_finite()) {
            low = low.min(v);
            high = high.max(v);
        }
        if low > high {
            (low, high) = (0.0, 1.0);
        }
        if from_zero {
            low = low.min(0.0);
        }
        let span = if high > low { high - low } else { high.abs().max(1.0) };
        if !(from_zero && low >= 0.0) {
            low -= 0.04 * span;
        }
        Axis { low, high: high + 0.08 * span, label: label.into() }
    }

    /// An axis from 0 to exactly `high`.
    pub fn up_to(high: f64, label: impl Into<String>) -> Axis {
        Axis { low: 0.0, high: if high > 0.0 { high } else { 1.0 }, label: label.into() }
    }
}

/// Where a text stands on its point.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Anchor {
    /// The point is at its left.
    Start,
    /// The point is at its middle.
    Middle,
    /// The point is at its right.
    End,
}

/// One panel of a figure; collects its own SVG.
#[derive(Debug, Clone)]
pub struct Panel {
    number: usize,
    left: f64,
    top: f64,
    width: f64,
    height: f64,
    x: Axis,
    y: Axis,
    svg: String,
    /// Boxes of the labels so far: left, top, right, bottom.
    taken: Vec<[f64; 4]>,
}

/// Width of a text over its size times its letters, on average in the built-in font (measured on its own labels).
const LETTER_WIDTH: f64 = 0.6;
/// Air between two labels.
const LABEL_AIR: f64 = 2.0;

/// Box of a text: left, top, right, bottom.
fn text_box(x: f64, y: f64, anchor: Anchor, size: f64, text: &str) -> [f64; 4] {
    let width = LETTER_WIDTH * size * text.chars().count() as f64;
    let left = match anchor {
        Anchor::Start => x,
        Anchor::Middle => x - 0.5 * width,
        Anchor::End => x - width,
    };
    [left, y - 0.8 * size, left + width, y + 0.2 * size]
}

impl Panel {
    /// A panel whose plotting area stands at these places of the figure.
    pub fn new(
        number: usize,
        (left, top, width, height): (f64, f64, f64, f64),
        title: &str,
        x: Axis,
        y: Axis,
    ) -> Panel {
        let mut panel = Panel { number, left, top, width, height, x, y, svg: String::new(), taken: Vec::new() };
        panel.frame(title);
        panel
    }

    /// The SVG of the panel.
    pub fn finish(self) -> String {
        self.svg
    }

    /// Where a value lies across.
    pub fn at_x(&self, x: f64) -> f64 {
        self.left + self.width * (x - self.x.low) / (self.x.high - self.x.low)
    }

    /// Where a value lies from the top of the figure.
    pub fn at_y(&self, y: f64) -> f64 {
        self.top + self.height * (self.y.high - y) / (self.y.high - self.y.low)
    }

    /// The plotting area: left, top, right, bottom.
    pub fn edges(&self) -> (f64, f64, f64, f64) {
        (self.left, self.top, self.left + self.width, self.top + self.height)
    }

    fn frame(&mut self, title: &str) {
        let (left, top, right, bottom) = self.edges();
        let n = self.number;
        let _ = write!(
            self.svg,
            "<clipPath id=\"panel{n}\"><rect x=\"{left:.1}\" y=\"{top:.1}\" width=\"{:.1}\" height=\"{:.1}\"/></clipPath>\n\
             <rect x=\"{left:.1}\" y=\"{top:.1}\" width=\"{:.1}\" height=\"{:.1}\" fill=\"#ffffff\" stroke=\"none\"/>\n",
            self.width, self.height, self.width, self.height
        );
        self.text(left, top - 12.0, Anchor::Start, 15.0, "bold", title);
        let step = tick_step(self.x.high - self.x.low, 6);
        let mut tick = (self.x.low / step).ceil() * step;
        while tick <= self.x.high + step * 1e-9 {
            let at = self.at_x(tick);
            let _ = writeln!(
                self.svg,
                "<path d=\"M{at:.1} {top:.1}V{bottom:.1}\" stroke=\"#dddddd\" stroke-width=\"1\"/>\
                 <path d=\"M{at:.1} {bottom:.1}v5\" stroke=\"#333333\" stroke-width=\"1\"/>"
            );
            self.text(at, bottom + 19.0, Anchor::Middle, 12.0, "normal", &tick_text(tick, step));
            tick += step;
        }
        let step = tick_step(self.y.high - self.y.low, 5);
        let mut tick = (self.y.low / step).ceil() * step;
        while tick <= self.y.high + step * 1e-9 {
            let at = self.at_y(tick);
            let _ = writeln!(
                self.svg,
                "<path d=\"M{left:.1} {at:.1}H{right:.1}\" stroke=\"#dddddd\" stroke-width=\"1\"/>\
                 <path d=\"M{left:.1} {at:.1}h-5\" stroke=\"#333333\" stroke-width=\"1\"/>"
            );
            self.text(left - 9.0, at + 4.0, Anchor::End, 12.0, "normal", &tick_text(tick, step));
            tick += step;
        }
        let (x_label, y_label) = (self.x.label.clone(), self.y.label.clone());
        self.text(left + self.width / 2.0, bottom + 38.0, Anchor::Middle, 13.0, "normal", &x_label);
        let (x, y) = (left - 52.0, top + self.height / 2.0);
        let _ = writeln!(
            self.svg,
            "<text x=\"{x:.1}\" y=\"{y:.1}\" transform=\"rotate(-90 {x:.1} {y:.1})\" text-anchor=\"middle\" \
             font-size=\"13\">{}</text>",
            escaped(&y_label)
        );
        let _ = writeln!(
            self.svg,
            "<path d=\"M{left:.1} {top:.1}V{bottom:.1}H{right:.1}\" fill=\"none\" stroke=\"#333333\" stroke-width=\"1.2\"/>"
        );
    }

    /// Text at a place of the figure, with a white edge so that it reads on top of lines.
    pub fn text(&mut self, x: f64, y: f64, anchor: Anchor, size: f64, weight: &str, text: &str) {
        let anchor = match anchor {
            Anchor::Start => "start",
            Anchor::Middle => "middle",
            Anchor::End => "end",
        };
        let _ = writeln!(
            self.svg,
            "<text x=\"{x:.1}\" y=\"{y:.1}\" text-anchor=\"{anchor}\" font-size=\"{size}\" font-weight=\"{weight}\" \
             fill=\"#111111\" stroke=\"#ffffff\" stroke-width=\"3\" stroke-linejoin=\"round\" paint-order=\"stroke\">{}</text>",
            escaped(text)
        );
    }

    /// A label of size 12 at the first of these places where it lies on no other label and inside the panel; at the first
    /// place of all where there is none. Later labels keep off it.
    pub fn label(&mut self, places: &[(f64, f64, Anchor)], weight: &str, text: &str) {
        const SIZE: f64 = 12.0;
        let (left, top, right, bottom) = self.edges();
        let free = |place: &&(f64, f64, Anchor)| {
            let b = text_box(place.0, place.1, place.2, SIZE, text);
            let inside = b[0] >= left && b[2] <= right && b[1] >= top && b[3] <= bottom;
            inside && self.taken.iter().all(|t| b[0] >= t[2] || b[2] <= t[0] || b[1] >= t[3] || b[3] <= t[1])
        };
        let Some((x, y, anchor)) = places.iter().find(free).or(places.first()).copied() else { return };
        let b = text_box(x, y, anchor, SIZE, text);
        self.keep_free([b[0] - LABEL_AIR, b[1] - LABEL_AIR, b[2] + LABEL_AIR, b[3] + LABEL_AIR]);
        self.text(x, y, anchor, SIZE, weight, text);
    }

    /// Keeps labels out of a box: left, top, right, bottom.
    pub fn keep_free(&mut self, area: [f64; 4]) {
        self.taken.push(area);
    }

    /// A light plate for a key: left, top, right, bottom. What was drawn shines through; labels keep off it.
    pub fn plate(&mut self, [left, top, right, bottom]: [f64; 4]) {
        let _ = writeln!(
            self.svg,
            "<rect x=\"{left:.1}\" y=\"{top:.1}\" width=\"{:.1}\" height=\"{:.1}\" fill=\"#ffffff\" fill-opacity=\"0.88\"/>",
            right - left,
            bottom - top
        );
        self.keep_free([left, top, right, bottom]);
    }

    /// The area between two curves over the same places: `x`, low, high. The pieces are parted where an area has no value.
    pub fn area(&mut self, points: &[Option<(f64, f64, f64)>]) {
        for piece in points.split(Option::is_none).filter(|p| p.len() > 1) {
            let mut path = String::new();
            let forth = piece.iter().flatten().map(|p| (p.0, p.2));
            let back = piece.iter().rev().flatten().map(|p| (p.0, p.1));
            for (i, (x, y)) in forth.chain(back).enumerate() {
                let _ = write!(path, "{}{:.1} {:.1}", if i == 0 { 'M' } else { 'L' }, self.at_x(x), self.at_y(y));
            }
            let _ = writeln!(
                self.svg,
                "<path d=\"{path}z\" clip-path=\"url(#panel{})\" fill=\"#000000\" fill-opacity=\"0.16\" \
                 stroke=\"#777777\" stroke-width=\"0.8\"/>",
                self.number
            );
        }
    }

    /// A curve through points in the units of the axes.
    pub fn curve(&mut self, points: &[(f64, f64)], stroke: Stroke, width: f64) {
        let mut path = String::new();
        for (i, (x, y)) in points.iter().filter(|p| p.0.is_finite() && p.1.is_finite()).enumerate() {
            let _ = write!(path, "{}{:.1} {:.1}", if i == 0 { 'M' } else { 'L' }, self.at_x(*x), self.at_y(*y));
        }
        let dashes = match stroke.dashes {
            "" => String::new(),
            dashes => format!(" stroke-dasharray=\"{dashes}\""),
        };
        let _ = writeln!(
            self.svg,
            "<path d=\"{path}\" clip-path=\"url(#panel{})\" fill=\"none\" stroke=\"{}\" stroke-width=\"{width}\" \
             stroke-linejoin=\"round\"{dashes}/>",
            self.number, stroke.colour
        );
    }

    /// A band across the whole panel between two heights, with a line at the middle.
    pub fn band(&mut self, low: f64, middle: f64, high: f64) {
        let (left, _, right, _) = self.edges();
        let (top, bottom) = (self.at_y(high), self.at_y(low));
        let _ = writeln!(
            self.svg,
            "<g clip-path=\"url(#panel{})\"><rect x=\"{left:.1}\" y=\"{top:.1}\" width=\"{:.1}\" height=\"{:.1}\" \
             fill=\"#000000\" fill-opacity=\"0.10\"/><path d=\"M{left:.1} {:.1}H{right:.1}\" stroke=\"#333333\" \
             stroke-width=\"1.2\" stroke-dasharray=\"1 3\"/></g>",
            self.number,
            self.width,
            (bottom - top).max(0.0),
            self.at_y(middle)
        );
    }

    /// A lying range with end ticks at the height of `y`, from `low` to `high`, with a dot at the middle.
    pub fn lying_range(&mut self, y: f64, low: f64, middle: f64, high: f64) {
        let (y, low, middle, high) = (self.at_y(y), self.at_x(low), self.at_x(middle), self.at_x(high));
        self.range(&format!("M{low:.1} {y:.1}H{high:.1}M{low:.1} {:.1}v12M{high:.1} {:.1}v12", y - 6.0, y - 6.0));
        self.dot(middle, y);
    }

    fn range(&mut self, path: &str) {
        let n = self.number;
        let _ = writeln!(
            self.svg,
            "<path d=\"{path}\" clip-path=\"url(#panel{n})\" fill=\"none\" stroke=\"#333333\" stroke-width=\"2.4\"/>"
        );
    }

    fn dot(&mut self, x: f64, y: f64) {
        let _ = writeln!(
            self.svg,
            "<circle cx=\"{x:.1}\" cy=\"{y:.1}\" r=\"4.5\" fill=\"#ffffff\" stroke=\"#333333\" stroke-width=\"2\"/>"
        );
    }

    /// An upright line at `x` with a diamond at its foot: something happened.
    pub fn mark(&mut self, x: f64) {
        let (_, top, _, bottom) = self.edges();
        let x = self.at_x(x);
        let _ = writeln!(
            self.svg,
            "<path d=\"M{x:.1} {top:.1}V{bottom:.1}\" stroke=\"#111111\" stroke-width=\"1.1\" stroke-dasharray=\"6 2 1 2\"/>\
             <path d=\"M{x:.1} {:.1}l6 6l-6 6l-6 -6z\" fill=\"#111111\"/>",
            bottom - 12.0
        );
    }

    /// A sample of a line in a key.
    pub fn sample(&mut self, x: f64, y: f64, stroke: Stroke) {
        let dashes = if stroke.dashes.is_empty() { "none" } else { stroke.dashes };
        let _ = writeln!(
            self.svg,
            "<path d=\"M{x:.1} {y:.1}h44\" stroke=\"{}\" stroke-width=\"2.2\" stroke-dasharray=\"{dashes}\"/>",
            stroke.colour
        );
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ticks_are_round_and_written_with_the_decimals_of_their_step() {
        assert_eq!([tick_step(10.0, 5), tick_step(0.7, 5), tick_step(3600.0, 6)], [2.0, 0.2, 1000.0]);
        assert_eq!([tick_text(0.6, 0.2), tick_text(-40.0, 20.0), tick_text(-0.0, 0.5)], ["0.6", "\u{2212}40", "0"]);
    }

    #[test]
    fn text_of_the_user_stays_text() {
        assert_eq!(escaped("<b id=\"x\">&'\u{7}"), "&lt;b id=&quot;x&quot;&gt;&amp;&#39; ");
    }

    #[test]
    fn labels_keep_off_one_another() {
        let axis = |high| Axis::up_to(high, "");
        let mut panel = Panel::new(0, (100.0, 50.0, 400.0, 200.0), "", axis(10.0), axis(4.0));
        let places = [(120.0, 100.0, Anchor::Start), (120.0, 130.0, Anchor::Start)];
        panel.label(&places, "normal", "flake 1 mm");
        panel.label(&places, "normal", "slab 14 mm");
        let svg = panel.finish();
        let height = |words: &str| {
            let line = svg.lines().find(|l| l.contains(words)).expect("the label");
            line.split("y=\"").nth(1).and_then(|rest| rest.split('"').next()).expect("its height").to_owned()
        };
        assert_eq!((height("flake"), height("slab")), ("100.0".to_owned(), "130.0".to_owned()));
    }

    #[test]
    fn an_area_is_parted_where_it_has_no_value() {
        let axis = |high| Axis::up_to(high, "");
        let mut panel = Panel::new(0, (100.0, 50.0, 400.0, 200.0), "", axis(10.0), axis(4.0));
        let at = |x: f64| Some((x, 1.0, 2.0));
        panel.area(&[at(0.0), at(1.0), None, at(2.0), at(3.0), None, at(4.0)]);
        assert_eq!(panel.finish().matches("fill-opacity=\"0.16\"").count(), 2, "a single moment has no area");
    }

    #[test]
    fn values_fall_on_their_places() {
        let axis = |high| Axis::up_to(high, "");
        let panel = Panel::new(0, (100.0, 50.0, 400.0, 200.0), "", axis(10.0), axis(4.0));
        assert_eq!((panel.at_x(0.0), panel.at_x(5.0), panel.at_y(0.0), panel.at_y(4.0)), (100.0, 300.0, 250.0, 50.0));
    }
}

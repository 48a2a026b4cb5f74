//! Shapes and text → SVG text. Knows pixels, not millimetres or physics.

use super::dots::{DOTS, Dot, dots, push_dots, push_hundredths};

/// Ink of outlines and text.
pub(super) const INK: &str = "#22303c";
/// Lighter ink of dimensions and leaders.
pub(super) const FAINT_INK: &str = "#5d7080";

/// An upright box on the page [px], y down.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Rect {
    pub x: f64,
    pub y: f64,
    pub width: f64,
    pub height: f64,
}

impl Rect {
    /// True when the two boxes share area; touching edges do not count.
    pub fn overlaps(&self, other: &Rect) -> bool {
        self.x < other.x + other.width
            && other.x < self.x + self.width
            && self.y < other.y + other.height
            && other.y < self.y + self.height
    }

    /// True when the straight line from `a` to `b` passes through the box (Liang–Barsky clipping).
    pub fn is_crossed(&self, a: [f64; 2], b: [f64; 2]) -> bool {
        let (mut enter, mut leave) = (0.0f64, 1.0f64);
        for (from, along, low, size) in
            [(a[0], b[0] - a[0], self.x, self.width), (a[1], b[1] - a[1], self.y, self.height)]
        {
            if along == 0.0 {
                if from < low || low + size < from {
                    return false;
                }
                continue;
            }
            let (t, u) = ((low - from) / along, (low + size - from) / along);
            enter = enter.max(t.min(u));
            leave = leave.min(t.max(u));
        }
        enter <= leave
    }

    /// True when `inner` lies in this box.
    pub fn holds(&self, inner: &Rect) -> bool {
        self.x <= inner.x
            && self.y <= inner.y
            && inner.x + inner.width <= self.x + self.width
            && inner.y + inner.height <= self.y + self.height
    }
}

/// Width that is reserved for a text [px]: 0.62 em a character, above the mean of common sans-serif faces.
pub(super) fn text_width(text: &str, size: f64) -> f64 {
    0.62 * size * text.chars().count() as f64
}

/// Where a text stands relative to its point.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Anchor {
    Start,
    Middle,
}

/// A page that grows by shapes.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Canvas {
    body: String,
}

impl Canvas {
    /// An empty page.
    pub fn new() -> Canvas {
        Canvas { body: String::new() }
    }

    /// Any markup, for groups and definitions.
    pub fn raw(&mut self, markup: &str) {
        self.body.push_str(markup);
        self.body.push('\n');
    }

    /// Closed polygons as one path with the given presentation attributes.
    pub fn polygons(&mut self, polygons: &[Vec<[f64; 2]>], style: &str) {
        self.loops(&polygons.iter().map(|p| dots(p)).collect::<Vec<_>>(), style);
    }

    /// Closed polygons of dots as one path.
    pub fn loops(&mut self, loops: &[Vec<Dot>], style: &str) {
        let mut path = String::new();
        for points in loops {
            push_dots(&mut path, points);
            path.push('Z');
        }
        self.path(&path, style);
    }

    /// Open lines as one path.
    pub fn polylines(&mut self, lines: &[Vec<[f64; 2]>], style: &str) {
        self.strokes(&lines.iter().map(|l| dots(l)).collect::<Vec<_>>(), style);
    }

    /// Open lines of dots as one path.
    pub fn strokes(&mut self, lines: &[Vec<Dot>], style: &str) {
        let mut path = String::new();
        for points in lines {
            push_dots(&mut path, points);
        }
        self.path(&path, &format!("fill=\"none\" {style}"));
    }

    /// One path element; none for an empty path.
    fn path(&mut self, path: &str, style: &str) {
        if !path.is_empty() {
            for piece in ["<path d=\"", path, "\" ", style, "/>\n"] {
                self.body.push_str(piece);
            }
        }
    }

    /// One straight line.
    pub fn line(&mut self, from: [f64; 2], to: [f64; 2], style: &str) {
        self.polylines(&[vec![from, to]], style);
    }

    /// A filled box.
    pub fn rect(&mut self, rect: &Rect, style: &str) {
        self.raw(&format!(
            "<rect x=\"{}\" y=\"{}\" width=\"{}\" height=\"{}\" {style}/>",
            short(rect.x),
            short(rect.y),
            short(rect.width),
            short(rect.height)
        ));
    }

    /// A circle.
    pub fn circle(&mut self, center: [f64; 2], radius: f64, style: &str) {
        let [x, y] = center.map(short);
        self.raw(&format!("<circle cx=\"{x}\" cy=\"{y}\" r=\"{}\" {style}/>", short(radius)));
    }

    /// Text with its baseline at `at`.
    pub fn text(&mut self, at: [f64; 2], size: f64, anchor: Anchor, style: &str, text: &str) {
        let [x, y] = at.map(short);
        let anchor = match anchor {
            Anchor::Start => "start",
            Anchor::Middle => "middle",
        };
        self.raw(&format!(
            "<text x=\"{x}\" y=\"{y}\" font-size=\"{}\" text-anchor=\"{anchor}\" {style}>{}</text>",
            short(size),
            escape(text)
        ));
    }

    /// The file: white page, one sans-serif face for every text.
    pub fn finish(self, width: f64, height: f64, title: &str) -> String {
        let (w, h) = (short(width.ceil()), short(height.ceil()));
        format!(
            "<svg xmlns=\"http://www.w3.org/2000/svg\" width=\"{w}\" height=\"{h}\" viewBox=\"0 0 {w} {h}\" \
             font-family=\"sans-serif\" fill=\"{INK}\">\n<title>{}</title>\n\
             <rect width=\"{w}\" height=\"{h}\" fill=\"#ffffff\"/>\n{}</svg>\n",
            escape(title),
            self.body
        )
    }
}

/// A coordinate with two decimals at most.
fn short(value: f64) -> String {
    let mut text = String::new();
    push_hundredths(&mut text, (DOTS * value).round() as i32);
    text
}

/// Text for an XML element or attribute; characters that XML 1.0 forbids become spaces.
pub(super) fn escape(text: &str) -> String {
    let mut clean = String::new();
    for c in text.chars() {
        match c {
            '&' => clean.push_str("&amp;"),
            '<' => clean.push_str("&lt;"),
            '>' => clean.push_str("&gt;"),
            '"' => clean.push_str("&quot;"),
            c if c.is_control() || matches!(c, '\u{fffe}' | '\u{ffff}') => clean.push(' '),
            c => clean.push(c),
        }
    }
    clean
}

#[cfg(test)]
pub(super) mod tests {
    use super::*;

    /// The reserved box of every text of a finished drawing, with the text.
    pub(in crate::report) fn text_boxes(svg: &str) -> Vec<(Rect, String)> {
        let number = |tag: &str, key: &str| -> f64 {
            let from = tag.find(&format!(" {key}=\"")).unwrap() + key.len() + 3;
            tag[from..].split('"').next().unwrap().parse().unwrap()
        };
        let boxes = svg.split("<text").skip(1).map(|piece| {
            let (tag, rest) = piece.split_once('>').unwrap();
            let text = rest.split("</text>").next().unwrap();
            let plain = text
                .replace("&amp;", "&")
                .replace("&lt;", "<")
                .replace("&gt;", ">")
                .replace("&quot;", "\"");
            let size = number(tag, "font-size");
            let (x, y, w) = (number(tag, "x"), number(tag, "y"), text_width(&plain, size));
            let before = if tag.contains("\"middle\"") { 0.5 * w } else { 0.0 };
            let (up, down) = (0.8 * size, 0.25 * size);
            let rect = if tag.contains("rotate(-90") {
                Rect { x: x - up, y: y - (w - before), width: up + down, height: w }
            } else {
                Rect { x: x - before, y: y - up, width: w, height: up + down }
            };
            (rect, plain)
        });
        boxes.collect()
    }

    /// Fails when two texts overlap or one leaves the page.
    #[track_caller]
    pub(in crate::report) fn check_texts(svg: &str) {
        let header = svg.split("viewBox=\"0 0 ").nth(1).unwrap().split('"').next().unwrap();
        let (w, h) = header.split_once(' ').unwrap();
        let page = Rect { x: 0.0, y: 0.0, width: w.parse().unwrap(), height: h.parse().unwrap() };
        let boxes = text_boxes(svg);
        for (i, (rect, text)) in boxes.iter().enumerate() {
            assert!(page.holds(rect), "\"{text}\" leaves the page: {rect:?}");
            for (other, with) in &boxes[..i] {
                assert!(!rect.overlaps(other), "\"{text}\" overlaps \"{with}\"");
            }
        }
    }

    #[test]
    fn markup_in_names_is_escaped() {
        let mut canvas = Canvas::new();
        canvas.text([0.0, 20.0], 10.0, Anchor::Start, "", "a<b & \"c\"\u{1}");
        assert!(canvas.finish(100.0, 100.0, "t").contains("a&lt;b &amp; &quot;c&quot; </text>"));
    }

    #[test]
    fn hundredths_print_as_the_shortest_decimal_fraction() {
        let texts = [0.0, 7.0, -0.05, 120.4, -3.25, 0.004].map(short);
        assert_eq!(texts, ["0", "7", "-0.05", "120.4", "-3.25", "0"]);
    }
}

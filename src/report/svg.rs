//! Shapes and text → SVG text. Knows pixels, not millimetres or physics.

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

/// A point in hundredths of a pixel: finer than any screen, exact to add and compare, quick to print.
pub(super) type Dot = [i32; 2];

/// Hundredths in a pixel.
pub(super) const DOTS: f64 = 100.0;

/// The dot nearest to a point; what is not a number becomes 0.
pub(super) fn dot(point: [f64; 2]) -> Dot {
    point.map(|x| (DOTS * x).round() as i32)
}

fn dots(points: &[[f64; 2]]) -> Vec<Dot> {
    points.iter().map(|&p| dot(p)).collect()
}

/// Appends "M x y" and then "l" with steps from point to point; equal neighbours are dropped.
fn push_dots(path: &mut String, dots: &[Dot]) {
    let Some(&first) = dots.first() else { return };
    path.push('M');
    push_hundredths(path, first[0]);
    path.push(' ');
    push_hundredths(path, first[1]);
    let mut last = first;
    let mut is_first = true;
    for &dot in dots {
        if dot != last {
            for axis in 0..2 {
                // Coordinates of a page never differ by more than i32 holds; saturation keeps rubbish harmless.
                let step = dot[axis].saturating_sub(last[axis]);
                if is_first {
                    path.push('l');
                    is_first = false;
                } else if 0 <= step {
                    path.push(' ');
                }
                push_hundredths(path, step);
            }
            last = dot;
        }
    }
}

/// Appends a number of hundredths as a decimal fraction without trailing zeros: 150 → "1.5".
fn push_hundredths(path: &mut String, hundredths: i32) {
    if hundredths < 0 {
        path.push('-');
    }
    let (mut whole, rest) = (hundredths.unsigned_abs() / 100, hundredths.unsigned_abs() % 100);
    let mut digits = [0u8; 10];
    let mut n_digits = 0;
    while 0 < whole || n_digits == 0 {
        digits[n_digits] = (whole % 10) as u8;
        whole /= 10;
        n_digits += 1;
    }
    for digit in digits[..n_digits].iter().rev() {
        path.push(char::from(b'0' + digit));
    }
    if 0 < rest {
        path.push('.');
        path.push(char::from(b'0' + (rest / 10) as u8));
        if !rest.is_multiple_of(10) {
            path.push(char::from(b'0' + (rest % 10) as u8));
        }
    }
}

/// A coordinate with two decimals at most.
fn short(value: f64) -> String {
    let mut text = String::new();
    push_hundredths(&mut text, (DOTS * value).round() as i32);
    text
}

/// Drops points that lie within `chord` dots of the straight line between the kept ones before and after them.
pub(super) fn thin_out(line: &[Dot], chord: i64) -> Vec<Dot> {
    let mut kept = Vec::with_capacity(line.len() / 2 + 2);
    kept.extend(line.first());
    let mut from = 0;
    while from + 1 < line.len() {
        let mut to = from + 1;
        while to + 1 < line.len() && to - from < N_SKIP_MAX {
            let (start, end) = (line[from], line[to + 1]);
            if !line[from + 1..=to].iter().all(|&p| is_near(p, start, end, chord)) {
                break;
            }
            to += 1;
        }
        kept.push(line[to]);
        from = to;
    }
    kept
}

/// Points between two kept ones at most, so that the look ahead stays short.
const N_SKIP_MAX: usize = 16;

/// True when `p` lies within `chord` of the line through `a` and `b`, and between them (of `a` when both coincide).
fn is_near(p: Dot, a: Dot, b: Dot, chord: i64) -> bool {
    let difference = |p: Dot, q: Dot| [0, 1].map(|k| i64::from(p[k]) - i64::from(q[k]));
    let (d, e) = (difference(b, a), difference(p, a));
    let squared = d[0] * d[0] + d[1] * d[1];
    if squared == 0 {
        return e[0] * e[0] + e[1] * e[1] <= chord * chord;
    }
    let (cross, along) = (d[0] * e[1] - d[1] * e[0], d[0] * e[0] + d[1] * e[1]);
    // In f64: the squares of cross products outgrow i64 on large pages.
    (0..=squared).contains(&along)
        && (cross as f64).powi(2) <= (chord * chord) as f64 * squared as f64
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
    fn paths_are_short_and_drop_repeated_points() {
        let mut path = String::new();
        push_dots(&mut path, &dots(&[[0.0, -0.001], [0.001, 0.0], [1.5, 2.25], [1.0, 12.3]]));
        assert_eq!(path, "M0 0l1.5 2.25-0.5 10.05");
    }

    #[test]
    fn hundredths_print_as_the_shortest_decimal_fraction() {
        let texts = [0.0, 7.0, -0.05, 120.4, -3.25, 0.004].map(short);
        assert_eq!(texts, ["0", "7", "-0.05", "120.4", "-3.25", "0"]);
    }

    #[test]
    fn thinning_keeps_ends_and_corners() {
        let line: Vec<Dot> =
            (0..=30).map(|i| [100 * i, if i < 20 { 0 } else { 100 * (i - 20) }]).collect();
        let thin = thin_out(&line, 8);
        assert!(thin.len() < 8, "{thin:?}");
        assert_eq!((thin[0], thin[thin.len() - 1]), ([0, 0], [3000, 1000]));
        assert!(thin.contains(&[2000, 0]), "{thin:?}");
        // There and back again: the turning point stays.
        assert!(thin_out(&[[0, 0], [500, 0], [100, 0]], 8).contains(&[500, 0]));
    }
}

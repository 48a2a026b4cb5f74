//! `Saturation` → `saturate.svg`: inductances above, flux densities below, against one current axis.

use crate::report::labels::{Wish, column, size_of};
use crate::report::numbers::{clip, percent};
use crate::report::svg::{Anchor, Canvas, FAINT_INK, INK, Rect, text_width};
use crate::study::saturate::{Row, Saturation};
use crate::units::engineering;

/// Font size [px].
const TEXT: f64 = 11.0;
/// Left edge and width of both panels [px].
const LEFT: f64 = 66.0;
const WIDTH: f64 = 560.0;
/// Heights of the panels and the room between them [px].
const HEIGHTS: [f64; 2] = [290.0, 180.0];
const BETWEEN: f64 = 34.0;
/// Room above the first panel for the title [px].
const TITLE: f64 = 52.0;
/// Height of one row of the labels of the falls [px].
const FALL_ROW: f64 = 16.0;
/// Colours of the curves, dark enough for white paper and apart in lightness.
const COLOURS: [&str; 6] = ["#17507a", "#b4532a", "#3f7d54", "#7a4a8c", "#8a6d1f", "#3d8c95"];
/// Dashes once the colours are used up.
const DASHES: [&str; 3] = ["", " stroke-dasharray=\"7 3\"", " stroke-dasharray=\"2 3\""];

/// A scale with round ticks: pixels of a value, and the ticks' texts in one unit.
struct Axis {
    top: f64,
    step: f64,
    factor: f64,
    unit: String,
}

impl Axis {
    /// From 0 to a round number above `most`, in about `n` steps.
    fn new(most: f64, unit: &str, n: f64) -> Axis {
        // A table of zeros still has an axis.
        let most = if 0.0 < most && most.is_finite() { most } else { 1.0 };
        let text = engineering(most, unit, 4);
        let (digits, unit) = text.split_once(' ').unwrap_or((&text, unit));
        let ratio = digits.parse::<f64>().unwrap_or(most) / most;
        let factor = 10f64.powi(ratio.log10().round() as i32);
        let rough = factor * most / n;
        let decade = 10f64.powf(rough.log10().floor());
        let step = [1.0, 2.0, 5.0, 10.0].map(|m| m * decade).into_iter().find(|s| rough <= *s);
        let step = step.unwrap_or(10.0 * decade);
        // A hair of slack, so that a maximum on a tick does not add a step.
        let top = step * (factor * most / step - 1e-9).ceil();
        Axis { top: top / factor, step: step / factor, factor, unit: unit.to_string() }
    }

    fn ticks(&self) -> impl Iterator<Item = (f64, String)> + '_ {
        let n = (self.top / self.step).round() as usize;
        let n_decimals = (-(self.step * self.factor).log10().floor()).max(0.0) as usize;
        (0..=n).map(move |k| {
            let value = self.step * k as f64;
            (value, format!("{:.n_decimals$}", value * self.factor))
        })
    }
}

/// One panel: its box and its scales.
struct Panel<'a> {
    area: Rect,
    x: &'a Axis,
    y: Axis,
}

impl Panel<'_> {
    fn at(&self, x: f64, y: f64) -> [f64; 2] {
        let up = (y / self.y.top).clamp(0.0, 1.0);
        [
            self.area.x + self.area.width * x / self.x.top,
            self.area.y + self.area.height * (1.0 - up),
        ]
    }

    /// Grid, ticks of the height and the quantity's name.
    fn frame(&self, canvas: &mut Canvas, name: &str) {
        let (a, grid) = (&self.area, "stroke=\"#d9dfe4\" stroke-width=\"0.7\"");
        for (value, text) in self.y.ticks() {
            let y = self.at(0.0, value)[1];
            canvas.line([a.x, y], [a.x + a.width, y], grid);
            let x = a.x - 6.0 - text_width(&text, TEXT);
            canvas.text([x, y + 0.35 * TEXT], TEXT, Anchor::Start, "", &text);
        }
        for (value, _) in self.x.ticks() {
            let x = self.at(value, 0.0)[0];
            canvas.line([x, a.y], [x, a.y + a.height], grid);
        }
        canvas.rect(a, &format!("fill=\"none\" stroke=\"{FAINT_INK}\" stroke-width=\"0.8\""));
        let (x, y) = (14.0, a.y + 0.5 * a.height);
        let style = format!("transform=\"rotate(-90 {x} {y})\"");
        canvas.text([x, y], TEXT, Anchor::Middle, &style, &format!("{name} in {}", self.y.unit));
    }

    /// The curves with a mark at every row, named in a column at the right.
    fn curves(&self, canvas: &mut Canvas, curves: &[Curve], first_style: usize) {
        let mut wishes = Vec::with_capacity(curves.len());
        for (k, curve) in curves.iter().enumerate() {
            let (colour, dash) = style(first_style + k);
            let points: Vec<[f64; 2]> = curve.points.iter().map(|p| self.at(p[0], p[1])).collect();
            for &point in &points {
                canvas.circle(point, 1.7, &format!("fill=\"{colour}\""));
            }
            let anchor = points.last().copied().unwrap_or([self.area.x, self.area.y]);
            wishes.push(Wish { anchor, lines: vec![curve.name.clone()] });
            let stroke = format!("stroke=\"{colour}\" stroke-width=\"1.4\"{dash}");
            canvas.polylines(&[points], &stroke);
        }
        let x = self.area.x + self.area.width + 22.0;
        let boxes = column(&wishes, x, [self.area.y, self.area.y + self.area.height], TEXT);
        for (k, (place, wish)) in boxes.iter().zip(&wishes).enumerate() {
            let (colour, dash) = style(first_style + k);
            let middle = [x - 4.0, place.y + 0.5 * place.height];
            let stroke = format!("stroke=\"{colour}\" stroke-width=\"0.8\"{dash}");
            canvas.line(wish.anchor, middle, &stroke);
            let baseline = [x, place.y + 0.9 * TEXT];
            canvas.text(
                baseline,
                TEXT,
                Anchor::Start,
                &format!("fill=\"{colour}\""),
                &curves[k].name,
            );
        }
    }
}

fn style(k: usize) -> (&'static str, &'static str) {
    (COLOURS[k % COLOURS.len()], DASHES[(k / COLOURS.len()) % DASHES.len()])
}

/// One named curve.
struct Curve {
    name: String,
    points: Vec<[f64; 2]>,
}

impl Curve {
    fn new(name: &str, rows: &[Row], value: impl Fn(&Row) -> f64) -> Curve {
        let points = rows.iter().map(|row| [row.current, value(row)]).collect();
        Curve { name: clip(name, 26), points }
    }
}

/// The plot as SVG text; no two texts overlap and none leaves the page.
pub fn saturate_svg(found: &Saturation) -> String {
    let rows = &found.rows;
    let most = |value: &dyn Fn(&Row) -> f64| rows.iter().map(value).fold(0.0, f64::max);
    let x = Axis::new(most(&|r| r.current), "A", 6.0);
    let labels = fall_labels(found, &x);
    let n_label_rows = labels.iter().map(|l| l.row + 1).max().unwrap_or(0);
    let top = TITLE + FALL_ROW * n_label_rows as f64 + 8.0;
    let panel = |y: f64, height: f64, axis: Axis| Panel {
        area: Rect { x: LEFT, y, width: WIDTH, height },
        x: &x,
        y: axis,
    };
    let above = Axis::new(most(&|r| r.apparent.max(r.incremental)), "H", 5.0);
    let below = Axis::new(most(&|r| r.exceeded.iter().copied().fold(0.0, f64::max)), "T", 4.0);
    let above = panel(top, HEIGHTS[0], above);
    let below = panel(top + HEIGHTS[0] + BETWEEN, HEIGHTS[1], below);

    let mut canvas = Canvas::new();
    let title = clip(&found.title, 70);
    canvas.text([14.0, 24.0], 15.0, Anchor::Start, "font-weight=\"bold\"", &title);
    let caption = format!("Inductance of {} against its current", clip(&found.winding, 40));
    canvas.text([14.0, 42.0], TEXT, Anchor::Start, &format!("fill=\"{FAINT_INK}\""), &caption);
    let has_band = band(&mut canvas, &above, rows);
    above.frame(&mut canvas, "Inductance");
    fall_lines(&mut canvas, &above, &labels, top);
    let inductances = [
        Curve::new("apparent", rows, |r| r.apparent),
        Curve::new("incremental", rows, |r| r.incremental),
    ];
    above.curves(&mut canvas, &inductances, 0);
    below.frame(&mut canvas, "Flux density");
    let parts: Vec<Curve> = (found.parts.iter().enumerate())
        .map(|(k, name)| Curve::new(name, rows, |r| r.exceeded[k]))
        .collect();
    below.curves(&mut canvas, &parts, 2);
    let bottom = current_axis(&mut canvas, &below);
    let bottom = bottom + remarks(&mut canvas, bottom, has_band);
    // Room for many parts, whose names may need more height than the panel has.
    let names: f64 =
        parts.iter().map(|c| size_of(std::slice::from_ref(&c.name), TEXT)[1] + 5.0).sum();
    let bottom = bottom.max(below.area.y + names + 10.0);
    let widest = parts.iter().chain(&inductances).map(|c| text_width(&c.name, TEXT));
    let right = LEFT + WIDTH + 22.0 + widest.fold(0.0, f64::max) + 10.0;
    let title_right = 24.0 + text_width(&title, 15.0);
    canvas.finish(right.max(title_right), bottom, &title)
}

/// The guaranteed ends of λ/I as a pale band; false where there are none.
fn band(canvas: &mut Canvas, panel: &Panel, rows: &[Row]) -> bool {
    let ends = |k: usize| -> Vec<[f64; 2]> {
        let rows = rows.iter().filter(|row| 0.0 < row.current);
        rows.filter_map(|row| Some(panel.at(row.current, row.flux_linkage_ends?[k] / row.current)))
            .collect()
    };
    let (mut outline, mut high) = (ends(0), ends(1));
    if outline.len() < 2 {
        return false;
    }
    high.reverse();
    outline.extend(high);
    canvas.polygons(&[outline], "fill=\"#17507a\" fill-opacity=\"0.13\"");
    true
}

/// A label of a fall, in a row above the panel so that none overlaps another.
struct FallLabel {
    x: f64,
    row: usize,
    current: f64,
    text: String,
}

fn fall_labels(found: &Saturation, axis: &Axis) -> Vec<FallLabel> {
    let mut labels: Vec<FallLabel> = Vec::new();
    for fall in &found.falls {
        let Some(current) = fall.current else { continue };
        let text = format!("−{} at {}", percent(fall.share, 2), engineering(current, "A", 3));
        let half = 0.5 * text_width(&text, TEXT) + 3.0;
        let x = (LEFT + WIDTH * current / axis.top).clamp(LEFT, LEFT + WIDTH);
        // The first row in which everything stands clear; one row a label is always enough.
        let is_clear = |row: usize| {
            let others = labels.iter().filter(|l| l.row == row);
            others.into_iter().all(|l| half + 0.5 * text_width(&l.text, TEXT) <= (x - l.x).abs())
        };
        let row = (0..=labels.len()).find(|&row| is_clear(row)).unwrap_or(labels.len());
        labels.push(FallLabel { x, row, current, text });
    }
    labels
}

fn fall_lines(canvas: &mut Canvas, panel: &Panel, labels: &[FallLabel], top: f64) {
    for label in labels {
        let y = top - 8.0 - FALL_ROW * label.row as f64;
        let foot = panel.at(label.current, 0.0);
        let stroke =
            format!("stroke=\"{FAINT_INK}\" stroke-width=\"0.8\" stroke-dasharray=\"3 3\"");
        canvas.line(foot, [foot[0], top], &stroke);
        canvas.line([foot[0], top], [foot[0], top - 4.0], &format!("stroke=\"{INK}\""));
        canvas.text([label.x, y], TEXT, Anchor::Middle, "", &label.text);
    }
}

/// Ticks and name of the current below a panel; returns the lowest line used.
fn current_axis(canvas: &mut Canvas, panel: &Panel) -> f64 {
    let bottom = panel.area.y + panel.area.height;
    for (value, text) in panel.x.ticks() {
        let x = panel.at(value, 0.0)[0];
        canvas.text([x, bottom + 15.0], TEXT, Anchor::Middle, "", &text);
    }
    let middle = panel.area.x + 0.5 * panel.area.width;
    let name = format!("Current in {}", panel.x.unit);
    canvas.text([middle, bottom + 32.0], TEXT, Anchor::Middle, "", &name);
    bottom + 32.0
}

/// What the picture cannot say by itself; returns the height used.
fn remarks(canvas: &mut Canvas, bottom: f64, has_band: bool) -> f64 {
    let mut lines = vec![
        "Dashed: where the incremental inductance has fallen by that much of its value at I → 0.",
        "Flux density: exceeded by 5 % of each part's volume.",
    ];
    if has_band {
        lines.insert(
            0,
            "Pale band: guaranteed ends of the apparent inductance; curves are best values.",
        );
    }
    for (k, line) in lines.iter().enumerate() {
        let at = [14.0, bottom + 20.0 + 15.0 * k as f64];
        canvas.text(at, TEXT, Anchor::Start, &format!("fill=\"{FAINT_INK}\""), line);
    }
    20.0 + 15.0 * lines.len() as f64
}

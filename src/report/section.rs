//! `Model` and `Outline` → `section.svg`: the half section with named regions and the dimensions of its form.

mod names;

use super::numbers::{clip, millimeters};
use super::svg::{Anchor, Canvas, FAINT_INK, INK, Rect, text_width};
use crate::geometry::{Outline, Region, RegionKind};
use crate::model::{Model, Point};

/// Font size of labels and dimensions [px].
const TEXT: f64 = 11.0;
/// Room for the drawing itself [px].
const DRAWING: [f64; 2] = [400.0, 520.0];
/// Room left of the axis for the heights [px].
const LEFT: f64 = 84.0;
/// Room above the drawing for the title [px].
const TOP: f64 = 62.0;
/// Distance of two rows of dimensions [px].
const ROW: f64 = 20.0;

/// Where the section lies on the page.
struct View {
    scale: f64,
    z_top: f64,
    r_max: f64,
    z_bottom: f64,
}

impl View {
    fn at(&self, p: Point) -> [f64; 2] {
        [LEFT + self.scale * p.r, TOP + self.scale * (self.z_top - p.z)]
    }

    fn bottom(&self) -> f64 {
        TOP + self.scale * (self.z_top - self.z_bottom)
    }

    fn right(&self) -> f64 {
        LEFT + self.scale * self.r_max
    }
}

/// The drawing as SVG text; no two texts overlap and none leaves the page.
pub fn section_svg(model: &Model, outline: &Outline) -> String {
    let view = view(outline);
    let mut canvas = Canvas::new();
    shapes(&mut canvas, outline, &view);
    let axis_end = view.bottom() + 10.0;
    let axis = [[LEFT, TOP - 14.0], [LEFT, axis_end]];
    // A white ground keeps the dashes readable where a shape begins on the axis.
    canvas.line(axis[0], axis[1], "stroke=\"#ffffff\" stroke-width=\"3\"");
    let dashes = format!("stroke=\"{FAINT_INK}\" stroke-dasharray=\"12 3 2 3\"");
    canvas.line(axis[0], axis[1], &dashes);
    let bottom = diameters(&mut canvas, model, outline, &view);
    heights(&mut canvas, model, outline, &view);
    let [right, label_bottom] =
        names::names(&mut canvas, model, outline, &view, &extension_lines(model, outline, &view));
    let title = clip(&model.title, 60);
    canvas.text([14.0, 24.0], 15.0, Anchor::Start, "font-weight=\"bold\"", &title);
    let caption = "Half section, axis of rotation on the left; lengths in mm";
    canvas.text([14.0, 42.0], TEXT, Anchor::Start, &format!("fill=\"{FAINT_INK}\""), caption);
    let width =
        right.max(14.0 + text_width(&title, 15.0)).max(14.0 + text_width(caption, TEXT)) + 14.0;
    canvas.finish(width, bottom.max(label_bottom) + 14.0, &model.title)
}

/// Scale that lets every shape fit the drawing's room.
fn view(outline: &Outline) -> View {
    let points = outline.regions.iter().flat_map(|r| r.polygons.iter().flatten());
    let (mut r_max, mut z_bottom, mut z_top) = (0.0f64, f64::MAX, f64::MIN);
    for p in points {
        r_max = r_max.max(p.r);
        z_bottom = z_bottom.min(p.z);
        z_top = z_top.max(p.z);
    }
    if r_max <= 0.0 || z_top <= z_bottom {
        return View { scale: 1.0, z_top: 0.0, r_max: 0.0, z_bottom: 0.0 };
    }
    let scale = (DRAWING[0] / r_max).min(DRAWING[1] / (z_top - z_bottom));
    View { scale, z_top, r_max, z_bottom }
}

/// Fill of a region, `None` for air that is not worth a tint.
fn fill(region: &Region) -> Option<&'static str> {
    match region.kind {
        RegionKind::Outside | RegionKind::Window => None,
        RegionKind::Gap { .. } => Some("#f7e3d4"),
        RegionKind::Joint(_) => Some("#e9c7ae"),
        RegionKind::Leg(_) | RegionKind::Part(_) => Some("#cdd3cb"),
        RegionKind::Winding { .. } => Some("#e6bd8f"),
    }
}

fn shapes(canvas: &mut Canvas, outline: &Outline, view: &View) {
    for region in &outline.regions {
        let Some(fill) = fill(region) else { continue };
        let polygons: Vec<Vec<[f64; 2]>> = region
            .polygons
            .iter()
            .map(|polygon| polygon.iter().map(|&p| view.at(p)).collect())
            .collect();
        let style = format!(
            "fill=\"{fill}\" stroke=\"{INK}\" stroke-width=\"0.9\" stroke-linejoin=\"round\""
        );
        canvas.polygons(&polygons, &style);
    }
}

/// Radii that are dimensioned, smallest first: those of the form, else the largest.
fn radii(model: &Model, view: &View) -> Vec<f64> {
    let mut radii = match &model.core {
        None => vec![view.r_max],
        Some(core) => {
            let size = core.dimensions(&model.gaps);
            let mut radii = vec![size.hole_radius, size.post_radius, size.plate_radius];
            radii.extend(size.wall_radii.into_iter().flatten());
            radii
        }
    };
    radii.retain(|&r| 0.0 < r);
    radii.sort_by(f64::total_cmp);
    radii.dedup_by(|a, b| (*a - *b).abs() < 1e-9);
    radii
}

/// Draws the diameters below the section, one row each; returns the lowest edge used [px].
fn diameters(canvas: &mut Canvas, model: &Model, outline: &Outline, view: &View) -> f64 {
    let base = view.bottom();
    for [from, to] in extension_lines(model, outline, view) {
        canvas.line(from, to, &thin());
    }
    for (row, radius) in radii(model, view).into_iter().enumerate() {
        let y = base + 24.0 + ROW * row as f64;
        let x = LEFT + view.scale * radius;
        canvas.line([LEFT, y], [x, y], &thin());
        arrow(canvas, [x, y], [1.0, 0.0]);
        let text = format!("Ø {}", millimeters(2.0 * radius));
        let width = text_width(&text, TEXT) + 6.0;
        if width + 12.0 < x - LEFT {
            boxed(canvas, [0.5 * (LEFT + x), y], &text, width);
        } else {
            boxed(canvas, [x + 6.0 + 0.5 * width, y], &text, width);
        }
    }
    base + 24.0 + ROW * radii(model, view).len() as f64
}

/// The upright lines from the section down to the rows of diameters.
fn extension_lines(model: &Model, outline: &Outline, view: &View) -> Vec<[[f64; 2]; 2]> {
    let line = |(row, radius): (usize, f64)| {
        let x = LEFT + view.scale * radius;
        let from =
            TOP + view.scale * (view.z_top - lowest(outline, radius).unwrap_or(view.z_bottom));
        [[x, from + 3.0], [x, view.bottom() + 28.0 + ROW * row as f64]]
    };
    radii(model, view).into_iter().enumerate().map(line).collect()
}

/// Lowest point of the shapes at about that radius [m].
fn lowest(outline: &Outline, radius: f64) -> Option<f64> {
    let corners = outline.regions.iter().flat_map(|r| r.polygons.iter().flatten());
    corners.filter(|p| (p.r - radius).abs() < 1e-3 * radius).map(|p| p.z).reduce(f64::min)
}

/// Heights that are dimensioned, as (bottom, top, place where the line starts): the window's and the whole.
fn spans(model: &Model, outline: &Outline, view: &View) -> Vec<[f64; 2]> {
    let mut spans = vec![];
    if let Some(core) = &model.core {
        let size = core.dimensions(&model.gaps);
        if 0.0 < size.plate_thickness {
            spans.push([-size.window_top, size.window_top]);
        }
        spans.push([-size.core_top, size.core_top]);
    }
    let outer = [view.z_bottom, view.z_top];
    let is_new =
        spans.last().is_none_or(|s: &[f64; 2]| (s[1] - s[0]) * (1.0 + 1e-9) < outer[1] - outer[0]);
    if is_new && !outline.regions.is_empty() {
        spans.push(outer);
    }
    spans
}

/// Draws the heights left of the axis.
fn heights(canvas: &mut Canvas, model: &Model, outline: &Outline, view: &View) {
    for (column, [low, high]) in spans(model, outline, view).into_iter().enumerate() {
        let x = LEFT - 18.0 - ROW * column as f64;
        let [bottom, top] = [low, high].map(|z| TOP + view.scale * (view.z_top - z));
        for y in [bottom, top] {
            canvas.line([x - 4.0, y], [LEFT - 3.0, y], &thin());
        }
        canvas.line([x, bottom], [x, top], &thin());
        arrow(canvas, [x, bottom], [0.0, 1.0]);
        arrow(canvas, [x, top], [0.0, -1.0]);
        let text = millimeters(high - low);
        let (width, middle) = (text_width(&text, TEXT) + 6.0, 0.5 * (bottom + top));
        let back = Rect { x: x - 7.0, y: middle - 0.5 * width, width: 14.0, height: width };
        canvas.rect(&back, "fill=\"#ffffff\"");
        let at = [x + 4.0, middle];
        let turn =
            format!("fill=\"{FAINT_INK}\" transform=\"rotate(-90 {:.2} {:.2})\"", at[0], at[1]);
        canvas.text(at, TEXT, Anchor::Middle, &turn, &text);
    }
}

fn thin() -> String {
    format!("stroke=\"{FAINT_INK}\" stroke-width=\"0.7\"")
}

/// A slim filled arrow head with its tip at `tip`.
fn arrow(canvas: &mut Canvas, tip: [f64; 2], along: [f64; 2]) {
    let side = [-along[1], along[0]];
    let corner =
        |s: f64| [tip[0] - 7.0 * along[0] + s * side[0], tip[1] - 7.0 * along[1] + s * side[1]];
    canvas.polygons(&[vec![tip, corner(2.0), corner(-2.0)]], &format!("fill=\"{FAINT_INK}\""));
}

/// Text on a white ground, centred on a dimension line.
fn boxed(canvas: &mut Canvas, middle: [f64; 2], text: &str, width: f64) {
    let back = Rect { x: middle[0] - 0.5 * width, y: middle[1] - 7.0, width, height: 14.0 };
    canvas.rect(&back, "fill=\"#ffffff\"");
    let style = format!("fill=\"{FAINT_INK}\"");
    canvas.text([middle[0], middle[1] + 4.0], TEXT, Anchor::Middle, &style, text);
}

#[cfg(test)]
mod tests;

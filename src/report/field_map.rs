//! Field → `field.svg`: |B| in colour bands, flux lines at equal steps of 2πψ, outlines, hot spots, a legend.
//!
//! Sampling the given field for the picture happens here; B itself comes from outside.

mod bands;
mod legend;
mod marks;

use super::colour;
use super::contour::contours;
use super::numbers::clip;
use super::svg::{Anchor, Canvas, FAINT_INK, INK, Rect, text_width};
use crate::geometry::{Outline, RegionKind};
use crate::mesh::{Chart, Mesh};
use crate::model::Point;
use crate::results::HotSpot;
use crate::solve::Solution;
use bands::{band_loops, smoothed};
use std::f64::consts::TAU;

/// What the picture is drawn from.
#[derive(Debug, Clone, Copy)]
pub struct FieldMap<'a> {
    pub title: &'a str,
    pub mesh: &'a Mesh,
    pub outline: &'a Outline,
    pub solution: &'a Solution,
    /// |B| [T] at the three corners of every triangle, seen from inside the triangle.
    pub b_corner: &'a [[f64; 3]],
    pub hot_spots: &'a [HotSpot],
    /// True for the full section, mirrored at the axis.
    pub mirror: bool,
}

/// Colour bands of the scale.
const N_BANDS: usize = 20;
/// Flux lines at most, less one; the step is rounded up to a plain number. More would hide the colours of a thin wall.
const N_LINES: f64 = 16.0;
/// Room for the picture [px].
const ROOM: [f64; 2] = [620.0, 640.0];
const LEFT: f64 = 16.0;
const TOP: f64 = 56.0;
const TEXT: f64 = 11.0;

/// The visible rectangle and its place on the page.
struct View {
    scale: f64,
    r_max: f64,
    z_bottom: f64,
    z_top: f64,
    /// Page abscissa of the axis.
    axis: f64,
}

impl View {
    fn at(&self, p: Point) -> [f64; 2] {
        [self.axis + self.scale * p.r, TOP + self.scale * (self.z_top - p.z)]
    }

    fn frame(&self) -> Rect {
        let width = self.axis - LEFT + self.scale * self.r_max;
        Rect { x: LEFT, y: TOP, width, height: self.scale * (self.z_top - self.z_bottom) }
    }
}

/// The picture as SVG text; no two texts overlap and none leaves the page.
pub fn field_svg(map: &FieldMap) -> String {
    let view = view(map);
    let triangles = visible(map, &view);
    let top = top_of_scale(map, &triangles);
    let colours = colour::scale(N_BANDS);
    let mut canvas = Canvas::new();
    let frame = view.frame();
    let half = Rect { x: view.axis, width: view.scale * view.r_max, ..frame };
    canvas.raw("<defs><clipPath id=\"view\">");
    canvas.rect(&half, "");
    canvas.raw("</clipPath></defs>\n<g id=\"half\" clip-path=\"url(#view)\">");
    canvas.rect(&half, &format!("fill=\"{}\"", colours[0]));
    bands(&mut canvas, map, &triangles, top, &colours);
    let step = flux_lines(&mut canvas, map, &triangles);
    outlines(&mut canvas, map.outline, &view);
    canvas.raw("</g>");
    if map.mirror {
        canvas.raw(&format!(
            "<use href=\"#half\" transform=\"translate({:.2} 0) scale(-1 1)\"/>",
            2.0 * view.axis
        ));
    }
    canvas.rect(&frame, &format!("fill=\"none\" stroke=\"{INK}\" stroke-width=\"0.8\""));
    axis(&mut canvas, &view);
    let spots = marks::shown(map.hot_spots, &view);
    marks::hot_spots(&mut canvas, &spots, &frame);
    let is_winding = |kind: RegionKind| matches!(kind, RegionKind::Winding { .. });
    let key = legend::Key {
        top,
        colours: &colours,
        step,
        has_windings: map.outline.regions.iter().any(|r| is_winding(r.kind)),
        has_hot_spots: !spots.is_empty(),
    };
    let legend_bottom = legend::legend(&mut canvas, &frame, &key);
    let title = clip(map.title, 60);
    canvas.text([LEFT, 24.0], 15.0, Anchor::Start, "font-weight=\"bold\"", &title);
    let caption = if map.mirror {
        "Flux density and flux lines, full section"
    } else {
        "Flux density and flux lines"
    };
    canvas.text([LEFT, 42.0], TEXT, Anchor::Start, &format!("fill=\"{FAINT_INK}\""), caption);
    let bottom = legend::ruler(&mut canvas, &view, &frame).max(legend_bottom);
    let width = (frame.x + frame.width + legend::WIDTH).max(LEFT + text_width(&title, 15.0) + 14.0);
    canvas.finish(width, bottom + 14.0, map.title)
}

/// Bounding box of everything that is not air, with a margin that stays inside the cap polygon.
fn view(map: &FieldMap) -> View {
    let (mut r_max, mut z_bottom, mut z_top) = (0.0f64, f64::MAX, f64::MIN);
    for region in &map.outline.regions {
        if region.kind != RegionKind::Outside {
            for p in region.polygons.iter().flatten() {
                r_max = r_max.max(p.r);
                z_bottom = z_bottom.min(p.z);
                z_top = z_top.max(p.z);
            }
        }
    }
    if r_max <= 0.0 || z_top <= z_bottom {
        let cap = map.outline.cap;
        (r_max, z_bottom, z_top) =
            (cap.radius, cap.center_z - cap.radius, cap.center_z + cap.radius);
    }
    // The cap polygon begins at 1.12 of the farthest corner; 0.08 of that distance on two sides stays within.
    let margin = 0.08 * r_max.hypot(0.5 * (z_top - z_bottom));
    (r_max, z_bottom, z_top) = (r_max + margin, z_bottom - margin, z_top + margin);
    let n_halves = if map.mirror { 2.0 } else { 1.0 };
    let scale = (ROOM[0] / (n_halves * r_max)).min(ROOM[1] / (z_top - z_bottom));
    View { scale, r_max, z_bottom, z_top, axis: LEFT + (n_halves - 1.0) * scale * r_max }
}

/// Inside triangles that touch the view, with their page coordinates.
fn visible(map: &FieldMap, view: &View) -> Vec<(usize, [[f64; 2]; 3])> {
    let is_seen = |t: &usize| {
        let corners = map.mesh.triangles[*t].map(|v| map.mesh.points[v as usize]);
        map.mesh.charts[*t] == Chart::Inside
            && corners.iter().any(|p| p.r < view.r_max)
            && corners.iter().any(|p| p.z < view.z_top)
            && corners.iter().any(|p| view.z_bottom < p.z)
    };
    let page = |t: usize| (t, map.mesh.triangles[t].map(|v| view.at(map.mesh.points[v as usize])));
    (0..map.mesh.triangles.len()).filter(is_seen).map(page).collect()
}

/// Share of the picture's area that may lie above the scale: corners are singular and would darken all the rest.
const CLIPPED_SHARE: f64 = 0.004;

/// |B| at the top of the colour scale: exceeded by [`CLIPPED_SHARE`] of the area, rounded up to a plain number.
fn top_of_scale(map: &FieldMap, triangles: &[(usize, [[f64; 2]; 3])]) -> f64 {
    let mut cells: Vec<(f64, f64)> = triangles
        .iter()
        .map(|(t, [a, b, c])| {
            let area = 0.5 * ((b[0] - a[0]) * (c[1] - a[1]) - (c[0] - a[0]) * (b[1] - a[1])).abs();
            (map.b_corner[*t].iter().sum::<f64>() / 3.0, area)
        })
        .filter(|(b, _)| b.is_finite())
        .collect();
    cells.sort_by(|a, b| b.0.total_cmp(&a.0));
    let mut left = CLIPPED_SHARE * cells.iter().map(|c| c.1).sum::<f64>();
    for (b, area) in cells {
        left -= area;
        if left <= 0.0 && 0.0 < b {
            return plain_above(b);
        }
    }
    1.0
}

/// The next number of the series 1, 1.2, 1.6, 2, 2.4, 3, 4, 5, 6, 8 times a power of ten.
fn plain_above(value: f64) -> f64 {
    let decade = 10f64.powf(value.log10().floor());
    let series = [1.0, 1.2, 1.6, 2.0, 2.4, 3.0, 4.0, 5.0, 6.0, 8.0, 10.0];
    decade * series.into_iter().find(|s| value <= s * decade * (1.0 + 1e-9)).unwrap_or(10.0)
}

/// Place of a flux density on the scale, 0 … 1: its square root, so that the weak field in air and windings shows.
fn place_on_scale(b: f64, top: f64) -> f64 {
    (b / top).sqrt()
}

/// Paints each band of |B| as one area; a hair of stroke in the same colour closes the seams.
fn bands(
    canvas: &mut Canvas,
    map: &FieldMap,
    triangles: &[(usize, [[f64; 2]; 3])],
    top: f64,
    colours: &[String],
) {
    let b = smoothed(map.mesh, triangles, map.b_corner);
    let value: Vec<[f64; 3]> =
        b.iter().map(|b| b.map(|b| N_BANDS as f64 * place_on_scale(b, top))).collect();
    for (loops, colour) in band_loops(triangles, &value, N_BANDS).iter().zip(colours) {
        let style = format!("fill=\"{colour}\" stroke=\"{colour}\" stroke-width=\"0.4\"");
        canvas.loops(loops, &style);
    }
}

/// Draws the flux lines and returns their step of 2πψ [Wb]; `None` when there is no flux.
fn flux_lines(
    canvas: &mut Canvas,
    map: &FieldMap,
    triangles: &[(usize, [[f64; 2]; 3])],
) -> Option<f64> {
    let (mut low, mut high) = (f64::MAX, f64::MIN);
    for vertex in triangles.iter().flat_map(|(t, _)| map.mesh.triangles[*t]) {
        let psi = map.solution.vertex[vertex as usize];
        (low, high) = (low.min(psi), high.max(psi));
    }
    if !(low < high && (high - low).is_finite()) {
        return None;
    }
    let step = plain_above(TAU * (high - low) / N_LINES);
    let first = (TAU * low / step - 0.5).ceil() as i64;
    // Half steps keep a line off the axis, where ψ = 0.
    let levels: Vec<f64> = (first..)
        .map(|k| (k as f64 + 0.5) * step / TAU)
        .take_while(|l| *l < high)
        .take(200)
        .collect();
    let lines = contours(map.mesh, map.solution, triangles, &levels);
    canvas.raw("<defs>");
    canvas.strokes(&lines, "id=\"flux\" stroke-linejoin=\"round\"");
    canvas.raw("</defs>");
    if !lines.is_empty() {
        canvas.raw(
            "<use href=\"#flux\" stroke=\"#ffffff\" stroke-opacity=\"0.4\" stroke-width=\"1.6\"/>",
        );
        canvas.raw(&format!("<use href=\"#flux\" {}/>", flux_style()));
    }
    Some(step)
}

/// The axis of rotation: dots and dashes on a white ground, beyond the frame on both sides.
fn axis(canvas: &mut Canvas, view: &View) {
    let frame = view.frame();
    let [from, to] = [[view.axis, frame.y - 8.0], [view.axis, frame.y + frame.height + 6.0]];
    canvas.line(from, to, "stroke=\"#ffffff\" stroke-width=\"3\"");
    canvas.line(
        from,
        to,
        &format!("stroke=\"{INK}\" stroke-width=\"0.9\" stroke-dasharray=\"12 3 2 3\""),
    );
}

fn flux_style() -> String {
    format!("stroke=\"{INK}\" stroke-width=\"0.7\"")
}

fn winding_style() -> String {
    format!("stroke=\"{INK}\" stroke-width=\"1\" stroke-dasharray=\"5 3\"")
}

fn outlines(canvas: &mut Canvas, outline: &Outline, view: &View) {
    let page = |polygon: &Vec<Point>| polygon.iter().map(|&p| view.at(p)).collect::<Vec<_>>();
    for region in &outline.regions {
        let polygons: Vec<Vec<[f64; 2]>> = region.polygons.iter().map(page).collect();
        let style = match region.kind {
            RegionKind::Outside | RegionKind::Window => continue,
            RegionKind::Winding { .. } => {
                // A pale line below the dashes shows them on dark colours.
                let pale =
                    "fill=\"none\" stroke=\"#ffffff\" stroke-opacity=\"0.55\" stroke-width=\"2\"";
                canvas.polygons(&polygons, pale);
                winding_style()
            }
            _ => format!("stroke=\"{INK}\" stroke-width=\"1.3\""),
        };
        canvas.polygons(&polygons, &format!("fill=\"none\" stroke-linejoin=\"round\" {style}"));
    }
}

#[cfg(test)]
mod tests;

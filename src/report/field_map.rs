//! Field → `field.svg`: |B| in colour bands, flux lines at equal steps of 2πψ, outlines, hot spots, a legend.
//!
//! Sampling the given field for the picture happens here; B itself comes from outside.

use super::colour;
use super::contour::{contours, psi_at};
use super::labels::{Wish, around, nearest};
use super::numbers::{clip, decimals_for, millimeters, signed};
use super::svg::{Anchor, Canvas, FAINT_INK, INK, Rect, text_width};
use crate::geometry::{Outline, RegionKind};
use crate::mesh::{Chart, Mesh};
use crate::model::Point;
use crate::results::HotSpot;
use crate::solve::Solution;
use crate::units::engineering;
use std::collections::BTreeMap;
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
/// Flux lines aimed at; the step is then rounded to a plain number.
const N_LINES: f64 = 22.0;
/// Room for the picture [px].
const ROOM: [f64; 2] = [620.0, 640.0];
const LEFT: f64 = 16.0;
const TOP: f64 = 56.0;
const TEXT: f64 = 11.0;
/// Room for the legend [px].
const LEGEND: f64 = 190.0;

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
    let b = smoothed(map, &triangles);
    let colours = colour::scale(N_BANDS);
    let mut canvas = Canvas::new();
    let frame = view.frame();
    let half = Rect { x: view.axis, width: view.scale * view.r_max, ..frame };
    canvas.raw("<defs><clipPath id=\"view\">");
    canvas.rect(&half, "");
    canvas.raw("</clipPath></defs>\n<g id=\"half\" clip-path=\"url(#view)\">");
    canvas.rect(&half, &format!("fill=\"{}\"", colours[0]));
    bands(&mut canvas, &b, &triangles, top, &colours);
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
    let dashes = format!("stroke=\"{INK}\" stroke-width=\"0.8\" stroke-dasharray=\"12 3 2 3\"");
    canvas.line([view.axis, frame.y], [view.axis, frame.y + frame.height], &dashes);
    hot_spots(&mut canvas, map, &view);
    let legend_bottom = legend(&mut canvas, &frame, top, step, &colours);
    let title = clip(map.title, 60);
    canvas.text([LEFT, 24.0], 15.0, Anchor::Start, "font-weight=\"bold\"", &title);
    let caption = if map.mirror {
        "Flux density and flux lines, full section"
    } else {
        "Flux density and flux lines"
    };
    canvas.text([LEFT, 42.0], TEXT, Anchor::Start, &format!("fill=\"{FAINT_INK}\""), caption);
    let bottom = ruler(&mut canvas, &view, &frame).max(legend_bottom);
    let width = (frame.x + frame.width + LEGEND).max(LEFT + text_width(&title, 15.0) + 14.0);
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

/// |B| at the corners of the visible triangles, averaged over the triangles of one region that meet there: the jumps
/// that this removes are discretisation, those at material boundaries stay. For eyes only; field.vtu has the raw values.
fn smoothed(map: &FieldMap, triangles: &[(usize, [[f64; 2]; 3])]) -> Vec<[f64; 3]> {
    let key = |t: usize, k: usize| (map.mesh.triangles[t][k], map.mesh.regions[t]);
    let mut sums: BTreeMap<_, (f64, f64)> = BTreeMap::new();
    for (t, _) in triangles {
        for (k, b) in map.b_corner[*t].iter().enumerate().filter(|(_, b)| b.is_finite()) {
            let (sum, count) = sums.entry(key(*t, k)).or_default();
            *sum += b;
            *count += 1.0;
        }
    }
    let mean = |t: usize, k: usize| sums.get(&key(t, k)).map_or(0.0, |(sum, count)| sum / count);
    triangles.iter().map(|(t, _)| [0, 1, 2].map(|k| mean(*t, k))).collect()
}

/// Place of a flux density on the scale, 0 … 1: its square root, so that the weak field in air and windings shows.
fn place_on_scale(b: f64, top: f64) -> f64 {
    (b / top).sqrt()
}

/// Paints each band of |B| as one path; a hair of stroke in the same colour closes the seams.
fn bands(
    canvas: &mut Canvas,
    b: &[[f64; 3]],
    triangles: &[(usize, [[f64; 2]; 3])],
    top: f64,
    colours: &[String],
) {
    let mut pieces: Vec<Vec<Vec<[f64; 2]>>> = vec![vec![]; N_BANDS];
    for ((_, corners), b) in triangles.iter().zip(b) {
        // In units of bands; what lies above the scale joins the last band.
        let level = b.map(|b| N_BANDS as f64 * place_on_scale(b, top));
        let polygon: Vec<([f64; 2], f64)> = (0..3).map(|k| (corners[k], level[k])).collect();
        let low = level.iter().copied().fold(f64::MAX, f64::min).max(0.0);
        let high = level.iter().copied().fold(0.0, f64::max);
        let first = (low as usize).min(N_BANDS - 1);
        let last = (high as usize).min(N_BANDS - 1);
        for band in first..=last {
            let mut piece = polygon.clone();
            if first < band {
                piece = keep(&piece, band as f64, 1.0);
            }
            if band < last {
                piece = keep(&piece, band as f64 + 1.0, -1.0);
            }
            if 2 < piece.len() {
                pieces[band].push(piece.into_iter().map(|p| p.0).collect());
            }
        }
    }
    for (band, polygons) in pieces.iter().enumerate().skip(1) {
        let colour = &colours[band];
        canvas.polygons(
            polygons,
            &format!("fill=\"{colour}\" stroke=\"{colour}\" stroke-width=\"0.4\""),
        );
    }
}

/// The part of a convex polygon where side·(value − level) ≥ 0 (Sutherland–Hodgman, one plane).
fn keep(polygon: &[([f64; 2], f64)], level: f64, side: f64) -> Vec<([f64; 2], f64)> {
    let mut kept = vec![];
    for i in 0..polygon.len() {
        let (p, q) = (polygon[i], polygon[(i + 1) % polygon.len()]);
        let (a, b) = (side * (p.1 - level), side * (q.1 - level));
        if 0.0 <= a {
            kept.push(p);
        }
        if (0.0 <= a) != (0.0 <= b) {
            let t = a / (a - b);
            kept.push(([p.0[0] + t * (q.0[0] - p.0[0]), p.0[1] + t * (q.0[1] - p.0[1])], level));
        }
    }
    kept
}

/// Sub-triangles that the whole picture is sampled with, about.
const N_SAMPLES: usize = 160_000;

/// Draws the flux lines and returns their step of 2πψ [Wb]; `None` when there is no flux.
fn flux_lines(
    canvas: &mut Canvas,
    map: &FieldMap,
    triangles: &[(usize, [[f64; 2]; 3])],
) -> Option<f64> {
    let (mut low, mut high) = (f64::MAX, f64::MIN);
    for (t, _) in triangles {
        for weights in [[1.0, 0.0, 0.0], [0.0, 1.0, 0.0], [0.0, 0.0, 1.0]] {
            let psi = psi_at(map.mesh, map.solution, *t, weights);
            (low, high) = (low.min(psi), high.max(psi));
        }
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
    let n_steps = ((N_SAMPLES / triangles.len().max(1)) as f64).sqrt().clamp(1.0, 8.0) as usize;
    let lines = contours(map.mesh, map.solution, triangles, &levels, n_steps);
    canvas.polylines(&lines, "stroke=\"#ffffff\" stroke-opacity=\"0.45\" stroke-width=\"2\"");
    canvas.polylines(
        &lines,
        &format!("stroke=\"{INK}\" stroke-width=\"0.75\" stroke-linejoin=\"round\""),
    );
    Some(step)
}

fn outlines(canvas: &mut Canvas, outline: &Outline, view: &View) {
    let page = |polygon: &Vec<Point>| polygon.iter().map(|&p| view.at(p)).collect::<Vec<_>>();
    for region in &outline.regions {
        let polygons: Vec<Vec<[f64; 2]>> = region.polygons.iter().map(page).collect();
        let style = match region.kind {
            RegionKind::Outside | RegionKind::Window => continue,
            RegionKind::Winding { .. } => "stroke-width=\"1\" stroke-dasharray=\"5 3\"",
            _ => "stroke-width=\"1.3\"",
        };
        canvas.polygons(
            &polygons,
            &format!("fill=\"none\" stroke=\"{INK}\" stroke-linejoin=\"round\" {style}"),
        );
    }
}

/// Rings at the hot spots, with their values where there is room.
fn hot_spots(canvas: &mut Canvas, map: &FieldMap, view: &View) {
    let frame = view.frame();
    let seen: Vec<&HotSpot> = map
        .hot_spots
        .iter()
        .filter(|s| s.r <= view.r_max && (view.z_bottom..=view.z_top).contains(&s.z))
        .collect();
    let marks: Vec<[f64; 2]> = seen.iter().map(|s| view.at(Point { r: s.r, z: s.z })).collect();
    let ring = |m: &[f64; 2]| Rect { x: m[0] - 7.0, y: m[1] - 7.0, width: 14.0, height: 14.0 };
    let mut taken: Vec<Rect> = marks.iter().map(ring).collect();
    let wish = |(spot, &anchor): (&&HotSpot, &[f64; 2])| Wish {
        anchor,
        lines: vec![engineering(spot.flux_density, "T", 3)],
    };
    let wishes: Vec<Wish> = seen.iter().zip(&marks).map(wish).collect();
    let page = Rect {
        x: frame.x + 3.0,
        y: frame.y + 3.0,
        width: frame.width - 6.0,
        height: frame.height - 6.0,
    };
    for (wish, place) in wishes.iter().zip(around(&wishes, &page, TEXT, &mut taken)) {
        let mark = wish.anchor;
        canvas.circle(mark, 4.5, "fill=\"none\" stroke=\"#ffffff\" stroke-width=\"3\"");
        canvas.circle(mark, 4.5, &format!("fill=\"none\" stroke=\"{INK}\" stroke-width=\"1.3\""));
        let Some(rect) = place else { continue };
        let end = nearest(&rect, mark);
        let length = (end[0] - mark[0]).hypot(end[1] - mark[1]).max(1e-9);
        let edge = [0, 1].map(|k| mark[k] + 4.5 * (end[k] - mark[k]) / length);
        canvas.line(edge, end, &format!("stroke=\"{INK}\" stroke-width=\"0.9\""));
        canvas.rect(&rect, "rx=\"2\" fill=\"#ffffff\" fill-opacity=\"0.88\"");
        let at = [rect.x + 0.5 * rect.width, rect.y + 0.97 * TEXT];
        canvas.text(at, TEXT, Anchor::Middle, "", &wish.lines[0]);
    }
}

/// Marks of the colour scale, as shares of its top.
const TICKS: [f64; 6] = [0.0, 0.02, 0.1, 0.25, 0.5, 1.0];

/// Three significant digits without trailing zeros.
fn plain_text(value: f64) -> String {
    let mut text = signed(value, decimals_for(value, 3));
    if text.contains('.') {
        text.truncate(text.trim_end_matches('0').trim_end_matches('.').len());
    }
    text
}

/// Draws the colour scale and the step of the flux lines; returns the lower edge [px].
fn legend(
    canvas: &mut Canvas,
    frame: &Rect,
    top: f64,
    step: Option<f64>,
    colours: &[String],
) -> f64 {
    let x = frame.x + frame.width + 22.0;
    let height = (0.6 * frame.height).clamp(160.0, 320.0);
    let y = frame.y + 22.0;
    let (unit, factor) = if top < 0.1e-3 {
        ("µT", 1e6)
    } else if top < 1.0 {
        ("mT", 1e3)
    } else {
        ("T", 1.0)
    };
    canvas.text([x, frame.y + 9.0], TEXT, Anchor::Start, "", &format!("|B| in {unit}"));
    let cell = height / N_BANDS as f64;
    for (band, colour) in colours.iter().enumerate() {
        let y = y + height - cell * (band + 1) as f64;
        // Each cell reaches a little under the next one, so that no seam shows.
        let reach = if band == 0 { 0.0 } else { 0.6 };
        canvas
            .rect(&Rect { x, y, width: 18.0, height: cell + reach }, &format!("fill=\"{colour}\""));
    }
    let bar = Rect { x, y, width: 18.0, height };
    canvas.rect(&bar, &format!("fill=\"none\" stroke=\"{INK}\" stroke-width=\"0.8\""));
    for share in TICKS {
        let y = y + height * (1.0 - place_on_scale(share, 1.0));
        canvas.line(
            [x + 18.0, y],
            [x + 23.0, y],
            &format!("stroke=\"{INK}\" stroke-width=\"0.8\""),
        );
        let more = if share == 1.0 { " and more" } else { "" };
        let text = format!("{}{more}", plain_text(factor * top * share));
        canvas.text([x + 27.0, y + 4.0], TEXT, Anchor::Start, "", &text);
    }
    let mut bottom = y + height;
    if let Some(step) = step {
        let y = y + height + 26.0;
        canvas.line(
            [x, y - 4.0],
            [x + 18.0, y - 4.0],
            &format!("stroke=\"{INK}\" stroke-width=\"0.9\""),
        );
        canvas.text(
            [x + 27.0, y],
            TEXT,
            Anchor::Start,
            "",
            &format!("{} of flux", engineering(step, "Wb", 2)),
        );
        canvas.text([x + 27.0, y + 15.0], TEXT, Anchor::Start, "", "from line to line");
        bottom = y + 19.0;
    }
    bottom
}

/// Draws a bar of a plain length below the picture; returns the lower edge [px].
fn ruler(canvas: &mut Canvas, view: &View, frame: &Rect) -> f64 {
    let y = frame.y + frame.height + 16.0;
    let length = ruler_length(0.2 * (view.z_top - view.z_bottom));
    let end = frame.x + view.scale * length;
    canvas.line([frame.x, y], [end, y], &format!("stroke=\"{INK}\" stroke-width=\"2\""));
    canvas.text(
        [end + 7.0, y + 4.0],
        TEXT,
        Anchor::Start,
        "",
        &format!("{} mm", millimeters(length)),
    );
    y + 8.0
}

/// The largest of 1, 2, 5 times a power of ten that is not above `room`.
fn ruler_length(room: f64) -> f64 {
    let decade = 10f64.powf(room.log10().floor());
    decade * [5.0, 2.0, 1.0].into_iter().find(|s| s * decade <= room * (1.0 + 1e-9)).unwrap_or(1.0)
}

#[cfg(test)]
mod tests;

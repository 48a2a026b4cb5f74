//! `Model` and `Outline` → `section.svg`: the half section with named regions and the dimensions of its form.

use super::labels::{LINE, Wish, column, nearest, size_of};
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
/// Longest label line, in characters.
const N_LABEL_MAX: usize = 30;
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
    let dashes = format!("stroke=\"{FAINT_INK}\" stroke-dasharray=\"12 3 2 3\"");
    canvas.line([LEFT, TOP - 12.0], [LEFT, axis_end], &dashes);
    let bottom = diameters(&mut canvas, model, outline, &view);
    heights(&mut canvas, model, outline, &view);
    let [right, label_bottom] = names(&mut canvas, model, outline, &view);
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
    for (row, radius) in radii(model, view).into_iter().enumerate() {
        let y = base + 24.0 + ROW * row as f64;
        let x = LEFT + view.scale * radius;
        let from =
            TOP + view.scale * (view.z_top - lowest(outline, radius).unwrap_or(view.z_bottom));
        canvas.line([x, from + 3.0], [x, y + 4.0], &thin());
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

/// Lines of a region's label; empty for regions that speak for themselves.
fn label(model: &Model, region: &Region) -> Vec<String> {
    let name = clip(&region.name, N_LABEL_MAX);
    match region.kind {
        RegionKind::Outside | RegionKind::Window => vec![],
        RegionKind::Gap { gap, .. } => {
            let length = model
                .gaps
                .get(gap)
                .map_or(String::new(), |g| format!("gap, {} long", millimeters(g.length)));
            vec![name, length]
        }
        RegionKind::Winding { winding, section } => {
            let section = model.windings.get(winding).and_then(|w| w.sections.get(section));
            let Some(section) = section else { return vec![name] };
            let [inner, outer] = section.radii.map(millimeters);
            let [low, high] = section.heights.map(millimeters);
            vec![
                name,
                format!("{} turns", section.turns),
                format!("r {inner} to {outer}"),
                format!("z {low} to {high}"),
            ]
        }
        RegionKind::Leg(_) | RegionKind::Part(_) | RegionKind::Joint(_) => {
            let material = region.material.and_then(|id| model.materials.get(usize::from(id.0)));
            match material {
                Some(material) if matches!(region.kind, RegionKind::Part(_)) => {
                    vec![name, clip(&material.name, N_LABEL_MAX)]
                }
                _ => vec![name],
            }
        }
    }
}

/// A region's label and the polygon that it belongs to.
struct Name {
    lines: Vec<String>,
    polygon: Vec<[f64; 2]>,
}

/// Writes the names: inside a shape where there is room, else in a column on the right with a leader.
/// Returns the right and the lower edge used [px].
fn names(canvas: &mut Canvas, model: &Model, outline: &Outline, view: &View) -> [f64; 2] {
    let named = outline.regions.iter().filter_map(|region| {
        let lines = label(model, region);
        largest(region, view).filter(|_| !lines.is_empty()).map(|polygon| Name { lines, polygon })
    });
    let (inside, beside): (Vec<Name>, Vec<Name>) =
        named.partition(|name| spot(name, &[], &[]).is_some());
    let (mut used, mut leaders) = (vec![], vec![]);
    // A shape that loses its last free spot to leaders joins the column, which moves the leaders: bounded by one pass
    // a shape, since each pass moves at least one.
    let (mut inside, mut beside) = (inside, beside);
    let n_passes = inside.len() + 1;
    let (mut wishes, mut boxes) = (vec![], vec![]);
    let mut spots = vec![];
    for _ in 0..n_passes {
        wishes = beside
            .iter()
            .map(|n| Wish { anchor: right_end(&n.polygon), lines: n.lines.clone() })
            .collect();
        boxes = column(&wishes, view.right() + 46.0, [TOP, view.bottom()], TEXT);
        leaders = wishes.iter().zip(&boxes).map(|(wish, rect)| leader(wish, rect, view)).collect();
        used.clear();
        spots.clear();
        let mut homeless = vec![];
        for (i, name) in inside.iter().enumerate() {
            match spot(name, &leaders, &used) {
                Some(rect) => {
                    used.push(rect);
                    spots.push(rect);
                }
                None => homeless.push(i),
            }
        }
        if homeless.is_empty() {
            break;
        }
        for i in homeless.into_iter().rev() {
            beside.push(inside.remove(i));
        }
    }
    for (name, rect) in inside.iter().zip(&spots) {
        write_lines(canvas, rect, &name.lines, Anchor::Middle);
    }
    for ((wish, rect), leader) in wishes.iter().zip(&boxes).zip(leaders) {
        canvas.polylines(&[leader.to_vec()], &format!("stroke=\"{INK}\" stroke-width=\"0.7\""));
        canvas.circle(wish.anchor, 1.8, "");
        write_lines(canvas, rect, &wish.lines, Anchor::Start);
    }
    let right = boxes.iter().map(|b| b.x + b.width).fold(view.right(), f64::max);
    [right, boxes.iter().map(|b| b.y + b.height).fold(view.bottom(), f64::max)]
}

/// The bent line from a shape to its label in the column.
fn leader(wish: &Wish, rect: &Rect, view: &View) -> [[f64; 2]; 3] {
    let end = nearest(rect, [rect.x, rect.y + 0.5 * LINE * TEXT]);
    [wish.anchor, [view.right() + 26.0, end[1]], [end[0] - 4.0, end[1]]]
}

/// Heights that are tried for a name inside its shape, from the middle outwards, in parts of the shape's height.
const LIFTS: [f64; 9] = [0.0, -0.08, 0.08, -0.16, 0.16, -0.24, 0.24, -0.32, 0.32];

/// A free place for a name inside its own shape, clear of leaders and of other names.
fn spot(name: &Name, leaders: &[[[f64; 2]; 3]], used: &[Rect]) -> Option<Rect> {
    let middle = middle_of(&name.polygon);
    let [width, height] = size_of(&name.lines, TEXT);
    let ordinates = name.polygon.iter().map(|p| p[1]);
    let (top, bottom) =
        ordinates.fold((f64::MAX, f64::MIN), |(low, high), v| (low.min(v), high.max(v)));
    let boxes = LIFTS.iter().map(|lift| Rect {
        x: middle[0] - 0.5 * width,
        y: middle[1] + lift * (bottom - top) - 0.5 * height,
        width,
        height,
    });
    let is_clear =
        |rect: &Rect| leaders.iter().all(|l| l.windows(2).all(|w| !rect.is_crossed(w[0], w[1])));
    boxes.into_iter().find(|rect| {
        fits(&name.polygon, rect) && is_clear(rect) && used.iter().all(|u| !u.overlaps(rect))
    })
}

fn write_lines(canvas: &mut Canvas, rect: &Rect, lines: &[String], anchor: Anchor) {
    let x = if anchor == Anchor::Middle { rect.x + 0.5 * rect.width } else { rect.x };
    for (i, line) in lines.iter().enumerate() {
        let style = if i == 0 { String::new() } else { "fill-opacity=\"0.75\"".to_string() };
        canvas.text([x, rect.y + TEXT * (0.95 + LINE * i as f64)], TEXT, anchor, &style, line);
    }
}

/// The region's polygon of the largest area, on the page.
fn largest(region: &Region, view: &View) -> Option<Vec<[f64; 2]>> {
    let pages = region
        .polygons
        .iter()
        .map(|polygon| polygon.iter().map(|&p| view.at(p)).collect::<Vec<_>>());
    pages.max_by(|a, b| area(a).total_cmp(&area(b)))
}

/// Area of a polygon, whichever way round.
fn area(polygon: &[[f64; 2]]) -> f64 {
    let n = polygon.len();
    let cross = |i: usize| {
        let (p, q) = (polygon[i], polygon[(i + 1) % n]);
        p[0] * q[1] - p[1] * q[0]
    };
    (0.5 * (0..n).map(cross).sum::<f64>()).abs()
}

/// A point well inside: the middle of the bounding box if it is inside, else the middle of the widest cut there.
fn middle_of(polygon: &[[f64; 2]]) -> [f64; 2] {
    let span = |axis: usize| {
        let values = polygon.iter().map(|p| p[axis]);
        values.fold((f64::MAX, f64::MIN), |(low, high), v| (low.min(v), high.max(v)))
    };
    let ((left, right), (top, bottom)) = (span(0), span(1));
    let middle = [0.5 * (left + right), 0.5 * (top + bottom)];
    if is_inside(polygon, middle) {
        return middle;
    }
    let cuts = crossings(polygon, middle[1]);
    let widest = cuts.chunks_exact(2).max_by(|a, b| (a[1] - a[0]).total_cmp(&(b[1] - b[0])));
    widest.map_or(middle, |cut| [0.5 * (cut[0] + cut[1]), middle[1]])
}

/// A point inside near the right end, at the height of [`middle_of`]: where the leader to the column starts.
fn right_end(polygon: &[[f64; 2]]) -> [f64; 2] {
    let middle = middle_of(polygon);
    let cut = crossings(polygon, middle[1]);
    let right = cut
        .chunks_exact(2)
        .find(|c| c[0] <= middle[0] && middle[0] <= c[1])
        .map_or(middle[0], |c| c[1]);
    [middle[0].max(right - 9.0), middle[1]]
}

/// Abscissas where the horizontal at `y` crosses the polygon, ascending.
fn crossings(polygon: &[[f64; 2]], y: f64) -> Vec<f64> {
    let n = polygon.len();
    let mut cuts = vec![];
    for i in 0..n {
        let (p, q) = (polygon[i], polygon[(i + 1) % n]);
        if (p[1] <= y) != (q[1] <= y) {
            cuts.push(p[0] + (y - p[1]) / (q[1] - p[1]) * (q[0] - p[0]));
        }
    }
    cuts.sort_by(f64::total_cmp);
    cuts
}

fn is_inside(polygon: &[[f64; 2]], point: [f64; 2]) -> bool {
    crossings(polygon, point[1]).iter().filter(|&&x| x < point[0]).count() % 2 == 1
}

/// True when the box, with a little air, lies in the polygon (corners and side middles are tried).
fn fits(polygon: &[[f64; 2]], rect: &Rect) -> bool {
    let air = 3.0;
    [-air, 0.5 * rect.width, rect.width + air].iter().all(|dx| {
        [-air, 0.5 * rect.height, rect.height + air]
            .iter()
            .all(|dy| is_inside(polygon, [rect.x + dx, rect.y + dy]))
    })
}

#[cfg(test)]
mod tests;

//! Names of the section's regions: inside their shape where there is room, else in a column with leaders.

use super::{TEXT, TOP, View};
use crate::geometry::{Outline, Region, RegionKind};
use crate::model::Model;
use crate::report::labels::{LINE, Wish, column, nearest, size_of};
use crate::report::numbers::{clip, millimeters};
use crate::report::svg::{Anchor, Canvas, INK, Rect};

/// Longest label line, in characters.
const N_LABEL_MAX: usize = 30;

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

/// Where every name goes.
struct Layout {
    /// Names inside their shapes, with their boxes.
    inside: Vec<(Name, Rect)>,
    /// Names in the column, with their boxes and leaders.
    beside: Vec<(Wish, Rect, [[f64; 2]; 3])>,
}

/// Writes the names: inside a shape where there is room, else in a column on the right with a leader.
/// Returns the right and the lower edge used [px].
pub(super) fn names(
    canvas: &mut Canvas,
    model: &Model,
    outline: &Outline,
    view: &View,
    dimension_lines: &[[[f64; 2]; 2]],
) -> [f64; 2] {
    let layout = arrange(model, outline, view, dimension_lines);
    for (name, rect) in &layout.inside {
        write_lines(canvas, rect, &name.lines, Anchor::Middle);
    }
    let mut edges = [view.right(), view.bottom()];
    for (wish, rect, leader) in &layout.beside {
        canvas.polylines(&[leader.to_vec()], &format!("stroke=\"{INK}\" stroke-width=\"0.7\""));
        canvas.circle(wish.anchor, 1.8, "");
        write_lines(canvas, rect, &wish.lines, Anchor::Start);
        edges = [edges[0].max(rect.x + rect.width), edges[1].max(rect.y + rect.height)];
    }
    edges
}

/// Sorts the names into shapes and column.
///
/// A shape that loses its last free spot to leaders joins the column, which moves the leaders; every pass but the last
/// moves at least one name, so there are at most as many passes as names, plus one.
fn arrange(
    model: &Model,
    outline: &Outline,
    view: &View,
    dimension_lines: &[[[f64; 2]; 2]],
) -> Layout {
    let named = outline.regions.iter().filter_map(|region| {
        let lines = label(model, region);
        largest(region, view).filter(|_| !lines.is_empty()).map(|polygon| Name { lines, polygon })
    });
    let (mut candidates, mut column_names): (Vec<Name>, Vec<Name>) =
        named.partition(|name| spot(name, dimension_lines, &[]).is_some());
    loop {
        let wish = |n: &Name| Wish { anchor: right_end(&n.polygon), lines: n.lines.clone() };
        let wishes: Vec<Wish> = column_names.iter().map(wish).collect();
        let boxes = column(&wishes, view.right() + 46.0, [TOP, view.bottom()], TEXT);
        let leaders: Vec<_> =
            wishes.iter().zip(&boxes).map(|(w, rect)| leader(w, rect, view)).collect();
        let mut lines = dimension_lines.to_vec();
        lines.extend(leaders.iter().flat_map(|[a, b, c]| [[*a, *b], [*b, *c]]));
        let (mut used, mut inside, mut homeless) = (vec![], vec![], vec![]);
        for name in candidates {
            match spot(&name, &lines, &used) {
                Some(rect) => {
                    used.push(rect);
                    inside.push((name, rect));
                }
                None => homeless.push(name),
            }
        }
        if homeless.is_empty() {
            let beside =
                wishes.into_iter().zip(boxes).zip(leaders).map(|((w, b), l)| (w, b, l)).collect();
            return Layout { inside, beside };
        }
        candidates = inside.into_iter().map(|(name, _)| name).collect();
        column_names.append(&mut homeless);
    }
}

/// The bent line from a shape to its label in the column.
fn leader(wish: &Wish, rect: &Rect, view: &View) -> [[f64; 2]; 3] {
    let end = nearest(rect, [rect.x, rect.y + 0.5 * LINE * TEXT]);
    [wish.anchor, [view.right() + 26.0, end[1]], [end[0] - 4.0, end[1]]]
}

/// Places that are tried for a name inside its shape, from the middle outwards, in parts of the shape's size.
const LIFTS: [f64; 9] = [0.0, -0.08, 0.08, -0.16, 0.16, -0.24, 0.24, -0.32, 0.32];

/// A free place for a name inside its own shape, clear of lines and of other names.
fn spot(name: &Name, lines: &[[[f64; 2]; 2]], used: &[Rect]) -> Option<Rect> {
    let middle = middle_of(&name.polygon);
    let [width, height] = size_of(&name.lines, TEXT);
    let extent = |axis: usize| {
        let values = name.polygon.iter().map(|p| p[axis]);
        let (low, high) =
            values.fold((f64::MAX, f64::MIN), |(low, high), v| (low.min(v), high.max(v)));
        high - low
    };
    let (wide, high) = (extent(0), extent(1));
    let mut boxes = LIFTS.iter().flat_map(|shift| LIFTS.iter().map(move |lift| [shift, lift])).map(
        |[shift, lift]| Rect {
            x: middle[0] + shift * wide - 0.5 * width,
            y: middle[1] + lift * high - 0.5 * height,
            width,
            height,
        },
    );
    boxes.find(|rect| {
        fits(&name.polygon, rect)
            && lines.iter().all(|[a, b]| !rect.is_crossed(*a, *b))
            && used.iter().all(|u| !u.overlaps(rect))
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

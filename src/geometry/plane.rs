//! Drawing → crossing-free points and segments: snaps, joins, and refuses what overlaps.
//!
//! Points closer than the snap tolerance become one; a point within it of a segment splits that segment (so sloped
//! T-junctions join too). After that two shapes overlap exactly if segments of theirs cross, if a segment of one runs inside
//! the other, or if both run along one segment in the same sense.

use super::drawing::{Drawing, Shape};
use super::fault::{fault, place};
use super::polygon::{
    bounding_box, boxes_meet, contains, crossing, distance, midpoint, nearest_on_segment,
};
use crate::model::{Fault, Point, Subject};
use std::collections::BTreeMap;

/// Snap tolerance in units of the section's size: far above rounding (1/3 mm written twice), far below any real gap.
const SNAP: f64 = 1e-9;

/// Passes of splitting segments at points; one is enough unless splitting moves a segment onto a third point.
const N_JOIN_PASSES_MAX: usize = 8;

/// Distinct points and, on them, every shape's border and the window's.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Plane {
    pub points: Vec<Point>,
    /// Corner chains, one a shape, closed, counter-clockwise, every touching point included.
    pub borders: Vec<Vec<u32>>,
    /// The window's whole border as a corner chain; empty without a window.
    pub window: Vec<u32>,
    /// Pieces of the window's border that run outside every shape.
    pub window_segments: Vec<[u32; 2]>,
}

/// Snaps and joins a drawing.
///
/// # Errors
/// Shapes that overlap each other or, once snapped, touch themselves.
pub(super) fn join(drawing: &Drawing) -> Result<Plane, Fault> {
    let all = drawing.shapes.iter().flat_map(|s| &s.corners);
    let window_corners = drawing.window.as_ref().map_or(&[][..], |(_, corners)| corners);
    let size = bounding_box(all.chain(window_corners)).iter().fold(0.0_f64, |m, x| m.max(x.abs()));
    let mut points = Points { points: Vec::new(), cells: BTreeMap::new(), tolerance: SNAP * size };
    let mut borders: Vec<Vec<u32>> = Vec::new();
    for shape in &drawing.shapes {
        borders.push(points.chain(&shape.corners));
    }
    let mut window = points.chain(window_corners);
    // Only the window's border may cross shapes (a winding may stand out of a drum's window).
    for [a, b] in segments_of(&window) {
        for [c, d] in borders.iter().flat_map(|border| segments_of(border)).collect::<Vec<_>>() {
            let at = crossing(points.at(a), points.at(b), points.at(c), points.at(d));
            at.map(|p| points.snap(p));
        }
    }
    let by_height = points.by_height();
    for _ in 0..N_JOIN_PASSES_MAX {
        let mut changed = false;
        for chain in borders.iter_mut().chain([&mut window]) {
            changed |= points.split_chain(chain, &by_height);
        }
        if !changed {
            break;
        }
    }
    let points = points.points;
    check_simple(drawing, &points, &borders)?;
    check_overlaps(&drawing.shapes, &points, &borders)?;
    let window_segments = segments_of(&window)
        .filter(|&[a, b]| {
            let middle = midpoint(points[a as usize], points[b as usize]);
            let on_border = borders.iter().any(|border| runs_along(border, [a, b]) != 0);
            on_border || !borders.iter().any(|border| contains(&corners(&points, border), middle))
        })
        .collect();
    Ok(Plane { points, borders, window, window_segments })
}

/// Closed chain → its segments.
pub(super) fn segments_of(chain: &[u32]) -> impl Iterator<Item = [u32; 2]> + '_ {
    let n = chain.len();
    (0..n).map(move |i| [chain[i], chain[(i + 1) % n]])
}

/// Chain → coordinates.
pub(super) fn corners(points: &[Point], chain: &[u32]) -> Vec<Point> {
    chain.iter().map(|&id| points[id as usize]).collect()
}

/// Distinct points with their snap tolerance [m].
struct Points {
    points: Vec<Point>,
    /// Points by square cells of four tolerances: a point's neighbours lie in its cell or one next to it.
    cells: BTreeMap<(i64, i64), Vec<u32>>,
    tolerance: f64,
}

impl Points {
    fn at(&self, id: u32) -> Point {
        self.points[id as usize]
    }

    /// The point within the tolerance that was there first, else a new one; onto the axis if within it.
    fn snap(&mut self, p: Point) -> u32 {
        // Heights of rounding size would only be noise to the mesher.
        let zero_below = |x: f64, limit: f64| if x.abs() <= limit { 0.0 } else { x };
        let p =
            Point { r: zero_below(p.r, self.tolerance), z: zero_below(p.z, 1e-6 * self.tolerance) };
        let cell = |x: f64| (x / (4.0 * self.tolerance)).floor() as i64;
        let (i, j) = (cell(p.r), cell(p.z));
        let near = |&&id: &&u32| {
            let q = self.at(id);
            (q.r == 0.0) == (p.r == 0.0) && distance(q, p) <= self.tolerance
        };
        let around = (i - 1..=i + 1).flat_map(|i| (j - 1..=j + 1).map(move |j| (i, j)));
        let known =
            around.filter_map(|key| self.cells.get(&key)).flatten().filter(near).min().copied();
        known.unwrap_or_else(|| {
            let id = self.points.len() as u32;
            self.points.push(p);
            self.cells.entry((i, j)).or_default().push(id);
            id
        })
    }

    /// All points by height.
    fn by_height(&self) -> Vec<u32> {
        let mut ids: Vec<u32> = (0..self.points.len() as u32).collect();
        ids.sort_by(|&a, &b| self.at(a).z.total_cmp(&self.at(b).z));
        ids
    }

    /// Snapped closed chain without repeated neighbours.
    fn chain(&mut self, corners: &[Point]) -> Vec<u32> {
        let mut chain: Vec<u32> = corners.iter().map(|&p| self.snap(p)).collect();
        chain.dedup();
        while chain.len() > 1 && chain.first() == chain.last() {
            chain.pop();
        }
        chain
    }

    /// Splits every segment of a closed chain at the points that lie on it; tells whether any did.
    fn split_chain(&self, chain: &mut Vec<u32>, by_height: &[u32]) -> bool {
        let mut split: Vec<u32> = Vec::with_capacity(chain.len());
        for [a, b] in segments_of(chain) {
            split.push(a);
            let (from, to) = (self.at(a), self.at(b));
            let (low, high) =
                (from.z.min(to.z) - self.tolerance, from.z.max(to.z) + self.tolerance);
            let (left, right) =
                (from.r.min(to.r) - self.tolerance, from.r.max(to.r) + self.tolerance);
            let start = by_height.partition_point(|&id| self.at(id).z < low);
            let mut on: Vec<(f64, u32)> = Vec::new();
            for &id in by_height[start..].iter().take_while(|&&id| self.at(id).z <= high) {
                let p = self.at(id);
                if id == a || id == b || p.r < left || p.r > right {
                    continue;
                }
                let (t, away) = nearest_on_segment(from, to, p);
                if away <= self.tolerance {
                    on.push((t, id));
                }
            }
            on.sort_by(|x, y| x.0.total_cmp(&y.0).then(x.1.cmp(&y.1)));
            split.extend(on.iter().map(|&(_, id)| id));
        }
        let changed = split.len() != chain.len();
        *chain = split;
        changed
    }
}

/// Whether every shape still has an area and passes no point twice.
fn check_simple(drawing: &Drawing, points: &[Point], borders: &[Vec<u32>]) -> Result<(), Fault> {
    for (shape, border) in drawing.shapes.iter().zip(borders) {
        let mut sorted = border.clone();
        sorted.sort_unstable();
        let twice = sorted.windows(2).find(|pair| pair[0] == pair[1]);
        if let Some(pair) = twice {
            let at = points[pair[0] as usize];
            let message = format!("the outline of {} touches itself at {}", shape.label, place(at));
            let help = "split it into two outlines there, or move one of its corners";
            return Err(fault(shape.subject, key_of(shape.subject), message, help));
        }
        if border.len() < 3 {
            let message = format!(
                "{} is too thin to be told from a line near {}",
                shape.label,
                place(shape.corners[0])
            );
            return Err(fault(
                shape.subject,
                key_of(shape.subject),
                message,
                "check its dimensions and their unit",
            ));
        }
    }
    Ok(())
}

/// Whether any two shapes share an area.
fn check_overlaps(shapes: &[Shape], points: &[Point], borders: &[Vec<u32>]) -> Result<(), Fault> {
    let outlines: Vec<Vec<Point>> = borders.iter().map(|border| corners(points, border)).collect();
    let boxes: Vec<[f64; 4]> = outlines.iter().map(bounding_box).collect();
    for second in 0..shapes.len() {
        for first in 0..second {
            if !boxes_meet(&boxes[first], &boxes[second]) {
                continue;
            }
            let at = common_place(
                points,
                [&borders[first], &borders[second]],
                [&outlines[first], &outlines[second]],
            );
            if let Some(at) = at {
                return Err(overlap(
                    [&shapes[first], &shapes[second]],
                    at,
                    [&boxes[first], &boxes[second]],
                ));
            }
        }
    }
    Ok(())
}

/// A place where two joined borders show that their insides overlap.
fn common_place(points: &[Point], borders: [&[u32]; 2], outlines: [&[Point]; 2]) -> Option<Point> {
    for [a, b] in segments_of(borders[0]) {
        for [c, d] in segments_of(borders[1]) {
            let [a, b, c, d] = [a, b, c, d].map(|id| points[id as usize]);
            if let Some(at) = crossing(a, b, c, d) {
                return Some(at);
            }
        }
    }
    for (this, other) in [(1, 0), (0, 1)] {
        for [a, b] in segments_of(borders[this]) {
            let middle = midpoint(points[a as usize], points[b as usize]);
            let shared = runs_along(borders[other], [a, b]);
            if shared > 0 || (shared == 0 && contains(outlines[other], middle)) {
                return Some(middle);
            }
        }
    }
    None
}

/// 1 if a closed chain has the segment in this sense, −1 in the other, 0 not at all.
fn runs_along(chain: &[u32], [a, b]: [u32; 2]) -> i32 {
    let n = chain.len();
    let Some(i) = chain.iter().position(|&id| id == a) else { return 0 };
    if chain[(i + 1) % n] == b {
        1
    } else if chain[(i + n - 1) % n] == b {
        -1
    } else {
        0
    }
}

/// The later shape is blamed; the help names the box of the earlier.
fn overlap([first, second]: [&Shape; 2], at: Point, boxes: [&[f64; 4]; 2]) -> Fault {
    let message = format!("{} overlaps {} near {}", second.label, first.label, place(at));
    let [r0, r1, z0, z1] = boxes[0].map(super::fault::mm);
    let help = format!(
        "{} spans r = {r0} to {r1} mm and z = {z0} to {z1} mm; shapes may touch but not share an area",
        first.label
    );
    let key = match second.subject {
        Subject::Winding { .. } => Some(wrong_key(boxes[0], boxes[1])),
        other => key_of(other),
    };
    let mut it = fault(second.subject, key, message, help);
    it.other = Some(first.subject);
    it
}

/// The key of a winding that is wrong: heights where it stands out of the other's box above or below only, or, standing out
/// at a corner, where that is the shorter way out; else radii.
fn wrong_key(first: &[f64; 4], second: &[f64; 4]) -> &'static str {
    let stands_out = |low: usize| second[low] < first[low] || second[low + 1] > first[low + 1];
    let depth = |low: usize| (first[low + 1] - second[low]).min(second[low + 1] - first[low]);
    match (stands_out(0), stands_out(2)) {
        (false, true) => "heights",
        (true, true) if depth(2) < depth(0) => "heights",
        _ => "radii",
    }
}

/// The key that draws a subject's shape.
pub(super) fn key_of(subject: Subject) -> Option<&'static str> {
    match subject {
        Subject::Part(_) => Some("outline"),
        Subject::Winding { .. } => Some("radii"),
        Subject::Gap(_) => Some("length"),
        _ => None,
    }
}

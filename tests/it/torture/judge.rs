//! One sheet through the whole library, and whether what came out is sane.

use gapwright::adapt::{self, Outcome};
use gapwright::geometry::{Outline, Region, RegionKind, area, outline};
use gapwright::input::{read, render};
use gapwright::mesh::Chart;
use gapwright::model::{Model, Point};

/// What the library said about a sheet.
#[derive(Debug, Clone)]
pub enum Verdict {
    Solved(Solved),
    /// Refused, by the printed message.
    Refused(String),
}

/// The guaranteed ends of the coenergy [J] and what they took.
#[derive(Debug, Clone, PartialEq)]
pub struct Solved {
    pub low: f64,
    pub high: f64,
    pub n_unknowns: usize,
    /// Where shapes touch only in a point and the field is too sharp for the interval to close; `None`: it closed.
    pub stuck: Option<Point>,
}

impl Solved {
    /// The ends, divided by a factor of the coenergy.
    pub fn divided(&self, factor: f64) -> [f64; 2] {
        [self.low / factor, self.high / factor]
    }
}

/// Unknowns that a sheet may take: a slit of 1e-5 of the width between two windings takes 290 000 for its first mesh.
const N_UNKNOWNS_MAX: usize = 1_000_000;

/// Reads, draws and solves a sheet; checks everything that must hold of any outcome.
///
/// # Panics
/// When a refusal names no place, or an interval, the mesh or the region areas are not sane.
pub fn tried(text: &str) -> Verdict {
    let mut sheet = match read(text, "torture.toml", &|_| Err("no file here".into())) {
        Ok(sheet) => sheet,
        Err(diagnostics) => {
            let message = render(&diagnostics[0], text, false);
            check_placed(&message, text);
            return Verdict::Refused(message);
        }
    };
    sheet.model.accuracy.n_unknowns_max = N_UNKNOWNS_MAX;
    let outline = match outline(&sheet.model) {
        Ok(outline) => outline,
        Err(fault) => {
            let message = render(&sheet.diagnose(&fault), text, false);
            check_placed(&message, text);
            return Verdict::Refused(message);
        }
    };
    match adapt::run(&sheet.model, &outline, &mut |_| {}) {
        Ok(outcome) => {
            check_outcome(&sheet.model, &outline, &outcome, text);
            Verdict::Solved(Solved {
                low: outcome.bound.low,
                high: outcome.bound.high,
                n_unknowns: outcome.space.n_dofs,
                stuck: outcome.unresolved,
            })
        }
        Err(error) => {
            let message = error.to_string();
            assert!(message.contains("r = ") && message.contains("z = "), "{message}\n{text}");
            Verdict::Refused(message)
        }
    }
}

/// `file:line:column: message` and a help that says something.
fn check_placed(message: &str, text: &str) {
    let mut head = message.splitn(4, ':');
    assert_eq!(head.next(), Some("torture.toml"), "{message}\n{text}");
    let [line, column] =
        [head.next(), head.next()].map(|n| n.and_then(|n| n.parse::<usize>().ok()));
    let n_lines = text.lines().count().max(1);
    assert!(line.is_some_and(|n| 0 < n && n <= n_lines), "{message}\n{text}");
    assert!(column.is_some_and(|n| 0 < n), "{message}\n{text}");
}

fn check_outcome(model: &Model, outline: &Outline, outcome: &Outcome, text: &str) {
    let bound = &outcome.bound;
    assert!(bound.low <= bound.high && bound.low.is_finite(), "{bound:?}\n{text}");
    assert!(0.0 < bound.low && bound.high.is_finite(), "{} {}\n{text}", bound.low, bound.high);
    // Each share is a difference of energies of its triangle: rounding is far below the coenergy's digits.
    let smallest = bound.shares.iter().fold(f64::INFINITY, |m, &s| m.min(s));
    assert!(-1e-11 * bound.high <= smallest, "share {smallest} of {}\n{text}", bound.high);
    match outcome.unresolved {
        None => {
            assert!(outcome.reached, "{} unknowns\n{text}", outcome.space.n_dofs);
            assert!(bound.relative_width() <= model.accuracy.interval, "{text}");
        }
        Some(at) => {
            assert!(!outcome.reached, "{text}");
            assert!(touch(outline, at), "no shapes touch at {at:?}\n{text}");
        }
    }
    for pair in outcome.rounds.windows(2) {
        // The true value lies in both; the low end is that of nested spaces, up to the algebraic error.
        assert!(pair[0].low <= pair[1].high && pair[1].low <= pair[0].high, "{pair:?}\n{text}");
    }
    outcome.mesh.validate();
    check_areas(outline, outcome, text);
}

/// Whether two shapes have a corner there.
fn touch(outline: &Outline, at: Point) -> bool {
    // The smallest triangles are a thousand times smaller, the smallest shapes as much larger.
    let near = 1e-9 * outline.cap.radius;
    let is_corner = |p: &Point| (p.r - at.r).hypot(p.z - at.z) < near;
    let is_shape =
        |region: &&Region| !matches!(region.kind, RegionKind::Outside | RegionKind::Window);
    let shapes = outline.regions.iter().filter(is_shape);
    shapes.filter(|region| region.polygons.iter().flatten().any(is_corner)).count() >= 2
}

/// Every shape is covered by triangles of its own region, and by nothing else.
fn check_areas(outline: &Outline, outcome: &Outcome, text: &str) {
    let mut covered = vec![0.0; outline.regions.len()];
    for t in 0..outcome.mesh.n_triangles() {
        if outcome.mesh.charts[t] == Chart::Inside {
            covered[outcome.mesh.regions[t].0 as usize] += area(&outcome.mesh.corners(t));
        }
    }
    // Corners may move by the snap tolerance of the outline, a billionth of the section, along the whole border.
    let slack = 1e-8 * outline.cap.radius * outline.cap.radius;
    for (region, covered) in outline.regions.iter().zip(covered) {
        if matches!(region.kind, RegionKind::Outside | RegionKind::Window) {
            continue;
        }
        let drawn: f64 = region.polygons.iter().map(|polygon| area(polygon)).sum();
        let border = 1e-9 * drawn;
        assert!(
            (covered - drawn).abs() <= border.max(1e-6 * slack),
            "region {} has {drawn} m², its triangles {covered}\n{text}",
            region.name
        );
    }
}

/// A sheet that must be solved to its wanted width.
#[track_caller]
pub fn solved(text: &str) -> Solved {
    match tried(text) {
        Verdict::Solved(solved) => {
            assert!(solved.stuck.is_none(), "{solved:?}\n{text}");
            solved
        }
        Verdict::Refused(message) => panic!("refused: {message}\n{text}"),
    }
}

/// A sheet whose interval must stay wide because of a point that carries flux, which must be the one given [m].
#[track_caller]
pub fn stuck(text: &str, [r, z]: [f64; 2]) {
    match tried(text) {
        Verdict::Solved(Solved { stuck: Some(at), .. }) => {
            assert!((at.r - r).hypot(at.z - z) < 1e-9 * r, "{at:?}\n{text}");
        }
        other => panic!("{other:?}\n{text}"),
    }
}

/// A sheet that must be refused with a message that holds all the given words.
#[track_caller]
pub fn refused(text: &str, words: &[&str]) {
    match tried(text) {
        Verdict::Solved(solved) => panic!("solved: {solved:?}\n{text}"),
        Verdict::Refused(message) => {
            for word in words {
                assert!(message.contains(word), "no {word:?} in: {message}\n{text}");
            }
        }
    }
}

/// Whether two intervals share a number.
pub fn overlap(a: [f64; 2], b: [f64; 2]) -> bool {
    a[0] <= b[1] && b[0] <= a[1]
}

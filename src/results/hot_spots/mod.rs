//! Places of high flux density: |B| averaged over a disc inside the part, largest first, apart from each other.

mod disc;

use super::HotSpot;
use super::sample::Sampler;
use crate::geometry::{Region, RegionKind};
use crate::model::{HotSpotWish, Model, Point};
use crate::units::{Meter, Tesla};
use disc::{Bodies, Rule};
use std::collections::BTreeMap;

/// Rings and points a ring of the disc's averaging rule while it climbs.
const RULE_CLIMBING: [usize; 2] = [4, 16];
/// The same for the value that is told: near a corner B grows without bound, and one point of n is worth 1/n.
const RULE_TOLD: [usize; 2] = [12, 32];
/// Moves of one climb before it is called done; a climb is a few radii long.
const N_MOVES_MAX: usize = 40;
/// Climbs before the search ends with fewer spots than wanted, at the least and for each wanted one; most starts lead to a
/// place already found.
const N_CLIMBS_MIN: usize = 16;
const N_CLIMBS_A_SPOT: usize = 3;
/// A climb ends when steps of this share of the radius no longer help.
const FINEST_STEP: f64 = 0.06;
/// Places closer than this share of the radius are one: far below the finest step, far above rounding.
const SAME_PLACE: f64 = 1e-6;

/// The `count` hottest discs, hottest first, at least two radii apart.
///
/// Starts in the hottest cells and climbs to local maxima of the disc's mean, so that the answer does not hang on the mesh;
/// a start beside a spot already found, or one that leads to it, tells nothing new. There may be fewer maxima than wanted.
pub fn find(model: &Model, sampler: &Sampler) -> Vec<HotSpot> {
    let HotSpotWish { count, averaging: radius } = model.hot_spots;
    let [climbing, told] = [RULE_CLIMBING, RULE_TOLD].map(|[n, m]| Rule::new(radius, n, m));
    let mut bodies = Bodies::new(sampler);
    let (mut found, mut tried): (Vec<Disc>, Vec<Point>) = (Vec::new(), Vec::new());
    let n_climbs_max = N_CLIMBS_MIN.max(N_CLIMBS_A_SPOT * count);
    let mut n_climbs = 0;
    for (triangle, at) in candidates(sampler, &bodies, radius) {
        if count <= found.len() || n_climbs == n_climbs_max {
            break;
        }
        let is_apart = |other: &Point| 2.0 * radius <= distance(*other, at);
        if !tried.iter().all(is_apart) {
            continue;
        }
        n_climbs += 1;
        let mut top = climb(&mut bodies, &climbing, radius, triangle, at);
        if found.iter().all(|other| 2.0 * radius <= distance(other.at, top.at)) {
            top.mean = bodies.mean(&told, top.triangle, top.at);
            tried.push(top.at);
            found.push(top);
        }
        tried.push(at);
    }
    found.sort_by(|a, b| b.mean.total_cmp(&a.mean));
    (found.into_iter())
        .map(|disc| HotSpot {
            part: sampler.region(disc.triangle).name.clone(),
            r: disc.at.r,
            z: disc.at.z,
            flux_density: disc.mean,
        })
        .collect()
}

/// A disc, the triangle of its centre and its mean |B|.
#[derive(Debug, Clone, Copy)]
struct Disc {
    triangle: usize,
    at: Point,
    mean: Tesla,
}

fn distance(a: Point, b: Point) -> Meter {
    (a.r - b.r).hypot(a.z - b.z)
}

/// Moves a disc uphill inside its body by halved steps.
fn climb(bodies: &mut Bodies, rule: &Rule, radius: Meter, triangle: usize, at: Point) -> Disc {
    let own = bodies.body(triangle);
    let mut disc = Disc { triangle, at, mean: bodies.mean(rule, triangle, at) };
    // Where it has been or could have gone is lower.
    let mut asked = vec![at];
    let is_same = |a: Point, b: Point| (a.r - b.r).abs() + (a.z - b.z).abs() < SAME_PLACE * radius;
    let mut step = 0.5 * radius;
    for _ in 0..N_MOVES_MAX {
        let mut best = disc;
        for (dr, dz) in [(1.0, 0.0), (-1.0, 0.0), (0.0, 1.0), (0.0, -1.0)] {
            let at = Point { r: (disc.at.r + step * dr).max(0.0), z: disc.at.z + step * dz };
            if asked.iter().any(|other| is_same(*other, at)) {
                continue;
            }
            asked.push(at);
            let Some((triangle, _)) = bodies.locate(disc.triangle, at) else { continue };
            if bodies.body(triangle) == own {
                let mean = bodies.mean(rule, triangle, at);
                if best.mean < mean {
                    best = Disc { triangle, at, mean };
                }
            }
        }
        if disc.mean < best.mean {
            disc = best;
        } else if step < FINEST_STEP * radius {
            break;
        } else {
            step *= 0.5;
        }
    }
    disc
}

/// The body that a magnetic region belongs to: all legs are one core, a part is its own.
fn body(region: &Region) -> Option<usize> {
    match region.kind {
        RegionKind::Leg(_) | RegionKind::Joint(_) => Some(0),
        RegionKind::Part(k) => Some(k + 1),
        _ => None,
    }
}

/// The hottest centroid of each cell of one radius, hottest cell first.
fn candidates(sampler: &Sampler, bodies: &Bodies, radius: Meter) -> Vec<(usize, Point)> {
    struct Cell {
        weighted: f64,
        area: f64,
        hottest: (Tesla, usize, Point),
    }
    let mut cells: BTreeMap<(i64, i64, usize), Cell> = BTreeMap::new();
    for t in 0..sampler.outcome.mesh.triangles.len() {
        let Some(body) = bodies.body(t) else { continue };
        let field = sampler.field(t);
        let middle = [1.0 / 3.0; 3];
        let at = field.frame.position(&middle);
        let b = field.magnitude(&middle);
        let key = ((at.r / radius).floor() as i64, (at.z / radius).floor() as i64, body);
        let cell =
            cells.entry(key).or_insert(Cell { weighted: 0.0, area: 0.0, hottest: (b, t, at) });
        cell.weighted += b * field.frame.det_abs;
        cell.area += field.frame.det_abs;
        if cell.hottest.0 < b {
            cell.hottest = (b, t, at);
        }
    }
    let mut cells: Vec<(f64, usize, Point)> =
        cells.into_values().map(|c| (c.weighted / c.area, c.hottest.1, c.hottest.2)).collect();
    cells.sort_by(|a, b| b.0.total_cmp(&a.0).then(a.1.cmp(&b.1)));
    cells.into_iter().map(|(_, t, at)| (t, at)).collect()
}

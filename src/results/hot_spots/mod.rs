//! Places of high flux density: |B| averaged over a disc inside the part, largest first, apart from each other.

mod disc;

use super::HotSpot;
use super::sample::Sampler;
use crate::fem::element::blend;
use crate::fem::moments::flux_density_magnitude;
use crate::geometry::{Region, RegionKind};
use crate::model::{HotSpotWish, Model, Point};
use crate::units::{Meter, Tesla};
use disc::{Field, Rule};
use std::collections::BTreeMap;
use std::num::NonZeroU32;

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
/// A disc as close as this share of the radius to the top of an earlier climb is on the way there, unless it lies on a ridge:
/// less than [`FLAT`] of the top's mean below it. In 1188 fields of 594 sections that led to the same spots as climbs to
/// their end; without the ridge one of them had a spot fewer, with 0.4 of the radius and 1e-3 six.
const SAME_TOP: f64 = 0.25;
const FLAT: f64 = 1e-4;

/// The `count` hottest discs, hottest first, at least two radii apart.
///
/// Starts in the hottest cells and climbs to local maxima of the disc's mean, so that the answer does not hang on the mesh;
/// a start beside a spot already found, or one that leads to it, tells nothing new. There may be fewer maxima than wanted.
pub fn find(model: &Model, sampler: &Sampler) -> Vec<HotSpot> {
    let HotSpotWish { count, averaging: radius } = model.hot_spots;
    let [climbing, told] = [RULE_CLIMBING, RULE_TOLD].map(|[n, m]| Rule::new(radius, n, m));
    let mut field = Field::new(sampler);
    let (mut found, mut tops): (Vec<Disc>, Vec<Disc>) = (Vec::new(), Vec::new());
    let mut tried: Vec<Point> = Vec::new();
    let n_climbs_max = N_CLIMBS_MIN.max(N_CLIMBS_A_SPOT * count);
    let mut n_climbs = 0;
    let are_apart = |a: Point, b: Point| 2.0 * radius <= distance(a, b);
    for (triangle, at) in candidates(sampler, radius) {
        if count <= found.len() || n_climbs == n_climbs_max {
            break;
        }
        if !tried.iter().all(|&other| are_apart(other, at)) {
            continue;
        }
        n_climbs += 1;
        tried.push(at);
        let Some(top) = climb(&mut field, &climbing, triangle, at, &tops) else { continue };
        tops.push(top);
        if found.iter().all(|other| are_apart(other.at, top.at)) {
            tried.push(top.at);
            found.extend(field.disc(&told, top.triangle, top.at));
        }
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
    let (dr, dz) = (a.r - b.r, a.z - b.z);
    (dr * dr + dz * dz).sqrt()
}

/// Moves a disc uphill inside its body by halved steps, from a point of this triangle; `None` when it is on the way to one of
/// the `tops` of earlier climbs.
fn climb(
    field: &mut Field,
    rule: &Rule,
    triangle: usize,
    at: Point,
    tops: &[Disc],
) -> Option<Disc> {
    let mut disc = field.disc(rule, triangle, at)?;
    // Where it has been or could have gone is lower.
    let mut asked = vec![at];
    let same = SAME_PLACE * rule.radius;
    let mut step = 0.5 * rule.radius;
    for _ in 0..N_MOVES_MAX {
        let leads_to = |top: &Disc| {
            disc.mean < (1.0 - FLAT) * top.mean
                && distance(disc.at, top.at) < SAME_TOP * rule.radius
        };
        if tops.iter().any(leads_to) {
            return None;
        }
        let mut best = disc;
        for (dr, dz) in [(1.0, 0.0), (-1.0, 0.0), (0.0, 1.0), (0.0, -1.0)] {
            let at = Point { r: (disc.at.r + step * dr).max(0.0), z: disc.at.z + step * dz };
            if asked.iter().any(|other| (at.r - other.r).abs() + (at.z - other.z).abs() < same) {
                continue;
            }
            asked.push(at);
            if let Some(moved) = field.disc(rule, disc.triangle, at)
                && best.mean < moved.mean
            {
                best = moved;
            }
        }
        if disc.mean < best.mean {
            disc = best;
        } else if step < FINEST_STEP * rule.radius {
            break;
        } else {
            step *= 0.5;
        }
    }
    Some(disc)
}

/// A piece of magnetic material in which discs lie and climb: the core, or a part. Never 0, so that an `Option` of it is
/// compared as one number, which every point of every disc does.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
struct Body(NonZeroU32);

/// The body that a magnetic region belongs to: all legs are one core, a part is its own.
fn body(region: &Region) -> Option<Body> {
    let number = match region.kind {
        RegionKind::Leg(_) | RegionKind::Joint(_) => 1,
        RegionKind::Part(k) => 2 + k as u32,
        _ => 0,
    };
    NonZeroU32::new(number).map(Body)
}

/// The hottest centroid of each cell of one radius, hottest cell first.
fn candidates(sampler: &Sampler, radius: Meter) -> Vec<(usize, Point)> {
    struct Cell {
        weighted: f64,
        area: f64,
        hottest: (Tesla, usize, Point),
    }
    let mut cells: BTreeMap<(i64, i64, Body), Cell> = BTreeMap::new();
    for t in 0..sampler.outcome.mesh.triangles.len() {
        let Some(body) = body(sampler.region(t)) else { continue };
        let (frame, gradients) = sampler.local(t);
        let middle = [1.0 / 3.0; 3];
        let at = frame.position(&middle);
        let b = flux_density_magnitude(&frame, at.r, blend(&middle, &gradients));
        let key = ((at.r / radius).floor() as i64, (at.z / radius).floor() as i64, body);
        let cell =
            cells.entry(key).or_insert(Cell { weighted: 0.0, area: 0.0, hottest: (b, t, at) });
        cell.weighted += b * frame.det_abs;
        cell.area += frame.det_abs;
        if cell.hottest.0 < b {
            cell.hottest = (b, t, at);
        }
    }
    let mut cells: Vec<(f64, usize, Point)> =
        cells.into_values().map(|c| (c.weighted / c.area, c.hottest.1, c.hottest.2)).collect();
    cells.sort_unstable_by(|a, b| b.0.total_cmp(&a.0).then(a.1.cmp(&b.1)));
    cells.into_iter().map(|(_, t, at)| (t, at)).collect()
}

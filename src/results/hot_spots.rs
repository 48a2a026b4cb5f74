//! Places of high flux density: |B| averaged over a disc inside the part, largest first, apart from each other.

use super::HotSpot;
use super::sample::Sampler;
use crate::fem::evaluate::locate;
use crate::geometry::{Region, RegionKind};
use crate::mesh::Chart;
use crate::model::{Model, Point};
use crate::units::{Meter, Tesla};
use std::collections::BTreeMap;
use std::f64::consts::TAU;

/// Cells of one disc radius that are looked at closely; the hottest ones by their own mean.
const N_CANDIDATES: usize = 60;
/// Rings and points a ring of the disc's averaging rule (equal areas, midpoints).
const N_RINGS: usize = 4;
const N_ON_RING: usize = 16;
/// Moves of one climb before it is called done; a climb is a few radii long.
const N_MOVES_MAX: usize = 40;
/// A climb ends when steps of this share of the radius no longer help.
const FINEST_STEP: f64 = 0.06;

/// The `count` hottest discs, at least two radii apart; each is a local maximum of the disc's mean.
pub fn find(model: &Model, sampler: &Sampler) -> Vec<HotSpot> {
    let (radius, count) = (model.hot_spots.averaging, model.hot_spots.count);
    let discs = candidates(sampler, radius)
        .into_iter()
        .map(|(t, at)| Disc::new(sampler, t, at, radius))
        .collect();
    // A few more starts than wanted: two may climb to the same place.
    let climbed = apart(discs, count + 4, radius)
        .into_iter()
        .map(|disc| climb(sampler, disc, radius))
        .collect();
    (apart(climbed, count, radius).into_iter())
        .map(|disc| HotSpot {
            part: region(sampler, disc.triangle).name.clone(),
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

impl Disc {
    fn new(sampler: &Sampler, triangle: usize, at: Point, radius: Meter) -> Disc {
        Disc { triangle, at, mean: disc_mean(sampler, triangle, at, radius) }
    }
}

/// The first `count` discs, hottest first, that are two radii from each other.
fn apart(mut discs: Vec<Disc>, count: usize, radius: Meter) -> Vec<Disc> {
    let by_place = |a: &Disc, b: &Disc| a.at.r.total_cmp(&b.at.r).then(a.at.z.total_cmp(&b.at.z));
    discs.sort_by(|a, b| b.mean.total_cmp(&a.mean).then(by_place(a, b)));
    let mut kept: Vec<Disc> = Vec::new();
    for disc in discs {
        let is_apart =
            |other: &Disc| 2.0 * radius <= (other.at.r - disc.at.r).hypot(other.at.z - disc.at.z);
        if kept.len() < count && kept.iter().all(is_apart) {
            kept.push(disc);
        }
    }
    kept
}

/// Moves a disc uphill inside its body by halved steps, so that the answer does not hang on the mesh.
fn climb(sampler: &Sampler, mut disc: Disc, radius: Meter) -> Disc {
    let own = body(region(sampler, disc.triangle));
    let mut step = 0.5 * radius;
    for _ in 0..N_MOVES_MAX {
        let moved = |(dr, dz): (f64, f64)| {
            let at = Point { r: disc.at.r + step * dr, z: disc.at.z + step * dz };
            let (t, _) = locate(&sampler.outcome.mesh, &sampler.edge_triangles, disc.triangle, at)?;
            let is_inside = 0.0 <= at.r && body(region(sampler, t)) == own;
            is_inside.then(|| Disc::new(sampler, t, at, radius))
        };
        let best = [(1.0, 0.0), (-1.0, 0.0), (0.0, 1.0), (0.0, -1.0)].into_iter().filter_map(moved);
        match best.max_by(|a, b| a.mean.total_cmp(&b.mean)).filter(|best| disc.mean < best.mean) {
            Some(best) => disc = best,
            None if step < FINEST_STEP * radius => break,
            None => step *= 0.5,
        }
    }
    disc
}

fn region<'a>(sampler: &'a Sampler, t: usize) -> &'a Region {
    &sampler.outline.regions[sampler.outcome.mesh.regions[t].0 as usize]
}

/// The body that a magnetic region belongs to: all legs are one core, a part is its own.
fn body(region: &Region) -> Option<usize> {
    match region.kind {
        RegionKind::Leg(_) | RegionKind::Joint(_) => Some(0),
        RegionKind::Part(k) => Some(k + 1),
        _ => None,
    }
}

/// The hottest centroid of each of the hottest cells.
fn candidates(sampler: &Sampler, radius: Meter) -> Vec<(usize, Point)> {
    struct Cell {
        weighted: f64,
        area: f64,
        hottest: (Tesla, usize, Point),
    }
    let mesh = &sampler.outcome.mesh;
    let mut cells: BTreeMap<(i64, i64, usize), Cell> = BTreeMap::new();
    for t in 0..mesh.triangles.len() {
        let Some(body) = body(region(sampler, t)) else { continue };
        let (frame, gradients) = sampler.local(t);
        let middle = [1.0 / 3.0; 3];
        let at = frame.position(&middle);
        let [b_r, b_z] = crate::fem::evaluate::flux_density(&frame, &gradients, &middle);
        let b = b_r.hypot(b_z);
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
    cells.sort_by(|a, b| b.0.total_cmp(&a.0).then(a.1.cmp(&b.1)));
    cells.truncate(N_CANDIDATES);
    cells.into_iter().map(|(_, t, at)| (t, at)).collect()
}

/// Mean |B| over the part of the disc that lies in the same body.
fn disc_mean(sampler: &Sampler, t: usize, center: Point, radius: Meter) -> Tesla {
    let own = body(region(sampler, t));
    let (mut sum, mut n) = (0.0, 0.0);
    for ring in 0..N_RINGS {
        let distance = radius * ((ring as f64 + 0.5) / N_RINGS as f64).sqrt();
        for k in 0..N_ON_RING {
            let angle = TAU * (k as f64 + 0.5 * (ring % 2) as f64) / N_ON_RING as f64;
            let at = Point {
                r: center.r + distance * angle.cos(),
                z: center.z + distance * angle.sin(),
            };
            if at.r < 0.0 {
                continue;
            }
            let Some((found, lambda)) =
                locate(&sampler.outcome.mesh, &sampler.edge_triangles, t, at)
            else {
                continue;
            };
            if sampler.outcome.mesh.charts[found] == Chart::Inside
                && body(region(sampler, found)) == own
            {
                let [b_r, b_z] = sampler.flux_density(found, &lambda);
                sum += b_r.hypot(b_z);
                n += 1.0;
            }
        }
    }
    if n == 0.0 { 0.0 } else { sum / n }
}

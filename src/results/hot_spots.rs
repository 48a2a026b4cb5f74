//! Places of high flux density: |B| averaged over a disc inside the part, largest first, apart from each other.

use super::HotSpot;
use super::sample::Sampler;
use crate::fem::evaluate::{flux_density_components, locate};
use crate::geometry::{Region, RegionKind};
use crate::mesh::Chart;
use crate::model::{Model, Point};
use crate::units::{Meter, Tesla};
use std::collections::BTreeMap;
use std::f64::consts::TAU;

/// Rings and points a ring of the disc's averaging rule (equal areas, midpoints) while it climbs.
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

/// The `count` hottest discs, hottest first, at least two radii apart.
///
/// Starts in the hottest cells and climbs to local maxima of the disc's mean, so that the answer does not hang on the mesh;
/// a start beside a spot already found, or one that leads to it, tells nothing new. There may be fewer maxima than wanted.
pub fn find(model: &Model, sampler: &Sampler) -> Vec<HotSpot> {
    let (radius, count) = (model.hot_spots.averaging, model.hot_spots.count);
    let search = Search { sampler, radius, offsets: offsets(radius, RULE_CLIMBING) };
    let told = Search { sampler, radius, offsets: offsets(radius, RULE_TOLD) };
    let (mut found, mut tried): (Vec<Disc>, Vec<Point>) = (Vec::new(), Vec::new());
    let n_climbs_max = N_CLIMBS_MIN.max(N_CLIMBS_A_SPOT * count);
    let mut n_climbs = 0;
    for (triangle, at) in candidates(sampler, radius) {
        if count <= found.len() || n_climbs == n_climbs_max {
            break;
        }
        if search.is_apart(&tried, at) {
            n_climbs += 1;
            let disc = search.climb(search.disc(triangle, at));
            if found.iter().all(|other| search.are_apart(other.at, disc.at)) {
                found.push(told.disc(disc.triangle, disc.at));
                tried.push(disc.at);
            }
            tried.push(at);
        }
    }
    found.sort_by(|a, b| b.mean.total_cmp(&a.mean));
    (found.into_iter())
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

struct Search<'a> {
    sampler: &'a Sampler<'a>,
    radius: Meter,
    /// Points of the averaging rule about the centre.
    offsets: Vec<[Meter; 2]>,
}

fn offsets(radius: Meter, [n_rings, n_on_ring]: [usize; 2]) -> Vec<[Meter; 2]> {
    let point = |ring: usize, k: usize| {
        let distance = radius * ((ring as f64 + 0.5) / n_rings as f64).sqrt();
        let angle = TAU * (k as f64 + 0.5 * (ring % 2) as f64) / n_on_ring as f64;
        [distance * angle.cos(), distance * angle.sin()]
    };
    (0..n_rings).flat_map(|ring| (0..n_on_ring).map(move |k| point(ring, k))).collect()
}

impl Search<'_> {
    fn are_apart(&self, a: Point, b: Point) -> bool {
        2.0 * self.radius <= (a.r - b.r).hypot(a.z - b.z)
    }

    fn is_apart(&self, others: &[Point], at: Point) -> bool {
        others.iter().all(|&other| self.are_apart(other, at))
    }

    fn disc(&self, triangle: usize, at: Point) -> Disc {
        Disc { triangle, at, mean: self.mean(triangle, at) }
    }

    /// Moves a disc uphill inside its body by halved steps.
    fn climb(&self, mut disc: Disc) -> Disc {
        let sampler = self.sampler;
        let own = body(region(sampler, disc.triangle));
        let mut step = 0.5 * self.radius;
        let mut back = (0.0, 0.0);
        for _ in 0..N_MOVES_MAX {
            let moved = |(dr, dz): (f64, f64)| {
                // Where it came from is lower.
                if (dr, dz) == back {
                    return None;
                }
                let at = Point { r: (disc.at.r + step * dr).max(0.0), z: disc.at.z + step * dz };
                let mesh = &sampler.outcome.mesh;
                let (t, _) = locate(mesh, &sampler.outcome.fans.edge_triangles, disc.triangle, at)?;
                (body(region(sampler, t)) == own).then(|| (self.disc(t, at), (-dr, -dz)))
            };
            let around = [(1.0, 0.0), (-1.0, 0.0), (0.0, 1.0), (0.0, -1.0)];
            let best =
                around.into_iter().filter_map(moved).max_by(|a, b| a.0.mean.total_cmp(&b.0.mean));
            match best.filter(|best| disc.mean < best.0.mean) {
                Some(best) => (disc, back) = best,
                None if step < FINEST_STEP * self.radius => break,
                None => (step, back) = (0.5 * step, (0.0, 0.0)),
            }
        }
        disc
    }

    /// Mean |B| over the part of the disc that lies in the same body.
    fn mean(&self, t: usize, center: Point) -> Tesla {
        let mesh = &self.sampler.outcome.mesh;
        let edge_triangles = &self.sampler.outcome.fans.edge_triangles;
        let own = body(region(self.sampler, t));
        let (mut sum, mut n, mut last) = (0.0, 0.0, t);
        let (mut local_of, mut local) = (t, self.sampler.local(t));
        for [dr, dz] in &self.offsets {
            let at = Point { r: center.r + dr, z: center.z + dz };
            if at.r < 0.0 {
                continue;
            }
            // Neighbours on the ring are neighbours in the mesh: walk on from the last one.
            let Some((found, lambda)) = locate(mesh, edge_triangles, last, at) else {
                continue;
            };
            last = found;
            if mesh.charts[found] == Chart::Inside && body(region(self.sampler, found)) == own {
                if found != local_of {
                    (local_of, local) = (found, self.sampler.local(found));
                }
                let [b_r, b_z] = flux_density_components(&local.0, &local.1, &lambda);
                sum += (b_r * b_r + b_z * b_z).sqrt();
                n += 1.0;
            }
        }
        if n == 0.0 { 0.0 } else { sum / n }
    }
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

/// The hottest centroid of each cell of one radius, hottest cell first.
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
        let [b_r, b_z] = crate::fem::evaluate::flux_density_components(&frame, &gradients, &middle);
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
    cells.into_iter().map(|(_, t, at)| (t, at)).collect()
}

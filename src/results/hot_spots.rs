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
const N_CANDIDATES: usize = 120;
/// Rings and points a ring of the disc's averaging rule (equal areas, midpoints).
const N_RINGS: usize = 3;
const N_ON_RING: usize = 12;

/// The `count` hottest discs, at least two radii apart.
pub fn find(model: &Model, sampler: &Sampler) -> Vec<HotSpot> {
    let radius = model.hot_spots.averaging;
    let mut spots: Vec<HotSpot> = (candidates(sampler, radius).into_iter())
        .map(|(t, at)| HotSpot {
            part: region(sampler, t).name.clone(),
            r: at.r,
            z: at.z,
            flux_density: disc_mean(sampler, t, at, radius),
        })
        .collect();
    spots.sort_by(|a, b| {
        b.flux_density
            .total_cmp(&a.flux_density)
            .then(a.r.total_cmp(&b.r))
            .then(a.z.total_cmp(&b.z))
    });
    let mut kept: Vec<HotSpot> = Vec::new();
    for spot in spots {
        let is_apart = |other: &HotSpot| 2.0 * radius <= (other.r - spot.r).hypot(other.z - spot.z);
        if kept.len() < model.hot_spots.count && kept.iter().all(is_apart) {
            kept.push(spot);
        }
    }
    kept
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

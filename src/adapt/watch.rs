//! Places where the field itself is wanted, not only the energy: probes, and the hottest spots of the cores.
//!
//! The rounds refine where the energy's error sits. A probe on the axis or far outside, and the corner of a permeable core,
//! hold next to none of it, so they ask for their own triangles.

use super::Outcome;
use crate::fem::Reluctivity;
use crate::fem::element::Frame;
use crate::fem::evaluate::{LocalField, find, locate, to_chart};
use crate::fem::moments::linear_energy;
use crate::mesh::Chart;
use crate::model::{Model, Point};
use crate::units::{MU0, Meter};
use std::f64::consts::TAU;

/// Share of a triangle's own energy that the interval may have in a probe's triangle: about (δB/B)², so 0.3 % of B.
const PROBE_SHARE: f64 = 1e-5;
/// The same for the rest of the exterior when a probe lies outside the polygon, where few triangles stand as long as only the
/// energy counts: 3 % of B. Much less would refine for ever towards infinity, where every shell looks like the one before.
const EXTERIOR_SHARE: f64 = 1e-3;
/// Core triangles that a round cuts because they are the hottest and wider than the averaging disc.
const N_HOT: usize = 8;
/// Relative permeability above which a region counts as core.
const CORE_PERMEABILITY: f64 = 2.0;

/// What to watch; nothing by default.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Watch {
    /// Probe points [m].
    pub probes: Vec<Point>,
    /// Radius of the hot spots' averaging disc [m]; 0 for none.
    pub spot_radius: Meter,
}

impl Watch {
    /// All probe points of a model and its averaging disc.
    pub fn of(model: &Model) -> Watch {
        let points = model.probes.iter().flat_map(|probe| probe.points());
        Watch {
            probes: points.collect(),
            spot_radius: if model.hot_spots.count == 0 { 0.0 } else { model.hot_spots.averaging },
        }
    }
}

/// The hottest core triangles that are still wider than the averaging disc.
pub fn hot_triangles(outcome: &Outcome) -> Vec<u32> {
    let (mesh, radius) = (&outcome.mesh, outcome.watch.spot_radius);
    if radius <= 0.0 {
        return Vec::new();
    }
    let is_core = |t: usize| match &outcome.coefficients.reluctivity[mesh.regions[t].0 as usize] {
        Reluctivity::Constant(nu) => nu * MU0 * CORE_PERMEABILITY < 1.0,
        Reluctivity::Saturating(_) => true,
    };
    let mut hot: Vec<(f64, u32)> = (0..mesh.triangles.len())
        .filter(|&t| mesh.charts[t] == Chart::Inside && is_core(t))
        .filter_map(|t| {
            let frame = Frame::new(mesh, t);
            // Twice the area against the square of the radius: wider than the disc.
            (radius * radius < frame.det_abs).then(|| {
                let gradients = outcome.solution.gradients(mesh, t);
                let b = LocalField::new(frame, &gradients).components(&[1.0 / 3.0; 3]);
                (b[0] * b[0] + b[1] * b[1], t as u32)
            })
        })
        .collect();
    hot.sort_by(|a, b| b.0.total_cmp(&a.0).then(a.1.cmp(&b.1)));
    hot.into_iter().take(N_HOT).map(|(_, t)| t).collect()
}

/// Triangles of probes whose own error is still too large.
pub fn probe_triangles(outcome: &Outcome) -> Vec<u32> {
    let mesh = &outcome.mesh;
    if outcome.watch.probes.is_empty() {
        return Vec::new();
    }
    let pairs = &outcome.fans.edge_triangles;
    let (mut watched, mut is_outside) = (Vec::new(), false);
    let mut last: Option<usize> = None;
    for &at in &outcome.watch.probes {
        let (chart, position) = to_chart(mesh, at);
        // Points of a line are neighbours: walk on from the last one.
        let near = last
            .filter(|&t| mesh.charts[t] == chart)
            .and_then(|t| locate(mesh, pairs, t, position));
        let Some((t, _)) = near.or_else(|| find(mesh, pairs, chart, position)) else { continue };
        last = Some(t);
        is_outside |= chart != Chart::Inside;
        watched.extend(around(outcome, t));
    }
    watched.retain(|&t| has_share(outcome, t, PROBE_SHARE));
    if is_outside {
        let exterior = (0..mesh.triangles.len() as u32).filter(|&t| {
            mesh.charts[t as usize] != Chart::Inside && has_share(outcome, t, EXTERIOR_SHARE)
        });
        watched.extend(exterior);
    }
    watched.sort_unstable();
    watched.dedup();
    watched
}

/// Is the triangle's share in the interval more than `share` of its own energy?
fn has_share(outcome: &Outcome, t: u32, share: f64) -> bool {
    let t = t as usize;
    let gradients = outcome.solution.gradients(&outcome.mesh, t);
    share * TAU * linear_energy(&outcome.elements.k[t], &gradients) < outcome.bound.shares[t]
}

/// The triangles whose error a probe in triangle t feels most: all that touch it.
fn around(outcome: &Outcome, t: usize) -> Vec<u32> {
    let mesh = &outcome.mesh;
    let ring = mesh.triangles[t].into_iter().flat_map(|v| outcome.fans.around(v as usize));
    ring.map(|blade| blade.triangle).collect()
}

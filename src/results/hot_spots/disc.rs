//! Mean of |B| over the part of a disc that lies in one body, by a fixed rule of points.

use super::body;
use crate::adapt::Outcome;
use crate::fem::evaluate::{LocalField, walk};
use crate::model::Point;
use crate::results::sample::Sampler;
use crate::units::{Meter, Tesla};
use std::f64::consts::TAU;

/// Marks a triangle that has not been asked yet.
const NOT_ASKED: u32 = u32::MAX;

/// Points of the averaging rule about the centre: rings of equal area, every other ring turned by half a step.
pub struct Rule {
    offsets: Vec<[Meter; 2]>,
}

impl Rule {
    /// `n_rings` rings of `n_on_ring` points in a disc of this radius.
    pub fn new(radius: Meter, n_rings: usize, n_on_ring: usize) -> Rule {
        // Two rings need twice the directions of one.
        let step = TAU / (2 * n_on_ring) as f64;
        let directions: Vec<(f64, f64)> =
            (0..2 * n_on_ring).map(|k| (k as f64 * step).sin_cos()).collect();
        let on_ring = |ring: usize| {
            let distance = radius * ((ring as f64 + 0.5) / n_rings as f64).sqrt();
            let turned = directions.iter().skip(ring % 2).step_by(2);
            turned.map(move |(sine, cosine)| [distance * cosine, distance * sine])
        };
        Rule { offsets: (0..n_rings).flat_map(on_ring).collect() }
    }
}

/// The field of the bodies, with everything that neighbouring discs share.
pub struct Bodies<'a> {
    sampler: &'a Sampler<'a>,
    /// Body of every region of the outline.
    of_region: Vec<Option<usize>>,
    /// Place in `fields` of every triangle, or [`NOT_ASKED`]: discs are small, so few ever are.
    slots: Vec<u32>,
    fields: Vec<LocalField>,
}

impl<'a> Bodies<'a> {
    /// Prepares the field for discs.
    pub fn new(sampler: &'a Sampler<'a>) -> Bodies<'a> {
        Bodies {
            sampler,
            of_region: sampler.outline.regions.iter().map(body).collect(),
            slots: vec![NOT_ASKED; sampler.outcome.mesh.triangles.len()],
            fields: Vec::new(),
        }
    }

    /// Body of triangle t, `None` in air and windings.
    pub fn body(&self, t: usize) -> Option<usize> {
        self.of_region[self.sampler.outcome.mesh.regions[t].0 as usize]
    }

    /// The triangle of a point and its barycentric coordinates, by a walk from triangle `start`.
    pub fn locate(&mut self, start: usize, at: Point) -> Option<(usize, [f64; 3])> {
        let Outcome { mesh, fans, .. } = self.sampler.outcome;
        walk(mesh, &fans.edge_triangles, start, |t| self.field(t).barycentric(at))
    }

    /// Mean |B| over the part of the disc round `center`, a point of triangle t, that lies in the body of t.
    pub fn mean(&mut self, rule: &Rule, t: usize, center: Point) -> Tesla {
        let own = self.body(t);
        let (mut sum, mut n, mut last) = (0.0, 0.0, t);
        for [dr, dz] in &rule.offsets {
            let at = Point { r: center.r + dr, z: center.z + dz };
            if at.r < 0.0 {
                continue;
            }
            // Neighbours on the ring are neighbours in the mesh: walk on from the last one.
            let Some((found, lambda)) = self.locate(last, at) else { continue };
            last = found;
            if self.body(found) == own {
                sum += self.field(found).magnitude(&lambda);
                n += 1.0;
            }
        }
        if n == 0.0 { 0.0 } else { sum / n }
    }

    fn field(&mut self, t: usize) -> &LocalField {
        if self.slots[t] == NOT_ASKED {
            self.slots[t] = self.fields.len() as u32;
            self.fields.push(self.sampler.field(t));
        }
        &self.fields[self.slots[t] as usize]
    }
}

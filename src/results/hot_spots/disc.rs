//! Mean of |B| over the part of a disc that lies in one body, by a fixed rule of points.

use super::{Body, Disc, body};
use crate::adapt::Outcome;
use crate::fem::element::{Pair, blend, dot};
use crate::fem::evaluate::{LocalField, SLACK, across, lowest, off_axis};
use crate::mesh::fans::NO_TRIANGLE;
use crate::model::Point;
use crate::results::sample::Sampler;
use crate::units::{Meter, Tesla};
use std::f64::consts::TAU;

/// Marks a triangle that has not been asked yet.
const NOT_ASKED: u32 = u32::MAX;

/// Points of the averaging rule about the centre: rings of equal area, every other ring turned by half a step.
pub struct Rule {
    pub radius: Meter,
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
        Rule { radius, offsets: (0..n_rings).flat_map(on_ring).collect() }
    }
}

/// A triangle with all that a disc asks of it, in one place: a climb asks the same few hundred triangles some ten thousand
/// times.
struct Cell {
    triangle: u32,
    body: Option<Body>,
    corner: Point,
    /// ∇λ_1 and ∇λ_2 [1/m].
    slopes: [Pair; 2],
    /// r at the corners [m].
    radii: [Meter; 3],
    /// ∇ψ at the corners [Wb/(rad·m)].
    gradient: [Pair; 3],
    /// Triangles across the edges opposite to the corners, or [`NO_TRIANGLE`].
    neighbours: [u32; 3],
}

impl Cell {
    fn new(sampler: &Sampler, t: usize) -> Cell {
        let LocalField { frame, gradient } = sampler.field(t);
        let Outcome { mesh, fans, .. } = sampler.outcome;
        let neighbour = |k| across(mesh, &fans.edge_triangles, t, k);
        Cell {
            triangle: t as u32,
            body: body(sampler.region(t)),
            corner: frame.corners[0],
            slopes: [[1.0, 0.0], [0.0, 1.0]].map(|u| frame.chart_gradient(u)),
            radii: frame.corners.map(|corner| corner.r),
            gradient,
            neighbours: [0, 1, 2].map(|k| neighbour(k).map_or(NO_TRIANGLE, |t| t as u32)),
        }
    }

    #[inline]
    fn barycentric(&self, at: Point) -> [f64; 3] {
        let spoke = [at.r - self.corner.r, at.z - self.corner.z];
        let (l1, l2) = (dot(self.slopes[0], spoke), dot(self.slopes[1], spoke));
        [1.0 - l1 - l2, l1, l2]
    }

    /// |∇ψ|/r.
    #[inline]
    fn flux_density(&self, lambda: &[f64; 3]) -> Tesla {
        let mut r = self.radius(lambda);
        let mut gradient = blend(lambda, &self.gradient);
        if r <= 0.0 {
            let beside = off_axis(lambda);
            (r, gradient) = (self.radius(&beside), blend(&beside, &self.gradient));
        }
        dot(gradient, gradient).sqrt() / r
    }

    #[inline]
    fn radius(&self, lambda: &[f64; 3]) -> Meter {
        lambda[0] * self.radii[0] + lambda[1] * self.radii[1] + lambda[2] * self.radii[2]
    }
}

/// The field round the discs, one cell for every triangle that was asked.
pub struct Field<'a> {
    sampler: &'a Sampler<'a>,
    /// Place in `cells` of every triangle, or [`NOT_ASKED`]: discs are small, so few ever are.
    slots: Vec<u32>,
    cells: Vec<Cell>,
}

impl<'a> Field<'a> {
    /// Prepares the field for discs.
    pub fn new(sampler: &'a Sampler<'a>) -> Field<'a> {
        let slots = vec![NOT_ASKED; sampler.outcome.mesh.triangles.len()];
        Field { sampler, slots, cells: Vec::new() }
    }

    /// The disc of this centre, a point of the same body as `near`; `None` where the centre is in another one.
    pub fn disc(&mut self, rule: &Rule, near: usize, at: Point) -> Option<Disc> {
        let start = self.slot(near);
        let (center, _) = self.walk(start, at)?;
        let own = self.cells[start].body;
        if self.cells[center].body != own {
            return None;
        }
        let (mut sum, mut n, mut last) = (0.0, 0.0, center);
        for [dr, dz] in &rule.offsets {
            let at = Point { r: at.r + dr, z: at.z + dz };
            if at.r < 0.0 {
                continue;
            }
            // Neighbours on the ring are neighbours in the mesh: walk on from the last one.
            let Some((found, lambda)) = self.walk(last, at) else { continue };
            last = found;
            let cell = &self.cells[found];
            if cell.body == own {
                sum += cell.flux_density(&lambda);
                n += 1.0;
            }
        }
        let mean = if n == 0.0 { 0.0 } else { sum / n };
        Some(Disc { triangle: self.cells[center].triangle as usize, at, mean })
    }

    /// The cell of a point and its λ, by a walk from cell `start`; `None` where the mesh of the inside ends.
    #[inline(always)]
    fn walk(&mut self, start: usize, at: Point) -> Option<(usize, [f64; 3])> {
        let mut slot = start;
        for _ in 0..self.slots.len() {
            let cell = &self.cells[slot];
            let lambda = cell.barycentric(at);
            let (k, least) = lowest(&lambda);
            if SLACK <= least {
                return Some((slot, lambda));
            }
            match cell.neighbours[k] {
                NO_TRIANGLE => return None,
                next => slot = self.slot(next as usize),
            }
        }
        None
    }

    /// Place of triangle t in `cells`.
    #[inline]
    fn slot(&mut self, t: usize) -> usize {
        match self.slots[t] {
            NOT_ASKED => self.ask(t),
            slot => slot as usize,
        }
    }

    #[cold]
    fn ask(&mut self, t: usize) -> usize {
        self.slots[t] = self.cells.len() as u32;
        self.cells.push(Cell::new(self.sampler, t));
        self.cells.len() - 1
    }
}

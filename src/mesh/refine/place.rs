//! Where a new vertex may go: the way to it, the cavity that it would dig, and a second choice beside the cap's facets.

use super::super::MeshError;
use super::super::size::{self, Measures};
use super::{Bad, Border, Face, Refiner, point};
use crate::geometry::Point;
use spade::{Point2, Triangulation};

/// Places that are tried where a facet forbids the wanted one.
const N_STEPS_BESIDE_FACET: usize = 10;

impl Refiner<'_> {
    /// Looks for a place between a bad triangle's shortest edge and a wanted place that a facet forbids.
    ///
    /// The best place counts, and only if its smallest angle is better than the bad one's: so this ends.
    pub(super) fn improve_beside_facet(
        &mut self,
        bad: &Bad,
        corners: &[Point; 3],
        wanted: Point,
    ) -> Result<(), MeshError> {
        let k = Measures::of(corners).shortest();
        let (a, b) = (corners[k], corners[(k + 1) % 3]);
        let middle = Point { r: 0.5 * (a.r + b.r), z: 0.5 * (a.z + b.z) };
        let mut best = (1.05 * bad.key.min(size::ANGLE_MIN.sin()), None);
        for step in 2..N_STEPS_BESIDE_FACET {
            let t = step as f64 / N_STEPS_BESIDE_FACET as f64;
            let p = Point {
                r: middle.r + t * (wanted.r - middle.r),
                z: middle.z + t * (wanted.z - middle.z),
            };
            self.encroached.clear();
            if let Ok(face) = self.walk(bad.face, corners, p) {
                self.dig(face, p);
                let sine = self.star_sine(p);
                if self.encroached.is_empty() && sine > best.0 {
                    best = (sine, Some(p));
                }
            }
        }
        if let (_, Some(p)) = best {
            self.check_bounds(a, b, p)?;
            if let Some(vertex) = self.insert(p, bad.corners[0], None)? {
                self.queue_star(vertex);
            }
        }
        Ok(())
    }

    /// Sine of the smallest angle of the triangles that a new vertex would make of the cavity.
    fn star_sine(&self, p: Point) -> f64 {
        let mut smallest = f64::INFINITY;
        for &face in &self.cavity {
            for edge in self.kernel.face(face).adjacent_edges() {
                let beyond = edge.rev().face().as_inner();
                let is_rim = edge.is_constraint_edge()
                    || beyond.is_none_or(|f| !self.cavity.contains(&f.fix()));
                if is_rim {
                    let [a, b] = edge.vertices().map(|v| point(v.position()));
                    smallest = smallest.min(Measures::of(&[a, b, p]).sine_min());
                }
            }
        }
        smallest
    }

    /// Walks straight from a triangle's centroid to a point: the triangle that holds it, or the border in the way.
    pub(super) fn walk(
        &self,
        start: Face,
        corners: &[Point; 3],
        to: Point,
    ) -> Result<Face, Border> {
        let from = Point {
            r: (corners[0].r + corners[1].r + corners[2].r) / 3.0,
            z: (corners[0].z + corners[1].z + corners[2].z) / 3.0,
        };
        let side =
            |a: Point, b: Point, c: Point| (b.r - a.r) * (c.z - a.z) - (b.z - a.z) * (c.r - a.r);
        let mut face = self.kernel.face(start);
        let mut entered = None;
        for _ in 0..self.kernel.num_inner_faces() {
            let exit =
                face.adjacent_edges().into_iter().filter(|e| Some(e.fix()) != entered).find(|e| {
                    let [a, b] = e.vertices().map(|v| point(v.position()));
                    side(a, b, to) < 0.0 && side(from, to, a) <= 0.0 && side(from, to, b) >= 0.0
                });
            let Some(exit) = exit else { return Ok(face.fix()) };
            let beyond = exit.rev();
            match beyond.face().as_inner() {
                Some(next) if !exit.is_constraint_edge() => {
                    entered = Some(beyond.fix());
                    face = next;
                }
                _ => return Err(exit.vertices().map(|v| v.fix())),
            }
        }
        Ok(face.fix())
    }

    /// Collects the borders whose lens holds a point: they bound the cavity of triangles whose circumcircle holds it.
    pub(super) fn dig(&mut self, start: Face, p: Point) {
        self.cavity.clear();
        self.cavity.push(start);
        let mut next = 0;
        while next < self.cavity.len() {
            let face = self.kernel.face(self.cavity[next]);
            next += 1;
            for edge in face.adjacent_edges() {
                let [a, b] = edge.vertices();
                if edge.is_constraint_edge() {
                    let cosine = if self.is_facet([a.fix(), b.fix()]) {
                        size::COS_FACET_LENS
                    } else {
                        size::COS_LENS
                    };
                    if size::is_encroached(point(a.position()), point(b.position()), p, cosine) {
                        self.encroached.push([a.fix(), b.fix()]);
                    }
                    continue;
                }
                let Some(beyond) = edge.rev().face().as_inner() else { continue };
                if !self.cavity.contains(&beyond.fix()) && in_circle(&beyond.positions(), p) {
                    self.cavity.push(beyond.fix());
                }
            }
        }
    }
}

/// Whether a point lies inside the circumcircle of a counter-clockwise triangle.
fn in_circle(corners: &[Point2<f64>; 3], p: Point) -> bool {
    let [a, b, c] = corners.map(|q| (q.x - p.r, q.y - p.z));
    let lift = |q: (f64, f64)| q.0 * q.0 + q.1 * q.1;
    let minor = |u: (f64, f64), v: (f64, f64)| u.0 * v.1 - u.1 * v.0;
    lift(a) * minor(b, c) + lift(b) * minor(c, a) + lift(c) * minor(a, b) > 0.0
}

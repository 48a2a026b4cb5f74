//! Delaunay refinement of a drawing: borders and bad triangles get vertices until the angle limit holds.
//!
//! Ruppert's algorithm (Ruppert 1995, J. Algorithms 18) with lenses instead of circles, off-centres, and shells of
//! power-of-two radius round acute corners (so that two borders of an acute corner do not split each other for ever).
//! Facets of the cap are never split: a rounded midpoint would not lie on the hull.

mod place;

use super::MeshError;
use super::size::{self, Measures};
use crate::geometry::{Outline, Point};
use spade::handles::{FixedFaceHandle, FixedVertexHandle, InnerTag};
use spade::{
    ConstrainedDelaunayTriangulation, HasPosition, LastUsedVertexHintGenerator, Point2,
    Triangulation,
};
use std::collections::BinaryHeap;

/// A vertex of the kernel, in units of [`size::unit`].
#[derive(Clone, Copy)]
pub(super) struct Vertex {
    at: Point2<f64>,
}

impl HasPosition for Vertex {
    type Scalar = f64;
    fn position(&self) -> Point2<f64> {
        self.at
    }
}

/// Constrained Delaunay triangulation of the inside; constraint edges are the borders.
pub(super) type Kernel =
    ConstrainedDelaunayTriangulation<Vertex, (), (), (), LastUsedVertexHintGenerator>;

type Face = FixedFaceHandle<InnerTag>;

/// Kernel vertex → plain point.
pub(super) fn point(p: Point2<f64>) -> Point {
    Point { r: p.x, z: p.y }
}

/// The refined triangulation of an outline, which of its vertices are on no border, and the unit of its coordinates [m].
///
/// # Errors
/// When the kernel refuses the outline, or the section has details too fine for the vertex bound.
pub(super) fn refined(outline: &Outline) -> Result<(Kernel, Vec<bool>, f64), MeshError> {
    let unit = size::unit(&outline.cap);
    let kernel = drawn(outline, unit)?;
    let mut refiner = Refiner::new(outline, kernel, unit);
    refiner.run()?;
    let n = outline.points.len();
    let is_free =
        (0..refiner.on_segment.len()).map(|i| i >= n && refiner.on_segment[i].is_none()).collect();
    Ok((refiner.kernel, is_free, unit))
}

/// The outline's points and borders, nothing more.
///
/// One by one: the kernel's bulk loading keeps the vertices that it puts off in a hash set, so that its triangles come in
/// another order in every process.
fn drawn(outline: &Outline, unit: f64) -> Result<Kernel, MeshError> {
    let failed = |reason: String| MeshError::Kernel { reason };
    let mut kernel = Kernel::new();
    for (id, p) in outline.points.iter().enumerate() {
        let vertex = Vertex { at: Point2::new(p.r / unit, p.z / unit) };
        let handle = kernel.insert(vertex).map_err(|error| failed(error.to_string()))?;
        if handle.index() != id {
            return Err(failed(format!("points {} and {id} coincide", handle.index())));
        }
    }
    for &[a, b] in &outline.segments {
        let [from, to] = [a, b].map(|id| FixedVertexHandle::from_index(id as usize));
        kernel.try_add_constraint(from, to);
        if !kernel.exists_constraint(from, to) {
            return Err(failed(format!("the border from point {a} to point {b} crosses another")));
        }
    }
    Ok(kernel)
}

/// A triangle to be refined; the heap gives the worst first, the oldest of equals.
struct Bad {
    key: f64,
    order: u64,
    face: Face,
    corners: [FixedVertexHandle; 3],
}

impl Ord for Bad {
    fn cmp(&self, other: &Bad) -> std::cmp::Ordering {
        other.key.total_cmp(&self.key).then(other.order.cmp(&self.order))
    }
}
impl PartialOrd for Bad {
    fn partial_cmp(&self, other: &Bad) -> Option<std::cmp::Ordering> {
        Some(self.cmp(other))
    }
}
impl PartialEq for Bad {
    fn eq(&self, other: &Bad) -> bool {
        self.cmp(other).is_eq()
    }
}
impl Eq for Bad {}

type Border = [FixedVertexHandle; 2];

struct Refiner<'a> {
    outline: &'a Outline,
    kernel: Kernel,
    unit: f64,
    /// Longest and shortest edge, in the kernel's unit.
    edge_max: f64,
    edge_min: f64,
    /// Outline segment that a vertex was put on; `None` for outline points and inner vertices.
    on_segment: Vec<Option<u32>>,
    /// Outline points where two borders meet under less than 60°.
    acute: Vec<bool>,
    borders: Vec<Border>,
    bad: BinaryHeap<Bad>,
    n_queued: u64,
    /// Work space of one insertion.
    cavity: Vec<Face>,
    encroached: Vec<Border>,
}

impl<'a> Refiner<'a> {
    fn new(outline: &'a Outline, kernel: Kernel, unit: f64) -> Refiner<'a> {
        let radius = outline.cap.radius / unit;
        Refiner {
            outline,
            unit,
            edge_max: size::EDGE_MAX * radius,
            edge_min: size::EDGE_MIN * radius,
            on_segment: vec![None; kernel.num_vertices()],
            acute: acute_points(outline),
            kernel,
            borders: Vec::new(),
            bad: BinaryHeap::new(),
            n_queued: 0,
            cavity: Vec::new(),
            encroached: Vec::new(),
        }
    }

    /// Refines until a sweep over everything finds nothing more to do.
    ///
    /// Removing a border to split it may change triangles out of sight, hence the sweeps; each but the last adds a vertex,
    /// so their number is bounded with that of the vertices.
    fn run(&mut self) -> Result<(), MeshError> {
        loop {
            let n_before = self.kernel.num_vertices();
            self.queue_everything();
            self.drain()?;
            if self.kernel.num_vertices() == n_before {
                return Ok(());
            }
        }
    }

    fn queue_everything(&mut self) {
        let edges: Vec<Border> = self
            .kernel
            .undirected_edges()
            .filter(|e| e.is_constraint_edge())
            .map(|e| e.vertices().map(|v| v.fix()))
            .collect();
        self.borders.extend(edges.into_iter().rev());
        let faces: Vec<Face> = self.kernel.inner_faces().map(|f| f.fix()).collect();
        for face in faces {
            self.queue_if_bad(face);
        }
    }

    /// Borders first, then the worst triangle.
    fn drain(&mut self) -> Result<(), MeshError> {
        loop {
            while let Some(border) = self.borders.pop() {
                if self.border_is_encroached(border) {
                    self.split(border)?;
                }
            }
            let Some(bad) = self.bad.pop() else { return Ok(()) };
            if self.is_current(&bad) {
                self.improve(&bad)?;
            }
        }
    }

    fn at(&self, v: FixedVertexHandle) -> Point {
        point(self.kernel.vertex(v).position())
    }

    /// Whether a queued triangle is still there.
    fn is_current(&self, bad: &Bad) -> bool {
        bad.face.index() < self.kernel.num_all_faces()
            && self.kernel.face(bad.face).vertices().map(|v| v.fix()) == bad.corners
    }

    fn is_facet(&self, [a, b]: Border) -> bool {
        let first = self.outline.points.len() - self.outline.cap.n_facets - 1;
        let n = self.outline.points.len();
        let (a, b) = (a.index(), b.index());
        a >= first && b >= first && a < n && b < n && a.abs_diff(b) == 1
    }

    /// Whether the apex of a triangle on either side lies in the border's lens, or the border is longer than any edge may be.
    fn border_is_encroached(&self, border: Border) -> bool {
        let [a, b] = border;
        let Some(edge) = self.kernel.get_edge_from_neighbors(a, b) else { return false };
        if !edge.is_constraint_edge() || self.is_facet(border) {
            return false;
        }
        let (from, to) = (self.at(a), self.at(b));
        if (from.r - to.r).powi(2) + (from.z - to.z).powi(2) > self.edge_max * self.edge_max {
            return true;
        }
        let sees = |side: Option<Point2<f64>>| {
            side.is_some_and(|p| size::is_encroached(from, to, point(p), size::COS_LENS))
        };
        sees(edge.opposite_position()) || sees(edge.rev().opposite_position())
    }

    /// Outline segment of a border.
    fn segment_of(&self, [a, b]: Border) -> Option<u32> {
        let own = |v: FixedVertexHandle| self.on_segment[v.index()];
        own(a).or(own(b)).or_else(|| {
            let (a, b) = (a.index() as u32, b.index() as u32);
            let found = self.outline.segments.binary_search(&[a.min(b), a.max(b)]);
            found.ok().map(|i| i as u32)
        })
    }

    /// Splits a border in the middle, or on a shell of power-of-two radius round the acute corner that it ends in.
    fn split(&mut self, border: Border) -> Result<(), MeshError> {
        let [a, b] = border;
        if self.kernel.get_edge_from_neighbors(a, b).is_none_or(|e| !e.is_constraint_edge()) {
            return Ok(());
        }
        let segment = self.segment_of(border);
        let at = self.split_point(border);
        self.check_bounds(self.at(a), self.at(b), at)?;
        let (from, to) = (self.at(a), self.at(b));
        let is_exact = (from.r == to.r && at.r == from.r) || (from.z == to.z && at.z == from.z);
        if !is_exact {
            let edge = self.kernel.get_edge_from_neighbors(a, b).map(|e| e.fix().as_undirected());
            edge.map(|e| self.kernel.remove_constraint_edge(e));
        }
        let Some(middle) = self.insert(at, a, segment)? else {
            let reason = format!("two vertices coincide at {}", self.place(at));
            return Err(MeshError::Kernel { reason });
        };
        for end in [a, b] {
            if !self.kernel.exists_constraint(end, middle)
                && self.kernel.try_add_constraint(end, middle).is_empty()
            {
                let reason = format!("a border near {} could not be split", self.place(at));
                return Err(MeshError::Kernel { reason });
            }
        }
        self.queue_star(middle);
        Ok(())
    }

    fn split_point(&self, [a, b]: Border) -> Point {
        let is_acute = |v: FixedVertexHandle| self.acute.get(v.index()).copied().unwrap_or(false);
        let (from, to) = match (is_acute(a), is_acute(b)) {
            (true, false) => (self.at(a), self.at(b)),
            (false, true) => (self.at(b), self.at(a)),
            _ => {
                return Point {
                    r: 0.5 * (self.at(a).r + self.at(b).r),
                    z: 0.5 * (self.at(a).z + self.at(b).z),
                };
            }
        };
        let (dr, dz) = (to.r - from.r, to.z - from.z);
        let length = (dr * dr + dz * dz).sqrt();
        // The power of two in (1/3, 2/3] of the length.
        let t = (length * 2.0 / 3.0).log2().floor().exp2() / length;
        Point { r: from.r + t * dr, z: from.z + t * dz }
    }

    /// Whether the next vertex is still within the bounds of number and size.
    fn check_bounds(&self, a: Point, b: Point, at: Point) -> Result<(), MeshError> {
        let length = (a.r - b.r).abs().max((a.z - b.z).abs());
        if length < self.edge_min || self.kernel.num_vertices() >= size::N_VERTICES_MAX {
            return Err(self.too_fine(at, length));
        }
        Ok(())
    }

    /// The error of a detail too fine, at the shortest border of all: what is being split when the bound is met may be far away.
    fn too_fine(&self, at: Point, length: f64) -> MeshError {
        let shortest = self
            .kernel
            .undirected_edges()
            .filter(|edge| edge.is_constraint_edge())
            .map(|edge| {
                let [a, b] = edge.positions().map(point);
                let middle = Point { r: 0.5 * (a.r + b.r), z: 0.5 * (a.z + b.z) };
                ((a.r - b.r).hypot(a.z - b.z), middle)
            })
            .fold((length, at), |best, next| if next.0 < best.0 { next } else { best });
        let (edge, at) = shortest;
        let (r, z) = (at.r * self.unit, at.z * self.unit);
        let step = edge * self.unit;
        let mut names: Vec<&str> = Vec::new();
        for (dr, dz) in [(1.0, 1.0), (-1.0, 1.0), (-1.0, -1.0), (1.0, -1.0)] {
            let near = Point { r: (r + dr * step).abs(), z: z + dz * step };
            let name = &self.outline.regions[self.outline.region_at(near).0 as usize].name;
            if !names.contains(&name.as_str()) {
                names.push(name);
            }
        }
        MeshError::TooFine {
            n_vertices: self.kernel.num_vertices(),
            r_mm: six_digits(r * 1e3),
            z_mm: six_digits(z * 1e3),
            edge_mm: step * 1e3,
            about: names.join(", "),
        }
    }

    fn place(&self, at: Point) -> String {
        format!("r = {:.6} mm, z = {:.6} mm", at.r * self.unit * 1e3, at.z * self.unit * 1e3)
    }

    /// A new vertex, or `None` where there is one already.
    fn insert(
        &mut self,
        at: Point,
        hint: FixedVertexHandle,
        segment: Option<u32>,
    ) -> Result<Option<FixedVertexHandle>, MeshError> {
        let vertex = Vertex { at: Point2::new(at.r, at.z) };
        let n_before = self.kernel.num_vertices();
        let handle = self
            .kernel
            .insert_with_hint(vertex, hint)
            .map_err(|error| MeshError::Kernel { reason: error.to_string() })?;
        if self.kernel.num_vertices() == n_before {
            return Ok(None);
        }
        self.on_segment.push(segment);
        Ok(Some(handle))
    }

    /// Queues the borders and bad triangles round a new vertex.
    fn queue_star(&mut self, center: FixedVertexHandle) {
        let mut faces = std::mem::take(&mut self.cavity);
        faces.clear();
        for spoke in self.kernel.vertex(center).out_edges() {
            let face = spoke.face().as_inner().map(|f| f.fix());
            faces.extend(face);
            let rim = face.map(|_| spoke.next());
            for edge in [Some(spoke), rim].into_iter().flatten() {
                if edge.is_constraint_edge() {
                    self.borders.push(edge.vertices().map(|v| v.fix()));
                }
            }
        }
        for &face in &faces {
            self.queue_if_bad(face);
        }
        self.cavity = faces;
    }

    fn queue_if_bad(&mut self, face: Face) {
        let corners = self.kernel.face(face).vertices().map(|v| v.fix());
        let measures = Measures::of(&corners.map(|v| self.at(v)));
        if let Some(key) = self.badness(&corners, &measures) {
            self.n_queued += 1;
            self.bad.push(Bad { key, order: self.n_queued, face, corners });
        }
    }

    /// Sine of the smallest angle if it is too small, else 1 + how much of the longest edge is allowed if it is too long.
    fn badness(&self, corners: &[FixedVertexHandle; 3], m: &Measures) -> Option<f64> {
        let sine = m.sine_min();
        if sine < size::ANGLE_MIN.sin() && !self.angle_is_given(corners, m.shortest()) {
            return Some(sine);
        }
        let longest = m.longest();
        (longest > self.edge_max).then(|| 1.0 + self.edge_max / longest)
    }

    /// Whether the outline itself has that angle: both long sides are borders, or the short side joins two shells' ends.
    fn angle_is_given(&self, corners: &[FixedVertexHandle; 3], shortest: usize) -> bool {
        let [a, b, apex] = [0, 1, 2].map(|k| corners[(shortest + k) % 3]);
        if self.kernel.exists_constraint(a, apex) && self.kernel.exists_constraint(b, apex) {
            return true;
        }
        let (Some(s), Some(t)) = (self.on_segment[a.index()], self.on_segment[b.index()]) else {
            return false;
        };
        let (s, t) = (self.outline.segments[s as usize], self.outline.segments[t as usize]);
        let Some(&common) = s.iter().find(|&&id| t.contains(&id) && s != t) else { return false };
        let center = self.at(FixedVertexHandle::from_index(common as usize));
        let away = |v: FixedVertexHandle| {
            let p = self.at(v);
            (p.r - center.r).powi(2) + (p.z - center.z).powi(2)
        };
        self.acute[common as usize] && (away(a) - away(b)).abs() <= 1e-6 * away(a)
    }

    /// Puts a vertex where a bad triangle wants it, or splits the borders that are in the way.
    fn improve(&mut self, bad: &Bad) -> Result<(), MeshError> {
        let corners = bad.corners.map(|v| self.at(v));
        let measures = Measures::of(&corners);
        let wanted = size::wanted_point(&corners, &measures, bad.key < 1.0);
        self.encroached.clear();
        match self.walk(bad.face, &corners, wanted) {
            Ok(face) => self.dig(face, wanted),
            Err(border) => self.encroached.push(border),
        }
        if self.encroached.is_empty() {
            self.check_bounds(corners[0], corners[1], wanted)?;
            if let Some(vertex) = self.insert(wanted, bad.corners[0], None)? {
                self.queue_star(vertex);
            }
            return Ok(());
        }
        let encroached = std::mem::take(&mut self.encroached);
        let mut has_split = false;
        for &border in
            encroached.iter().filter(|&&border| !self.is_facet(border)).collect::<Vec<_>>()
        {
            self.split(border)?;
            has_split = true;
        }
        self.encroached = encroached;
        if !has_split {
            return self.improve_beside_facet(bad, &corners, wanted);
        }
        if self.is_current(bad) {
            self.queue_if_bad(bad.face);
        }
        Ok(())
    }
}

/// A number rounded to six significant digits, for a message.
fn six_digits(value: f64) -> f64 {
    format!("{value:.5e}").parse().unwrap_or(value)
}

/// Points of an outline where two borders meet under less than 60°.
fn acute_points(outline: &Outline) -> Vec<bool> {
    let mut spokes: Vec<Vec<f64>> = vec![Vec::new(); outline.points.len()];
    for &[a, b] in &outline.segments {
        let (p, q) = (outline.points[a as usize], outline.points[b as usize]);
        spokes[a as usize].push((q.z - p.z).atan2(q.r - p.r));
        spokes[b as usize].push((p.z - q.z).atan2(p.r - q.r));
    }
    // Slightly below 60°: equilateral corners cannot split each other.
    let limit = 59.9 / 180.0 * std::f64::consts::PI;
    let is_acute = |angles: &mut Vec<f64>| {
        angles.sort_by(f64::total_cmp);
        let n = angles.len();
        (0..n).any(|i| {
            let turn = if i + 1 < n { 0.0 } else { 2.0 * std::f64::consts::PI };
            n > 1 && angles[(i + 1) % n] + turn - angles[i] < limit
        })
    };
    spokes.iter_mut().map(is_acute).collect()
}

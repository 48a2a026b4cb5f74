//! Edges of a triangle list, refinement edges, and the checks that a mesh is one.

use super::{Chart, Mesh};
use crate::geometry::{Point, area};

/// Squared length and ends of an edge: a strict order, the same from both sides.
fn edge_order(points: &[Point], a: u32, b: u32) -> (f64, [u32; 2]) {
    let (low, high) = (a.min(b), a.max(b));
    let (p, q) = (points[low as usize], points[high as usize]);
    ((p.r - q.r).powi(2) + (p.z - q.z).powi(2), [low, high])
}

/// Rotates a triangle so that its first edge is its longest; ties go to the edge with the higher ends.
///
/// The order of edges is strict over the whole mesh, so a chain of refinement edges never runs in a circle.
pub(super) fn longest_edge_first(points: &[Point], triangle: &mut [u32; 3]) {
    let order = |k: usize| edge_order(points, triangle[k], triangle[(k + 1) % 3]);
    let longer = |x: usize, y: usize| {
        let ((a, ends_a), (b, ends_b)) = (order(x), order(y));
        a.total_cmp(&b).then(ends_a.cmp(&ends_b)).is_gt()
    };
    let longest = (1..3).fold(0, |best, k| if longer(k, best) { k } else { best });
    triangle.rotate_left(longest);
}

/// Distinct edges (ends ascending, in the order of their first triangle) and each triangle's three.
pub(super) fn edges_of(
    n_vertices: usize,
    triangles: &[[u32; 3]],
) -> (Vec<[u32; 2]>, Vec<[u32; 3]>) {
    // Edges by their lower end: a few each.
    let mut known: Vec<Vec<(u32, u32)>> = vec![Vec::new(); n_vertices];
    let mut edges = Vec::new();
    let mut numbered = |a: u32, b: u32| {
        let (low, high) = (a.min(b), a.max(b));
        let of_low = &mut known[low as usize];
        if let Some(&(_, edge)) = of_low.iter().find(|&&(other, _)| other == high) {
            return edge;
        }
        let edge = edges.len() as u32;
        of_low.push((high, edge));
        edges.push([low, high]);
        edge
    };
    let triangle_edges =
        triangles.iter().map(|t| [0, 1, 2].map(|k| numbered(t[k], t[(k + 1) % 3]))).collect();
    (edges, triangle_edges)
}

impl Mesh {
    /// Number of vertices, infinity included.
    pub fn n_vertices(&self) -> usize {
        self.points.len()
    }

    /// Number of triangles, those of the cap included.
    pub fn n_triangles(&self) -> usize {
        self.triangles.len()
    }

    /// Corners of a triangle in its own chart [m].
    pub fn corners(&self, triangle: usize) -> [Point; 3] {
        self.triangles[triangle].map(|id| self.points[id as usize])
    }

    /// Smallest angle of all inside triangles [rad].
    pub fn min_angle(&self) -> f64 {
        let inside = (0..self.n_triangles()).filter(|&t| self.charts[t] == Chart::Inside);
        inside.map(|t| smallest_angle(&self.corners(t))).fold(f64::INFINITY, f64::min)
    }

    /// Checks that the triangles make one disc: areas, orientation, edges, Euler's number, the axis as its border.
    ///
    /// # Panics
    /// On the first violation, with the triangle or edge; it is always our bug.
    pub fn validate(&self) {
        let (n, n_triangles) = (self.n_vertices(), self.n_triangles());
        assert_eq!(self.on_axis.len(), n);
        assert_eq!(self.parents.len(), n);
        assert_eq!(
            [self.triangle_edges.len(), self.regions.len(), self.charts.len()],
            [n_triangles; 3]
        );
        assert_eq!(self.level_sizes.last(), Some(&n));
        for (point, &on_axis) in self.points.iter().zip(&self.on_axis) {
            assert!(
                point.r >= 0.0 && (point.r == 0.0) == on_axis,
                "{point:?} is {on_axis} on the axis"
            );
        }
        let uses = self.edge_uses();
        let mut n_border = 0;
        for (edge, &[forward, backward]) in uses.iter().enumerate() {
            assert!(
                forward <= 1 && backward <= 1,
                "edge {edge} is used {forward} + {backward} times"
            );
            assert!(forward + backward > 0, "edge {edge} belongs to no triangle");
            if forward + backward == 1 {
                n_border += 1;
                let ends = self.edges[edge];
                assert!(
                    ends.iter().all(|&id| self.on_axis[id as usize]),
                    "open edge {edge} off the axis: {ends:?}"
                );
            }
        }
        let n_axis = self.on_axis.iter().filter(|&&on_axis| on_axis).count();
        assert_eq!(n_border, n_axis, "the axis is not one closed line through infinity");
        assert_eq!(n + n_triangles, self.edges.len() + 1, "Euler's number of a disc is 1");
    }

    /// How often each edge is run along from its lower and from its higher end; checks the triangles on the way.
    fn edge_uses(&self) -> Vec<[u32; 2]> {
        let mut uses = vec![[0, 0]; self.edges.len()];
        for (t, triangle) in self.triangles.iter().enumerate() {
            let size = area(&self.corners(t));
            match self.charts[t] {
                Chart::Inside => assert!(size > 0.0, "triangle {t} has area {size}"),
                Chart::Cap(k) => {
                    assert!(
                        size < 0.0 && (k as usize) < self.cap.n_facets,
                        "cap triangle {t} has area {size}"
                    );
                    assert_eq!(self.regions[t].0, 0, "cap triangle {t} is not outside");
                }
            }
            for k in 0..3 {
                let edge = self.triangle_edges[t][k] as usize;
                let (a, b) = (triangle[k], triangle[(k + 1) % 3]);
                // Bisection keeps no order of the two ends.
                let [c, d] = self.edges[edge];
                let ends = [c.min(d), c.max(d)];
                assert_eq!(ends, [a.min(b), a.max(b)], "edge {k} of triangle {t}");
                uses[edge][usize::from(a > b)] += 1;
            }
        }
        uses
    }
}

/// Smallest angle of a triangle [rad].
pub(super) fn smallest_angle(c: &[Point; 3]) -> f64 {
    let angle = |k: usize| {
        let (a, b, o) = (c[(k + 1) % 3], c[(k + 2) % 3], c[k]);
        let dot = (a.r - o.r) * (b.r - o.r) + (a.z - o.z) * (b.z - o.z);
        (2.0 * area(&[o, a, b]).abs()).atan2(dot)
    };
    (0..3).map(angle).fold(f64::INFINITY, f64::min)
}

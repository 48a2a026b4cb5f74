//! Field values at points: B from ψ in either chart, and a walk that finds the triangle of a point.

use super::element::{Frame, Gauge, Pair, blend, dot, wedge};
use crate::mesh::fans::NO_TRIANGLE;
use crate::mesh::{Chart, Mesh};
use crate::model::Point;
use crate::units::{Tesla, WeberPerRadian};
use std::f64::consts::PI;

/// How far a point on the axis is moved into its triangle (barycentric): B is a limit there, and this changes it by
/// about the same share of the field's variation over the triangle.
const AXIS_NUDGE: f64 = 1e-9;

/// One triangle with its field, ready to be asked at many points: λ and ∇ψ are linear on it.
#[derive(Debug, Clone, Copy)]
pub struct LocalField {
    pub frame: Frame,
    /// ∇λ_1 and ∇λ_2 in the triangle's chart [1/m].
    slopes: [Pair; 2],
    /// ∇ψ at the corners, in the triangle's chart [Wb/(rad·m)].
    gradient: [Pair; 3],
}

impl LocalField {
    /// From a triangle's geometry and the reference gradients of ψ at its corners.
    pub fn new(frame: Frame, gradients: &[Pair; 3]) -> LocalField {
        let slopes = [[1.0, 0.0], [0.0, 1.0]].map(|u| frame.chart_gradient(u));
        let gradient = gradients.map(|u| [0, 1].map(|i| u[0] * slopes[0][i] + u[1] * slopes[1][i]));
        LocalField { frame, slopes, gradient }
    }

    /// Barycentric coordinates of a point of the triangle's chart.
    #[inline]
    pub fn barycentric(&self, at: Point) -> [f64; 3] {
        let corner = self.frame.corners[0];
        let [l1, l2] = self.slopes.map(|slope| dot(slope, [at.r - corner.r, at.z - corner.z]));
        [1.0 - l1 - l2, l1, l2]
    }

    /// [B_r, B_z] at a barycentric point.
    ///
    /// B_r = −(1/r)∂ψ/∂z, B_z = (1/r)∂ψ/∂r; in the cap ∇_x = g²Mᵀ∇_y and r_x = r_y/g².
    pub fn components(&self, lambda: &[f64; 3]) -> [Tesla; 2] {
        let (point, d) = self.off_axis(lambda);
        match self.frame.gauge {
            None => [-d[1] / point.r, d[0] / point.r],
            Some(gauge) => {
                let (g, y) = gauge.at(point);
                let m = gauge.fold(g, y);
                // g² from the gradient, g² from 1/r_x.
                let f = g.powi(4) / point.r;
                let x =
                    [f * (m[0][0] * d[0] + m[1][0] * d[1]), f * (m[0][1] * d[0] + m[1][1] * d[1])];
                [-x[1], x[0]]
            }
        }
    }

    /// |B| at a barycentric point.
    #[inline]
    pub fn magnitude(&self, lambda: &[f64; 3]) -> Tesla {
        let b = self.components(lambda);
        dot(b, b).sqrt()
    }

    /// Position and ∇ψ at a barycentric point, or a little beside it where it lies on the axis.
    #[inline]
    fn off_axis(&self, lambda: &[f64; 3]) -> (Point, Pair) {
        let mut lambda = *lambda;
        let mut point = self.frame.position(&lambda);
        if point.r <= 0.0 {
            lambda = lambda.map(|l| l * (1.0 - AXIS_NUDGE) + AXIS_NUDGE / 3.0);
            point = self.frame.position(&lambda);
        }
        (point, blend(&lambda, &self.gradient))
    }
}

/// ψ at a barycentric point from corner values and bubble coefficients.
pub fn psi(vertex: [f64; 3], edge: [f64; 3], l: &[f64; 3]) -> WeberPerRadian {
    l[0] * vertex[0]
        + l[1] * vertex[1]
        + l[2] * vertex[2]
        + 4.0 * (edge[0] * l[0] * l[1] + edge[1] * l[1] * l[2] + edge[2] * l[2] * l[0])
}

/// The chart a real point lies in, and its coordinates there.
pub fn to_chart(mesh: &Mesh, at: Point) -> (Chart, Point) {
    let facet = facet_of(mesh, at);
    let (g, y) = Gauge::of_facet(&mesh.cap, facet).at(at);
    if g <= 1.0 {
        return (Chart::Inside, at);
    }
    (Chart::Cap(facet as u8), Point { r: y[0] / (g * g), z: mesh.cap.center_z + y[1] / (g * g) })
}

/// Facet of the cap polygon in whose sector a point lies.
fn facet_of(mesh: &Mesh, at: Point) -> usize {
    let angle = (at.z - mesh.cap.center_z).atan2(at.r) + 0.5 * PI;
    ((angle / PI * mesh.cap.n_facets as f64) as usize).min(mesh.cap.n_facets - 1)
}

/// Barycentric coordinates of a point of the triangle's chart.
#[inline]
pub fn barycentric(mesh: &Mesh, t: usize, at: Point) -> [f64; 3] {
    let spoke = |v: u32| {
        let corner = mesh.points[v as usize];
        [corner.r - at.r, corner.z - at.z]
    };
    let [a, b, c] = mesh.triangles[t].map(spoke);
    let parts = [wedge(b, c), wedge(c, a), wedge(a, b)];
    let whole = parts[0] + parts[1] + parts[2];
    parts.map(|p| p / whole)
}

/// Local corner with the smallest barycentric coordinate.
#[inline]
fn lowest(lambda: &[f64; 3]) -> usize {
    let k = usize::from(lambda[1] < lambda[0]);
    if lambda[2] < lambda[k] { 2 } else { k }
}

/// Walks from triangle `start` towards a point of that triangle's chart; returns its triangle and barycentric coordinates.
///
/// `None` when the walk leaves the chart. Bounded by the number of triangles; a point on an edge belongs to the triangle
/// reached first.
pub fn locate(
    mesh: &Mesh,
    edge_triangles: &[[u32; 2]],
    start: usize,
    at: Point,
) -> Option<(usize, [f64; 3])> {
    walk(mesh, edge_triangles, start, |t| barycentric(mesh, t, at))
}

/// [`locate`] with the point's barycentric coordinates in triangle t from `lambda`.
#[inline]
pub fn walk(
    mesh: &Mesh,
    edge_triangles: &[[u32; 2]],
    start: usize,
    mut lambda: impl FnMut(usize) -> [f64; 3],
) -> Option<(usize, [f64; 3])> {
    /// Points this little outside (barycentric) count as inside: rounding of the coordinates.
    const SLACK: f64 = -1e-11;
    let chart = mesh.charts[start];
    let mut t = start;
    for _ in 0..mesh.triangles.len() {
        let lambda = lambda(t);
        let k = lowest(&lambda);
        if SLACK <= lambda[k] {
            return Some((t, lambda.map(|l| l.max(0.0))));
        }
        // The edge opposite corner k is local edge k + 1.
        let pair = edge_triangles[mesh.triangle_edges[t][(k + 1) % 3] as usize];
        let next = if pair[0] as usize == t { pair[1] } else { pair[0] };
        if next == NO_TRIANGLE || mesh.charts[next as usize] != chart {
            return None;
        }
        t = next as usize;
    }
    None
}

/// Finds a chart point anywhere: by walking, and by search where the walk fails.
pub fn find(
    mesh: &Mesh,
    edge_triangles: &[[u32; 2]],
    chart: Chart,
    at: Point,
) -> Option<(usize, [f64; 3])> {
    let start = mesh.charts.iter().position(|&c| c == chart)?;
    locate(mesh, edge_triangles, start, at).or_else(|| {
        let in_chart = |t: &usize| mesh.charts[*t] == chart;
        let depth = |t: usize| barycentric(mesh, t, at).into_iter().fold(f64::INFINITY, f64::min);
        let best = (0..mesh.triangles.len())
            .filter(in_chart)
            .max_by(|&a, &b| depth(a).total_cmp(&depth(b)))?;
        // On the polygon itself a point can miss both charts by rounding; farther off it is not in this chart.
        let lambda = barycentric(mesh, best, at);
        (-1e-6 < depth(best)).then(|| (best, lambda.map(|l| l.max(0.0))))
    })
}

/// Physical position of a chart point [m]; infinity itself has none.
pub fn to_space(mesh: &Mesh, chart: Chart, at: Point) -> Point {
    match chart {
        Chart::Inside => at,
        Chart::Cap(facet) => {
            let gauge = Gauge::of_facet(&mesh.cap, facet as usize);
            let (g, y) = gauge.at(at);
            debug_assert!(0.0 < dot(gauge.normal, y));
            Point { r: y[0] / (g * g), z: gauge.center_z + y[1] / (g * g) }
        }
    }
}

//! Field values at points: B from ψ in either chart, and a walk that finds the triangle of a point.

use super::element::{Frame, Gauge, Pair, blend, dot, wedge};
use crate::mesh::fans::{NO_TRIANGLE, beside};
use crate::mesh::{Chart, Mesh};
use crate::model::Point;
use crate::units::{Tesla, WeberPerRadian};
use std::f64::consts::PI;

/// How far a point on the axis is moved into its triangle (barycentric): B is a limit there, and this changes it by
/// about the same share of the field's variation over the triangle.
const AXIS_NUDGE: f64 = 1e-9;

/// `lambda` moved off the axis by `AXIS_NUDGE`.
#[inline]
pub fn off_axis(lambda: &[f64; 3]) -> [f64; 3] {
    lambda.map(|l| l * (1.0 - AXIS_NUDGE) + AXIS_NUDGE / 3.0)
}

/// The field on one triangle, ready to be asked at many points: ∇ψ is linear there.
#[derive(Debug, Clone, Copy)]
pub struct LocalField {
    pub frame: Frame,
    /// ∇ψ at the corners, in the triangle's chart [Wb/(rad·m)].
    pub gradient: [Pair; 3],
}

impl LocalField {
    /// From a triangle's geometry and the reference gradients of ψ at its corners.
    pub fn new(frame: Frame, gradients: &[Pair; 3]) -> LocalField {
        LocalField { frame, gradient: gradients.map(|u| frame.chart_gradient(u)) }
    }

    /// [B_r, B_z] at a barycentric point.
    ///
    /// B_r = −(1/r)∂ψ/∂z, B_z = (1/r)∂ψ/∂r; in the cap ∇_x = g²Mᵀ∇_y and r_x = r_y/g².
    pub fn components(&self, lambda: &[f64; 3]) -> [Tesla; 2] {
        let mut lambda = *lambda;
        if self.frame.position(&lambda).r <= 0.0 {
            lambda = off_axis(&lambda);
        }
        let (point, d) = (self.frame.position(&lambda), blend(&lambda, &self.gradient));
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

/// Points this little outside (barycentric) count as inside: rounding of the coordinates.
pub const SLACK: f64 = -1e-11;

/// Local corner with the smallest barycentric coordinate, and that: the edge opposite to it is where a walk goes on.
#[inline]
pub fn lowest(lambda: &[f64; 3]) -> (usize, f64) {
    let (k, least) = if lambda[1] < lambda[0] { (1, lambda[1]) } else { (0, lambda[0]) };
    if lambda[2] < least { (2, lambda[2]) } else { (k, least) }
}

/// The triangle across the edge opposite to corner k of triangle t; `None` where the chart ends.
#[inline]
pub fn across(mesh: &Mesh, edge_triangles: &[[u32; 2]], t: usize, k: usize) -> Option<usize> {
    // The edge opposite corner k is local edge k + 1.
    let pair = edge_triangles[mesh.triangle_edges[t][(k + 1) % 3] as usize];
    let next = beside(pair, t as u32);
    let is_in_chart = next != NO_TRIANGLE && mesh.charts[next as usize] == mesh.charts[t];
    is_in_chart.then_some(next as usize)
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
    let mut t = start;
    for _ in 0..mesh.triangles.len() {
        let lambda = barycentric(mesh, t, at);
        let (k, least) = lowest(&lambda);
        if SLACK <= least {
            return Some((t, lambda.map(|l| l.max(0.0))));
        }
        t = across(mesh, edge_triangles, t, k)?;
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

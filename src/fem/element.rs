//! One quadratic triangle in its reference coordinates: gradients, metric and the coefficient K̂.
//!
//! Reference corners (0,0), (1,0), (0,1); λ0 = 1 − ξ − η, λ1 = ξ, λ2 = η. Everything is pulled back, so tiny
//! triangles lose no digits and both charts (inside, mapped exterior) look the same to the rest of the code.

use crate::mesh::{Cap, Chart, Mesh};
use crate::model::Point;
use crate::units::{Meter, MeterPerHenry};
use std::f64::consts::PI;

/// Symmetric 2 × 2 tensor [xx, xy, yy].
pub type Tensor = [f64; 3];
/// Reference vector or covector.
pub type Pair = [f64; 2];

/// Reference gradients of λ0, λ1, λ2.
pub const GRADIENT: [Pair; 3] = [[-1.0, -1.0], [1.0, 0.0], [0.0, 1.0]];
/// Reference positions of the three vertices.
pub const POSITION: [Pair; 3] = [[0.0, 0.0], [1.0, 0.0], [0.0, 1.0]];

/// a·T·b.
#[inline]
pub fn contract(a: Pair, t: Tensor, b: Pair) -> f64 {
    a[0] * (t[0] * b[0] + t[1] * b[1]) + a[1] * (t[1] * b[0] + t[2] * b[1])
}

/// T·b.
#[inline]
pub fn apply(t: Tensor, b: Pair) -> Pair {
    [t[0] * b[0] + t[1] * b[1], t[1] * b[0] + t[2] * b[1]]
}

/// a·b.
#[inline]
pub fn dot(a: Pair, b: Pair) -> f64 {
    a[0] * b[0] + a[1] * b[1]
}

/// det[a, b] = a∧b.
#[inline]
pub fn wedge(a: Pair, b: Pair) -> f64 {
    a[0] * b[1] - a[1] * b[0]
}

/// Σ λ_n v_n.
#[inline]
pub fn blend(lambda: &[f64; 3], v: &[Pair; 3]) -> Pair {
    [
        lambda[0] * v[0][0] + lambda[1] * v[1][0] + lambda[2] * v[2][0],
        lambda[0] * v[0][1] + lambda[1] * v[1][1] + lambda[2] * v[2][1],
    ]
}

/// Geometry of one triangle.
#[derive(Debug, Clone, Copy)]
pub struct Frame {
    pub corners: [Point; 3],
    /// |det J| = twice the area in the triangle's chart [m²].
    pub det_abs: f64,
    /// S = |det J| J⁻¹J⁻ᵀ, dimensionless, det S = 1 (inside chart).
    pub metric: Tensor,
    /// Gauge of the cap sector; `None` inside.
    pub gauge: Option<Gauge>,
    /// Bit k set: corner k lies on the axis.
    pub axis: u8,
    /// Local vertex into which quadrature is collapsed: infinity, else an axis vertex.
    pub collapse: Option<usize>,
}

/// Gauge g(y) = n·(y − centre) of a sector of the cap: 1 on the facet, 0 at infinity's image.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Gauge {
    pub normal: Pair,
    pub center_z: Meter,
}

impl Gauge {
    /// Gauge of facet `facet` of the cap polygon.
    pub fn of_facet(cap: &Cap, facet: usize) -> Gauge {
        let step = PI / cap.n_facets as f64;
        let angle = -0.5 * PI + (facet as f64 + 0.5) * step;
        let inradius = cap.radius * (0.5 * step).cos();
        Gauge { normal: [angle.cos() / inradius, angle.sin() / inradius], center_z: cap.center_z }
    }

    /// g and y relative to the centre.
    #[inline]
    pub fn at(&self, point: Point) -> (f64, Pair) {
        let y = [point.r, point.z - self.center_z];
        (dot(self.normal, y), y)
    }

    /// M = I − 2 y nᵀ/g, row by row.
    #[inline]
    pub fn fold(&self, g: f64, y: Pair) -> [Pair; 2] {
        let n = self.normal;
        let f = 2.0 / g;
        [[1.0 - f * y[0] * n[0], -f * y[0] * n[1]], [-f * y[1] * n[0], 1.0 - f * y[1] * n[1]]]
    }
}

impl Frame {
    /// Geometry of triangle `t`. Panics on a degenerate triangle: the mesher never makes one.
    pub fn new(mesh: &Mesh, t: usize) -> Frame {
        let vertices = mesh.triangles[t].map(|v| v as usize);
        let corners = vertices.map(|v| mesh.points[v]);
        let gauge = match mesh.charts[t] {
            Chart::Inside => None,
            Chart::Cap(facet) => Some(Gauge::of_facet(&mesh.cap, facet as usize)),
        };
        let axis = vertices.map(|v| mesh.on_axis[v]);
        let axis_bits =
            axis.iter().enumerate().fold(0, |bits, (k, &on)| bits | (u8::from(on) << k));
        let at_infinity =
            |k: &usize| gauge.is_some() && corners[*k] == Point { r: 0.0, z: mesh.cap.center_z };
        let collapse = (0..3).find(at_infinity).or_else(|| (0..3).find(|&k| axis[k]));

        let (e1, e2) = sides(&corners);
        let det_abs = wedge(e1, e2).abs();
        assert!(0.0 < det_abs, "degenerate triangle {t}: {corners:?}");
        let metric = [dot(e2, e2) / det_abs, -dot(e1, e2) / det_abs, dot(e1, e1) / det_abs];
        Frame { corners, det_abs, metric, gauge, axis: axis_bits, collapse }
    }

    /// Is local vertex k on the axis?
    #[inline]
    pub fn on_axis(&self, k: usize) -> bool {
        self.axis >> k & 1 == 1
    }

    /// Has the triangle an edge on the axis?
    #[inline]
    pub fn has_axis_edge(&self) -> bool {
        self.axis.count_ones() == 2
    }

    /// Position in the triangle's chart [m].
    #[inline]
    pub fn position(&self, lambda: &[f64; 3]) -> Point {
        let c = &self.corners;
        Point {
            r: lambda[0] * c[0].r + lambda[1] * c[1].r + lambda[2] * c[2].r,
            z: lambda[0] * c[0].z + lambda[1] * c[1].z + lambda[2] * c[2].z,
        }
    }

    /// κ and S of K̂ = κ·S at a point: κ = ν/r inside, g²·ν0/r_y in the cap (eq. 6).
    #[inline]
    pub fn coefficient(&self, lambda: &[f64; 3], reluctivity: MeterPerHenry) -> (f64, Tensor) {
        match self.gauge {
            None => (reluctivity / self.position(lambda).r, self.metric),
            Some(gauge) => {
                let point = self.position(lambda);
                let (g, y) = gauge.at(point);
                (g * g * reluctivity / point.r, self.folded_metric(gauge.fold(g, y)))
            }
        }
    }

    /// |det J| J⁻¹ M Mᵀ J⁻ᵀ.
    fn folded_metric(&self, m: [Pair; 2]) -> Tensor {
        let (e1, e2) = sides(&self.corners);
        // Rows of adj J = ±|det J|·J⁻¹; the sign squares away.
        let rows = [[e2[1], -e2[0]], [-e1[1], e1[0]]];
        let p = rows.map(|a| [a[0] * m[0][0] + a[1] * m[1][0], a[0] * m[0][1] + a[1] * m[1][1]]);
        [
            dot(p[0], p[0]) / self.det_abs,
            dot(p[0], p[1]) / self.det_abs,
            dot(p[1], p[1]) / self.det_abs,
        ]
    }

    /// Physical gradient [∂/∂r, ∂/∂z] in the triangle's chart of a function with reference gradient `u`: J⁻ᵀu.
    pub fn chart_gradient(&self, u: Pair) -> Pair {
        let (e1, e2) = sides(&self.corners);
        let det = wedge(e1, e2);
        [(e2[1] * u[0] - e1[1] * u[1]) / det, (-e2[0] * u[0] + e1[0] * u[1]) / det]
    }
}

/// The columns of J: the sides from corner 0 to corners 1 and 2 [m].
#[inline]
pub fn sides(c: &[Point; 3]) -> (Pair, Pair) {
    ([c[1].r - c[0].r, c[1].z - c[0].z], [c[2].r - c[0].r, c[2].z - c[0].z])
}

/// Reference gradients uⁿ of ψ at the three vertices: dψ = Σ λ_n uⁿ.
///
/// - `vertex`: ψ at the corners, `edge`: coefficients of 4λ0λ1, 4λ1λ2, 4λ2λ0
///
/// Exactly zero at both axis vertices of a triangle with an axis edge (its ends' coefficients being −¼).
#[inline]
pub fn vertex_gradients(vertex: [f64; 3], edge: [f64; 3]) -> [Pair; 3] {
    let linear = [vertex[1] - vertex[0], vertex[2] - vertex[0]];
    // At vertex n the bubble of edge (n, j) has gradient 4∇λ_j.
    let [b01, b12, b20] = edge.map(|b| 4.0 * b);
    [
        [linear[0] + b01, linear[1] + b20],
        [linear[0] - b01, linear[1] + (b12 - b01)],
        [linear[0] + (b12 - b20), linear[1] - b20],
    ]
}

//! Fields that are known everywhere, and the meshes that they live on.

use super::discrete::Exact;
use gapwright::fem::element::Pair;
use gapwright::geometry::{Cap, outline};
use gapwright::mesh::{Chart, Mesh, RegionId, first_mesh};
use gapwright::model::Point;
use gapwright::units::MU0;
use std::f64::consts::PI;

/// ψ = (r² − 0.4 r⁴)·cos(2z + 0.3) in one material: B_z does not vanish on the axis.
pub struct AtTheAxis;

const WAVE: f64 = 2.0;
const PHASE: f64 = 0.3;

impl Exact for AtTheAxis {
    fn reluctivity(&self, _: RegionId) -> f64 {
        1.0
    }

    fn psi(&self, _: RegionId, p: Point) -> f64 {
        (p.r.powi(2) - 0.4 * p.r.powi(4)) * (WAVE * p.z + PHASE).cos()
    }

    fn gradient(&self, _: RegionId, p: Point) -> Pair {
        let (sin, cos) = (WAVE * p.z + PHASE).sin_cos();
        [(2.0 * p.r - 1.6 * p.r.powi(3)) * cos, -WAVE * (p.r.powi(2) - 0.4 * p.r.powi(4)) * sin]
    }

    /// F'' − F'/r = −3.2 r² for F = r² − 0.4 r⁴.
    fn current_density(&self, _: RegionId, p: Point) -> f64 {
        let f = p.r.powi(2) - 0.4 * p.r.powi(4);
        (3.2 * p.r.powi(2) + WAVE * WAVE * f) * (WAVE * p.z + PHASE).cos() / p.r
    }
}

/// ψ = sin(π(r − 1))·cos z/ν + (1 + (r − 1)²)·sin 1.3z/50: B_r passes the edge r = 1 continuously, H_z too, B_z jumps
/// with the permeability. The second part has no flux across the edge, so it is the same on both sides.
pub struct AcrossAnEdge {
    /// µ of region 1 (r < 1) over µ of region 0.
    pub contrast: f64,
}

/// Share of the part that does not jump.
const SMOOTH: f64 = 0.02;
const WAVE_SMOOTH: f64 = 1.3;

impl Exact for AcrossAnEdge {
    fn reluctivity(&self, region: RegionId) -> f64 {
        if region.0 == 1 { 1.0 / self.contrast } else { 1.0 }
    }

    fn psi(&self, region: RegionId, p: Point) -> f64 {
        let x = p.r - 1.0;
        (PI * x).sin() * p.z.cos() / self.reluctivity(region)
            + SMOOTH * (1.0 + x * x) * (WAVE_SMOOTH * p.z).sin()
    }

    fn gradient(&self, region: RegionId, p: Point) -> Pair {
        let (x, nu) = (p.r - 1.0, self.reluctivity(region));
        let (sin, cos) = (PI * x).sin_cos();
        let (sin_z, cos_z) = (WAVE_SMOOTH * p.z).sin_cos();
        [
            PI * cos * p.z.cos() / nu + SMOOTH * 2.0 * x * sin_z,
            -sin * p.z.sin() / nu + SMOOTH * WAVE_SMOOTH * (1.0 + x * x) * cos_z,
        ]
    }

    fn current_density(&self, region: RegionId, p: Point) -> f64 {
        let x = p.r - 1.0;
        let (sin, cos) = (PI * x).sin_cos();
        let jumping = (-(PI * PI + 1.0) * sin - PI * cos / p.r) * p.z.cos();
        let smooth = 2.0 - 2.0 * x / p.r - WAVE_SMOOTH * WAVE_SMOOTH * (1.0 + x * x);
        let smooth = SMOOTH * smooth * (WAVE_SMOOTH * p.z).sin();
        -(jumping + self.reluctivity(region) * smooth) / p.r
    }
}

/// ψ = r²/(a² + ρ²)^k in all space: for k = 3/2 the far field is a dipole's, for k = 3 it dies out faster.
///
/// With f = (a² + ρ²)^−k: J = −ν0 r (10 f' + 4 ρ² f''), primes for d/d(ρ²).
pub struct AllSpace {
    pub a: f64,
    pub k: f64,
}

impl AllSpace {
    fn derivatives(&self, p: Point) -> (f64, [f64; 3]) {
        let square = p.r * p.r + p.z * p.z;
        let s = self.a * self.a + square;
        let f = s.powf(-self.k);
        (square, [f, -self.k * f / s, self.k * (self.k + 1.0) * f / (s * s)])
    }
}

impl Exact for AllSpace {
    fn reluctivity(&self, _: RegionId) -> f64 {
        1.0 / MU0
    }

    fn psi(&self, _: RegionId, p: Point) -> f64 {
        p.r * p.r * self.derivatives(p).1[0]
    }

    fn gradient(&self, _: RegionId, p: Point) -> Pair {
        let [f, d, _] = self.derivatives(p).1;
        [2.0 * p.r * f + 2.0 * p.r.powi(3) * d, 2.0 * p.r * p.r * p.z * d]
    }

    fn current_density(&self, region: RegionId, p: Point) -> f64 {
        let (square, [_, d, dd]) = self.derivatives(p);
        -self.reluctivity(region) * p.r * (10.0 * d + 4.0 * square * dd)
    }
}

/// The box r_low < r < r_low + 1, 0 < z < 1 in n × n skewed cells of two triangles, cut at r = 1 into regions 1 and 0.
pub fn skewed_box(r_low: f64, n: usize) -> Mesh {
    let step = 1.0 / n as f64;
    let (mut points, mut on_axis) = (vec![], vec![]);
    for j in 0..=n {
        for i in 0..=n {
            let (r, z) = (r_low + i as f64 * step, j as f64 * step);
            // Inner points are moved, but the material edge stays straight.
            let is_inner = 0 < i && i < n && 0 < j && j < n;
            let shift = if is_inner { 0.2 * step } else { 0.0 };
            let sign = if (i + j) % 2 == 0 { 1.0 } else { -0.6 };
            let shift_r = if (r - 1.0).abs() < 1e-9 { 0.0 } else { shift * sign };
            points.push(Point { r: r + shift_r, z: z + shift * sign * 0.7 });
            on_axis.push(r == 0.0);
        }
    }
    let (mut triangles, mut regions) = (vec![], vec![]);
    for j in 0..n {
        for i in 0..n {
            let [a, b] = [j * (n + 1) + i, (j + 1) * (n + 1) + i].map(|v| v as u32);
            triangles.extend([[b + 1, a, a + 1], [a, b + 1, b]]);
            let is_core = r_low + (i as f64 + 0.5) * step < 1.0;
            regions.extend([RegionId(u16::from(is_core)); 2]);
        }
    }
    with_edges(points, on_axis, triangles, regions)
}

/// Numbers the edges of a triangle list that lies inside a cap far away.
fn with_edges(
    points: Vec<Point>,
    on_axis: Vec<bool>,
    triangles: Vec<[u32; 3]>,
    regions: Vec<RegionId>,
) -> Mesh {
    let mut numbers = std::collections::BTreeMap::new();
    let mut edges: Vec<[u32; 2]> = vec![];
    let triangle_edges = triangles
        .iter()
        .map(|t| {
            [0, 1, 2].map(|k| {
                let (a, b) = (t[k].min(t[(k + 1) % 3]), t[k].max(t[(k + 1) % 3]));
                *numbers.entry((a, b)).or_insert_with(|| {
                    edges.push([a, b]);
                    edges.len() as u32 - 1
                })
            })
        })
        .collect();
    Mesh {
        parents: vec![[u32::MAX; 2]; points.len()],
        level_sizes: vec![points.len()],
        charts: vec![Chart::Inside; triangles.len()],
        cap: Cap { center_z: 0.0, radius: 100.0, n_facets: 8 },
        points,
        on_axis,
        triangles,
        triangle_edges,
        edges,
        regions,
    }
}

/// All space: the first mesh of an air coil, all of it air.
pub fn all_space() -> Mesh {
    let model = crate::cases::R7.model(1e-3);
    let mut mesh = first_mesh(&outline(&model).unwrap()).unwrap();
    mesh.regions.fill(RegionId(0));
    mesh
}

//! Newton and preconditioned conjugate gradients → [`Solution`].

mod newton;

pub use newton::{Effort, SolveError, System, solve};

use crate::fem::element::{Frame, Pair, vertex_gradients};
use crate::mesh::Mesh;

/// Coefficients of ψ in the hierarchical quadratic basis [Wb/rad]: ψ = Σ vertex_i λ_i + Σ edge_e 4 λ_i λ_j.
///
/// Constrained coefficients (axis: 0; edges with one end on the axis: −¼ of the other end) are filled in.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Solution {
    pub vertex: Vec<f64>,
    pub edge: Vec<f64>,
}

impl Solution {
    /// The field 0.
    pub fn zero(mesh: &Mesh) -> Solution {
        Solution { vertex: vec![0.0; mesh.points.len()], edge: vec![0.0; mesh.edges.len()] }
    }

    /// Values at the corners and bubble coefficients on the edges of triangle t.
    #[inline]
    pub fn local(&self, mesh: &Mesh, t: usize) -> ([f64; 3], [f64; 3]) {
        (
            mesh.triangles[t].map(|v| self.vertex[v as usize]),
            mesh.triangle_edges[t].map(|e| self.edge[e as usize]),
        )
    }

    /// Reference gradients of ψ at the corners of triangle t.
    #[inline]
    pub fn gradients(&self, mesh: &Mesh, t: usize) -> [Pair; 3] {
        let (vertex, edge) = self.local(mesh, t);
        vertex_gradients(vertex, edge)
    }

    /// ∫ ψ dr dz over triangle t in its chart [Wb·m²/rad]: vertex hats and bubbles both integrate to |det|/6.
    pub fn integral(&self, mesh: &Mesh, t: usize) -> f64 {
        let (vertex, edge) = self.local(mesh, t);
        let sum: f64 = vertex.iter().chain(&edge).sum();
        sum * Frame::new(mesh, t).det_abs / 6.0
    }
}

//! Newton and preconditioned conjugate gradients → [`Solution`].

/// Coefficients of ψ in the hierarchical quadratic basis [Wb/rad]: ψ = Σ vertex_i λ_i + Σ edge_e 4 λ_i λ_j.
///
/// Constrained coefficients (axis: 0; edges with one end on the axis: −¼ of the other end) are filled in.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Solution {
    pub vertex: Vec<f64>,
    pub edge: Vec<f64>,
}

//! Preconditioned conjugate gradients with the predicted decrease of the energy error as stopping rule.

use super::matrix::{Matrix, multiply};

/// When to stop.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Stop {
    /// Stop when a step lowers xᵀAx/2 − bᵀx by less than this share of bᵀx (the predicted decrease α·rᵀz).
    pub decrease: f64,
    pub n_iterations_max: usize,
}

/// What was used and reached.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Convergence {
    pub n_iterations: usize,
    /// Last predicted decrease as a share of bᵀx.
    pub decrease: f64,
}

/// Why the iteration failed.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum CgError {
    #[error("matrix is not positive definite: pᵀAp = {curvature:.3e} in iteration {iteration}")]
    NotPositiveDefinite { iteration: usize, curvature: f64 },
    #[error("relative decrease {reached:.1e} after {n_iterations} iterations, wanted {wanted:.1e}")]
    NotConverged { n_iterations: usize, reached: f64, wanted: f64 },
}

/// Solves A x = b from the start value in `x`; `precondition(r, z)` sets z ≈ A⁻¹ r (symmetric positive definite).
///
/// `scale` replaces bᵀx in the stopping rule when it is larger (a Newton step starts at x = 0).
pub fn conjugate_gradients(
    a: &Matrix,
    b: &[f64],
    x: &mut [f64],
    stop: &Stop,
    scale: f64,
    precondition: &mut dyn FnMut(&[f64], &mut [f64]),
) -> Result<Convergence, CgError> {
    let n = b.len();
    let (mut r, mut z, mut p, mut q) = (vec![0.0; n], vec![0.0; n], vec![0.0; n], vec![0.0; n]);
    multiply(a, x, &mut q);
    for i in 0..n {
        r[i] = b[i] - q[i];
    }
    let mut rz = 0.0;
    let mut decrease = f64::INFINITY;
    for iteration in 0..stop.n_iterations_max {
        precondition(&r, &mut z);
        let rz_before = rz;
        rz = dot(&r, &z);
        if rz == 0.0 {
            return Ok(Convergence { n_iterations: iteration, decrease: 0.0 });
        }
        let beta = if iteration == 0 { 0.0 } else { rz / rz_before };
        for i in 0..n {
            p[i] = z[i] + beta * p[i];
        }
        multiply(a, &p, &mut q);
        let curvature = dot(&p, &q);
        if curvature.is_nan() || curvature <= 0.0 || rz < 0.0 {
            return Err(CgError::NotPositiveDefinite { iteration, curvature });
        }
        let alpha = rz / curvature;
        for i in 0..n {
            x[i] += alpha * p[i];
            r[i] -= alpha * q[i];
        }
        decrease = alpha * rz / dot(b, x).max(scale);
        if decrease <= stop.decrease {
            return Ok(Convergence { n_iterations: iteration + 1, decrease });
        }
    }
    Err(CgError::NotConverged {
        n_iterations: stop.n_iterations_max,
        reached: decrease,
        wanted: stop.decrease,
    })
}

/// Inner product, one fixed order of summation.
pub fn dot(a: &[f64], b: &[f64]) -> f64 {
    a.iter().zip(b).map(|(a, b)| a * b).sum()
}

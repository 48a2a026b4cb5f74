//! Preconditioned conjugate gradients with the estimated energy error as stopping rule.

/// When to stop.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Stop {
    /// Stop when the steps still to come would lower xᵀAx − 2bᵀx by less than this share of bᵀx, as `outstanding` estimates it.
    pub outstanding: f64,
    /// Or by less than this share of what all steps have lowered: enough for a Newton step, which is not exact itself.
    pub of_lowered: f64,
    pub n_iterations_max: usize,
}

/// What was used and reached.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Convergence {
    pub n_iterations: usize,
    /// Estimated decrease outstanding, as a share of bᵀx.
    pub outstanding: f64,
}

/// Why the iteration failed.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum CgError {
    #[error("matrix is not positive definite: pᵀAp = {curvature:.3e} in iteration {iteration}")]
    NotPositiveDefinite { iteration: usize, curvature: f64 },
    #[error(
        "relative error {reached:.1e} of the energy after {n_iterations} iterations, wanted {wanted:.1e}"
    )]
    NotConverged { n_iterations: usize, reached: f64, wanted: f64 },
}

/// The vectors of the iteration, reused from solve to solve.
#[derive(Debug, Clone, Default)]
pub struct Vectors {
    r: Vec<f64>,
    z: Vec<f64>,
    az: Vec<f64>,
    p: Vec<f64>,
    q: Vec<f64>,
}

impl Vectors {
    fn fit(&mut self, n: usize) {
        for v in [&mut self.r, &mut self.z, &mut self.az, &mut self.p, &mut self.q] {
            v.clear();
            v.resize(n, 0.0);
        }
    }
}

/// A symmetric positive definite matrix with a preconditioner.
pub trait Operator {
    /// y = A x.
    fn multiply(&mut self, x: &[f64], y: &mut [f64]);
    /// z ≈ A⁻¹ r and az = A z; a preconditioner that ends with a sweep has most of A z at hand.
    fn precondition(&mut self, r: &[f64], z: &mut [f64], az: &mut [f64]);
}

/// Solves A x = b from the start value in `x`.
///
/// `scale` replaces bᵀx in the stopping rule when it is larger (a Newton step starts at x = 0). A·p follows from A·z by the
/// recurrence of p, so an iteration reads the matrix less than twice.
pub fn conjugate_gradients(
    operator: &mut impl Operator,
    b: &[f64],
    x: &mut [f64],
    stop: &Stop,
    scale: f64,
    work: &mut Vectors,
) -> Result<Convergence, CgError> {
    let n = b.len();
    work.fit(n);
    let Vectors { r, z, az, p, q } = work;
    operator.multiply(x, q);
    for i in 0..n {
        r[i] = b[i] - q[i];
    }
    let mut rz = 0.0;
    let (mut before, mut rest, mut lowered) = (f64::INFINITY, f64::INFINITY, 0.0);
    for iteration in 0..stop.n_iterations_max {
        operator.precondition(r, z, az);
        let rz_before = rz;
        rz = dot(r, z);
        if rz == 0.0 {
            return Ok(Convergence { n_iterations: iteration, outstanding: 0.0 });
        }
        let beta = if iteration == 0 { 0.0 } else { rz / rz_before };
        for i in 0..n {
            p[i] = z[i] + beta * p[i];
            q[i] = az[i] + if iteration == 0 { 0.0 } else { beta * q[i] };
        }
        let curvature = dot(p, q);
        if curvature.is_nan() || curvature <= 0.0 || rz < 0.0 {
            return Err(CgError::NotPositiveDefinite { iteration, curvature });
        }
        let alpha = rz / curvature;
        for i in 0..n {
            x[i] += alpha * p[i];
            r[i] -= alpha * q[i];
        }
        // From a start on the wrong side of zero bᵀx is negative at first: nothing to measure against yet.
        let size = dot(b, x).max(scale);
        if size <= 0.0 {
            continue;
        }
        let decrease = alpha * rz / size;
        rest = outstanding(before, decrease);
        lowered += decrease;
        if rest <= stop.outstanding.max(stop.of_lowered * lowered) {
            return Ok(Convergence { n_iterations: iteration + 1, outstanding: rest });
        }
        before = decrease;
    }
    Err(CgError::NotConverged {
        n_iterations: stop.n_iterations_max,
        reached: rest,
        wanted: stop.outstanding,
    })
}

/// What the steps to come will lower, from the decreases of the last two: d·ρ/(1 − ρ) if each is ρ times the one before.
///
/// The decreases α·rᵀz add up to the energy error ‖x − x*‖²_A; with the multilevel preconditioner each is 5 to 20 times smaller
/// than the last (measured). Never more than d itself, never less than a thirtieth: one lucky step proves little. Source of
/// the sum: M. Hestenes, E. Stiefel, J. Res. Nat. Bur. Standards 49 (1952) 409.
fn outstanding(before: f64, decrease: f64) -> f64 {
    const LUCKY: f64 = 1.0 / 30.0;
    let ratio = if before.is_finite() { (decrease / before).clamp(LUCKY, 0.5) } else { 0.5 };
    decrease * ratio / (1.0 - ratio)
}

/// Inner product, one fixed order of summation: four partial sums, so that it does not wait for each addition.
pub fn dot(a: &[f64], b: &[f64]) -> f64 {
    let mut sums = [0.0; 4];
    let (quads_a, rest_a) = a.as_chunks::<4>();
    let (quads_b, rest_b) = b.as_chunks::<4>();
    for (a, b) in quads_a.iter().zip(quads_b) {
        for k in 0..4 {
            sums[k] += a[k] * b[k];
        }
    }
    let rest: f64 = rest_a.iter().zip(rest_b).map(|(a, b)| a * b).sum();
    (sums[0] + sums[1]) + (sums[2] + sums[3]) + rest
}

//! Second moments of the coefficient on each triangle: all that stiffness and bound need of it.
//!
//! k_mn = ∫ λ_m λ_n K̂ and c_mn = ∫ λ_m λ_n C with C = K̂/det K̂, both over the reference triangle (eq. 7).

use super::element::{Frame, Pair, Tensor, apply, blend, contract, dot};
use super::quadrature::{Rule, Rules};
use crate::model::{Law, LawPoint};

/// Vertex pairs in storage order.
pub const PAIRS: [(usize, usize); 6] = [(0, 0), (1, 1), (2, 2), (0, 1), (1, 2), (2, 0)];
/// Storage index of the pair (m, n).
pub const PAIR_INDEX: [[usize; 3]; 3] = [[0, 3, 5], [3, 1, 4], [5, 4, 2]];

/// Moments of one triangle: primal (with K̂) and dual (with C).
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Moments {
    pub k: [Tensor; 6],
    pub c: [Tensor; 6],
}

impl Moments {
    fn add(&mut self, weight: f64, lambda: &[f64; 3], k: Tensor) {
        let det = k[0] * k[2] - k[1] * k[1];
        let dual = weight / det;
        for (index, (m, n)) in PAIRS.into_iter().enumerate() {
            let product = lambda[m] * lambda[n];
            for i in 0..3 {
                self.k[index][i] += weight * product * k[i];
                self.c[index][i] += dual * product * k[i];
            }
        }
    }

    /// On a triangle with an axis edge the moments between axis vertices diverge, and the gradients that they
    /// multiply vanish exactly: store 0 for them.
    fn clear_axis_pairs(&mut self, frame: &Frame) {
        if frame.has_axis_edge() {
            for (index, (m, n)) in PAIRS.into_iter().enumerate() {
                if frame.on_axis(m) && frame.on_axis(n) {
                    self.k[index] = [0.0; 3];
                }
            }
        }
    }
}

/// The rule for a triangle: collapsed where it touches the axis or infinity, plain elsewhere.
pub fn rule_of<'a>(rules: &'a Rules, frame: &Frame) -> &'a Rule {
    frame.collapse.map_or(&rules.plain, |k| &rules.collapsed[k])
}

/// Moments for a constant reluctivity [m/H].
pub fn constant_moments(frame: &Frame, rule: &Rule, reluctivity: f64) -> Moments {
    let mut moments = Moments::default();
    if frame.gauge.is_some() {
        for (lambda, &weight) in rule.points.iter().zip(&rule.weights) {
            let (kappa, metric) = frame.coefficient(lambda, reluctivity);
            moments.add(weight, lambda, metric.map(|s| kappa * s));
        }
    } else {
        // Inside the metric is constant: two scalars a pair are enough.
        let r = frame.corners.map(|c| c.r);
        let primal = inverse_radius_moments(&r, rule).map(|moment| reluctivity * moment);
        let dual = radius_moments(&r).map(|moment| moment / reluctivity);
        for index in 0..6 {
            moments.k[index] = frame.metric.map(|s| primal[index] * s);
            moments.c[index] = frame.metric.map(|s| dual[index] * s);
        }
    }
    moments.clear_axis_pairs(frame);
    moments
}

/// ∫ λ_m λ_n/r for every pair, r the corners' radii [1/m].
fn inverse_radius_moments(r: &[f64; 3], rule: &Rule) -> [f64; 6] {
    let mut moments = [0.0; 6];
    for (lambda, products) in rule.points.iter().zip(&rule.products) {
        let inverse = 1.0 / (lambda[0] * r[0] + lambda[1] * r[1] + lambda[2] * r[2]);
        for index in 0..6 {
            moments[index] += products[index] * inverse;
        }
    }
    moments
}

/// ∫ λ_m λ_n r for every pair [m]: a cubic, so in closed form what every rule here gives to rounding.
fn radius_moments(r: &[f64; 3]) -> [f64; 6] {
    let sum = r[0] + r[1] + r[2];
    PAIRS.map(|(m, n)| match m == n {
        true => (sum + 2.0 * r[m]) / 60.0,
        false => (sum + r[m] + r[n]) / 120.0,
    })
}

/// |∇ψ|/r at a point of an inside triangle from the reference gradient u: √(u·S u/|det J|)/r [T].
#[inline]
pub fn flux_density_magnitude(frame: &Frame, radius: f64, u: Pair) -> f64 {
    (contract(u, frame.metric, u) / frame.det_abs).max(0.0).sqrt() / radius
}

/// The tangent tensor (ν·I + (dH/dB − ν)·b̂b̂ᵀ)/r in reference coordinates at reference gradient u (eq. 12).
#[inline]
fn tangent_tensor(frame: &Frame, radius: f64, u: Pair, nu: f64, differential: f64) -> Tensor {
    let mut k = frame.metric.map(|s| nu / radius * s);
    let square = contract(u, frame.metric, u);
    if 0.0 < square {
        let su = apply(frame.metric, u);
        let extra = (differential - nu) / (radius * square);
        k[0] += extra * su[0] * su[0];
        k[1] += extra * su[0] * su[1];
        k[2] += extra * su[1] * su[1];
    }
    k
}

/// What a Newton step needs of a triangle with a saturating law.
#[derive(Debug, Clone, Copy)]
pub struct Saturated {
    /// w_m = ∫ λ_m σ̂ with σ̂ = K̂(B)∇ψ.
    pub flux: [Pair; 3],
    /// ∫ r·w(B)·|det J|.
    pub energy: f64,
    /// Moments of the tangent tensor.
    pub tangent: Moments,
}

/// Flux, energy and tangent moments of a triangle with a saturating law, with one inversion of the law a point.
pub fn saturated(frame: &Frame, rule: &Rule, law: &Law, gradients: &[Pair; 3]) -> Saturated {
    let mut tangent = Moments::default();
    let add = |weight: f64, lambda: &[f64; 3], radius: f64, u: Pair, at: &LawPoint| {
        tangent.add(weight, lambda, tangent_tensor(frame, radius, u, at.reluctivity, at.tangent));
    };
    let (flux, energy) = integrate(frame, rule, law, gradients, add);
    tangent.clear_axis_pairs(frame);
    Saturated { flux, energy, tangent }
}

/// w_m and ∫ r·w(B)·|det J| alone: what the bound needs.
pub fn saturating_flux(
    frame: &Frame,
    rule: &Rule,
    law: &Law,
    gradients: &[Pair; 3],
) -> ([Pair; 3], f64) {
    integrate(frame, rule, law, gradients, |_, _, _, _, _| {})
}

/// w_m and ∫ r·w(B)·|det J|; `visit` sees weight, λ, radius, reference gradient and law of every quadrature point.
#[inline]
fn integrate(
    frame: &Frame,
    rule: &Rule,
    law: &Law,
    gradients: &[Pair; 3],
    mut visit: impl FnMut(f64, &[f64; 3], f64, Pair, &LawPoint),
) -> ([Pair; 3], f64) {
    let (mut flux, mut energy) = ([[0.0; 2]; 3], 0.0);
    for (lambda, &weight) in rule.points.iter().zip(&rule.weights) {
        let radius = frame.position(lambda).r;
        let u = blend(lambda, gradients);
        let at = law.at(flux_density_magnitude(frame, radius, u));
        energy += weight * radius * frame.det_abs * at.energy;
        let su = apply(frame.metric, u);
        let kappa = weight * at.reluctivity / radius;
        for m in 0..3 {
            flux[m][0] += kappa * lambda[m] * su[0];
            flux[m][1] += kappa * lambda[m] * su[1];
        }
        visit(weight, lambda, radius, u, &at);
    }
    (flux, energy)
}

/// w_m = Σ_n k_mn uⁿ: ∫ λ_m σ̂ for a constant law.
#[inline]
pub fn linear_flux(k: &[Tensor; 6], gradients: &[Pair; 3]) -> [Pair; 3] {
    let mut flux = [[0.0; 2]; 3];
    for m in 0..3 {
        for n in 0..3 {
            let part = apply(k[PAIR_INDEX[m][n]], gradients[n]);
            flux[m][0] += part[0];
            flux[m][1] += part[1];
        }
    }
    flux
}

/// ½ ∫ dψ·K̂ dψ of a triangle with a constant law.
#[inline]
pub fn linear_energy(k: &[Tensor; 6], gradients: &[Pair; 3]) -> f64 {
    energy_of_flux(&linear_flux(k, gradients), gradients)
}

/// The same from its [`linear_flux`].
#[inline]
pub fn energy_of_flux(flux: &[Pair; 3], gradients: &[Pair; 3]) -> f64 {
    0.5 * (dot(gradients[0], flux[0]) + dot(gradients[1], flux[1]) + dot(gradients[2], flux[2]))
}

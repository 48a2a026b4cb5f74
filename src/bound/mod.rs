//! Equilibrated flux → guaranteed [`Bound`] of the coenergy and per-triangle shares.
//!
//! For any ψ_h, solved or not: `low` = −F(ψ_h), `high` from a flux τ with div τ = −J exactly (eq. 4, 9–11). Knows
//! nothing of how ψ_h was found.

mod element;
mod patch;
mod tree;

pub use tree::{defect, scale};

use crate::fem::element::Frame;
use crate::fem::moments::{energy_of_flux, linear_flux, rule_of, saturating_flux};
use crate::fem::{Coefficients, Elements, Reluctivity, Rules};
use crate::mesh::Mesh;
use crate::mesh::fans::Fans;
use crate::solve::Solution;
use crate::units::{Ampere, Joule};
use element::Patchwork;
use rayon::prelude::*;
use std::f64::consts::TAU;

/// Rounding, as a share of the coenergy, added to both ends: sums of 1e6 terms in double precision round to about 1e-12.
pub const MARGIN: f64 = 1e-9;
/// Quadrature, as a share of the interval, added to both ends: coarse triangles are where it errs, and there the interval is
/// wide too. Constant laws: ν/r is smooth, and a higher rule moves the ends by at most 1.5e-6 of the interval (tested).
const MARGIN_OF_WIDTH: f64 = 1e-5;
/// The same with a saturating law, whose bends lie inside triangles: a higher rule moves the ends by up to 7e-3 (tested).
const MARGIN_OF_WIDTH_SATURATING: f64 = 2e-2;

/// τ in the Raviart–Thomas space of degree 1, its divergence constant on each triangle: two numbers an edge, none inside.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Flux {
    /// Flux across the edge (mmf along it) on λ_i dλ_j − λ_j dλ_i, from the edge's first end to its second.
    pub through: Vec<Ampere>,
    /// Tilt on d(λ_i λ_j).
    pub tilt: Vec<Ampere>,
}

/// The guaranteed ends of the coenergy W' and where the gap between them sits.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Bound {
    /// Ends with the margin [J].
    pub low: Joule,
    pub high: Joule,
    /// What was taken off and added for quadrature and rounding [J].
    pub margin: Joule,
    /// Share of each triangle in high − low [J], ≥ 0 up to rounding.
    pub shares: Vec<Joule>,
    pub flux: Flux,
}

impl Bound {
    /// (high − low)/middle.
    pub fn relative_width(&self) -> f64 {
        2.0 * (self.high - self.low) / (self.high + self.low)
    }
}

/// What the bound needs to see of the field.
#[derive(Debug, Clone, Copy)]
pub struct Field<'a> {
    pub mesh: &'a Mesh,
    pub coefficients: &'a Coefficients,
    pub rules: &'a Rules,
    /// Of the constant coefficient, or of the tangent at `solution`.
    pub elements: &'a Elements,
    pub solution: &'a Solution,
}

/// Equilibrates the flux of the field and evaluates both ends.
pub fn bound(field: &Field, fans: &Fans) -> Bound {
    let (patchwork, primal): (Vec<Patchwork>, Vec<f64>) = (0..field.mesh.triangles.len())
        .into_par_iter()
        .with_min_len(256)
        .map(|t| {
            let (flux, primal) = flux_and_energy(field, t);
            (Patchwork::new(field, t, &flux), primal)
        })
        .unzip();
    let mut flux = patch::equilibrate(field, fans, &patchwork);
    tree::close_divergence(field, fans, &mut flux);
    evaluate(field, &primal, flux)
}

/// w_m = ∫ λ_m σ̂ and ∫ r·w(B) on triangle t.
fn flux_and_energy(field: &Field, t: usize) -> ([[f64; 2]; 3], f64) {
    let gradients = field.solution.gradients(field.mesh, t);
    match &field.coefficients.reluctivity[field.mesh.regions[t].0 as usize] {
        Reluctivity::Constant(_) => {
            let flux = linear_flux(&field.elements.k[t], &gradients);
            (flux, energy_of_flux(&flux, &gradients))
        }
        Reluctivity::Saturating(law) => {
            let frame = Frame::new(field.mesh, t);
            saturating_flux(&frame, rule_of(field.rules, &frame), law, &gradients)
        }
    }
}

/// How far below zero a share may be, as a share of the triangle's own energies: the three terms of a share cancel
/// to rounding where the field is exact, and a Gram matrix of 6 × 36 products rounds to about 1e-13 of them.
const SHARE_ROUNDING: f64 = 1e-11;

/// Per triangle: (low, high, share)/2π; `primal` is ∫ r·w(B).
fn evaluate(field: &Field, primal: &[f64], flux: Flux) -> Bound {
    let parts: Vec<[f64; 3]> = (0..primal.len())
        .into_par_iter()
        .with_min_len(256)
        .map(|t| {
            let mesh = field.mesh;
            let gradients = field.solution.gradients(mesh, t);
            let numbers = element::local_numbers(mesh, t, &flux);
            let form = element::local_form(&numbers);
            let source = match field.coefficients.current_density[mesh.regions[t].0 as usize] {
                0.0 => 0.0,
                current_density => current_density * field.solution.integral(mesh, t),
            };
            let product = element::wedge_integral(&gradients, &form);
            let dual = match &field.coefficients.reluctivity[mesh.regions[t].0 as usize] {
                Reluctivity::Constant(_) => element::half_square(&field.elements.gram[t], &numbers),
                Reluctivity::Saturating(law) => element::saturating_coenergy(field, t, law, &form),
            };
            let share = dual - product + primal[t];
            debug_assert!(
                -SHARE_ROUNDING * (dual + primal[t]) <= share,
                "triangle {t} has the share {share:e} beside {dual:e} and {:e}",
                primal[t]
            );
            [source - primal[t], dual, share]
        })
        .collect();
    let sum = |k: usize| TAU * parts.iter().map(|p| p[k]).sum::<f64>();
    let shares = parts.iter().map(|p| TAU * p[2]).collect();
    let (low, high) = (sum(0), sum(1));
    let of_width = margin_of_width(field.coefficients);
    let margin = MARGIN * high.abs() + of_width * (high - low).abs();
    Bound { low: low - margin, high: high + margin, margin, shares, flux }
}

/// What quadrature may move, as a share of the interval.
pub fn margin_of_width(coefficients: &Coefficients) -> f64 {
    match coefficients.is_linear() {
        true => MARGIN_OF_WIDTH,
        false => MARGIN_OF_WIDTH_SATURATING,
    }
}

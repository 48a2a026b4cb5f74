//! Flux linkages and what follows from them: apparent and incremental inductance.

use super::Guaranteed;
use super::collect::{flux_linkage, single_carrier};
use super::sample::Sampler;
use crate::adapt::Outcome;
use crate::fem::assemble;
use crate::model::Model;
use crate::sparse::cg::dot;
use crate::sparse::{Stop, conjugate_gradients};
use crate::units::{Henry, Weber};
use std::f64::consts::TAU;

/// λ of one winding: best value, and guaranteed ends where there are any.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Linkage {
    pub value: Weber,
    pub ends: Option<[Weber; 2]>,
}

/// λ of every winding. With constant laws and one current λ = 2W'/I carries the coenergy's interval.
pub fn linkages(model: &Model, sampler: &Sampler) -> Vec<Linkage> {
    let carrier = single_carrier(model);
    let bound = &sampler.outcome.bound;
    let is_linear = sampler.outcome.coefficients.is_linear();
    (0..model.windings.len())
        .map(|w| {
            if carrier == Some(w) && is_linear {
                let current = model.windings[w].current;
                let (a, b) = (2.0 * bound.low / current, 2.0 * bound.high / current);
                return Linkage { value: 0.5 * (a + b), ends: Some(sorted([a, b])) };
            }
            let value = flux_linkage(model, sampler, w);
            // dW'/ds = Σ λ I: with one current its ends are λ's.
            let ends = sampler.outcome.work_rate_ends.filter(|_| carrier == Some(w));
            Linkage {
                value,
                ends: ends.map(|ends| sorted(ends.map(|end| end / model.windings[w].current))),
            }
        })
        .collect()
}

/// λ/I with the ends of λ; without guaranteed ends the interval is the value itself.
pub fn apparent(model: &Model, linkage: &Linkage, w: usize) -> Guaranteed {
    let current = model.windings[w].current;
    let value = linkage.value / current;
    let [a, b] = linkage.ends.unwrap_or([linkage.value; 2]).map(|end| end / current);
    Guaranteed { value, low: a.min(b), high: a.max(b) }
}

/// dλ_w/dI_w at the bias from the tangent problem A_t y = b_w of a unit current, λ' = 2π b_w·y (eq. 14) [H].
pub fn incremental(model: &Model, outcome: &Outcome, w: usize) -> Option<Henry> {
    let mut unit = outcome.coefficients.clone();
    let current = model.windings[w].current;
    // Only the sections of this winding carry current (the caller made sure), so scaling all is scaling it.
    unit.current_density.iter_mut().for_each(|j| *j /= current);
    let load = assemble::load(&outcome.mesh, &outcome.space, &unit);
    let matrix = assemble::stiffness(&outcome.mesh, &outcome.space, &outcome.moments);
    let mut work = outcome.hierarchy.workspace();
    let mut y = vec![0.0; load.len()];
    let stop = Stop { decrease: 1e-12, n_iterations_max: 2000 };
    let mut precondition =
        |r: &[f64], z: &mut [f64]| outcome.hierarchy.precondition(&matrix, &mut work, r, z);
    conjugate_gradients(&matrix, &load, &mut y, &stop, 0.0, &mut precondition).ok()?;
    Some(TAU * dot(&load, &y))
}

fn sorted([a, b]: [f64; 2]) -> [f64; 2] {
    [a.min(b), a.max(b)]
}

//! Flux linkages and what follows from them: apparent and incremental inductance.

use super::Guaranteed;
use super::collect::single_carrier;
use super::sample::Sampler;
use crate::adapt::Outcome;
use crate::fem::element::Frame;
use crate::fem::{Coefficients, Elements, assemble};
use crate::geometry::{Outline, Region, RegionKind};
use crate::model::{Model, Section};
use crate::sparse::cg::dot;
use crate::sparse::{CgError, Multilevel, Stop, Storage, Swept, Workspace};
use crate::units::{AmperePerSquareMeter, Henry, Weber};
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

/// 2πN/A_w ∫ ψ dA over all sections of winding w: its flux linkage from ψ_h [Wb].
fn flux_linkage(model: &Model, sampler: &Sampler, w: usize) -> Weber {
    let (mesh, solution) = (&sampler.outcome.mesh, &sampler.outcome.solution);
    let mut linkage = 0.0;
    for (k, region) in sampler.outline.regions.iter().enumerate() {
        let RegionKind::Winding { winding, section } = region.kind else { continue };
        if winding == w {
            let psi: f64 = sampler.triangles(k).map(|t| solution.integral(mesh, t)).sum();
            let area: f64 = sampler.triangles(k).map(|t| 0.5 * Frame::new(mesh, t).det_abs).sum();
            linkage += TAU * model.windings[w].sections[section].turns * psi / area;
        }
    }
    linkage
}

/// λ/I with the ends of λ; without guaranteed ends the interval is the value itself.
pub fn apparent(model: &Model, linkage: &Linkage, w: usize) -> Guaranteed {
    let current = model.windings[w].current;
    let value = linkage.value / current;
    let [a, b] = linkage.ends.unwrap_or([linkage.value; 2]).map(|end| end / current);
    Guaranteed { value, low: a.min(b), high: a.max(b) }
}

/// Current density of every region when winding w alone carries 1 A [A/m²].
pub fn unit_density(model: &Model, outline: &Outline, w: usize) -> Vec<AmperePerSquareMeter> {
    let density = |region: &Region| match region.kind {
        RegionKind::Winding { winding, section } if winding == w => {
            let Section { turns, radii, heights } = model.windings[w].sections[section];
            turns / ((radii[1] - radii[0]) * (heights[1] - heights[0]))
        }
        _ => 0.0,
    };
    outline.regions.iter().map(density).collect()
}

/// The load vector b of given current densities on the outcome's mesh; for 1 A in a winding its λ is 2π b·x.
pub fn load(outcome: &Outcome, density: &[AmperePerSquareMeter]) -> Vec<f64> {
    // `load` reads the densities only.
    let coefficients = Coefficients { reluctivity: Vec::new(), current_density: density.to_vec() };
    assemble::load(&outcome.mesh, &outcome.space, &coefficients)
}

/// Relative error of the incremental inductance that its linear solve may add; far below any interval.
const TANGENT_DECREASE: f64 = 1e-10;
/// CG iterations of that solve before giving up; 20–40 are usual.
const N_TANGENT_MAX: usize = 2000;

/// dλ_w/dI_w at the bias from the tangent problem A_t y = b, λ' = 2π b_w·y (eq. 14) [H].
///
/// - `elements`: of the tangent at the bias
/// - `unit`: load of 1 A in winding w alone
/// - `rate`: load that the currents gain for each ampere of winding w; `unit` itself where w alone carries current
pub fn tangent(
    outcome: &Outcome,
    elements: &Elements,
    unit: &[f64],
    rate: &[f64],
) -> Result<Henry, CgError> {
    let matrix = Swept::new(assemble::stiffness(
        &outcome.mesh,
        &outcome.space,
        &outcome.fans,
        elements,
        Storage::default(),
    ));
    let mut work = Workspace::default();
    let mut y = vec![0.0; rate.len()];
    let stop =
        Stop { outstanding: TANGENT_DECREASE, of_lowered: 0.0, n_iterations_max: N_TANGENT_MAX };
    Multilevel::new(&matrix, &outcome.hierarchy, &mut work).solve(rate, &mut y, &stop, 0.0)?;
    Ok(TAU * dot(unit, &y))
}

fn sorted([a, b]: [f64; 2]) -> [f64; 2] {
    [a.min(b), a.max(b)]
}

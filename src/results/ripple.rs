//! Bias and ripple → flux-density swing of every part and the peak currents: two solves on the finished mesh.

use super::linkage::unit_density;
use super::sample::Sampler;
use super::{RippleCurrent, RipplePart, RippleResult, parts};
use crate::adapt::Outcome;
use crate::adapt::again::{at_density, linkage_width};
use crate::geometry::Outline;
use crate::model::{Model, Winding};
use crate::solve::{Solution, SolveError};
use crate::units::Ampere;

/// The field at both ends of the ripple, all windings in phase; `None` without a ripple.
///
/// Of the outcome only the preconditioner's finest level changes.
pub fn ripple(
    model: &Model,
    outline: &Outline,
    outcome: &mut Outcome,
) -> Result<Option<RippleResult>, SolveError> {
    if model.windings.iter().all(|w| w.ripple == 0.0) {
        return Ok(None);
    }
    let [trough, peak] = [-0.5, 0.5].map(|share| field_at(model, outline, outcome, share));
    let (trough, peak) = (trough?, peak?);
    let difference = Solution {
        vertex: peak.vertex.iter().zip(&trough.vertex).map(|(p, t)| p - t).collect(),
        edge: peak.edge.iter().zip(&trough.edge).map(|(p, t)| p - t).collect(),
    };
    // B is linear in ψ: the swing of the vector B is the flux density of the difference.
    let sampler = Sampler::new(outline, outcome);
    let swings = parts::exceedances(&sampler, &difference);
    let peaks = parts::exceedances(&sampler, &peak);
    let part = |((name, swing), (_, peak)): ((String, [f64; 3]), (String, [f64; 3]))| RipplePart {
        name,
        swing: swing[1],
        peak: peak[1],
    };
    let currents = model.windings.iter().map(|w| RippleCurrent {
        winding: w.name.clone(),
        trough: current_at(w, -0.5),
        peak: current_at(w, 0.5),
    });
    Ok(Some(RippleResult {
        currents: currents.collect(),
        parts: swings.into_iter().zip(peaks).map(part).collect(),
    }))
}

/// current + share·ripple, away from zero for a positive share.
fn current_at(winding: &Winding, share: f64) -> Ampere {
    winding.current + share * winding.ripple * if winding.current < 0.0 { -1.0 } else { 1.0 }
}

fn field_at(
    model: &Model,
    outline: &Outline,
    outcome: &mut Outcome,
    share: f64,
) -> Result<Solution, SolveError> {
    let mut density: Vec<f64> = outline.regions.iter().map(|r| r.current_density).collect();
    for (w, winding) in model.windings.iter().enumerate() {
        let change = current_at(winding, share) - winding.current;
        for (j, unit) in density.iter_mut().zip(unit_density(model, outline, w)) {
            *j += change * unit;
        }
    }
    let width = linkage_width(outcome.bound.relative_width());
    let start = outcome.solution.clone();
    Ok(at_density(outcome, &density, &start, width)?.solution)
}

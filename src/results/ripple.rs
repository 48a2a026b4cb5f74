//! Bias and ripple → flux-density swing of every part and the peak currents: two solves on the finished mesh.

use super::linkage::unit_density;
use super::sample::Sampler;
use super::{RippleCurrent, RipplePart, RippleResult, parts};
use crate::adapt::Outcome;
use crate::adapt::again::{at_density, linkage_width, start_at};
use crate::geometry::Outline;
use crate::model::{Model, Winding};
use crate::solve::{Solution, SolveError};
use crate::sparse::cg::dot;
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

/// The field with every winding at [`current_at`] this share of its ripple.
fn field_at(
    model: &Model,
    outline: &Outline,
    outcome: &mut Outcome,
    share: f64,
) -> Result<Solution, SolveError> {
    let mut density = vec![0.0; outline.regions.len()];
    for (w, winding) in model.windings.iter().enumerate() {
        let current = current_at(winding, share);
        for (j, unit) in density.iter_mut().zip(unit_density(model, outline, w)) {
            *j += current * unit;
        }
    }
    // A ripple of twice the bias ends at 0 A: a start that is not scaled along would be infinitely far from that field.
    let of_sheet = &outcome.coefficients.current_density;
    let factor = dot(&density, of_sheet) / dot(of_sheet, of_sheet);
    let start = start_at(outcome, factor);
    let width = linkage_width(outcome.bound.relative_width());
    Ok(at_density(outcome, &density, &start, width)?.solution)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::geometry::{outline, samples};
    use crate::model::Law;

    #[test]
    fn a_ripple_of_twice_the_bias_swings_from_no_field_to_the_peak() {
        for law in [Law::Constant { permeability: 2000.0 }, Law::saturation(2000.0, 0.4).unwrap()] {
            let mut model = samples::r1();
            model.materials[0].law = law;
            model.accuracy.interval = 0.01;
            model.windings[0].ripple = 2.0 * model.windings[0].current;
            let outline = outline(&model).unwrap();
            let mut outcome = crate::adapt::run(&model, &outline, &mut |_| {}).unwrap();
            let found = ripple(&model, &outline, &mut outcome).unwrap().unwrap();
            assert_eq!(found.currents[0].trough, 0.0);
            for part in found.parts {
                assert!(0.0 < part.peak);
                assert_eq!(part.swing, part.peak, "{}", part.name);
            }
        }
    }
}

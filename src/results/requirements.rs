//! Promised inductances → verdicts: a solve at the promised current on the finished mesh.

use super::linkage::{load, tangent, unit_density};
use super::{RequirementResult, single_carrier};
use crate::adapt::Outcome;
use crate::adapt::again::{Again, at_density, linkage_width, rate_ends_at, start_at};
use crate::geometry::Outline;
use crate::model::{InductanceKind, Model, Requirement};
use crate::solve::SolveError;
use crate::sparse::cg::dot;
use crate::units::{Ampere, AmperePerSquareMeter, Henry};
use std::f64::consts::TAU;

/// Current density of every region when winding w carries `current` and all other currents scale along.
///
/// A winding without current in the sheet carries its `current` alone: there is nothing to scale.
fn scaled_density(
    model: &Model,
    outline: &Outline,
    w: usize,
    current: Ampere,
) -> Vec<AmperePerSquareMeter> {
    let of_sheet = model.windings[w].current;
    if of_sheet == 0.0 {
        return unit_density(model, outline, w).iter().map(|j| j * current).collect();
    }
    outline.regions.iter().map(|r| r.current_density * (current / of_sheet)).collect()
}

/// One verdict a promise of the sheet, and a note for each that other currents scale along with.
///
/// Solves on the outcome's mesh; of the outcome only the preconditioner's finest level changes.
pub fn check_requirements(
    model: &Model,
    outline: &Outline,
    outcome: &mut Outcome,
) -> Result<(Vec<RequirementResult>, Vec<String>), SolveError> {
    let mut verdicts = Vec::with_capacity(model.requirements.len());
    for requirement in &model.requirements {
        verdicts.push(check(model, outline, outcome, requirement)?);
    }
    Ok((verdicts, model.requirements.iter().filter_map(|r| scaling_note(model, r)).collect()))
}

fn check(
    model: &Model,
    outline: &Outline,
    outcome: &mut Outcome,
    requirement: &Requirement,
) -> Result<RequirementResult, SolveError> {
    let (w, current) = (requirement.winding, requirement.current);
    let density = scaled_density(model, outline, w, current);
    let width = linkage_width(outcome.bound.relative_width());
    let start = match model.windings[w].current {
        0.0 => start_at(outcome, 0.0),
        of_sheet => start_at(outcome, current / of_sheet),
    };
    let again = at_density(outcome, &density, &start, width)?;
    let unit = load(outcome, &unit_density(model, outline, w));
    let is_alone = carries_alone(model, w);
    let (inductance, ends) = match requirement.kind {
        InductanceKind::Apparent => {
            let x = outcome.space.restrict(&again.solution.vertex, &again.solution.edge);
            let ends = match is_alone {
                true => Some(apparent_ends(outcome, &density, &again, current)?),
                false => None,
            };
            (TAU * dot(&unit, &x) / current, ends)
        }
        InductanceKind::Incremental => {
            let rate: Vec<f64> = load(outcome, &density).iter().map(|b| b / current).collect();
            let slope = tangent(outcome, &again.elements, &unit, &rate)?;
            // Where nothing saturates both inductances are one number, and its ends are guaranteed.
            let ends = match is_alone && outcome.coefficients.is_linear() {
                true => Some(apparent_ends(outcome, &density, &again, current)?),
                false => None,
            };
            (slope, ends)
        }
    };
    Ok(verdict(model, requirement, inductance, ends))
}

/// True when winding w is the only one with current at the promised state.
fn carries_alone(model: &Model, w: usize) -> bool {
    model.windings[w].current == 0.0 || single_carrier(model) == Some(w)
}

/// Ends of λ/I from the coenergy at that state: 2W'/I² with constant laws, by convexity otherwise.
fn apparent_ends(
    outcome: &mut Outcome,
    density: &[AmperePerSquareMeter],
    again: &Again,
    current: Ampere,
) -> Result<[Henry; 2], SolveError> {
    let work_rate = match outcome.coefficients.is_linear() {
        true => [2.0 * again.bound.low, 2.0 * again.bound.high],
        false => rate_ends_at(outcome, density, &again.solution, &again.bound)?,
    };
    Ok(work_rate.map(|rate| rate / (current * current)))
}

/// The guaranteed ends decide where they can; where the limit lies between them, or nothing is guaranteed, the best
/// value does.
fn verdict(
    model: &Model,
    requirement: &Requirement,
    inductance: Henry,
    ends: Option<[Henry; 2]>,
) -> RequirementResult {
    let keeps = |l: Henry| {
        requirement.least.is_none_or(|least| least <= l)
            && requirement.most.is_none_or(|most| l <= most)
    };
    let breaks_surely = |[low, high]: [Henry; 2]| {
        requirement.least.is_some_and(|least| high < least)
            || requirement.most.is_some_and(|most| most < low)
    };
    let keeps_surely = ends.is_some_and(|ends| ends.into_iter().all(keeps));
    let (met, is_certain) = match ends {
        _ if keeps_surely => (true, true),
        Some(ends) if breaks_surely(ends) => (false, true),
        _ => (keeps(inductance), false),
    };
    RequirementResult {
        winding: model.windings[requirement.winding].name.clone(),
        current: requirement.current,
        incremental: requirement.kind == InductanceKind::Incremental,
        least: requirement.least,
        most: requirement.most,
        inductance,
        ends,
        met,
        is_certain,
    }
}

/// "the requirement on main at 3 A: the other currents scale along, aux to 1.2 A".
fn scaling_note(model: &Model, requirement: &Requirement) -> Option<String> {
    let of_sheet = model.windings[requirement.winding].current;
    let others: Vec<String> = (model.windings.iter().enumerate())
        .filter(|(w, winding)| *w != requirement.winding && winding.current != 0.0)
        .map(|(_, winding)| match of_sheet {
            0.0 => format!("{} to 0 A", winding.name),
            of_sheet => {
                let current = winding.current * requirement.current / of_sheet;
                format!("{} to {} A", winding.name, crate::units::number(current, 4))
            }
        })
        .collect();
    (!others.is_empty()).then(|| {
        let name = &model.windings[requirement.winding].name;
        let current = crate::units::number(requirement.current, 4);
        format!(
            "the requirement on {name} at {current} A is checked with the other currents scaled along: {}",
            others.join(", ")
        )
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    fn requirement(least: Option<Henry>, most: Option<Henry>) -> Requirement {
        Requirement { winding: 0, current: 3.0, kind: InductanceKind::Apparent, least, most }
    }

    #[track_caller]
    fn check(least: Option<f64>, most: Option<f64>, ends: Option<[f64; 2]>, wanted: (bool, bool)) {
        let model = crate::geometry::samples::r1();
        let found = verdict(&model, &requirement(least, most), 1.0, ends);
        assert_eq!((found.met, found.is_certain), wanted);
    }

    #[test]
    fn the_guaranteed_ends_decide_where_they_can() {
        let ends = Some([0.9, 1.2]);
        check(Some(0.8), None, ends, (true, true));
        check(Some(1.3), None, ends, (false, true));
        check(None, Some(0.8), ends, (false, true));
        check(Some(0.8), Some(1.5), ends, (true, true));
    }

    #[test]
    fn between_the_ends_the_best_value_decides_and_says_so() {
        check(Some(0.95), None, Some([0.9, 1.2]), (true, false));
        check(Some(1.1), None, Some([0.9, 1.2]), (false, false));
        check(Some(0.8), None, None, (true, false));
        check(Some(0.8), Some(0.9), None, (false, false));
    }
}

//! The same mesh at other currents: warm-started solves, and the guaranteed ends of the flux linkage by convexity.

use super::{ALGEBRAIC_SHARE, Outcome};
use crate::bound::{self, Bound, Field};
use crate::fem::{Element, Rules};
use crate::mesh::fans::Fans;
use crate::solve::{self, Effort, Solution, SolveError, System};
use crate::units::{AmperePerSquareMeter, Joule};

/// A field at other currents on an outcome's mesh.
#[derive(Debug, Clone, PartialEq)]
pub struct Again {
    pub solution: Solution,
    pub elements: Vec<Element>,
    pub bound: Bound,
    pub effort: Effort,
}

/// Solves on the outcome's mesh with all currents multiplied by `factor`, from the field `start`.
///
/// - `width`: the algebraic error stays below its usual share of this relative width
pub fn at_factor(
    outcome: &mut Outcome,
    factor: f64,
    start: &Solution,
    width: f64,
) -> Result<Again, SolveError> {
    let density: Vec<f64> =
        outcome.coefficients.current_density.iter().map(|j| j * factor).collect();
    at_density(outcome, &density, start, width)
}

/// Solves on the outcome's mesh with the current densities `density` [A/m²], one a region, from the field `start`.
///
/// The outcome itself stays as it is, but for the preconditioner's finest level.
pub fn at_density(
    outcome: &mut Outcome,
    density: &[AmperePerSquareMeter],
    start: &Solution,
    width: f64,
) -> Result<Again, SolveError> {
    let (mut solution, mut elements) = (start.clone(), outcome.elements.clone());
    let before = std::mem::replace(&mut outcome.coefficients.current_density, density.to_vec());
    let result = solve_and_bound(outcome, &mut solution, &mut elements, width);
    outcome.coefficients.current_density = before;
    let (effort, bound) = result?;
    Ok(Again { solution, elements, bound, effort })
}

fn solve_and_bound(
    outcome: &mut Outcome,
    solution: &mut Solution,
    elements: &mut [Element],
    width: f64,
) -> Result<(Effort, Bound), SolveError> {
    let rules = Rules::working();
    let Outcome { mesh, space, coefficients, hierarchy, .. } = outcome;
    let fans = Fans::new(mesh);
    let system = System { mesh, space, fans: &fans, coefficients, rules: &rules };
    let effort = solve::solve(&system, elements, hierarchy, solution, ALGEBRAIC_SHARE * width)?;
    let field = Field { mesh, coefficients, rules: &rules, elements, solution };
    Ok((effort, bound::bound(&field, &fans)))
}

/// Puts a field at the current densities `density` into the outcome's place, on the same mesh.
///
/// What belonged to the old currents goes: `work_rate_ends` becomes `None`; `rounds` stays as history.
pub fn adopt(outcome: &mut Outcome, density: &[AmperePerSquareMeter], again: Again) {
    outcome.coefficients.current_density.copy_from_slice(density);
    outcome.solution = again.solution;
    outcome.elements = again.elements;
    outcome.bound = again.bound;
    outcome.work_rate_ends = None;
}

/// The field multiplied by `factor`: the start for currents multiplied by it, and the answer where nothing saturates.
pub fn scaled(solution: &Solution, factor: f64) -> Solution {
    Solution {
        vertex: solution.vertex.iter().map(|v| v * factor).collect(),
        edge: solution.edge.iter().map(|v| v * factor).collect(),
    }
}

/// Guaranteed ends of dW'/ds at s = 1, where s scales all currents (with one current: λ·I).
///
/// W'(s) is convex, so (W'(1) − W'(1−δ))/δ ≤ dW'/ds ≤ (W'(1+δ) − W'(1))/δ, each W' taken at its safe end; δ = √η for the
/// relative width η of W' makes both terms of the error equal (design: the best width is about 2√η).
pub fn work_rate_ends(outcome: &mut Outcome) -> Result<[Joule; 2], SolveError> {
    let width = outcome.bound.relative_width();
    let step = width.max(1e-12).sqrt().min(0.5);
    let [below, above] = [1.0 - step, 1.0 + step].map(|factor| {
        let start = scaled(&outcome.solution, factor);
        at_factor(outcome, factor, &start, width)
    });
    let (below, above) = (below?, above?);
    Ok([
        (outcome.bound.low - below.bound.high) / step,
        (above.bound.high - outcome.bound.low) / step,
    ])
}

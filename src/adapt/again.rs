//! The same mesh at other currents: warm-started solves, and the guaranteed ends of the flux linkage by convexity.

use super::{ALGEBRAIC_SHARE, Outcome};
use crate::bound::{self, Bound, Field};
use crate::fem::{Elements, Rules};
use crate::solve::{self, Effort, Solution, SolveError, System};
use crate::units::{AmperePerSquareMeter, Joule};

/// A field at other currents on an outcome's mesh.
#[derive(Debug, Clone, PartialEq)]
pub struct Again {
    pub solution: Solution,
    pub elements: Elements,
    pub bound: Bound,
    pub effort: Effort,
}

/// Solves on the outcome's mesh with the current densities `density` [A/m²], one a region, from the field `start`.
///
/// - `width`: the algebraic error stays below its usual share of this relative width
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
    elements: &mut Elements,
    width: f64,
) -> Result<(Effort, Bound), SolveError> {
    let rules = Rules::working();
    let Outcome { mesh, fans, space, coefficients, hierarchy, .. } = outcome;
    let system = System { mesh, space, fans, coefficients, rules: &rules };
    let effort = solve::solve(&system, elements, hierarchy, solution, ALGEBRAIC_SHARE * width)?;
    let field = Field { mesh, coefficients, rules: &rules, elements, solution };
    Ok((effort, bound::bound(&field, fans)))
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

/// A start for the field at currents `factor` times those of the outcome.
///
/// A saturated core keeps its flux when the current changes a little: scaled along, it would be pushed far over the bend (8 Newton
/// steps instead of 5 were seen at −17 %). Far below, the scaled field is the nearer one.
pub fn start_at(outcome: &Outcome, factor: f64) -> Solution {
    match !outcome.coefficients.is_linear() && 0.5 < factor {
        true => outcome.solution.clone(),
        false => scaled(&outcome.solution, factor),
    }
}

/// Guaranteed ends of dW'/ds at s = 1, where s scales all currents (with one current: λ·I).
pub fn work_rate_ends(outcome: &mut Outcome) -> Result<[Joule; 2], SolveError> {
    let density = outcome.coefficients.current_density.clone();
    let (solution, bound) = (outcome.solution.clone(), outcome.bound.clone());
    rate_ends_at(outcome, &density, &solution, &bound)
}

/// [`work_rate_ends`] of another field on the outcome's mesh.
///
/// W'(s) is convex, so (W'(1) − W'(1−δ))/δ ≤ dW'/ds ≤ (W'(1+δ) − W'(1))/δ, each W' taken at its safe end; δ = √η for the
/// relative width η of W' makes both terms of the error equal: the best width is about 2√η.
pub fn rate_ends_at(
    outcome: &mut Outcome,
    density: &[AmperePerSquareMeter],
    solution: &Solution,
    bound: &Bound,
) -> Result<[Joule; 2], SolveError> {
    let width = bound.relative_width();
    let step = rate_step(width);
    let mut at = |factor: f64| {
        let density: Vec<f64> = density.iter().map(|j| j * factor).collect();
        at_density(outcome, &density, &scaled(solution, factor), width)
    };
    let (below, above) = (at(1.0 - step)?, at(1.0 + step)?);
    Ok([(bound.low - below.bound.high) / step, (above.bound.high - bound.low) / step])
}

/// The width to hand to [`at_density`] where the flux linkage is wanted, not only the coenergy.
///
/// λ errs like the field, the coenergy like its square: with η·min(10 %, 1000 η) the algebraic error of λ is at most
/// √(3e-5·1000)·η = 0.17 η, and 2 % of η where η is 0.5 %.
pub fn linkage_width(relative_width: f64) -> f64 {
    let width = relative_width.min(1.0);
    (width * (1000.0 * width).min(0.1)).max(1e-13)
}

/// δ = √η.
pub fn rate_step(relative_width: f64) -> f64 {
    relative_width.max(1e-12).sqrt().min(0.5)
}

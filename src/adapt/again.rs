//! The same mesh at other currents: warm-started solves, and the guaranteed ends of the flux linkage by convexity.

use super::{ALGEBRAIC_SHARE, Outcome};
use crate::bound::{self, Bound, Field};
use crate::fem::{Moments, Rules};
use crate::mesh::fans::Fans;
use crate::solve::{self, Effort, Solution, SolveError, System};
use crate::units::Joule;

/// A field at scaled currents on an outcome's mesh.
#[derive(Debug, Clone, PartialEq)]
pub struct Again {
    pub solution: Solution,
    pub moments: Vec<Moments>,
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
    let mut coefficients = outcome.coefficients.clone();
    coefficients.current_density.iter_mut().for_each(|j| *j *= factor);
    let rules = Rules::working();
    let (mut solution, mut moments) = (start.clone(), outcome.moments.clone());
    let system = System {
        mesh: &outcome.mesh,
        space: &outcome.space,
        coefficients: &coefficients,
        rules: &rules,
    };
    let effort = solve::solve(
        &system,
        &mut moments,
        &mut outcome.hierarchy,
        &mut solution,
        ALGEBRAIC_SHARE * width,
    )?;
    let field = Field {
        mesh: &outcome.mesh,
        coefficients: &coefficients,
        rules: &rules,
        moments: &moments,
        solution: &solution,
    };
    let bound = bound::bound(&field, &Fans::new(&outcome.mesh));
    Ok(Again { solution, moments, bound, effort })
}

/// Guaranteed ends of dW'/ds at s = 1, where s scales all currents (with one current: λ·I).
///
/// W'(s) is convex, so (W'(1) − W'(1−δ))/δ ≤ dW'/ds ≤ (W'(1+δ) − W'(1))/δ, each W' taken at its safe end; δ = √η for the
/// relative width η of W' makes both terms of the error equal (design: the best width is about 2√η).
pub fn work_rate_ends(outcome: &mut Outcome) -> Result<[Joule; 2], SolveError> {
    let width = outcome.bound.relative_width();
    let step = width.max(1e-12).sqrt().min(0.5);
    let scaled = |solution: &Solution, factor: f64| Solution {
        vertex: solution.vertex.iter().map(|v| v * factor).collect(),
        edge: solution.edge.iter().map(|v| v * factor).collect(),
    };
    let below = at_factor(outcome, 1.0 - step, &scaled(&outcome.solution, 1.0 - step), width)?;
    let above = at_factor(outcome, 1.0 + step, &scaled(&outcome.solution, 1.0 + step), width)?;
    Ok([
        (outcome.bound.low - below.bound.high) / step,
        (above.bound.high - outcome.bound.low) / step,
    ])
}

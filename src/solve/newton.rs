//! One field solution on one mesh: a single CG solve for constant laws, Newton with backtracking otherwise.

use super::Solution;
use crate::fem::element::{Frame, Pair};
use crate::fem::moments::{Saturated, energy_of_flux, linear_flux, rule_of, saturated};
use crate::fem::{Coefficients, Element, Elements, Reluctivity, Rules, Space, assemble, space};
use crate::mesh::Mesh;
use crate::mesh::fans::Fans;
use crate::sparse::cg::dot;
use crate::sparse::{
    CgError, Convergence, Hierarchy, Interpolation, Matrix, Multilevel, Stop, Swept,
};
use rayon::prelude::*;

/// Newton steps before giving up; the hardest laws of `tests/it/saturation` may need 25, the rest is reserve.
const N_NEWTON_MAX: usize = 60;
/// Halvings of one step before giving up: 2^-40 is far below any useful step.
const N_HALVINGS_MAX: usize = 40;
/// CG iterations before giving up; 20–40 are usual.
const N_CG_MAX: usize = 2000;
/// A Newton step is solved to this share of the energy that it lowers: the next one would find that much anyway.
const FORCING: f64 = 3e-4;
/// CG iterations of a Newton step above which the coarser levels are taken for stale (of another current) and rebuilt: good ones
/// need 2–6 for [`FORCING`].
const N_CG_STALE: usize = 12;
/// F rounds to about this share of itself: a smaller predicted decrease cannot be told from noise.
const ROUNDING: f64 = 1e-15;
/// Where no step lowers F, a predicted decrease below this share of 2|F| is the rounding of F's sum and means convergence.
const STALL_ROUNDING: f64 = 1e-12;
/// Sufficient decrease of F, as a share of the predicted one (Armijo).
const ARMIJO: f64 = 1e-4;

/// The discrete problem on one mesh.
#[derive(Debug, Clone, Copy)]
pub struct System<'a> {
    pub mesh: &'a Mesh,
    pub space: &'a Space,
    pub fans: &'a Fans,
    pub coefficients: &'a Coefficients,
    pub rules: &'a Rules,
}

/// What a solve used.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Effort {
    pub n_cg_iterations: usize,
    pub n_newton_steps: usize,
}

/// Why a solve failed.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum SolveError {
    #[error(transparent)]
    Linear(#[from] CgError),
    #[error("the coarsest matrix is not positive definite")]
    CoarseNotPositive,
    #[error(
        "newton iteration stalled after {n_steps} steps at a relative decrement of {decrement:.1e}, wanted {wanted:.1e}"
    )]
    Stalled { n_steps: usize, decrement: f64, wanted: f64 },
}

/// Improves `solution` until all further steps would lower F by less than about `decrease`·bᵀx.
///
/// - `elements`: constant laws' filled in; those of saturating triangles are set to the tangent at the solution
/// - `hierarchy`: levels of the earlier rounds in, this mesh's level added
pub fn solve(
    system: &System,
    elements: &mut Elements,
    hierarchy: &mut Hierarchy,
    solution: &mut Solution,
    decrease: f64,
) -> Result<Effort, SolveError> {
    let interpolation = interpolation(system.mesh, system.space);
    let load = assemble::load(system.mesh, system.space, system.coefficients);
    let mut x = system.space.restrict(&solution.vertex, &solution.edge);
    let effort = if system.coefficients.is_linear() {
        let matrix = assembled(system, elements, hierarchy);
        set_level(system, hierarchy, matrix.matrix(), &interpolation)?;
        let stop = Stop { outstanding: decrease, of_lowered: 0.0, n_iterations_max: N_CG_MAX };
        let convergence = iterate(hierarchy, &matrix, &load, &mut x, &stop, 0.0)?;
        hierarchy.work.storage = matrix.into_storage();
        Effort { n_cg_iterations: convergence.n_iterations, n_newton_steps: 0 }
    } else {
        newton(system, elements, hierarchy, &interpolation, &load, &mut x, decrease)?
    };
    (solution.vertex, solution.edge) = system.space.expand(system.mesh, &x);
    Ok(effort)
}

/// The matrix of the present elements, in the arrays of the last one.
fn assembled(system: &System, elements: &Elements, hierarchy: &mut Hierarchy) -> Swept {
    let storage = std::mem::take(&mut hierarchy.work.storage);
    Swept::new(assemble::stiffness(system.mesh, system.space, system.fans, elements, storage))
}

/// Conjugate gradients with the hierarchy's own workspace.
fn iterate(
    hierarchy: &mut Hierarchy,
    matrix: &Swept,
    b: &[f64],
    x: &mut [f64],
    stop: &Stop,
    scale: f64,
) -> Result<Convergence, CgError> {
    let mut work = std::mem::take(&mut hierarchy.work);
    let result = Multilevel::new(matrix, hierarchy, &mut work).solve(b, x, stop, scale);
    hierarchy.work = work;
    result
}

fn set_level(
    system: &System,
    hierarchy: &mut Hierarchy,
    matrix: &Matrix,
    interpolation: &[Interpolation],
) -> Result<(), SolveError> {
    match hierarchy.set_level(matrix, system.space.n_vertex_dofs, interpolation) {
        true => Ok(()),
        false => Err(SolveError::CoarseNotPositive),
    }
}

fn newton(
    system: &System,
    elements: &mut Elements,
    hierarchy: &mut Hierarchy,
    interpolation: &[Interpolation],
    load: &[f64],
    x: &mut Vec<f64>,
    decrease: f64,
) -> Result<Effort, SolveError> {
    let decrease = decrease.max(ROUNDING);
    let mut effort = Effort::default();
    let problem = Problem { system, load, saturating: saturating_triangles(system) };
    let mut state = State::new(&problem, elements, x);
    loop {
        state.store_tangents(&problem, elements);
        let matrix = assembled(system, elements, hierarchy);
        set_level(system, hierarchy, matrix.matrix(), interpolation)?;
        let residual: Vec<f64> = load.iter().zip(&state.force).map(|(b, g)| b - g).collect();
        // |F| bounds the coenergy from below; in the first step from zero there is nothing yet to compare with.
        let scale = 2.0 * state.value.abs();
        let mut step = vec![0.0; x.len()];
        let stop =
            Stop { outstanding: 0.1 * decrease, of_lowered: FORCING, n_iterations_max: N_CG_MAX };
        let convergence = iterate(hierarchy, &matrix, &residual, &mut step, &stop, scale)?;
        if N_CG_STALE < convergence.n_iterations && !hierarchy.renew(matrix.matrix()) {
            return Err(SolveError::CoarseNotPositive);
        }
        hierarchy.work.storage = matrix.into_storage();
        effort.n_cg_iterations += convergence.n_iterations;
        effort.n_newton_steps += 1;
        let predicted = dot(&residual, &step);
        let before = state.value;
        let Some(next) = backtrack(&problem, elements, x, &step, predicted, before) else {
            // No step lowers F: at the rounding floor that is convergence, elsewhere a stall.
            return match predicted <= STALL_ROUNDING * scale {
                true => Ok(effort),
                false => Err(stalled(&effort, predicted, scale, decrease)),
            };
        };
        state = next;
        if 0.5 * predicted <= decrease * 2.0 * state.value.abs() {
            state.store_tangents(&problem, elements);
            return Ok(effort);
        }
        if effort.n_newton_steps == N_NEWTON_MAX {
            return Err(stalled(&effort, predicted, scale, decrease));
        }
    }
}

fn stalled(effort: &Effort, predicted: f64, scale: f64, wanted: f64) -> SolveError {
    SolveError::Stalled { n_steps: effort.n_newton_steps, decrement: predicted / scale, wanted }
}

/// What stays the same over the steps.
struct Problem<'a> {
    system: &'a System<'a>,
    load: &'a [f64],
    /// Triangles with a saturating law, ascending.
    saturating: Vec<u32>,
}

fn saturating_triangles(system: &System) -> Vec<u32> {
    let saturates = |t: &u32| matches!(law_of(system, *t as usize), Reluctivity::Saturating(_));
    (0..system.mesh.triangles.len() as u32).filter(saturates).collect()
}

fn law_of<'a>(system: &System<'a>, t: usize) -> &'a Reluctivity {
    &system.coefficients.reluctivity[system.mesh.regions[t].0 as usize]
}

/// Halves the step until F falls enough; moves `x` and returns the new state.
fn backtrack(
    problem: &Problem,
    elements: &Elements,
    x: &mut Vec<f64>,
    step: &[f64],
    predicted: f64,
    before: f64,
) -> Option<State> {
    let mut length = 1.0;
    for _ in 0..N_HALVINGS_MAX {
        let trial: Vec<f64> = x.iter().zip(step).map(|(x, d)| x + length * d).collect();
        let state = State::new(problem, elements, &trial);
        if state.value <= before - ARMIJO * length * predicted {
            *x = trial;
            return Some(state);
        }
        length *= 0.5;
    }
    None
}

/// F/2π, its derivative's field part and its tangent at one x: one inversion of the law a quadrature point.
struct State {
    /// F/2π = Σ energy − bᵀx.
    value: f64,
    /// g_i = ∫ ∇φ_i·σ̂.
    force: Vec<f64>,
    /// Tangent matrices of the saturating triangles.
    tangents: Vec<Element>,
}

impl State {
    /// - `elements`: of the triangles with constant laws
    fn new(problem: &Problem, elements: &Elements, x: &[f64]) -> State {
        let system = problem.system;
        let (vertex, edge) = system.space.expand(system.mesh, x);
        let solution = Solution { vertex, edge };
        let parts = linear_parts(system, elements, &solution);
        let (mut flux, mut energy): (Vec<_>, Vec<_>) = parts.into_iter().unzip();
        let bent = evaluate_saturating(system, &problem.saturating, &solution);
        for (&t, part) in problem.saturating.iter().zip(&bent) {
            (flux[t as usize], energy[t as usize]) = (part.0, part.1);
        }
        let force = assemble::residual_of_flux(system.mesh, system.space, |t| flux[t]);
        let value = energy.iter().sum::<f64>() - dot(problem.load, x);
        State { value, force, tangents: bent.into_iter().map(|part| part.2).collect() }
    }

    fn store_tangents(&self, problem: &Problem, elements: &mut Elements) {
        for (&t, tangent) in problem.saturating.iter().zip(&self.tangents) {
            elements.set(t as usize, tangent);
        }
    }
}

/// Flux elements and energy of the triangles with constant laws; zeros elsewhere.
fn linear_parts(
    system: &System,
    elements: &Elements,
    solution: &Solution,
) -> Vec<([Pair; 3], f64)> {
    let part = |t: usize| match law_of(system, t) {
        Reluctivity::Constant(_) => {
            let gradients = solution.gradients(system.mesh, t);
            let flux = linear_flux(&elements.k[t], &gradients);
            (flux, energy_of_flux(&flux, &gradients))
        }
        Reluctivity::Saturating(_) => ([[0.0; 2]; 3], 0.0),
    };
    (0..system.mesh.triangles.len()).into_par_iter().with_min_len(2048).map(part).collect()
}

/// Flux moments, energy and tangent matrices of the triangles with saturating laws.
fn evaluate_saturating(
    system: &System,
    triangles: &[u32],
    solution: &Solution,
) -> Vec<([Pair; 3], f64, Element)> {
    let part = |&t: &u32| {
        let t = t as usize;
        let Reluctivity::Saturating(law) = law_of(system, t) else {
            unreachable!("triangle {t} has a constant law")
        };
        let frame = Frame::new(system.mesh, t);
        let gradients = solution.gradients(system.mesh, t);
        let Saturated { flux, energy, tangent } =
            saturated(&frame, rule_of(system.rules, &frame), law, &gradients);
        (flux, energy, Element::new(&frame, &tangent))
    };
    triangles.par_iter().with_min_len(128).map(part).collect()
}

/// How each vertex unknown follows from its parents: ½, ½; next to the axis ¼ of the off-axis end, since ψ ∝ t².
fn interpolation(mesh: &Mesh, space: &Space) -> Vec<Interpolation> {
    let mut all = Vec::with_capacity(space.n_vertex_dofs);
    for (v, &d) in space.vertex_dof.iter().enumerate() {
        if d == space::NONE {
            continue;
        }
        let dof = |p: u32| space.vertex_dof.get(p as usize).copied().unwrap_or(space::NONE);
        let [p, q] = mesh.parents[v].map(dof);
        all.push(match (p, q) {
            (space::NONE, space::NONE) => Interpolation::default(),
            (p, space::NONE) => Interpolation { parents: [p, 0], weights: [0.25, 0.0] },
            (space::NONE, q) => Interpolation { parents: [q, 0], weights: [0.25, 0.0] },
            (p, q) => Interpolation { parents: [p, q], weights: [0.5, 0.5] },
        });
    }
    all
}

//! The rounds: solve → bound → refine, until the interval is as narrow as wanted.

pub mod again;
mod mark;

use crate::bound::{self, Bound, Field};
use crate::fem::moments::update_constant;
use crate::fem::{Coefficients, Moments, Reluctivity, Rules, Space};
use crate::geometry::{Outline, Region};
use crate::mesh::bisect::{Carried, bisect};
use crate::mesh::fans::Fans;
use crate::mesh::{Mesh, MeshError, first_mesh};
use crate::model::{Accuracy, Law, Model};
use crate::solve::{self, Effort, Solution, SolveError, System};
use crate::sparse::Hierarchy;
use crate::units::{Joule, MU0};

/// The algebraic error may use this share of the interval (design: 1e-3 · 0.3). A cost setting, not a safety setting.
const ALGEBRAIC_SHARE: f64 = 3e-4;
/// Dörfler's share of the total that the marked triangles hold.
const MARKED_SHARE: f64 = 0.7;
/// Rounds before giving up: each divides the interval by about 2, so 60 reach rounding from anywhere.
const N_ROUNDS_MAX: usize = 60;

/// One finished round.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Round {
    pub n_unknowns: usize,
    pub n_triangles: usize,
    pub effort: Effort,
    /// Guaranteed ends of the coenergy.
    pub low: Joule,
    pub high: Joule,
}

/// The last round's field and what was reached.
#[derive(Debug)]
pub struct Outcome {
    pub mesh: Mesh,
    pub space: Space,
    pub coefficients: Coefficients,
    pub solution: Solution,
    /// Moments at the solution: constant, or the tangent.
    pub moments: Vec<Moments>,
    pub bound: Bound,
    pub rounds: Vec<Round>,
    /// Levels of the preconditioner, for further solves on this mesh.
    pub hierarchy: Hierarchy,
    /// Guaranteed ends of dW'/ds at s = 1, all currents scaled by s; `None` with constant laws, where it is 2W'.
    pub work_rate_ends: Option<[Joule; 2]>,
    /// False when `n_unknowns_max` stopped the rounds before the wanted width.
    pub reached: bool,
}

/// Why the rounds failed.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum AdaptError {
    #[error(transparent)]
    Mesh(#[from] MeshError),
    #[error(transparent)]
    Solve(#[from] SolveError),
}

/// Solves `model` in its `outline` to the wanted interval; `progress` sees every finished round.
pub fn run(
    model: &Model,
    outline: &Outline,
    progress: &mut dyn FnMut(&Round),
) -> Result<Outcome, AdaptError> {
    let coefficients = coefficients(model, &outline.regions);
    let mesh = first_mesh(outline)?;
    let solution =
        Solution { vertex: vec![0.0; mesh.points.len()], edge: vec![0.0; mesh.edges.len()] };
    let mut outcome =
        rounds(mesh, coefficients, solution, &Rules::working(), &model.accuracy, progress)?;
    if !outcome.coefficients.is_linear() {
        outcome.work_rate_ends = Some(again::work_rate_ends(&mut outcome)?);
    }
    Ok(outcome)
}

/// Law and current density of every region.
pub fn coefficients(model: &Model, regions: &[Region]) -> Coefficients {
    let reluctivity = |region: &Region| match region
        .material
        .map(|id| &model.materials[id.0 as usize].law)
    {
        None => Reluctivity::Constant(1.0 / (MU0 * region.permeability)),
        Some(Law::Constant { permeability }) => Reluctivity::Constant(1.0 / (MU0 * permeability)),
        Some(law) => Reluctivity::Saturating(law.clone()),
    };
    Coefficients {
        reluctivity: regions.iter().map(reluctivity).collect(),
        current_density: regions.iter().map(|r| r.current_density).collect(),
    }
}

/// The rounds themselves, from any conforming mesh and start field.
pub fn rounds(
    mut mesh: Mesh,
    coefficients: Coefficients,
    mut solution: Solution,
    rules: &Rules,
    accuracy: &Accuracy,
    progress: &mut dyn FnMut(&Round),
) -> Result<Outcome, AdaptError> {
    let mut hierarchy = Hierarchy::default();
    let mut moments: Vec<Moments> = Vec::new();
    let mut changed: Vec<u32> = (0..mesh.triangles.len() as u32).collect();
    let mut rounds: Vec<Round> = Vec::new();
    // Before the first bound nothing is known; 1 means an interval as wide as the value.
    let mut width: f64 = 1.0;
    loop {
        let space = Space::new(&mesh);
        update_constant(&mesh, &coefficients, rules, &changed, &mut moments);
        let decrease = ALGEBRAIC_SHARE * width.clamp(accuracy.interval, 1.0);
        let system = System { mesh: &mesh, space: &space, coefficients: &coefficients, rules };
        let effort = solve::solve(&system, &mut moments, &mut hierarchy, &mut solution, decrease)?;

        let fans = Fans::new(&mesh);
        let field = Field {
            mesh: &mesh,
            coefficients: &coefficients,
            rules,
            moments: &moments,
            solution: &solution,
        };
        let bound = bound::bound(&field, &fans);
        width = bound.relative_width();
        let round = Round {
            n_unknowns: space.n_dofs,
            n_triangles: mesh.triangles.len(),
            effort,
            low: bound.low,
            high: bound.high,
        };
        progress(&round);
        rounds.push(round);

        let reached = width <= accuracy.interval;
        let n_marked_max = mark::affordable(space.n_dofs, accuracy.n_unknowns_max);
        if reached || n_marked_max == 0 || rounds.len() == N_ROUNDS_MAX {
            let work_rate_ends = None;
            return Ok(Outcome {
                mesh,
                space,
                coefficients,
                solution,
                moments,
                bound,
                rounds,
                hierarchy,
                work_rate_ends,
                reached,
            });
        }
        let mut marked = mark::doerfler(&bound.shares, MARKED_SHARE);
        marked.truncate(n_marked_max);
        let mut carried = Carried { vertex: &mut solution.vertex, edge: &mut solution.edge };
        changed = bisect(&mut mesh, &marked, &mut carried);
    }
}

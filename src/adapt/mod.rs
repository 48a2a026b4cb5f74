//! The rounds: solve → bound → refine, until the interval is as narrow as wanted.

pub mod again;
mod mark;
mod watch;

pub use watch::Watch;

use crate::bound::{self, Bound, Field};
use crate::fem::{Coefficients, Elements, Reluctivity, Rules, Space};
use crate::geometry::{Outline, Region};
use crate::mesh::bisect::{Carried, bisect};
use crate::mesh::fans::Fans;
use crate::mesh::{Mesh, MeshError, first_mesh};
use crate::model::{Accuracy, Law, Model, Point};
use crate::solve::{self, Effort, Solution, SolveError, System};
use crate::sparse::Hierarchy;
use crate::units::{Joule, MU0};

/// The algebraic error may use this share of the interval: its square root, 0.6 %, is what it may add to the
/// error in norm. A cost setting, not a safety setting.
const ALGEBRAIC_SHARE: f64 = 3e-5;
/// Dörfler's share of the total that the marked triangles hold.
const MARKED_SHARE: f64 = 0.7;
/// Rounds at the probes alone; each halves their triangles. On the axis and towards infinity a triangle's own share falls
/// slowly or not at all, so the number is what bounds the work.
const N_SHARPENINGS_MAX: usize = 5;
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

/// The parts of a round, for callers that keep time.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Stage {
    FirstMesh,
    /// Moments and matrices of new triangles.
    Elements,
    /// Assembly, levels and iteration.
    Solve,
    Bound,
    /// Marking and bisection.
    Refine,
}

/// What the rounds tell while they run; no stage reads a clock, the caller may.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Event<'a> {
    Finished(Stage),
    Round(&'a Round),
}

/// The last round's field and what was reached.
#[derive(Debug)]
pub struct Outcome {
    pub mesh: Mesh,
    /// Adjacency of that mesh.
    pub fans: Fans,
    pub space: Space,
    pub coefficients: Coefficients,
    pub solution: Solution,
    /// At the solution: of the constant coefficient, or of the tangent.
    pub elements: Elements,
    pub bound: Bound,
    pub rounds: Vec<Round>,
    /// Levels of the preconditioner, for further solves on this mesh.
    pub hierarchy: Hierarchy,
    /// Guaranteed ends of dW'/ds at s = 1, all currents scaled by s; `None` with constant laws, where it is 2W'.
    pub work_rate_ends: Option<[Joule; 2]>,
    /// Where triangles reached the size of rounding before the interval closed: no mesh resolves the field there.
    pub unresolved: Option<Point>,
    /// Places that ask for their own triangles.
    pub watch: Watch,
    /// False when `n_unknowns_max` stopped the rounds before the wanted width.
    pub reached: bool,
}

impl Outcome {
    /// Before the first round: a mesh and a start field.
    fn new(mesh: Mesh, coefficients: Coefficients, solution: Solution, watch: Watch) -> Outcome {
        Outcome {
            mesh,
            fans: Fans::default(),
            space: Space::default(),
            coefficients,
            solution,
            elements: Elements::default(),
            bound: Bound::default(),
            rounds: Vec::new(),
            hierarchy: Hierarchy::default(),
            work_rate_ends: None,
            unresolved: None,
            watch,
            reached: false,
        }
    }
}

/// Why the rounds failed.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum AdaptError {
    #[error(transparent)]
    Mesh(#[from] MeshError),
    #[error(transparent)]
    Solve(#[from] SolveError),
}

/// Solves `model` in its `outline` to the wanted interval; `progress` hears of every finished part and round.
pub fn run(
    model: &Model,
    outline: &Outline,
    progress: &mut dyn FnMut(Event),
) -> Result<Outcome, AdaptError> {
    let coefficients = coefficients(model, &outline.regions);
    let mesh = first_mesh(outline)?;
    progress(Event::Finished(Stage::FirstMesh));
    let solution = Solution::zero(&mesh);
    let rules = Rules::working();
    let mut outcome = Outcome::new(mesh, coefficients, solution, Watch::of(model));
    first_round(&mut outcome, &rules, &model.accuracy, progress)?;
    refine(&mut outcome, &rules, &model.accuracy, progress)?;
    sharpen(&mut outcome, &rules, &model.accuracy, progress)?;
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
    mesh: Mesh,
    coefficients: Coefficients,
    solution: Solution,
    rules: &Rules,
    accuracy: &Accuracy,
    progress: &mut dyn FnMut(Event),
) -> Result<Outcome, AdaptError> {
    let mut outcome = Outcome::new(mesh, coefficients, solution, Watch::default());
    first_round(&mut outcome, rules, accuracy, progress)?;
    refine(&mut outcome, rules, accuracy, progress)?;
    Ok(outcome)
}

fn first_round(
    outcome: &mut Outcome,
    rules: &Rules,
    accuracy: &Accuracy,
    progress: &mut dyn FnMut(Event),
) -> Result<(), AdaptError> {
    let all: Vec<u32> = (0..outcome.mesh.triangles.len() as u32).collect();
    // Before the first bound nothing is known; 1 means an interval as wide as the value.
    round(outcome, &all, 1.0, rules, accuracy, progress)
}

/// Goes on with the rounds from the outcome as it stands until its interval is as narrow as wanted.
///
/// Sets `reached`; stops without an error where `n_unknowns_max` leaves no room. An outcome that is narrow enough is
/// left as it is.
pub fn refine(
    outcome: &mut Outcome,
    rules: &Rules,
    accuracy: &Accuracy,
    progress: &mut dyn FnMut(Event),
) -> Result<(), AdaptError> {
    for _ in 1..N_ROUNDS_MAX {
        let width = outcome.bound.relative_width();
        outcome.reached = width <= accuracy.interval;
        let n_marked_max = mark::affordable(outcome.space.n_dofs, accuracy.n_unknowns_max);
        if outcome.reached || n_marked_max == 0 {
            return Ok(());
        }
        let mut marked = mark::doerfler(&outcome.bound.shares, MARKED_SHARE);
        let worst = marked.first().copied();
        let is_divisible = |t: &u32| mark::is_divisible(&outcome.mesh, *t as usize);
        marked.retain(is_divisible);
        if marked.is_empty() {
            outcome.unresolved = worst.map(|t| outcome.mesh.corners(t as usize)[0]);
            return Ok(());
        }
        marked.extend(watch::hot_triangles(outcome));
        marked.extend(watch::probe_triangles(outcome).into_iter().filter(is_divisible));
        // What does not fit any more is what the interval needs least, and the probes.
        marked.truncate(n_marked_max);
        cut(outcome, &marked, rules, accuracy, progress)?;
    }
    outcome.reached = outcome.bound.relative_width() <= accuracy.interval;
    Ok(())
}

/// Further rounds at the probes alone, once the interval is as narrow as wanted.
fn sharpen(
    outcome: &mut Outcome,
    rules: &Rules,
    accuracy: &Accuracy,
    progress: &mut dyn FnMut(Event),
) -> Result<(), AdaptError> {
    for _ in 0..N_SHARPENINGS_MAX {
        let mut marked = watch::probe_triangles(outcome);
        marked.retain(|&t| mark::is_divisible(&outcome.mesh, t as usize));
        let room = mark::affordable(outcome.space.n_dofs, accuracy.n_unknowns_max);
        if !outcome.reached || marked.is_empty() || room < marked.len() {
            return Ok(());
        }
        cut(outcome, &marked, rules, accuracy, progress)?;
    }
    Ok(())
}

/// Bisects the marked triangles and does a round on the new mesh.
fn cut(
    outcome: &mut Outcome,
    marked: &[u32],
    rules: &Rules,
    accuracy: &Accuracy,
    progress: &mut dyn FnMut(Event),
) -> Result<(), AdaptError> {
    let width = outcome.bound.relative_width();
    let solution = &mut outcome.solution;
    let mut carried = Carried { vertex: &mut solution.vertex, edge: &mut solution.edge };
    let pairs = &outcome.fans.edge_triangles;
    let changes = bisect(&mut outcome.mesh, pairs, marked, &mut carried);
    progress(Event::Finished(Stage::Refine));
    outcome.elements.renumber(&changes.origin);
    round(outcome, &changes.fresh, width, rules, accuracy, progress)
}

/// One solve and bound on the outcome's mesh, of which the triangles `fresh` are new.
///
/// - `width`: relative width before, which sets the algebraic accuracy
fn round(
    outcome: &mut Outcome,
    fresh: &[u32],
    width: f64,
    rules: &Rules,
    accuracy: &Accuracy,
    progress: &mut dyn FnMut(Event),
) -> Result<(), AdaptError> {
    let Outcome { mesh, fans, space, coefficients, solution, elements, bound, hierarchy, .. } =
        outcome;
    *space = Space::new(mesh);
    elements.update_constant(mesh, coefficients, rules, fresh);
    let decrease = ALGEBRAIC_SHARE * width.clamp(accuracy.interval, 1.0);
    progress(Event::Finished(Stage::Elements));
    *fans = Fans::new(mesh);
    let system = System { mesh, space, fans, coefficients, rules };
    let effort = solve::solve(&system, elements, hierarchy, solution, decrease)?;
    progress(Event::Finished(Stage::Solve));
    *bound = bound::bound(&Field { mesh, coefficients, rules, elements, solution }, fans);
    let round = Round {
        n_unknowns: space.n_dofs,
        n_triangles: mesh.triangles.len(),
        effort,
        low: bound.low,
        high: bound.high,
    };
    progress(Event::Finished(Stage::Bound));
    progress(Event::Round(&round));
    outcome.rounds.push(round);
    Ok(())
}

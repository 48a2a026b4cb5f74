//! Time of every stage of a run. The stages themselves read no clock, so the rounds are walked here step by step; the
//! walk must end where `adapt::run` ends, to the last bit.

use gapwright::adapt::{self, Outcome};
use gapwright::bound::{self, Field};
use gapwright::fem::{Moments, Rules, Space, assemble, moments::update_constant};
use gapwright::geometry::Outline;
use gapwright::mesh::bisect::{Carried, bisect};
use gapwright::mesh::fans::Fans;
use gapwright::mesh::first_mesh;
use gapwright::model::Model;
use gapwright::report::vtk::{FieldCells, field_vtu};
use gapwright::results::{collect, sample::Sampler};
use gapwright::solve::{self, Solution, System};
use gapwright::sparse::Hierarchy;
use std::time::Instant;

/// Stages in the order of the pipeline.
pub const NAMES: [&str; 7] = ["mesh", "assembly", "solve", "bound", "refine", "results", "report"];

/// Share of the total that marked triangles hold, share of the interval left to the algebra, unknowns a mark brings:
/// the constants of `adapt`, which keeps them private; the callers notice when they change.
const MARKED_SHARE: f64 = 0.7;
const ALGEBRAIC_SHARE: f64 = 3e-4;
const N_UNKNOWNS_A_MARK: usize = 12;

/// Seconds of each stage, summed over the rounds.
#[derive(Debug, Clone, Copy, Default)]
pub struct Stages {
    pub seconds: [f64; 7],
}

/// Where a walk ended.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct End {
    pub n_unknowns: usize,
    pub low: f64,
    pub high: f64,
}

/// The end of a finished run.
pub fn end_of(outcome: &Outcome) -> End {
    let (low, high) = (outcome.bound.low, outcome.bound.high);
    End { n_unknowns: outcome.space.n_dofs, low, high }
}

/// Adds the seconds that `work` takes to stage `stage`.
fn timed<T>(stages: &mut Stages, stage: usize, work: impl FnOnce() -> T) -> T {
    let start = Instant::now();
    let value = work();
    stages.seconds[stage] += start.elapsed().as_secs_f64();
    value
}

/// Walks the rounds of a linear model and books every stage.
///
/// `solve::solve` assembles too: the stiffness is assembled once more on the side, its time booked as assembly and taken
/// from the solve.
pub fn walk(model: &Model, outline: &Outline) -> (Stages, End) {
    let mut stages = Stages::default();
    let coefficients = adapt::coefficients(model, &outline.regions);
    let mut mesh = timed(&mut stages, 0, || first_mesh(outline)).unwrap();
    let rules = Rules::working();
    let mut solution =
        Solution { vertex: vec![0.0; mesh.points.len()], edge: vec![0.0; mesh.edges.len()] };
    let (mut hierarchy, mut moments) = (Hierarchy::default(), Vec::<Moments>::new());
    let mut changed: Vec<u32> = (0..mesh.triangles.len() as u32).collect();
    let mut width: f64 = 1.0;
    loop {
        let space = timed(&mut stages, 1, || {
            update_constant(&mesh, &coefficients, &rules, &changed, &mut moments);
            Space::new(&mesh)
        });
        let before = stages.seconds[1];
        timed(&mut stages, 1, || assemble::stiffness(&mesh, &space, &moments));
        let assembling = stages.seconds[1] - before;
        let system =
            System { mesh: &mesh, space: &space, coefficients: &coefficients, rules: &rules };
        let decrease = ALGEBRAIC_SHARE * width.clamp(model.accuracy.interval, 1.0);
        timed(&mut stages, 2, || {
            solve::solve(&system, &mut moments, &mut hierarchy, &mut solution, decrease)
        })
        .unwrap();
        stages.seconds[2] -= assembling;
        let bound = timed(&mut stages, 3, || {
            let field = Field {
                mesh: &mesh,
                coefficients: &coefficients,
                rules: &rules,
                moments: &moments,
                solution: &solution,
            };
            bound::bound(&field, &Fans::new(&mesh))
        });
        width = bound.relative_width();
        let n_marked_max =
            model.accuracy.n_unknowns_max.saturating_sub(space.n_dofs) / N_UNKNOWNS_A_MARK;
        if width <= model.accuracy.interval || n_marked_max == 0 {
            return (stages, End { n_unknowns: space.n_dofs, low: bound.low, high: bound.high });
        }
        changed = timed(&mut stages, 4, || {
            let mut marked = mark(&bound.shares);
            marked.truncate(n_marked_max);
            let mut carried = Carried { vertex: &mut solution.vertex, edge: &mut solution.edge };
            bisect(&mut mesh, &marked, &mut carried)
        });
    }
}

/// Dörfler's marking, as `adapt` does it.
fn mark(shares: &[f64]) -> Vec<u32> {
    let mut order: Vec<u32> = (0..shares.len() as u32).collect();
    order.sort_unstable_by(|&a, &b| {
        shares[b as usize].total_cmp(&shares[a as usize]).then(a.cmp(&b))
    });
    let total: f64 = shares.iter().map(|s| s.max(0.0)).sum();
    let mut sum = 0.0;
    let needed = order.iter().take_while(|&&t| {
        let is_needed = sum < MARKED_SHARE * total;
        sum += shares[t as usize].max(0.0);
        is_needed
    });
    let n = needed.count().max(1);
    order.truncate(n);
    order
}

/// Books results and the VTK file of a finished run.
pub fn finish(stages: &mut Stages, model: &Model, outline: &Outline, outcome: &Outcome) {
    timed(stages, 5, || collect(model, outline, outcome));
    let bytes = timed(stages, 6, || {
        let values = Sampler::new(outline, outcome).cell_values();
        let cells = FieldCells {
            b: values.b,
            h: values.h,
            permeability: values.permeability,
            share: outcome.bound.shares.clone(),
        };
        field_vtu(&outcome.mesh, &outcome.solution, &cells).unwrap()
    });
    assert!(!bytes.is_empty());
}

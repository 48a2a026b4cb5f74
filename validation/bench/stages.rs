//! Time of every stage of a run: the rounds tell when a part has ended, the clock is here.

use gapwright::adapt::{self, Event, Outcome, Stage};
use gapwright::geometry::Outline;
use gapwright::model::Model;
use gapwright::report::vtk::field_vtu;
use gapwright::results::{collect, sample::Sampler};
use std::time::Instant;

/// Stages in the order of the pipeline. `elements` makes the matrices of new triangles, `solve` gathers the rows, adds
/// the level and iterates.
pub const NAMES: [&str; 7] = ["mesh", "elements", "solve", "bound", "refine", "results", "report"];

/// Seconds of each stage, summed over the rounds.
#[derive(Debug, Clone, Copy, Default)]
pub struct Stages {
    pub seconds: [f64; 7],
}

impl Stages {
    /// Seconds of the rounds alone: all but results and report.
    pub fn computing(&self) -> f64 {
        self.seconds[..5].iter().sum()
    }
}

fn index(stage: Stage) -> usize {
    match stage {
        Stage::FirstMesh => 0,
        Stage::Elements => 1,
        Stage::Solve => 2,
        Stage::Bound => 3,
        Stage::Refine => 4,
    }
}

/// Runs the rounds and books their stages.
pub fn run(model: &Model, outline: &Outline) -> (Stages, Outcome) {
    let mut stages = Stages::default();
    let mut last = Instant::now();
    let outcome = adapt::run(model, outline, &mut |event| {
        if let Event::Finished(stage) = event {
            let now = Instant::now();
            stages.seconds[index(stage)] += (now - last).as_secs_f64();
            last = now;
        }
    });
    (stages, outcome.unwrap_or_else(|error| panic!("{error}")))
}

/// Books results and the VTK file of a finished run.
pub fn finish(stages: &mut Stages, model: &Model, outline: &Outline, outcome: &Outcome) {
    let start = Instant::now();
    std::hint::black_box(collect(model, outline, outcome));
    stages.seconds[5] = start.elapsed().as_secs_f64();
    let start = Instant::now();
    let cells = Sampler::new(outline, outcome).cell_values();
    let bytes = field_vtu(&outcome.mesh, &outcome.solution, &cells, &outcome.bound.shares).unwrap();
    stages.seconds[6] = start.elapsed().as_secs_f64();
    assert!(!bytes.is_empty());
}

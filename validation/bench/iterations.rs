//! How many conjugate-gradient iterations the preconditioner needs from a zero start, against size, contrast and gap.

use super::cases::{self, Goal};
use gapwright::adapt::Outcome;
use gapwright::fem::assemble;
use gapwright::mesh::fans::Fans;
use gapwright::sparse::cg::dot;
use gapwright::sparse::{Multilevel, Stop, Storage, Swept, Workspace};
use std::cell::RefCell;

/// Relative error of the energy, ‖x − x*‖²_A/‖x*‖²_A, that counts as solved.
pub const ENERGY_ERROR: f64 = 1e-10;

/// The last round's system, ready to be solved again from zero.
pub struct LastSystem<'a> {
    pub outcome: &'a Outcome,
    pub matrix: Swept,
    pub load: Vec<f64>,
    work: RefCell<Workspace>,
}

/// Iterations from zero on one matrix.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Count {
    pub n_unknowns: usize,
    /// For a relative energy error of 1e-10.
    pub by_energy: usize,
    /// For a relative error of 1e-10 in the energy norm, whose square that is: 1e-20 of the energy.
    pub by_norm: usize,
    /// Of the rounds' own solve on this matrix: warm start, needed accuracy.
    pub warm: usize,
}

impl<'a> LastSystem<'a> {
    /// Assembles the last round's system again.
    pub fn new(outcome: &'a Outcome) -> LastSystem<'a> {
        let fans = Fans::new(&outcome.mesh);
        let Outcome { mesh, space, elements, .. } = outcome;
        let matrix = assemble::stiffness(mesh, space, &fans, elements, Storage::default());
        let load = assemble::load(&outcome.mesh, &outcome.space, &outcome.coefficients);
        LastSystem { outcome, matrix: Swept::new(matrix), load, work: RefCell::default() }
    }

    /// The iterate from zero after `n_iterations_max` iterations or at the wanted error, and how many were used.
    pub fn solve(&self, outstanding: f64, n_iterations_max: usize) -> (Vec<f64>, usize) {
        let mut work = self.work.borrow_mut();
        let stop = Stop { outstanding, of_lowered: 0.0, n_iterations_max };
        let mut x = vec![0.0; self.load.len()];
        let used = Multilevel::new(&self.matrix, &self.outcome.hierarchy, &mut work)
            .solve(&self.load, &mut x, &stop, 0.0);
        let n_iterations = used.map_or(n_iterations_max, |c| c.n_iterations);
        (x, n_iterations)
    }

    /// ‖x − exact‖²_A/‖exact‖²_A.
    pub fn energy_error(&self, x: &[f64], exact: &[f64]) -> f64 {
        let difference: Vec<f64> = x.iter().zip(exact).map(|(x, e)| x - e).collect();
        self.square(&difference) / self.square(exact)
    }

    fn square(&self, x: &[f64]) -> f64 {
        let mut product = vec![0.0; x.len()];
        self.matrix.multiply(x, &mut product);
        dot(x, &product)
    }

    /// Fewest iterations from zero with an energy error of at most `wanted`; the error falls with every iteration.
    pub fn fewest(&self, exact: &[f64], wanted: f64, n_enough: usize) -> usize {
        let (mut too_few, mut enough) = (0, n_enough);
        while too_few + 1 < enough {
            let middle = too_few.midpoint(enough);
            let (x, _) = self.solve(0.0, middle);
            match self.energy_error(&x, exact) <= wanted {
                true => enough = middle,
                false => too_few = middle,
            }
        }
        enough
    }
}

/// Counts on the last matrix of a finished run; the exact solution is the iteration's own, run to rounding.
pub fn count(outcome: &Outcome) -> Count {
    let system = LastSystem::new(outcome);
    let (exact, n_enough) = system.solve(1e-25, 400);
    Count {
        n_unknowns: outcome.space.n_dofs,
        by_energy: system.fewest(&exact, ENERGY_ERROR, n_enough),
        by_norm: system.fewest(&exact, ENERGY_ERROR * ENERGY_ERROR, n_enough),
        warm: outcome.rounds.last().map_or(0, |round| round.effort.n_cg_iterations),
    }
}

/// Counts on the gapped pot core R1 with another permeability and gap [mm], refined to about `n_unknowns`.
pub fn count_pot(permeability: f64, gap_mm: f64, n_unknowns: usize) -> Count {
    let text = pot_sheet(permeability, gap_mm);
    let (model, outline) = cases::model(&text, Goal::Unknowns(n_unknowns));
    count(&cases::run(&model, &outline))
}

/// R1's sheet with another permeability and gap. Panics when the sheet no longer has the two lines.
fn pot_sheet(permeability: f64, gap_mm: f64) -> String {
    let text = cases::sheet_text("buoy_choke");
    let swap = |text: String, from: &str, to: String| {
        assert!(text.contains(from), "the sheet has no {from:?}");
        text.replace(from, &to)
    };
    let text = swap(text, "permeability = 2000", format!("permeability = {permeability}"));
    swap(text, "length = 0.30", format!("length = {gap_mm}"))
}

/// Gap of 1e-4 of the core's radius (12.75 mm) [mm].
pub const THIN_GAP_MM: f64 = 1.275e-3;

/// Permeabilities of the study.
pub const PERMEABILITIES: [f64; 6] = [1.0, 10.0, 100.0, 1e3, 1e4, 1e5];

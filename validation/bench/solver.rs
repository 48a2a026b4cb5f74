//! Conjugate gradients against a general sparse Cholesky on the same final matrices, one thread.

use super::cases::{self, Case, Goal};
use super::direct;
use super::iterations::{ENERGY_ERROR, LastSystem};
use super::run::{median, n_runs};
use serde_json::{Value, json};
use std::time::Instant;

/// Iterations that are enough for anything asked here; more would show as this number in the table.
const N_ENOUGH: usize = 64;

/// Both solvers on the last matrix of a case.
pub fn measure(case: Case, goal: Goal) -> Value {
    let (model, outline) = cases::model(&cases::sheet_text(case.sheet), goal);
    let pool = rayon::ThreadPoolBuilder::new().num_threads(1).build().unwrap();
    pool.install(|| {
        let outcome = cases::run(&model, &outline);
        let system = LastSystem::new(&outcome);
        let columns = direct::columns(system.matrix.matrix());
        let exact = direct::solve(&columns, &system.load).x;
        let n_exact = system.fewest(&exact, ENERGY_ERROR, N_ENOUGH);
        let n_norm = system.fewest(&exact, ENERGY_ERROR * ENERGY_ERROR, N_ENOUGH);
        let n_needed = outcome.rounds.last().map_or(0, |r| r.effort.n_cg_iterations);
        let (mut ours, mut norm, mut needed, mut steps) = (vec![], vec![], vec![], vec![]);
        for _ in 0..n_runs(outcome.space.n_dofs) {
            ours.push(timed(|| system.solve(0.0, n_exact)));
            norm.push(timed(|| system.solve(0.0, n_norm)));
            needed.push(timed(|| system.solve(0.0, n_needed)));
            steps.push(direct::solve(&columns, &system.load));
        }
        let (ours, norm, needed) = (median(ours), median(norm), median(needed));
        let general = median(steps.iter().map(direct::Direct::total).collect());
        let step = |k: usize| median(steps.iter().map(|s| s.seconds[k]).collect());
        json!({
            "case": case.name, "goal": goal.label(), "unknowns": outcome.space.n_dofs,
            "entries": system.matrix.matrix().nnz(), "factor_entries": steps[0].n_factor,
            "ratio_exact": general / ours, "ratio_norm": general / norm,
            "ratio_needed": general / needed,
            "cg_norm_seconds": norm, "cg_norm_iterations": n_norm,
            "cg_exact_seconds": ours, "cg_exact_iterations": n_exact,
            "cg_needed_seconds": needed, "cg_needed_iterations": n_needed,
            "cholesky_seconds": general, "cholesky_order": step(0), "cholesky_factor": step(1),
            "cholesky_solve": step(2),
        })
    })
}

fn timed<T>(work: impl FnOnce() -> T) -> f64 {
    let start = Instant::now();
    std::hint::black_box(work());
    start.elapsed().as_secs_f64()
}

/// The table, ratios first.
pub fn print(rows: &[Value]) {
    println!(
        "\nSparse Cholesky (AMD) time by ours: same matrix, one thread; above 1 ours is faster.\n\
        energy: 1e-10 of the energy, norm: 1e-10 in the energy norm (1e-20 of the energy), needed: as the rounds ask"
    );
    println!(
        "{:>9} {:>9} {:>9}  {:<4} {:>8} {:>9} {:>9} {:>4} {:>9} {:>3} {:>10} {:>9} {:>9} {:>9}",
        "energy",
        "norm",
        "needed",
        "case",
        "goal",
        "unknowns",
        "ours ms",
        "it",
        "needed ms",
        "it",
        "Cholesky",
        "order",
        "factor",
        "solve"
    );
    for row in rows {
        let number = |key: &str| row[key].as_f64().unwrap_or(f64::NAN);
        let word = |key: &str| row[key].to_string();
        let ms = |key: &str| 1e3 * number(key);
        println!(
            "{:>8.2}x {:>8.2}x {:>8.2}x  {:<4} {:>8} {:>9} {:>9.2} {:>4} {:>9.2} {:>3} {:>10.2} {:>9.2} {:>9.2} {:>9.2}",
            number("ratio_exact"),
            number("ratio_norm"),
            number("ratio_needed"),
            row["case"].as_str().unwrap_or(""),
            row["goal"].as_str().unwrap_or(""),
            word("unknowns"),
            ms("cg_exact_seconds"),
            word("cg_exact_iterations"),
            ms("cg_needed_seconds"),
            word("cg_needed_iterations"),
            ms("cholesky_seconds"),
            ms("cholesky_order"),
            ms("cholesky_factor"),
            ms("cholesky_solve")
        );
    }
}

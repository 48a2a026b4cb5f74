//! Whole runs: time of every stage, iterations, memory, and how wide the interval is against the true error.

use super::cases::{self, Case, Goal};
use super::memory;
use super::stages::{self, Stages};
use gapwright::adapt::Outcome;
use gapwright::model::Model;
use serde_json::{Value, json};

/// Runs whose median is kept: five, fewer where one takes seconds.
pub fn n_runs(n_unknowns: usize) -> usize {
    match n_unknowns {
        0..200_000 => 5,
        200_000..500_000 => 3,
        _ => 1,
    }
}

/// Middle value.
pub fn median(mut values: Vec<f64>) -> f64 {
    values.sort_unstable_by(f64::total_cmp);
    values[values.len() / 2]
}

/// One case to one goal on `n_threads` threads.
pub fn measure(case: Case, goal: Goal, n_threads: usize) -> Value {
    let (model, outline) = cases::model(&cases::sheet_text(case.sheet), goal);
    let pool = rayon::ThreadPoolBuilder::new().num_threads(n_threads).build().unwrap();
    // The first run warms the caches and tells the size.
    let (_, mut outcome) = pool.install(|| stages::run(&model, &outline));
    let mut taken = Vec::new();
    for _ in 0..n_runs(outcome.space.n_dofs) {
        let (mut stages, again) = pool.install(|| stages::run(&model, &outline));
        outcome = again;
        pool.install(|| stages::finish(&mut stages, &model, &outline, &outcome));
        taken.push(stages);
    }
    let stage = |k: usize| median(taken.iter().map(|s| s.seconds[k]).collect());
    let mut row = facts(case, goal, &model, &outcome);
    row["threads"] = json!(n_threads);
    row["runs"] = json!(taken.len());
    row["seconds"] = json!(median(taken.iter().map(Stages::computing).collect()));
    for (k, name) in stages::NAMES.into_iter().enumerate() {
        row["stages"][name] = json!(stage(k));
    }
    if n_threads == 1 {
        let (peak, own) = memory::measure(case.name, goal);
        row["peak_bytes"] = json!(peak);
        row["bytes_per_unknown"] = json!(own / outcome.space.n_dofs as f64);
    }
    row
}

fn facts(case: Case, goal: Goal, model: &Model, outcome: &Outcome) -> Value {
    let current = model.windings[0].current;
    let ends = [outcome.bound.low, outcome.bound.high].map(|w| 2.0 * w / (current * current));
    let error = (0.5 * (ends[0] + ends[1]) / case.inductance - 1.0).abs();
    let efforts = outcome.rounds.iter().map(|r| r.effort.n_cg_iterations);
    json!({
        "case": case.name, "goal": goal.label(), "unknowns": outcome.space.n_dofs,
        "unknown_rounds": outcome.rounds.iter().map(|r| r.n_unknowns).sum::<usize>(),
        "triangles": outcome.mesh.triangles.len(), "rounds": outcome.rounds.len(),
        "cg_iterations": efforts.sum::<usize>(), "cg_iterations_last": outcome.rounds.last().map(|r| r.effort.n_cg_iterations),
        "width": outcome.bound.relative_width(), "error_of_middle": error,
        "width_by_error_of_low": (ends[1] - ends[0]) / (case.inductance - ends[0]),
        "holds_reference": ends[0] <= case.inductance * (1.0 + 7e-9) && case.inductance * (1.0 - 7e-9) <= ends[1],
    })
}

/// The table.
pub fn print(rows: &[Value]) {
    println!("\nRuns: median time [ms] of the rounds, share of the stages [%], iterations, memory");
    println!(
        "{:<4} {:>8} {:>2} {:>9} {:>3} {:>9} {:>5} {:>5} {:>5} {:>5} {:>5} | {:>8} {:>8} {:>4} {:>8} {:>6}",
        "case",
        "goal",
        "th",
        "unknowns",
        "rd",
        "ms",
        "mesh",
        "elem",
        "solve",
        "bound",
        "refi",
        "results",
        "report",
        "cg",
        "B/unkn",
        "w/err"
    );
    for row in rows {
        let number = |key: &str| row[key].as_f64().unwrap_or(f64::NAN);
        let word = |key: &str| row[key].to_string();
        let seconds = |k: usize| row["stages"][stages::NAMES[k]].as_f64().unwrap_or(f64::NAN);
        let computing: f64 = (0..5).map(seconds).sum();
        let share = |k: usize| 100.0 * seconds(k) / computing;
        println!(
            "{:<4} {:>8} {:>2} {:>9} {:>3} {:>9.2} {:>5.1} {:>5.1} {:>5.1} {:>5.1} {:>5.1} | {:>8.2} {:>8.2} {:>4} {:>8.0} {:>6.2}",
            row["case"].as_str().unwrap_or(""),
            row["goal"].as_str().unwrap_or(""),
            word("threads"),
            word("unknowns"),
            word("rounds"),
            1e3 * number("seconds"),
            share(0),
            share(1),
            share(2),
            share(3),
            share(4),
            1e3 * seconds(5),
            1e3 * seconds(6),
            word("cg_iterations"),
            number("bytes_per_unknown"),
            number("width_by_error_of_low")
        );
    }
}

/// What an unknown costs in one round, stage by stage, on one thread: flat as long as memory streams.
pub fn print_costs(rows: &[Value]) {
    println!(
        "\nOne thread: ns an unknown and round; results and VTK file: ns an unknown of the last round"
    );
    println!(
        "{:<4} {:>8} {:>9} {:>9} {:>8} {:>8} {:>8} {:>8} {:>8} | {:>8} {:>8}",
        "case",
        "goal",
        "unknowns",
        "in rounds",
        "all",
        "elem",
        "solve",
        "bound",
        "refine",
        "results",
        "report"
    );
    for row in rows.iter().filter(|row| row["threads"] == 1) {
        let number = |key: &str| row[key].as_f64().unwrap_or(f64::NAN);
        let stage = |k: usize, n: f64| {
            1e9 * row["stages"][stages::NAMES[k]].as_f64().unwrap_or(f64::NAN) / n
        };
        let (sum, last) = (number("unknown_rounds"), number("unknowns"));
        println!(
            "{:<4} {:>8} {:>9} {:>9} {:>8.0} {:>8.0} {:>8.0} {:>8.0} {:>8.0} | {:>8.0} {:>8.0}",
            row["case"].as_str().unwrap_or(""),
            row["goal"].as_str().unwrap_or(""),
            row["unknowns"],
            row["unknown_rounds"],
            1e9 * number("seconds") / sum,
            stage(1, sum),
            stage(2, sum),
            stage(3, sum),
            stage(4, sum),
            stage(5, last),
            stage(6, last)
        );
    }
}

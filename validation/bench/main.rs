//! `cargo bench --bench bench`: stage times, iterations, memory, and our solver against a general sparse Cholesky.
//!
//! `-- small` leaves the ladder out, `-- only R1` measures one case, `-- iterations` prints the iteration study. Results are printed, ratios first, and kept in
//! `history/`. Noise floor: on a quiet machine medians repeat to 5 %; the load average is stored beside them.
#![allow(clippy::print_stdout, clippy::unwrap_used)]

mod cases;
mod direct;
mod history;
mod iterations;
mod memory;
mod run;
mod solver;
mod stages;

use cases::{CASES, Case, Goal};
use serde_json::{Value, json};

/// Relative widths of the interval.
const INTERVALS: [f64; 4] = [1e-2, 1e-3, 1e-4, 1e-5];
/// Unknowns of the ladder, which R1 and R8 climb.
const LADDER: [usize; 4] = [30_000, 100_000, 300_000, 1_000_000];

fn main() {
    let arguments: Vec<String> = std::env::args().skip(1).filter(|a| a != "--bench").collect();
    let words: Vec<&str> = arguments.iter().map(String::as_str).collect();
    match words.as_slice() {
        ["memory", case, goal] => memory::child(case, goal),
        ["iterations"] => print_iterations(&iterations_study(1_000_000)),
        ["small"] => bench("-small", &CASES, &[], 30_000),
        ["only", name] => bench(&format!("-{name}"), &[cases::case(name)], &LADDER, 0),
        _ => bench("", &CASES, &LADDER, 1_000_000),
    }
}

/// Measures, prints and keeps under a name that ends with `what`: a part does not replace the whole.
fn bench(what: &str, chosen: &[Case], ladder: &[usize], n_unknowns_max: usize) {
    let facts = history::facts();
    let mut plan: Vec<(Case, Goal)> = Vec::new();
    for &case in chosen {
        plan.extend(INTERVALS.map(|i| (case, Goal::Interval(i))));
        if ["R1", "R8"].contains(&case.name) {
            plan.extend(ladder.iter().map(|&n| (case, Goal::Unknowns(n))));
        }
    }
    let solver: Vec<Value> = plan.iter().map(|&(c, g)| solver::measure(c, g)).collect();
    solver::print(&solver);
    let runs: Vec<Value> =
        plan.iter().flat_map(|&(c, g)| [1, 2].map(|n| run::measure(c, g, n))).collect();
    run::print(&runs);
    run::print_costs(&runs);
    let study = iterations_study(n_unknowns_max);
    print_iterations(&study);
    let measured = json!({ "facts": facts, "solver": solver, "runs": runs, "iterations": study });
    println!("\nkept in {}", history::store(&measured, what).display());
}

/// Iterations against size for every permeability at R1's gap and at a gap of 1e-4 of the core's radius.
fn iterations_study(n_unknowns_max: usize) -> Vec<Value> {
    let sizes = [1_000, 10_000, 100_000, 1_000_000].into_iter().filter(|&n| n <= n_unknowns_max);
    let mut rows = Vec::new();
    for n in sizes {
        for gap_mm in [0.3, iterations::THIN_GAP_MM] {
            // The first mesh of the thin gap has 4e4 unknowns: smaller sizes would repeat it.
            if gap_mm < 0.3 && n == 1_000 {
                continue;
            }
            for permeability in iterations::PERMEABILITIES {
                let count = iterations::count_pot(permeability, gap_mm, n);
                rows.push(json!({
                    "wanted_unknowns": n, "gap_mm": gap_mm, "permeability": permeability,
                    "unknowns": count.n_unknowns, "by_energy": count.by_energy,
                    "by_norm": count.by_norm, "warm": count.warm,
                }));
            }
        }
    }
    rows
}

fn print_iterations(rows: &[Value]) {
    println!(
        "\nCG iterations from zero: energy error 1e-10 / energy norm 1e-10 / warm in the last round"
    );
    println!(
        "{:>10} {:>10} {:>12} {:>9} {:>9} {:>6}",
        "unknowns", "gap [mm]", "permeability", "energy", "norm", "warm"
    );
    for row in rows {
        let word = |key: &str| row[key].to_string();
        println!(
            "{:>10} {:>10} {:>12} {:>9} {:>9} {:>6}",
            word("unknowns"),
            word("gap_mm"),
            word("permeability"),
            word("by_energy"),
            word("by_norm"),
            word("warm")
        );
    }
}

//! Peak memory of one run, measured in a process of its own: the bench starts itself again.

use super::cases::{self, Goal};
use std::process::Command;

/// Goal as an argument, and back.
fn argument(goal: Goal) -> String {
    match goal {
        Goal::Interval(i) => format!("interval={i}"),
        Goal::Unknowns(n) => format!("unknowns={n}"),
    }
}

fn goal(argument: &str) -> Goal {
    match argument.split_once('=').unwrap() {
        ("interval", i) => Goal::Interval(i.parse().unwrap()),
        (_, n) => Goal::Unknowns(n.parse().unwrap()),
    }
}

/// Bytes that a key of `/proc/self/status` states; `None` on other systems.
fn status(key: &str) -> Option<f64> {
    let status = std::fs::read_to_string("/proc/self/status").ok()?;
    let line = status.lines().find(|l| l.starts_with(key))?;
    let kilobytes: f64 = line.split_whitespace().nth(1)?.parse().ok()?;
    Some(1024.0 * kilobytes)
}

/// The child: one run on one thread, then the peak and what the process held before the run [bytes].
pub fn child(case: &str, goal_text: &str) {
    let text = cases::sheet_text(cases::case(case).sheet);
    let (model, outline) = cases::model(&text, goal(goal_text));
    let pool = rayon::ThreadPoolBuilder::new().num_threads(1).build().unwrap();
    let before = status("VmRSS:").unwrap_or(f64::NAN);
    let outcome = pool.install(|| cases::run(&model, &outline));
    let peak = status("VmHWM:").unwrap_or(f64::NAN);
    println!("{peak} {before} {}", outcome.space.n_dofs);
}

/// (peak, peak less what the process held before the run) of a case [bytes].
pub fn measure(case: &str, goal: Goal) -> (f64, f64) {
    let program = std::env::current_exe().unwrap();
    let output = Command::new(program).args(["memory", case, &argument(goal)]).output().unwrap();
    let text = String::from_utf8(output.stdout).unwrap();
    let numbers: Vec<f64> = text.split_whitespace().map(|w| w.parse().unwrap()).collect();
    (numbers[0], numbers[0] - numbers[1])
}

//! The random campaign: how many sections were tried, refused (by class), solved, and held.

use super::draft::{Copy, Draft};
use super::is_slow;
use super::judge::{Solved, Verdict, overlap, tried};
use super::random::{Dice, section};
use rayon::prelude::*;
use std::collections::BTreeMap;
use std::time::Instant;

/// Stable words of the refusals that random sections may meet; the class is the word.
const CLASSES: [&str; 22] = [
    "overlaps",
    "overlap from z",
    "touches itself",
    "crosses itself",
    "has no area",
    "too thin to be told",
    "are the same point",
    "does not fit",
    "leave no room",
    "is not below",
    "cannot be",
    "outside its leg",
    "takes the whole",
    "has room for less than",
    "must lie above",
    "must be larger",
    "too fine to be meshed",
    "touch only in a point",
    "meet under",
    "is not smaller than",
    "is at the same",
    "from the origin",
];

fn class(message: &str) -> &'static str {
    let head = message.lines().next().unwrap_or_default();
    CLASSES.into_iter().find(|word| head.contains(word)).unwrap_or("other")
}

/// What became of one section.
struct Fate {
    seed: u64,
    seconds: f64,
    refused: Option<(&'static str, String)>,
    reached: bool,
    n_unknowns: usize,
    /// Complaints about the copies and the tighter run.
    broken: Vec<String>,
}

fn fate(seed: u64, n_copies: usize) -> Fate {
    let draft = section(seed);
    let text = draft.text();
    std::fs::write(format!("/tmp/seeds/seed{seed}.toml"), &text).unwrap();
    let start = Instant::now();
    let verdict = std::panic::catch_unwind(|| tried(&text)).unwrap_or_else(|_| {
        std::fs::write(format!("/tmp/seed{seed}.toml"), &text).unwrap();
        Verdict::Refused(format!("PANIC {seed}"))
    });
    let seconds = start.elapsed().as_secs_f64();
    let mut fate =
        Fate { seed, seconds, refused: None, reached: false, n_unknowns: 0, broken: vec![] };
    match verdict {
        Verdict::Refused(message) => fate.refused = Some((class(&message), message)),
        Verdict::Solved(solved) => {
            (fate.reached, fate.n_unknowns) = (solved.reached, solved.n_unknowns);
            if n_copies > 0 {
                fate.broken = unlike(&draft, &solved, seed);
            }
        }
    }
    fate
}

/// A tighter run, a mirrored copy and a scaled copy against the first interval.
fn unlike(draft: &Draft, first: &Solved, seed: u64) -> Vec<String> {
    let mut dice = Dice(!seed);
    let factor = dice.log_uniform(0.3, 3.0);
    let plain = Copy { factor: 1.0, mirrored: false, interval: 0.01 };
    let mut broken = vec![];
    let mut look = |what: &str, copy: Copy, is_inside: bool| match tried(&draft.copy(copy)) {
        Verdict::Refused(message) => broken.push(format!("{what} was refused: {message}")),
        Verdict::Solved(other) => {
            let ends = other.divided(copy.factor.powi(3));
            let width = ends[1] - ends[0];
            // One printed digit of a scaled length is a relative error of 1e-16; it moves a coenergy by far less than the
            // margin of both intervals.
            let inside = first.low - width <= ends[0] && ends[1] <= first.high + width;
            if !overlap(ends, first.divided(1.0)) || is_inside && !inside {
                broken.push(format!("{what}: {ends:?} against {first:?}"));
            }
        }
    };
    look("the tighter run", Copy { interval: 2e-4, ..plain }, true);
    look("the mirrored copy", Copy { mirrored: true, ..plain }, false);
    look("the scaled copy", Copy { factor, ..plain }, false);
    broken
}

/// Largest resident set of this process so far [MB], where the system tells.
pub fn peak_megabytes() -> f64 {
    let status = std::fs::read_to_string("/proc/self/status").unwrap_or_default();
    let line = status.lines().find(|line| line.starts_with("VmHWM:"));
    let kilobytes = line.and_then(|line| line.split_whitespace().nth(1)?.parse::<f64>().ok());
    kilobytes.unwrap_or(0.0) / 1024.0
}

#[test]
fn random_sections_are_solved_and_held_or_refused_by_name() {
    let n = if is_slow() { 2000 } else { 200 };
    let start = Instant::now();
    let fates: Vec<Fate> = (0..n)
        .into_par_iter()
        .map(|seed| fate(seed, std::env::var_os("NOCOPY").is_none() as usize))
        .collect();
    let mut classes: BTreeMap<&str, usize> = BTreeMap::new();
    for (class, _) in fates.iter().filter_map(|fate| fate.refused.as_ref()) {
        *classes.entry(class).or_default() += 1;
    }
    let solved: Vec<&Fate> = fates.iter().filter(|fate| fate.refused.is_none()).collect();
    let n_held = solved.iter().filter(|fate| fate.broken.is_empty() && fate.reached).count();
    let slowest = fates.iter().max_by(|a, b| a.seconds.total_cmp(&b.seconds)).unwrap();
    let largest = solved.iter().max_by_key(|fate| fate.n_unknowns).unwrap();
    println!(
        "tried {n}, refused {}, solved {}, held {n_held}; slowest {:.2} s (seed {}), most unknowns {} (seed {}), peak {:.0} MB, {:.1} s",
        n as usize - solved.len(),
        solved.len(),
        slowest.seconds,
        slowest.seed,
        largest.n_unknowns,
        largest.seed,
        peak_megabytes(),
        start.elapsed().as_secs_f64(),
    );
    let mut by_time: Vec<&Fate> = fates.iter().collect();
    by_time.sort_by(|a, b| b.seconds.total_cmp(&a.seconds));
    for fate in by_time.iter().take(12) {
        println!(
            "SLOW seed {} {:.2} s {} unknowns {:?}",
            fate.seed,
            fate.seconds,
            fate.n_unknowns,
            fate.refused.as_ref().map(|r| r.0)
        );
    }
    for (class, count) in &classes {
        println!("  {count:5} {class}");
    }
    let others = fates.iter().filter_map(|fate| fate.refused.as_ref()).filter(|r| r.0 == "other");
    for (_, message) in others {
        println!("OTHER {}", message.lines().next().unwrap());
    }
    for fate in &fates {
        if let Some(("other", message)) = &fate.refused {
            panic!("seed {}: a refusal of no known class: {message}", fate.seed);
        }
        assert!(fate.broken.is_empty(), "seed {}: {:?}", fate.seed, fate.broken);
        assert!(fate.reached || fate.refused.is_some(), "seed {} was not closed", fate.seed);
    }
    // A campaign in which nearly everything is refused shows nothing.
    assert!(3 * solved.len() > n as usize, "only {} of {n} solved", solved.len());
}

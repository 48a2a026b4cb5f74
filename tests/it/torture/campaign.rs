//! The random campaign: how many sections were tried, refused (by class), solved, and held.

use super::draft::{Copy, Draft};
use super::judge::{Solved, Verdict, overlap, tried};
use super::random::section;
use super::watch;
use crate::cases::is_slow;
use crate::dice::Dice;
use std::collections::BTreeMap;
use std::panic::catch_unwind;
use std::time::Instant;

/// Stable words of the refusals that random sections may meet; the class is the word.
const CLASSES: [&str; 23] = [
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
    "the least that is accepted",
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
    /// Not closed, for a point that the outcome names.
    is_stuck: bool,
    n_unknowns: usize,
    /// Complaints about the copies and the tighter run; `None` where they were not asked for.
    broken: Option<Vec<String>>,
}

impl Fate {
    /// For the line of a slow one: without the copies, and with them.
    fn size(&self) -> String {
        let copies = if self.broken.is_some() { " with copies" } else { "" };
        format!("{:.1} s the section, {} unknowns{copies}", self.seconds, self.n_unknowns)
    }
}

fn fate(seed: u64, with_copies: bool) -> Fate {
    let draft = section(seed);
    let text = draft.text();
    let start = Instant::now();
    let verdict = catch_unwind(|| tried(&text))
        .unwrap_or_else(|_| panic!("seed {seed} panicked; its sheet:\n{text}"));
    let seconds = start.elapsed().as_secs_f64();
    let mut fate =
        Fate { seed, seconds, refused: None, is_stuck: false, n_unknowns: 0, broken: None };
    match verdict {
        Verdict::Refused(message) => fate.refused = Some((class(&message), message)),
        Verdict::Solved(solved) => {
            (fate.is_stuck, fate.n_unknowns) = (solved.stuck.is_some(), solved.n_unknowns);
            fate.broken = with_copies.then(|| unlike(&draft, &solved, seed));
        }
    }
    fate
}

/// What must not become of a section.
fn wrong(fate: &Fate) -> Option<String> {
    let seed = fate.seed;
    match (&fate.refused, &fate.broken) {
        (Some(("other", message)), _) => {
            Some(format!("seed {seed}: a refusal of no known class: {message}"))
        }
        (_, Some(broken)) if !broken.is_empty() => Some(format!("seed {seed}: {broken:?}")),
        _ => None,
    }
}

/// A tighter run, a mirrored copy and a scaled copy against the first interval.
fn unlike(draft: &Draft, first: &Solved, seed: u64) -> Vec<String> {
    let mut dice = Dice(!seed);
    let factor = dice.log_uniform(0.3, 3.0);
    let plain = Copy { factor: 1.0, mirrored: false, interval: 0.01 };
    let mut broken = vec![];
    let mut look =
        |what: &str, copy: Copy, is_inside: bool, may_be: &[&str]| match tried(&draft.copy(copy)) {
            Verdict::Refused(message) if may_be.contains(&class(&message)) => {}
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
    // What a singular point carries may be resolved to 1 % only, and a copy be too small for the sheet.
    look("the tighter run", Copy { interval: 2e-4, ..plain }, true, &["touch only in a point"]);
    look("the mirrored copy", Copy { mirrored: true, ..plain }, false, &[]);
    look(
        "the scaled copy",
        Copy { factor, ..plain },
        false,
        &["from the origin", "the least that is accepted"],
    );
    broken
}

/// Largest resident set of this process so far [MB], where the system tells.
fn peak_megabytes() -> f64 {
    let status = std::fs::read_to_string("/proc/self/status").unwrap_or_default();
    let line = status.lines().find(|line| line.starts_with("VmHWM:"));
    let kilobytes = line.and_then(|line| line.split_whitespace().nth(1)?.parse::<f64>().ok());
    kilobytes.unwrap_or(0.0) / 1024.0
}

#[test]
fn random_sections_are_solved_and_held_or_refused_by_name() {
    // Copies and the tighter run cost ten times the section itself: one in some gets them.
    let (n, copied_every) = if is_slow() { (2000, 4) } else { (200, 20) };
    let start = Instant::now();
    let fates = watch::all("seed", n, |seed| fate(seed, seed % copied_every == 0), Fate::size);
    let n_solved = report(&fates, start);
    let wrong: Vec<String> = fates.iter().filter_map(wrong).collect();
    assert!(wrong.is_empty(), "{} of {n}:\n{}", wrong.len(), wrong.join("\n"));
    let n_stuck = fates.iter().filter(|fate| fate.is_stuck).count();
    assert!(100 * n_stuck <= n_solved, "{n_stuck} of {n_solved} did not close");
    // A campaign in which nearly everything is refused shows nothing.
    assert!(2 * n_solved > n as usize, "only {n_solved} of {n} solved");
}

/// One section again, its sheet printed: `TORTURE_SEED=912` says which.
#[test]
fn the_section_of_a_seed_that_is_asked_for_is_printed_and_solved() {
    let asked = std::env::var("TORTURE_SEED").ok();
    let seed =
        asked.as_ref().map_or(0, |seed| seed.parse().expect("TORTURE_SEED is a whole number"));
    println!("{}", section(seed).text());
    let fate = fate(seed, asked.is_some());
    println!("seed {seed}: {}\n{:?}", fate.size(), fate.refused);
    assert_eq!(wrong(&fate), None);
}

/// Prints the counts; tells how many were solved.
fn report(fates: &[Fate], start: Instant) -> usize {
    let mut classes: BTreeMap<&str, usize> = BTreeMap::new();
    for (class, _) in fates.iter().filter_map(|fate| fate.refused.as_ref()) {
        *classes.entry(class).or_default() += 1;
    }
    let solved: Vec<&Fate> = fates.iter().filter(|fate| fate.refused.is_none()).collect();
    let n_stuck = solved.iter().filter(|fate| fate.is_stuck).count();
    let compared: Vec<_> = fates.iter().filter_map(|fate| fate.broken.as_ref()).collect();
    let n_held = compared.iter().filter(|broken| broken.is_empty()).count();
    println!(
        "tried {}, refused {}, solved {}, stuck {n_stuck}; compared {}, held {n_held}; peak {:.0} MB, {:.1} s",
        fates.len(),
        fates.len() - solved.len(),
        solved.len(),
        compared.len(),
        peak_megabytes(),
        start.elapsed().as_secs_f64(),
    );
    for (class, count) in &classes {
        println!("  {count:5} {class}");
    }
    let mut by_time: Vec<&Fate> = fates.iter().collect();
    by_time.sort_by(|a, b| b.seconds.total_cmp(&a.seconds));
    for fate in by_time.iter().take(5) {
        println!("  seed {}: {:.2} s, {} unknowns", fate.seed, fate.seconds, fate.n_unknowns);
    }
    solved.len()
}

//! Sheets with random bytes changed, through the whole path: no panic, no endless loop.

use super::watch;
use crate::cases::is_slow;
use crate::dice::Dice;
use crate::sheets::all;
use gapwright::adapt::run;
use gapwright::geometry::outline;
use gapwright::input::{decode, read};
use gapwright::model::Accuracy;
use std::panic::catch_unwind;
use std::time::Instant;

/// Longest that one broken sheet may take [s], 50 times what the slowest took at this accuracy on a busy machine.
const SECONDS_MAX: f64 = 60.0;

/// A few bytes replaced, dropped, doubled; digits more often than anything else, for they get through the reader.
fn mutated(text: &str, dice: &mut Dice) -> Vec<u8> {
    let mut bytes = text.as_bytes().to_vec();
    for _ in 0..1 + dice.below(4) {
        let digits: Vec<usize> = (0..bytes.len()).filter(|&i| bytes[i].is_ascii_digit()).collect();
        let at = if dice.with(0.8) && !digits.is_empty() {
            dice.pick(&digits)
        } else {
            dice.below(bytes.len())
        };
        match dice.below(8) {
            0 => drop(bytes.remove(at)),
            1 => bytes[at] = dice.bits() as u8,
            2 => bytes.insert(at, dice.pick(b"0123456789.-e,[]\"")),
            _ => bytes[at] = dice.pick(b"0123456789.-e"),
        }
    }
    bytes
}

/// One broken sheet: its text if it could be read, the unknowns of its solution, and the time it took [s].
struct Tried {
    text: String,
    n_unknowns: Option<usize>,
    seconds: f64,
}

fn tried(name: &str, text: &str, dice: &mut Dice) -> Tried {
    let table = "H [A/m],B [T]\n0,0\n100,0.3\n200,0.4\n";
    let start = Instant::now();
    let text = decode(&mutated(text, dice), name).unwrap_or_default();
    let n_unknowns = catch_unwind(|| {
        let mut sheet = read(&text, name, &|_| Ok(table.into())).ok()?;
        sheet.model.accuracy = Accuracy { interval: 0.2, n_unknowns_max: 20_000 };
        let outcome = run(&sheet.model, &outline(&sheet.model).ok()?, &mut |_| {}).ok()?;
        let (low, high) = (outcome.bound.low, outcome.bound.high);
        assert!(0.0 <= low && low <= high, "{low} {high}");
        Some(outcome.space.n_dofs)
    })
    .unwrap_or_else(|_| panic!("panicked on a broken {name}:\n{text}"));
    let seconds = start.elapsed().as_secs_f64();
    assert!(seconds < SECONDS_MAX, "{seconds} s\n{text}");
    Tried { text, n_unknowns, seconds }
}

#[test]
fn broken_bytes_never_panic_nor_run_for_ever() {
    let n_mutations = if is_slow() { 5000 } else { 5 };
    let sheets = all();
    let work = |k: u64| {
        let (name, text) = &sheets[(k / n_mutations) as usize];
        tried(name, text, &mut Dice(k))
    };
    let size =
        |tried: &Tried| format!("{} unknowns\n{}", tried.n_unknowns.unwrap_or(0), tried.text);
    let found = watch::all("mutation", n_mutations * sheets.len() as u64, work, size);
    let n_solved = found.iter().filter(|tried| tried.n_unknowns.is_some()).count();
    let slowest = found.iter().max_by(|a, b| a.seconds.total_cmp(&b.seconds)).unwrap();
    println!(
        "tried {}, solved {n_solved}, slowest {:.2} s, {}",
        found.len(),
        slowest.seconds,
        size(slowest)
    );
    assert!(10 * n_solved > found.len());
}

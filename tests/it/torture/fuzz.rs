//! Sheets with random bytes changed, through the whole path: no panic, no endless loop.

use super::is_slow;
use super::random::Dice;
use crate::sheets::all;
use gapwright::adapt::run;
use gapwright::geometry::outline;
use gapwright::input::{decode, read};
use gapwright::model::Accuracy;
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

#[test]
fn broken_bytes_never_panic_nor_run_for_ever() {
    let n_mutations = if is_slow() { 1000 } else { 5 };
    let table = "H [A/m],B [T]\n0,0\n100,0.3\n200,0.4\n";
    let (mut n_tried, mut n_solved, mut slowest) = (0, 0, (0.0, String::new()));
    for (name, text) in all() {
        let mut dice = Dice(name.len() as u64);
        for _ in 0..n_mutations {
            n_tried += 1;
            let start = Instant::now();
            let bytes = mutated(&text, &mut dice);
            let Ok(broken) = decode(&bytes, &name) else { continue };
            let Ok(mut sheet) = read(&broken, &name, &|_| Ok(table.into())) else { continue };
            sheet.model.accuracy = Accuracy { interval: 0.2, n_unknowns_max: 20_000 };
            let Ok(outline) = outline(&sheet.model) else { continue };
            if let Ok(outcome) = run(&sheet.model, &outline, &mut |_| {}) {
                n_solved += 1;
                let (low, high) = (outcome.bound.low, outcome.bound.high);
                assert!(0.0 <= low && low <= high, "{low} {high}\n{broken}");
            }
            let seconds = start.elapsed().as_secs_f64();
            assert!(seconds < SECONDS_MAX, "{seconds} s\n{broken}");
            if seconds > slowest.0 {
                slowest = (seconds, broken);
            }
        }
    }
    println!("tried {n_tried}, solved {n_solved}, slowest {:.2} s:\n{}", slowest.0, slowest.1);
    assert!(10 * n_solved > n_tried);
}

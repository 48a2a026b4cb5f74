//! Sheets broken at random, with fixed seeds: a message each time, never a panic.

use crate::cases::is_slow;
use crate::dice::Dice;
use crate::sheets::all;
use gapwright::geometry::outline;
use gapwright::input::{read, render};

const SCRAPS: [&str; 26] = [
    "nan",
    "-1",
    "0",
    "1e400",
    "-inf",
    "\"0.3 A\"",
    "[]",
    "{}",
    "true",
    "0x10",
    "[[0, 0], [1]]",
    "\"µ\"",
    "1e-9",
    "\"\\u001b\"",
    "[[[[]]]]",
    "1979-05-27",
    "\n[core]\n",
    "\n[[windings]]\n",
    "\"",
    "'''",
    "=",
    "\u{202e}",
    "€",
    "99999999999999999999",
    "5.75",
    "\"12 mil\"",
];

fn mutated(text: &str, dice: &mut Dice) -> String {
    let mut letters: Vec<char> = text.chars().collect();
    for _ in 0..=dice.below(3) {
        let at = dice.below(letters.len());
        let end = (at + dice.below(12)).min(letters.len());
        match dice.below(4) {
            0 => drop(letters.drain(at..end)),
            1 => drop(letters.splice(at..end, SCRAPS[dice.below(SCRAPS.len())].chars())),
            2 => {
                let copy = letters[at..end].to_vec();
                let to = dice.below(letters.len());
                drop(letters.splice(to..to, copy));
            }
            _ => replace_a_value(&mut letters, dice),
        }
    }
    letters.into_iter().collect()
}

/// Puts a scrap in the place of a whole value.
fn replace_a_value(letters: &mut Vec<char>, dice: &mut Dice) {
    let signs: Vec<usize> = (0..letters.len()).filter(|&i| letters[i] == '=').collect();
    let Some(&sign) = signs.get(dice.below(signs.len())) else { return };
    let end = letters[sign..].iter().position(|&c| c == '\n').map_or(letters.len(), |n| sign + n);
    drop(letters.splice(sign + 1..end, SCRAPS[dice.below(SCRAPS.len())].chars()));
}

#[test]
fn broken_sheets_get_messages_and_no_panic() {
    let n_mutations = if is_slow() { 20_000 } else { 300 };
    let table = "H [A/m],B [T]\n0,0\n100,0.3\n200,0.4\n";
    let mut n_read = 0;
    for (name, text) in all() {
        let mut dice = Dice(name.len() as u64);
        for _ in 0..n_mutations {
            let broken = mutated(&text, &mut dice);
            match read(&broken, &name, &|_| Ok(mutated_table(table, &broken))) {
                Ok(sheet) => {
                    n_read += 1;
                    if let Err(fault) = outline(&sheet.model) {
                        render(&sheet.diagnose(&fault), &broken, true);
                    }
                }
                Err(diagnostics) => {
                    assert!(!diagnostics.is_empty());
                    for found in &diagnostics {
                        let head = format!("{}:{}:{}: ", found.file, found.line, found.column);
                        assert!(render(found, &broken, false).starts_with(&head), "{broken}");
                        assert!(!found.help.is_empty() && !found.message.is_empty());
                    }
                }
            }
        }
    }
    // Some mutations hit a comment: then the sheet is read, and the drawing is tried as well.
    assert!(0 < n_read);
}

/// The table, broken as well for some of the sheets.
fn mutated_table(table: &str, seed: &str) -> String {
    let mut dice = Dice(seed.len() as u64);
    if dice.below(2) == 0 { table.into() } else { mutated(table, &mut dice) }
}

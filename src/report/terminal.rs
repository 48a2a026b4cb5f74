//! `Results` → the screen of `solve`: the answer first, then where it comes from. At most 80 columns of text.

mod answer;
mod tables;

pub(super) use answer::requirement_line;

use super::numbers::{clip, grouped, percent, signed, wrap};
use super::{StageTimes, shortfall};
use crate::results::Results;
use comfy_table::{CellAlignment, Table, presets};

/// Columns of the screen.
pub(super) const WIDTH: usize = 80;
/// Longest name of a region, a part or a winding that is printed in full.
pub(super) const NAME_WIDTH: usize = 24;

/// How the screen is to look.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Look<'a> {
    /// Bold and colour by ANSI codes.
    pub colour: bool,
    /// Seconds from the start to the answer, when the caller has a clock.
    pub seconds: Option<f64>,
    /// Adds the rounds and the stage times.
    pub times: Option<&'a StageTimes>,
}

/// The whole screen of `solve`, ending in a line break.
pub fn solve_screen(results: &Results, look: &Look) -> String {
    let mut text = opening(&results.title, shortfall(results), look);
    answer::answer(&mut text, results, look);
    tables::ledger(&mut text, results, look);
    tables::gaps(&mut text, results, look);
    tables::hot_spots(&mut text, results, look);
    tables::parts(&mut text, results, look);
    tables::ripple(&mut text, results, look);
    notes(&mut text, &results.notes, look);
    if let Some(times) = look.times {
        timings(&mut text, results, times, look);
    }
    text
}

/// The title, and the sentence that stands first when the interval was not reached.
pub(super) fn opening(title: &str, shortfall: Option<String>, look: &Look) -> String {
    let mut text = String::new();
    for line in wrap(title, WIDTH) {
        push(&mut text, &paint(&line, BOLD, look.colour));
    }
    if let Some(sentence) = shortfall {
        for (i, line) in wrap(&format!("Not reached: {sentence}."), WIDTH - 4).iter().enumerate() {
            let mark = if i == 0 { "  !" } else { "   " };
            push(&mut text, &format!("{mark} {}", paint(line, WARN, look.colour)));
        }
    }
    text
}

/// One line of progress: "round 3   2 852 unknowns   interval 0.09 % wide".
pub fn progress_line(round: usize, n_unknowns: usize, low: f64, high: f64) -> String {
    let width = 2.0 * (high - low) / (high + low);
    format!(
        "round {round}   {} unknowns   interval {} wide",
        grouped(n_unknowns),
        percent(width, 2)
    )
}

const BOLD: &str = "1";
const GOOD: &str = "32";
const WARN: &str = "33";

fn paint(text: &str, code: &str, colour: bool) -> String {
    if colour { format!("\u{1b}[{code}m{text}\u{1b}[0m") } else { text.to_string() }
}

pub(super) fn push(text: &mut String, line: &str) {
    text.push_str(line.trim_end());
    text.push('\n');
}

pub(super) fn heading(text: &mut String, line: &str, look: &Look) {
    text.push('\n');
    push(text, &paint(line, BOLD, look.colour));
}

/// A table without lines: first column left, the others right, indented by two.
pub(super) fn push_table(text: &mut String, header: &[&str], rows: &[Vec<String>]) {
    let mut table = Table::new();
    table.load_style(presets::NOTHING);
    table.set_header(header.iter().map(|h| h.to_string()));
    for row in rows {
        table.add_row(row.clone());
    }
    for (i, column) in table.column_iter_mut().enumerate() {
        column.set_padding((if i == 0 { 2 } else { 1 }, 1));
        column.set_cell_alignment(if i == 0 { CellAlignment::Left } else { CellAlignment::Right });
    }
    for line in table.to_string().lines() {
        push(text, line);
    }
}

/// The notes, one indented paragraph each.
pub(super) fn notes(text: &mut String, notes: &[String], look: &Look) {
    if notes.is_empty() {
        return;
    }
    heading(text, "Notes", look);
    for note in notes {
        for (i, line) in wrap(note, WIDTH - 4).iter().enumerate() {
            push(text, &format!("  {} {line}", if i == 0 { "·" } else { " " }));
        }
    }
}

fn timings(text: &mut String, results: &Results, times: &StageTimes, look: &Look) {
    heading(text, "Rounds", look);
    let rows: Vec<Vec<String>> = results
        .rounds
        .iter()
        .enumerate()
        .map(|(i, round)| {
            vec![
                (i + 1).to_string(),
                grouped(round.n_unknowns),
                round.n_newton_steps.to_string(),
                round.n_cg_iterations.to_string(),
                format!("{:.7e}", round.low),
                format!("{:.7e}", round.high),
            ]
        })
        .collect();
    let unit = if results.is_linear && results.inductance.is_some() { "H" } else { "J" };
    let (low, high) = (format!("low [{unit}]"), format!("high [{unit}]"));
    push_table(text, &["", "unknowns", "Newton", "CG", &low, &high], &rows);
    stage_times(text, times, look);
}

/// The time of every stage and its share of their sum.
pub(super) fn stage_times(text: &mut String, times: &StageTimes, look: &Look) {
    heading(text, "Stage times", look);
    let whole: f64 = times.stages.iter().map(|(_, s)| s).sum();
    let rows: Vec<Vec<String>> = times
        .stages
        .iter()
        .map(|(stage, s)| {
            let percents = if 0.0 < whole { 100.0 * s / whole } else { 0.0 };
            let share = format!("{} %", signed(percents, 1));
            vec![clip(stage, NAME_WIDTH), format!("{:.1} ms", 1e3 * s), share]
        })
        .collect();
    push_table(text, &["", "time", "share"], &rows);
}

#[cfg(test)]
mod tests;

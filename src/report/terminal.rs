//! `Results` → the screen of `solve`: the answer first, then where it comes from. At most 80 columns of text.

use super::numbers::{clip, decimals_for, grouped, interval, percent, signed, wrap};
use super::{StageTimes, shortfall};
use crate::results::{Results, Verdict, WindingResult};
use crate::units::engineering;
use comfy_table::{CellAlignment, Table, presets};

/// Columns of the screen.
const WIDTH: usize = 80;
/// Longest name of a region, a part or a winding that is printed in full.
const NAME_WIDTH: usize = 24;
/// Width of the left column of the answer.
const LABEL_WIDTH: usize = 14;

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
    let mut text = String::new();
    for line in wrap(&results.title, WIDTH) {
        push(&mut text, &paint(&line, BOLD, look.colour));
    }
    if let Some(sentence) = shortfall(results) {
        for (i, line) in wrap(&format!("Not reached: {sentence}."), WIDTH - 4).iter().enumerate() {
            push(
                &mut text,
                &format!(
                    "{} {}",
                    if i == 0 { "  !" } else { "   " },
                    paint(line, WARN, look.colour)
                ),
            );
        }
    }
    answer(&mut text, results, look);
    ledger(&mut text, results, look);
    gaps(&mut text, results, look);
    hot_spots(&mut text, results, look);
    parts(&mut text, results, look);
    notes(&mut text, results, look);
    if let Some(times) = look.times {
        timings(&mut text, results, times, look);
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

fn push(text: &mut String, line: &str) {
    text.push_str(line.trim_end());
    text.push('\n');
}

fn heading(text: &mut String, line: &str, look: &Look) {
    text.push('\n');
    push(text, &paint(line, BOLD, look.colour));
}

/// "  label   middle   rest", the rest wrapped under itself.
fn answer_line(text: &mut String, label: &str, middle: &str, rest: &str) {
    let indent = 2 + LABEL_WIDTH + 16;
    let lines = wrap(rest, WIDTH - indent);
    let first = lines.first().map_or("", String::as_str);
    push(text, &format!("  {label:LABEL_WIDTH$}{middle:<15} {first}"));
    for line in lines.iter().skip(1) {
        push(text, &format!("{:indent$}{line}", ""));
    }
}

fn answer(text: &mut String, results: &Results, look: &Look) {
    let bounded = |quantity, unit| {
        let t = interval(quantity, unit);
        let ends = format!("surely between {} and {}", t.low, t.high);
        (t.value, ends)
    };
    let is_estimate = !results.is_linear;
    for (label, quantity) in
        [("A_L", &results.inductance_factor), ("inductance", &results.inductance)]
    {
        if let Some(quantity) = quantity {
            let (value, ends) = bounded(quantity, "H");
            answer_line(text, label, &value, &ends);
        }
    }
    if let (true, Some(slope)) = (is_estimate, results.incremental_inductance) {
        answer_line(
            text,
            "incremental",
            &engineering(slope, "H", 4),
            "slope of the flux linkage at this current",
        );
    }
    if is_estimate || results.inductance.is_none() {
        let (value, ends) = bounded(&results.coenergy, "J");
        answer_line(text, "coenergy", &value, &ends);
    }
    if results.windings.len() > 1 || results.inductance.is_none() {
        for winding in &results.windings {
            winding_line(text, winding);
        }
    }
    if let Some(verdict) = &results.verdict {
        verdict_lines(text, verdict, look);
    }
    for requirement in &results.requirements {
        requirement_line(text, requirement, look);
    }
    push(text, &format!("  {}", work(results, look)));
}

/// "2 852 unknowns, 7 rounds, 0.06 s".
fn work(results: &Results, look: &Look) -> String {
    let n = results.rounds.len();
    let rounds = if n == 1 { "1 round".to_string() } else { format!("{n} rounds") };
    let time = look.seconds.map_or(String::new(), |s| format!(", {s:.2} s"));
    format!("{} unknowns, {rounds}{time}", grouped(results.n_unknowns))
}

fn winding_line(text: &mut String, winding: &WindingResult) {
    let turns = format!("{} turns at {}", winding.turns, engineering(winding.current, "A", 3));
    let linkage = engineering(winding.flux_linkage, "Wb", 4);
    answer_line(
        text,
        &clip(&winding.name, LABEL_WIDTH - 1),
        &linkage,
        &format!("flux linkage of {turns}"),
    );
}

fn verdict_lines(text: &mut String, verdict: &Verdict, look: &Look) {
    let label = if verdict.is_hand_sum { "hand sum" } else { "your figure" };
    let side = if verdict.deviation < 0.0 { "low" } else { "high" };
    let (word, code) = if verdict.within_tolerance { ("inside", GOOD) } else { ("outside", WARN) };
    let owner = if verdict.is_hand_sum { "the" } else { "your" };
    let judgement = format!(
        "{} {side}, {word} {owner} ±{}",
        percent(verdict.deviation.abs(), 2),
        percent(verdict.tolerance, 3)
    );
    answer_line(text, label, &engineering(verdict.inductance, "H", 4), &judgement);
    if look.colour {
        let coloured = paint(&judgement, code, true);
        *text = text.replace(&judgement, &coloured);
    }
    for line in wrap(&verdict.blame, WIDTH - 2 - LABEL_WIDTH) {
        push(text, &format!("  {:LABEL_WIDTH$}{line}", ""));
    }
}

fn requirement_line(
    text: &mut String,
    requirement: &crate::results::RequirementResult,
    look: &Look,
) {
    let kind = if requirement.incremental { "incremental" } else { "apparent" };
    let limit = |word: &str, value: Option<f64>| {
        value.map(|v| format!("{word} {}", engineering(v, "H", 4).replace(' ', "\u{a0}")))
    };
    let limits: Vec<String> =
        [limit("at least", requirement.least), limit("at most", requirement.most)]
            .into_iter()
            .flatten()
            .collect();
    let (verdict, code) = if requirement.met { ("kept", GOOD) } else { ("broken", WARN) };
    let rest = format!(
        "{kind}, {} at {}: wanted {}, {verdict}",
        clip(&requirement.winding, NAME_WIDTH),
        engineering(requirement.current, "A", 3),
        limits.join(" and ")
    );
    answer_line(text, "requirement", &engineering(requirement.inductance, "H", 4), &rest);
    if look.colour
        && let Some(at) = text.rfind(verdict)
    {
        text.replace_range(at..at + verdict.len(), &paint(verdict, code, true));
    }
}

/// A table without lines: first column left, the others right, indented by two.
fn push_table(text: &mut String, header: &[&str], rows: &[Vec<String>]) {
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

fn ledger(text: &mut String, results: &Results, look: &Look) {
    if results.ledger.is_empty() {
        return;
    }
    // Reluctances are printed in 1/µH, so that their reciprocal sum is the A_L that stands above.
    let decimals = decimals_for(
        1e-6 * results.ledger.iter().filter_map(|r| r.reluctance).fold(0.0, f64::max),
        4,
    );
    let reluctance =
        |value: Option<f64>| value.map_or("–".to_string(), |v| signed(1e-6 * v, decimals));
    let rows: Vec<Vec<String>> = results
        .ledger
        .iter()
        .map(|row| {
            let verdict = match (row.reluctance, row.hand) {
                (Some(field), Some(hand)) if field != 0.0 => off_by(hand / field - 1.0),
                _ => String::new(),
            };
            let share = format!("{} %", signed(100.0 * row.share, 1));
            vec![
                clip(&row.region, NAME_WIDTH),
                share,
                reluctance(row.reluctance),
                reluctance(row.hand),
                verdict,
            ]
        })
        .collect();
    let mut rows = rows;
    rows.extend(ledger_sum(results, decimals));
    heading(text, "Where the reluctance sits, in 1/µH", look);
    push_table(text, &["", "share", "field", "hand", "the hand value is"], &rows);
}

/// The last line: all of the field's reluctances, and all that the hand sum has. `None` where one is missing.
fn ledger_sum(results: &Results, decimals: usize) -> Option<Vec<String>> {
    let field = results.ledger.iter().map(|row| row.reluctance).sum::<Option<f64>>()?;
    let hand: f64 = results.ledger.iter().filter_map(|row| row.hand).sum();
    let share: f64 = results.ledger.iter().map(|row| row.share).sum();
    let (hand, verdict) = match hand {
        0.0 => ("–".to_string(), String::new()),
        _ => (signed(1e-6 * hand, decimals), off_by(hand / field - 1.0)),
    };
    let share = format!("{} %", signed(100.0 * share, 1));
    Some(vec!["= all together".to_string(), share, signed(1e-6 * field, decimals), hand, verdict])
}

/// "18 % high" of a relative deviation.
fn off_by(deviation: f64) -> String {
    let side = if deviation < 0.0 { "low" } else { "high" };
    format!("{} {side}", percent(deviation.abs(), 2))
}

fn gaps(text: &mut String, results: &Results, look: &Look) {
    if results.gaps.is_empty() {
        return;
    }
    heading(text, "Fringing and pull of the gaps", look);
    let rows: Vec<Vec<String>> = results
        .gaps
        .iter()
        .map(|gap| {
            vec![
                clip(&gap.name, NAME_WIDTH),
                gap.gap_based.map_or("–".to_string(), |f| signed(f, 3)),
                signed(1e-6 * gap.plain_reluctance, decimals_for(1e-6 * gap.plain_reluctance, 4)),
                engineering(gap.force, "N", 3),
                engineering(gap.plain_force, "N", 3),
            ]
        })
        .collect();
    push_table(text, &["", "own factor", "l/(µ0 A), 1/µH", "force", "by B²A/2µ0"], &rows);
    if let Some(factor) = results.inductance_based {
        push(
            text,
            &format!(
                "  In the spreadsheet: N²/(R_core + R_gap/{factor:.3}) gives this inductance."
            ),
        );
    }
}

fn hot_spots(text: &mut String, results: &Results, look: &Look) {
    if results.hot_spots.is_empty() {
        return;
    }
    heading(text, "Highest flux density", look);
    let rows: Vec<Vec<String>> = results
        .hot_spots
        .iter()
        .map(|spot| {
            vec![
                clip(&spot.part, NAME_WIDTH),
                engineering(spot.flux_density, "T", 3),
                format!("r {} mm", signed(1e3 * spot.r, 2)),
                format!("z {} mm", signed(1e3 * spot.z, 2)),
            ]
        })
        .collect();
    push_table(text, &["", "averaged", "", ""], &rows);
}

fn parts(text: &mut String, results: &Results, look: &Look) {
    if results.parts.is_empty() {
        return;
    }
    heading(text, "Flux density exceeded by a share of each part's volume", look);
    let rows: Vec<Vec<String>> = results
        .parts
        .iter()
        .map(|part| {
            let mut row = vec![clip(&part.name, NAME_WIDTH)];
            row.extend(part.exceeded.iter().map(|&b| engineering(b, "T", 3)));
            row.push(part.margin.map_or("–".to_string(), |m| {
                if m < 0.0 { format!("{} beyond", percent(-m, 2)) } else { percent(m, 2) }
            }));
            row
        })
        .collect();
    push_table(text, &["", "1 %", "5 %", "50 %", "room to the knee"], &rows);
}

fn notes(text: &mut String, results: &Results, look: &Look) {
    if results.notes.is_empty() {
        return;
    }
    heading(text, "Notes", look);
    for note in &results.notes {
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
    heading(text, "Stage times", look);
    let whole: f64 = times.stages.iter().map(|(_, s)| s).sum();
    let rows: Vec<Vec<String>> = times
        .stages
        .iter()
        .map(|(stage, s)| {
            let share = if 0.0 < whole { percent(s / whole, 2) } else { "–".to_string() };
            vec![clip(stage, NAME_WIDTH), format!("{:.1} ms", 1e3 * s), share]
        })
        .collect();
    push_table(text, &["", "time", "share"], &rows);
}

#[cfg(test)]
mod tests;

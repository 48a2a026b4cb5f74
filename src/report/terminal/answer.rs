//! The answer that stands first: inductance, coenergy, flux linkages, verdict, requirements.

use super::{GOOD, Look, NAME_WIDTH, WARN, WIDTH, paint, push};
use crate::report::numbers::{
    clip, decimals_for, grouped, interval, percent, relative_width, signed, wrap,
};
use crate::results::{Guaranteed, Results, Verdict, WindingResult};
use crate::units::engineering;

/// Width of the left column of the answer.
const LABEL_WIDTH: usize = 14;

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

pub(super) fn answer(text: &mut String, results: &Results, look: &Look) {
    let bounded = |quantity, unit| {
        let t = interval(quantity, unit);
        let ends = format!("surely between {} and {}", t.low, t.high);
        (t.value, ends)
    };
    for (label, quantity) in
        [("A_L", &results.inductance_factor), ("inductance", &results.inductance)]
    {
        let Some(quantity) = quantity else { continue };
        let (value, ends) = match results.estimated_error {
            Some(error) => estimated(quantity, error),
            None => bounded(quantity, "H"),
        };
        answer_line(text, label, &value, &ends);
    }
    if let (false, Some(slope)) = (results.is_linear, results.incremental_inductance) {
        answer_line(
            text,
            "incremental",
            &engineering(slope, "H", 4),
            "best value; slope dλ/dI at this current",
        );
    }
    if !results.is_linear || results.inductance.is_none() {
        let (value, ends) = bounded(&results.coenergy, "J");
        answer_line(text, "coenergy", &value, &ends);
    }
    if results.windings.len() > 1 || results.inductance.is_none() {
        for winding in &results.windings {
            winding_line(text, winding);
        }
    }
    if let Some(verdict) = &results.verdict {
        verdict_lines(text, results, verdict, look);
    }
    for requirement in &results.requirements {
        requirement_line(text, requirement, look);
    }
    push(text, &format!("  {}", work(results, look)));
}

/// Best value of a saturating core's inductance with its estimated error, apart from the guaranteed ends.
fn estimated(quantity: &Guaranteed, error: f64) -> (String, String) {
    // One digit beyond the estimated error: 1e-4 leaves 5 of them.
    let n_digits = (1.0 - error.log10().floor()).clamp(3.0, 7.0) as usize;
    let ends = interval(quantity, "H");
    let unit = ends.value.rsplit(' ').next().unwrap_or("H").to_string();
    (
        engineering(quantity.value, "H", n_digits),
        format!(
            "best value, error about {} (estimated); surely between {} and {}\u{a0}{unit}",
            percent(error, 1).replace(' ', "\u{a0}"),
            ends.low,
            ends.high
        ),
    )
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

fn verdict_lines(text: &mut String, results: &Results, verdict: &Verdict, look: &Look) {
    let label = if verdict.is_hand_sum { "hand sum" } else { "your figure" };
    let (word, code) = if verdict.within_tolerance { ("inside", GOOD) } else { ("outside", WARN) };
    let owner = if verdict.is_hand_sum { "the" } else { "your" };
    let judgement = format!(
        "{}, {word} {owner} ±{}",
        deviation(verdict.deviation, certainty(results)),
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

/// Relative width that the inductance is known to: its interval, or the estimated error of a saturating core's.
fn certainty(results: &Results) -> f64 {
    let width = results.inductance.as_ref().unwrap_or(&results.coenergy);
    results.estimated_error.unwrap_or_else(|| relative_width(width))
}

/// "0.9 % low": no digit that the interval's width leaves open, two at most.
fn deviation(deviation: f64, width: f64) -> String {
    let percents = 100.0 * deviation.abs();
    let n_known = (-(100.0 * width).log10()).floor().clamp(0.0, 9.0) as usize;
    let n_decimals = decimals_for(percents, 2).min(n_known);
    let text = signed(percents, n_decimals);
    if text.bytes().all(|b| matches!(b, b'0' | b'.')) {
        let least = 0.1f64.powi(n_decimals as i32);
        return format!("less than {least:.n_decimals$} % off");
    }
    format!("{text} % {}", if deviation < 0.0 { "low" } else { "high" })
}

pub(in crate::report) fn requirement_line(
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
        "{kind}, {} at {}: wanted {}, {verdict}{}",
        clip(&requirement.winding, NAME_WIDTH),
        engineering(requirement.current, "A", 3),
        limits.join(" and "),
        if requirement.is_certain { " surely" } else { " by the best value" }
    );
    answer_line(text, "requirement", &engineering(requirement.inductance, "H", 4), &rest);
    if look.colour
        && let Some(at) = text.rfind(verdict)
    {
        text.replace_range(at..at + verdict.len(), &paint(verdict, code, true));
    }
}

#[cfg(test)]
mod tests {
    use super::deviation;

    #[test]
    fn a_deviation_has_no_digit_that_the_interval_leaves_open() {
        assert_eq!(deviation(-0.000_86, 0.8e-3), "0.1 % low");
        assert_eq!(deviation(-0.000_86, 0.9e-4), "0.09 % low");
        assert_eq!(deviation(0.081_2, 1e-6), "8.1 % high");
        assert_eq!(deviation(0.000_3, 0.9e-3), "less than 0.1 % off");
        assert_eq!(deviation(0.003, 0.2), "less than 1 % off");
    }
}

//! The screen as text: what stands first, how wide it is, what it says when something is missed.

use super::*;
use crate::report::fixture;
use expect_test::expect;

#[test]
fn the_screen_answers_first() {
    let look = Look { colour: false, seconds: Some(0.06), times: None };
    expect![[""]].assert_eq(&solve_screen(&fixture::results(), &look));
}

#[test]
fn no_line_is_wider_than_eighty_columns() {
    let mut results = fixture::results();
    results.title = "A choke with a very long title that goes on and on, ".repeat(4);
    results.notes.push("a long note with many words, ".repeat(10));
    results.ledger[0].region = "a region of a name far too long for any table".to_string();
    results.windings.push(results.windings[0].clone());
    results.reached = false;
    let times = StageTimes { stages: vec![("mesh".to_string(), 0.004), ("rounds".to_string(), 0.03)] };
    let text = solve_screen(&results, &Look { colour: false, seconds: None, times: Some(&times) });
    for line in text.lines() {
        assert!(line.chars().count() <= 80, "{} columns: {line}", line.chars().count());
        assert_eq!(line, line.trim_end());
    }
}

#[test]
fn a_missed_interval_stands_before_the_numbers() {
    let mut results = fixture::results();
    results.reached = false;
    let text = solve_screen(&results, &Look::default());
    assert!(text.find("Not reached").unwrap() < text.find("A_L").unwrap());
    assert!(!solve_screen(&fixture::results(), &Look::default()).contains("Not reached"));
}

#[test]
fn a_saturating_core_shows_the_guaranteed_coenergy_and_the_slope() {
    let mut results = fixture::results();
    assert!(!solve_screen(&results, &Look::default()).contains("coenergy"));
    results.is_linear = false;
    let text = solve_screen(&results, &Look::default());
    assert!(text.contains("coenergy") && text.contains("incremental"));
}

#[test]
fn several_currents_show_the_windings_instead_of_an_inductance() {
    let mut results = fixture::results();
    results.inductance = None;
    results.inductance_factor = None;
    for row in &mut results.ledger {
        row.reluctance = None;
    }
    let text = solve_screen(&results, &Look::default());
    assert!(!text.contains("A_L") && text.contains("flux linkage of 42 turns"), "{text}");
}

#[test]
fn a_figure_outside_its_tolerance_is_called_so() {
    let mut results = fixture::results();
    let verdict = results.verdict.as_mut().unwrap();
    verdict.within_tolerance = false;
    verdict.deviation = 0.081;
    assert!(solve_screen(&results, &Look::default()).contains("8.1 % high, outside your ±3 %"));
}

#[test]
fn colour_adds_only_escape_codes() {
    let plain = solve_screen(&fixture::results(), &Look::default());
    let mut painted = solve_screen(&fixture::results(), &Look { colour: true, ..Look::default() });
    assert!(painted.contains("\u{1b}[1m") && !plain.contains('\u{1b}'));
    for code in ["1", "32", "33", "0"] {
        painted = painted.replace(&format!("\u{1b}[{code}m"), "");
    }
    assert_eq!(painted, plain);
}

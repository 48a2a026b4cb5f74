//! The screen as text: what stands first, how wide it is, what it says when something is missed.

use super::*;
use crate::report::fixture;
use expect_test::expect;

#[test]
fn the_screen_answers_first() {
    let look = Look { colour: false, seconds: Some(0.06), times: None };
    expect![[r#"
        Buoy charger choke
          A_L           397.17 nH       surely between 396.99 and 397.37
          inductance    700.6 µH        surely between 700.3 and 701.0
          your figure   700.0 µH        0.1 % low, inside your ±3 %
                        the post gap carries most of the difference
          requirement   700.6 µH        apparent, main at 2.50 A: wanted at least
                                        650.0 µH, kept surely
          2 852 unknowns, 3 rounds, 0.06 s

        Where the reluctance sits, in 1/µH
                                 share  field   hand  the hand value is
          post                   3.1 %  0.078  0.081         3.8 % high
          wall                   1.4 %  0.035  0.036         2.1 % high
          upper plate            1.1 %  0.028  0.027          2.5 % low
          lower plate            1.1 %  0.028  0.027          2.5 % low
          post gap              72.4 %  1.823  2.160          18 % high
          main and its window   18.7 %  0.471      –
          outside                2.2 %  0.055      –
          sum = 1/A_L          100.0 %  2.518  2.331          7.4 % low
          A gap's hand value also stands for the flux that bulges round it; the field
          counts that under window, windings and outside: compare the sums.

        Gaps: fringing factor and pull
             factor  l/(µ0 A), 1/µH    pull  by B²A/2µ0
          1   1.143           2.947  4.21 N      4.62 N
          For a spreadsheet, one factor for all gaps: N²/(R_core + R_gap/1.203) gives
          this inductance, with R_gap = l/(µ0 A) and R_core from the column "field".

        Highest flux densities, each averaged over a small disc
                          |B|
          post         512 mT   r 5.60 mm   z 5.60 mm
          post         511 mT   r 5.60 mm  z −5.60 mm
          lower plate  344 mT  r 10.50 mm  z −5.70 mm

        Flux density exceeded by a share of each part's volume
                   1 %     5 %    50 %  room to the knee
          post  410 mT  380 mT  360 mT              21 %

        Ripple: swing of the flux density, and its peak, in 5 % of each part
          main swings between 1.50 A and 2.10 A
                 swing    peak
          post  120 mT  440 mT

        Notes
          · the corner at r = 5.75 mm, z = 5.5 mm is sharp: the flux density there is an
            average
    "#]]
    .assert_eq(&solve_screen(&fixture::results(), &look));
}

#[test]
fn no_line_is_wider_than_eighty_columns() {
    let mut results = fixture::results();
    results.title = "A choke with a very long title that goes on and on, ".repeat(4);
    results.notes.push("a long note with many words, ".repeat(10));
    results.ledger[0].region = "a region of a name far too long for any table".to_string();
    results.windings.push(results.windings[0].clone());
    results.reached = false;
    let times =
        StageTimes { stages: vec![("mesh".to_string(), 0.004), ("rounds".to_string(), 0.03)] };
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

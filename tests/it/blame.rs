//! The sentence of blame, end to end: made-up wrong estimates of sheets whose field is solved.

use crate::cases::{R1, run};
use gapwright::results::Verdict;

/// The field's verdict, at 0.5 %, on R1 with pieces replaced and an `[estimate]`.
#[track_caller]
fn judged(pieces: &[(&str, &str)], estimate: &str) -> Verdict {
    let mut sheet = R1.sheet.to_string();
    for (piece, replacement) in pieces {
        assert!(sheet.contains(piece), "{piece}");
        sheet = sheet.replacen(piece, replacement, 1);
    }
    let verdict = run(&(sheet + "[estimate]\n" + estimate), 5e-3).results().verdict.unwrap();
    println!("{:+.1} %: {}", 100.0 * verdict.deviation, verdict.blame);
    verdict
}

/// The verdict is "too low" (or too high), and the sentence has all these words.
#[track_caller]
fn blames(verdict: &Verdict, is_low: bool, words: &[&str]) {
    assert!(!verdict.within_tolerance, "{:+.3}", verdict.deviation);
    assert_eq!(verdict.deviation < 0.0, is_low, "{:+.3}", verdict.deviation);
    for word in words {
        assert!(verdict.blame.contains(word), "`{word}` is missing: {}", verdict.blame);
    }
}

#[test]
fn a_sum_that_forgot_fringing_blames_the_gap() {
    let verdict = judged(&[], "gap_correction = \"none\"\n");
    blames(&verdict, true, &["gap 1 is to blame", "bulges more"]);
}

#[test]
fn a_sum_with_far_too_much_fringing_blames_the_gap_the_other_way() {
    let verdict = judged(&[], "gap_correction = 1.7\n");
    blames(&verdict, false, &["gap 1 is to blame", "bulges less"]);
}

#[test]
fn a_post_driven_into_saturation_is_named() {
    // The sum takes the initial permeability; at 6 A the post, whose section is the smallest, would need far more than 0.4 T.
    let law = "saturation = { initial_permeability = 2000, flux_density = \"0.4 T\" }";
    let pieces = [("permeability = 2000", law), ("1.8 A", "6 A")];
    let verdict = judged(&pieces, "gap_correction = \"corner\"\n");
    blames(&verdict, false, &["the post is to blame", "permeability has fallen"]);
}

#[test]
fn leakage_round_a_core_of_low_permeability_is_named() {
    // Permeability 20 and no gap: much of the flux goes round through the air, which the sum does not know.
    let pieces = [("[[gaps]]\nacross = \"post\"\nlength = 0.3\n", ""), ("= 2000", "= 20")];
    let verdict = judged(&pieces, "tolerance = \"1 %\"\n");
    blames(&verdict, true, &["the air round the core is to blame", "leaves it out"]);
}

#[test]
fn of_a_correct_post_gap_and_a_wrong_wall_gap_the_wall_is_named() {
    // A long gap in the thin outer wall bulges outward, where the sum without correction sees nothing; the short one in the
    // post hardly bulges.
    let gaps = "across = \"post\"\nlength = 0.02\n[[gaps]]\nacross = \"wall\"\nlength = 0.6\n";
    let post = ("across = \"post\"\nlength = 0.3\n", gaps);
    let verdict = judged(&[post], "gap_correction = \"none\"\n");
    blames(&verdict, true, &["gap 2 is to blame", "bulges more"]);
}

#[test]
fn a_stated_figure_of_the_closed_core_is_far_too_high_and_names_the_reluctances() {
    // A_L of the core without its gap, 8 µH: somebody read the wrong line of the catalogue.
    let verdict = judged(&[], "inductance_factor = \"8 uH\"\n");
    blames(&verdict, false, &["the stated figure stands for", "the field has"]);
}

#[test]
fn a_stated_figure_without_fringing_is_recognised() {
    // 42²/(R of the sum without correction): 624 µH against 700 µH.
    let plain = judged(&[], "gap_correction = \"none\"\n").inductance;
    let verdict = judged(&[], &format!("inductance = {:e}\n", (plain * 1e6).round() * 1e-6));
    blames(&verdict, true, &["without any correction for the gaps' bulging flux"]);
}

//! The hand sum against the field's references, and the blame on made-up wrong estimates.

use super::*;
use crate::geometry::samples::{gap, r1 as choke, r5 as solid_choke};
use crate::model::{Claim, Estimate, Law, MaterialId, Part};
use crate::results::LedgerRow;
use std::f64::consts::PI;

fn estimate(claim: Claim, gap_correction: GapCorrection) -> Estimate {
    Estimate { claim, gap_correction, tolerance: 0.05 }
}

fn with_correction(mut model: Model, correction: GapCorrection) -> HandSum {
    model.estimate = Some(estimate(Claim::HandSum, correction));
    hand_sum(&model).unwrap()
}

#[track_caller]
fn close(ours: f64, reference: f64, tolerance: f64) {
    assert!((ours / reference - 1.0).abs() < tolerance, "{ours} against {reference}");
}

/// Inductances of the two chokes by an independent field computation (order 8, relative error 3e-10).
const CHOKE: f64 = 0.000_700_615_815_023_722_4;
const SOLID_CHOKE: f64 = 0.000_871_386_800_933_668_4;

#[test]
fn every_correction_lies_as_far_from_the_field_as_measured() {
    // [none, one gap length, log, corner, roters]: hand/field − 1 in per cent, measured; they document the rules.
    let corrections = [
        GapCorrection::None,
        GapCorrection::OneGapLength,
        GapCorrection::Log,
        GapCorrection::Corner,
        GapCorrection::Roters,
    ];
    let measured = [
        (choke(), CHOKE, [-18.43, -10.80, -7.34, 1.58, 1.86]),
        (solid_choke(), SOLID_CHOKE, [-22.48, -11.41, -1.65, 1.43, 1.82]),
    ];
    for (model, field, per_cent) in measured {
        for (correction, per_cent) in corrections.into_iter().zip(per_cent) {
            let off = 100.0 * (with_correction(model.clone(), correction).inductance / field - 1.0);
            assert!((off - per_cent).abs() < 0.006, "{correction:?}: {off:.2} %"); // half a unit of the last digit
        }
    }
}

#[test]
fn closed_core_adds_up_to_the_core_constant() {
    let mut model = choke();
    model.gaps.clear();
    let sum = hand_sum(&model).unwrap();
    let c1 = effective(&model.core.as_ref().unwrap().dimensions(&[])).unwrap().c1;
    close(sum.total, c1 / (MU0 * 2000.0), 1e-14);
    close(sum.inductance, 42.0 * 42.0 / sum.total, 1e-15);
    assert_eq!(sum.rows.len(), 4);
}

#[test]
fn legs_lose_what_is_ground_out_of_them() {
    let sum = hand_sum(&choke()).unwrap();
    let post = PI * (5.75e-3f64.powi(2) - 2.7e-3f64.powi(2));
    close(
        sum.reluctance(RegionKind::Leg(Leg::Post)).unwrap(),
        10.7e-3 / (2000.0 * MU0 * post),
        1e-12,
    );
    let gap = &sum.rows[4];
    assert_eq!(
        (gap.region.as_str(), gap.kind),
        ("post gap", RegionKind::Gap { gap: 0, leg: Leg::Post })
    );
    close(gap.plain, 0.3e-3 / (MU0 * post), 1e-12);
    close(gap.reluctance * gap.factor, gap.plain, 1e-14);
    assert_eq!(sum.correction, GapCorrection::Log); // the default
    assert_eq!(sum.reluctance(RegionKind::Outside), None);
}

#[test]
fn a_spacer_gives_a_row_in_each_leg_and_no_leg_gets_shorter() {
    let mut model = choke();
    model.gaps = vec![gap("shim", Across::Spacer, 0.2, 0.0)];
    model.core.as_mut().unwrap().joint = 3e-6;
    let sum = hand_sum(&model).unwrap();
    let names: Vec<&str> = sum.rows.iter().map(|row| row.region.as_str()).collect();
    assert_eq!(names, ["post", "wall", "upper plate", "lower plate", "shim post", "shim wall"]);
    close(sum.rows[1].reluctance, 11e-3 / (2000.0 * MU0 * gap_area(&model, 0, Leg::Wall)), 1e-12);
    close(
        sum.rows[5].plain,
        0.2e-3 / (MU0 * PI * (12.75e-3f64.powi(2) - 10.6e-3f64.powi(2))),
        1e-12,
    );
}

#[test]
fn the_joint_counts_in_legs_whose_faces_mate() {
    let mut model = choke();
    model.core.as_mut().unwrap().joint = 3e-6;
    let wall = PI * (12.75e-3f64.powi(2) - 10.6e-3f64.powi(2));
    let sum = hand_sum(&model).unwrap();
    assert_eq!(sum.reluctance(RegionKind::Joint(Leg::Post)), None);
    close(sum.reluctance(RegionKind::Joint(Leg::Wall)).unwrap(), 3e-6 / (MU0 * wall), 1e-12);

    model.gaps[0].center = 2e-3; // the post mates again
    let sum = hand_sum(&model).unwrap();
    let post = gap_area(&model, 0, Leg::Post);
    close(sum.reluctance(RegionKind::Joint(Leg::Post)).unwrap(), 3e-6 / (MU0 * post), 1e-12);
    let names: Vec<&str> = sum.rows[4..].iter().map(|row| row.region.as_str()).collect();
    assert_eq!(names, ["post gap", "post joint", "wall joint"]);
}

#[test]
fn poles_know_the_room_on_their_flanks() {
    let mut model = choke();
    let pole = gap_pole(&model, 0, Leg::Post).unwrap();
    assert_eq!([pole.inner_radius, pole.outer_radius, pole.length], [2.7e-3, 5.75e-3, 0.3e-3]);
    close(pole.outer_heights[0], 5.35e-3, 1e-12);
    close(pole.inner_heights[1], 2.7e-3, 1e-12); // one hole radius
    assert_eq!(gap_pole(&model, 0, Leg::Wall), None);
    assert_eq!(gap_area(&model, 0, Leg::Wall), 0.0);

    model.gaps.push(gap("second", Across::Post, 0.3, 2.3));
    let pole = gap_pole(&model, 0, Leg::Post).unwrap();
    close(pole.outer_heights[1], 1e-3, 1e-9); // half of the 2 mm of post between the two
    close(pole.outer_heights[0], 5.35e-3, 1e-12);
    let wall = Model { gaps: vec![gap("w", Across::Wall, 0.2, 0.0)], ..choke() };
    let pole = gap_pole(&wall, 0, Leg::Wall).unwrap();
    close(pole.inner_heights[0], 5.4e-3, 1e-12);
    close(pole.outer_heights[0], 7.95e-3, 1e-12); // to the core's end
}

#[test]
fn gaps_that_touch_bulge_as_one() {
    let mut model = choke();
    model.gaps = vec![gap("lower", Across::Post, 0.2, -0.1), gap("upper", Across::Post, 0.1, 0.05)];
    let halves = hand_sum(&model).unwrap();
    model.gaps = vec![gap("one", Across::Post, 0.3, -0.05)];
    close(halves.total, hand_sum(&model).unwrap().total, 1e-9);
}

#[test]
fn spacers_are_stacked_and_bulge_as_one() {
    let mut model = choke();
    model.gaps = [0.1, 0.2].map(|length| gap("shim", Across::Spacer, length, 0.0)).to_vec();
    let pole = gap_pole(&model, 1, Leg::Wall).unwrap();
    close(pole.length, 0.3e-3, 1e-12);
    close(pole.inner_heights[0], 5.5e-3, 1e-12); // the plates have moved with the legs
    let two = hand_sum(&model).unwrap();
    model.gaps = vec![gap("shim", Across::Spacer, 0.3, 0.0)];
    close(two.total, hand_sum(&model).unwrap().total, 1e-12);
}

#[test]
fn distributed_gaps_have_more_reluctance_than_one_of_the_same_length() {
    // The plain sums agree; each short gap bulges less than the long one.
    let mut model = choke();
    model.gaps = (0..3)
        .map(|i| gap(&format!("gap {i}"), Across::Post, 0.1, 3.0 * (f64::from(i) - 1.0)))
        .collect();
    for correction in [
        GapCorrection::OneGapLength,
        GapCorrection::Log,
        GapCorrection::Corner,
        GapCorrection::Roters,
    ] {
        let one = with_correction(choke(), correction);
        let three = with_correction(model.clone(), correction);
        close(three.plain_total, one.plain_total, 1e-12);
        assert!(one.total < three.total, "{correction:?}");
    }
}

#[test]
fn without_a_closed_path_there_is_a_reason_instead() {
    let mut model = choke();
    model.windings[0].sections[0].radii = [13e-3, 15e-3];
    let reason = hand_sum(&model).unwrap_err().to_string();
    assert_eq!(
        reason,
        "no hand sum: winding `main` is not wholly inside the window, so not all of its turns link the post's flux"
    );
    model.windings[0].current = 0.0;
    assert_eq!(hand_sum(&model), Err(NoHandSum::NoCurrent));
    model.core.as_mut().unwrap().form =
        Form::Rod { diameter: 10e-3, hole_diameter: 0.0, height: 50e-3 };
    assert_eq!(hand_sum(&model), Err(NoHandSum::OpenPath { form: "rod" }));
    model.core = None;
    assert_eq!(hand_sum(&model), Err(NoHandSum::NoCore));
}

#[test]
fn laws_that_saturate_enter_with_their_initial_permeability() {
    let law = Law::Saturation { initial_permeability: 900.0, flux_density: 0.4 };
    assert_eq!(initial_permeability(&law), 900.0);
}

// ---- blame: the "field" is a hand sum with one thing changed, its gaps' bulging flux booked as air.

/// Ledger of a field whose reluctances are those of `truth`, `bulge` of each gap lying in the window.
fn ledger(truth: &HandSum, bulge: f64) -> Vec<LedgerRow> {
    let entry = |region: &str, reluctance: f64| LedgerRow {
        region: region.into(),
        share: reluctance / truth.total,
        reluctance: Some(reluctance),
        hand: None,
    };
    let mut window = 0.0;
    let mut rows = Vec::new();
    for row in &truth.rows {
        let in_window =
            if matches!(row.kind, RegionKind::Gap { .. }) { bulge * row.reluctance } else { 0.0 };
        window += in_window;
        rows.push(entry(&row.region, row.reluctance - in_window));
    }
    rows.push(entry("main and window", 0.7 * window));
    rows.push(entry("outside", 0.3 * window));
    rows
}

/// Verdict on the hand sum of `claimed` where the field is that of `truth`.
fn judged(claimed: &HandSum, truth: &HandSum) -> crate::results::Verdict {
    let wish = Estimate { tolerance: 0.01, ..estimate(Claim::HandSum, claimed.correction) };
    verdict(&wish, Some(claimed), truth.inductance, truth.turns, &ledger(truth, 0.15)).unwrap()
}

#[track_caller]
fn says(verdict: &crate::results::Verdict, start: &str, meaning: &str) {
    assert!(verdict.blame.starts_with(start), "{}", verdict.blame);
    assert!(verdict.blame.contains(meaning), "{}", verdict.blame);
}

#[test]
fn sum_without_correction_blames_the_gap_for_bulging() {
    let verdict = judged(
        &with_correction(choke(), GapCorrection::None),
        &with_correction(choke(), GapCorrection::Corner),
    );
    assert!(verdict.deviation < -0.05 && !verdict.within_tolerance && verdict.is_hand_sum);
    says(
        &verdict,
        "the post gap is to blame: the hand sum gives it 2.95 /µH, the field ",
        "bulges more",
    );
}

#[test]
fn sum_with_too_large_a_factor_blames_the_gap_the_other_way() {
    let claimed = with_correction(choke(), GapCorrection::Factor(1.6));
    says(
        &judged(&claimed, &with_correction(choke(), GapCorrection::Corner)),
        "the post gap is to blame",
        "bulges less",
    );
}

#[test]
fn a_post_that_saturates_is_named() {
    let claimed = with_correction(choke(), GapCorrection::Corner);
    let mut truth = claimed.clone();
    truth.rows[0].reluctance *= 3.0;
    let truth = resummed(truth);
    let verdict = judged(&claimed, &truth);
    assert!(verdict.deviation > 0.0);
    says(&verdict, "the post is to blame", "permeability has fallen");
}

#[test]
fn a_plate_that_is_half_as_thick_is_named() {
    let claimed = with_correction(choke(), GapCorrection::Corner);
    let mut truth = claimed.clone();
    truth.rows[3].reluctance *= 5.0;
    says(&judged(&claimed, &resummed(truth)), "the lower plate is to blame", "crowds");
}

#[test]
fn of_two_gaps_the_wrong_one_is_named() {
    let mut model = choke();
    model.gaps = vec![gap("shim", Across::Spacer, 0.15, 0.0)];
    let claimed = with_correction(model, GapCorrection::Corner);
    let mut truth = claimed.clone();
    truth.rows[5].reluctance *= 0.6;
    says(&judged(&claimed, &resummed(truth)), "the gap `shim wall` is to blame", "bulges more");
}

#[test]
fn a_part_that_the_sum_leaves_out_is_named() {
    let mut model = choke();
    let outline = vec![];
    model.parts.push(Part { name: "slug".into(), material: MaterialId(0), outline });
    let claimed = with_correction(model, GapCorrection::Corner);
    let mut rows = ledger(&claimed, 0.15);
    rows.push(LedgerRow { region: "slug".into(), share: 0.2, reluctance: Some(4e5), hand: None });
    let sentence = blame(&claimed, &rows, false);
    assert_eq!(
        sentence,
        "the part `slug` is to blame: the field gives it 400 /mH, the hand sum leaves it out"
    );
}

#[test]
fn within_the_tolerance_nothing_is_to_blame() {
    let claimed = with_correction(choke(), GapCorrection::Corner);
    let mut truth = claimed.clone();
    truth.rows[4].reluctance *= 0.995;
    let verdict = judged(&claimed, &resummed(truth));
    assert!(verdict.within_tolerance);
    says(&verdict, "the post gap differs most: ", "bulges more");
}

#[test]
fn a_stated_figure_that_forgot_fringing_is_recognised() {
    let truth = with_correction(choke(), GapCorrection::Corner);
    let plain = with_correction(choke(), GapCorrection::None);
    let al = (plain.inductance / 42.0 / 42.0 * 1e9).round() * 1e-9; // rounded to 1 nH, as on paper
    let wish = estimate(Claim::InductanceFactor(al), GapCorrection::Corner);
    let verdict =
        verdict(&wish, Some(&truth), truth.inductance, 42.0, &ledger(&truth, 0.15)).unwrap();
    assert!(!verdict.is_hand_sum && !verdict.within_tolerance);
    says(
        &verdict,
        "the stated figure stands for ",
        "without any correction for the gaps' bulging flux",
    );
}

#[test]
fn a_stated_figure_is_judged_by_itself_and_the_sum_is_context() {
    let truth = with_correction(choke(), GapCorrection::Corner);
    let claimed = with_correction(choke(), GapCorrection::Log);
    let rows = ledger(&truth, 0.15);
    let wish = estimate(Claim::Inductance(1.3 * truth.inductance), GapCorrection::Log);
    let judged = verdict(&wish, Some(&claimed), truth.inductance, 42.0, &rows).unwrap();
    close(judged.deviation, 0.3, 1e-12);
    says(&judged, "the stated figure stands for ", "is furthest off in the post gap");
    let alone = verdict(&wish, None, truth.inductance, 42.0, &rows).unwrap();
    says(&alone, "there is no hand sum", "");
    let nothing = estimate(Claim::HandSum, GapCorrection::Log);
    assert_eq!(verdict(&nothing, None, truth.inductance, 42.0, &rows), None);
}

#[test]
fn several_currents_leave_nothing_to_blame() {
    let sum = hand_sum(&choke()).unwrap();
    let mut rows = ledger(&sum, 0.1);
    rows.iter_mut().for_each(|row| row.reluctance = None);
    assert!(blame(&sum, &rows, false).contains("no single set of reluctances"));
    assert!(blame(&sum, &[], false).contains("no single set of reluctances"));
}

/// The totals after a row was changed.
fn resummed(mut sum: HandSum) -> HandSum {
    sum.total = sum.rows.iter().map(|row| row.reluctance).sum();
    sum.inductance = sum.turns * sum.turns / sum.total;
    sum
}

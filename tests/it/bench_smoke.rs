//! The smallest sizes of the bench run as tests, so that it cannot rot, and the iteration counts keep their bound.

#[allow(dead_code)]
#[path = "../../validation/bench/cases.rs"]
mod cases;
#[allow(dead_code)]
#[path = "../../validation/bench/iterations.rs"]
mod iterations;
#[allow(dead_code)]
#[path = "../../validation/bench/stages.rs"]
mod stages;

use cases::{CASES, Goal};
use iterations::{PERMEABILITIES, THIN_GAP_MM, count, count_pot};

/// The most iterations that may be needed for it: the aim at every size, contrast and gap.
const N_ITERATIONS_AIM: usize = 40;

#[test]
fn clock_of_the_bench_sees_every_stage() {
    for case in CASES {
        let (model, outline) = cases::model(&cases::sheet_text(case.sheet), Goal::Interval(1e-2));
        let (mut stages, outcome) = stages::run(&model, &outline);
        stages::finish(&mut stages, &model, &outline, &outcome);
        assert!(stages.seconds.iter().all(|&s| 0.0 < s), "{}: {:?}", case.name, stages.seconds);
    }
}

#[test]
fn interval_of_every_bench_case_holds_the_reference() {
    for case in CASES {
        let (model, outline) = cases::model(&cases::sheet_text(case.sheet), Goal::Interval(1e-3));
        let outcome = cases::run(&model, &outline);
        let current = model.windings[0].current;
        let [low, high] =
            [outcome.bound.low, outcome.bound.high].map(|w| 2.0 * w / current.powi(2));
        assert!(low < case.inductance && case.inductance < high, "{}: [{low}, {high}]", case.name);
    }
}

/// Sizes of the ladder that this run affords; run the large ones in the release profile.
fn sizes() -> &'static [usize] {
    match crate::cases::is_slow() {
        true => &[1_000, 10_000, 100_000, 1_000_000],
        false => &[1_000, 10_000],
    }
}

#[test]
fn cg_iterations_stay_below_the_aim_for_any_size_contrast_and_gap() {
    for &n in sizes() {
        for gap_mm in [0.3, THIN_GAP_MM] {
            // The first mesh of the thin gap has 4e4 unknowns: one small size is enough.
            if gap_mm < 0.3 && n == 1_000 {
                continue;
            }
            // One contrast is enough on the thin gap's large first mesh, unless there is time for all.
            let few = if gap_mm < 0.3 && n == 10_000 {
                &PERMEABILITIES[5..]
            } else {
                &PERMEABILITIES[..]
            };
            for &permeability in few {
                let count = count_pot(permeability, gap_mm, n);
                let what = format!("µr {permeability}, gap {gap_mm} mm: {count:?}");
                assert!(count.by_energy <= N_ITERATIONS_AIM, "{what}");
                assert!(count.by_norm <= N_ITERATIONS_AIM, "{what}");
                // Warm-started rounds need a few iterations only; 4 were measured.
                assert!(count.warm <= N_ITERATIONS_AIM / 2, "{what}");
            }
        }
    }
}

#[test]
fn cg_iterations_stay_below_the_aim_in_air_and_along_a_rod() {
    for case in CASES {
        for &n in sizes() {
            let text = cases::sheet_text(case.sheet);
            let (model, outline) = cases::model(&text, Goal::Unknowns(n));
            let count = count(&cases::run(&model, &outline));
            assert!(count.by_norm <= N_ITERATIONS_AIM, "{}: {count:?}", case.name);
        }
    }
}

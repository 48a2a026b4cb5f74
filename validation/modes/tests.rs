//! Mode matching against published values, the plane map, and itself.

use super::*;
use crate::dice::Dice;
use crate::random::gapped_pot_case;
use crate::references::{all_published, published};

fn filled(a: f64, b: f64, half_gap: f64, half_window: f64) -> GappedPot {
    GappedPot { post: a, wall: b, half_gap, half_window, winding: [a, b] }
}

#[test]
fn the_plane_edge_agrees_with_the_exact_map() {
    for row in all_published("GAP2D-WINDOW", 3) {
        let ours = edge_over_plane(1.0, row.input("h_over_l"), row.input("b_over_l"));
        // The tails of the ladders; see N_FUNCTIONS.
        row.agrees("", ours, 1e-10);
    }
}

#[test]
fn one_function_of_the_second_kind_is_worth_eight_of_the_first() {
    // The value falls towards the exact map from above; d^(1/3) is what the first family misses.
    let exact = published("GAP2D-WINDOW")[0].value("");
    let error = |n| edge_over_plane_with(1.0, 3.0, 4.0, n) / exact - 1.0;
    let errors = [[2, 0], [3, 0], [4, 0], [6, 0], [8, 0], [2, 1]].map(error);
    for pair in errors.windows(2) {
        assert!(pair[1] < pair[0] && 0.0 < pair[1], "{errors:?}");
    }
}

#[test]
fn posts_agree_with_the_published_rows() {
    for row in all_published("POST-", 14) {
        let ours = post_over_plane(
            row.input("a_over_l"),
            1.0,
            row.input("h_over_l"),
            row.input("b_over_l"),
        );
        // The rows say of themselves that they are about 5e-9 too high.
        row.agrees("P_over_mu0l", ours, 5e-9);
    }
}

#[test]
fn pot_cores_agree_with_the_published_rows() {
    for row in all_published("POTCORE-", 4) {
        let half_gap = row.input("half_gap");
        let pot = filled(row.input("a"), row.input("b"), half_gap, half_gap + row.input("h"));
        let ours = gapped_pot(&pot, N_FUNCTIONS);
        // Eleven digits in the rows, and our tails.
        row.agrees("", ours, 1e-10);
    }
}

#[test]
fn more_functions_change_nothing_for_random_pots() {
    let mut dice = Dice(5);
    for _ in 0..12 {
        let pot = gapped_pot_case(&mut dice);
        let (few, many) = (gapped_pot(&pot, N_FUNCTIONS), gapped_pot(&pot, [9, 1]));
        // What the campaigns rely on: a hundredth of the narrowest interval that they ask for.
        assert!((few / many - 1.0).abs() < 1e-8, "{pot:?}: {few} against {many}");
    }
}

#[test]
fn a_narrow_winding_at_the_wall_tends_to_the_whole_turn_there() {
    // All windings of a closed flux share the gap's part; the rest grows as the winding moves outwards.
    let [inner, outer] = [[5.0, 6.0], [11.0, 12.0]]
        .map(|winding| GappedPot { winding, ..filled(5.0, 12.0, 0.5, 10.0) });
    let difference = gapped_pot(&outer, N_FUNCTIONS) - gapped_pot(&inner, N_FUNCTIONS);
    // Uniform H_z = 1/(2H) in the extra annulus: µ0 N² π (r²)/(2H) from the first winding to the second, by hand.
    let (h, third) = (20.0, |r: f64| 2.0 * PI * (r / 3.0 + 1.0 / 12.0));
    let by_hand = (PI * (11.0 * 11.0 - 5.0 * 5.0) + third(11.0) - third(5.0)) / h;
    assert!((difference / by_hand - 1.0).abs() < 1e-12, "{difference} against {by_hand}");
}

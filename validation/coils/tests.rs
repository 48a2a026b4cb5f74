//! The coil quadrature against published values, against doubled orders, and against identities.

use super::*;
use crate::dice::Dice;
use crate::elliptic::nagaoka;
use crate::random::air_coil;
use crate::references::{all_published, published};
use std::f64::consts::PI;

fn centred(r1: f64, r2: f64, h: f64) -> Coil {
    Coil { radii: [r1, r2], heights: [-0.5 * h, 0.5 * h] }
}

#[test]
fn self_inductance_agrees_with_the_published_rows() {
    for row in all_published("SELF-", 13) {
        let (r1, r2, h) = (row.input("r1"), row.input("r2"), row.input("h"));
        // The rows carry 11 digits (9 for the flat discs).
        match h {
            0.0 => row.agrees("", disc([r1, r2]), 1e-9),
            _ => row.agrees("", self_inductance(&centred(r1, r2, h)), 1e-11),
        }
    }
}

#[test]
fn higher_orders_change_nothing_for_any_shape() {
    let finer = Orders { plane: 20, graded: 32, radial: 16 };
    let mut shapes = vec![
        centred(0.0, 1.0, 1e-3),
        centred(0.0, 1.0, 1e3),
        centred(0.0, 1.0, 1.0),
        centred(1e-4, 1.0, 0.3),
        centred(1.0, 1.001, 1e-3),
        centred(1.0, 1.001, 1e3),
        centred(1.0, 1e3, 1e-1),
        centred(0.5, 1.0, 1e-5),
    ];
    let mut dice = Dice(11);
    shapes.extend((0..6).map(|_| air_coil(&mut dice)));
    for coil in shapes {
        let (coarse, fine) = (self_inductance(&coil), self_inductance_with(&coil, finer));
        // The error statement at the head of the file.
        assert!((coarse / fine - 1.0).abs() < 1e-11, "{coil:?}: {coarse} against {fine}");
    }
}

#[test]
fn mutual_inductance_agrees_with_the_published_touching_coils() {
    let [row] = &published("COILS-")[..] else { panic!("one row expected") };
    let coil = |v: Vec<f64>| Coil { radii: [v[0], v[1]], heights: [v[2], v[3]] };
    let (first, second) = (coil(row.input_list("c1")), coil(row.input_list("c2")));
    row.agrees("M_over_mu0N1N2", mutual_inductance(&first, &second), 1e-10);
    // The row has ten digits; ours moves by 4e-12 under doubled orders.
    row.agrees("dMdz_over_mu0", mutual_slope(&first, &second), 2e-10);
}

#[test]
fn a_coil_cut_in_two_has_the_inductance_of_its_parts() {
    // L = f₁² L₁ + f₂² L₂ + 2 f₁ f₂ M with the turns shared as the areas: ties self and mutual, sideways and upwards.
    let whole = centred(0.7, 1.6, 0.8);
    let total = self_inductance(&whole);
    let beside = [Coil { radii: [0.7, 1.0], ..whole }, Coil { radii: [1.0, 1.6], ..whole }];
    let above = [Coil { heights: [-0.4, 0.3], ..whole }, Coil { heights: [0.3, 0.4], ..whole }];
    for [first, second] in [beside, above] {
        let (f1, f2) = (first.area() / whole.area(), second.area() / whole.area());
        let parts = f1 * f1 * self_inductance(&first)
            + f2 * f2 * self_inductance(&second)
            + 2.0 * f1 * f2 * mutual_inductance(&first, &second);
        assert!((parts / total - 1.0).abs() < 1e-11, "{parts} against {total}");
    }
}

#[test]
fn mutual_inductance_does_not_care_which_coil_comes_first() {
    let first = centred(0.3, 0.9, 0.5);
    let second = Coil { radii: [0.5, 1.7], heights: [0.4, 0.6] };
    let (forth, back) = (mutual_inductance(&first, &second), mutual_inductance(&second, &first));
    assert!((forth / back - 1.0).abs() < 1e-12);
}

#[test]
fn mutual_slope_is_the_difference_quotient() {
    let first = centred(0.3, 0.9, 0.5);
    let second = Coil { radii: [0.5, 1.7], heights: [0.4, 0.6] };
    let step = 1e-3;
    let up = mutual_inductance(&first, &second.raised(step));
    let down = mutual_inductance(&first, &second.raised(-step));
    let quotient = (up - down) / (2.0 * step);
    let slope = mutual_slope(&first, &second);
    // Central difference: second derivative of the slope times step²/6, here below 1e-5.
    assert!((slope / quotient - 1.0).abs() < 1e-5, "{slope} against {quotient}");
}

#[test]
fn a_thin_winding_tends_to_nagaokas_sheet() {
    // Wall of 1e-4 of the radius: the deviation is of the order of the wall over the length.
    let (a, h, wall) = (1.0, 0.8, 1e-4);
    let sheet = PI * a * a * nagaoka(a, h) / h;
    let coil = self_inductance(&centred(a - 0.5 * wall, a + 0.5 * wall, h));
    assert!((coil / sheet - 1.0).abs() < wall / h, "{coil} against {sheet}");
}

#[test]
fn a_flat_winding_tends_to_the_disc() {
    let height = 1e-4;
    let coil = self_inductance(&centred(0.5, 1.0, height));
    // First order in the height over the width, with a small factor.
    assert!((coil / disc([0.5, 1.0]) - 1.0).abs() < height / 0.5);
}

#[test]
fn brooks_found_the_best_shape_of_a_given_wire() {
    // Given wire: N ∝ side², length ∝ N · mean radius fixed ⇒ L ∝ x^(-5/3) L(x), x = mean radius/side.
    let [row] = &published("BROOKS-OPT")[..] else { panic!("one row expected") };
    let worth = |x: f64| x.powf(-5.0 / 3.0) * self_inductance(&centred(x - 0.5, x + 0.5, 1.0));
    let (mut low, mut high) = (1.2, 1.8);
    for _ in 0..40 {
        let (left, right) = (low + (high - low) / 3.0, high - (high - low) / 3.0);
        if worth(left) < worth(right) { low = left } else { high = right }
    }
    // The row has four digits; the maximum is flat.
    row.agrees("", 0.5 * (low + high), 1e-4);
    assert!((1.0 - worth(1.5) / worth(0.5 * (low + high)) - 5.28e-5).abs() < 1e-7);
}

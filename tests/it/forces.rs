//! The gap force against the difference quotient of the coenergy, the inductance's derivative, and the thin gap.

use crate::cases::{R1, R5, R8, Run, model};
use gapwright::model::{Across, Form, Model};
use gapwright::results::GapResult;
use gapwright::units::MU0;
use std::f64::consts::PI;

/// R1 with its gap in the wall.
fn wall_gap() -> Model {
    let mut model = R1.model(WIDTH);
    model.gaps[0].across = Across::Wall;
    model
}

/// R5 with a spacer in place of its gap; the winding keeps clear of the plates when they come closer.
fn spacer(length: f64) -> Model {
    let mut model = R5.model(WIDTH);
    model.gaps[0].across = Across::Spacer;
    model.gaps[0].length = length;
    model
}

/// Interval of every solve of a difference quotient; half of it is about the error of W'.
const WIDTH: f64 = 1e-5;
/// Half step of the difference quotient, relative to the gap: W' changes by 0.5 to 2 %, so 1e-5 of W' is at most 2e-3 of the
/// quotient (measured 1e-4: the errors of both ends are alike), and its curvature W' ~ 1/(l + l0) adds δ² = 4e-4.
const STEP: f64 = 0.02;
/// Virtual work at ψ_h errs in first order of the energy error only, but at the gap's corners, where B has no bound, the
/// motion stretches the worst triangles; 1 % is what the product promises for a gap force, 0.2 % what these meshes give.
const LIMIT: f64 = 2e-3;

/// The force by −(W'(l + δ) − W'(l − δ))/2δ at fixed current.
fn by_difference(model: &Model) -> f64 {
    let length = model.gaps[0].length;
    let coenergy = |factor: f64| {
        let mut model = model.clone();
        model.gaps[0].length = factor * length;
        if model.gaps[0].across == Across::Spacer {
            // A gap ground into one half goes with that half.
            for gap in &mut model.gaps[1..] {
                gap.center += 0.5 * (factor - 1.0) * length * gap.center.signum();
            }
        }
        Run::new(model).results().coenergy.value
    };
    -(coenergy(1.0 + STEP) - coenergy(1.0 - STEP)) / (2.0 * STEP * length)
}

#[track_caller]
fn check(what: &str, model: Model) -> Vec<GapResult> {
    let wanted = by_difference(&model);
    for width in [1e-3, WIDTH] {
        let mut model = model.clone();
        model.accuracy.interval = width;
        let results = Run::new(model).results();
        let force = results.gaps[0].force;
        println!(
            "{what} at {width:.0e}: {force:.6e} N, difference quotient {wanted:.6e} N, {:+.4} %, B²A/2µ0 {:.4e} N",
            100.0 * (force / wanted - 1.0),
            results.gaps[0].plain_force
        );
        assert!(0.0 < force, "{what}: a gap is pulled shut");
        // At a coarse interval the promise, at the finest what this method can do.
        let limit = if width == WIDTH { LIMIT } else { 1e-2 };
        assert!(
            (force / wanted - 1.0).abs() <= limit,
            "{what} at {width}: {force} against {wanted}"
        );
        if width == WIDTH {
            return results.gaps;
        }
    }
    unreachable!()
}

#[test]
fn force_on_a_post_gap_is_the_derivative_of_the_coenergy() {
    check("R1 post gap", R1.model(WIDTH));
    check("R5 post gap", R5.model(WIDTH));
}

#[test]
fn force_on_a_gap_off_the_middle_is_the_derivative_of_the_coenergy() {
    let mut model = R5.model(WIDTH);
    model.gaps[0].center = 5e-3;
    check("R5 post gap at z = 5 mm", model);
}

#[test]
fn force_on_a_wall_gap_is_the_derivative_of_the_coenergy() {
    check("R1 wall gap", wall_gap());
}

#[test]
fn force_on_a_spacer_is_the_derivative_of_the_coenergy() {
    let gaps = check("R5 spacer", spacer(0.5e-3));
    // One spacer, two rows (post and wall), one force: the halves move as one.
    assert_eq!(gaps.len(), 2);
    assert_eq!(gaps[0].force, gaps[1].force);
}

#[test]
fn force_on_the_pole_of_a_drum_or_rod_is_the_derivative_of_the_coenergy() {
    let mut rod = R8.model(WIDTH);
    rod.core.as_mut().unwrap().form =
        Form::Rod { diameter: 10e-3, hole_diameter: 0.0, height: 60e-3 };
    rod.gaps = R5.model(WIDTH).gaps;
    check("rod with a gap", rod);
    let drum = r#"
[materials.ferrite]
permeability = 500
[core]
material = "ferrite"
form = "drum"
flange_diameter = 12
post_diameter = 6
height = 10
window_height = 7
[[gaps]]
across = "post"
length = 0.4
[[windings]]
name = "coil"
turns = 50
radii = [3.2, 5]
heights = [-3, 3]
"#;
    check("drum with a gap", model(drum, WIDTH));
}

#[test]
fn a_current_of_either_sign_pulls_the_gap_shut_with_its_square() {
    let force = |current: f64| {
        let mut model = R5.model(1e-4);
        model.windings[0].current = current;
        Run::new(model).results().gaps[0].force
    };
    let one = force(1.0);
    assert!(0.0 < one);
    // The linear problem scales exactly; only rounding and the solver's stop differ.
    for (current, square) in [(-1.0, 1.0), (2.0, 4.0)] {
        assert!((force(current) / (square * one) - 1.0).abs() <= 1e-9);
    }
}

#[test]
fn inductance_falls_with_the_gap_as_the_force_says() {
    let (model, step) = (R5.model(WIDTH), STEP);
    let length = model.gaps[0].length;
    let inductance = |factor: f64| {
        let mut model = model.clone();
        model.gaps[0].length = factor * length;
        Run::new(model).results().inductance.unwrap().value
    };
    let slope = (inductance(1.0 + step) - inductance(1.0 - step)) / (2.0 * step * length);
    let results = Run::new(model.clone()).results();
    let current = results.windings[0].current;
    let by_force = -2.0 * results.gaps[0].force / current.powi(2);
    println!("dL/dl {slope:.6e} H/m, −2F/I² {by_force:.6e} H/m");
    assert!((by_force / slope - 1.0).abs() <= LIMIT);
}

#[test]
fn a_thin_gap_pulls_with_the_pressure_of_its_field() {
    // B²/2µ0: 397 887 N/m² at 1 T (any text on electromagnets). The gap grows into the core of µ_r = 1500, whose own
    // energy density B²/2µ0µ_r is taken away: 1 − 1/µ_r. The rest is the rim, proportional to l/r for thin gaps.
    let excess = |length: f64| {
        let mut model = R5.model(1e-5);
        model.gaps[0].length = length;
        let results = Run::new(model).results();
        let gap = &results.gaps[0];
        let b = (2.0 * MU0 * gap.plain_force / (PI * 7e-3_f64.powi(2))).sqrt();
        let ratio = gap.force / gap.plain_force;
        println!("gap {:.5} mm: B {b:.4} T, force/plain {ratio:.5}", 1e3 * length);
        ratio - (1.0 - 1.0 / 1500.0)
    };
    let excesses = [0.4e-3, 0.1e-3, 0.025e-3, 0.00625e-3].map(excess);
    for pair in excesses.windows(2) {
        assert!((0.2..0.3).contains(&(pair[1] / pair[0])), "{excesses:?}");
    }
    assert!(excesses[3].abs() < 1e-3, "{excesses:?}");
}

/// R5's core with variations, each another way in which moving faces can meet what stands beside them.
fn variations() -> Vec<(&'static str, Model)> {
    let vary = |change: &dyn Fn(&mut Model)| {
        let mut model = R5.model(WIDTH);
        change(&mut model);
        model
    };
    let radii = |model: &mut Model, radii: [f64; 2]| model.windings[0].sections[0].radii = radii;
    vec![
        ("round window corners", vary(&|m| m.core.as_mut().unwrap().corner_radius = 1e-3)),
        ("winding on the post", vary(&|m| radii(m, [7e-3, 13.4e-3]))),
        (
            "winding on post and wall, full window",
            vary(&|m| {
                radii(m, [7e-3, 14e-3]);
                m.windings[0].sections[0].heights = [-8e-3, 8e-3];
            }),
        ),
        ("gap near the plate", vary(&|m| m.gaps[0].center = 6.5e-3)),
        (
            "short winding that ends beside the gap",
            vary(&|m| {
                radii(m, [7e-3, 13.4e-3]);
                m.windings[0].sections[0].heights = [-0.3e-3, 4e-3];
            }),
        ),
        (
            "another gap close by",
            vary(&|m| {
                let mut other = m.gaps[0].clone();
                other.center = 2e-3;
                m.gaps.push(other);
            }),
        ),
        ("joint in the wall", vary(&|m| m.core.as_mut().unwrap().joint = 5e-6)),
        (
            "saturating law",
            vary(&|m| {
                m.materials[0].law = gapwright::model::Law::saturation(1500.0, 0.4).unwrap();
                m.windings[0].current = 4.0;
            }),
        ),
        (
            "spacer, saturating law",
            vary(&|m| {
                m.materials[0].law = gapwright::model::Law::saturation(1500.0, 0.4).unwrap();
                m.windings[0].current = 4.0;
                m.gaps[0].across = Across::Spacer;
                m.gaps[0].length = 0.3e-3;
            }),
        ),
        (
            "two spacers",
            vary(&|m| {
                m.gaps[0].across = Across::Spacer;
                m.gaps[0].length = 0.3e-3;
                let mut other = m.gaps[0].clone();
                // Stacked on the first: it has no height of its own.
                other.length = 0.2e-3;
                m.gaps.push(other);
            }),
        ),
        (
            "spacer and post gap",
            vary(&|m| {
                let mut other = m.gaps[0].clone();
                m.gaps[0].across = Across::Spacer;
                m.gaps[0].length = 0.3e-3;
                other.center = 4e-3;
                m.gaps.push(other);
            }),
        ),
    ]
}

#[test]
fn force_is_the_derivative_of_the_coenergy_whatever_stands_beside_the_gap() {
    for (what, model) in variations() {
        check(what, model);
    }
}

/// R5 with a spacer and a winding that fills the window from post to wall.
fn spacer_beside_a_touching_winding(top: f64) -> Model {
    let mut model = spacer(0.3e-3);
    model.windings[0].sections[0].radii = [7e-3, 14e-3];
    model.windings[0].sections[0].heights = [-top, top];
    model
}

#[test]
fn a_winding_on_the_legs_keeps_its_height_under_a_spacers_virtual_motion() {
    check("spacer beside a touching winding", spacer_beside_a_touching_winding(7.2e-3));
}

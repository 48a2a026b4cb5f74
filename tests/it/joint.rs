//! The joint: a thin layer of equal reluctance against a gap of that length that is really meshed.

use crate::cases::{R1, R5, Run, is_slow};
use gapwright::model::{Across, Gap, Model};

/// Both intervals; half of one is about the error of a value.
fn width() -> f64 {
    if is_slow() { 1e-6 } else { 1e-5 }
}

/// The model with its joint drawn as gaps in the legs that meet at z = 0.
fn meshed(model: &Model, legs: &[Across]) -> Model {
    let mut model = model.clone();
    let core = model.core.as_mut().unwrap();
    let length = std::mem::take(&mut core.joint);
    for &across in legs {
        model.gaps.push(Gap { name: format!("{across:?} joint"), across, length, center: 0.0 });
    }
    model
}

/// A_L of the layer over A_L of the meshed gap, less 1; and what the joint itself takes from A_L.
#[track_caller]
fn deviation(what: &str, base: &Model, joint: f64, legs: &[Across]) -> (f64, f64) {
    let factor = |model: &Model| {
        let run = Run::new(model.clone());
        let results = run.results();
        (results.inductance_factor.unwrap().value, results.n_unknowns)
    };
    let mut layered = base.clone();
    layered.core.as_mut().unwrap().joint = joint;
    let (closed, _) = factor(base);
    let (layer, n_layer) = factor(&layered);
    let (gap, n_gap) = factor(&meshed(&layered, legs));
    let (deviation, effect) = (layer / gap - 1.0, gap / closed - 1.0);
    println!(
        "{what}, {:.0} µm: joint takes {:+.3} %, layer against gap {:+.2e} ({n_layer} and {n_gap} unknowns)",
        1e6 * joint,
        100.0 * effect,
        deviation
    );
    (deviation, effect)
}

fn ungapped() -> Model {
    let mut model = R5.model(width());
    model.gaps.clear();
    model
}

/// What a gap's rims add to its permeance, as a share: 2l/(πw)·(1 + ln(πh/4l)) for faces of width w and sides of height h.
///
/// The layer has no rims, so it lets a little less flux through; in iron that is not infinitely permeable the true share is
/// smaller. Source: A. Balakrishnan, W. T. Joines, T. G. Wilson, IEEE Trans. Power Electron. 12 (1997) 654 (the limit of
/// large h/l, one rim a side).
fn rims(length: f64, width: f64, height: f64) -> f64 {
    let pi = std::f64::consts::PI;
    2.0 * length / (pi * width) * (1.0 + (pi * height / (4.0 * length)).ln())
}

#[test]
fn a_layer_of_equal_reluctance_stands_for_a_thin_gap() {
    let both: &[Across] = &[Across::Post, Across::Wall];
    // Width of the wall, where the shares are largest, and half height of the window.
    let mut cases: Vec<(&str, Model, &[Across], [f64; 2])> = vec![
        ("R5, joint in the wall", R5.model(width()), &both[1..], [2e-3, 8e-3]),
        ("R5 without a gap, joint in post and wall", ungapped(), both, [2e-3, 8e-3]),
    ];
    if is_slow() {
        cases.push(("R1, joint in the wall", R1.model(width()), &both[1..], [2.15e-3, 5.5e-3]));
    }
    let joints: &[f64] = if is_slow() { &[1e-6, 2e-6, 5e-6, 20e-6] } else { &[1e-6, 5e-6] };
    for (what, model, legs, [face, height]) in cases {
        for &joint in joints {
            // Whole layers across 1 µm in both legs make 120 000 unknowns.
            if legs.len() == 2 && joint < 5e-6 && !is_slow() {
                continue;
            }
            let (deviation, effect) = deviation(what, &model, joint, legs);
            assert!(effect < 0.0, "a joint lowers A_L");
            let limit = rims(joint, face, height) * effect.abs();
            println!("    limit {limit:.1e} + the intervals");
            assert!(
                -limit - width() <= deviation && deviation <= width(),
                "{what}, {joint} m: {deviation:.2e} of A_L, limit {limit:.2e}"
            );
        }
    }
}

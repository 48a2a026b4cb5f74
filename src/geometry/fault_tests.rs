//! Every fault of a section, in the user's words.

use super::samples::{core, drum, empty, gap, part, r1, r7, r8, winding};
use super::*;
use crate::model::{Across, Form, Law, PotWall};

const MM: f64 = 1e-3;

#[track_caller]
fn check_fault(model: &Model, subject: Subject, key: Option<&str>, words: &[&str]) {
    let fault = outline(model).unwrap_err();
    assert_eq!((fault.subject, fault.key), (subject, key), "{fault}");
    for word in words {
        assert!(fault.message.contains(word), "{:?} does not say {word:?}", fault.message);
    }
    let first = fault.message.chars().next().unwrap();
    assert!(
        !first.is_uppercase() && !fault.message.ends_with('.') && !fault.help.is_empty(),
        "{fault:?}"
    );
}

#[test]
fn overlaps_name_both_shapes_and_the_place() {
    let coil =
        |radii, heights| Model { windings: vec![winding("main", 1.0, radii, heights)], ..r1() };
    let subject = Subject::Winding { winding: 0, section: 0 };
    let into_post = coil([5.5, 10.2], [-4.9, 4.9]);
    check_fault(
        &into_post,
        subject,
        Some("radii"),
        &["winding `main` overlaps the post near r = 5.", "z = "],
    );
    assert_eq!(outline(&into_post).unwrap_err().other, Some(Subject::Core));
    let through_plate = coil([6.6, 10.2], [-4.9, 6.0]);
    check_fault(
        &through_plate,
        subject,
        Some("heights"),
        &["winding `main` overlaps the upper plate near"],
    );
    let inside_wall = coil([11.0, 12.0], [-1.0, 1.0]);
    check_fault(&inside_wall, subject, Some("radii"), &["winding `main` overlaps the wall near"]);
    let in_gap = coil([3.0, 4.0], [-0.1, 0.1]);
    check_fault(&in_gap, subject, Some("radii"), &["winding `main` overlaps gap `post gap` near"]);
}

#[test]
fn nested_equal_and_crossing_parts_are_overlaps() {
    let square = |x: f64, w: f64| [(x, -w), (x + 2.0 * w, -w), (x + 2.0 * w, w), (x, w)];
    let two = |a: &[(f64, f64)], b: &[(f64, f64)]| Model {
        parts: vec![part("a", a), part("b", b)],
        ..empty()
    };
    let words = ["part `b` overlaps part `a` near r ="];
    for other in
        [square(2.0, 1.0), square(1.0, 2.0), square(2.5, 0.5), square(2.0, 0.5), square(3.0, 0.9)]
    {
        check_fault(&two(&square(2.0, 1.0), &other), Subject::Part(1), Some("outline"), &words);
    }
    // A plus sign: corners of neither lie inside the other.
    let (flat, tall) = (
        [(1.0, -1.0), (7.0, -1.0), (7.0, 1.0), (1.0, 1.0)],
        [(3.0, -3.0), (5.0, -3.0), (5.0, 3.0), (3.0, 3.0)],
    );
    check_fault(&two(&flat, &tall), Subject::Part(1), Some("outline"), &words);
    // Diamond in a square: every corner of one lies on the border of the other.
    let diamond = [(2.0, 0.0), (3.0, -1.0), (4.0, 0.0), (3.0, 1.0)];
    check_fault(&two(&square(2.0, 1.0), &diamond), Subject::Part(1), Some("outline"), &words);
}

#[test]
fn windings_may_not_overlap_each_other_or_parts() {
    let mut model = r1();
    model.windings.push(winding("second", 5.0, [10.0, 10.4], [-1.0, 1.0]));
    let subject = Subject::Winding { winding: 1, section: 0 };
    check_fault(
        &model,
        subject,
        Some("radii"),
        &["winding `second` overlaps winding `main` near r = 10"],
    );
    model.windings.pop();
    model.parts.push(part("ring", &[(10.0, -1.0), (10.4, -1.0), (10.4, 1.0), (10.0, 1.0)]));
    let main = Subject::Winding { winding: 0, section: 0 };
    check_fault(&model, main, Some("radii"), &["winding `main` overlaps part `ring` near"]);
}

#[test]
fn gaps_that_cannot_be_are_refused() {
    let with = |gaps: Vec<crate::model::Gap>| Model { gaps, ..r1() };
    let g = Subject::Gap(0);
    check_fault(
        &with(vec![gap("g", Across::Post, 0.0, 0.0)]),
        g,
        Some("length"),
        &["gap `g`", "greater than 0"],
    );
    check_fault(&with(vec![gap("g", Across::Post, f64::NAN, 0.0)]), g, Some("length"), &["NaN"]);
    check_fault(&with(vec![gap("g", Across::Post, 0.3, f64::NAN)]), g, Some("center"), &["NaN"]);
    let outside = with(vec![gap("g", Across::Post, 0.3, 5.4)]);
    check_fault(
        &outside,
        g,
        Some("center"),
        &["outside its leg", "z = 5.25 to 5.55 mm", "z = -5.5 to 5.5 mm"],
    );
    let whole = with(vec![gap("g", Across::Wall, 11.0, 0.0)]);
    check_fault(&whole, g, Some("length"), &["takes the whole wall away"]);
    let both = with(vec![gap("g", Across::Post, 0.3, 0.0), gap("h", Across::Post, 0.3, 0.2)]);
    check_fault(
        &both,
        Subject::Gap(1),
        Some("center"),
        &["gap `g` and gap `h` overlap from z = 0.05 to 0.15 mm"],
    );
    let with_spacer =
        with(vec![gap("g", Across::Spacer, 0.3, 0.0), gap("h", Across::Post, 0.3, 0.0)]);
    check_fault(&with_spacer, Subject::Gap(1), Some("center"), &["gap `g` and gap `h` overlap"]);
    let rod = Model { gaps: vec![gap("g", Across::Spacer, 0.3, 0.0)], ..r8() };
    check_fault(&rod, g, Some("across"), &["a rod has no halves"]);
    let drum = Model { gaps: vec![gap("g", Across::Wall, 0.3, 0.0)], ..drum() };
    check_fault(&drum, g, Some("across"), &["a drum has no wall"]);
    let coil = Model { gaps: vec![gap("g", Across::Post, 0.3, 0.0)], ..r7() };
    check_fault(&coil, g, None, &["gap `g` needs a core"]);
    let mut rounded = with(vec![gap("g", Across::Post, 0.3, 5.2)]);
    rounded.core.as_mut().unwrap().corner_radius = 0.5 * MM;
    check_fault(&rounded, g, Some("center"), &["the straight part of the post z = -5 to 5 mm"]);
}

#[test]
fn dimensions_out_of_order_are_refused_by_key() {
    let pot = |post: f64, inner: f64, outer: f64, hole: f64, height: f64, window: f64| Model {
        core: Some(core(Form::Pot {
            wall: PotWall::OuterDiameter(outer * MM),
            wall_inner_diameter: inner * MM,
            post_diameter: post * MM,
            hole_diameter: hole * MM,
            height: height * MM,
            window_height: window * MM,
        })),
        ..empty()
    };
    for (model, key, words) in [
        (
            pot(11.5, 11.0, 25.5, 0.0, 16.0, 11.0),
            "post_diameter",
            "post_diameter is 11.5 mm and wall_inner_diameter is 11 mm",
        ),
        (
            pot(11.5, 21.0, 20.0, 0.0, 16.0, 11.0),
            "wall_inner_diameter",
            "is 21 mm and outer_diameter is 20 mm",
        ),
        (pot(11.5, 21.0, 25.5, 11.5, 16.0, 11.0), "hole_diameter", "must be smaller"),
        (
            pot(11.5, 21.0, 25.5, -1.0, 16.0, 11.0),
            "hole_diameter",
            "-1 mm; it must be 0 or greater",
        ),
        (
            pot(11.5, 21.0, 25.5, 0.0, 11.0, 11.0),
            "window_height",
            "window_height is 11 mm and height is 11 mm",
        ),
        (pot(f64::NAN, 21.0, 25.5, 0.0, 16.0, 11.0), "post_diameter", "NaN mm"),
        (pot(11.5, 21.0, f64::INFINITY, 0.0, 16.0, 11.0), "outer_diameter", "inf mm"),
        (pot(0.0, 21.0, 25.5, 0.0, 16.0, 11.0), "post_diameter", "greater than 0"),
    ] {
        check_fault(&model, Subject::Core, Some(key), &[words]);
    }
    let mut rounded = r1();
    rounded.core.as_mut().unwrap().corner_radius = 3.0 * MM;
    check_fault(&rounded, Subject::Core, Some("corner_radius"), &["3 mm", "less than 2.425 mm"]);
    let mut rod = r8();
    rod.core.as_mut().unwrap().joint = 1e-6;
    check_fault(&rod, Subject::Core, Some("joint"), &["a rod has no mating faces"]);
    let mut near = Model { gaps: vec![gap("g", Across::Post, 0.3, 0.151)], ..r1() };
    near.core.as_mut().unwrap().joint = 5e-6;
    check_fault(
        &near,
        Subject::Core,
        Some("joint"),
        &["the joint of 0.005 mm does not fit at z = 0"],
    );
}

#[test]
fn windings_without_area_or_left_of_the_axis_are_refused() {
    let coil =
        |radii, heights| Model { windings: vec![winding("w", 1.0, radii, heights)], ..empty() };
    let w = Subject::Winding { winding: 0, section: 0 };
    check_fault(
        &coil([3.0, 2.0], [0.0, 1.0]),
        w,
        Some("radii"),
        &["radii of winding `w` are inverted: 3 mm to 2 mm"],
    );
    check_fault(
        &coil([2.0, 3.0], [1.0, 1.0]),
        w,
        Some("heights"),
        &["heights of winding `w` leave no room"],
    );
    check_fault(&coil([-2.0, 3.0], [0.0, 1.0]), w, Some("radii"), &["starts at r = -2 mm"]);
    check_fault(&coil([2.0, f64::NAN], [0.0, 1.0]), w, Some("radii"), &["not lengths"]);
    check_fault(&empty(), Subject::Sheet, None, &["the section is empty"]);
}

#[test]
fn outlines_that_are_no_polygon_are_refused() {
    let one = |corners: &[(f64, f64)]| Model { parts: vec![part("p", corners)], ..empty() };
    let p = Subject::Part(0);
    let key = Some("outline");
    check_fault(&one(&[(1.0, 0.0), (2.0, 0.0)]), p, key, &["part `p` has 2 corners"]);
    check_fault(
        &one(&[(1.0, 0.0), (2.0, 2.0), (2.0, 0.0), (1.0, 1.0)]),
        p,
        key,
        &["crosses itself near r = "],
    );
    check_fault(&one(&[(1.0, 0.0), (2.0, 0.0), (3.0, 0.0)]), p, key, &["no area"]);
    check_fault(
        &one(&[(1.0, 0.0), (2.0, 0.0), (2.0, 0.0), (1.0, 1.0)]),
        p,
        key,
        &["corners 2 and 3", "r = 2 mm, z = 0 mm"],
    );
    check_fault(
        &one(&[(-1.0, 0.0), (2.0, 0.0), (2.0, 1.0)]),
        p,
        key,
        &["corner 1 of part `p` has r = -1 mm"],
    );
    check_fault(
        &one(&[(1.0, f64::NAN), (2.0, 0.0), (2.0, 1.0)]),
        p,
        key,
        &["corner 1", "not a point"],
    );
    let pinched = [(1.0, 0.0), (3.0, 0.0), (3.0, 2.0), (2.0, 0.0), (1.0, 2.0)];
    check_fault(&one(&pinched), p, key, &["touches itself at r = 2 mm, z = 0 mm"]);
    let twice = [(1.0, 0.0), (2.0, 1.0), (3.0, 0.0), (3.0, 2.0), (2.0, 1.0), (1.0, 2.0)];
    check_fault(&one(&twice), p, key, &["touches itself at r = 2 mm, z = 1 mm"]);
    let mut fillet = one(&[(1.0, 0.0), (3.0, 0.0), (3.0, 2.0), (1.0, 2.0)]);
    fillet.parts[0].outline[2].fillet_radius = 2.5 * MM;
    check_fault(
        &fillet,
        p,
        key,
        &["in part `p` the fillet of 2.5 mm at corner 3 does not fit", "2 mm long"],
    );
    fillet.parts[0].outline[2].fillet_radius = -1.0;
    check_fault(&fillet, p, key, &["less than 0"]);
}

#[test]
fn a_section_in_the_wrong_unit_is_refused() {
    for scale in [1e-9, 1e9, 1e200] {
        let model = Model {
            windings: vec![winding("w", 1.0, [2.0 * scale, 3.0 * scale], [0.0, scale])],
            ..empty()
        };
        let w = Subject::Winding { winding: 0, section: 0 };
        check_fault(&model, w, None, &["winding `w` reaches", "mm from the origin"]);
    }
}

#[test]
fn a_tip_sharper_than_the_mesh_can_do_is_refused_by_its_place() {
    let wedge = |height: f64| Model {
        parts: vec![part("wedge", &[(1.0, 0.0), (10.0, 0.0), (10.0, height)])],
        ..empty()
    };
    let words = ["borders of part `wedge` meet under", "r = 1 mm, z = 0 mm"];
    check_fault(&wedge(1e-5), Subject::Part(0), Some("outline"), &words);
    outline(&wedge(1e-2)).unwrap();
    // The axis is a border as well.
    let needle = |r: f64| Model {
        parts: vec![part("needle", &[(0.0, 0.0), (r, 10.0), (r, 11.0), (0.0, 11.0)])],
        ..empty()
    };
    check_fault(&needle(5e-4), Subject::Part(0), Some("outline"), &["r = 0 mm, z = 0 mm"]);
    outline(&needle(0.1)).unwrap();
}

#[test]
fn parts_of_high_contrast_that_touch_only_in_a_point_are_refused() {
    let pair = |permeability: f64| {
        let mut model = Model {
            parts: vec![
                part("a", &[(2.0, 0.0), (4.0, 0.0), (4.0, 2.0), (2.0, 2.0)]),
                part("b", &[(4.0, 2.0), (6.0, 2.0), (6.0, 4.0), (4.0, 4.0)]),
            ],
            ..empty()
        };
        model.materials[0].law = Law::Constant { permeability };
        model
    };
    let words = ["part `a` and part `b` touch only in a point, r = 4 mm, z = 2 mm"];
    check_fault(&pair(2000.0), Subject::Part(1), Some("outline"), &words);
    check_fault(&pair(1e-3), Subject::Part(1), Some("outline"), &words);
    outline(&pair(20.0)).unwrap();
}

//! Outlines of the reference sections, and every fault in the user's words.

use super::samples::{core, drum, empty, gap, part, r1, r5, r7, r8, winding};
use super::*;
use crate::model::{Across, Form, Law, PotWall};
use std::f64::consts::FRAC_PI_4;

const MM: f64 = 1e-3;

/// Area of a region [mm²].
fn region_area(outline: &Outline, name: &str) -> f64 {
    let region = outline.regions.iter().find(|r| r.name == name);
    let region = region.unwrap_or_else(|| panic!("no region {name}"));
    region.polygons.iter().map(|polygon| area(polygon)).sum::<f64>() / (MM * MM)
}

#[track_caller]
fn check_areas(model: &Model, expected: &[(&str, f64)]) -> Outline {
    let outline = outline(model).unwrap();
    let names: Vec<&str> = outline.regions[1..].iter().map(|r| r.name.as_str()).collect();
    assert_eq!(names, expected.iter().map(|e| e.0).collect::<Vec<_>>());
    for &(name, size) in expected {
        // Sums of a few products of two-digit decimals: a dozen roundings.
        let found = region_area(&outline, name);
        assert!((found - size).abs() < 1e-13 * size.max(1.0) * 100.0, "{name}: {found} mm², drawn {size} mm²");
    }
    check_planar(&outline);
    outline
}

/// No two segments cross, none passes through a point, every point is used, the axis is covered, the cap is around all.
#[track_caller]
fn check_planar(outline: &Outline) {
    let size = outline.cap.radius;
    let at = |id: u32| outline.points[id as usize];
    let mut used = vec![false; outline.points.len()];
    for (i, &[a, b]) in outline.segments.iter().enumerate() {
        used[a as usize] = true;
        used[b as usize] = true;
        for (id, &p) in outline.points.iter().enumerate() {
            if id as u32 != a && id as u32 != b {
                let (_, away) = polygon::nearest_on_segment(at(a), at(b), p);
                assert!(away > 1e-10 * size, "segment {a}–{b} passes through point {id}");
            }
        }
        for &[c, d] in &outline.segments[..i] {
            assert_eq!(polygon::crossing(at(a), at(b), at(c), at(d)), None, "{a}–{b} and {c}–{d} cross");
        }
    }
    assert!(used.iter().all(|&used| used), "a point belongs to no segment");
    let on_axis = outline.segments.iter().filter(|s| s.iter().all(|&id| at(id).r == 0.0));
    let axis: f64 = on_axis.map(|&[a, b]| (at(a).z - at(b).z).abs()).sum();
    assert!((axis - 2.0 * size).abs() < 1e-14 * size, "the axis is not covered once");
    let center = Point { r: 0.0, z: outline.cap.center_z };
    let inradius = size * (std::f64::consts::PI / 16.0).cos();
    for &p in &outline.points[..outline.points.len() - 9] {
        assert!(polygon::distance(center, p) < 0.8 * inradius, "{p:?} is too near the cap");
    }
}

#[track_caller]
fn check_fault(model: &Model, subject: Subject, key: Option<&str>, words: &[&str]) {
    let fault = outline(model).unwrap_err();
    assert_eq!((fault.subject, fault.key), (subject, key), "{fault}");
    for word in words {
        assert!(fault.message.contains(word), "{:?} does not say {word:?}", fault.message);
    }
    let first = fault.message.chars().next().unwrap();
    assert!(!first.is_uppercase() && !fault.message.ends_with('.') && !fault.help.is_empty(), "{fault:?}");
}

#[test]
fn a_gapped_pot_core_has_the_areas_of_its_drawing() {
    let outline = check_areas(
        &r1(),
        &[
            ("window", 4.85 * 11.0),
            ("post", 3.05 * 10.7),
            ("wall", 2.15 * 11.0),
            ("upper plate", 10.05 * 2.55),
            ("lower plate", 10.05 * 2.55),
            ("post gap", 3.05 * 0.3),
            ("main", 3.6 * 9.8),
        ],
    );
    let main = &outline.regions[7];
    let density = 42.0 / (3.6 * 9.8 * MM * MM);
    assert!((main.current_density / density - 1.0).abs() < 1e-14);
    assert_eq!(outline.cap.center_z, 0.0);
    assert_eq!(outline.regions[2].polygons.len(), 2);
}

#[test]
fn a_spacer_lifts_the_halves_and_makes_one_gap_a_leg() {
    let model = Model { gaps: vec![gap("shim", Across::Spacer, 0.2, 0.0)], ..r5() };
    let outline = check_areas(
        &model,
        &[
            ("window", 7.0 * 16.2),
            ("post", 7.0 * 16.0),
            ("wall", 2.0 * 16.0),
            ("upper plate", 16.0 * 3.5),
            ("lower plate", 16.0 * 3.5),
            ("shim post", 7.0 * 0.2),
            ("shim wall", 2.0 * 0.2),
            ("main", 5.2 * 14.4),
        ],
    );
    assert_eq!(outline.regions[6].kind, RegionKind::Gap { gap: 0, leg: Leg::Post });
    assert_eq!(outline.regions[7].kind, RegionKind::Gap { gap: 0, leg: Leg::Wall });
}

#[test]
fn two_spacers_and_gaps_beside_them_stack_without_overlap() {
    let gaps = vec![
        gap("a", Across::Spacer, 0.2, 0.0),
        gap("b", Across::Spacer, 0.1, 0.0),
        gap("c", Across::Post, 0.5, 0.4),
        gap("d", Across::Wall, 0.5, -3.0),
    ];
    let outline = outline(&Model { gaps, ..r5() }).unwrap();
    check_planar(&outline);
    assert!((region_area(&outline, "post") - 7.0 * 15.5).abs() < 1e-11);
    assert!((region_area(&outline, "c") - 7.0 * 0.5).abs() < 1e-11);
}

#[test]
fn a_joint_is_a_thicker_layer_of_equal_reluctance() {
    let mut model = r1();
    model.core.as_mut().unwrap().joint = 2e-6;
    let outline = outline(&model).unwrap();
    check_planar(&outline);
    // The post is gapped at z = 0, the wall is not.
    let joints: Vec<&Region> = outline.regions.iter().filter(|r| matches!(r.kind, RegionKind::Joint(_))).collect();
    assert_eq!(joints.len(), 1);
    assert_eq!(joints[0].name, "wall joint");
    let thickness = 64e-6;
    assert!((region_area(&outline, "wall joint") - 2.15 * 0.064).abs() < 1e-12);
    let reluctance = thickness / joints[0].permeability;
    assert!((reluctance / (2e-6 + (thickness - 2e-6) / 2000.0) - 1.0).abs() < 1e-14);

    model.materials[0].law = Law::Saturation { initial_permeability: 2000.0, flux_density: 0.4 };
    let saturating = super::outline(&model).unwrap();
    let joint = saturating.regions.iter().find(|r| r.name == "wall joint").unwrap();
    assert!((thickness / joint.permeability / 2e-6 - 1.0).abs() < 1e-14);
}

#[test]
fn a_joint_thicker_than_its_layer_may_be_is_air() {
    let mut model = Model { gaps: Vec::new(), ..r1() };
    model.core.as_mut().unwrap().joint = 0.4e-3;
    let outline = outline(&model).unwrap();
    let joints = outline.regions.iter().filter(|r| matches!(r.kind, RegionKind::Joint(_)));
    assert_eq!(joints.map(|r| r.permeability).collect::<Vec<_>>(), [1.0, 1.0]);
    assert!((region_area(&outline, "post joint") - 3.05 * 0.4).abs() < 1e-12);
}

#[test]
fn rounded_window_corners_are_shared_by_leg_and_plate() {
    let mut model = r1();
    model.core.as_mut().unwrap().corner_radius = 0.5 * MM;
    let outline = outline(&model).unwrap();
    check_planar(&outline);
    // Eight chords leave 0.6 % of a quarter disc to the fillet.
    let quarter = 4.0 * (FRAC_PI_4 / 4.0).sin();
    let fillet = 0.25 * (1.0 - quarter);
    assert!(fillet > 0.25 * (1.0 - FRAC_PI_4) && fillet < 0.25 * (1.0 - FRAC_PI_4) * 1.03);
    assert!((region_area(&outline, "window") - (4.85 * 11.0 - 4.0 * fillet)).abs() < 1e-12);
    assert!((region_area(&outline, "post") - (3.05 * 10.7 + fillet)).abs() < 1e-12);
    assert!((region_area(&outline, "wall") - (2.15 * 11.0 + fillet)).abs() < 1e-12);
    assert!((region_area(&outline, "upper plate") - (10.05 * 2.55 + fillet)).abs() < 1e-12);
    let at = |r: f64, z: f64| outline.regions[outline.region_at(Point { r: r * MM, z: z * MM }).0 as usize].name.as_str();
    assert_eq!([at(5.8, 5.3), at(5.95, 5.45), at(6.2, 5.2)], ["post", "upper plate", "window"]);
}

#[test]
fn rods_drums_and_air_coils_have_their_regions() {
    check_areas(&r8(), &[("post", 500.0), ("coil", 30.0)]);
    check_areas(&r7(), &[("coil", 100.0)]);
    check_areas(
        &drum(),
        &[
            ("window", 3.0 * 7.0),
            ("post", 3.0 * 7.0),
            ("upper plate", 6.0 * 1.5),
            ("lower plate", 6.0 * 1.5),
            ("coil", 2.0 * 7.0),
        ],
    );
}

#[test]
fn a_winding_may_stand_out_of_a_drums_window() {
    let model = Model { windings: vec![winding("coil", 50.0, [3.0, 7.0], [-2.0, 2.0])], ..drum() };
    let outline = outline(&model).unwrap();
    check_planar(&outline);
    let inside_coil = |&&[a, b]: &&[u32; 2]| {
        let m = polygon::midpoint(outline.points[a as usize], outline.points[b as usize]);
        (m.r - 6.0 * MM).abs() < 1e-9 && m.z.abs() < 1.9 * MM
    };
    assert_eq!(outline.segments.iter().filter(inside_coil).count(), 0, "the window's border cuts the winding");
    let kind = |r: f64, z: f64| outline.regions[outline.region_at(Point { r: r * MM, z: z * MM }).0 as usize].kind;
    assert_eq!(kind(5.0, 3.0), RegionKind::Window);
    assert_eq!(kind(6.5, 3.0), RegionKind::Outside);
    assert_eq!(kind(6.5, 1.0), RegionKind::Winding { winding: 0, section: 0 });
}

#[test]
fn sections_of_one_winding_are_numbered() {
    let mut model = r1();
    let second = winding("", 10.0, [6.6, 7.0], [5.0, 5.4]).sections[0];
    model.windings[0].sections.push(second);
    let outline = outline(&model).unwrap();
    let names: Vec<&str> = outline.regions.iter().map(|r| r.name.as_str()).collect();
    assert!(names.contains(&"main 1") && names.contains(&"main 2"));
}

#[test]
fn one_third_written_twice_is_one_point_and_sloped_contacts_join() {
    let third = 1.0 / 3.0;
    let mut model = empty();
    // The second part's corners lie on the sloped edge of the first, up to rounding.
    model.parts.push(part("a", &[(1.0, 0.0), (4.0, 1.0), (1.0, 1.0)]));
    model.parts.push(part("b", &[(1.0 + third, third * third), (3.0, -1.0), (3.0, 2.0 * third)]));
    model.parts.push(part("c", &[(1.0, 1.0), (1.0 + 0.1 * 3.0, 1.0), (1.0 + 0.1 * 3.0, 2.0), (1.0, 2.0)]));
    model.parts.push(part("d", &[(1.3, 1.0), (2.0, 1.0), (2.0, 2.0), (1.3, 2.0)]));
    let outline = outline(&model).unwrap();
    check_planar(&outline);
    assert_eq!(outline.points.len() - 9, 3 + 3 + 3 + 2);
}

#[test]
fn parts_may_touch_the_axis_along_an_edge_or_in_a_point() {
    let mut model = empty();
    model.parts.push(part("edge", &[(0.0, 0.0), (1.0, 0.0), (1.0, 1.0), (0.0, 1.0)]));
    model.parts.push(part("point", &[(0.0, 2.0), (1.0, 1.5), (1.0, 2.5)]));
    check_planar(&outline(&model).unwrap());
}

#[test]
fn overlaps_name_both_shapes_and_the_place() {
    let coil = |radii, heights| Model { windings: vec![winding("main", 1.0, radii, heights)], ..r1() };
    let subject = Subject::Winding { winding: 0, section: 0 };
    let into_post = coil([5.5, 10.2], [-4.9, 4.9]);
    check_fault(&into_post, subject, Some("radii"), &["winding `main` overlaps the post near r = 5.", "z = "]);
    assert_eq!(outline(&into_post).unwrap_err().other, Some(Subject::Core));
    let through_plate = coil([6.6, 10.2], [-4.9, 6.0]);
    check_fault(&through_plate, subject, Some("radii"), &["winding `main` overlaps the upper plate near"]);
    let inside_wall = coil([11.0, 12.0], [-1.0, 1.0]);
    check_fault(&inside_wall, subject, Some("radii"), &["winding `main` overlaps the wall near"]);
    let in_gap = coil([3.0, 4.0], [-0.1, 0.1]);
    check_fault(&in_gap, subject, Some("radii"), &["winding `main` overlaps gap `post gap` near"]);
}

#[test]
fn nested_equal_and_crossing_parts_are_overlaps() {
    let square = |x: f64, w: f64| [(x, -w), (x + 2.0 * w, -w), (x + 2.0 * w, w), (x, w)];
    let two = |a: &[(f64, f64)], b: &[(f64, f64)]| Model { parts: vec![part("a", a), part("b", b)], ..empty() };
    let words = ["part `b` overlaps part `a` near r ="];
    for other in [square(2.0, 1.0), square(1.0, 2.0), square(2.5, 0.5), square(2.0, 0.5), square(3.0, 0.9)] {
        check_fault(&two(&square(2.0, 1.0), &other), Subject::Part(1), Some("outline"), &words);
    }
    // A plus sign: corners of neither lie inside the other.
    let (flat, tall) = ([(1.0, -1.0), (7.0, -1.0), (7.0, 1.0), (1.0, 1.0)], [(3.0, -3.0), (5.0, -3.0), (5.0, 3.0), (3.0, 3.0)]);
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
    check_fault(&model, subject, Some("radii"), &["winding `second` overlaps winding `main` near r = 10"]);
    model.windings.pop();
    model.parts.push(part("ring", &[(10.0, -1.0), (10.4, -1.0), (10.4, 1.0), (10.0, 1.0)]));
    let main = Subject::Winding { winding: 0, section: 0 };
    check_fault(&model, main, Some("radii"), &["winding `main` overlaps part `ring` near"]);
}

#[test]
fn gaps_that_cannot_be_are_refused() {
    let with = |gaps: Vec<crate::model::Gap>| Model { gaps, ..r1() };
    let g = Subject::Gap(0);
    check_fault(&with(vec![gap("g", Across::Post, 0.0, 0.0)]), g, Some("length"), &["gap `g`", "greater than 0"]);
    check_fault(&with(vec![gap("g", Across::Post, f64::NAN, 0.0)]), g, Some("length"), &["NaN"]);
    check_fault(&with(vec![gap("g", Across::Post, 0.3, f64::NAN)]), g, Some("center"), &["NaN"]);
    let outside = with(vec![gap("g", Across::Post, 0.3, 5.4)]);
    check_fault(&outside, g, Some("center"), &["outside its leg", "z = 5.25 to 5.55 mm", "z = -5.5 to 5.5 mm"]);
    let whole = with(vec![gap("g", Across::Wall, 11.0, 0.0)]);
    check_fault(&whole, g, Some("length"), &["takes the whole wall away"]);
    let both = with(vec![gap("g", Across::Post, 0.3, 0.0), gap("h", Across::Post, 0.3, 0.2)]);
    check_fault(&both, Subject::Gap(1), Some("center"), &["gap `g` and gap `h` overlap from z = 0.05 to 0.15 mm"]);
    let with_spacer = with(vec![gap("g", Across::Spacer, 0.3, 0.0), gap("h", Across::Post, 0.3, 0.0)]);
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
fn a_gap_flush_with_a_plate_and_one_away_from_the_middle_are_fine() {
    for center in [5.35, -5.35, 2.0] {
        let outline = outline(&Model { gaps: vec![gap("g", Across::Post, 0.3, center)], ..r1() }).unwrap();
        check_planar(&outline);
        assert!((region_area(&outline, "post") - 3.05 * 10.7).abs() < 1e-11);
    }
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
        (pot(11.5, 11.0, 25.5, 0.0, 16.0, 11.0), "post_diameter", "post_diameter is 11.5 mm and wall_inner_diameter is 11 mm"),
        (pot(11.5, 21.0, 20.0, 0.0, 16.0, 11.0), "wall_inner_diameter", "is 21 mm and outer_diameter is 20 mm"),
        (pot(11.5, 21.0, 25.5, 11.5, 16.0, 11.0), "hole_diameter", "must be smaller"),
        (pot(11.5, 21.0, 25.5, -1.0, 16.0, 11.0), "hole_diameter", "-1 mm; it must be 0 or greater"),
        (pot(11.5, 21.0, 25.5, 0.0, 11.0, 11.0), "window_height", "window_height is 11 mm and height is 11 mm"),
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
    check_fault(&near, Subject::Core, Some("joint"), &["the joint of 0.005 mm does not fit at z = 0"]);
}

#[test]
fn windings_without_area_or_left_of_the_axis_are_refused() {
    let coil = |radii, heights| Model { windings: vec![winding("w", 1.0, radii, heights)], ..empty() };
    let w = Subject::Winding { winding: 0, section: 0 };
    check_fault(&coil([3.0, 2.0], [0.0, 1.0]), w, Some("radii"), &["radii of winding `w` are inverted: 3 mm to 2 mm"]);
    check_fault(&coil([2.0, 3.0], [1.0, 1.0]), w, Some("heights"), &["heights of winding `w` leave no room"]);
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
    check_fault(&one(&[(1.0, 0.0), (2.0, 2.0), (2.0, 0.0), (1.0, 1.0)]), p, key, &["crosses itself near r = "]);
    check_fault(&one(&[(1.0, 0.0), (2.0, 0.0), (3.0, 0.0)]), p, key, &["no area"]);
    check_fault(&one(&[(1.0, 0.0), (2.0, 0.0), (2.0, 0.0), (1.0, 1.0)]), p, key, &["corners 2 and 3", "r = 2 mm, z = 0 mm"]);
    check_fault(&one(&[(-1.0, 0.0), (2.0, 0.0), (2.0, 1.0)]), p, key, &["corner 1 of part `p` has r = -1 mm"]);
    check_fault(&one(&[(1.0, f64::NAN), (2.0, 0.0), (2.0, 1.0)]), p, key, &["corner 1", "not a point"]);
    let pinched = [(1.0, 0.0), (3.0, 0.0), (3.0, 2.0), (2.0, 0.0), (1.0, 2.0)];
    check_fault(&one(&pinched), p, key, &["touches itself at r = 2 mm, z = 0 mm"]);
    let twice = [(1.0, 0.0), (2.0, 1.0), (3.0, 0.0), (3.0, 2.0), (2.0, 1.0), (1.0, 2.0)];
    check_fault(&one(&twice), p, key, &["touches itself at r = 2 mm, z = 1 mm"]);
    let mut fillet = one(&[(1.0, 0.0), (3.0, 0.0), (3.0, 2.0), (1.0, 2.0)]);
    fillet.parts[0].outline[2].fillet_radius = 2.5 * MM;
    check_fault(&fillet, p, key, &["in part `p` the fillet of 2.5 mm at corner 3 does not fit", "2 mm long"]);
    fillet.parts[0].outline[2].fillet_radius = -1.0;
    check_fault(&fillet, p, key, &["less than 0"]);
}

#[test]
fn twice_the_size_is_twice_the_outline_to_the_last_digit() {
    let (single, double) = (outline(&r1()).unwrap(), outline(&super::samples::doubled(&r1())).unwrap());
    assert_eq!(single.segments, double.segments);
    for (p, q) in single.points.iter().zip(&double.points) {
        assert_eq!((2.0 * p.r, 2.0 * p.z), (q.r, q.z));
    }
}

//! Outlines of the reference sections and of everything that may touch.

use super::samples::{drum, empty, gap, part, r1, r5, r7, r8, winding};
use super::*;
use crate::model::{Across, Law};
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
        assert!(
            (found - size).abs() < 1e-13 * size.max(1.0) * 100.0,
            "{name}: {found} mm², drawn {size} mm²"
        );
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
            assert_eq!(
                polygon::crossing(at(a), at(b), at(c), at(d)),
                None,
                "{a}–{b} and {c}–{d} cross"
            );
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
    let joints: Vec<&Region> =
        outline.regions.iter().filter(|r| matches!(r.kind, RegionKind::Joint(_))).collect();
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
    let at = |r: f64, z: f64| {
        outline.regions[outline.region_at(Point { r: r * MM, z: z * MM }).0 as usize].name.as_str()
    };
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
    assert_eq!(
        outline.segments.iter().filter(inside_coil).count(),
        0,
        "the window's border cuts the winding"
    );
    let kind = |r: f64, z: f64| {
        outline.regions[outline.region_at(Point { r: r * MM, z: z * MM }).0 as usize].kind
    };
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
    model
        .parts
        .push(part("c", &[(1.0, 1.0), (1.0 + 0.1 * 3.0, 1.0), (1.0 + 0.1 * 3.0, 2.0), (1.0, 2.0)]));
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
fn a_gap_flush_with_a_plate_and_one_away_from_the_middle_are_fine() {
    for center in [5.35, -5.35, 2.0] {
        let outline =
            outline(&Model { gaps: vec![gap("g", Across::Post, 0.3, center)], ..r1() }).unwrap();
        check_planar(&outline);
        assert!((region_area(&outline, "post") - 3.05 * 10.7).abs() < 1e-11);
    }
}

#[test]
fn twice_the_size_is_twice_the_outline_to_the_last_digit() {
    let (single, double) =
        (outline(&r1()).unwrap(), outline(&super::samples::doubled(&r1())).unwrap());
    assert_eq!(single.segments, double.segments);
    for (p, q) in single.points.iter().zip(&double.points) {
        assert_eq!((2.0 * p.r, 2.0 * p.z), (q.r, q.z));
    }
}

#[test]
fn two_thousand_turns_are_drawn_one_by_one() {
    let turn = |k: usize| {
        let (r, z) = (10.0 + (k % 40) as f64, (k / 40) as f64);
        winding("turn", 1.0, [r, r + 1.0], [z, z + 1.0])
    };
    let model = Model { windings: (0..2000).map(turn).collect(), ..empty() };
    let outline = outline(&model).unwrap();
    // A full grid of 40 by 50 squares that share their corners, and the cap's nine.
    assert_eq!(outline.points.len(), 41 * 51 + 9);
}

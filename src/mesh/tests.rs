//! First meshes of reference sections, random sections and hard corners.

use super::{Chart, Mesh, MeshError, bisect, fans, first_mesh};
use crate::geometry::samples::{
    self, Across, Form, Model, PotWall, doubled, empty, part, r1_with_gap, winding,
};
use crate::geometry::{Outline, Point, RegionKind, area, outline};
use crate::model::Law;

/// Mesh of a model with everything checked that holds for every mesh.
#[track_caller]
fn mesh_of(model: &Model) -> (Outline, Mesh) {
    let outline = outline(model).unwrap();
    let mesh = first_mesh(&outline).unwrap();
    mesh.validate();
    check_areas(&outline, &mesh);
    check_cap(&outline, &mesh);
    check_refinement_edges(&mesh);
    assert_eq!(mesh.points[..outline.points.len()], outline.points);
    assert!(mesh.parents.iter().all(|p| *p == [u32::MAX; 2]));
    (outline, mesh)
}

/// Triangles of each region add up to its polygons; the window's to what its shapes leave, outside to the rest.
#[track_caller]
fn check_areas(outline: &Outline, mesh: &Mesh) {
    let mut found = vec![0.0; outline.regions.len()];
    for t in (0..mesh.n_triangles()).filter(|&t| mesh.charts[t] == Chart::Inside) {
        found[mesh.regions[t].0 as usize] += area(&mesh.corners(t));
    }
    let corners: Vec<Point> = (0..=outline.cap.n_facets).map(|k| outline.cap.corner(k)).collect();
    let whole = area(&corners);
    for (region, &found) in outline.regions.iter().zip(&found) {
        let drawn: f64 = region.polygons.iter().map(|polygon| area(polygon)).sum();
        match region.kind {
            RegionKind::Outside => {}
            RegionKind::Window => assert!(found <= drawn + 1e-12 * whole),
            // Thousands of roundings of products of the whole section's coordinates.
            _ => assert!(
                (found - drawn).abs() < 1e-12 * whole,
                "{}: {found} for {drawn}",
                region.name
            ),
        }
    }
    let sum: f64 = found.iter().sum();
    assert!((sum - whole).abs() < 1e-12 * whole, "the inside has {sum} of {whole} m²");
}

/// Facets are whole; infinity is the last vertex, at the cap's centre, with one triangle a facet.
#[track_caller]
fn check_cap(outline: &Outline, mesh: &Mesh) {
    let (n, n_facets) = (outline.points.len(), outline.cap.n_facets);
    let infinity = mesh.n_vertices() as u32 - 1;
    assert_eq!(mesh.points[infinity as usize], Point { r: 0.0, z: outline.cap.center_z });
    for k in 0..n_facets {
        let facet = [(n - n_facets - 1 + k) as u32, (n - n_facets + k) as u32];
        assert!(mesh.edges.contains(&facet), "facet {k} is split");
        let t = mesh.n_triangles() - n_facets + k;
        assert_eq!(mesh.charts[t], Chart::Cap(k as u8));
        let mut corners = mesh.triangles[t];
        corners.sort_unstable();
        assert_eq!(corners, [facet[0], facet[1], infinity]);
    }
    let fan = mesh.triangles.iter().filter(|t| t.contains(&infinity)).count();
    assert_eq!(fan, n_facets);
}

/// Local edge 0 is the longest, and a chain of ever longer edges ends in a triangle pair or on the axis.
#[track_caller]
fn check_refinement_edges(mesh: &Mesh) {
    let length2 = |edge: u32| {
        let [a, b] = mesh.edges[edge as usize].map(|id| mesh.points[id as usize]);
        (a.r - b.r).powi(2) + (a.z - b.z).powi(2)
    };
    let mut neighbours = vec![[usize::MAX; 2]; mesh.edges.len()];
    for (t, edges) in mesh.triangle_edges.iter().enumerate() {
        for &edge in edges {
            let pair = &mut neighbours[edge as usize];
            pair[usize::from(pair[0] != usize::MAX)] = t;
        }
        assert!(
            edges.iter().all(|&edge| length2(edge) <= length2(edges[0])),
            "triangle {t} starts with a short edge"
        );
    }
    for start in 0..mesh.n_triangles() {
        let mut t = start;
        let ended = (0..mesh.n_triangles()).any(|_| {
            let pair = neighbours[mesh.triangle_edges[t][0] as usize];
            let other = if pair[0] == t { pair[1] } else { pair[0] };
            if other == usize::MAX || mesh.triangle_edges[other][0] == mesh.triangle_edges[t][0] {
                return true;
            }
            t = other;
            false
        });
        assert!(ended, "the chain of refinement edges from triangle {start} runs in a circle");
    }
}

/// Deterministic numbers in [0, 1) (splitmix64).
struct Dice(pub u64);

impl Dice {
    fn roll(&mut self) -> f64 {
        self.0 = self.0.wrapping_add(0x9E37_79B9_7F4A_7C15);
        let mut x = self.0;
        x = (x ^ (x >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
        x = (x ^ (x >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
        ((x ^ (x >> 31)) >> 11) as f64 / (1_u64 << 53) as f64
    }
}

/// Random rectangles of a crooked grid: many touch along an edge, a part of one, or in a corner.
fn random_rectangles(seed: u64) -> Model {
    let mut dice = Dice(seed);
    let mut lines = |n: usize, start: f64| {
        let mut x = vec![start];
        for _ in 0..n {
            let step = if dice.roll() < 0.2 { 0.05 } else { 0.5 + 4.0 * dice.roll() };
            x.push(x[x.len() - 1] + step);
        }
        x
    };
    let start = if seed.is_multiple_of(2) { 0.0 } else { 3.0 };
    let (r, z) = (lines(6, start), lines(6, -4.0));
    let mut model = samples::empty();
    // Low enough for parts that touch only in a point.
    model.materials[0].law = Law::Constant { permeability: 20.0 };
    let mut j = 0;
    while j < 5 {
        let tall = 1 + (dice.roll() * 2.0) as usize;
        let mut i = 0;
        while i < 5 {
            let wide = 1 + (dice.roll() * 2.0) as usize;
            if dice.roll() < 0.5 {
                let (r, z) = ([r[i], r[(i + wide).min(6)]], [z[j], z[(j + tall).min(6)]]);
                if dice.roll() < 0.5 {
                    model.parts.push(samples::part(
                        "p",
                        &[(r[0], z[0]), (r[1], z[0]), (r[1], z[1]), (r[0], z[1])],
                    ));
                } else {
                    model.windings.push(samples::winding("w", 10.0, r, z));
                }
            }
            i += wide;
        }
        j += tall;
    }
    if model.parts.is_empty() && model.windings.is_empty() {
        return samples::r7();
    }
    model
}

#[test]
fn reference_sections_have_small_good_first_meshes() {
    // Least and most triangles, cap included: 10 % about today's, so that a change of the mesher is seen.
    for (name, least, most) in [
        ("R1", 225, 275),
        ("R5", 170, 210),
        ("R7", 24, 34),
        ("R8", 235, 285),
        ("drum", 45, 60),
        ("R1 fillets and joint", 640, 780),
        ("R5 spacer", 330, 405),
        ("R1 gap 10 mm", 220, 270),
        ("R1 gap 0.05 mm", 410, 500),
        ("R1 gap 0.005 mm", 2100, 2600),
    ] {
        let model = samples::all().into_iter().find(|sample| sample.0 == name).unwrap().1;
        let (_, mesh) = mesh_of(&model);
        let (n, angle) = (mesh.n_triangles(), mesh.min_angle().to_degrees());
        assert!((least..=most).contains(&n), "{name}: {n} triangles");
        assert!(angle > 21.99, "{name}: smallest angle {angle}°");
    }
}

#[test]
fn a_gap_is_crossed_by_whole_layers() {
    for length in [0.3, 0.05, 0.005] {
        let (outline, mesh) = mesh_of(&r1_with_gap(length));
        let gap = outline.regions.iter().position(|r| r.name == "post gap").unwrap();
        let half = 0.5e-3 * length;
        for t in (0..mesh.n_triangles()).filter(|&t| mesh.regions[t].0 as usize == gap) {
            let corners = mesh.corners(t);
            assert!(corners.iter().all(|p| p.z.abs() <= half * (1.0 + 1e-9)));
            let longest = mesh.triangle_edges[t].iter().map(|&e| {
                let [a, b] = mesh.edges[e as usize].map(|id| mesh.points[id as usize]);
                (a.r - b.r).hypot(a.z - b.z)
            });
            assert!(
                longest.fold(0.0, f64::max) < 4.0e-3 * length,
                "an element is much longer than the gap"
            );
        }
    }
}

/// Number of random sections: all, or a few unless the long campaigns are asked for.
fn n_seeds(n_few: u64) -> u64 {
    if std::env::var_os("RUN_SLOW_TESTS").is_some_and(|v| v == "1") { 2000 } else { n_few }
}

/// Meshes `section` of every seed; its angles must not be bad.
#[track_caller]
fn check_angles(n_seeds: u64, section: fn(u64) -> Model) {
    let mut n_below_20 = 0;
    for seed in 0..n_seeds {
        let (_, mesh) = mesh_of(&section(seed));
        let angle = mesh.min_angle().to_degrees();
        // Next to a facet, which is never split, the aim of 22° may be missed; measured 18.2° over 400 sections.
        assert!(angle > 15.0, "seed {seed}: smallest angle {angle}°");
        n_below_20 += u64::from(angle < 20.0);
    }
    assert!(
        n_below_20 * 20 <= n_seeds,
        "{n_below_20} of {n_seeds} sections have an angle below 20°"
    );
}

#[test]
fn random_touching_rectangles_mesh_without_bad_angles() {
    check_angles(n_seeds(100), random_rectangles);
}

/// A random core with gaps, spacers, fillets and a joint, its window half filled.
fn random_core(seed: u64) -> Model {
    let mut dice = Dice(seed);
    let hole = if dice.roll() < 0.5 { 0.0 } else { 1.0 + 4.0 * dice.roll() };
    let post = hole + 1.0 + 10.0 * dice.roll();
    let inner = post + 2.0 + 20.0 * dice.roll();
    let outer = inner + 0.3 + 5.0 * dice.roll();
    let window_height = 2.0 + 30.0 * dice.roll();
    let height = window_height + 0.6 + 8.0 * dice.roll();
    let [post_diameter, wall_inner_diameter, outer_diameter, hole_diameter] =
        [post, inner, outer, hole].map(|x| x * 1e-3);
    let [height, window_height] = [height, window_height].map(|x| x * 1e-3);
    let form = match seed % 3 {
        0 => Form::Drum {
            flange_diameter: wall_inner_diameter,
            post_diameter,
            hole_diameter,
            height,
            window_height,
        },
        1 => Form::Rod { diameter: post_diameter, hole_diameter, height },
        _ => {
            let wall = PotWall::OuterDiameter(outer_diameter);
            Form::Pot {
                wall,
                wall_inner_diameter,
                post_diameter,
                hole_diameter,
                height,
                window_height,
            }
        }
    };
    let mut core = samples::core(form);
    let (width, half) = (0.25e-3 * (inner - post), 0.5 * window_height);
    if seed % 3 != 1 && dice.roll() < 0.3 {
        core.corner_radius = 0.3 * width.min(half);
    }
    if seed % 3 != 1 && dice.roll() < 0.3 {
        core.joint = 2e-6;
    }
    let mut gaps = Vec::new();
    let mut length = || 10.0_f64.powf(-2.0 + 1.5 * dice.roll());
    gaps.push(samples::gap("post", Across::Post, length(), 0.3 * half * 1e3));
    if seed % 3 == 2 {
        gaps.push(samples::gap("wall", Across::Wall, length(), -0.3 * half * 1e3));
    }
    if seed % 3 != 1 && length() < 0.05 {
        gaps.push(samples::gap("shim", Across::Spacer, length(), 0.0));
    }
    let radii = [0.5 * post + 0.1 * (inner - post), 0.5 * post + 0.4 * (inner - post)];
    let main = winding("main", 10.0, radii, [-0.3e3 * window_height, 0.3e3 * window_height]);
    Model { core: Some(core), gaps, windings: vec![main], ..empty() }
}

#[test]
fn random_cores_mesh_without_bad_angles() {
    check_angles(n_seeds(60), random_core);
}

#[test]
fn random_polygons_mesh_whatever_their_angles() {
    let n_seeds = n_seeds(100);
    let mut n_meshed = 0;
    for seed in 0..n_seeds {
        let mut dice = Dice(seed);
        let n = 3 + (dice.roll() * 8.0) as usize;
        let mut angles: Vec<f64> = (0..n).map(|_| dice.roll() * std::f64::consts::TAU).collect();
        angles.sort_by(f64::total_cmp);
        let corners: Vec<(f64, f64)> = angles
            .iter()
            .map(|a| {
                let radius = 0.3 + 4.0 * dice.roll();
                (6.0 + radius * a.cos(), radius * a.sin())
            })
            .collect();
        let model = Model { parts: vec![part("p", &corners)], ..empty() };
        if outline(&model).is_ok() {
            let (_, mesh) = mesh_of(&model);
            // A narrow neck costs its length over its width: 7 200 in the worst of 2000.
            assert!(mesh.n_triangles() < 10_000, "seed {seed}: {} triangles", mesh.n_triangles());
            n_meshed += 1;
        }
    }
    assert!(2 * n_meshed > n_seeds, "only {n_meshed} of {n_seeds} polygons were drawn");
}

#[test]
fn acute_corners_end_and_keep_their_angle() {
    for degrees in [30.0_f64, 10.0, 1.0, 0.1, 0.01] {
        let (sine, cosine) = degrees.to_radians().sin_cos();
        for (c, s) in [(1.0, 0.0), (0.6, 0.8)] {
            let turned = |r: f64, z: f64| (1.0 + c * r - s * z, s * r + c * z);
            let wedge = [turned(0.0, 0.0), turned(10.0, 0.0), turned(10.0 * cosine, 10.0 * sine)];
            if wedge.iter().any(|corner| corner.0 < 0.0) {
                continue;
            }
            let (_, mesh) = mesh_of(&Model { parts: vec![part("wedge", &wedge)], ..empty() });
            assert!(mesh.n_triangles() < 400, "{degrees}°: {} triangles", mesh.n_triangles());
            let aim = degrees.min(15.0);
            assert!(
                mesh.min_angle().to_degrees() > 0.999 * aim,
                "{degrees}°: {}°",
                mesh.min_angle().to_degrees()
            );
        }
    }
    let needle = [(0.0, 0.0), (0.1, 10.0), (0.0, 20.0)];
    mesh_of(&Model { parts: vec![part("needle", &needle)], ..empty() });
    let slice = |k: usize| {
        let at = |k: usize| (6.0 + 5.0 * (0.3 * k as f64).cos(), 5.0 * (0.3 * k as f64).sin());
        part("slice", &[(6.0, 0.0), at(k), at(k + 1)])
    };
    mesh_of(&Model { parts: (0..20).map(slice).collect(), ..empty() });
}

#[test]
fn a_circle_tangent_to_a_winding_meshes() {
    let mut circle = part("circle", &[(5.0, -1.0), (7.0, -1.0), (7.0, 1.0), (5.0, 1.0)]);
    for corner in &mut circle.outline {
        corner.fillet_radius = 1e-3;
    }
    let model = Model {
        parts: vec![circle],
        windings: vec![winding("w", 1.0, [7.0, 8.0], [-3.0, 3.0])],
        ..empty()
    };
    let (_, mesh) = mesh_of(&model);
    // Chord against tangent: half of 11.25°.
    assert!(mesh.min_angle().to_degrees() > 5.6);
}

#[test]
fn turn_by_turn_windings_mesh() {
    let turn = |k: usize| {
        let (r, z) = (6.6 + 0.5 * (k % 7) as f64, -4.9 + 0.5 * (k / 7) as f64);
        winding("turn", 1.0, [r, r + 0.4], [z, z + 0.4])
    };
    let (_, mesh) = mesh_of(&Model { windings: (0..133).map(turn).collect(), ..samples::r1() });
    assert!(mesh.n_triangles() < 3000);
}

#[test]
fn sections_far_from_the_origin_mesh() {
    for (r, z) in [(1000.0, 0.0), (1.0, 1000.0)] {
        let square = [(r, z), (r + 0.1, z), (r + 0.1, z + 0.1), (r, z + 0.1)];
        mesh_of(&Model { parts: vec![part("far", &square)], ..empty() });
    }
}

#[test]
fn details_too_fine_are_told_with_their_place() {
    let square = |r0: f64, r1: f64| [(r0, 0.0), (r1, 0.0), (r1, 1.0), (r0, 1.0)];
    let parts = vec![part("a", &square(1.0, 2.0)), part("b", &square(2.000001, 3.0))];
    let outline = outline(&Model { parts, ..empty() }).unwrap();
    match first_mesh(&outline) {
        Err(MeshError::TooFine { r_mm, z_mm, about, .. }) => {
            assert!(about.contains('a') || about.contains('b'), "{about}");
            assert!((r_mm - 2.0).abs() < 1e-3 && (-1e-3..1.001).contains(&z_mm), "{r_mm} {z_mm}");
        }
        other => panic!("{:?}", other.map(|mesh| mesh.n_triangles())),
    }
}

#[test]
fn twice_the_size_is_the_same_mesh_scaled() {
    let mut sloped = Model {
        parts: vec![part("p", &[(1.0, 0.0), (7.3, 0.9), (4.1, 5.7), (0.3, 2.2)])],
        ..empty()
    };
    sloped.parts[0].outline[1].fillet_radius = 0.4e-3;
    for (_, model) in samples::all().into_iter().chain([("sloped", sloped)]) {
        let (single, double) = (mesh_of(&model).1, mesh_of(&doubled(&model)).1);
        assert_eq!(single.triangles, double.triangles);
        assert_eq!(single.edges, double.edges);
        for (p, q) in single.points.iter().zip(&double.points) {
            assert_eq!((2.0 * p.r, 2.0 * p.z), (q.r, q.z));
        }
    }
}

#[test]
fn the_same_section_gives_the_same_mesh() {
    for seed in 0..10 {
        let model = random_rectangles(seed);
        assert_eq!(mesh_of(&model).1, mesh_of(&model).1);
    }
}

#[test]
fn a_bisected_mesh_is_valid_though_its_edges_have_lost_their_order() {
    let (_, mut mesh) = mesh_of(&samples::r1());
    for _ in 0..3 {
        let all: Vec<u32> = (0..mesh.n_triangles() as u32).collect();
        let (mut vertex, mut edge) = (vec![0.0; mesh.n_vertices()], vec![0.0; mesh.edges.len()]);
        let mut carried = bisect::Carried { vertex: &mut vertex, edge: &mut edge };
        let pairs = fans::edge_triangles(&mesh);
        bisect::bisect(&mut mesh, &pairs, &all, &mut carried);
        mesh.validate();
    }
    assert!(mesh.edges.iter().any(|[a, b]| a > b));
}

//! First meshes of reference sections.

use super::first_mesh;
use crate::geometry::outline;
use crate::geometry::samples;

#[test]
fn table() {
    for (name, model) in samples::all() {
        let outline = outline(&model).unwrap();
        let t = std::time::Instant::now();
        let mesh = first_mesh(&outline).unwrap();
        let dt = t.elapsed();
        mesh.validate();
        println!(
            "{name:20} {:6} triangles {:6} vertices {:6.2}° {:?}",
            mesh.n_triangles(),
            mesh.n_vertices(),
            mesh.min_angle().to_degrees(),
            dt
        );
    }
}

/// Deterministic numbers in [0, 1) (splitmix64).
pub struct Dice(pub u64);

impl Dice {
    pub fn roll(&mut self) -> f64 {
        self.0 = self.0.wrapping_add(0x9E37_79B9_7F4A_7C15);
        let mut x = self.0;
        x = (x ^ (x >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
        x = (x ^ (x >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
        ((x ^ (x >> 31)) >> 11) as f64 / (1_u64 << 53) as f64
    }
}

/// Random rectangles of a crooked grid: many touch along an edge, a part of one, or in a corner.
fn random_rectangles(seed: u64) -> crate::model::Model {
    let mut dice = Dice(seed);
    let mut lines = |n: usize, start: f64| {
        let mut x = vec![start];
        for _ in 0..n {
            let step = if dice.roll() < 0.2 { 0.05 } else { 0.5 + 4.0 * dice.roll() };
            x.push(x[x.len() - 1] + step);
        }
        x
    };
    let start = if seed % 2 == 0 { 0.0 } else { 3.0 };
    let (r, z) = (lines(6, start), lines(6, -4.0));
    let mut model = samples::empty();
    let mut j = 0;
    while j < 5 {
        let tall = 1 + (dice.roll() * 2.0) as usize;
        let mut i = 0;
        while i < 5 {
            let wide = 1 + (dice.roll() * 2.0) as usize;
            if dice.roll() < 0.5 {
                let (r, z) = ([r[i], r[(i + wide).min(6)]], [z[j], z[(j + tall).min(6)]]);
                if dice.roll() < 0.5 {
                    model.parts.push(samples::part("p", &[(r[0], z[0]), (r[1], z[0]), (r[1], z[1]), (r[0], z[1])]));
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
fn campaign() {
    let mut angles = Vec::new();
    let mut n_triangles = 0;
    for seed in 0..400 {
        let mesh = first_mesh(&outline(&random_rectangles(seed)).unwrap()).unwrap();
        mesh.validate();
        n_triangles += mesh.n_triangles();
        angles.push((mesh.min_angle().to_degrees(), seed));
    }
    angles.sort_by(|a, b| a.0.total_cmp(&b.0));
    println!("CAMPAIGN {n_triangles} worst {:?} 5% {:?} 20% {:?} 50% {:?}", angles[0], angles[20], angles[80], angles[200]);
}

fn tri(name: &str, model: &crate::model::Model) {
    let o = match outline(model) { Ok(o) => o, Err(f) => { println!("HARD {name} fault {f}"); return; } };
    let t = std::time::Instant::now();
    match first_mesh(&o) {
        Ok(mesh) => {
            mesh.validate();
            let angles: Vec<f64> = (0..mesh.n_triangles()).map(|t| super::topology::smallest_angle(&mesh.corners(t)).to_degrees()).collect();
            println!("HARD {name} {} triangles, min {:.3}, below 20: {} {:?}", mesh.n_triangles(), mesh.min_angle().to_degrees(), angles.iter().filter(|&&a| a < 20.0).count(), t.elapsed());
        }
        Err(e) => println!("HARD {name} ERROR {e} {:?}", t.elapsed()),
    }
}

#[test]
fn hard() {
    use samples::{part, empty, winding, r1};
    let one = |corners: &[(f64, f64)]| crate::model::Model { parts: vec![part("p", corners)], ..empty() };
    for angle in [30.0_f64, 10.0, 5.0, 1.0, 0.1, 0.01] {
        let (s, c) = angle.to_radians().sin_cos();
        tri(&format!("wedge {angle}"), &one(&[(1.0, 0.0), (11.0, 0.0), (1.0 + 10.0 * c, 10.0 * s)]));
        tri(&format!("wedge tilted {angle}"), &one(&[(1.0, 0.0), (1.0 + 10.0 * 0.6, 8.0), (1.0 + 10.0 * (0.6*c - 0.8*s), 10.0 * (0.8*c + 0.6*s))]));
    }
    // circle tangent to a rectangle
    let mut m = one(&[(5.0, -1.0), (7.0, -1.0), (7.0, 1.0), (5.0, 1.0)]);
    for c in &mut m.parts[0].outline { c.fillet_radius = 1e-3; }
    tri("circle", &m);
    m.windings.push(winding("w", 1.0, [7.0, 8.0], [-3.0, 3.0]));
    tri("circle tangent", &m);
    m.parts.push(part("q", &[(3.0, -1.0), (5.0, -1.0), (5.0, 1.0), (3.0, 1.0)]));
    for c in &mut m.parts[1].outline { c.fillet_radius = 1e-3; }
    tri("two circles tangent", &m);
    tri("cone on axis", &one(&[(0.0, 0.0), (1.0, 3.0), (0.0, 4.0)]));
    tri("needle on axis", &one(&[(0.0, 0.0), (0.1, 10.0), (0.0, 20.0)]));
    tri("foil", &one(&[(5.0, -10.0), (5.005, -10.0), (5.005, 10.0), (5.0, 10.0)]));
    tri("thin foil", &one(&[(5.0, -10.0), (5.0005, -10.0), (5.0005, 10.0), (5.0, 10.0)]));
    tri("tiny far from axis", &one(&[(1000.0, 0.0), (1000.1, 0.0), (1000.1, 0.1), (1000.0, 0.1)]));
    tri("tiny high", &one(&[(1.0, 1000.0), (1.1, 1000.0), (1.1, 1000.1), (1.0, 1000.1)]));
    let mut two = one(&[(1.0, 0.0), (2.0, 0.0), (2.0, 1.0), (1.0, 1.0)]);
    two.parts.push(part("b", &[(2.000001, 0.0), (3.0, 0.0), (3.0, 1.0), (2.000001, 1.0)]));
    tri("near touching 1e-6", &two);
    let mut two = one(&[(1.0, 0.0), (2.0, 0.0), (2.0, 1.0), (1.0, 1.0)]);
    two.parts.push(part("b", &[(2.0, 0.0), (3.0, 0.0), (3.0, 1.0), (2.0, 0.999999)]));
    tri("near corner", &two);
    let mut two = one(&[(1.0, 0.0), (2.0, 0.0), (2.0, 1.0), (1.0, 1.0)]);
    two.parts.push(part("b", &[(2.0, 0.0), (3.0, 0.0), (3.0, 1.0), (2.00001, 1.0)]));
    tri("sliver gap", &two);
    for gap in [1e-3, 1e-4, 1e-5, 1e-6] { tri(&format!("gap {gap}"), &samples::r1_with_gap(gap)); }
    let mut wire = r1(); wire.windings.clear();
    for i in 0..7 { for j in 0..19 { let (r, z) = (6.6 + 0.5 * i as f64, -4.9 + 0.5 * j as f64);
        wire.windings.push(winding("t", 1.0, [r, r + 0.4], [z, z + 0.4])); } }
    tri("wire by wire", &wire);
    let star: Vec<(f64, f64)> = (0..40).map(|i| { let a = i as f64 * std::f64::consts::TAU / 40.0; let r = if i % 2 == 0 { 5.0 } else { 2.0 }; (6.0 + r * a.cos(), r * a.sin()) }).collect();
    tri("star", &one(&star));
    let pie = |k: usize| { let (a, b) = (k as f64 * 0.3, (k + 1) as f64 * 0.3); [(6.0, 0.0), (6.0 + 5.0 * a.cos(), 5.0 * a.sin()), (6.0 + 5.0 * b.cos(), 5.0 * b.sin())] };
    let mut pies = empty();
    for k in 0..20 { pies.parts.push(part("s", &pie(k))); }
    tri("pie", &pies);
    for seed in 0..300 {
        let mut dice = Dice(seed);
        let n = 3 + (dice.roll() * 8.0) as usize;
        let mut angles: Vec<f64> = (0..n).map(|_| dice.roll() * std::f64::consts::TAU).collect();
        angles.sort_by(f64::total_cmp);
        let poly: Vec<(f64, f64)> = angles.iter().map(|a| { let r = 0.3 + 4.0 * dice.roll(); (6.0 + r * a.cos(), r * a.sin()) }).collect();
        let model = one(&poly);
        let Ok(o) = outline(&model) else { continue };
        let mesh = first_mesh(&o);
        match mesh { Ok(m) => { m.validate(); if m.n_triangles() > 3000 { println!("HARD random {seed} {}", m.n_triangles()); } }, Err(e) => println!("HARD random {seed} {e}") }
    }
}

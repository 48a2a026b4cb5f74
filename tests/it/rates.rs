//! Rates of convergence on uniformly refined meshes against fields that are known everywhere.
//!
//! ψ: 3.0 in √∫(·)²/r, which is A = ψ/r in L2 over the volume (without the weight the axis would not count).
//! B: 2.0 in the energy norm √∫(ν/r)|∇·|². Errors are stored in `validation/rates.txt`.

mod discrete;
mod fields;

use crate::cases::{ALL, Run};
use discrete::{Errors, Exact, errors};
use expect_test::expect_file;
use fields::{AcrossAnEdge, AllSpace, AtTheAxis, all_space, skewed_box};
use gapwright::mesh::Mesh;
use gapwright::mesh::bisect::{Carried, bisect};
use gapwright::mesh::fans::edge_triangles;
use std::fmt::Write;

/// Cuts every triangle into four.
fn refine(mesh: &mut Mesh) {
    let all: Vec<u32> = (0..mesh.triangles.len() as u32).collect();
    let (mut vertex, mut edge) = (vec![0.0; mesh.points.len()], vec![0.0; mesh.edges.len()]);
    let pairs = edge_triangles(mesh);
    bisect(mesh, &pairs, &all, &mut Carried { vertex: &mut vertex, edge: &mut edge });
}

/// Errors on a mesh and on `n` refinements of it.
fn history(mut mesh: Mesh, exact: &dyn Exact, n: usize) -> Vec<Errors> {
    (0..=n)
        .map(|k| {
            if 0 < k {
                refine(&mut mesh);
            }
            errors(&mesh, exact)
        })
        .collect()
}

/// Orders of ψ and B between the last two meshes, and the same without the cap.
fn last_rates(history: &[Errors]) -> [f64; 4] {
    let [.., coarse, fine] = history else { panic!("one mesh has no rate") };
    let [before, after] = [coarse, fine].map(|e| [e.psi, e.field, e.inside[0], e.inside[1]]);
    [0, 1, 2, 3].map(|k| (before[k] / after[k]).log2())
}

fn table(name: &str, history: &[Errors]) -> String {
    let mut text = format!("{name}\n  unknowns");
    for what in ["psi in L2", "B in energy", "psi, no cap", "B, no cap"] {
        write!(text, "  {what:>11}  rate").unwrap();
    }
    for (k, e) in history.iter().enumerate() {
        write!(text, "\n  {:8}", e.n_unknowns).unwrap();
        let rates = (0 < k).then(|| last_rates(&history[..=k]));
        for (i, error) in [e.psi, e.field, e.inside[0], e.inside[1]].iter().enumerate() {
            let rate = rates.map_or("-".to_string(), |rates| format!("{:.2}", rates[i]));
            write!(text, "    {error:.3e}  {rate:>4}").unwrap();
        }
    }
    text + "\n"
}

/// Fails where an order is farther than 0.1 from the wanted one.
#[track_caller]
fn check(name: &str, history: &[Errors], wanted: [f64; 4]) {
    let rates = last_rates(history);
    for (what, (rate, wanted)) in
        ["ψ", "B", "ψ without the cap", "B without the cap"].iter().zip(rates.iter().zip(wanted))
    {
        assert!((rate - wanted).abs() <= 0.1, "{name}: {what} has order {rate:.3}, not {wanted}");
    }
}

/// What quadratic elements promise.
///
/// At the axis ∂³ψ/∂r²∂z = 2 ∂B_z/∂z does not vanish, so B errs by h²/r there and the energy norm by h²·√ln(1/h): that
/// logarithm is the 0.05 which the order of B stays below 2. The strip of constant B_z itself costs h² without one.
const FULL: [f64; 4] = [3.0, 2.0, 3.0, 2.0];

/// With a dipole's far field ψ is homogeneous of degree 1 at the image of infinity: a point, like the tip of a cone. On equal
/// meshes the triangles there hold an error of h^1.5 in both norms (∫(1/r)·h² and ∫(g²/r)·1 over an area h²), everything else
/// keeps its order, and the rounds mend it by refining towards that point ([`rounds_reach_the_order_that_equal_meshes_lose`]).
const DIPOLE: [f64; 4] = [1.5, 1.5, 3.0, 2.0];

#[test]
fn errors_fall_with_the_orders_of_quadratic_elements() {
    let (mild, strong) = (AcrossAnEdge { contrast: 10.0 }, AcrossAnEdge { contrast: 1000.0 });
    let (fast, dipole) = (AllSpace { a: 0.03, k: 3.0 }, AllSpace { a: 0.03, k: 1.5 });
    let cases: [(&str, Mesh, &dyn Exact, [f64; 4]); 5] = [
        ("at the axis, one material", skewed_box(0.0, 4), &AtTheAxis, FULL),
        ("across a material edge, 1:10", skewed_box(0.5, 4), &mild, FULL),
        ("across a material edge, 1:1000", skewed_box(0.5, 4), &strong, FULL),
        ("all space, r^2/(a^2 + rho^2)^3", all_space(), &fast, FULL),
        ("all space, dipole: r^2/(a^2 + rho^2)^1.5", all_space(), &dipole, DIPOLE),
    ];
    let histories =
        cases.map(|(name, mesh, exact, wanted)| (name, history(mesh, exact, 4), wanted));
    let mut stored = String::from(
        "Relative errors on uniformly refined meshes; each mesh cuts every triangle of the last into four.\n",
    );
    for (name, history, _) in &histories {
        write!(stored, "\n{}", table(name, history)).unwrap();
    }
    println!("{stored}");
    expect_file!["../../validation/rates.txt"].assert_eq(&stored);
    for (name, history, wanted) in &histories {
        check(name, history, *wanted);
    }
}

/// Slope of log width against log unknowns by least squares over the rounds.
fn slope(points: &[(f64, f64)]) -> f64 {
    let n = points.len() as f64;
    let mean = |f: &dyn Fn(&(f64, f64)) -> f64| points.iter().map(f).sum::<f64>() / n;
    let (x, y) = (mean(&|p| p.0), mean(&|p| p.1));
    mean(&|p| (p.0 - x) * (p.1 - y)) / mean(&|p| (p.0 - x).powi(2))
}

#[test]
fn rounds_reach_the_order_that_equal_meshes_lose() {
    // The interval is the square of two errors in B, each of order N^-1 on meshes that fit: N^-2, in spite of sharp
    // corners of the core and of the dipole at infinity. The first rounds only look for the places.
    for case in ALL {
        let run = Run::new(case.model(1e-6));
        let points: Vec<(f64, f64)> = (run.outcome.rounds.iter())
            .map(|r| ((r.n_unknowns as f64).ln(), ((r.high - r.low) / r.low).ln()))
            .collect();
        let late = slope(&points[points.len() / 2..]);
        println!(
            "{}: interval falls as N^{late:.2} over the later half of {} rounds",
            case.name,
            points.len()
        );
        assert!(late <= -1.8, "{}: N^{late:.2}", case.name);
    }
}

//! Fluxes through cuts, ψ and B at points: against the references, each other, and the coil's own field.

use crate::cases::{ALL, Case, R1, R5, R7, R8, Run, model};
use gapwright::model::Point;
use gapwright::results::sample::Sampler;
use gapwright::units::MU0;
use std::f64::consts::TAU;

/// Flux through the ring from `inner` to `outer` at height z [m], upwards.
fn flux(sampler: &Sampler, inner: f64, outer: f64, z: f64) -> f64 {
    let at = |r: f64| if r == 0.0 { 0.0 } else { TAU * sampler.probe(Point { r, z }).unwrap().psi };
    at(outer) - at(inner)
}

const MM: f64 = 1e-3;

/// Fluxes and ψ at a point at an interval of 0.01 %: ψ errs like the square root of the energy error at worst, 1e-2, and
/// like the energy error where the mesh serves it, 1e-4. Measured 7e-5 at most.
const FLUX_LIMIT: f64 = 2e-4;
/// The hole carries 5 % of the flux: an error of that size beside it counts 20-fold.
const HOLE_LIMIT: f64 = 1e-3;
/// B at a point errs like ∇ψ: the mesh there is as coarse as W' allows. Measured 6e-3 at most.
const FIELD_LIMIT: f64 = 2e-2;

/// One number asked of a field: the reference's name, the question, the relative limit.
type Ask = (&'static str, fn(&Sampler) -> f64, f64);

fn asks() -> [(Case, Vec<Ask>); 4] {
    [
        (
            R1,
            vec![
                ("flux_z0_r<5.75_Wb", |s| flux(s, 0.0, 5.75 * MM, 0.0), FLUX_LIMIT),
                ("flux_z0_r<6.6_Wb", |s| flux(s, 0.0, 6.6 * MM, 0.0), FLUX_LIMIT),
                ("flux_z0_hole_r<2.7_Wb", |s| flux(s, 0.0, 2.7 * MM, 0.0), HOLE_LIMIT),
                ("flux_post_z3_Wb", |s| flux(s, 2.7 * MM, 5.75 * MM, 3.0 * MM), FLUX_LIMIT),
                ("flux_outerwall_z0_Wb", |s| flux(s, 10.6 * MM, 12.75 * MM, 0.0), FLUX_LIMIT),
                ("psi_8_0_Wb_per_rad", |s| flux(s, 0.0, 8.0 * MM, 0.0) / TAU, FLUX_LIMIT),
                (
                    "psi_5.75_0.15_Wb_per_rad",
                    |s| flux(s, 0.0, 5.75 * MM, 0.15 * MM) / TAU,
                    FLUX_LIMIT,
                ),
            ],
        ),
        (
            R5,
            vec![
                ("flux_z0_r<7_Wb", |s| flux(s, 0.0, 7.0 * MM, 0.0), FLUX_LIMIT),
                ("flux_z0_r<8.2_Wb", |s| flux(s, 0.0, 8.2 * MM, 0.0), FLUX_LIMIT),
                ("flux_post_z6_r<7_Wb", |s| flux(s, 0.0, 7.0 * MM, 6.0 * MM), FLUX_LIMIT),
                ("flux_outerring_z0_Wb", |s| flux(s, 14.0 * MM, 16.0 * MM, 0.0), FLUX_LIMIT),
                ("psi_10.8_0_Wb_per_rad", |s| flux(s, 0.0, 10.8 * MM, 0.0) / TAU, FLUX_LIMIT),
                (
                    "Bz_3.5_4_T",
                    |s| s.probe(Point { r: 3.5 * MM, z: 4.0 * MM }).unwrap().b_z,
                    FIELD_LIMIT,
                ),
            ],
        ),
        (
            R7,
            vec![
                ("psi_25_0_Wb_per_rad", |s| flux(s, 0.0, 25.0 * MM, 0.0) / TAU, FLUX_LIMIT),
                (
                    "Bz_10_0_T",
                    |s| s.probe(Point { r: 10.0 * MM, z: 0.0 }).unwrap().b_z,
                    FIELD_LIMIT,
                ),
            ],
        ),
        (
            R8,
            vec![
                ("flux_rod_z0_r<5_Wb", |s| flux(s, 0.0, 5.0 * MM, 0.0), FLUX_LIMIT),
                ("flux_rod_z25_r<5_Wb", |s| flux(s, 0.0, 5.0 * MM, 25.0 * MM), FLUX_LIMIT),
                ("psi_6_0_Wb_per_rad", |s| flux(s, 0.0, 6.0 * MM, 0.0) / TAU, FLUX_LIMIT),
                (
                    "Bz_2.5_0_T",
                    |s| s.probe(Point { r: 2.5 * MM, z: 0.0 }).unwrap().b_z,
                    FIELD_LIMIT,
                ),
            ],
        ),
    ]
}

#[test]
fn fluxes_and_fields_at_points_meet_the_references() {
    let mut failures = vec![];
    for (case, outputs) in asks() {
        let run = Run::new(case.model(1e-4));
        let sampler = Sampler::new(&run.outline, &run.outcome);
        for (output, ask, limit) in outputs {
            let (ours, reference) = (ask(&sampler), case.reference(output));
            let deviation = ours / reference - 1.0;
            println!("{} {output}: {ours:.6e}, {deviation:+.1e}, limit {limit:.0e}", case.name);
            if limit < deviation.abs() || deviation.is_nan() {
                failures.push(format!("{} {output}: {deviation:+.1e}", case.name));
            }
        }
    }
    assert!(failures.is_empty(), "{failures:?}");
}

#[test]
fn the_small_radial_field_in_the_post_meets_the_reference() {
    let run = Run::new(R5.model(1e-6));
    let sampler = Sampler::new(&run.outline, &run.outcome);
    let at = sampler.probe(Point { r: 3.5 * MM, z: 4.0 * MM }).unwrap();
    let deviation = at.b_r - R5.reference("Br_3.5_4_T");
    println!("B_r at (3.5, 4): {:.6e} T, off by {:.1e} of B", at.b_r, deviation / at.b_z);
    // Against the whole field: B_r is 0.4 % of it there.
    assert!(deviation.abs() <= 1e-3 * at.b_z.abs());
}

#[test]
fn flux_is_conserved_through_every_cut() {
    for case in ALL {
        let run = Run::new(case.model(1e-3));
        let sampler = Sampler::new(&run.outline, &run.outcome);
        let middle = flux(&sampler, 0.0, 12e-3, 0.0).abs();
        // The flux through a closed surface is the sum of what ψ changes by along its outline: up to jumps of ψ between
        // triangles, of which there are none. A tin can from z = −7 to 9 mm, radius 12 mm: bottom + top + side.
        let (low, high, radius) = (-7e-3, 9e-3, 12e-3);
        let n = 2000;
        let side: f64 = (0..n)
            .map(|k| {
                let z = low + (high - low) * (k as f64 + 0.5) / n as f64;
                TAU * radius * sampler.probe(Point { r: radius, z }).unwrap().b_r * (high - low)
                    / n as f64
            })
            .sum();
        let ends = flux(&sampler, 0.0, radius, high) - flux(&sampler, 0.0, radius, low);
        println!(
            "{}: ends {ends:+.4e}, side {side:+.4e}, flux in the middle {middle:.4e}",
            case.name
        );
        // The midpoint rule over jumps of B_r from triangle to triangle.
        assert!((ends + side).abs() <= 2e-3 * middle, "{}: {ends} + {side}", case.name);
    }
}

/// Complete elliptic integrals K and E of the parameter m = k² by the arithmetic-geometric mean.
///
/// Source: Abramowitz & Stegun, Handbook of Mathematical Functions, 17.6.
fn elliptic(m: f64) -> [f64; 2] {
    let (mut a, mut b, mut sum, mut power) = (1.0, (1.0 - m).sqrt(), 0.5 * m, 0.5);
    for _ in 0..8 {
        let c = 0.5 * (a - b);
        (a, b) = (0.5 * (a + b), (a * b).sqrt());
        power *= 2.0;
        sum += power * c * c;
    }
    let k = TAU / (4.0 * a);
    [k, k * (1.0 - sum)]
}

/// ψ = r·A_φ of the air coil R7 by 8 × 8 loops at Gauss points.
///
/// Loop: A_φ = (µ0 I/πk)·√(a/r)·((1 − k²/2)K − E), k² = 4ar/((a + r)² + z²) (any text on electromagnetism).
fn psi_of_air_coil(r: f64, z: f64) -> f64 {
    let gauss = gapwright::fem::quadrature::gauss_legendre(8);
    let mut psi = 0.0;
    for &(s, weight_s) in &gauss {
        for &(t, weight_t) in &gauss {
            let (a, height) = ((20.0 + 10.0 * s) * MM, (-5.0 + 10.0 * t) * MM);
            let m = 4.0 * a * r / ((a + r).powi(2) + (z - height).powi(2));
            let [k, e] = elliptic(m);
            let loop_psi =
                MU0 / (TAU / 2.0 * m.sqrt()) * (a * r).sqrt() * ((1.0 - 0.5 * m) * k - e);
            psi += 100.0 * weight_s * weight_t * loop_psi;
        }
    }
    psi
}

#[test]
fn outside_the_polygon_the_field_is_that_of_the_coil() {
    // The polygon's radius is 40 mm. Where the energy is small the mesh is coarse: the error of ψ grows with the distance,
    // relative to ψ itself, although it falls in absolute terms.
    for (interval, limits) in [(1e-3, [5e-3, 2e-2, 1e-1]), (1e-5, [5e-4, 2e-3, 1e-2])] {
        let run = Run::new(R7.model(interval));
        let sampler = Sampler::new(&run.outline, &run.outcome);
        for (rho, limit) in [0.06, 0.12, 0.24].into_iter().zip(limits) {
            let mut worst = 0.0_f64;
            for k in 1..12 {
                let (sin, cos) = (TAU / 2.0 * (k as f64 / 12.0 - 0.5)).sin_cos();
                let (r, z) = (rho * cos, rho * sin);
                let ours = sampler.probe(Point { r, z }).unwrap().psi;
                let scale = psi_of_air_coil(rho, 0.0).abs();
                worst = worst.max((ours - psi_of_air_coil(r, z)).abs() / scale);
            }
            println!(
                "{interval:.0e}, {:.0} mm: ψ off by {worst:.1e} of its largest value there",
                1e3 * rho
            );
            assert!(worst <= limit, "{rho} m: {worst:.1e}");
        }
    }
}

/// B_z on the axis of the air coil R7 at height z.
///
/// B = ½µ0 J [s·ln((r2 + √(r2² + s²))/(r1 + √(r1² + s²)))] between s = z − h/2 and s = z + h/2.
/// Source: D. B. Montgomery, Solenoid Magnet Design (1969) (from memory).
fn b_on_axis_of_air_coil(z: f64) -> f64 {
    let (r1, r2, half_height) = (20.0 * MM, 30.0 * MM, 5.0 * MM);
    let density = 100.0 / ((r2 - r1) * 2.0 * half_height);
    let at = |s: f64| s * ((r2 + r2.hypot(s)) / (r1 + r1.hypot(s))).ln();
    0.5 * MU0 * density * (at(z + half_height) - at(z - half_height))
}

/// A probe of R7 at the default interval: B_z and ψ at (r, z) [mm] as `solve` reports them, and without the probe.
fn probed(r_mm: f64, z_mm: f64) -> [(f64, f64); 2] {
    let point = Point { r: r_mm * MM, z: z_mm * MM };
    let plain = Run::new(R7.model(1e-3));
    let without = Sampler::new(&plain.outline, &plain.outcome).probe(point).unwrap();
    let probe = format!("[[probes]]\nname = \"p\"\nat = [{r_mm}, {z_mm}]\n");
    let results = Run::new(model(&(R7.sheet.to_string() + &probe), 1e-3)).results();
    let with = results.probes[0].points[0];
    assert!((with.r - point.r).abs() + (with.z - point.z).abs() <= 1e-15);
    [(with.b_z, with.psi), (without.b_z, without.psi)]
}

/// A probe refines until its triangle's own error is about 0.3 % of B there; the rest is what comes from elsewhere.
const PROBE_LIMIT: f64 = 1e-2;

/// B_z of a probe on the axis against the closed form, from the middle to the rim of the polygon.
fn check_probe_on_the_axis(z_mm: f64) -> f64 {
    let exact = b_on_axis_of_air_coil(z_mm * MM);
    let [(with, _), (without, _)] = probed(0.0, z_mm);
    let [with, without] = [with, without].map(|b| b / exact - 1.0);
    println!("(0, {z_mm}) mm: B_z off by {with:+.1e}, without a probe there {without:+.1e}");
    assert!(with.abs() <= PROBE_LIMIT, "{z_mm} mm: {with:+.1e}");
    without.abs()
}

#[test]
fn a_probe_on_the_axis_gets_the_field_of_the_thick_coil() {
    let without = [0.0, 10.0].map(check_probe_on_the_axis);
    // Else the probe's own refinement is not what this test sees. Measured 0.9 and 12 % without it, 0.6 and 0.9 % with it.
    assert!(10.0 * PROBE_LIMIT < without[1], "{without:?}");
}

#[test]
fn a_probe_on_the_axis_at_the_rim_of_the_polygon_gets_the_field_of_the_thick_coil() {
    check_probe_on_the_axis(40.0);
}

/// B_z and ψ of a probe six polygon radii away: how far they are off.
fn far_probe(r_mm: f64, z_mm: f64) -> f64 {
    // B_z of ψ by a difference quotient: a step of 0.1 mm at 240 mm errs by 1e-7.
    let (r, z, step) = (r_mm * MM, z_mm * MM, 0.1 * MM);
    let exact_b = (psi_of_air_coil(r + step, z) - psi_of_air_coil(r - step, z)) / (2.0 * step * r);
    let both =
        probed(r_mm, z_mm).map(|(b, psi)| (b / exact_b - 1.0, psi / psi_of_air_coil(r, z) - 1.0));
    let [(b, psi), without] = both;
    println!(
        "({r_mm}, {z_mm}) mm: B_z off by {b:+.1e}, ψ by {psi:+.1e}; without a probe there {without:?}"
    );
    b.abs().max(psi.abs())
}

/// Along r, along z, and between; 240 mm from the middle.
const FAR: [(f64, f64); 3] = [(240.0, 0.0), (150.0, 187.0), (24.0, 239.0)];

#[test]
fn a_probe_far_outside_is_as_good_as_one_near_the_coil() {
    for (r_mm, z_mm) in FAR {
        let worst = far_probe(r_mm, z_mm);
        assert!(worst <= PROBE_LIMIT, "({r_mm}, {z_mm}) mm: {worst:.1e}");
    }
}

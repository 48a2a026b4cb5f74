//! A magnetic sphere with a coaxial loop or coil, spherical shells, and the half-space: series and images.
//!
//! The loop at radius b and height z (ρ² = b² + z², cos θ = z/ρ, s = b/ρ) induces 2ⁿ-poles in a sphere of radius R:
//!
//!     ΔL/µ0 = π R Σ_n [s² P_n'(cos θ) (R/ρ)ⁿ]² (µ − 1)/(n (n(µ + 1) + 1))
//!
//! and a coil has the mean of the bracket over its section. Converges like (R/ρ)^(2n) with the nearest ρ.

use crate::coils::{Coil, self_inductance};
use crate::quadrature::gauss;
use gapwright::units::Meter;
use std::f64::consts::PI;

/// Enough terms for ρ/R ≥ 1.05 in full precision: 1.05^(−2·400) = 1e-17.
const N_TERMS: usize = 400;

/// A sphere at the origin with a coil round it.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct SphereCoil {
    pub radius: Meter,
    /// Relative, may be infinite.
    pub permeability: f64,
    pub coil: Coil,
}

/// L/(µ0 N²) [m] of the coil with its sphere; the section must stay outside 1.05 radii.
pub fn inductance(case: &SphereCoil) -> Meter {
    self_inductance(&case.coil) + sphere_share(case)
}

/// ΔL/(µ0 N²) [m] that the sphere adds.
///
/// 40 × 40 Gauss points over the section: the poles beyond the order that these resolve are damped by (R/ρ)^(2n).
pub fn sphere_share(case: &SphereCoil) -> Meter {
    let rule = gauss(40);
    let ([r1, r2], [bottom, top]) = (case.coil.radii, case.coil.heights);
    let mut means = vec![0.0; N_TERMS + 1];
    for i in 0..40 {
        for j in 0..40 {
            let (b, z) = (r1 + (r2 - r1) * rule.nodes[i], bottom + (top - bottom) * rule.nodes[j]);
            add_moments(case.radius, b, z, rule.weights[i] * rule.weights[j], &mut means);
        }
    }
    series(case.radius, case.permeability, &means)
}

/// ΔL/µ0 [m] of a thin loop at radius `b` and height `z`.
pub fn loop_share(radius: Meter, permeability: f64, b: Meter, z: Meter) -> Meter {
    let mut means = vec![0.0; N_TERMS + 1];
    add_moments(radius, b, z, 1.0, &mut means);
    series(radius, permeability, &means)
}

/// Adds `weight` · s² P_n'(cos θ) (R/ρ)ⁿ for every n ≥ 1.
fn add_moments(radius: Meter, b: Meter, z: Meter, weight: f64, means: &mut [f64]) {
    let rho = b.hypot(z);
    let (cosine, sine2, ratio) = (z / rho, (b / rho) * (b / rho), radius / rho);
    // P_n' by (n − 1) P_n' = (2n − 1) x P_{n−1}' − n P_{n−2}'.
    let (mut before, mut slope) = (0.0, 1.0);
    let mut power = weight * sine2 * ratio;
    for n in 1..means.len() {
        means[n] += power * slope;
        power *= ratio;
        let next = ((2 * n + 1) as f64 * cosine * slope - (n + 1) as f64 * before) / n as f64;
        before = slope;
        slope = next;
    }
}

/// π R Σ m_n² (µ − 1)/(n(n(µ + 1) + 1)).
fn series(radius: Meter, permeability: f64, means: &[f64]) -> f64 {
    let mut sum = 0.0;
    for n in (1..means.len()).rev() {
        let order = n as f64;
        let factor = if permeability.is_infinite() {
            1.0 / (order * order)
        } else {
            (permeability - 1.0) / (order * (order * (permeability + 1.0) + 1.0))
        };
        sum += means[n] * means[n] * factor;
    }
    PI * radius * sum
}

/// Shielding factor of a spherical shell: outer field over inner field.
///
/// [(2µ + 1)(µ + 2) − 2 (a/b)³ (µ − 1)²]/(9µ). Source: J. D. Jackson, Classical Electrodynamics, 5.12 (set-up
/// confirmed, formula derived again).
pub fn shell_shielding(permeability: f64, inner_over_outer: f64) -> f64 {
    let (mu, ratio) = (permeability, inner_over_outer.powi(3));
    ((2.0 * mu + 1.0) * (mu + 2.0) - 2.0 * ratio * (mu - 1.0) * (mu - 1.0)) / (9.0 * mu)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::coils::mutual_inductance;
    use crate::elliptic::{loops, loops_slope};
    use crate::references::{all_published, published};

    #[test]
    fn loops_round_a_sphere_agree_with_the_published_rows() {
        for row in all_published("SPHERE-LOOP", 21) {
            let ours = loop_share(1.0, row.input("mu_r"), row.input("a_over_R"), 0.0);
            row.agrees("", ours, 1e-12);
        }
    }

    #[test]
    fn coils_round_a_sphere_agree_with_the_published_rows() {
        for row in all_published("SPHERE-COIL", 3) {
            let permeability = row.id.rsplit("mu").next().unwrap().parse().unwrap();
            let half = 0.5 * row.input("h");
            let coil = Coil { radii: [row.input("r1"), row.input("r2")], heights: [-half, half] };
            let case = SphereCoil { radius: row.input("R"), permeability, coil };
            row.agrees("L_over_mu0N2", inductance(&case), 1e-11);
            row.agrees("dL", sphere_share(&case), 1e-11);
        }
    }

    #[test]
    fn the_force_on_a_sphere_is_the_slope_of_its_share() {
        for row in all_published("SPHERE-FORCE", 3) {
            let permeability = row.id.rsplit("mu").next().unwrap().parse().unwrap();
            let (b, z, step) = (row.input("b"), row.input("z"), 1e-4);
            row.agrees("dL_over_mu0R", loop_share(1.0, permeability, b, z), 1e-11);
            let up = loop_share(1.0, permeability, b, z + step);
            let down = loop_share(1.0, permeability, b, z - step);
            // Central difference: step² times the third derivative, about 1e-8. The row counts attraction positive.
            row.agrees("F_over_mu0I2", -(up - down) / (4.0 * step), 1e-7);
        }
    }

    #[test]
    fn images_give_the_half_space_rows() {
        for row in published("HALFSPACE-COIL") {
            let (h, clearance, mu) = (row.input("h"), row.input("clearance"), row.input("mu"));
            let coil = Coil {
                radii: [row.input("r1"), row.input("r2")],
                heights: [clearance, clearance + h],
            };
            let image = Coil { radii: coil.radii, heights: [-clearance - h, -clearance] };
            let factor = (mu - 1.0) / (mu + 1.0);
            row.agrees(
                "",
                self_inductance(&coil) + factor * mutual_inductance(&coil, &image),
                1e-10,
            );
        }
        for row in published("HALFSPACE-LOOP") {
            let (a, d, mu) = (row.input("a"), row.input("d"), row.input("mu"));
            let factor = (mu - 1.0) / (mu + 1.0);
            row.agrees("dL_over_mu0", factor * loops(a, a, 2.0 * d), 1e-11);
            row.agrees("F_over_mu0I2", -factor * loops_slope(a, a, 2.0 * d), 1e-10);
        }
    }

    #[test]
    fn shells_and_uniform_spheres_agree() {
        for row in published("SHELL") {
            row.agrees("", shell_shielding(row.input("mu"), row.input("a_over_b")), 1e-13);
        }
        // A shell without a hollow (a → 0) and the sphere's factor 3µ/(µ + 2) are the same physics inside a thin hollow.
        for row in published("SPHERE-CENTRE") {
            let mu = row.input("mu");
            row.agrees("", 3.0 * mu / (mu + 2.0), 1e-13);
        }
    }
}

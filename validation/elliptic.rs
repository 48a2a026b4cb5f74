//! Complete elliptic integrals, circular loops and thin solenoids by the arithmetic–geometric mean.
//!
//! Everything is divided by µ0, so that lengths in give lengths out.

use std::f64::consts::PI;

/// More steps than any f64 modulus needs (convergence is quadratic).
const N_STEPS_MAX: usize = 40;

/// K(k) and E(k) from the *complementary* modulus k' = √(1 − k²), 0 < k' ≤ 1.
///
/// Source: Abramowitz and Stegun, Handbook of Mathematical Functions, 17.6.
pub fn complete(complementary: f64) -> (f64, f64) {
    let (mut a, mut b) = (1.0, complementary);
    let mut sum = 0.5 * (1.0 - complementary * complementary);
    let mut power = 1.0;
    for _ in 0..N_STEPS_MAX {
        let c = 0.5 * (a - b);
        (a, b) = (0.5 * (a + b), (a * b).sqrt());
        sum += power * c * c;
        power *= 2.0;
        if c.abs() < 1e-17 * a {
            break;
        }
    }
    let k = 0.5 * PI / a;
    (k, k * (1.0 - sum))
}

/// Mutual inductance of two coaxial circles over µ0 [m]: radii `a`, `b`, distance `z` of their planes.
///
/// Maxwell's M = µ0 √(ab) [(2/k − k)K − (2/k)E], k² = 4ab/((a + b)² + z²), rewritten with the sum of the mean's
/// defects c_n: M/µ0 = π/(4 agm(R₁, R₂)) Σ_{n≥1} 2ⁿ c_n², c₁ = 2ab/(R₁ + R₂), R₁,₂² = (a ± b)² + z².
/// All terms are positive, so nothing cancels for distant or small loops. Infinite where the circles touch.
/// Source: J. C. Maxwell, Treatise on Electricity and Magnetism, art. 701 (the formula); the rewriting is ours.
pub fn loops(a: f64, b: f64, z: f64) -> f64 {
    loops_about(0.5 * (a + b), b - a, z)
}

/// [`loops`] by the mean of the radii and their difference, which keeps the digits of a small difference.
pub fn loops_about(mean_radius: f64, difference: f64, z: f64) -> f64 {
    let (a, b) = (mean_radius - 0.5 * difference, mean_radius + 0.5 * difference);
    let far = (4.0 * mean_radius * mean_radius + z * z).sqrt();
    let near = (difference * difference + z * z).sqrt();
    let mut mean = 0.5 * (far + near);
    let mut geometric = (far * near).sqrt();
    let mut c = a * b / mean;
    let mut sum = 2.0 * c * c;
    let mut power = 2.0;
    for _ in 0..N_STEPS_MAX {
        let next = 0.5 * (mean + geometric);
        c = c * c / (4.0 * next);
        power *= 2.0;
        let term = power * c * c;
        sum += term;
        geometric = (mean * geometric).sqrt();
        mean = next;
        if term < 1e-17 * sum {
            break;
        }
    }
    0.25 * PI * sum / mean
}

/// dM/dz of two coaxial circles over µ0 [-].
///
/// z k/(4√(ab)) · (2K − (2 − k²)/(1 − k²) E). Source: derivative of Maxwell's art. 701.
pub fn loops_slope(a: f64, b: f64, z: f64) -> f64 {
    let far2 = (a + b) * (a + b) + z * z;
    let near2 = (a - b) * (a - b) + z * z;
    let k2 = 4.0 * a * b / far2;
    let (k_integral, e_integral) = complete((near2 / far2).sqrt());
    z * k2.sqrt() / (4.0 * (a * b).sqrt())
        * (2.0 * k_integral - (2.0 - k2) * far2 / near2 * e_integral)
}

/// Nagaoka's coefficient K: L = µ0 N² π a² K/l of a current sheet of radius `a` and length `l`.
///
/// Source: H. Nagaoka, J. Coll. Sci. Imp. Univ. Tokyo 27, art. 6 (1909).
pub fn nagaoka(a: f64, l: f64) -> f64 {
    let d = 2.0 * a;
    let k2 = d * d / (d * d + l * l);
    let complementary = (l * l / (d * d + l * l)).sqrt();
    let (k_integral, e_integral) = complete(complementary);
    let ratio = (l / d) * (l / d);
    4.0 / (3.0 * PI * complementary) * (ratio * (k_integral - e_integral) + e_integral - k2.sqrt())
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::references::{MU0_OF_CHECKS, all_published};

    #[test]
    fn loops_agree_with_the_published_formula() {
        for row in all_published("LOOPS-", 9) {
            let (a, b, z) = (row.input("a"), row.input("b"), row.input("z"));
            row.agrees("M", MU0_OF_CHECKS * loops(a, b, z), 1e-11);
            row.agrees("dMdz", MU0_OF_CHECKS * loops_slope(a, b, z), 1e-11);
        }
    }

    #[test]
    fn distant_loops_become_dipoles() {
        // Two dipoles on one axis: M = µ0 π a² b²/(2 z³), relative error of order (a/z)².
        let (a, b, z) = (1.0, 2.0, 1e5);
        let dipoles = 0.5 * PI * (a * b) * (a * b) / (z * z * z);
        assert!((loops(a, b, z) / dipoles - 1.0).abs() < 1e-9);
    }

    #[test]
    fn nagaoka_agrees_with_the_table() {
        for row in all_published("NAGAOKA-", 10) {
            row.agrees("", nagaoka(0.5 * row.input("two_a_over_l"), 1.0), 1e-11);
        }
    }

    #[test]
    fn elliptic_integrals_obey_legendres_relation() {
        // K E' + E K' − K K' = π/2.
        for k in [1e-3_f64, 0.1, 0.5, 0.9, 0.999] {
            let kc = (1.0 - k * k).sqrt();
            let ((k1, e1), (k2, e2)) = (complete(kc), complete(k));
            assert!((k1 * e2 + e1 * k2 - k1 * k2 - 0.5 * PI).abs() < 1e-13);
        }
    }
}

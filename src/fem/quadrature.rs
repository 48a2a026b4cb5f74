//! Quadrature on the reference triangle, plain and collapsed into a vertex.
//!
//! Knows no coefficient. Every rule lists barycentric points and weights that sum to ½, the reference area.

use super::moments::PAIRS;

/// One rule: barycentric coordinates and weights (Σ weights = ½).
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Rule {
    pub points: Vec<[f64; 3]>,
    pub weights: Vec<f64>,
    /// Weight × λ_m λ_n of every point, in the order of [`PAIRS`].
    pub products: Vec<[f64; 6]>,
}

impl Rule {
    fn push(&mut self, point: [f64; 3], weight: f64) {
        self.points.push(point);
        self.weights.push(weight);
        self.products.push(PAIRS.map(|(m, n)| weight * point[m] * point[n]));
    }
}

/// The rules of one computation: `plain` away from the axis, `collapsed[k]` into local vertex k.
#[derive(Debug, Clone, PartialEq)]
pub struct Rules {
    pub plain: Rule,
    pub collapsed: [Rule; 3],
}

impl Rules {
    /// The working rules: 16 points of degree 8, and 7 × 8 Gauss points collapsed into a vertex.
    ///
    /// The coefficient ν/r is rational, so a rule that is too low *underestimates the high end*; with
    /// these a higher rule moves the ends by less than the margin of `bound` (tested in `tests/it/guarantee.rs`).
    pub fn working() -> Rules {
        Rules { plain: degree_8(), collapsed: collapsed_rules(7, 8) }
    }

    /// Much higher rules (collapsed Gauss of `n` × `n` points everywhere), to show that the working ones suffice.
    pub fn reference(n: usize) -> Rules {
        let collapsed = collapsed_rules(n, n);
        Rules { plain: collapsed[0].clone(), collapsed }
    }
}

/// Symmetric 16-point rule, exact for polynomials of degree 8.
///
/// Source: D. A. Dunavant, Int. J. Numer. Methods Eng. 21 (1985) 1129, n = 8 (figures from memory;
/// the test of exactness to 1e-14 is what vouches for them).
fn degree_8() -> Rule {
    const CENTROID_WEIGHT: f64 = 0.144_315_607_677_787_18;
    const THREE: [(f64, f64); 3] = [
        (0.095_091_634_267_284_62, 0.459_292_588_292_723_2),
        (0.103_217_370_534_718_26, 0.170_569_307_751_760_2),
        (0.032_458_497_623_198_08, 0.050_547_228_317_030_98),
    ];
    const SIX: (f64, f64, f64) =
        (0.027_230_314_174_434_994, 0.263_112_829_634_638_1, 0.728_492_392_955_404_3);

    let mut rule = Rule::default();
    rule.push([1.0 / 3.0; 3], 0.5 * CENTROID_WEIGHT);
    for (weight, a) in THREE {
        let b = 1.0 - 2.0 * a;
        for point in [[b, a, a], [a, b, a], [a, a, b]] {
            rule.push(point, 0.5 * weight);
        }
    }
    let (weight, a, b) = SIX;
    let c = 1.0 - a - b;
    for point in [[a, b, c], [b, c, a], [c, a, b], [a, c, b], [c, b, a], [b, a, c]] {
        rule.push(point, 0.5 * weight);
    }
    rule
}

/// Gauss rules collapsed into each of the three vertices: λ_k = 1 − t, the other two t(1 − s) and t·s.
///
/// The Jacobian t of the collapse cancels a 1/distance singularity at the vertex (Duffy 1982).
fn collapsed_rules(n_t: usize, n_s: usize) -> [Rule; 3] {
    let (along, across) = (gauss_legendre(n_t), gauss_legendre(n_s));
    [0, 1, 2].map(|k| {
        let mut rule = Rule::default();
        for &(t, weight_t) in &along {
            for &(s, weight_s) in &across {
                let mut point = [0.0; 3];
                point[k] = 1.0 - t;
                point[(k + 1) % 3] = t * (1.0 - s);
                point[(k + 2) % 3] = t * s;
                rule.push(point, weight_t * weight_s * t);
            }
        }
        rule
    })
}

/// Gauss–Legendre points and weights on [0, 1], by Newton on the Legendre recurrence.
pub fn gauss_legendre(n: usize) -> Vec<(f64, f64)> {
    (0..n)
        .map(|i| {
            let mut x = (std::f64::consts::PI * (i as f64 + 0.75) / (n as f64 + 0.5)).cos();
            let mut slope = 1.0;
            // Newton from Tricomi's start value converges quadratically; 8 steps are more than enough.
            for _ in 0..8 {
                let (value, derivative) = legendre(n, x);
                slope = derivative;
                x -= value / derivative;
            }
            (0.5 * (1.0 - x), 1.0 / ((1.0 - x * x) * slope * slope))
        })
        .collect()
}

/// Legendre polynomial P_n and its derivative at |x| < 1.
fn legendre(n: usize, x: f64) -> (f64, f64) {
    let (mut before, mut value) = (1.0, x);
    for k in 2..=n {
        let k = k as f64;
        (before, value) = (value, ((2.0 * k - 1.0) * x * value - (k - 1.0) * before) / k);
    }
    if n == 0 {
        return (1.0, 0.0);
    }
    (value, n as f64 * (x * value - before) / (x * x - 1.0))
}

#[cfg(test)]
mod tests {
    use super::*;

    /// ∫ λ0^a λ1^b λ2^c over the reference triangle = a! b! c! / (a+b+c+2)!.
    fn exact(a: u32, b: u32, c: u32) -> f64 {
        let factorial = |n: u32| (1..=n).map(f64::from).product::<f64>();
        factorial(a) * factorial(b) * factorial(c) / factorial(a + b + c + 2)
    }

    #[track_caller]
    fn check_degree(rule: &Rule, degree: u32) {
        for a in 0..=degree {
            for b in 0..=degree - a {
                let c = degree - a - b;
                let sum: f64 = (rule.points.iter().zip(&rule.weights))
                    .map(|(p, w)| {
                        w * p[0].powi(a as i32) * p[1].powi(b as i32) * p[2].powi(c as i32)
                    })
                    .sum();
                // 1e-14 relative: sums of 16 to 144 terms in double precision.
                assert!(
                    (sum - exact(a, b, c)).abs() < 1e-14 * 0.5_f64.max(exact(a, b, c)),
                    "{a} {b} {c}: {sum}"
                );
            }
        }
    }

    #[test]
    fn plain_rule_is_exact_for_degree_8() {
        check_degree(&Rules::working().plain, 8);
    }

    #[test]
    fn collapsed_rules_are_exact_for_degree_12() {
        for rule in &Rules::working().collapsed {
            check_degree(rule, 12);
        }
    }

    #[test]
    fn collapsed_rule_integrates_one_over_distance_from_its_vertex() {
        // ∫ 1/(1 − λ0) over the reference triangle = ∫0^1 ∫0^1 (1/t)·t ds dt = 1.
        let rule = &Rules::working().collapsed[0];
        let sum: f64 = rule.points.iter().zip(&rule.weights).map(|(p, w)| w / (1.0 - p[0])).sum();
        assert!((sum - 1.0).abs() < 1e-14);
    }
}

//! Gauss–Legendre rules of any order, and sums over panels.

use std::f64::consts::PI;
use std::sync::OnceLock;

/// Largest order that [`gauss`] keeps.
const N_ORDERS: usize = 65;

/// Nodes and weights of a rule on [0, 1].
#[derive(Debug, Clone)]
pub struct Rule {
    pub nodes: Vec<f64>,
    pub weights: Vec<f64>,
}

/// The `n_points`-point Gauss–Legendre rule on [0, 1], computed once (1 ≤ `n_points` ≤ 64).
///
/// Newton on the three-term recurrence from Tricomi's start values; nodes are good to the last digit or two.
pub fn gauss(n_points: usize) -> &'static Rule {
    static RULES: [OnceLock<Rule>; N_ORDERS] = [const { OnceLock::new() }; N_ORDERS];
    assert!((1..N_ORDERS).contains(&n_points), "no Gauss rule with {n_points} points is kept");
    RULES[n_points].get_or_init(|| compute(n_points))
}

/// ∫ f over [from, to] by one `n_points`-point panel.
pub fn panel(from: f64, to: f64, n_points: usize, mut f: impl FnMut(f64) -> f64) -> f64 {
    let rule = gauss(n_points);
    let width = to - from;
    let mut sum = 0.0;
    for i in 0..n_points {
        sum += rule.weights[i] * f(from + width * rule.nodes[i]);
    }
    sum * width
}

/// Nodes and weights on [0, 1] in ascending order.
fn compute(n_points: usize) -> Rule {
    let mut rule = Rule { nodes: vec![0.0; n_points], weights: vec![0.0; n_points] };
    for i in 0..n_points {
        let mut x = -(PI * (i as f64 + 0.75) / (n_points as f64 + 0.5)).cos();
        let mut slope = 1.0;
        for _ in 0..100 {
            let (value, derivative) = legendre(n_points, x);
            slope = derivative;
            let step = value / derivative;
            x -= step;
            if step.abs() < 1e-16 {
                break;
            }
        }
        rule.nodes[i] = 0.5 * (1.0 + x);
        rule.weights[i] = 1.0 / ((1.0 - x * x) * slope * slope);
    }
    rule
}

/// P_n(x) and P_n'(x) for |x| < 1.
pub fn legendre(n: usize, x: f64) -> (f64, f64) {
    let (mut before, mut value) = (1.0, x);
    if n == 0 {
        return (1.0, 0.0);
    }
    for k in 2..=n {
        let k = k as f64;
        let next = ((2.0 * k - 1.0) * x * value - (k - 1.0) * before) / k;
        before = value;
        value = next;
    }
    (value, n as f64 * (x * value - before) / (x * x - 1.0))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_rule_integrates_every_power_up_to_its_degree() {
        for n_points in [1, 2, 5, 8, 10, 16, 24, 64] {
            for power in 0..2 * n_points {
                let exact = 1.0 / (power as f64 + 1.0);
                let ours = panel(0.0, 1.0, n_points, |x| x.powi(power as i32));
                // Rounding of at most 64 products.
                assert!(
                    (ours - exact).abs() < 1e-14,
                    "{n_points} points, power {power}: {ours} against {exact}"
                );
            }
        }
    }
}

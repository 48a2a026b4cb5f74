//! Bessel functions: I₀, I₁, K₀, K₁ scaled against overflow, J of fractional order, and ∫ t J₁(t) dt.

use std::f64::consts::PI;

/// From here on the asymptotic series reach full precision (smallest term about e^(−2x) = 2e-22).
const ASYMPTOTIC_FROM: f64 = 25.0;

/// Γ(1/6), from memory; the test uses Γ(1/6) Γ(5/6) = 2π.
pub const GAMMA_1_6: f64 = 5.566_316_001_780_235;

/// e^(−x) (I₀(x), I₁(x)) and e^x (K₀(x), K₁(x)) for x > 0.
#[derive(Debug, Clone, Copy)]
pub struct Scaled {
    pub i0: f64,
    pub i1: f64,
    pub k0: f64,
    pub k1: f64,
}

/// All four scaled functions; relative error about 1e-14.
///
/// I by its power series (all terms positive), K by the trapezoidal rule on ∫ exp(−x cosh t) cosh νt dt (converges
/// like exp(−π²/step)), both by Hankel's asymptotic series for large x.
/// Source: Abramowitz and Stegun 9.6.10, 9.6.24, 9.7.1, 9.7.2.
pub fn scaled(x: f64) -> Scaled {
    assert!(0.0 < x, "scaled Bessel functions of {x}");
    if x >= ASYMPTOTIC_FROM {
        let front = 1.0 / (2.0 * PI * x).sqrt();
        return Scaled {
            i0: front * hankel(0.0, -x),
            i1: front * hankel(1.0, -x),
            k0: PI * front * hankel(0.0, x),
            k1: PI * front * hankel(1.0, x),
        };
    }
    let quarter = 0.25 * x * x;
    let (mut term, mut i0, mut i1) = ((-x).exp(), 0.0, 0.0);
    for k in 0..200 {
        i0 += term;
        i1 += term / (k as f64 + 1.0);
        term *= quarter / ((k as f64 + 1.0) * (k as f64 + 1.0));
        if term < 1e-18 * i0 {
            break;
        }
    }
    let (k0, k1) = macdonald(x);
    Scaled { i0, i1: 0.5 * x * i1, k0, k1 }
}

/// Σ a_k(ν)/x^k, a_k = Π (4ν² − (2j − 1)²)/(8j), until the terms grow or vanish.
fn hankel(order: f64, x: f64) -> f64 {
    let (mut sum, mut term) = (1.0, 1.0);
    for k in 1..60 {
        let odd = 2.0 * k as f64 - 1.0;
        let next: f64 = term * (4.0 * order * order - odd * odd) / (8.0 * k as f64 * x);
        if next.abs() > f64::abs(term) || next.abs() < 1e-18 {
            break;
        }
        term = next;
        sum += term;
    }
    sum
}

/// e^x (K₀, K₁) by the trapezoidal rule.
fn macdonald(x: f64) -> (f64, f64) {
    let step = 0.1;
    let (mut k0, mut k1) = (0.5, 0.5);
    for i in 1..1000 {
        let t = step * i as f64;
        let half = (0.5 * t).sinh();
        let decay = (-2.0 * x * half * half).exp();
        let weighted = decay * t.cosh();
        k0 += decay;
        k1 += weighted;
        if weighted < 1e-18 * k1 {
            break;
        }
    }
    (step * k0, step * k1)
}

/// J_ν(x), J_{ν+1}(x), … J_{ν+n−1}(x) for a fractional ν in (0, 1), x > 0; Γ(ν + 1) is given.
///
/// Downward recurrence with the sum (x/2)^ν = Σ (ν + 2k) Γ(ν + k)/k! J_{ν+2k} for small x; upward from Hankel's series
/// for large x, stable while the order stays below x. Source: Abramowitz and Stegun 9.1.87, 9.2.5, 9.12.
pub fn j_orders(order: f64, gamma_of_order_plus_1: f64, n_orders: usize, x: f64) -> Vec<f64> {
    if x >= ASYMPTOTIC_FROM.max(n_orders as f64 + 5.0) {
        return j_upward(order, n_orders, x);
    }
    let n_start = 2 * ((x as usize + n_orders + 40) / 2);
    let mut values = vec![0.0; n_start + 2];
    values[n_start] = 1e-300;
    for k in (0..n_start).rev() {
        values[k] = 2.0 * (order + k as f64 + 1.0) / x * values[k + 1] - values[k + 2];
        if values[k].abs() > 1e200 {
            values.iter_mut().skip(k).for_each(|v| *v *= 1e-300);
        }
    }
    // (ν + 2k) Γ(ν + k)/k! with Γ(ν) taken out, k = 0: ν.
    let (mut sum, mut ratio) = (0.0, 1.0);
    for k in 0..n_start / 2 {
        sum += (order + 2.0 * k as f64) * ratio * values[2 * k];
        ratio *= (order + k as f64) / (k as f64 + 1.0);
    }
    let wanted = (0.5 * x).powf(order) / (gamma_of_order_plus_1 / order);
    values.truncate(n_orders);
    values.iter_mut().for_each(|v| *v *= wanted / sum);
    values
}

/// Upward recurrence from Hankel's series.
fn j_upward(order: f64, n_orders: usize, x: f64) -> Vec<f64> {
    let mut values = vec![j_hankel(order, x), j_hankel(order + 1.0, x)];
    for k in 1..n_orders.max(2) - 1 {
        values.push(2.0 * (order + k as f64) / x * values[k] - values[k - 1]);
    }
    values.truncate(n_orders);
    values
}

/// J_ν(x) = √(2/πx) (P cos χ − Q sin χ), χ = x − νπ/2 − π/4, for x ≥ 25 and small ν.
fn j_hankel(order: f64, x: f64) -> f64 {
    let (mut p, mut q, mut term) = (1.0, 0.0, 1.0_f64);
    for k in 1..60 {
        let odd = 2.0 * k as f64 - 1.0;
        let next = term * (4.0 * order * order - odd * odd) / (8.0 * k as f64 * x);
        if next.abs() > term.abs() || next.abs() < 1e-18 {
            break;
        }
        term = next;
        match k % 4 {
            1 => q += term,
            2 => p -= term,
            3 => q -= term,
            _ => p += term,
        }
    }
    let phase = x - 0.5 * PI * order - 0.25 * PI;
    (2.0 / (PI * x)).sqrt() * (p * phase.cos() - q * phase.sin())
}

/// Ω(x) = ∫₀ˣ t J₁(t) dt = (πx/2)(J₁H₀ − J₀H₁) with Struve's H.
///
/// Trapezoidal rule on Bessel's integrals −x J₀ + ∫₀ˣ J₀ = (1/π) ∫₀^π [sin(x sin τ)/sin τ − x cos(x sin τ)] dτ, which
/// converges geometrically once there are more points than about x. Source: Abramowitz and Stegun 9.1.18.
pub fn struve_moment(x: f64) -> f64 {
    // Symmetric about π/2: the midpoints of one half are enough.
    let n_points = (0.5 * x) as usize + 24;
    let mut sum = 0.0;
    for i in 0..n_points {
        let sine = (0.5 * PI * (i as f64 + 0.5) / n_points as f64).sin();
        let (s, c) = (x * sine).sin_cos();
        sum += s / sine - x * c;
    }
    sum / n_points as f64
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::quadrature::panel;

    #[test]
    fn the_wronskian_holds_at_every_size() {
        // I₀K₁ + I₁K₀ = 1/x.
        for x in [1e-3, 0.1, 1.0, 3.0, 10.0, 24.9, 25.1, 100.0, 1e4] {
            let b = scaled(x);
            let error = (b.i0 * b.k1 + b.i1 * b.k0) * x - 1.0;
            assert!(error.abs() < 1e-13, "x = {x}: {error:.1e}");
        }
    }

    #[test]
    fn known_values_come_out() {
        // Abramowitz and Stegun table 9.8, from memory: I0(1), I1(1), K0(1), K1(1).
        let b = scaled(1.0);
        let e = 1f64.exp();
        assert!((b.i0 * e - 1.266_065_877_752_008).abs() < 1e-14);
        assert!((b.i1 * e - 0.565_159_103_992_485).abs() < 1e-14);
        assert!((b.k0 / e - 0.421_024_438_240_708).abs() < 1e-14);
        assert!((b.k1 / e - 0.601_907_230_197_235).abs() < 1e-14);
    }

    #[test]
    fn fractional_orders_agree_with_poissons_integral() {
        // J_ν(x) (2/x)^ν Γ(ν+1) = ∫ (1−t²)^(ν−1/2) cos(xt) dt / ∫ (1−t²)^(ν−1/2) dt; here ν = 5/6, t = sin u graded.
        let order = 5.0 / 6.0;
        let gamma = order * 2.0 * PI / GAMMA_1_6;
        // 1 − t = y³ makes (1−t)^(1/3) dt smooth.
        let weighted = |x: f64| {
            let f = |y: f64| {
                let t = 1.0 - y * y * y;
                y * (1.0 + t).powf(1.0 / 3.0) * (x * t).cos() * 3.0 * y * y
            };
            (0..8).map(|i| panel(i as f64 / 8.0, (i as f64 + 1.0) / 8.0, 20, f)).sum::<f64>()
        };
        for x in [0.5, 7.0, 24.0, 26.0, 40.0] {
            let poisson = weighted(x) / weighted(0.0);
            let ours = j_orders(order, gamma, 3, x)[0] * (2.0 / x).powf(order) * gamma;
            assert!((ours - poisson).abs() < 1e-13, "x = {x}: {ours} against {poisson}");
        }
    }

    #[test]
    fn downward_and_upward_recurrence_meet() {
        let order = 1.0 / 6.0;
        let gamma = order * GAMMA_1_6;
        // 20 orders force the downward way at 24.9; upward is still stable there.
        let down = j_orders(order, gamma, 20, 24.9);
        let up = j_upward(order, 20, 24.9);
        for (d, u) in down.iter().zip(&up) {
            assert!((d - u).abs() < 1e-13, "{d} against {u}");
        }
    }

    #[test]
    fn the_struve_moment_starts_as_a_cube_and_tends_to_its_asymptote() {
        let x = 1e-2;
        // t J₁ = t²/2 − t⁴/16 + …
        assert!(
            (struve_moment(x) / (x * x * x / 6.0 * (1.0 - 3.0 * x * x / 40.0)) - 1.0).abs() < 1e-9
        );
        // The first value of ∫ t J₁ by a plain Gauss rule on J₁'s own integral.
        let j1 = |t: f64| {
            let n = 40;
            (0..n)
                .map(|i| PI * (i as f64 + 0.5) / n as f64)
                .map(|a| (a - t * a.sin()).cos())
                .sum::<f64>()
                / n as f64
        };
        assert!((struve_moment(6.0) - panel(0.0, 6.0, 30, |t| t * j1(t))).abs() < 1e-12);
    }
}

//! The second way to the self inductance of an air coil: the Bessel–Struve integral of the published tables.
//!
//!     L/(µ0 N²) = 2π/(w² h²) ∫₀^∞ G(k)² (kh − 1 + e^(−kh))/k² dk,   G(k) = [Ω(kr)]_{r1}^{r2}/k²
//!
//! It shares no line with the real-space quadrature. The integrand falls like k⁻⁴ and swings, so it is slower and
//! ends at about 1e-9: good enough to catch any mistake of the first way.
//! Source: Rosa and Grover, Bull. Bureau of Standards 8 (1912); Struve form after J. T. Conway, IEEE Trans. Magn. 43
//! (2007), from memory.

use crate::bessel::struve_moment;
use crate::coils::Coil;
use crate::quadrature::panel;
use std::f64::consts::PI;

/// L/(µ0 N²) [m] with the integral cut at k r2 = `cut` and the mean of the tail added.
///
/// Tail: G² has the mean (r1 + r2)/(πk³), so ∫ ≈ (r1 + r2)/π · (h/(3K³) − 1/(4K⁴)); the swinging part that is left is
/// below about 1/(K·(r2 − r1)) of that.
pub fn self_inductance(coil: &Coil, cut: f64) -> f64 {
    let [r1, r2] = coil.radii;
    let (width, height) = (r2 - r1, coil.heights[1] - coil.heights[0]);
    let k_max = cut / r2;
    // One panel holds two radians of the fastest swing, 2 k r2.
    let n_panels = cut.ceil() as usize;
    let step = k_max / n_panels as f64;
    let mut sum = 0.0;
    for i in 0..n_panels {
        let from = step * i as f64;
        // exp(−kh) of a tall coil is steep near k = 0: grade the first panel.
        if i == 0 {
            sum += panel(0.0, 1.0, 30, |x| {
                3.0 * x * x * step * integrand(step * x * x * x, r1, r2, height)
            });
            continue;
        }
        sum += panel(from, from + step, 8, |k| integrand(k, r1, r2, height));
    }
    let tail = (r1 + r2) / PI * (height / (3.0 * k_max.powi(3)) - 1.0 / (4.0 * k_max.powi(4)));
    2.0 * PI / (width * width * height * height) * (sum + tail)
}

/// G(k)² (kh − 1 + e^(−kh))/k².
fn integrand(k: f64, r1: f64, r2: f64, height: f64) -> f64 {
    let moment = (struve_moment(k * r2) - struve_moment(k * r1)) / (k * k);
    let x = k * height;
    // x − 1 + e^(−x) loses digits below 0.1.
    let rise = if x < 0.1 {
        x * x
            * (0.5
                - x * (1.0 / 6.0
                    - x * (1.0 / 24.0 - x * (1.0 / 120.0 - x * (1.0 / 720.0 - x / 5040.0)))))
    } else {
        x - 1.0 + (-x).exp()
    };
    moment * moment * rise / (k * k)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::coils;
    use crate::dice::Dice;
    use crate::random::air_coil;

    #[test]
    fn two_methods_agree_on_random_coils() {
        let mut dice = Dice(7);
        let mut worst: f64 = 0.0;
        let mut n_compared = 0;
        for _ in 0..40 {
            let coil = air_coil(&mut dice);
            let width = coil.radii[1] - coil.radii[0];
            let height = coil.heights[1] - coil.heights[0];
            // The Bessel integral needs a section that is not too small against the radius.
            if width < 0.2 * coil.radii[1] || height < 0.2 * coil.radii[1] {
                continue;
            }
            let (real_space, bessel) =
                (coils::self_inductance(&coil), self_inductance(&coil, 400.0));
            worst = worst.max((real_space / bessel - 1.0).abs());
            n_compared += 1;
        }
        assert!(n_compared >= 10, "only {n_compared} coils compared");
        // Swinging rest of the tail: (4/3)/(w h² … K³)·1/(K w) with w, h ≥ 0.2 and K = 400 is below 1e-8.
        assert!(worst < 1e-8, "worst deviation {worst:.1e}");
    }
}

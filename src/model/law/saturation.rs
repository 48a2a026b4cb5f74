//! The two-parameter law B = µ0 H + J_s·H/(H + H_a): inverse and energies in closed form, stable at every field.

use crate::units::{AmperePerMeter, JoulePerCubicMeter, MU0, Tesla};

/// The law with its derived constant H_a.
///
/// Source: Fröhlich 1881 and Kennelly 1891 (from memory), written for the polarisation so that dB/dH ≥ µ0.
#[derive(Debug, Clone, Copy)]
pub(super) struct Saturation {
    /// Saturation polarisation J_s [T].
    polarisation: Tesla,
    /// Field H_a [A/m] at which half of J_s is reached; infinite for µ_i = 1.
    half_field: AmperePerMeter,
}

impl Saturation {
    /// H_a = J_s/(µ0(µ_i − 1)) makes dB/dH = µ0 µ_i at H = 0.
    pub(super) fn new(initial_permeability: f64, polarisation: Tesla) -> Saturation {
        Saturation { polarisation, half_field: polarisation / (MU0 * (initial_permeability - 1.0)) }
    }

    /// B(H) [T].
    pub(super) fn flux_density(&self, h: AmperePerMeter) -> Tesla {
        MU0 * h + self.polarisation * (h / (h + self.half_field))
    }

    /// dB/dH [H/m] = µ0 + (J_s/H_a)/(1 + H/H_a)².
    pub(super) fn slope(&self, h: AmperePerMeter) -> f64 {
        let stretch = 1.0 + h / self.half_field;
        MU0 + self.polarisation / self.half_field / (stretch * stretch)
    }

    /// H(B) [A/m]: the positive root of µ0 H² + p H − B H_a = 0, p = µ0 H_a + J_s − B.
    ///
    /// Each sign of p has its own form of the root, so that nothing cancels.
    pub(super) fn field(&self, b: Tesla) -> AmperePerMeter {
        let linear = MU0 * self.half_field + self.polarisation - b;
        let product = b * self.half_field;
        let root = (linear * linear + 4.0 * MU0 * product).sqrt();
        if 0.0 <= linear { 2.0 * product / (linear + root) } else { (root - linear) / (2.0 * MU0) }
    }

    /// w*(H) = ½µ0H² + J_s H_a (x − ln(1 + x)) [J/m³], x = H/H_a.
    pub(super) fn coenergy_density(&self, h: AmperePerMeter) -> JoulePerCubicMeter {
        let x = h / self.half_field;
        let y = x / (2.0 + x);
        let shape =
            if x < SERIES_BELOW { 2.0 * y * y / (1.0 - y) - log_tail(y) } else { x - x.ln_1p() };
        0.5 * MU0 * h * h + self.polarisation * self.half_field * shape
    }

    /// w(B(H)) = ½µ0H² + J_s H_a (ln(1 + x) − x/(1 + x)) [J/m³], x = H/H_a.
    pub(super) fn energy_density_of_field(&self, h: AmperePerMeter) -> JoulePerCubicMeter {
        let x = h / self.half_field;
        let y = x / (2.0 + x);
        let shape = if x < SERIES_BELOW {
            2.0 * y * y / (1.0 + y) + log_tail(y)
        } else {
            x.ln_1p() - x / (1.0 + x)
        };
        0.5 * MU0 * h * h + self.polarisation * self.half_field * shape
    }

    /// B [T] beyond which dB/dH < `level` [H/m]; None where dB/dH never falls so far (level ≤ µ0).
    pub(super) fn last_above(&self, level: f64) -> Option<Tesla> {
        if level <= MU0 {
            return None;
        }
        let stretch = (self.polarisation / self.half_field / (level - MU0)).sqrt();
        Some(self.flux_density(self.half_field * (stretch - 1.0).max(0.0)))
    }
}

/// Below this x = H/H_a the differences with ln(1 + x) lose digits and a series is used.
///
/// At ½ either form is good: the difference x − ln(1 + x) = 0.095 costs a factor 5 of rounding.
const SERIES_BELOW: f64 = 0.5;

/// ln(1 + x) − 2y = 2(y³/3 + y⁵/5 + …), y = x/(2 + x) ≤ 0.2: ln(1 + x) = 2 artanh y.
fn log_tail(y: f64) -> f64 {
    let y2 = y * y;
    let mut sum = 0.0;
    // y² ≤ 0.04: the first term left out is 0.04¹²·3/27 = 2e-18 of the sum.
    for k in (0..12).rev() {
        sum = sum * y2 + 1.0 / (2 * k + 3) as f64;
    }
    2.0 * y * y2 * sum
}

//! One interval of a B–H table: a cubic B(H) with the energies collected up to its start.

use crate::units::{AmperePerMeter, JoulePerCubicMeter, Tesla};

/// B(h + s) = b + c₁s + c₂s² + c₃s³ for 0 ≤ s ≤ length; the last piece of a table is straight and endless.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Piece {
    /// Field and flux density at the start.
    pub h: AmperePerMeter,
    pub b: Tesla,
    /// w*(h) and w(b) at the start; their sum is h·b.
    pub coenergy: JoulePerCubicMeter,
    pub energy: JoulePerCubicMeter,
    /// Length in H [A/m].
    pub length: AmperePerMeter,
    /// c₁, c₂, c₃; c₁ ≥ µ0.
    pub coefficients: [f64; 3],
}

/// Bound on the steps of [`Piece::step_for`]: bisection alone would gain a bit a step and reach 53 of them.
const N_STEPS_MAX: usize = 60;

impl Piece {
    /// B(h + s) − b [T].
    pub fn rise(&self, s: AmperePerMeter) -> Tesla {
        let [c1, c2, c3] = self.coefficients;
        s * (c1 + s * (c2 + s * c3))
    }

    /// dB/dH at h + s [H/m].
    pub fn slope(&self, s: AmperePerMeter) -> f64 {
        let [c1, c2, c3] = self.coefficients;
        c1 + s * (2.0 * c2 + s * 3.0 * c3)
    }

    /// w*(h + s) − w*(h) = ∫₀ˢ B ds [J/m³].
    pub fn coenergy_rise(&self, s: AmperePerMeter) -> JoulePerCubicMeter {
        let [c1, c2, c3] = self.coefficients;
        s * (self.b + s * (c1 / 2.0 + s * (c2 / 3.0 + s * c3 / 4.0)))
    }

    /// w at h + s minus w at h: ∫ (h + s) B'(s) ds [J/m³].
    pub fn energy_rise(&self, s: AmperePerMeter) -> JoulePerCubicMeter {
        let [c1, c2, c3] = self.coefficients;
        self.h * self.rise(s) + s * s * (c1 / 2.0 + s * (c2 * 2.0 / 3.0 + s * c3 * 0.75))
    }

    /// The s with rise(s) = `rise` ≥ 0: Newton's method kept inside a shrinking bracket.
    ///
    /// Stops where the defect, or the one after the next step, is rounding; the slope is ≥ µ0, so there is one root.
    pub fn step_for(&self, rise: Tesla) -> AmperePerMeter {
        self.step_and_count(rise).0
    }

    /// [`Piece::step_for`] and the number of Newton or bisection steps it took (0 on a straight piece).
    pub fn step_and_count(&self, rise: Tesla) -> (AmperePerMeter, usize) {
        let [c1, c2, c3] = self.coefficients;
        if c2 == 0.0 && c3 == 0.0 {
            return (rise / c1, 0);
        }
        let (mut low, mut high) = (0.0, self.length);
        let total = self.rise(self.length);
        let mut s = (self.length * (rise / total)).min(self.length);
        for count in 1..=N_STEPS_MAX {
            let defect = self.rise(s) - rise;
            if 0.0 < defect {
                high = s;
            } else {
                low = s;
            }
            let step = -defect / self.slope(s);
            let newton = s + step;
            let inside = low <= newton && newton <= high;
            let next = if inside { newton } else { 0.5 * (low + high) };
            // Taylor's formula ends at the cubic, so the defect after the step is known without taking it.
            let defect_next = step * step * (c2 + c3 * (3.0 * s + step));
            // The Horner sum of `rise` is good to a few units of its last place: a smaller defect is noise.
            let settled = (inside && defect_next.abs() <= f64::EPSILON * rise)
                || defect.abs() <= 4.0 * f64::EPSILON * rise;
            if settled {
                return (next, count);
            }
            s = next;
        }
        (s, N_STEPS_MAX)
    }

    /// Largest slope on the piece [H/m].
    pub fn slope_max(&self) -> f64 {
        let [_, c2, c3] = self.coefficients;
        let ends = self.slope(0.0).max(self.slope(self.length));
        let vertex = -c2 / (3.0 * c3);
        // A straight or parabolic piece has c₃ = 0; the vertex is then infinite or NaN and not inside.
        if 0.0 < vertex && vertex < self.length { ends.max(self.slope(vertex)) } else { ends }
    }

    /// The last s of the piece with slope ≥ `level`; None where the whole piece is below.
    pub fn last_above(&self, level: f64) -> Option<AmperePerMeter> {
        if level <= self.slope(self.length) {
            return Some(self.length);
        }
        // Roots of 3c₃s² + 2c₂s + (c₁ − level), in the form that does not cancel.
        let [c1, c2, c3] = self.coefficients;
        let discriminant = c2 * c2 - 3.0 * c3 * (c1 - level);
        if discriminant < 0.0 {
            return None;
        }
        let q = -(c2 + discriminant.sqrt().copysign(c2));
        let roots = [q / (3.0 * c3), (c1 - level) / q];
        roots.into_iter().filter(|s| (0.0..self.length).contains(s)).reduce(f64::max)
    }
}

//! A coil on an endless rod, repeated with a period and closed by a flux-tight tube: cosine series.
//!
//! Not a model of the product (the tube ψ = 0 has no counterpart there): it is here as an independent use of the same
//! modes. With k = 2πn/H and unit ampere-turns, J_n = 4 J sin(kh/2)/(kH), the part of the mode n is
//! π H J_n² ∬ g r r' dr dr' over the section, where g = A_<(r_<) A_>(r_>)/(1 + RS),
//!
//!     A_< = I₁ + R K₁,  R = (µ − 1) I₀I₁/(K₁I₀ + µ K₀I₁) at ka;   A_> = K₁ − S I₁,  S = K₁/I₁ at kR_w.
//!
//! The mode n = 0 is the endless solenoid with its return flux. Terms fall like n⁻⁴; the tail is added in the mean.
//! An open infinite rod would need the integral over k instead; it is left out.

use crate::bessel::scaled;
use crate::quadrature::{Rule, gauss};
use std::f64::consts::PI;

/// Modes summed term by term; the tail beyond is 1e-9 of the sum and known to a few per cent.
const N_MODES: usize = 300;
/// Points per panel.
const N_POINTS: usize = 10;

/// Rod of radius `rod` and relative `permeability`; coil `radii` × `height`; period and tube radius (one length unit).
#[derive(Debug, Clone, Copy)]
pub struct Cell {
    pub rod: f64,
    pub permeability: f64,
    pub radii: [f64; 2],
    pub height: f64,
    pub period: f64,
    pub tube: f64,
}

/// Inductance of one period over µ0 N².
pub fn inductance(cell: &Cell) -> f64 {
    let density = 1.0 / ((cell.radii[1] - cell.radii[0]) * cell.height);
    let running = running_weights();
    let mut sum = 0.0;
    for n in (1..=N_MODES).rev() {
        let k = 2.0 * PI * n as f64 / cell.period;
        let current = 4.0 * density * (0.5 * k * cell.height).sin() / (k * cell.period);
        sum += PI * cell.period * current * current * section_integral(cell, k, &running);
    }
    sum + tail(cell, density) + solenoid(cell, density * cell.height / cell.period)
}

/// Σ_{n > N_MODES} with A = J/k² inside the section and the mean ½ of sin².
fn tail(cell: &Cell, density: f64) -> f64 {
    let [r1, r2] = cell.radii;
    let n = N_MODES as f64 + 0.5;
    let per_mode = PI * 8.0 * density * density / cell.period * 0.5 * (r2 * r2 - r1 * r1);
    per_mode * (cell.period / (2.0 * PI)).powi(4) / (3.0 * n.powi(3))
}

/// The mode n = 0: H_z falls from H₁ to H₁ − Jw across the section, and the whole flux returns inside the tube.
fn solenoid(cell: &Cell, density: f64) -> f64 {
    let [r1, r2] = cell.radii;
    let fall = |r: f64| density * (r.min(r2) - r1).max(0.0);
    let over_air = |f: &dyn Fn(f64) -> f64| {
        let cuts = [cell.rod, r1, r2, cell.tube];
        cuts.windows(2).map(|c| crate::quadrature::panel(c[0], c[1], 4, f)).sum::<f64>()
    };
    let weight = 0.5
        * (cell.permeability * cell.rod * cell.rod + cell.tube * cell.tube - cell.rod * cell.rod);
    let inner = over_air(&|r| fall(r) * r) / weight;
    let rod = 0.5 * cell.permeability * inner * inner * cell.rod * cell.rod;
    2.0 * PI * cell.period * (rod + over_air(&|r| (inner - fall(r)).powi(2) * r))
}

/// ∬ g r r' dr dr' = 2 ∫ A_>(r) r ∫_{r1}^{r} A_<(r') r' dr' dr/(1 + RS), with the exponentials taken out.
fn section_integral(cell: &Cell, k: f64, running: &[[f64; N_POINTS]; N_POINTS]) -> f64 {
    let rule: &Rule = gauss(N_POINTS);
    let [r1, r2] = cell.radii;
    let (at_rod, at_tube) = (scaled(k * cell.rod), scaled(k * cell.tube));
    let mu = cell.permeability;
    let reflected =
        (mu - 1.0) * at_rod.i0 * at_rod.i1 / (at_rod.k1 * at_rod.i0 + mu * at_rod.k0 * at_rod.i1);
    let returned = at_tube.k1 / at_tube.i1;
    let wronskian = 1.0 + reflected * returned * (-2.0 * k * (cell.tube - cell.rod)).exp();

    let n_panels = ((r2 - r1) * k / 1.5).ceil().max(2.0) as usize;
    let width = (r2 - r1) / n_panels as f64;
    let (mut carried, mut sum) = (0.0, 0.0);
    for p in 0..n_panels {
        let from = r1 + width * p as f64;
        let (mut growing, mut falling) = ([0.0; N_POINTS], [0.0; N_POINTS]);
        for i in 0..N_POINTS {
            let r = from + width * rule.nodes[i];
            let b = scaled(k * r);
            growing[i] = r * (b.i1 + reflected * b.k1 * (-2.0 * k * (r - cell.rod)).exp());
            falling[i] = r * (b.k1 - returned * b.i1 * (-2.0 * k * (cell.tube - r)).exp());
            growing[i] *= (k * (r - from)).exp();
            falling[i] *= (-k * (r - from)).exp();
        }
        let mut whole = 0.0;
        for i in 0..N_POINTS {
            let before: f64 = (0..N_POINTS).map(|j| running[i][j] * growing[j]).sum();
            sum += width * rule.weights[i] * falling[i] * (carried + width * before);
            whole += width * rule.weights[i] * growing[i];
        }
        carried = (carried + whole) * (-k * width).exp();
    }
    2.0 * sum / wronskian
}

/// running[i][j] = ∫₀^{x_i} ℓ_j: running integrals at the Gauss points from the values there.
fn running_weights() -> [[f64; N_POINTS]; N_POINTS] {
    let rule = gauss(N_POINTS);
    let mut weights = [[0.0; N_POINTS]; N_POINTS];
    for i in 0..N_POINTS {
        for j in 0..N_POINTS {
            let cardinal = |x: f64| {
                let others = (0..N_POINTS).filter(|m| *m != j);
                others
                    .map(|m| (x - rule.nodes[m]) / (rule.nodes[j] - rule.nodes[m]))
                    .product::<f64>()
            };
            weights[i][j] = crate::quadrature::panel(0.0, rule.nodes[i], N_POINTS, cardinal);
        }
    }
    weights
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::references::all_published;

    #[test]
    fn cells_agree_with_the_published_rows() {
        for row in all_published("CELL-", 6) {
            let cell = Cell {
                rod: row.input("a"),
                permeability: row.input("mu"),
                radii: [row.input("r1"), row.input("r2")],
                height: row.input("h"),
                period: row.input("H"),
                tube: row.input("Rw"),
            };
            // The rows move by up to 9e-9 between 300 and 600 terms.
            row.agrees("", inductance(&cell), 2e-8);
        }
    }

    #[test]
    fn a_wide_cell_without_iron_tends_to_the_free_coil() {
        let cell = Cell {
            rod: 0.5,
            permeability: 1.0,
            radii: [1.0, 1.5],
            height: 1.0,
            period: 60.0,
            tube: 60.0,
        };
        let coil = crate::coils::Coil { radii: [1.0, 1.5], heights: [-0.5, 0.5] };
        // Neighbours and tube are dipoles 60 away: about (1.25/60)³ = 1e-5 of the coil each.
        assert!((inductance(&cell) / crate::coils::self_inductance(&coil) - 1.0).abs() < 1e-4);
    }
}

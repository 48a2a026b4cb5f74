//! Fields on the axis of loops, sheets and coils.

use crate::coils::Coil;
use gapwright::units::Meter;

/// B/(µ0 I) [1/m] on the axis of a loop of radius `a`, `z` above its plane.
pub fn of_loop(a: Meter, z: Meter) -> f64 {
    0.5 * a * a / (a * a + z * z).powf(1.5)
}

/// B/(µ0 N I) [1/m] on the axis of a current sheet of radius `a` and length `l`, `z` above its middle.
pub fn of_sheet(a: Meter, l: Meter, z: Meter) -> f64 {
    let end = |u: f64| u / a.hypot(u);
    (end(z + 0.5 * l) - end(z - 0.5 * l)) / (2.0 * l)
}

/// B/(µ0 N I) [1/m] at height `z` on the axis of a rectangular-section coil.
///
/// [g(z − bottom) − g(z − top)]/(2 w h), g(u) = u ln((r2 + √(r2² + u²))/(r1 + √(r1² + u²))).
/// Source: D. B. Montgomery, Solenoid Magnet Design (1969), from memory; checked against the loop formula.
pub fn of_coil(coil: &Coil, z: Meter) -> f64 {
    let [r1, r2] = coil.radii;
    let g =
        |u: f64| if u == 0.0 { 0.0 } else { u * ((r2 + r2.hypot(u)) / (r1 + r1.hypot(u))).ln() };
    (g(z - coil.heights[0]) - g(z - coil.heights[1])) / (2.0 * coil.area())
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::quadrature::panel;
    use crate::references::{MU0_OF_CHECKS, all_published, published};

    #[test]
    fn thick_coils_agree_with_the_published_rows() {
        for row in all_published("AXIS-THICK", 6) {
            let half = 0.5 * row.input("h");
            let coil = Coil { radii: [row.input("r1"), row.input("r2")], heights: [-half, half] };
            row.agrees("", MU0_OF_CHECKS * of_coil(&coil, row.input("z")), 1e-12);
        }
    }

    #[test]
    fn a_coil_is_the_sum_of_its_loops() {
        let coil = Coil { radii: [0.7, 1.3], heights: [-0.2, 0.6] };
        let of_loops =
            panel(0.7, 1.3, 20, |a| panel(-0.2, 0.6, 20, |z| of_loop(a, 0.4 - z))) / coil.area();
        assert!((of_coil(&coil, 0.4) / of_loops - 1.0).abs() < 1e-13);
    }

    #[test]
    fn loops_sheets_and_helmholtz_pairs_agree() {
        let value = |id: &str| published(id)[0].value("");
        let near =
            |ours: f64, id: &str| assert!((ours / value(id) - 1.0).abs() < 1e-11, "{id}: {ours}");
        near(MU0_OF_CHECKS * of_loop(1.0, 0.0), "AXIS-LOOP-CENTRE");
        near(MU0_OF_CHECKS * of_loop(1.0, 1.0), "AXIS-LOOP z=a");
        near(MU0_OF_CHECKS * of_sheet(1.0, 2.0, 0.0), "AXIS-SOLENOID a=1");
        near(MU0_OF_CHECKS * of_sheet(1.0, 2.0, 1.0), "AXIS-SOLENOID z=1");
        let pair = |z: f64| of_loop(1.0, z - 0.5) + of_loop(1.0, z + 0.5);
        near(pair(0.0), "AXIS-HELMHOLTZ centre");
        near(pair(0.1) / pair(0.0), "AXIS-HELMHOLTZ B(0.1a)");
        near(pair(0.5) / pair(0.0), "AXIS-HELMHOLTZ B(0.5a)");
    }
}

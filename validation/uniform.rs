//! Coils that make a uniform field: six loops at the zeros of P₇' on a sphere.
//!
//! Constant turns per height on a sphere make the field uniform inside. Loops at the zeros of P'₇ with the weights of
//! Lobatto's rule stand for that up to the pole of order 12 (two loops: Helmholtz's pair). Ours are square coils, so
//! their currents are solved for again, such that the field on the axis is the same at three heights.
//! Source: J. R. Barker, J. Sci. Instrum. 26 (1949) 273, from memory; the uniformity is measured here in any case.

use crate::axis;
use crate::builders::bare;
use crate::coils::Coil;
use gapwright::model::{Model, Section, Winding};
use gapwright::units::{MU0, Meter};
use nalgebra::{Matrix3, Vector3};

/// Zeros of P₇' on the upper half: heights over the sphere's radius.
const HEIGHTS: [f64; 3] = [0.209_299_217_902_479, 0.591_700_181_433_142, 0.871_740_148_509_607];
/// Side of a coil's section over the sphere's radius.
const SIDE: f64 = 0.2;
/// Heights over the sphere's radius where the field is made the same.
const MATCHED: [f64; 3] = [0.0, 0.28, 0.48];

/// Three pairs of coils and their currents.
#[derive(Debug, Clone)]
pub struct Uniform {
    upper: [Coil; 3],
    currents: [f64; 3],
}

/// The coils on a sphere of this radius that make H = 1 A/m.
pub fn coils(radius: Meter) -> Uniform {
    let half = 0.5 * SIDE * radius;
    let upper = HEIGHTS.map(|x| {
        let (r, z) = (radius * (1.0 - x * x).sqrt(), radius * x);
        Coil { radii: [r - half, r + half], heights: [z - half, z + half] }
    });
    let matrix = Matrix3::from_fn(|i, j| pair(&upper[j], radius * MATCHED[i]));
    let currents = matrix.lu().solve(&Vector3::repeat(1.0)).map_or([f64::NAN; 3], Into::into);
    Uniform { upper, currents }
}

/// H_z [1/m] of a coil and its mirror image at height z on the axis, 1 A each.
fn pair(upper: &Coil, z: Meter) -> f64 {
    axis::of_coil(upper, z) + axis::of_coil(upper, -z)
}

impl Uniform {
    /// H_z [A/m] on the axis.
    pub fn field(&self, z: Meter) -> f64 {
        self.upper.iter().zip(self.currents).map(|(coil, i)| i * pair(coil, z)).sum()
    }

    /// B_z [T] in the middle.
    pub fn flux_density(&self) -> f64 {
        MU0 * self.field(0.0)
    }

    /// The coils alone, in air; parts are added by the caller.
    pub fn model(&self, permeability: f64) -> Model {
        let windings = self.upper.iter().zip(self.currents).enumerate();
        let windings = windings.map(|(i, (coil, current))| {
            let mirrored = [-coil.heights[1], -coil.heights[0]];
            let sections = [coil.heights, mirrored].map(|heights| Section {
                turns: 1.0,
                radii: coil.radii,
                heights,
            });
            let name = format!("pair {i}");
            Winding { name, sections: sections.into(), current, ripple: 0.0 }
        });
        Model { windings: windings.collect(), ..bare(permeability) }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_field_is_uniform_in_half_the_sphere() {
        let coils = coils(2.0);
        for i in 0..=20 {
            let off = coils.field(0.05 * f64::from(i)) - 1.0;
            // What the rows of the cylinders rely on.
            assert!(off.abs() < 1.5e-4, "z = {}: {off:e}", 0.05 * f64::from(i));
        }
    }
}

//! A core's dimensions → effective parameters by the rule of IEC 60205, segment by segment.

use crate::model::Dimensions;
use crate::units::{CubicMeter, Meter, SquareMeter};
use std::f64::consts::PI;

/// The closed mean path of a pot core in segments; each pair of plates and corners is stated for one plate.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Path {
    /// Length of iron in post and wall between the plates, joint closed and nothing ground out [m].
    pub leg_length: Meter,
    pub post_area: SquareMeter,
    pub wall_area: SquareMeter,
    pub plate: Plate,
}

/// One plate with its two corners: Σl/A and Σl/A².
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Plate {
    /// ln(r3/r2)/(2πt) [1/m].
    pub disc: Sums,
    /// Corner of plate and wall.
    pub wall_corner: Sums,
    /// Corner of plate and post.
    pub post_corner: Sums,
    /// Smallest section that the flux passes in plate and corners [m²].
    pub area_min: SquareMeter,
}

/// A segment's contributions to the core constants.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Sums {
    /// ∫dl/A [1/m]
    pub c1: f64,
    /// ∫dl/A² [1/m³]
    pub c2: f64,
}

/// Effective parameters of IEC 60205.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Effective {
    /// Core constant C1 = Σl/A [1/m].
    pub c1: f64,
    /// Core constant C2 = Σl/A² [1/m³].
    pub c2: f64,
    /// l_e = C1²/C2 [m].
    pub length: Meter,
    /// A_e = C1/C2 [m²].
    pub area: SquareMeter,
    /// V_e = C1³/C2² [m³].
    pub volume: CubicMeter,
    /// Smallest section of the path [m²].
    pub area_min: SquareMeter,
}

/// Effective parameters of the closed core: gaps, joint and spacers do not count.
///
/// `None` for a drum or a rod: their path closes through air, and the standard has no effective parameters for it.
/// Slots of the wall are not known here; on the standard pot series they raise C1 by some 8 % (from memory).
/// Source: IEC 60205:2016 (corner rule confirmed; layout of the pot formulas from memory).
pub fn effective(dimensions: &Dimensions) -> Option<Effective> {
    let path = path(dimensions)?;
    let plate = path.plate;
    let plate_c1 = plate.disc.c1 + plate.wall_corner.c1 + plate.post_corner.c1;
    let plate_c2 = plate.disc.c2 + plate.wall_corner.c2 + plate.post_corner.c2;
    let [post, wall] = [path.post_area, path.wall_area];
    let c1 = path.leg_length / post + path.leg_length / wall + 2.0 * plate_c1;
    let c2 = path.leg_length / (post * post) + path.leg_length / (wall * wall) + 2.0 * plate_c2;
    Some(Effective {
        c1,
        c2,
        length: c1 * c1 / c2,
        area: c1 / c2,
        volume: c1 * c1 * c1 / (c2 * c2),
        area_min: post.min(wall).min(plate.area_min),
    })
}

/// The mean path of a pot core; `None` where there is no wall.
///
/// Radii r1 hole, r2 post, r3 and r4 wall, t the plate's thickness:
/// - plate, flux spreading: C1 = ln(r3/r2)/(2πt), C2 = (r3 − r2)/(4π² r2 r3 t²)
/// - corner at the wall: quarter circle of length (π/8)(2 s1 + t), s1 = √((r3² + r4²)/2) − r3 from the window to the
///   circle that halves the wall's area; section = mean of the wall's and of 2π r3 t
/// - corner at the post: likewise with s2 = r2 − √((r1² + r2²)/2), the post's section and 2π r2 t
///
/// Source: IEC 60205:2016, as [`effective`].
pub fn path(dimensions: &Dimensions) -> Option<Path> {
    let [r3, r4] = dimensions.wall_radii?;
    let (r1, r2, t) = (dimensions.hole_radius, dimensions.post_radius, dimensions.plate_thickness);
    let post_area = PI * (r2 * r2 - r1 * r1);
    let wall_area = PI * (r4 * r4 - r3 * r3);

    let to_wall_middle = (0.5 * (r3 * r3 + r4 * r4)).sqrt() - r3;
    let to_post_middle = r2 - (0.5 * (r1 * r1 + r2 * r2)).sqrt();
    let plate = Plate {
        disc: Sums {
            c1: (r3 / r2).ln() / (2.0 * PI * t),
            c2: (r3 - r2) / (4.0 * PI * PI * r2 * r3 * t * t),
        },
        wall_corner: corner(to_wall_middle, t, wall_area, 2.0 * PI * r3 * t),
        post_corner: corner(to_post_middle, t, post_area, 2.0 * PI * r2 * t),
        area_min: 2.0 * PI * r2 * t,
    };
    let leg_length = 2.0 * dimensions.window_top - dimensions.spacers;
    Some(Path { leg_length, post_area, wall_area, plate })
}

/// Quarter circle that joins the middles of two sections, over the mean of both.
fn corner(
    to_leg_middle: Meter,
    thickness: Meter,
    leg_area: SquareMeter,
    plate_area: SquareMeter,
) -> Sums {
    let length = PI / 8.0 * (2.0 * to_leg_middle + thickness);
    let area = 0.5 * (leg_area + plate_area);
    Sums { c1: length / area, c2: length / (area * area) }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::model::{Across, Core, Form, Gap, MaterialId, PotWall};

    fn core(form: Form) -> Core {
        Core { material: MaterialId(0), form, corner_radius: 0.0, joint: 0.0 }
    }

    /// Solid post r 5, wall r 10..11.5, window 14 high, plates 3, in millimetres.
    fn pot() -> Core {
        core(Form::Pot {
            wall: PotWall::OuterDiameter(23e-3),
            wall_inner_diameter: 20e-3,
            post_diameter: 10e-3,
            hole_diameter: 0.0,
            height: 20e-3,
            window_height: 14e-3,
        })
    }

    #[track_caller]
    fn close(ours: f64, reference: f64) {
        assert!((ours / reference - 1.0).abs() < 1e-9, "{ours} against {reference}"); // rounding of the reference's digits
    }

    #[test]
    fn slotless_pot_core_meets_the_standards_arithmetic() {
        // IEC 60205 rule evaluated independently, in millimetres.
        let e = effective(&pot().dimensions(&[])).unwrap();
        close(e.c1 * 1e-3, 0.46855266281751184);
        close(e.c2 * 1e-9, 0.004990499814820588);
        close(e.length * 1e3, 43.99190581700755);
        close(e.area * 1e6, 93.88892499825823);
        close(e.volume * 1e9, 4130.352745783462);
        close(e.length * e.area, e.volume);
    }

    #[test]
    fn smallest_section_is_the_narrowest_of_post_wall_and_plate() {
        let e = effective(&pot().dimensions(&[])).unwrap();
        close(e.area_min, PI * 25e-6); // post 78.5, plate at the post 94.2, wall 101.3 mm²
    }

    #[test]
    fn spacers_and_gaps_leave_the_closed_core_as_it_was() {
        let gap = |across, length| Gap { name: "g".into(), across, length, center: 0.0 };
        let gaps = [gap(Across::Spacer, 0.4e-3), gap(Across::Post, 0.2e-3)];
        let [open, closed] =
            [&gaps[..], &[]].map(|gaps| effective(&pot().dimensions(gaps)).unwrap());
        close(open.c1, closed.c1);
        close(open.volume, closed.volume);
    }

    #[test]
    fn drum_and_rod_have_no_closed_path() {
        let rod = Form::Rod { diameter: 10e-3, hole_diameter: 0.0, height: 100e-3 };
        let drum = Form::Drum {
            flange_diameter: 12e-3,
            post_diameter: 6e-3,
            hole_diameter: 0.0,
            height: 10e-3,
            window_height: 7e-3,
        };
        for form in [rod, drum] {
            assert_eq!(effective(&core(form).dimensions(&[])), None);
        }
    }
}

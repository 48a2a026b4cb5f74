//! A core form's dimensions as radii and heights, spacers included: the one place where diameters are halved.

use super::{Across, Core, Form, Gap, PotWall};
use crate::units::{Meter, SquareMeter};
use std::f64::consts::PI;

/// Radii and heights of a core form about z = 0 [m].
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Dimensions {
    /// 0 for a solid post.
    pub hole_radius: Meter,
    pub post_radius: Meter,
    /// Inner and outer radius of the wall; `None` for a drum or a rod.
    pub wall_radii: Option<[Meter; 2]>,
    /// Outer radius of the plates; equals `post_radius` for a rod.
    pub plate_radius: Meter,
    /// Half of the window's height, spacers included; for a rod half of its height.
    pub window_top: Meter,
    /// Half of the whole height, spacers included.
    pub core_top: Meter,
    /// Thickness of one plate; 0 for a rod.
    pub plate_thickness: Meter,
    /// Sum of the spacer lengths.
    pub spacers: Meter,
}

impl Core {
    /// Dimensions of the assembled core: every spacer in `gaps` lifts the halves apart by its length.
    pub fn dimensions(&self, gaps: &[Gap]) -> Dimensions {
        let spacers: Meter =
            gaps.iter().filter(|g| g.across == Across::Spacer).map(|g| g.length).sum();
        let (hole, post, plate, wall_radii, window, height) = match self.form {
            Form::Pot {
                wall,
                wall_inner_diameter,
                post_diameter,
                hole_diameter,
                height,
                window_height,
            } => {
                let inner = 0.5 * wall_inner_diameter;
                let outer = match wall {
                    PotWall::OuterDiameter(diameter) => 0.5 * diameter,
                    PotWall::OuterLegsArea(area) => round_wall_outer_radius(inner, area),
                };
                (hole_diameter, post_diameter, outer, Some([inner, outer]), window_height, height)
            }
            Form::Drum { flange_diameter, post_diameter, hole_diameter, height, window_height } => {
                (hole_diameter, post_diameter, 0.5 * flange_diameter, None, window_height, height)
            }
            Form::Rod { diameter, hole_diameter, height } => {
                (hole_diameter, diameter, 0.5 * diameter, None, height, height)
            }
        };
        Dimensions {
            hole_radius: 0.5 * hole,
            post_radius: 0.5 * post,
            wall_radii,
            plate_radius: plate,
            window_top: 0.5 * (window + spacers),
            core_top: 0.5 * (height + spacers),
            plate_thickness: 0.5 * (height - window),
            spacers,
        }
    }
}

/// Outer radius of the round wall whose section equals that of the real outer legs.
fn round_wall_outer_radius(inner: Meter, area: SquareMeter) -> Meter {
    (inner * inner + area / PI).sqrt()
}

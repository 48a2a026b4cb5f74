//! Core forms → shapes: post, wall, plates, gaps, joint layers, and the window's border.
//!
//! Plates own the corners of the section (from the hole to the outer radius). A rounded window corner is shared along its
//! bisector: the half along the leg belongs to the leg, the half along the plate to the plate; so no region ends in the
//! sliver between an arc and its tangent.

use super::drawing::Drawing;
use super::fault::{fault, mm};
use super::fillet::{CHORDS_PER_QUARTER, window_fillet};
use super::legs::{Cut, CutLeg, Filling, cut_legs};
use super::{Leg, RegionKind};
use crate::model::{Core, Dimensions, Fault, Form, Model, Point, PotWall, Subject};

/// Draws the core of a model, if it has one.
///
/// # Errors
/// Dimensions that are not finite, not in order or leave nothing; fillets and joints that do not fit; gaps that cannot be.
pub(super) fn draw_core(model: &Model, drawing: &mut Drawing) -> Result<(), Fault> {
    let Some(core) = &model.core else {
        return match model.gaps.first() {
            None => Ok(()),
            Some(gap) => {
                let message = format!("gap `{}` needs a core: the sheet has no [core]", gap.name);
                Err(fault(
                    Subject::Gap(0),
                    None,
                    message,
                    "add a [core], or draw the gap between two [[parts]]",
                ))
            }
        };
    };
    let d = core.dimensions(&model.gaps);
    check_form(core)?;
    check_fillet_and_joint(core, &d)?;
    let legs = cut_legs(model, core, &d)?;
    if !matches!(core.form, Form::Rod { .. }) {
        let region = drawing.air("window".to_string(), RegionKind::Window);
        drawing.window = Some((region, window_border(&d, core.corner_radius)));
    }
    for leg in &legs {
        draw_leg_body(core, leg, &d, drawing);
    }
    if !matches!(core.form, Form::Rod { .. }) {
        draw_plates(core, &d, drawing);
    }
    draw_gaps(model, &legs, drawing);
    draw_joints(&legs, drawing);
    Ok(())
}

/// Named lengths of a form that must be finite, not negative, and ascending where paired.
fn check_form(core: &Core) -> Result<(), Fault> {
    match core.form {
        Form::Pot {
            wall,
            wall_inner_diameter,
            post_diameter,
            hole_diameter,
            height,
            window_height,
        } => {
            positive("post_diameter", post_diameter)?;
            positive("wall_inner_diameter", wall_inner_diameter)?;
            ascending("hole_diameter", hole_diameter, "post_diameter", post_diameter)?;
            ascending("post_diameter", post_diameter, "wall_inner_diameter", wall_inner_diameter)?;
            match wall {
                PotWall::OuterDiameter(outer) => {
                    positive("outer_diameter", outer)?;
                    ascending("wall_inner_diameter", wall_inner_diameter, "outer_diameter", outer)?;
                }
                PotWall::OuterLegsArea(area) => {
                    if !(area > 0.0 && area.is_finite()) {
                        let message = format!(
                            "outer_legs_area is {} mm²; it must be greater than 0",
                            area * 1e6
                        );
                        let help = "write the summed section of the outer legs";
                        return Err(fault(Subject::Core, Some("outer_legs_area"), message, help));
                    }
                }
            }
            heights(height, window_height)
        }
        Form::Drum { flange_diameter, post_diameter, hole_diameter, height, window_height } => {
            positive("post_diameter", post_diameter)?;
            positive("flange_diameter", flange_diameter)?;
            ascending("hole_diameter", hole_diameter, "post_diameter", post_diameter)?;
            ascending("post_diameter", post_diameter, "flange_diameter", flange_diameter)?;
            heights(height, window_height)
        }
        Form::Rod { diameter, hole_diameter, height } => {
            positive("diameter", diameter)?;
            positive("height", height)?;
            ascending("hole_diameter", hole_diameter, "diameter", diameter)
        }
    }
}

fn heights(height: f64, window_height: f64) -> Result<(), Fault> {
    positive("height", height)?;
    positive("window_height", window_height)?;
    ascending("window_height", window_height, "height", height)
}

fn positive(key: &'static str, length: f64) -> Result<(), Fault> {
    if length > 0.0 && length.is_finite() {
        return Ok(());
    }
    let message = format!("{key} of the core is {} mm; it must be greater than 0", mm(length));
    Err(fault(Subject::Core, Some(key), message, "write the dimension of the data sheet"))
}

fn ascending(key: &'static str, small: f64, next: &'static str, large: f64) -> Result<(), Fault> {
    if small < 0.0 || !small.is_finite() {
        let message = format!("{key} of the core is {} mm; it must be 0 or greater", mm(small));
        return Err(fault(
            Subject::Core,
            Some(key),
            message,
            "write the dimension of the data sheet",
        ));
    }
    if small < large * (1.0 - 1e-9) {
        return Ok(());
    }
    let message = format!(
        "{key} is {} mm and {next} is {} mm: the first must be smaller",
        mm(small),
        mm(large)
    );
    Err(fault(Subject::Core, Some(key), message, format!("write {key} < {next}, or exchange them")))
}

/// Whether the window's fillets fit into it and the form has halves for a joint.
fn check_fillet_and_joint(core: &Core, d: &Dimensions) -> Result<(), Fault> {
    for (key, length) in [("corner_radius", core.corner_radius), ("joint", core.joint)] {
        if length < 0.0 || !length.is_finite() {
            let message =
                format!("{key} of the core is {} mm; it must be 0 or greater", mm(length));
            return Err(fault(
                Subject::Core,
                Some(key),
                message,
                format!("delete {key} or write its size"),
            ));
        }
        if length > 0.0 && matches!(core.form, Form::Rod { .. }) {
            let what = if key == "joint" { "mating faces" } else { "window" };
            let message = format!("{key} of {} mm cannot be: a rod has no {what}", mm(length));
            return Err(fault(Subject::Core, Some(key), message, format!("delete {key}")));
        }
    }
    // Between post and wall two fillets share the width; a flange end has none. Both halves keep some straight leg.
    let width = match d.wall_radii {
        Some(wall) => 0.5 * (wall[0] - d.post_radius),
        None => d.plate_radius - d.post_radius,
    };
    let most = width.min(d.window_top - 0.5 * d.spacers);
    if core.corner_radius > 0.0 && core.corner_radius >= most {
        let message = format!(
            "corner_radius is {} mm, but the window has room for less than {} mm",
            mm(core.corner_radius),
            mm(most)
        );
        return Err(fault(
            Subject::Core,
            Some("corner_radius"),
            message,
            "write a smaller corner_radius",
        ));
    }
    Ok(())
}

/// Corners of the window with their fillets: [post or wall][bottom or top], each from the leg to the plate.
fn window_corner(r: f64, toward_plate: f64, top: bool, d: &Dimensions, radius: f64) -> Vec<Point> {
    let (z, leg) = if top { (d.window_top, -1.0) } else { (-d.window_top, 1.0) };
    window_fillet(Point { r, z }, leg, toward_plate, radius)
}

/// Border of the window, counter-clockwise; between a drum's flanges it ends at their radius.
fn window_border(d: &Dimensions, radius: f64) -> Vec<Point> {
    let mut border = window_corner(d.post_radius, 1.0, false, d, radius);
    match d.wall_radii {
        Some([wall, _]) => {
            border.extend(window_corner(wall, -1.0, false, d, radius).into_iter().rev());
            border.extend(window_corner(wall, -1.0, true, d, radius));
        }
        None => {
            border.push(Point { r: d.plate_radius, z: -d.window_top });
            border.push(Point { r: d.plate_radius, z: d.window_top });
        }
    }
    border.extend(window_corner(d.post_radius, 1.0, true, d, radius).into_iter().rev());
    border
}

/// The leg's core between its cuts: one region, one polygon a piece.
fn draw_leg_body(core: &Core, leg: &CutLeg, d: &Dimensions, drawing: &mut Drawing) {
    let name = leg_name(leg.leg);
    let region = drawing.solid(name.to_string(), RegionKind::Leg(leg.leg), core.material);
    let has_window = !matches!(core.form, Form::Rod { .. });
    let mut low = -leg.half;
    for high in leg.cuts.iter().map(|cut| cut.low).chain([leg.half]) {
        if high - low > 1e-9 * leg.half {
            let radius = if has_window { core.corner_radius } else { 0.0 };
            let corners = leg_piece(leg, low, high, d, radius);
            drawing.shape(region, Subject::Core, format!("the {name}"), corners);
        }
        low = leg.cuts.iter().find(|cut| cut.low == high).map_or(high, |cut| cut.high);
    }
}

/// One piece of a leg, counter-clockwise, with its halves of the window's fillets where it meets a plate.
fn leg_piece(leg: &CutLeg, low: f64, high: f64, d: &Dimensions, radius: f64) -> Vec<Point> {
    let [inner, outer] = leg.radii;
    let (side, toward_plate) = if leg.leg == Leg::Wall { (inner, -1.0) } else { (outer, 1.0) };
    let end = |z: f64, top: bool| {
        let mut points = vec![Point { r: side, z }];
        if radius > 0.0 && z.abs() == leg.half {
            let fillet = window_corner(side, toward_plate, top, d, radius);
            points.extend(fillet[..=CHORDS_PER_QUARTER / 2].iter().rev());
        }
        points
    };
    let (bottom, mut top) = (end(low, false), end(high, true));
    top.reverse();
    let mut corners: Vec<Point> = bottom.into_iter().chain(top).collect();
    if leg.leg == Leg::Wall {
        corners.reverse();
        corners.extend([Point { r: outer, z: low }, Point { r: outer, z: high }]);
    } else {
        corners.extend([Point { r: inner, z: high }, Point { r: inner, z: low }]);
    }
    corners
}

/// Both plates, from the hole to the outer radius.
fn draw_plates(core: &Core, d: &Dimensions, drawing: &mut Drawing) {
    for (leg, top) in [(Leg::UpperPlate, true), (Leg::LowerPlate, false)] {
        let name = leg_name(leg);
        let region = drawing.solid(name.to_string(), RegionKind::Leg(leg), core.material);
        let corners = plate(d, core.corner_radius, top);
        drawing.shape(region, Subject::Core, format!("the {name}"), corners);
    }
}

fn plate(d: &Dimensions, radius: f64, top: bool) -> Vec<Point> {
    let sign = if top { 1.0 } else { -1.0 };
    let (face, back) = (sign * d.window_top, sign * d.core_top);
    let corner = |r: f64, toward_plate: f64| {
        let mut points = vec![Point { r, z: face }];
        if radius > 0.0 {
            points
                .extend(&window_corner(r, toward_plate, top, d, radius)[CHORDS_PER_QUARTER / 2..]);
        }
        points
    };
    let mut corners = vec![Point { r: d.hole_radius, z: face }];
    corners.extend(corner(d.post_radius, 1.0));
    if let Some([wall, _]) = d.wall_radii {
        corners.extend(corner(wall, -1.0).into_iter().rev());
    }
    for (r, z) in [(d.plate_radius, face), (d.plate_radius, back), (d.hole_radius, back)] {
        corners.push(Point { r, z });
    }
    if !top {
        corners.reverse();
    }
    corners
}

/// Gaps in their order in the sheet; a spacer makes one region a leg, named after both.
fn draw_gaps(model: &Model, legs: &[CutLeg], drawing: &mut Drawing) {
    for (gap, it) in model.gaps.iter().enumerate() {
        let cuts: Vec<(&CutLeg, &Cut)> = legs
            .iter()
            .flat_map(|leg| leg.cuts.iter().map(move |cut| (leg, cut)))
            .filter(|(_, cut)| cut.filling == Filling::Gap(gap))
            .collect();
        for (leg, cut) in &cuts {
            let name = match cuts.len() {
                1 => it.name.clone(),
                _ => format!("{} {}", it.name, leg_name(leg.leg)),
            };
            let region = drawing.air(name, RegionKind::Gap { gap, leg: leg.leg });
            drawing.shape(region, Subject::Gap(gap), format!("gap `{}`", it.name), layer(leg, cut));
        }
    }
}

fn draw_joints(legs: &[CutLeg], drawing: &mut Drawing) {
    for leg in legs {
        for cut in &leg.cuts {
            if let Filling::Joint(permeability) = cut.filling {
                let name = format!("{} joint", leg_name(leg.leg));
                let region = drawing.layer(name.clone(), RegionKind::Joint(leg.leg), permeability);
                drawing.shape(region, Subject::Core, format!("the {name}"), layer(leg, cut));
            }
        }
    }
}

fn layer(leg: &CutLeg, cut: &Cut) -> Vec<Point> {
    super::solids::rectangle(leg.radii, [cut.low, cut.high])
}

/// What the ledger calls a leg or plate.
fn leg_name(leg: Leg) -> &'static str {
    match leg {
        Leg::Post => "post",
        Leg::Wall => "wall",
        Leg::UpperPlate => "upper plate",
        Leg::LowerPlate => "lower plate",
    }
}

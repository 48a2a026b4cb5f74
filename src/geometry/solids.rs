//! Winding sections and polygonal parts → shapes, each checked by itself.

use super::RegionKind;
use super::drawing::Drawing;
use super::fault::{fault, label, mm, place};
use super::fillet::rounded;
use super::polygon::{area, crossing, distance};
use crate::model::{Fault, Model, Part, Point, Section, Subject};

/// Corners of a rectangle, counter-clockwise.
pub(super) fn rectangle(radii: [f64; 2], heights: [f64; 2]) -> Vec<Point> {
    let ([r0, r1], [z0, z1]) = (radii, heights);
    [(r0, z0), (r1, z0), (r1, z1), (r0, z1)].map(|(r, z)| Point { r, z }).to_vec()
}

/// Draws every winding section; its current density is turns·current/area.
///
/// # Errors
/// Radii or heights that are not finite, inverted or equal; a negative radius.
pub(super) fn draw_windings(model: &Model, drawing: &mut Drawing) -> Result<(), Fault> {
    for (winding, it) in model.windings.iter().enumerate() {
        for (section, s) in it.sections.iter().enumerate() {
            let subject = Subject::Winding { winding, section };
            check_section(model, subject, s)?;
            let name = match it.sections.len() {
                1 => it.name.clone(),
                _ => format!("{} {}", it.name, section + 1),
            };
            let density =
                s.turns * it.current / ((s.radii[1] - s.radii[0]) * (s.heights[1] - s.heights[0]));
            let region = drawing.conductor(name, RegionKind::Winding { winding, section }, density);
            drawing.shape(region, subject, label(model, subject), rectangle(s.radii, s.heights));
        }
    }
    Ok(())
}

fn check_section(model: &Model, subject: Subject, s: &Section) -> Result<(), Fault> {
    let name = label(model, subject);
    for (key, pair) in [("radii", s.radii), ("heights", s.heights)] {
        let help = if key == "radii" {
            "write radii = [inner, outer]"
        } else {
            "write heights = [bottom, top]"
        };
        if !(pair[0].is_finite() && pair[1].is_finite()) {
            let message = format!("{key} of {name} are {} and {}, not lengths", pair[0], pair[1]);
            return Err(fault(subject, Some(key), message, help));
        }
        // Thinner than a billionth of its place is thinner than the outline can tell apart.
        let least = 1e-8 * pair[0].abs().max(pair[1].abs());
        if pair[1] - pair[0] <= least {
            let what = if pair[0] > pair[1] { "are inverted" } else { "leave no room" };
            let message =
                format!("{key} of {name} {what}: {} mm to {} mm", mm(pair[0]), mm(pair[1]));
            return Err(fault(subject, Some(key), message, help));
        }
    }
    if s.radii[0] < 0.0 {
        let message = format!(
            "{name} starts at r = {} mm; radii are counted from the axis and never negative",
            mm(s.radii[0])
        );
        return Err(fault(
            subject,
            Some("radii"),
            message,
            "write the half section with r ≥ 0 only",
        ));
    }
    Ok(())
}

/// Draws every part, fillets as chords.
///
/// # Errors
/// Fewer than three corners, corners that are not finite, repeated or left of the axis; a fillet larger than its edges
/// allow; an outline that crosses itself or has no area.
pub(super) fn draw_parts(model: &Model, drawing: &mut Drawing) -> Result<(), Fault> {
    for (index, part) in model.parts.iter().enumerate() {
        let subject = Subject::Part(index);
        check_corners(subject, part)?;
        let mut corners = rounded(&part.outline).map_err(|problem| {
            let message = format!("in part `{}` {problem}", part.name);
            fault(subject, Some("outline"), message, "write a smaller fillet radius there")
        })?;
        check_polygon(subject, &part.name, &corners)?;
        if area(&corners) < 0.0 {
            corners.reverse();
        }
        let region = drawing.solid(part.name.clone(), RegionKind::Part(index), part.material);
        drawing.shape(region, subject, format!("part `{}`", part.name), corners);
    }
    Ok(())
}

fn check_corners(subject: Subject, part: &Part) -> Result<(), Fault> {
    let refuse = |message: String, help: &str| Err(fault(subject, Some("outline"), message, help));
    let n = part.outline.len();
    if n < 3 {
        let message =
            format!("part `{}` has {n} corners; an outline needs three or more", part.name);
        return refuse(message, "list its corners in order, the first is not repeated at the end");
    }
    for (i, corner) in part.outline.iter().enumerate() {
        let (at, radius) = (corner.at, corner.fillet_radius);
        if !(at.r.is_finite() && at.z.is_finite() && radius.is_finite()) {
            let message = format!(
                "corner {} of part `{}` is not a point: [{}, {}, {radius}]",
                i + 1,
                part.name,
                at.r,
                at.z
            );
            return refuse(message, "write [r, z] or [r, z, fillet_radius] as lengths");
        }
        if at.r < 0.0 {
            let message = format!(
                "corner {} of part `{}` has r = {} mm, left of the axis",
                i + 1,
                part.name,
                mm(at.r)
            );
            return refuse(message, "write the half section with r ≥ 0 only");
        }
        if radius < 0.0 {
            let message = format!(
                "the fillet at corner {} of part `{}` is {} mm, less than 0",
                i + 1,
                part.name,
                mm(radius)
            );
            return refuse(message, "write a fillet radius greater than 0 or leave it out");
        }
        let next = part.outline[(i + 1) % n].at;
        let scale = at.r.abs().max(at.z.abs()).max(next.r.abs()).max(next.z.abs());
        if distance(at, next) <= 1e-8 * scale {
            let message = format!(
                "corners {} and {} of part `{}` are the same point, {}",
                i + 1,
                (i + 1) % n + 1,
                part.name,
                place(at)
            );
            return refuse(message, "delete one of them");
        }
    }
    Ok(())
}

/// Whether a polygon neither crosses itself nor is flat.
fn check_polygon(subject: Subject, name: &str, corners: &[Point]) -> Result<(), Fault> {
    let n = corners.len();
    for i in 0..n {
        for j in i + 2..n {
            let (a, b, c, d) = (corners[i], corners[(i + 1) % n], corners[j], corners[(j + 1) % n]);
            if let Some(at) = crossing(a, b, c, d) {
                let message =
                    format!("the outline of part `{name}` crosses itself near {}", place(at));
                return Err(fault(
                    subject,
                    Some("outline"),
                    message,
                    "list the corners in order around the part",
                ));
            }
        }
    }
    let perimeter: f64 = (0..n).map(|i| distance(corners[i], corners[(i + 1) % n])).sum();
    if area(corners).abs() <= 1e-9 * perimeter * perimeter {
        let message = format!("part `{name}` has no area: its corners lie on a line");
        return Err(fault(
            subject,
            Some("outline"),
            message,
            "list three corners that are not on one line",
        ));
    }
    Ok(())
}

//! Forms, gaps, windings and parts → [`Outline`]: tagged, crossing-free segments inside the cap polygon.

mod cap;
mod corner;
mod drawing;
mod fault;
#[cfg(test)]
mod fault_tests;
mod fillet;
mod form;
mod legs;
mod plane;
mod polygon;
#[cfg(test)]
pub(crate) mod samples;
mod solids;
#[cfg(test)]
mod tests;

pub use crate::model::Point;
pub use polygon::{area, contains};

use crate::model::{Fault, MaterialId, Model, Subject};
use crate::units::{AmperePerSquareMeter, Meter};

/// Index into [`Outline::regions`].
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct RegionId(pub u16);

/// A leg or plate of a core form.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Leg {
    Post,
    Wall,
    UpperPlate,
    LowerPlate,
}

/// What a region is.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum RegionKind {
    /// Everything not covered by a shape, infinity included.
    Outside,
    /// Air inside the core's window.
    Window,
    /// Gap of that index, in that leg (a spacer makes one region a leg).
    Gap { gap: usize, leg: Leg },
    /// Layer of the mating faces, of reluctance equal to the residual gap's.
    Joint(Leg),
    /// Leg or plate of the core form.
    Leg(Leg),
    /// Polygonal part of that index.
    Part(usize),
    /// Section of a winding.
    Winding { winding: usize, section: usize },
}

/// A tagged region of the half plane.
#[derive(Debug, Clone, PartialEq)]
pub struct Region {
    pub name: String,
    pub kind: RegionKind,
    /// `None`: the constant `permeability` below.
    pub material: Option<MaterialId>,
    /// Relative permeability where there is no material: 1 in air and windings, more in a joint's layer.
    pub permeability: f64,
    /// Azimuthal current density, positive out of the (r, z) plane's φ direction; 0 outside windings.
    pub current_density: AmperePerSquareMeter,
    /// Closed polygons that bound the region, counter-clockwise; empty for `Outside`. The window's polygon is its whole
    /// border: shapes inside take precedence ([`Outline::region_at`]).
    pub polygons: Vec<Vec<Point>>,
}

/// The half-round polygon that encloses everything; its exterior is mapped back onto a copy of itself.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Cap {
    /// Height of the centre on the axis [m].
    pub center_z: Meter,
    /// Radius of the polygon's corners [m].
    pub radius: Meter,
    pub n_facets: usize,
}

/// The section as a crossing-free drawing, ready for the mesher.
#[derive(Debug, Clone, PartialEq)]
pub struct Outline {
    /// Corners, snapped and distinct [m]; the cap polygon's corners, poles included, come last.
    pub points: Vec<Point>,
    /// Straight segments between points; no two cross, none passes through a third point.
    pub segments: Vec<[u32; 2]>,
    /// Region 0 is `Outside`.
    pub regions: Vec<Region>,
    pub cap: Cap,
}

impl Outline {
    /// The region at a point: the shape that holds it, else the window, else `Outside`.
    ///
    /// On a border either neighbour may be returned.
    pub fn region_at(&self, p: Point) -> RegionId {
        let holds = |region: &Region| region.polygons.iter().any(|polygon| contains(polygon, p));
        let is_window = |region: &Region| region.kind == RegionKind::Window;
        let shape = self.regions.iter().position(|r| !is_window(r) && holds(r));
        let found = shape.or_else(|| self.regions.iter().position(|r| is_window(r) && holds(r)));
        RegionId(found.unwrap_or(0) as u16)
    }
}

/// Largest number of regions: far above any section that a person writes, far below what a `RegionId` counts.
const N_REGIONS_MAX: usize = 10_000;

/// Draws the section of a model: core form with gaps, joint and fillets, parts, windings, cap.
///
/// Shapes are disjoint; a spacer's or a ground gap's air makes one region a leg; a window holds what its shapes leave.
///
/// # Errors
/// A [`Fault`] that names the shapes and the place [mm] for everything that cannot be drawn: dimensions that are not finite,
/// not in order or negative; gaps outside their leg; shapes that overlap; outlines that cross themselves; tips and contacts in a
/// point that no mesh resolves.
pub fn outline(model: &Model) -> Result<Outline, Fault> {
    let n_sections: usize = model.windings.iter().map(|w| w.sections.len()).sum();
    let n_regions = n_sections + model.parts.len() + 2 * model.gaps.len();
    if n_regions > N_REGIONS_MAX {
        let message = format!("the section has {n_regions} shapes, more than {N_REGIONS_MAX}");
        return Err(fault::fault(
            Subject::Sheet,
            None,
            message,
            "draw windings as sections, not turn by turn",
        ));
    }
    let mut drawing = drawing::Drawing::new();
    form::draw_core(model, &mut drawing)?;
    solids::draw_parts(model, &mut drawing)?;
    solids::draw_windings(model, &mut drawing)?;
    if drawing.shapes.is_empty() {
        let message = "the section is empty: no core, no part, no winding".to_string();
        return Err(fault::fault(
            Subject::Sheet,
            None,
            message,
            "add a [core] or [[parts]], and [[windings]]",
        ));
    }
    check_size(&drawing)?;
    let plane = plane::join(&drawing)?;
    corner::check(model, &drawing, &plane)?;
    Ok(finish(drawing, plane))
}

/// Largest distance from the origin that is still taken for a core or coil [m]: beyond, a unit is wrong.
const SIZE_MAX: f64 = 1e4;

/// Smallest such distance [m].
const SIZE_MIN: f64 = 1e-6;

/// Whether the section is of a size that a core or coil can have.
fn check_size(drawing: &drawing::Drawing) -> Result<(), Fault> {
    for shape in &drawing.shapes {
        let farthest = shape.corners.iter().fold(0.0_f64, |m, p| m.max(p.r.abs()).max(p.z.abs()));
        if !(SIZE_MIN..=SIZE_MAX).contains(&farthest) {
            let message =
                format!("{} reaches {} mm from the origin", shape.label, fault::mm(farthest));
            let help = "write lengths between 0.001 mm and 10 km; check length_unit";
            return Err(fault::fault(shape.subject, None, message, help));
        }
    }
    Ok(())
}

/// Gives the regions their joined polygons and adds the cap and the axis.
fn finish(drawing: drawing::Drawing, plane: plane::Plane) -> Outline {
    let mut regions = drawing.regions;
    let mut segments = plane.window_segments;
    for (shape, border) in drawing.shapes.iter().zip(&plane.borders) {
        let polygon = plane::corners(&plane.points, border);
        regions[shape.region.0 as usize].polygons.push(polygon);
        segments.extend(plane::segments_of(border));
    }
    if let Some((region, _)) = drawing.window {
        let polygon = plane::corners(&plane.points, &plane.window);
        regions[region.0 as usize].polygons.push(polygon);
    }
    let cap = Cap::around(&plane.points);
    let mut outline = Outline { points: plane.points, segments, regions, cap };
    cap::close(&mut outline);
    outline
}

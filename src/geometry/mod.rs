//! Forms, gaps, windings and parts → [`Outline`]: tagged, crossing-free segments inside the cap polygon.

use crate::model::{MaterialId, Point};
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
    /// Closed polygons that bound the region, counter-clockwise; empty for `Outside`.
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
    /// Corners, snapped and distinct [m]; the cap polygon's corners and its centre's axis points included.
    pub points: Vec<Point>,
    /// Straight segments between points; no two cross, none passes through a third point.
    pub segments: Vec<[u32; 2]>,
    /// Region 0 is `Outside`.
    pub regions: Vec<Region>,
    pub cap: Cap,
}

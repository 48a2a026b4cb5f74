//! The section before it is made crossing-free: regions, and the closed shapes that fill them.

use super::{Region, RegionId, RegionKind};
use crate::model::{MaterialId, Point, Subject};

/// A closed polygon that belongs to one region; shapes must not overlap.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Shape {
    pub region: RegionId,
    pub subject: Subject,
    /// The user's name for it, for messages: "the post", "winding `main`".
    pub label: String,
    /// Counter-clockwise.
    pub corners: Vec<Point>,
}

/// Regions, shapes, and the window's border (which gives way to shapes).
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Drawing {
    pub regions: Vec<Region>,
    pub shapes: Vec<Shape>,
    pub window: Option<(RegionId, Vec<Point>)>,
}

impl Drawing {
    /// An empty section: only `Outside`.
    pub fn new() -> Drawing {
        let mut drawing = Drawing { regions: Vec::new(), shapes: Vec::new(), window: None };
        drawing.air("outside".to_string(), RegionKind::Outside);
        drawing
    }

    /// Adds a region of air.
    pub fn air(&mut self, name: String, kind: RegionKind) -> RegionId {
        self.layer(name, kind, 1.0)
    }

    /// Adds a region of a constant relative permeability.
    pub fn layer(&mut self, name: String, kind: RegionKind, permeability: f64) -> RegionId {
        self.push(name, kind, None, permeability, 0.0)
    }

    /// Adds a region of a material.
    pub fn solid(&mut self, name: String, kind: RegionKind, material: MaterialId) -> RegionId {
        self.push(name, kind, Some(material), 1.0, 0.0)
    }

    /// Adds a region of air that carries a current density [A/m²].
    pub fn conductor(&mut self, name: String, kind: RegionKind, density: f64) -> RegionId {
        self.push(name, kind, None, 1.0, density)
    }

    /// Adds a shape to a region.
    pub fn shape(
        &mut self,
        region: RegionId,
        subject: Subject,
        label: String,
        corners: Vec<Point>,
    ) {
        self.shapes.push(Shape { region, subject, label, corners });
    }

    fn push(
        &mut self,
        name: String,
        kind: RegionKind,
        material: Option<MaterialId>,
        permeability: f64,
        current_density: f64,
    ) -> RegionId {
        let id = RegionId(self.regions.len() as u16);
        let polygons = Vec::new();
        self.regions.push(Region { name, kind, material, permeability, current_density, polygons });
        id
    }
}

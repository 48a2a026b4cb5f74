//! `Outline` → [`Mesh`] by spade and our own size field; newest-vertex bisection. Knows no material.

pub mod bisect;
pub mod fans;
mod refine;
mod size;
mod smooth;
#[cfg(test)]
mod tests;
mod topology;
mod triangulate;

pub use crate::geometry::{Cap, RegionId};
pub use triangulate::first_mesh;

use crate::geometry::Point;

/// Which chart a triangle lives in.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Chart {
    /// The real half plane inside the cap polygon; triangles counter-clockwise.
    Inside,
    /// The mapped exterior, sector of that facet; triangles clockwise, y = x/g(x)², infinity at the cap's centre.
    Cap(u8),
}

/// Conforming triangulation of the inside and of the mapped exterior, glued along the cap polygon.
///
/// Local edges of a triangle [a, b, c] are (a,b), (b,c), (c,a); local edge 0 is the refinement edge.
#[derive(Debug, Clone, PartialEq)]
pub struct Mesh {
    /// Coordinates in the vertex's own chart [m].
    pub points: Vec<Point>,
    /// On the axis (poles and infinity included): ψ = 0 there.
    pub on_axis: Vec<bool>,
    pub triangles: Vec<[u32; 3]>,
    pub triangle_edges: Vec<[u32; 3]>,
    pub edges: Vec<[u32; 2]>,
    pub regions: Vec<RegionId>,
    pub charts: Vec<Chart>,
    /// Ends of the edge whose midpoint a vertex is; `[u32::MAX; 2]` in the first mesh.
    pub parents: Vec<[u32; 2]>,
    /// Number of vertices after each round, first mesh included.
    pub level_sizes: Vec<usize>,
    pub cap: Cap,
}

/// Why a section could not be meshed.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum MeshError {
    /// Details too fine for the bounds of [`first_mesh`].
    #[error(
        "the section has a detail too fine to be meshed near r = {r_mm} mm, z = {z_mm} mm ({about}): triangles of {edge_mm:.1e} mm \
         there, {n_vertices} vertices so far; make the gap, wall or sliver there thicker, or leave it out"
    )]
    TooFine {
        n_vertices: usize,
        r_mm: f64,
        z_mm: f64,
        /// Length of the finest border [mm].
        edge_mm: f64,
        /// Names of the regions there.
        about: String,
    },
    /// The triangulation refused an outline that should have been crossing-free: our bug.
    #[error("the triangulation failed: {reason}")]
    Kernel { reason: String },
}

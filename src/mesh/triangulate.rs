//! `Outline` → first [`Mesh`]: refined triangulation of the inside, regions, and the cap glued to it.

use super::refine::{Kernel, point, refined};
use super::smooth::smooth;
use super::{Chart, Mesh, MeshError, topology};
use crate::geometry::{Outline, Point, RegionId, area};
use spade::Triangulation;
use spade::handles::{FixedFaceHandle, InnerTag};

/// The first mesh of an outline: graded, conforming, as coarse as its smallest angle (22°) allows.
///
/// Gaps and thin walls get whole layers; the corners that the outline itself has are left alone. Vertices: the outline's
/// points in their order, then the mesher's, then infinity. Inside triangles run counter-clockwise, the fan of cap triangles
/// clockwise in the copy; so all run the same way round as one surface. Local edge 0 is each triangle's longest.
///
/// # Errors
/// When the section holds details too fine to be meshed within the vertex bound; the place is told.
pub fn first_mesh(outline: &Outline) -> Result<Mesh, MeshError> {
    let (kernel, is_free, unit) = refined(outline)?;
    let mut triangles: Vec<[u32; 3]> =
        kernel.inner_faces().map(|f| f.vertices().map(|v| v.fix().index() as u32)).collect();
    let mut points: Vec<Point> = kernel.vertices().map(|v| point(v.position())).collect();
    smooth(&mut points, &triangles, &is_free);
    for p in &mut points {
        *p = Point { r: p.r * unit, z: p.z * unit };
    }
    let mut regions = face_regions(outline, &kernel, unit);
    let mut charts = vec![Chart::Inside; triangles.len()];
    glue_cap(outline, &mut points, &mut triangles);
    for k in charts.len()..triangles.len() {
        charts.push(Chart::Cap((k - regions.len()) as u8));
    }
    regions.resize(triangles.len(), RegionId(0));
    for triangle in &mut triangles {
        topology::longest_edge_first(&points, triangle);
    }
    let (edges, triangle_edges) = topology::edges_of(points.len(), &triangles);
    let n = points.len();
    Ok(Mesh {
        on_axis: points.iter().map(|p| p.r == 0.0).collect(),
        points,
        triangles,
        triangle_edges,
        edges,
        regions,
        charts,
        parents: vec![[u32::MAX; 2]; n],
        level_sizes: vec![n],
        cap: outline.cap,
    })
}

/// Appends the vertex "infinity" and the fan of cap triangles, clockwise in the copy.
fn glue_cap(outline: &Outline, points: &mut Vec<Point>, triangles: &mut Vec<[u32; 3]>) {
    let infinity = points.len() as u32;
    points.push(Point { r: 0.0, z: outline.cap.center_z });
    let first = (outline.points.len() - outline.cap.n_facets - 1) as u32;
    triangles
        .extend((0..outline.cap.n_facets as u32).map(|k| [first + k + 1, first + k, infinity]));
}

/// Region of every inner face: a flood that stops at borders, then one look into the outline a component.
fn face_regions(outline: &Outline, kernel: &Kernel, unit: f64) -> Vec<RegionId> {
    // Inner faces are numbered from 1; 0 is the outer face.
    let n = kernel.num_all_faces();
    let mut component = vec![usize::MAX; n];
    let mut found: Vec<RegionId> = Vec::new();
    let mut stack: Vec<FixedFaceHandle<InnerTag>> = Vec::new();
    for seed in kernel.inner_faces() {
        if component[seed.fix().index()] != usize::MAX {
            continue;
        }
        let mut largest = (0.0, Point::default());
        component[seed.fix().index()] = found.len();
        stack.push(seed.fix());
        while let Some(face) = stack.pop() {
            let face = kernel.face(face);
            let corners = face.positions().map(|p| Point { r: p.x * unit, z: p.y * unit });
            let size = area(&corners);
            if size > largest.0 {
                let [a, b, c] = corners;
                largest = (size, Point { r: (a.r + b.r + c.r) / 3.0, z: (a.z + b.z + c.z) / 3.0 });
            }
            for edge in face.adjacent_edges() {
                let Some(beyond) = edge.rev().face().as_inner() else { continue };
                let slot = &mut component[beyond.fix().index()];
                if !edge.is_constraint_edge() && *slot == usize::MAX {
                    *slot = found.len();
                    stack.push(beyond.fix());
                }
            }
        }
        found.push(outline.region_at(largest.1));
    }
    kernel.inner_faces().map(|f| found[component[f.fix().index()]]).collect()
}

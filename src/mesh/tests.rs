//! First meshes of reference sections.

use super::first_mesh;
use crate::geometry::outline;
use crate::geometry::samples;

#[test]
fn table() {
    for (name, model) in samples::all() {
        let outline = outline(&model).unwrap();
        let t = std::time::Instant::now();
        let mesh = first_mesh(&outline).unwrap();
        let dt = t.elapsed();
        mesh.validate();
        println!(
            "{name:20} {:6} triangles {:6} vertices {:6.2}° {:?}",
            mesh.n_triangles(),
            mesh.n_vertices(),
            mesh.min_angle().to_degrees(),
            dt
        );
    }
}

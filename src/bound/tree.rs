//! Carries what is left of the divergence to the axis, so that div τ = −J holds exactly for any iterate.

use super::Flux;
use crate::fem::element::Frame;
use crate::mesh::Mesh;
use crate::mesh::fans::{Fans, NO_TRIANGLE};

/// Sets one flux a triangle, leaves first, on a breadth-first tree of the dual graph rooted in the axis edges.
///
/// Flux is free through the axis (ψ = 0 there), so the tree always ends. Without it a loosely solved ψ_h would
/// leave div τ ≠ −J and the high end would not be safe.
pub fn close_divergence(mesh: &Mesh, fans: &Fans, current_density: &[f64], flux: &mut Flux) {
    let n = mesh.triangles.len();
    let mut parent = vec![u8::MAX; n];
    let mut order: Vec<u32> = Vec::with_capacity(n);
    for (t, edges) in mesh.triangle_edges.iter().enumerate() {
        if let Some(k) = (0..3).find(|&k| fans.edge_triangles[edges[k] as usize][1] == NO_TRIANGLE)
        {
            parent[t] = k as u8;
            order.push(t as u32);
        }
    }
    let mut head = 0;
    while head < order.len() {
        let t = order[head] as usize;
        head += 1;
        for &e in &mesh.triangle_edges[t] {
            let pair = fans.edge_triangles[e as usize];
            let other = if pair[0] as usize == t { pair[1] } else { pair[0] };
            if other != NO_TRIANGLE && parent[other as usize] == u8::MAX {
                let edges = mesh.triangle_edges[other as usize];
                parent[other as usize] = u8::from(edges[1] == e) + 2 * u8::from(edges[2] == e);
                order.push(other);
            }
        }
    }
    for &t in order.iter().rev() {
        let t = t as usize;
        let k = parent[t] as usize;
        let e = mesh.triangle_edges[t][k] as usize;
        // Set, not corrected: the old value of a wild iterate would leave its own rounding behind.
        flux.through[e] = 0.0;
        let rest = defect(mesh, current_density, flux, t);
        let is_along = mesh.edges[e][0] == mesh.triangles[t][k];
        flux.through[e] = if is_along { -rest } else { rest };
    }
}

/// Σ ± flux + J|det|/2 of triangle t: zero where div τ = −J [A].
pub fn defect(mesh: &Mesh, current_density: &[f64], flux: &Flux, t: usize) -> f64 {
    let x = super::element::local_numbers(mesh, t, flux);
    x[0] + x[1] + x[2] + source(mesh, current_density, t)
}

/// The largest of the terms that `defect` adds up: its local scale [A].
pub fn scale(mesh: &Mesh, current_density: &[f64], flux: &Flux, t: usize) -> f64 {
    let x = super::element::local_numbers(mesh, t, flux);
    [x[0], x[1], x[2], source(mesh, current_density, t)].iter().fold(0.0, |m, v| m.max(v.abs()))
}

fn source(mesh: &Mesh, current_density: &[f64], t: usize) -> f64 {
    match current_density[mesh.regions[t].0 as usize] {
        0.0 => 0.0,
        current_density => 0.5 * current_density * Frame::new(mesh, t).det_abs,
    }
}

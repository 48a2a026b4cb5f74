//! Carries what is left of the divergence to the axis, so that div τ = −J holds exactly for any iterate.

use super::{Field, Flux};
use crate::fem::Reluctivity;
use crate::fem::element::Frame;
use crate::mesh::Mesh;
use crate::mesh::fans::{Fans, NO_TRIANGLE, beside, place_of};
use crate::units::MU0;
use std::collections::VecDeque;

/// Classes of permeability, one a decade from 1e-12 to 1e12.
const N_CLASSES: usize = 25;

/// Sets one flux a triangle, leaves first, on a tree of the dual graph rooted in the axis edges.
///
/// Flux is free through the axis (ψ = 0 there), so the tree always ends. Without it a loosely solved ψ_h would
/// leave div τ ≠ −J and the high end would not be safe.
pub fn close_divergence(field: &Field, fans: &Fans, flux: &mut Flux) {
    let (mesh, current_density) = (field.mesh, &field.coefficients.current_density);
    let (order, parent) = spanning_tree(field, fans);
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

/// Triangles in an order in which each follows its parent, and the local edge that leads to the parent.
///
/// Breadth first, the least permeable triangles first: H along the tree costs ½µH², so what the solver left over is carried
/// through air as far as possible and every core triangle leaves its core by the shortest way.
fn spanning_tree(field: &Field, fans: &Fans) -> (Vec<u32>, Vec<u8>) {
    let mesh = field.mesh;
    let class: Vec<usize> = field.coefficients.reluctivity.iter().map(permeability_class).collect();
    let class_of = |t: u32| class[mesh.regions[t as usize].0 as usize];
    let n = mesh.triangles.len();
    let mut parent = vec![u8::MAX; n];
    let mut queues: Vec<VecDeque<u32>> = vec![VecDeque::new(); N_CLASSES];
    for (t, edges) in mesh.triangle_edges.iter().enumerate() {
        if let Some(k) = (0..3).find(|&k| fans.edge_triangles[edges[k] as usize][1] == NO_TRIANGLE)
        {
            parent[t] = k as u8;
            queues[class_of(t as u32)].push_back(t as u32);
        }
    }
    let mut order: Vec<u32> = Vec::with_capacity(n);
    while let Some(t) = queues.iter_mut().find_map(VecDeque::pop_front) {
        order.push(t);
        for &e in &mesh.triangle_edges[t as usize] {
            let other = beside(fans.edge_triangles[e as usize], t);
            if other != NO_TRIANGLE && parent[other as usize] == u8::MAX {
                parent[other as usize] = place_of(&mesh.triangle_edges[other as usize], e);
                queues[class_of(other)].push_back(other);
            }
        }
    }
    (order, parent)
}

/// Decade of the relative (initial) permeability, 0 for the least.
fn permeability_class(reluctivity: &Reluctivity) -> usize {
    let permeability = match reluctivity {
        Reluctivity::Constant(nu) => 1.0 / (MU0 * nu),
        Reluctivity::Saturating(law) => law.initial_permeability(),
    };
    // Half a decade up, so that rounding does not part air from air.
    let decade = (permeability.log10() + 0.5).floor() + (N_CLASSES / 2) as f64;
    decade.clamp(0.0, (N_CLASSES - 1) as f64) as usize
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

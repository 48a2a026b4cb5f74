//! Stiffness matrix and load vector of the quadratic space.

use super::coefficients::Coefficients;
use super::element::{Frame, GRADIENT, Pair};
use super::elements::{Element, LOCAL_EDGES, packed};
use super::space::{NONE, Space};
use crate::mesh::Mesh;
use crate::mesh::fans::{Fans, NO_TRIANGLE};
use crate::sparse::Matrix;
use rayon::prelude::*;
use std::ops::Range;

/// Rows a thread takes at a time.
const N_ROWS_CHUNK: usize = 8192;

/// Assembles ∫ ∇φ_i·K∇φ_j over all unknowns; each row is summed in the order of its triangles, so threads do not matter.
pub fn stiffness(mesh: &Mesh, space: &Space, fans: &Fans, elements: &[Element]) -> Matrix {
    let dofs = (0..mesh.triangles.len()).map(|t| space.dofs(mesh, t)).collect();
    let rows = Rows { mesh, space, fans, elements, dofs, owner: owners(space) };
    let n = space.n_dofs;
    let chunk = |c: usize| rows.gather(c * N_ROWS_CHUNK..((c + 1) * N_ROWS_CHUNK).min(n));
    let chunks: Vec<Chunk> = (0..n.div_ceil(N_ROWS_CHUNK)).into_par_iter().map(chunk).collect();
    join(n, chunks)
}

/// The vertex or the edge of every unknown.
fn owners(space: &Space) -> Vec<u32> {
    let free = |dofs: &[u32]| {
        (0..dofs.len() as u32).filter(|&k| dofs[k as usize] != NONE).collect::<Vec<_>>()
    };
    let mut owner = free(&space.vertex_dof);
    owner.extend(free(&space.edge_dof));
    owner
}

/// Consecutive finished rows.
#[derive(Default)]
struct Chunk {
    ends: Vec<usize>,
    columns: Vec<u32>,
    values: Vec<f64>,
}

struct Rows<'a> {
    mesh: &'a Mesh,
    space: &'a Space,
    fans: &'a Fans,
    elements: &'a [Element],
    /// Unknowns of every triangle, in one place: a row asks for those of all its triangles.
    dofs: Vec<[u32; 6]>,
    owner: Vec<u32>,
}

impl Rows<'_> {
    fn gather(&self, rows: Range<usize>) -> Chunk {
        let mut chunk = Chunk::default();
        // Position of a column in the row at hand.
        let mut slot = vec![NONE; self.space.n_dofs];
        let mut parts: Vec<(usize, usize)> = Vec::with_capacity(16);
        for i in rows {
            self.triangles_of(i, &mut parts);
            let start = chunk.columns.len();
            for &(t, _) in &parts {
                for &j in self.dofs[t].iter().filter(|&&j| j != NONE) {
                    if slot[j as usize] == NONE {
                        slot[j as usize] = 0;
                        chunk.columns.push(j);
                    }
                }
            }
            chunk.columns[start..].sort_unstable();
            for (k, &j) in chunk.columns[start..].iter().enumerate() {
                slot[j as usize] = k as u32;
            }
            chunk.values.resize(chunk.columns.len(), 0.0);
            let values = &mut chunk.values[start..];
            for &(t, k) in &parts {
                for (l, &j) in self.dofs[t].iter().enumerate() {
                    if j != NONE {
                        values[slot[j as usize] as usize] +=
                            self.elements[t].stiffness[packed(k, l)];
                    }
                }
            }
            for &j in &chunk.columns[start..] {
                slot[j as usize] = NONE;
            }
            chunk.ends.push(chunk.columns.len());
        }
        chunk
    }

    /// The triangles that carry unknown i, with its local index there.
    fn triangles_of(&self, i: usize, parts: &mut Vec<(usize, usize)>) {
        parts.clear();
        let owner = self.owner[i] as usize;
        if i < self.space.n_vertex_dofs {
            parts.extend(
                self.fans.around(owner).iter().map(|b| (b.triangle as usize, b.corner as usize)),
            );
            return;
        }
        for t in self.fans.edge_triangles[owner] {
            if t != NO_TRIANGLE {
                let edges = self.mesh.triangle_edges[t as usize];
                let k = usize::from(edges[1] as usize == owner)
                    + 2 * usize::from(edges[2] as usize == owner);
                parts.push((t as usize, 3 + k));
            }
        }
    }
}

fn join(n: usize, mut chunks: Vec<Chunk>) -> Matrix {
    let mut start = Vec::with_capacity(n + 1);
    start.push(0);
    if chunks.len() == 1 {
        let chunk = chunks.remove(0);
        start.extend(chunk.ends);
        return Matrix::new((n, n), start, chunk.columns, chunk.values);
    }
    let n_entries = chunks.iter().map(|c| c.columns.len()).sum();
    let (mut columns, mut values) = (Vec::with_capacity(n_entries), Vec::with_capacity(n_entries));
    for chunk in chunks {
        let offset = columns.len();
        start.extend(chunk.ends.iter().map(|end| offset + end));
        columns.extend(chunk.columns);
        values.extend(chunk.values);
    }
    Matrix::new((n, n), start, columns, values)
}

/// b_i = ∫ J φ_i dr dz [A]; J is constant on a triangle: J·|det|/6 for vertices and for bubbles alike.
pub fn load(mesh: &Mesh, space: &Space, coefficients: &Coefficients) -> Vec<f64> {
    let mut b = vec![0.0; space.n_dofs];
    for t in 0..mesh.triangles.len() {
        let current_density = coefficients.current_density[mesh.regions[t].0 as usize];
        if current_density == 0.0 {
            continue;
        }
        let part = current_density * Frame::new(mesh, t).det_abs / 6.0;
        let dofs = space.dofs(mesh, t);
        for d in dofs {
            if d != NONE {
                b[d as usize] += part;
            }
        }
        for (e, (i, j)) in LOCAL_EDGES.into_iter().enumerate() {
            if dofs[3 + e] == NONE {
                for v in [dofs[i], dofs[j]] {
                    // At most one end of a half-axis edge is free; an axis edge has none.
                    if v != NONE {
                        b[v as usize] -= 0.25 * part;
                    }
                }
            }
        }
    }
    b
}

/// g_i = ∫ ∇φ_i·σ̂ from the flux moments w_m = ∫ λ_m σ̂ of each triangle.
pub fn residual_of_flux(mesh: &Mesh, space: &Space, flux: impl Fn(usize) -> [Pair; 3]) -> Vec<f64> {
    let mut g = vec![0.0; space.n_dofs];
    let dot = super::element::dot;
    for t in 0..mesh.triangles.len() {
        let w = flux(t);
        let sum = [w[0][0] + w[1][0] + w[2][0], w[0][1] + w[1][1] + w[2][1]];
        let dofs = space.dofs(mesh, t);
        for i in 0..3 {
            if dofs[i] != NONE {
                g[dofs[i] as usize] += dot(GRADIENT[i], sum);
            }
        }
        for (e, (i, j)) in LOCAL_EDGES.into_iter().enumerate() {
            let bubble = 4.0 * (dot(GRADIENT[j], w[i]) + dot(GRADIENT[i], w[j]));
            if dofs[3 + e] != NONE {
                g[dofs[3 + e] as usize] += bubble;
            } else {
                for v in [dofs[i], dofs[j]] {
                    if v != NONE {
                        g[v as usize] -= 0.25 * bubble;
                    }
                }
            }
        }
    }
    g
}

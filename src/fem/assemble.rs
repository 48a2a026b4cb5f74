//! Stiffness matrix and load vector of the quadratic space.

use super::coefficients::Coefficients;
use super::element::{Frame, GRADIENT, Pair, Tensor, contract};
use super::moments::{Moments, PAIR_INDEX};
use super::space::{NONE, Space};
use crate::mesh::Mesh;
use crate::sparse::Matrix;
use rayon::prelude::*;

/// Local edges: (start, end) of the edges 0, 1, 2.
pub const LOCAL_EDGES: [(usize, usize); 3] = [(0, 1), (1, 2), (2, 0)];

/// Rows a thread takes at a time.
const N_ROWS_CHUNK: usize = 4096;

/// Stiffness of one triangle, 6 × 6: vertices, then edge bubbles 4λ_iλ_j; axis rule not yet applied.
///
/// Edge–edge entries are 16·Σ G·k·G over the two ends of each, vertex–edge ones need only the row sums K_m (eq. 8).
pub fn element_stiffness(k: &[Tensor; 6]) -> [[f64; 6]; 6] {
    let pair = |m: usize, n: usize| k[PAIR_INDEX[m][n]];
    let add = |a: Tensor, b: Tensor| [a[0] + b[0], a[1] + b[1], a[2] + b[2]];
    let row: [Tensor; 3] = [0, 1, 2].map(|m| add(add(pair(m, 0), pair(m, 1)), pair(m, 2)));
    let total = add(add(row[0], row[1]), row[2]);
    let g = GRADIENT;
    let mut stiffness = [[0.0; 6]; 6];
    for i in 0..3 {
        for j in i..3 {
            stiffness[i][j] = contract(g[i], total, g[j]);
        }
    }
    for (e, (i, j)) in LOCAL_EDGES.into_iter().enumerate() {
        for l in 0..3 {
            stiffness[l][3 + e] =
                4.0 * (contract(g[j], row[i], g[l]) + contract(g[i], row[j], g[l]));
        }
        for (f, (p, q)) in LOCAL_EDGES.into_iter().enumerate().skip(e) {
            let sum = contract(g[j], pair(i, p), g[q])
                + contract(g[j], pair(i, q), g[p])
                + contract(g[i], pair(j, p), g[q])
                + contract(g[i], pair(j, q), g[p]);
            stiffness[3 + e][3 + f] = 16.0 * sum;
        }
    }
    for i in 0..6 {
        for j in 0..i {
            stiffness[i][j] = stiffness[j][i];
        }
    }
    stiffness
}

/// Applies the axis rule: a half-axis edge (v, axis) gives −¼ of its row and column to v.
fn fold_axis(stiffness: &mut [[f64; 6]; 6], vertex_is_free: [bool; 3]) {
    for (e, (i, j)) in LOCAL_EDGES.into_iter().enumerate() {
        let v = match (vertex_is_free[i], vertex_is_free[j]) {
            (true, false) => i,
            (false, true) => j,
            _ => continue,
        };
        for k in 0..6 {
            stiffness[v][k] -= 0.25 * stiffness[3 + e][k];
        }
        for k in 0..6 {
            stiffness[k][v] -= 0.25 * stiffness[k][3 + e];
        }
    }
}

/// Assembles ∫ ∇φ_i·K∇φ_j over all unknowns; each row is summed in triangle order, so threads do not matter.
pub fn stiffness(mesh: &Mesh, space: &Space, moments: &[Moments]) -> Matrix {
    let local: Vec<[[f64; 6]; 6]> = (0..mesh.triangles.len())
        .into_par_iter()
        .with_min_len(1024)
        .map(|t| {
            let mut stiffness = element_stiffness(&moments[t].k);
            let is_free = mesh.triangles[t].map(|v| space.vertex_dof[v as usize] != NONE);
            if is_free != [true; 3] {
                fold_axis(&mut stiffness, is_free);
            }
            stiffness
        })
        .collect();
    let dofs: Vec<[u32; 6]> = (0..mesh.triangles.len()).map(|t| space.dofs(mesh, t)).collect();
    let (start, uses) = incidence(space.n_dofs, &dofs);
    let chunks: Vec<RowChunk> = (0..space.n_dofs.div_ceil(N_ROWS_CHUNK))
        .into_par_iter()
        .map(|chunk| {
            let rows = chunk * N_ROWS_CHUNK..((chunk + 1) * N_ROWS_CHUNK).min(space.n_dofs);
            gather_rows(rows, &start, &uses, &dofs, &local)
        })
        .collect();
    join(space.n_dofs, chunks)
}

/// For each unknown the (triangle, local index) pairs that touch it, as triangle·6 + index.
fn incidence(n_dofs: usize, dofs: &[[u32; 6]]) -> (Vec<u32>, Vec<u32>) {
    let mut start = vec![0u32; n_dofs + 1];
    let valid = |d: &&u32| **d != NONE;
    dofs.iter().flatten().filter(valid).for_each(|&d| start[d as usize + 1] += 1);
    for i in 0..n_dofs {
        start[i + 1] += start[i];
    }
    let mut uses = vec![0u32; start[n_dofs] as usize];
    let mut next = start.clone();
    for (t, row) in dofs.iter().enumerate() {
        for (k, &d) in row.iter().enumerate() {
            if d != NONE {
                uses[next[d as usize] as usize] = (6 * t + k) as u32;
                next[d as usize] += 1;
            }
        }
    }
    (start, uses)
}

/// Consecutive finished rows.
#[derive(Default)]
struct RowChunk {
    lengths: Vec<usize>,
    columns: Vec<u32>,
    values: Vec<f64>,
}

fn gather_rows(
    rows: std::ops::Range<usize>,
    start: &[u32],
    uses: &[u32],
    dofs: &[[u32; 6]],
    local: &[[[f64; 6]; 6]],
) -> RowChunk {
    let mut chunk = RowChunk::default();
    let mut row: Vec<(u32, f64)> = Vec::with_capacity(64);
    for i in rows {
        row.clear();
        for &code in &uses[start[i] as usize..start[i + 1] as usize] {
            let (t, k) = (code as usize / 6, code as usize % 6);
            for (&j, &value) in dofs[t].iter().zip(&local[t][k]) {
                if j == NONE {
                    continue;
                }
                match row.iter_mut().find(|(column, _)| *column == j) {
                    Some((_, sum)) => *sum += value,
                    None => row.push((j, value)),
                }
            }
        }
        row.sort_unstable_by_key(|&(column, _)| column);
        chunk.lengths.push(row.len());
        chunk.columns.extend(row.iter().map(|&(column, _)| column));
        chunk.values.extend(row.iter().map(|&(_, value)| value));
    }
    chunk
}

fn join(n: usize, chunks: Vec<RowChunk>) -> Matrix {
    let n_entries = chunks.iter().map(|c| c.columns.len()).sum();
    let (mut start, mut columns, mut values) =
        (Vec::with_capacity(n + 1), Vec::with_capacity(n_entries), Vec::with_capacity(n_entries));
    start.push(0);
    let mut end = 0;
    for chunk in chunks {
        for length in chunk.lengths {
            end += length;
            start.push(end);
        }
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

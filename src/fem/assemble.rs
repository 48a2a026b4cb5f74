//! Stiffness matrix and load vector of the quadratic space.

use super::batches::in_order;
use super::coefficients::Coefficients;
use super::element::{Frame, GRADIENT, Pair};
use super::elements::{Elements, LOCAL_EDGES, PLACE};
use super::space::{NONE, Space};
use crate::mesh::Mesh;
use crate::mesh::fans::{Fans, NO_TRIANGLE, place_of};
use crate::sparse::{Matrix, Storage};
use std::ops::Range;

/// Assembles ∫ ∇φ_i·K∇φ_j over all unknowns, row by row.
///
/// What a row looks like is known from the mesh: unknown i of a vertex meets the spokes and the rim of its fan, one of an edge
/// the two triangles beside it. Every entry off the diagonal is a sum of at most two terms, so the matrix is symmetric to
/// the last bit and threads do not matter.
///
/// - `storage`: the arrays to use; their contents are lost
pub fn stiffness(
    mesh: &Mesh,
    space: &Space,
    fans: &Fans,
    elements: &Elements,
    storage: Storage,
) -> Matrix {
    /// Vertices or edges of one piece of work.
    const N_PIECE: usize = 256;
    let dofs = (0..mesh.triangles.len()).map(|t| space.dofs(mesh, t)).collect();
    let rows = Rows { mesh, space, fans, elements, dofs };
    let Storage { mut start, mut columns, mut values } = storage;
    start.clear();
    start.push(0);
    columns.clear();
    values.clear();
    // Three a corner and one a vertex, nine an edge; constrained ones are fewer.
    let n_most = 9 * mesh.triangles.len() + mesh.points.len() + 9 * mesh.edges.len();
    columns.reserve(n_most);
    values.reserve(n_most);
    let n_owners = mesh.points.len() + mesh.edges.len();
    in_order(
        n_owners.div_ceil(N_PIECE),
        |piece| rows.gather(piece * N_PIECE..n_owners.min((piece + 1) * N_PIECE)),
        |_, piece| {
            let before = columns.len();
            start.extend(piece.ends.iter().map(|end| before + end));
            columns.extend_from_slice(&piece.columns);
            values.extend_from_slice(&piece.values);
        },
    );
    Matrix::new((space.n_dofs, space.n_dofs), start, columns, values)
}

/// Consecutive finished rows.
struct Piece {
    ends: Vec<usize>,
    columns: Vec<u32>,
    values: Vec<f64>,
}

impl Piece {
    fn with_room(n_rows: usize) -> Piece {
        // Twelve entries a row on average; a fan of many triangles has more.
        let n = 14 * n_rows;
        Piece {
            ends: Vec::with_capacity(n_rows),
            columns: Vec::with_capacity(n),
            values: Vec::with_capacity(n),
        }
    }

    /// Appends entries to the row at hand, ordered by column; entries of constrained unknowns fall away.
    fn push(&mut self, keys: &mut [u64], values: &[f64]) {
        keys.sort_unstable();
        // Those of constrained unknowns are last: no number is larger than NONE.
        let n_constrained = keys.iter().rev().take_while(|&&k| key(NONE, 0) <= k).count();
        let entries = &keys[..keys.len() - n_constrained];
        self.columns.extend(entries.iter().map(|k| (k >> 32) as u32));
        self.values.extend(entries.iter().map(|&k| values[k as u32 as usize]));
    }

    fn end_row(&mut self) {
        self.ends.push(self.columns.len());
    }
}

/// What is sorted instead of an entry: its column, and its place below.
#[inline]
fn key(column: u32, place: usize) -> u64 {
    u64::from(column) << 32 | place as u64
}

struct Rows<'a> {
    mesh: &'a Mesh,
    space: &'a Space,
    fans: &'a Fans,
    elements: &'a Elements,
    /// Unknowns of every triangle, in one place: a row asks for those of all its triangles.
    dofs: Vec<[u32; 6]>,
}

impl Rows<'_> {
    /// The rows of owners `range`: vertices, then edges, those without an unknown left out.
    fn gather(&self, range: Range<usize>) -> Piece {
        let n_vertices = self.mesh.points.len();
        let mut piece = Piece::with_room(range.len());
        let (mut keys, mut values) = (Vec::new(), Vec::new());
        for owner in range {
            if owner < n_vertices {
                if self.space.vertex_dof[owner] != NONE {
                    self.vertex_row(owner, &mut keys, &mut values, &mut piece);
                }
            } else if self.space.edge_dof[owner - n_vertices] != NONE {
                self.edge_row(owner - n_vertices, &mut piece);
            }
        }
        piece
    }

    /// The spokes' far ends and the vertex itself; the spokes and the rim.
    fn vertex_row(
        &self,
        vertex: usize,
        keys: &mut Vec<u64>,
        values: &mut Vec<f64>,
        piece: &mut Piece,
    ) {
        let fan = self.fans.around(vertex);
        let n = fan.len();
        // Places: far ends 0.., the vertex n, spokes n + 1.., rim 2n + 1...
        keys.clear();
        keys.resize(3 * n + 1, 0);
        values.clear();
        values.resize(3 * n + 1, 0.0);
        for (q, blade) in fan.iter().enumerate() {
            let (t, a) = (blade.triangle as usize, blade.corner as usize);
            let (b, c) = ((a + 1) % 3, (a + 2) % 3);
            let next = if q + 1 == n { 0 } else { q + 1 };
            let (dofs, stiffness) = (&self.dofs[t], &self.elements.stiffness[t]);
            let entry = |k: usize| stiffness[PLACE[a][k]];
            keys[n] = key(dofs[a], n);
            keys[q] = key(dofs[b], q);
            keys[n + 1 + q] = key(dofs[3 + a], n + 1 + q);
            keys[2 * n + 1 + q] = key(dofs[3 + b], 2 * n + 1 + q);
            values[n] += entry(a);
            values[q] += entry(b);
            values[next] += entry(c);
            values[n + 1 + q] += entry(3 + a);
            values[n + 1 + next] += entry(3 + c);
            values[2 * n + 1 + q] = entry(3 + b);
        }
        // Unknowns of vertices have smaller numbers than those of edges.
        let (vertices, edges) = keys.split_at_mut(n + 1);
        piece.push(vertices, values);
        piece.push(edges, values);
        piece.end_row();
    }

    /// Both ends and both far corners; the edge itself and the four others of its triangles.
    fn edge_row(&self, edge: usize, piece: &mut Piece) {
        let (mut vertices, mut edges) = ([key(NONE, 0); 4], [key(NONE, 0); 5]);
        // Places: start 0, end 1, far corners 2 and 3, the edge 4, two of either triangle 5 and 7.
        let mut values = [0.0; 9];
        for (side, &t) in self.fans.edge_triangles[edge].iter().enumerate() {
            if t == NO_TRIANGLE {
                continue;
            }
            let t = t as usize;
            let k = usize::from(place_of(&self.mesh.triangle_edges[t], edge as u32));
            let (next, far) = ((k + 1) % 3, (k + 2) % 3);
            let (dofs, stiffness) = (&self.dofs[t], &self.elements.stiffness[t]);
            let entry = |l: usize| stiffness[PLACE[3 + k][l]];
            // The two triangles run along the edge in opposite directions.
            let (start, end) = if side == 0 { (k, next) } else { (next, k) };
            vertices[0] = key(dofs[start], 0);
            vertices[1] = key(dofs[end], 1);
            vertices[2 + side] = key(dofs[far], 2 + side);
            edges[0] = key(dofs[3 + k], 4);
            edges[1 + 2 * side] = key(dofs[3 + next], 5 + 2 * side);
            edges[2 + 2 * side] = key(dofs[3 + far], 6 + 2 * side);
            values[0] += entry(start);
            values[1] += entry(end);
            values[2 + side] = entry(far);
            values[4] += entry(3 + k);
            values[5 + 2 * side] = entry(3 + next);
            values[6 + 2 * side] = entry(3 + far);
        }
        piece.push(&mut vertices, &values);
        piece.push(&mut edges, &values);
        piece.end_row();
    }
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

//! The small problem round each vertex: fluxes by a sweep, one shift and the tilts by least squares (eq. 10, 11).

use super::element::Patchwork;
use super::{Field, Flux};
use crate::fem::batches::in_order;
use crate::fem::elements::{PLACE, Packed};
use crate::mesh::Mesh;
use crate::mesh::fans::{Blade, Fans};

/// Adds up the patch fluxes of all vertices.
///
/// An edge gets one part from either end, so the order of the vertices does not matter; it follows the triangles, whose
/// matrices are then read once and not three times from memory.
pub fn equilibrate(field: &Field, fans: &Fans, patchwork: &[Patchwork]) -> Flux {
    /// Vertices of one piece of work.
    const N_PIECE: usize = 128;
    let mesh = field.mesh;
    let mut flux = Flux { through: vec![0.0; mesh.edges.len()], tilt: vec![0.0; mesh.edges.len()] };
    let pieces: Vec<&[u32]> = fans.tour.chunks(N_PIECE).collect();
    let solve = |piece: usize| {
        let mut work = Workspace::default();
        let mut spokes = Vec::with_capacity(8 * N_PIECE);
        for &v in pieces[piece] {
            let (fan, is_open) = (fans.around(v as usize), mesh.on_axis[v as usize]);
            work.solve(fan, is_open, &field.elements.gram, patchwork, &mut spokes);
        }
        spokes
    };
    in_order(pieces.len(), solve, |piece, spokes| {
        let mut spokes = spokes.iter();
        for &v in pieces[piece] {
            let (fan, is_open) = (fans.around(v as usize), mesh.on_axis[v as usize]);
            for (e, &[through, tilt]) in spoke_edges(mesh, fan, is_open).zip(spokes.by_ref()) {
                flux.through[e] += if mesh.edges[e][0] == v { through } else { -through };
                flux.tilt[e] += tilt;
            }
        }
    });
    flux
}

/// Edges of the spokes in cyclic order; an axis vertex has one more spoke than triangles.
fn spoke_edges<'a>(
    mesh: &'a Mesh,
    fan: &'a [Blade],
    is_open: bool,
) -> impl Iterator<Item = usize> + 'a {
    let edge = |b: &Blade, turn: usize| {
        mesh.triangle_edges[b.triangle as usize][(b.corner as usize + turn) % 3] as usize
    };
    let last = if is_open { fan.last().map(|b| edge(b, 2)) } else { None };
    fan.iter().map(move |b| edge(b, 0)).chain(last)
}

/// Vectors of one patch problem, reused from vertex to vertex.
#[derive(Default)]
struct Workspace {
    /// Swept flux on each spoke.
    sweep: Vec<f64>,
    /// Tridiagonal matrix of the tilts: diagonal, and coupling of spoke q with q + 1.
    diagonal: Vec<f64>,
    coupling: Vec<f64>,
    /// 1/diagonal after elimination.
    inverse: Vec<f64>,
    /// Right-hand sides: load, coupling to the shift, coupling to the first tilt.
    columns: Vec<[f64; 3]>,
}

impl Workspace {
    /// Solves the patch of one vertex and appends (flux, tilt) of each spoke.
    fn solve(
        &mut self,
        fan: &[Blade],
        is_open: bool,
        gram: &[Packed],
        patchwork: &[Patchwork],
        spokes: &mut Vec<[f64; 2]>,
    ) {
        let n_triangles = fan.len();
        let n_spokes = n_triangles + usize::from(is_open);
        let (shift_square, shift_load) = self.collect(fan, n_spokes, gram, patchwork);
        let (shift, first_tilt) = self.eliminate(n_spokes, is_open, shift_square, shift_load);
        for q in 0..n_spokes {
            let [load, with_shift, with_first] = self.columns[q];
            let tilt = if q == 0 {
                first_tilt
            } else {
                load - shift * with_shift - first_tilt * with_first
            };
            spokes.push([self.sweep[q] + shift, tilt]);
        }
    }

    /// Sweeps the fluxes and gathers the normal equations; returns the shift's own entry and load.
    fn collect(
        &mut self,
        fan: &[Blade],
        n_spokes: usize,
        gram: &[Packed],
        patchwork: &[Patchwork],
    ) -> (f64, f64) {
        self.sweep.clear();
        self.sweep.push(0.0);
        for v in [&mut self.diagonal, &mut self.coupling, &mut self.inverse] {
            v.clear();
            v.resize(n_spokes, 0.0);
        }
        self.columns.clear();
        self.columns.resize(n_spokes, [0.0; 3]);
        let (mut shift_square, mut shift_load) = (0.0, 0.0);
        for (q, blade) in fan.iter().enumerate() {
            let a = blade.corner as usize;
            let work = &patchwork[blade.triangle as usize];
            let m = corner_gram(&gram[blade.triangle as usize], a);
            let next = if q + 1 == n_spokes { 0 } else { q + 1 };
            let (flux, flux_next) = (self.sweep[q], self.sweep[q] - work.defect[a]);
            self.sweep.push(flux_next);

            let [[f1, c1], [f2, c2]] = work.target[a];
            let x = [flux - f1, flux_next - f2, -c1, -c2];
            let g = m.map(|row| row[0] * x[0] + row[1] * x[1] + row[2] * x[2] + row[3] * x[3]);

            shift_square += m[0][0] + 2.0 * m[0][1] + m[1][1];
            shift_load -= g[0] + g[1];
            self.diagonal[q] += m[2][2];
            self.diagonal[next] += m[3][3];
            self.coupling[q] = m[2][3];
            self.columns[q][0] -= g[2];
            self.columns[next][0] -= g[3];
            self.columns[q][1] += m[0][2] + m[1][2];
            self.columns[next][1] += m[0][3] + m[1][3];
        }
        (shift_square, shift_load)
    }

    /// Eliminates the tilts 1.. by the tridiagonal LDLᵀ; returns the shift and the first tilt.
    fn eliminate(
        &mut self,
        n: usize,
        is_open: bool,
        shift_square: f64,
        shift_load: f64,
    ) -> (f64, f64) {
        let first = self.columns[0];
        if 1 < n {
            self.columns[1][2] += self.coupling[0];
            if !is_open {
                self.columns[n - 1][2] += self.coupling[n - 1];
            }
        }
        // Schur complement of the border (shift, first tilt).
        let mut square = [shift_square, first[1], self.diagonal[0]];
        let mut load = [shift_load, first[0]];
        for q in 1..n {
            if 1 < q {
                let ratio = self.coupling[q - 1] * self.inverse[q - 1];
                self.diagonal[q] -= ratio * self.coupling[q - 1];
                for k in 0..3 {
                    self.columns[q][k] -= ratio * self.columns[q - 1][k];
                }
            }
            let [b, s, w] = self.columns[q];
            let inverse = 1.0 / self.diagonal[q];
            self.inverse[q] = inverse;
            square[0] -= s * s * inverse;
            square[1] -= s * w * inverse;
            square[2] -= w * w * inverse;
            load[0] -= s * b * inverse;
            load[1] -= w * b * inverse;
        }
        for q in (1..n).rev() {
            for k in 0..3 {
                let later = if q + 1 < n { self.coupling[q] * self.columns[q + 1][k] } else { 0.0 };
                self.columns[q][k] = (self.columns[q][k] - later) * self.inverse[q];
            }
        }
        let det = square[0] * square[2] - square[1] * square[1];
        let shift = (load[0] * square[2] - load[1] * square[1]) / det;
        let first_tilt = (load[1] * square[0] - load[0] * square[1]) / det;
        (shift, first_tilt)
    }
}

/// Gram matrix of a corner's basis, all of it pointing away from the vertex: w to a + 1, w to a + 2, both tilts.
#[inline]
fn corner_gram(gram: &Packed, a: usize) -> [[f64; 4]; 4] {
    let (out, back) = (a, (a + 2) % 3);
    let at = |i: usize, j: usize| gram[PLACE[i][j]];
    // The form on the edge from a + 2 to a points towards the vertex.
    let with_back = [-at(out, back), -at(back, 3 + out), -at(back, 3 + back)];
    let (tilt_out, tilt_back) = (at(out, 3 + out), at(out, 3 + back));
    let tilts = at(3 + out, 3 + back);
    [
        [at(out, out), with_back[0], tilt_out, tilt_back],
        [with_back[0], at(back, back), with_back[1], with_back[2]],
        [tilt_out, with_back[1], at(3 + out, 3 + out), tilts],
        [tilt_back, with_back[2], tilts, at(3 + back, 3 + back)],
    ]
}

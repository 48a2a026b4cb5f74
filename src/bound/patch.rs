//! The small problem round each vertex: fluxes by a sweep, one shift and the tilts by least squares (eq. 10, 11).

use super::element::Patchwork;
use super::{Field, Flux};
use crate::fem::Element;
use crate::fem::elements::packed;
use crate::mesh::Mesh;
use crate::mesh::fans::{Blade, Fans};
use rayon::prelude::*;

/// Vertices a thread takes at a time.
const N_VERTICES_CHUNK: usize = 1024;

/// Adds up the patch fluxes of all vertices.
pub fn equilibrate(field: &Field, fans: &Fans, patchwork: &[Patchwork]) -> Flux {
    let mesh = field.mesh;
    let n = mesh.points.len();
    let chunks: Vec<Vec<[f64; 2]>> = (0..n.div_ceil(N_VERTICES_CHUNK))
        .into_par_iter()
        .map_init(Workspace::default, |work, chunk| {
            let mut spokes = Vec::with_capacity(8 * N_VERTICES_CHUNK);
            for v in chunk * N_VERTICES_CHUNK..((chunk + 1) * N_VERTICES_CHUNK).min(n) {
                work.solve(fans.around(v), mesh.on_axis[v], field.elements, patchwork, &mut spokes);
            }
            spokes
        })
        .collect();

    let mut flux = Flux { through: vec![0.0; mesh.edges.len()], tilt: vec![0.0; mesh.edges.len()] };
    for (chunk, spokes) in chunks.iter().enumerate() {
        let mut spokes = spokes.iter();
        for v in chunk * N_VERTICES_CHUNK..((chunk + 1) * N_VERTICES_CHUNK).min(n) {
            for (e, &[through, tilt]) in
                spoke_edges(mesh, fans.around(v), mesh.on_axis[v]).zip(spokes.by_ref())
            {
                let leaves = mesh.edges[e][0] as usize == v;
                flux.through[e] += if leaves { through } else { -through };
                flux.tilt[e] += tilt;
            }
        }
    }
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
    /// Right-hand sides: load, coupling to the shift, coupling to the first tilt.
    columns: Vec<[f64; 3]>,
}

impl Workspace {
    /// Solves the patch of one vertex and appends (flux, tilt) of each spoke.
    fn solve(
        &mut self,
        fan: &[Blade],
        is_open: bool,
        elements: &[Element],
        patchwork: &[Patchwork],
        spokes: &mut Vec<[f64; 2]>,
    ) {
        let n_triangles = fan.len();
        let n_spokes = n_triangles + usize::from(is_open);
        let (shift_square, shift_load) = self.collect(fan, n_spokes, elements, patchwork);
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
        elements: &[Element],
        patchwork: &[Patchwork],
    ) -> (f64, f64) {
        self.sweep.clear();
        self.sweep.push(0.0);
        for v in [&mut self.diagonal, &mut self.coupling] {
            v.clear();
            v.resize(n_spokes, 0.0);
        }
        self.columns.clear();
        self.columns.resize(n_spokes, [0.0; 3]);
        let (mut shift_square, mut shift_load) = (0.0, 0.0);
        for (q, blade) in fan.iter().enumerate() {
            let a = blade.corner as usize;
            let work = &patchwork[blade.triangle as usize];
            let matrix = &elements[blade.triangle as usize].gram;
            let next = (q + 1) % n_spokes;
            let (flux, flux_next) = (self.sweep[q], self.sweep[q] - work.defect[a]);
            self.sweep.push(flux_next);

            // Basis of the patch on this triangle, all pointing away from the vertex: w to a+1, w to a+2, both tilts.
            let (out, back) = (a, (a + 2) % 3);
            let index = [out, back, 3 + out, 3 + back];
            let sign = [1.0, -1.0, 1.0, 1.0];
            let gram = |i: usize, j: usize| sign[i] * sign[j] * matrix[packed(index[i], index[j])];
            let [[f1, c1], [f2, c2]] = work.target[a];
            let x = [flux - f1, flux_next - f2, -c1, -c2];
            let g = [0, 1, 2, 3].map(|i| (0..4).map(|j| gram(i, j) * x[j]).sum::<f64>());

            shift_square += gram(0, 0) + 2.0 * gram(0, 1) + gram(1, 1);
            shift_load -= g[0] + g[1];
            self.diagonal[q] += gram(2, 2);
            self.diagonal[next] += gram(3, 3);
            self.coupling[q] = gram(2, 3);
            self.columns[q][0] -= g[2];
            self.columns[next][0] -= g[3];
            self.columns[q][1] += gram(0, 2) + gram(1, 2);
            self.columns[next][1] += gram(0, 3) + gram(1, 3);
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
                let ratio = self.coupling[q - 1] / self.diagonal[q - 1];
                self.diagonal[q] -= ratio * self.coupling[q - 1];
                for k in 0..3 {
                    self.columns[q][k] -= ratio * self.columns[q - 1][k];
                }
            }
            let [b, s, w] = self.columns[q];
            let d = self.diagonal[q];
            square[0] -= s * s / d;
            square[1] -= s * w / d;
            square[2] -= w * w / d;
            load[0] -= s * b / d;
            load[1] -= w * b / d;
        }
        for q in (1..n).rev() {
            for k in 0..3 {
                let later = if q + 1 < n { self.coupling[q] * self.columns[q + 1][k] } else { 0.0 };
                self.columns[q][k] = (self.columns[q][k] - later) / self.diagonal[q];
            }
        }
        let det = square[0] * square[2] - square[1] * square[1];
        let shift = (load[0] * square[2] - load[1] * square[1]) / det;
        let first_tilt = (load[1] * square[0] - load[0] * square[1]) / det;
        (shift, first_tilt)
    }
}

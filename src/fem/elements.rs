//! What is kept of every triangle from round to round: moments, stiffness and the Gram matrix of the dual forms.
//!
//! Constant laws: computed once when bisection makes the triangle. Saturating laws: at every new field.

use super::coefficients::{Coefficients, Reluctivity};
use super::element::{Frame, GRADIENT, Tensor, contract};
use super::moments::{Moments, PAIR_INDEX, constant_moments, rule_of};
use super::quadrature::Rules;
use crate::mesh::Mesh;
use rayon::prelude::*;

/// Local edges: (start, end) of the edges 0, 1, 2.
pub const LOCAL_EDGES: [(usize, usize); 3] = [(0, 1), (1, 2), (2, 0)];

/// Upper half of a symmetric 6 × 6 matrix, row by row.
pub type Packed = [f64; 21];

/// Index of (i, j) in a [`Packed`] matrix.
#[inline]
pub const fn packed(i: usize, j: usize) -> usize {
    let (i, j) = if i <= j { (i, j) } else { (j, i) };
    i * (11 - i) / 2 + j
}

/// One triangle's matrices.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Element {
    /// k_mn (eq. 7).
    pub k: [Tensor; 6],
    /// Vertices, then edge bubbles, the axis rule folded in (eq. 8).
    pub stiffness: Packed,
    /// In C of (w01, w12, w20, d01, d12, d20).
    pub gram: Packed,
}

impl Default for Element {
    fn default() -> Element {
        Element { k: [[0.0; 3]; 6], stiffness: [0.0; 21], gram: [0.0; 21] }
    }
}

impl Element {
    /// Both matrices from the moments.
    pub fn new(frame: &Frame, moments: &Moments) -> Element {
        let mut stiffness = element_stiffness(&moments.k);
        if frame.axis != 0 {
            fold_axis(&mut stiffness, frame);
        }
        let mut half = [0.0; 21];
        for i in 0..6 {
            for j in i..6 {
                half[packed(i, j)] = stiffness[i][j];
            }
        }
        Element { k: moments.k, stiffness: half, gram: gram(&moments.c) }
    }
}

/// Recomputes the `changed` triangles (ascending) that carry a constant law; the vector grows with the mesh.
pub fn update_constant(
    mesh: &Mesh,
    coefficients: &Coefficients,
    rules: &Rules,
    changed: &[u32],
    elements: &mut Vec<Element>,
) {
    elements.resize(mesh.triangles.len(), Element::default());
    let fresh = |t: usize| match &coefficients.reluctivity[mesh.regions[t].0 as usize] {
        Reluctivity::Constant(nu) => {
            let frame = Frame::new(mesh, t);
            Some(Element::new(&frame, &constant_moments(&frame, rule_of(rules, &frame), *nu)))
        }
        Reluctivity::Saturating(_) => None,
    };
    // A few changed triangles at a time, so that the copies stay in the cache.
    const N_BATCH: usize = 4096;
    for batch in changed.chunks(N_BATCH) {
        let fresh: Vec<_> =
            batch.par_iter().with_min_len(512).map(|&t| fresh(t as usize)).collect();
        for (&t, element) in batch.iter().zip(fresh) {
            if let Some(element) = element {
                elements[t as usize] = element;
            }
        }
    }
}

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
fn fold_axis(stiffness: &mut [[f64; 6]; 6], frame: &Frame) {
    for (e, (i, j)) in LOCAL_EDGES.into_iter().enumerate() {
        let v = match (frame.on_axis(i), frame.on_axis(j)) {
            (false, true) => i,
            (true, false) => j,
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

/// Gram matrix of the Whitney forms w_ij = λ_i dλ_j − λ_j dλ_i and d_ij = λ_i dλ_j + λ_j dλ_i.
fn gram(c: &[Tensor; 6]) -> Packed {
    let mut gram = [0.0; 21];
    let g = GRADIENT;
    for (e, (i, j)) in LOCAL_EDGES.into_iter().enumerate() {
        for (f, (p, q)) in LOCAL_EDGES.into_iter().enumerate() {
            let ip = contract(g[j], c[PAIR_INDEX[i][p]], g[q]);
            let iq = contract(g[j], c[PAIR_INDEX[i][q]], g[p]);
            let jp = contract(g[i], c[PAIR_INDEX[j][p]], g[q]);
            let jq = contract(g[i], c[PAIR_INDEX[j][q]], g[p]);
            if e <= f {
                gram[packed(e, f)] = ip - iq - jp + jq;
                gram[packed(3 + e, 3 + f)] = ip + iq + jp + jq;
            }
            gram[packed(e, 3 + f)] = ip + iq - jp - jq;
        }
    }
    gram
}

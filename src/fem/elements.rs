//! What is kept of every triangle from round to round: moments, stiffness and the Gram matrix of the dual forms.
//!
//! Constant laws: computed once when bisection makes the triangle. Saturating laws: at every new field.

use super::batches::in_order;
use super::coefficients::{Coefficients, Reluctivity};
use super::element::{Frame, GRADIENT, Tensor, contract};
use super::moments::{Moments, PAIR_INDEX, constant_moments, rule_of};
use super::quadrature::Rules;
use crate::mesh::Mesh;
use crate::mesh::bisect::MADE;

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

/// [`packed`] as a table.
pub const PLACE: [[usize; 6]; 6] = {
    let mut table = [[0; 6]; 6];
    let mut k = 0;
    while k < 36 {
        table[k / 6][k % 6] = packed(k / 6, k % 6);
        k += 1;
    }
    table
};

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

/// The matrices of all triangles, each kind in an array of its own: a stage reads only what it needs.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Elements {
    pub k: Vec<[Tensor; 6]>,
    pub stiffness: Vec<Packed>,
    pub gram: Vec<Packed>,
}

impl Elements {
    /// Room for n triangles, new ones filled with zeros.
    fn resize(&mut self, n: usize) {
        self.k.resize(n, [[0.0; 3]; 6]);
        self.stiffness.resize(n, [0.0; 21]);
        self.gram.resize(n, [0.0; 21]);
    }

    /// Stores the matrices of triangle t.
    pub fn set(&mut self, t: usize, element: &Element) {
        self.k[t] = element.k;
        self.stiffness[t] = element.stiffness;
        self.gram[t] = element.gram;
    }

    /// Takes what is kept of every triangle to its new number.
    ///
    /// - `origin`: old number of each new triangle, ascending but for [`MADE`]; never above the new one
    pub fn renumber(&mut self, origin: &[u32]) {
        self.resize(origin.len());
        spread(&mut self.k, origin);
        spread(&mut self.stiffness, origin);
        spread(&mut self.gram, origin);
    }

    /// Computes the `fresh` triangles that carry a constant law; the arrays grow with the mesh.
    pub fn update_constant(
        &mut self,
        mesh: &Mesh,
        coefficients: &Coefficients,
        rules: &Rules,
        fresh: &[u32],
    ) {
        /// Triangles of one piece of work.
        const N_PIECE: usize = 256;
        self.resize(mesh.triangles.len());
        let element =
            |&t: &u32| match &coefficients.reluctivity[mesh.regions[t as usize].0 as usize] {
                Reluctivity::Constant(nu) => {
                    let frame = Frame::new(mesh, t as usize);
                    let moments = constant_moments(&frame, rule_of(rules, &frame), *nu);
                    Some((t, Element::new(&frame, &moments)))
                }
                Reluctivity::Saturating(_) => None,
            };
        let pieces: Vec<&[u32]> = fresh.chunks(N_PIECE).collect();
        in_order(
            pieces.len(),
            |piece| pieces[piece].iter().filter_map(element).collect::<Vec<_>>(),
            |made| made.iter().for_each(|(t, element)| self.set(*t as usize, element)),
        );
    }
}

/// Moves every value that stays to its new place.
fn spread<T: Copy>(values: &mut [T], origin: &[u32]) {
    // From the back: nothing is overwritten before it has moved.
    for (t, &old) in origin.iter().enumerate().rev() {
        if old != MADE && old as usize != t {
            values[t] = values[old as usize];
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

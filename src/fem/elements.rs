//! What is kept of every triangle from round to round: moments, stiffness and the Gram matrix of the dual forms.
//!
//! Constant laws: computed once when bisection makes the triangle. Saturating laws: at every new field.

use super::batches::in_order;
use super::coefficients::{Coefficients, Reluctivity};
use super::element::{Frame, Tensor};
use super::moments::{Moments, PAIR_INDEX, PAIRS, constant_moments, rule_of};
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
        Element { k: moments.k, stiffness, gram: gram(&moments.c) }
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
        const N_PIECE: usize = 64;
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
            |_, made| made.iter().for_each(|(t, element)| self.set(*t as usize, element)),
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

/// ∇λ_a·T·∇λ_b of each of six tensors, for every pair (a, b) in storage order.
///
/// The reference gradients being (−1, −1), (1, 0) and (0, 1), these are sums of the tensor's own entries.
fn contracted(tensors: &[Tensor; 6]) -> [[f64; 6]; 6] {
    let mut table = [[0.0; 6]; 6];
    for (row, [xx, xy, yy]) in table.iter_mut().zip(tensors) {
        let (x, y) = (xx + xy, xy + yy);
        // (0, 0), (1, 1), (2, 2), (0, 1), (1, 2), (2, 0).
        *row = [x + y, *xx, *yy, -x, *xy, -y];
    }
    table
}

/// The four products of an edge (i, j) with an edge (p, q): ip, iq, jp, jq, where `mn` is λ_m λ_n times the other two gradients.
#[inline]
fn four(table: &[[f64; 6]; 6], (i, j): (usize, usize), (p, q): (usize, usize)) -> [f64; 4] {
    let at = |m: usize, n: usize, a: usize, b: usize| table[PAIR_INDEX[m][n]][PAIR_INDEX[a][b]];
    [at(i, p, j, q), at(i, q, j, p), at(j, p, i, q), at(j, q, i, p)]
}

/// Stiffness of one triangle: vertices, then edge bubbles 4λ_iλ_j; axis rule not yet applied.
///
/// Edge–edge entries are 16·Σ G·k·G over the two ends of each, vertex–edge ones need only the row sums K_m (eq. 8).
fn element_stiffness(k: &[Tensor; 6]) -> Packed {
    let table = contracted(k);
    // row[m][ab] = ∇λ_a·K_m·∇λ_b.
    let mut row = [[0.0; 6]; 3];
    for ab in 0..6 {
        row[0][ab] = table[0][ab] + table[3][ab] + table[5][ab];
        row[1][ab] = table[3][ab] + table[1][ab] + table[4][ab];
        row[2][ab] = table[5][ab] + table[4][ab] + table[2][ab];
    }
    let mut stiffness = [0.0; 21];
    for (ab, (a, b)) in PAIRS.into_iter().enumerate() {
        stiffness[packed(a, b)] = row[0][ab] + row[1][ab] + row[2][ab];
    }
    for (e, (i, j)) in LOCAL_EDGES.into_iter().enumerate() {
        for l in 0..3 {
            stiffness[packed(l, 3 + e)] =
                4.0 * (row[i][PAIR_INDEX[j][l]] + row[j][PAIR_INDEX[i][l]]);
        }
        for (f, other) in LOCAL_EDGES.into_iter().enumerate().skip(e) {
            let [ip, iq, jp, jq] = four(&table, (i, j), other);
            stiffness[packed(3 + e, 3 + f)] = 16.0 * (ip + iq + jp + jq);
        }
    }
    stiffness
}

/// Applies the axis rule: a half-axis edge (v, axis) gives −¼ of its row and column to v.
fn fold_axis(stiffness: &mut Packed, frame: &Frame) {
    for (e, (i, j)) in LOCAL_EDGES.into_iter().enumerate() {
        let v = match (frame.on_axis(i), frame.on_axis(j)) {
            (false, true) => i,
            (true, false) => j,
            _ => continue,
        };
        let edge = |k: usize| packed(k, 3 + e);
        // Twice into the diagonal: once by row and once by column, each from what the other has left.
        let own = stiffness[edge(v)];
        let bubble = stiffness[edge(3 + e)];
        stiffness[packed(v, v)] += -0.5 * own + 0.0625 * bubble;
        for k in (0..6).filter(|&k| k != v) {
            stiffness[packed(v, k)] -= 0.25 * stiffness[edge(k)];
        }
    }
}

/// Gram matrix of the Whitney forms w_ij = λ_i dλ_j − λ_j dλ_i and d_ij = λ_i dλ_j + λ_j dλ_i.
fn gram(c: &[Tensor; 6]) -> Packed {
    let table = contracted(c);
    let mut gram = [0.0; 21];
    for (e, one) in LOCAL_EDGES.into_iter().enumerate() {
        for (f, other) in LOCAL_EDGES.into_iter().enumerate() {
            let [ip, iq, jp, jq] = four(&table, one, other);
            if e <= f {
                gram[packed(e, f)] = ip - iq - jp + jq;
                gram[packed(3 + e, 3 + f)] = ip + iq + jp + jq;
            }
            gram[packed(e, 3 + f)] = ip + iq - jp - jq;
        }
    }
    gram
}

//! Multilevel preconditioner: symmetric Gauss–Seidel over all unknowns around a V-cycle on the leading block.
//!
//! The levels are the leading ("vertex") blocks of the matrices of earlier rounds; a new unknown interpolates from two
//! older ones. Why it works: DEVELOPERS.md, "Solver". Source of the idea: H. Yserentant, Numer. Math. 49 (1986) 379
//! (hierarchical splitting); J. Bramble, J. Pasciak, J. Xu, Math. Comp. 55 (1990) 1 (smoothing on every level).

use super::cg::{CgError, Convergence, Operator, Stop, Vectors, conjugate_gradients};
use super::degree::minimum_degree;
use super::ldl::Ldl;
use super::matrix::{Matrix, Storage, Swept, leading_block};
use nalgebra::DMatrix;
use nalgebra_sparse::factorization::CscCholesky;
use nalgebra_sparse::{CooMatrix, CscMatrix};

/// How an unknown that a finer level added follows from older unknowns: Σ weight·parent (weight 0: no parent).
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Interpolation {
    pub parents: [u32; 2],
    pub weights: [f64; 2],
}

/// The levels under the present matrix.
#[derive(Debug, Default)]
pub struct Hierarchy {
    coarse: Option<Coarse>,
    /// Leading blocks, level 1 upwards; level 0 is `coarse`.
    levels: Vec<Swept>,
    /// Number of unknowns on each level, 0 upwards.
    sizes: Vec<usize>,
    /// For every unknown of the finest level; those of level 0 are not read.
    interpolation: Vec<Interpolation>,
    /// Kept between solves; a solve takes it and puts it back.
    pub work: Workspace,
}

/// Vectors of one V-cycle, reused from call to call: solution and right-hand side per level.
#[derive(Debug, Default)]
pub struct Workspace {
    levels: Vec<[Vec<f64>; 2]>,
    /// Residual before restriction, correction after prolongation.
    transfer: Vec<f64>,
    /// Vectors of the conjugate gradients around it.
    pub vectors: Vectors,
    /// Arrays of the last matrix, for the next one.
    pub storage: Storage,
}

#[derive(Debug)]
struct Coarse {
    factor: Factor,
    /// new position → old
    order: Vec<usize>,
    /// Power of two that the matrix was multiplied by: a problem scaled by any power of two has the same factor, bit by bit,
    /// though square roots of odd powers round.
    scale: f64,
}

/// 2^e with 2^e ≤ |x| < 2^(e+1).
fn power_of_two_below(x: f64) -> f64 {
    f64::from_bits(x.to_bits() & 0x7FF0_0000_0000_0000)
}

impl Hierarchy {
    /// Adds a level (or replaces the finest one if its size is the same): the leading block `size` of `matrix`.
    ///
    /// `interpolation` lists all unknowns up to `size`; its older part must not change. Returns false when the coarsest
    /// block is not positive definite.
    pub fn set_level(
        &mut self,
        matrix: &Matrix,
        size: usize,
        interpolation: &[Interpolation],
    ) -> bool {
        let is_replacement = self.sizes.last() == Some(&size);
        if is_replacement {
            self.sizes.pop();
            if !self.sizes.is_empty() {
                self.levels.pop();
            }
        }
        self.interpolation.truncate(self.sizes.last().copied().unwrap_or(0));
        self.interpolation.extend_from_slice(&interpolation[self.interpolation.len()..size]);
        if self.sizes.is_empty() {
            self.coarse = Coarse::new(matrix, size);
            if self.coarse.is_none() {
                return false;
            }
        } else {
            self.levels.push(Swept::new(leading_block(matrix, size)));
        }
        self.sizes.push(size);
        true
    }

    /// Rebuilds every coarser level from the finest one, `matrix` being what [`Hierarchy::set_level`] last saw:
    /// Pᵀ A P with the interpolation P, level by level.
    ///
    /// The levels of earlier rounds are as good as long as the coefficients stay what they were; after a change of the
    /// tangent they are not (75 instead of 25 iterations were seen). Returns false when the coarsest level is not
    /// positive definite.
    pub fn renew(&mut self, matrix: &Matrix) -> bool {
        let Some(&finest) = self.sizes.last() else { return true };
        let mut block = leading_block(matrix, finest);
        for level in (1..self.sizes.len()).rev() {
            let coarser = self.projected(&block, self.sizes[level - 1]);
            self.levels[level - 1] = Swept::new(block);
            block = coarser;
        }
        self.coarse = Coarse::new(&block, self.sizes[0]);
        self.coarse.is_some()
    }

    /// Pᵀ A P for the first `n_coarse` unknowns; parents may be of the same level, so the rows of P are built in order.
    fn projected(&self, a: &Matrix, n_coarse: usize) -> Matrix {
        let n = a.rows();
        let mut rows: Vec<Vec<(u32, f64)>> = (0..n_coarse as u32).map(|i| vec![(i, 1.0)]).collect();
        for Interpolation { parents, weights } in &self.interpolation[n_coarse..n] {
            let mut row: Vec<(u32, f64)> = Vec::with_capacity(2);
            for k in (0..2).filter(|&k| weights[k] != 0.0) {
                for &(j, v) in &rows[parents[k] as usize] {
                    match row.iter_mut().find(|entry| entry.0 == j) {
                        Some(entry) => entry.1 += weights[k] * v,
                        None => row.push((j, weights[k] * v)),
                    }
                }
            }
            row.sort_unstable_by_key(|entry| entry.0);
            rows.push(row);
        }
        let mut start = vec![0];
        let (mut columns, mut values) = (Vec::with_capacity(2 * n), Vec::with_capacity(2 * n));
        for row in &rows {
            columns.extend(row.iter().map(|entry| entry.0));
            values.extend(row.iter().map(|entry| entry.1));
            start.push(columns.len());
        }
        let prolongation = Matrix::new((n, n_coarse), start, columns, values);
        let transposed = prolongation.transpose_view().to_csr();
        let mut product: Matrix = &transposed * &(a * &prolongation);
        // The product is symmetric to rounding; sweeps and ordering want it to the last bit.
        let mirrored: Matrix = product.transpose_view().to_csr();
        for (v, m) in product.data_mut().iter_mut().zip(mirrored.data()) {
            *v = 0.5 * (*v + m);
        }
        product
    }

    /// Room for one V-cycle with the present levels.
    fn fit(&self, work: &mut Workspace) {
        work.levels.resize_with(self.sizes.len(), Default::default);
        for (vectors, &n) in work.levels.iter_mut().zip(&self.sizes) {
            vectors.iter_mut().for_each(|v| v.resize(n, 0.0));
        }
    }

    /// One V-cycle for the finest level's right-hand side.
    fn v_cycle(&self, work: &mut Workspace) {
        let Workspace { levels, transfer, .. } = work;
        for level in (1..self.sizes.len()).rev() {
            let (coarser, finer) = levels.split_at_mut(level);
            let [x, b] = &mut finer[0];
            let matrix = &self.levels[level - 1];
            matrix.forward_from_zero(b, x);
            transfer.resize(x.len(), 0.0);
            matrix.residual_after_forward(x, transfer);
            restrict(&self.interpolation, self.sizes[level - 1], transfer);
            coarser[level - 1][1].copy_from_slice(&transfer[..self.sizes[level - 1]]);
        }
        if let Some(coarse) = &self.coarse {
            let [x, b] = &mut levels[0];
            coarse.solve(b, x);
        }
        for level in 1..self.sizes.len() {
            let (coarser, finer) = levels.split_at_mut(level);
            let [x, b] = &mut finer[0];
            transfer.clear();
            transfer.extend_from_slice(&coarser[level - 1][0]);
            prolong(&self.interpolation, x.len(), transfer);
            for (x, e) in x.iter_mut().zip(transfer.iter()) {
                *x += e;
            }
            self.levels[level - 1].backward(b, x);
        }
    }
}

/// A matrix whose leading block is the finest level of a hierarchy: what conjugate gradients work on.
pub struct Multilevel<'a> {
    matrix: &'a Swept,
    hierarchy: &'a Hierarchy,
    work: &'a mut Workspace,
}

impl<'a> Multilevel<'a> {
    /// Fits the workspace to the hierarchy.
    pub fn new(
        matrix: &'a Swept,
        hierarchy: &'a Hierarchy,
        work: &'a mut Workspace,
    ) -> Multilevel<'a> {
        hierarchy.fit(work);
        Multilevel { matrix, hierarchy, work }
    }

    /// Solves A x = b from the start value in `x`; `scale` as in [`conjugate_gradients`].
    pub fn solve(
        &mut self,
        b: &[f64],
        x: &mut [f64],
        stop: &Stop,
        scale: f64,
    ) -> Result<Convergence, CgError> {
        let mut vectors = std::mem::take(&mut self.work.vectors);
        let result = conjugate_gradients(self, b, x, stop, scale, &mut vectors);
        self.work.vectors = vectors;
        result
    }
}

impl Operator for Multilevel<'_> {
    fn multiply(&mut self, x: &[f64], y: &mut [f64]) {
        self.matrix.multiply(x, y);
    }

    fn precondition(&mut self, r: &[f64], z: &mut [f64], az: &mut [f64]) {
        self.matrix.forward_from_zero(r, z);
        let finest = self.hierarchy.sizes.len().checked_sub(1);
        if let Some(finest) = finest {
            self.matrix.residual_after_forward(z, &mut self.work.levels[finest][1]);
            self.hierarchy.v_cycle(self.work);
        }
        let correction = finest.map_or(&[][..], |finest| &self.work.levels[finest][0]);
        self.matrix.backward_with_product(correction, z, az);
    }
}

/// Transposed interpolation in place: youngest first, so that parents of the same round are served in turn.
fn restrict(interpolation: &[Interpolation], n_coarse: usize, v: &mut [f64]) {
    for i in (n_coarse..v.len()).rev() {
        let Interpolation { parents, weights } = interpolation[i];
        for k in 0..2 {
            if weights[k] != 0.0 {
                v[parents[k] as usize] += weights[k] * v[i];
            }
        }
    }
}

/// Interpolation in place, oldest first: lengthens `v` to `n`.
fn prolong(interpolation: &[Interpolation], n: usize, v: &mut Vec<f64>) {
    for Interpolation { parents, weights } in &interpolation[v.len()..n] {
        let sum = (0..2)
            .filter(|&k| weights[k] != 0.0)
            .map(|k| weights[k] * v[parents[k] as usize])
            .sum();
        v.push(sum);
    }
}

/// Unknowns up to which the library's Cholesky is at least as fast as our own factorisation.
const N_LIBRARY_MAX: usize = 800;

/// The coarsest factorisation, in the order of elimination.
#[derive(Debug)]
enum Factor {
    Library(CscCholesky<f64>),
    Own(Ldl),
}

impl Coarse {
    /// Factorises the leading block by minimum degree.
    fn new(matrix: &Matrix, size: usize) -> Option<Coarse> {
        let mut block = leading_block(matrix, size);
        let order = minimum_degree(&block);
        let scale = power_of_two_below(block.data().first().copied().unwrap_or(1.0)).recip();
        block.scale(scale);
        let factor = match size <= N_LIBRARY_MAX {
            true => Factor::Library(library_factor(&block, &order)?),
            false => Factor::Own(Ldl::new(&block, &order)?),
        };
        Some(Coarse { factor, order, scale })
    }

    fn solve(&self, b: &[f64], x: &mut [f64]) {
        let mut permuted = DMatrix::from_iterator(b.len(), 1, self.order.iter().map(|&old| b[old]));
        match &self.factor {
            Factor::Library(factor) => factor.solve_mut(&mut permuted),
            Factor::Own(factor) => factor.solve(permuted.as_mut_slice()),
        }
        for (new, &old) in self.order.iter().enumerate() {
            x[old] = self.scale * permuted[(new, 0)];
        }
    }
}

/// Cholesky of the reordered block by nalgebra-sparse.
fn library_factor(block: &Matrix, order: &[usize]) -> Option<CscCholesky<f64>> {
    let mut position = vec![0; order.len()];
    order.iter().enumerate().for_each(|(new, &old)| position[old] = new);
    let mut triplets = CooMatrix::new(order.len(), order.len());
    for (i, row) in block.outer_iterator().enumerate() {
        for (j, &v) in row.iter() {
            triplets.push(position[i], position[j], v);
        }
    }
    CscCholesky::factor(&CscMatrix::from(&triplets)).ok()
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Stiffness of a string of n unknowns between fixed ends, by hats on a path of equal steps.
    fn string(n: usize, order: &[usize]) -> Matrix {
        let mut dense = vec![vec![0.0; n]; n];
        for k in 0..n {
            dense[order[k]][order[k]] += 2.0 * (n + 1) as f64;
            if k + 1 < n {
                dense[order[k]][order[k + 1]] -= (n + 1) as f64;
                dense[order[k + 1]][order[k]] -= (n + 1) as f64;
            }
        }
        let (mut start, mut columns, mut values) = (vec![0], vec![], vec![]);
        for row in &dense {
            for (j, v) in row.iter().enumerate().filter(|(_, v)| **v != 0.0) {
                columns.push(j as u32);
                values.push(*v);
            }
            start.push(columns.len());
        }
        Matrix::new((n, n), start, columns, values)
    }

    #[test]
    fn a_projected_string_is_the_string_of_half_the_unknowns() {
        // Three coarse unknowns in order, then the four midpoints: path 3 0 4 1 5 2 6.
        let half = |a: u32, b: u32| Interpolation { parents: [a, b], weights: [0.5, 0.5] };
        let end = |a: u32| Interpolation { parents: [a, 0], weights: [0.5, 0.0] };
        let none = Interpolation::default();
        let interpolation = vec![none, none, none, end(0), half(0, 1), half(1, 2), end(2)];
        let mut hierarchy = Hierarchy::default();
        assert!(hierarchy.set_level(&string(3, &[0, 1, 2]), 3, &interpolation));
        let fine = string(7, &[3, 0, 4, 1, 5, 2, 6]);
        assert!(hierarchy.set_level(&fine, 7, &interpolation));
        let projected = hierarchy.projected(&fine, 3);
        let wanted = string(3, &[0, 1, 2]);
        for (i, row) in wanted.outer_iterator().enumerate() {
            for (j, v) in row.iter() {
                assert!((projected.get(i, j).unwrap() - v).abs() < 1e-12);
            }
        }
        assert!(hierarchy.renew(&fine));
    }
}

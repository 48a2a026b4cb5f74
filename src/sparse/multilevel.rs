//! Multilevel preconditioner: symmetric Gauss–Seidel over all unknowns around a V-cycle on the leading block.
//!
//! The levels are the leading ("vertex") blocks of the matrices of earlier rounds; a new unknown interpolates from two
//! older ones. Why it works: DEVELOPERS.md, "Solver". Source of the idea: H. Yserentant, Numer. Math. 49 (1986) 379
//! (hierarchical splitting); J. Bramble, J. Pasciak, J. Xu, Math. Comp. 55 (1990) 1 (smoothing on every level).

use super::cg::{CgError, Convergence, Operator, Stop, Vectors, conjugate_gradients};
use super::dissection::nested_dissection;
use super::matrix::{Matrix, Swept, leading_block};
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

/// Vectors of one V-cycle, reused from call to call: solution, right-hand side and scratch per level.
#[derive(Debug, Default)]
pub struct Workspace {
    levels: Vec<[Vec<f64>; 3]>,
    /// Residual before restriction, correction after prolongation.
    transfer: Vec<f64>,
    /// Vectors of the conjugate gradients around it.
    pub vectors: Vectors,
}

#[derive(Debug)]
struct Coarse {
    factor: CscCholesky<f64>,
    /// new position → old
    order: Vec<usize>,
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
            let [x, b, _] = &mut finer[0];
            let matrix = &self.levels[level - 1];
            matrix.forward_from_zero(b, x);
            transfer.resize(x.len(), 0.0);
            matrix.residual_after_forward(x, transfer);
            restrict(&self.interpolation, self.sizes[level - 1], transfer);
            coarser[level - 1][1].copy_from_slice(&transfer[..self.sizes[level - 1]]);
        }
        if let Some(coarse) = &self.coarse {
            let [x, b, _] = &mut levels[0];
            coarse.solve(b, x);
        }
        for level in 1..self.sizes.len() {
            let (coarser, finer) = levels.split_at_mut(level);
            let [x, b, rest] = &mut finer[0];
            transfer.clear();
            transfer.extend_from_slice(&coarser[level - 1][0]);
            prolong(&self.interpolation, x.len(), transfer);
            for (x, e) in x.iter_mut().zip(transfer.iter()) {
                *x += e;
            }
            self.levels[level - 1].backward(b, x, rest);
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
        if let Some(finest) = self.hierarchy.sizes.len().checked_sub(1) {
            self.matrix.residual_after_forward(z, &mut self.work.levels[finest][1]);
            self.hierarchy.v_cycle(self.work);
            for (z, e) in z.iter_mut().zip(&self.work.levels[finest][0]) {
                *z += e;
            }
        }
        self.matrix.backward(r, z, az);
        self.matrix.add_lower(z, az);
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

impl Coarse {
    /// Factorises the leading block by nested dissection (the library's Cholesky keeps the given order).
    fn new(matrix: &Matrix, size: usize) -> Option<Coarse> {
        let block = leading_block(matrix, size);
        let order = nested_dissection(&block);
        let mut position = vec![0; size];
        for (new, &old) in order.iter().enumerate() {
            position[old] = new;
        }
        let mut triplets = CooMatrix::new(size, size);
        for (i, row) in block.outer_iterator().enumerate() {
            for (j, &v) in row.iter() {
                triplets.push(position[i], position[j], v);
            }
        }
        let factor = CscCholesky::factor(&CscMatrix::from(&triplets)).ok()?;
        Some(Coarse { factor, order })
    }

    fn solve(&self, b: &[f64], x: &mut [f64]) {
        let mut permuted = DMatrix::from_iterator(b.len(), 1, self.order.iter().map(|&old| b[old]));
        self.factor.solve_mut(&mut permuted);
        for (new, &old) in self.order.iter().enumerate() {
            x[old] = permuted[(new, 0)];
        }
    }
}

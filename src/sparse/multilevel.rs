//! Multilevel preconditioner: symmetric Gauss–Seidel over all unknowns around a V-cycle on the leading block.
//!
//! The levels are the leading ("vertex") blocks of the matrices of earlier rounds; a new unknown interpolates from two
//! older ones. Why it works: DEVELOPERS.md, "Solver". Source of the idea: H. Yserentant, Numer. Math. 49 (1986) 379
//! (hierarchical splitting); J. Bramble, J. Pasciak, J. Xu, Math. Comp. 55 (1990) 1 (smoothing on every level).

use super::matrix::{Matrix, Rows};
use nalgebra::DMatrix;
use nalgebra_sparse::factorization::CscCholesky;
use nalgebra_sparse::{CooMatrix, CscMatrix};
use sprs::linalg::reverse_cuthill_mckee;

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
    levels: Vec<Matrix>,
    /// Number of unknowns on each level, 0 upwards.
    sizes: Vec<usize>,
    /// For every unknown of the finest level; those of level 0 are not read.
    interpolation: Vec<Interpolation>,
}

/// Vectors of one V-cycle, reused from call to call: solution and right-hand side per level.
#[derive(Debug, Default)]
pub struct Workspace {
    levels: Vec<[Vec<f64>; 2]>,
    /// Residual before restriction, correction after prolongation.
    transfer: Vec<f64>,
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
            self.levels.push(leading_block(matrix, size));
        }
        self.sizes.push(size);
        true
    }

    /// Room for [`Hierarchy::precondition`] with the present levels.
    pub fn workspace(&self) -> Workspace {
        let levels = self.sizes.iter().map(|&n| [vec![0.0; n], vec![0.0; n]]).collect();
        Workspace { levels, transfer: Vec::new() }
    }

    /// z ≈ A⁻¹ r for the whole matrix whose leading block is the finest level.
    pub fn precondition(&self, matrix: &Matrix, work: &mut Workspace, r: &[f64], z: &mut [f64]) {
        let rows = Rows::of(matrix);
        let Some(finest) = self.sizes.len().checked_sub(1) else { return z.copy_from_slice(r) };
        forward_sweep(rows, r, z);
        residual_after_forward(rows, z, &mut work.levels[finest][1]);
        self.v_cycle(work);
        for (z, e) in z.iter_mut().zip(&work.levels[finest][0]) {
            *z += e;
        }
        backward_sweep(rows, r, z);
    }

    /// One V-cycle for the finest level's right-hand side.
    fn v_cycle(&self, work: &mut Workspace) {
        let Workspace { levels, transfer } = work;
        for level in (1..self.sizes.len()).rev() {
            let (coarser, finer) = levels.split_at_mut(level);
            let [x, b] = &mut finer[0];
            let rows = Rows::of(&self.levels[level - 1]);
            forward_sweep(rows, b, x);
            transfer.resize(x.len(), 0.0);
            residual_after_forward(rows, x, transfer);
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
            backward_sweep(Rows::of(&self.levels[level - 1]), b, x);
        }
    }
}

/// Gauss–Seidel from zero, first row to last.
fn forward_sweep(rows: Rows, b: &[f64], x: &mut [f64]) {
    for i in 0..rows.n_rows() {
        let (columns, values) = rows.row(i);
        let mut sum = b[i];
        for (&j, v) in columns.iter().zip(values) {
            let j = j as usize;
            if j < i {
                sum -= v * x[j];
            } else {
                // Columns are sorted: the first one not below i is the diagonal.
                x[i] = sum / v;
                break;
            }
        }
    }
}

/// Residual of the leading rows after a forward sweep from zero: −(strict upper part)·x.
fn residual_after_forward(rows: Rows, x: &[f64], residual: &mut [f64]) {
    for (i, residual) in residual.iter_mut().enumerate() {
        let (columns, values) = rows.row(i);
        let mut sum = 0.0;
        for (&j, v) in columns.iter().zip(values).rev() {
            if j as usize <= i {
                break;
            }
            sum -= v * x[j as usize];
        }
        *residual = sum;
    }
}

/// Gauss–Seidel from x, last row to first.
fn backward_sweep(rows: Rows, b: &[f64], x: &mut [f64]) {
    for i in (0..rows.n_rows()).rev() {
        let (columns, values) = rows.row(i);
        let (mut sum, mut diagonal) = (b[i], 1.0);
        for (&j, v) in columns.iter().zip(values) {
            if j as usize == i {
                diagonal = *v;
            } else {
                sum -= v * x[j as usize];
            }
        }
        x[i] = sum / diagonal;
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

/// Leading n × n block.
fn leading_block(a: &Matrix, n: usize) -> Matrix {
    let rows = Rows::of(a);
    let (mut start, mut columns, mut values) = (vec![0usize], Vec::new(), Vec::new());
    start.reserve(n);
    for i in 0..n {
        let (cols, vals) = rows.row(i);
        let keep = cols.partition_point(|&j| (j as usize) < n);
        columns.extend_from_slice(&cols[..keep]);
        values.extend_from_slice(&vals[..keep]);
        start.push(columns.len());
    }
    Matrix::new((n, n), start, columns, values)
}

impl Coarse {
    /// Factorises the leading block in reverse Cuthill–McKee order (the library's Cholesky keeps the given order).
    fn new(matrix: &Matrix, size: usize) -> Option<Coarse> {
        let block = leading_block(matrix, size);
        let order: Vec<usize> =
            reverse_cuthill_mckee(block.view()).perm.vec().iter().map(|&i| i as usize).collect();
        let mut position = vec![0; size];
        for (new, &old) in order.iter().enumerate() {
            position[old] = new;
        }
        let mut triplets = CooMatrix::new(size, size);
        let rows = Rows::of(&block);
        for i in 0..size {
            let (columns, values) = rows.row(i);
            for (&j, &v) in columns.iter().zip(values) {
                triplets.push(position[i], position[j as usize], v);
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

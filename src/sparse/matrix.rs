//! The one matrix type (sprs CSR with 32-bit columns) and the sweeps that run over its slices.

use rayon::prelude::*;
use sprs::CsMatI;

/// Sparse symmetric matrix, CSR, columns sorted within a row.
pub type Matrix = CsMatI<f64, u32, usize>;

/// The arrays of a matrix, handed from one that is done with to the next: fresh memory costs more than its filling.
#[derive(Debug, Default)]
pub struct Storage {
    pub start: Vec<usize>,
    pub columns: Vec<u32>,
    pub values: Vec<f64>,
}

/// Rows above which a product is shared between threads; below, the hand-over costs more than it gives.
const N_ROWS_PARALLEL: usize = 40_000;
/// Rows a thread takes at a time.
const N_ROWS_CHUNK: usize = 4096;

/// A matrix with the places of its diagonal, ready for products and Gauss–Seidel sweeps.
#[derive(Debug, Clone)]
pub struct Swept {
    matrix: Matrix,
    /// Position of each row's diagonal in the value array.
    diagonal: Vec<usize>,
    inverse_diagonal: Vec<f64>,
}

impl Swept {
    /// Finds the diagonal. Panics where a row has none: assembly always makes one.
    pub fn new(matrix: Matrix) -> Swept {
        let start = matrix.indptr().into_raw_storage();
        let columns = matrix.indices();
        let diagonal: Vec<usize> = (start.windows(2).enumerate())
            .map(|(i, ends)| {
                let row = &columns[ends[0]..ends[1]];
                let place = row.partition_point(|&j| (j as usize) < i);
                assert!(row.get(place) == Some(&(i as u32)), "row {i} has no diagonal");
                ends[0] + place
            })
            .collect();
        let inverse_diagonal = diagonal.iter().map(|&k| 1.0 / matrix.data()[k]).collect();
        Swept { matrix, diagonal, inverse_diagonal }
    }

    /// The arrays, for the next matrix.
    pub fn into_storage(self) -> Storage {
        let (start, columns, values) = self.matrix.into_raw_storage();
        Storage { start, columns, values }
    }

    /// The matrix itself.
    pub fn matrix(&self) -> &Matrix {
        &self.matrix
    }

    /// Number of rows.
    pub fn n_rows(&self) -> usize {
        self.diagonal.len()
    }

    /// y = A x.
    pub fn multiply(&self, x: &[f64], y: &mut [f64]) {
        let start = self.matrix.indptr().into_raw_storage();
        self.for_rows(y, |i, y| *y = self.dot(start[i], start[i + 1], x));
    }

    /// Calls `row` for each entry of y; large matrices share the rows between threads.
    fn for_rows(&self, y: &mut [f64], row: impl Fn(usize, &mut f64) + Sync) {
        if y.len() < N_ROWS_PARALLEL || rayon::current_num_threads() == 1 {
            y.iter_mut().enumerate().for_each(|(i, y)| row(i, y));
        } else {
            y.par_chunks_mut(N_ROWS_CHUNK).enumerate().for_each(|(chunk, y)| {
                y.iter_mut().enumerate().for_each(|(k, y)| row(chunk * N_ROWS_CHUNK + k, y));
            });
        }
    }

    /// Σ a·x over the entries `from..to`.
    #[inline]
    fn dot(&self, from: usize, to: usize, x: &[f64]) -> f64 {
        let (columns, values) = (&self.matrix.indices()[from..to], &self.matrix.data()[from..to]);
        let mut sum = 0.0;
        for (&j, v) in columns.iter().zip(values) {
            sum += v * x[j as usize];
        }
        sum
    }

    /// Gauss–Seidel from zero, first row to last: (D + L) x = b.
    pub fn forward_from_zero(&self, b: &[f64], x: &mut [f64]) {
        let start = self.matrix.indptr().into_raw_storage();
        for i in 0..self.n_rows() {
            x[i] = (b[i] - self.dot(start[i], self.diagonal[i], x)) * self.inverse_diagonal[i];
        }
    }

    /// Residual of the leading rows after [`Swept::forward_from_zero`]: −(strictly upper part)·x.
    pub fn residual_after_forward(&self, x: &[f64], residual: &mut [f64]) {
        let start = self.matrix.indptr().into_raw_storage();
        for (i, residual) in residual.iter_mut().enumerate() {
            *residual = -self.dot(self.diagonal[i] + 1, start[i + 1], x);
        }
    }

    /// Gauss–Seidel from x, last row to first: (D + U) x_new = b − L x_old.
    pub fn backward(&self, b: &[f64], x: &mut [f64]) {
        let start = self.matrix.indptr().into_raw_storage();
        for i in (0..self.n_rows()).rev() {
            let place = self.diagonal[i];
            let rest = b[i] - self.dot(start[i], place, x);
            x[i] = (rest - self.dot(place + 1, start[i + 1], x)) * self.inverse_diagonal[i];
        }
    }

    /// The backward sweep after [`Swept::forward_from_zero`] and a correction of the leading unknowns by `e`, with the product
    /// A·x_new in one go.
    ///
    /// The forward sweep has left L x + D x = b, so b − L (x + e) = D x − L e and b is not needed; the rest of the product,
    /// L x_new, is added column by column as soon as an unknown is known.
    pub fn backward_with_product(&self, e: &[f64], x: &mut [f64], product: &mut [f64]) {
        let start = self.matrix.indptr().into_raw_storage();
        let (columns, values) = (self.matrix.indices(), self.matrix.data());
        for i in (0..self.n_rows()).rev() {
            let place = self.diagonal[i];
            let lower = start[i]..place;
            let upper = place + 1..start[i + 1];
            let mut rest = values[place] * x[i];
            // Columns ascend: those that `e` changes come first.
            for (&j, v) in columns[lower.clone()].iter().zip(&values[lower]) {
                let Some(e) = e.get(j as usize) else { break };
                rest -= v * e;
            }
            let new = (rest - self.dot(upper.start, upper.end, x)) * self.inverse_diagonal[i];
            x[i] = new;
            product[i] = rest;
            for (&j, v) in columns[upper.clone()].iter().zip(&values[upper]) {
                product[j as usize] += v * new;
            }
        }
    }
}

/// Leading n × n block.
pub fn leading_block(a: &Matrix, n: usize) -> Matrix {
    let from = a.indptr().into_raw_storage();
    let mut start = Vec::with_capacity(n + 1);
    start.push(0usize);
    // A vertex block has about a quarter of the entries of its rows.
    let (mut columns, mut values) = (Vec::with_capacity(8 * n), Vec::with_capacity(8 * n));
    for i in 0..n {
        let row = &a.indices()[from[i]..from[i + 1]];
        let end = from[i] + row.partition_point(|&j| (j as usize) < n);
        columns.extend_from_slice(&a.indices()[from[i]..end]);
        values.extend_from_slice(&a.data()[from[i]..end]);
        start.push(columns.len());
    }
    Matrix::new((n, n), start, columns, values)
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The second difference on n points, plus a little.
    fn sample(n: usize) -> Swept {
        let mut triplets = sprs::TriMatI::<f64, u32>::new((n, n));
        for i in 0..n {
            triplets.add_triplet(i, i, 2.5 + 0.1 * i as f64);
            if 0 < i {
                triplets.add_triplet(i, i - 1, -1.0);
                triplets.add_triplet(i - 1, i, -1.0);
            }
        }
        Swept::new(triplets.to_csr())
    }

    #[test]
    fn sweeps_leave_the_residual_and_the_product() {
        let a = sample(9);
        let b: Vec<f64> = (0..9).map(|i| (1.3 * i as f64).sin()).collect();
        let (mut x, mut y, mut residual) = (vec![0.0; 9], vec![0.0; 9], vec![0.0; 9]);
        a.forward_from_zero(&b, &mut x);
        a.residual_after_forward(&x, &mut residual);
        a.multiply(&x, &mut y);
        for i in 0..9 {
            assert!((b[i] - y[i] - residual[i]).abs() < 1e-15);
        }
        let correction = [0.1, -0.3, 0.0, 0.2];
        let mut corrected = x.clone();
        corrected.iter_mut().zip(correction).for_each(|(x, e)| *x += e);
        a.backward(&b, &mut corrected);
        let mut product = vec![0.0; 9];
        a.backward_with_product(&correction, &mut x, &mut product);
        a.multiply(&x, &mut y);
        for i in 0..9 {
            assert!((x[i] - corrected[i]).abs() < 1e-15);
            assert!((product[i] - y[i]).abs() < 1e-15);
        }
    }

    #[test]
    fn leading_block_keeps_the_corner() {
        let block = leading_block(sample(9).matrix(), 4);
        assert_eq!(block.shape(), (4, 4));
        assert_eq!(block.nnz(), 10);
        assert_eq!(block.get(3, 3), sample(9).matrix().get(3, 3));
    }
}

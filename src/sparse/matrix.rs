//! The one matrix type (sprs CSR with 32-bit columns) and the kernels that run over its slices.

use rayon::prelude::*;
use sprs::CsMatI;

/// Sparse symmetric matrix, CSR, columns sorted within a row.
pub type Matrix = CsMatI<f64, u32, usize>;

/// Rows above which a product is shared between threads; below, the hand-over costs more than it gives.
const N_ROWS_PARALLEL: usize = 40_000;
/// Rows a thread takes at a time.
const N_ROWS_CHUNK: usize = 4096;

/// y = A x.
pub fn multiply(a: &Matrix, x: &[f64], y: &mut [f64]) {
    let view = Rows::of(a);
    if view.n_rows() < N_ROWS_PARALLEL || rayon::current_num_threads() == 1 {
        for (i, y) in y.iter_mut().enumerate() {
            *y = view.dot(i, x);
        }
    } else {
        y.par_chunks_mut(N_ROWS_CHUNK).enumerate().for_each(|(chunk, y)| {
            for (k, y) in y.iter_mut().enumerate() {
                *y = view.dot(chunk * N_ROWS_CHUNK + k, x);
            }
        });
    }
}

/// Borrowed slices of a matrix: the hot loops index these, not the matrix.
#[derive(Debug, Clone, Copy)]
pub struct Rows<'a> {
    start: &'a [usize],
    columns: &'a [u32],
    values: &'a [f64],
}

impl<'a> Rows<'a> {
    /// Slices of `a`.
    pub fn of(a: &'a Matrix) -> Rows<'a> {
        Rows { start: a.indptr().into_raw_storage(), columns: a.indices(), values: a.data() }
    }

    /// Number of rows.
    pub fn n_rows(&self) -> usize {
        self.start.len() - 1
    }

    /// Columns and values of row i.
    #[inline]
    pub fn row(&self, i: usize) -> (&'a [u32], &'a [f64]) {
        let range = self.start[i]..self.start[i + 1];
        (&self.columns[range.clone()], &self.values[range])
    }

    #[inline]
    fn dot(&self, i: usize, x: &[f64]) -> f64 {
        let (columns, values) = self.row(i);
        columns.iter().zip(values).map(|(&j, v)| v * x[j as usize]).sum()
    }
}

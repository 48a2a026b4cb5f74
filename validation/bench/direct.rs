//! A general sparse Cholesky (faer, fill-reducing order AMD, one thread) on the same matrix, as the measure of our solver.

use faer::dyn_stack::{MemBuffer, MemStack};
use faer::sparse::linalg::cholesky::{LltRef, SymmetricOrdering, factorize_symbolic_cholesky};
use faer::sparse::{SparseColMat, SymbolicSparseColMat};
use faer::{Conj, MatMut, Par, Side};
use gapwright::sparse::Matrix;
use std::time::Instant;

/// Solution and what it took.
#[derive(Debug, Clone)]
pub struct Direct {
    pub x: Vec<f64>,
    /// Order and symbolic factor, numeric factor, two triangular solves [s].
    pub seconds: [f64; 3],
    /// Values in the factor.
    pub n_factor: usize,
}

impl Direct {
    /// All three steps [s].
    pub fn total(&self) -> f64 {
        self.seconds.iter().sum()
    }
}

/// The matrix as faer holds it: columns of a symmetric matrix are its rows.
pub fn columns(matrix: &Matrix) -> SparseColMat<usize, f64> {
    let n = matrix.rows();
    let start = matrix.indptr().into_raw_storage().to_vec();
    let rows = matrix.indices().iter().map(|&j| j as usize).collect();
    let pattern = SymbolicSparseColMat::new_checked(n, n, start, None, rows);
    SparseColMat::new(pattern, matrix.data().to_vec())
}

/// Factorises and solves once; the conversion is not booked.
pub fn solve(matrix: &SparseColMat<usize, f64>, load: &[f64]) -> Direct {
    let start = Instant::now();
    let symbolic = factorize_symbolic_cholesky(
        matrix.symbolic(),
        Side::Lower,
        SymmetricOrdering::Amd,
        Default::default(),
    )
    .unwrap();
    let ordered = start.elapsed().as_secs_f64();

    let start = Instant::now();
    let mut values = vec![0.0; symbolic.len_val()];
    let scratch = symbolic.factorize_numeric_llt_scratch::<f64>(Par::Seq, Default::default());
    let mut memory = MemBuffer::new(scratch);
    symbolic
        .factorize_numeric_llt::<f64>(
            &mut values,
            matrix.as_ref(),
            Side::Lower,
            Default::default(),
            Par::Seq,
            MemStack::new(&mut memory),
            Default::default(),
        )
        .unwrap();
    let factorised = start.elapsed().as_secs_f64();

    let start = Instant::now();
    let mut x = load.to_vec();
    let factor = LltRef::<usize, f64>::new(&symbolic, &values);
    let mut memory = MemBuffer::new(symbolic.solve_in_place_scratch::<f64>(1, Par::Seq));
    let right = MatMut::from_column_major_slice_mut(&mut x, load.len(), 1);
    factor.solve_in_place_with_conj(Conj::No, right, Par::Seq, MemStack::new(&mut memory));
    let solved = start.elapsed().as_secs_f64();
    Direct { x, seconds: [ordered, factorised, solved], n_factor: values.len() }
}

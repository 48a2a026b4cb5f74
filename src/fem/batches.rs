//! Work on consecutive pieces of an array, a few at a time: threads share a batch, its results are taken in order.
//!
//! Results of a batch are consumed while they are still in the cache, and no second array of the whole length exists.

use rayon::prelude::*;

/// Calls `make` for the pieces 0..n and `take` with each piece and its result, in order; a batch of `make` runs on all threads.
pub fn in_order<T: Send>(
    n: usize,
    make: impl Fn(usize) -> T + Sync,
    mut take: impl FnMut(usize, T),
) {
    /// Pieces a thread gets in one batch: enough to even out their work.
    const N_PIECES: usize = 4;
    let n_threads = rayon::current_num_threads();
    if n_threads == 1 {
        return (0..n).for_each(|piece| take(piece, make(piece)));
    }
    let n_batch = N_PIECES * n_threads;
    for first in (0..n).step_by(n_batch) {
        let batch = first..n.min(first + n_batch);
        let made: Vec<T> = batch.clone().into_par_iter().map(&make).collect();
        batch.zip(made).for_each(|(piece, result)| take(piece, result));
    }
}

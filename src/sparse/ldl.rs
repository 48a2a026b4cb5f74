//! LDLᵀ factorisation of a large coarsest level, row by row along the elimination tree.
//!
//! The library's Cholesky takes over ten seconds and gigabytes at 1e4 unknowns, this one some tens of milliseconds; below a
//! thousand they are alike. Method: T. A. Davis, ACM Trans. Math. Softw. 31 (2005) 587 (up-looking LDLᵀ; from memory).

use super::matrix::Matrix;

/// Marks a root of the elimination tree.
const ROOT: u32 = u32::MAX;

/// Unit lower triangular factor by columns, and the diagonal, in the order of elimination.
#[derive(Debug)]
pub struct Ldl {
    start: Vec<usize>,
    rows: Vec<u32>,
    values: Vec<f64>,
    diagonal: Vec<f64>,
}

/// Row k of the reordered matrix up to its diagonal: (new column, value).
struct Reordered<'a> {
    matrix: &'a Matrix,
    /// new position → old
    order: &'a [usize],
    /// old → new
    position: Vec<u32>,
}

impl Reordered<'_> {
    fn lower_row(&self, k: usize) -> impl Iterator<Item = (usize, f64)> + '_ {
        let start = self.matrix.indptr().into_raw_storage();
        let range = start[self.order[k]]..start[self.order[k] + 1];
        let (columns, values) = (&self.matrix.indices()[range.clone()], &self.matrix.data()[range]);
        let entries =
            columns.iter().zip(values).map(|(&j, &v)| (self.position[j as usize] as usize, v));
        entries.filter(move |&(j, _)| j <= k)
    }
}

impl Ldl {
    /// Factorises the matrix in the given order (new → old). `None` when it is not positive definite.
    pub fn new(matrix: &Matrix, order: &[usize]) -> Option<Ldl> {
        let n = order.len();
        let mut position = vec![0u32; n];
        order.iter().enumerate().for_each(|(new, &old)| position[old] = new as u32);
        let reordered = Reordered { matrix, order, position };
        let (parent, start) = elimination_tree(&reordered, n);
        let n_entries = start[n];
        let mut ldl = Ldl {
            start,
            rows: vec![0; n_entries],
            values: vec![0.0; n_entries],
            diagonal: vec![0.0; n],
        };
        let mut row =
            RowWork { y: vec![0.0; n], seen: vec![ROOT; n], pattern: Vec::new(), path: Vec::new() };
        let mut filled = ldl.start.clone();
        (0..n).all(|k| ldl.eliminate(k, &reordered, &parent, &mut row, &mut filled)).then_some(ldl)
    }

    /// Row k of L: solves with the rows above, in the order of the elimination tree.
    fn eliminate(
        &mut self,
        k: usize,
        reordered: &Reordered,
        parent: &[u32],
        row: &mut RowWork,
        filled: &mut [usize],
    ) -> bool {
        row.gather(k, reordered, parent);
        let mut d = std::mem::take(&mut row.y[k]);
        while let Some(i) = row.pattern.pop() {
            let i = i as usize;
            let y = std::mem::take(&mut row.y[i]);
            for p in self.start[i]..filled[i] {
                row.y[self.rows[p] as usize] -= self.values[p] * y;
            }
            let l = y / self.diagonal[i];
            d -= l * y;
            self.rows[filled[i]] = k as u32;
            self.values[filled[i]] = l;
            filled[i] += 1;
        }
        self.diagonal[k] = d;
        0.0 < d
    }

    /// Solves L D Lᵀ x = b in place, in the order of elimination.
    pub fn solve(&self, x: &mut [f64]) {
        let column = |j: usize| self.start[j]..self.start[j + 1];
        for j in 0..x.len() {
            for p in column(j) {
                x[self.rows[p] as usize] -= self.values[p] * x[j];
            }
        }
        for (x, d) in x.iter_mut().zip(&self.diagonal) {
            *x /= d;
        }
        for j in (0..x.len()).rev() {
            let sum: f64 = column(j).map(|p| self.values[p] * x[self.rows[p] as usize]).sum();
            x[j] -= sum;
        }
    }
}

/// Parent of each column, and where each column of L starts.
fn elimination_tree(reordered: &Reordered, n: usize) -> (Vec<u32>, Vec<usize>) {
    let (mut parent, mut seen, mut start) = (vec![ROOT; n], vec![ROOT; n], vec![0usize; n + 1]);
    for k in 0..n {
        seen[k] = k as u32;
        for (j, _) in reordered.lower_row(k) {
            let mut i = j;
            while seen[i] != k as u32 {
                if parent[i] == ROOT {
                    parent[i] = k as u32;
                }
                start[i + 1] += 1;
                seen[i] = k as u32;
                i = parent[i] as usize;
            }
        }
    }
    for k in 0..n {
        start[k + 1] += start[k];
    }
    (parent, start)
}

/// Room for one row.
struct RowWork {
    y: Vec<f64>,
    seen: Vec<u32>,
    /// Columns of the row, last to be used first.
    pattern: Vec<u32>,
    path: Vec<u32>,
}

impl RowWork {
    /// Values of row k of the matrix, and the columns that its row of L will fill.
    fn gather(&mut self, k: usize, reordered: &Reordered, parent: &[u32]) {
        self.seen[k] = k as u32;
        for (j, value) in reordered.lower_row(k) {
            self.y[j] += value;
            self.path.clear();
            let mut i = j;
            while self.seen[i] != k as u32 {
                self.path.push(i as u32);
                self.seen[i] = k as u32;
                i = parent[i] as usize;
            }
            // A path found later ends below an earlier one: it is used first, from its lower end up, so it lies on top.
            self.pattern.extend(self.path.iter().rev());
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::sparse::degree::minimum_degree;

    #[test]
    fn solves_a_grid_to_rounding_in_the_order_of_minimum_degree() {
        let (m, n) = (25, 625);
        let mut triplets = sprs::TriMatI::<f64, u32>::new((n, n));
        for x in 0..m {
            for y in 0..m {
                triplets.add_triplet(x * m + y, x * m + y, 4.1 + 0.01 * x as f64);
                for (dx, dy) in [(1, 0), (0, 1)] {
                    if x + dx < m && y + dy < m {
                        let (a, b) = (x * m + y, (x + dx) * m + y + dy);
                        triplets.add_triplet(a, b, -1.0);
                        triplets.add_triplet(b, a, -1.0);
                    }
                }
            }
        }
        let matrix: Matrix = triplets.to_csr();
        let order = minimum_degree(&matrix);
        let exact: Vec<f64> = (0..n).map(|i| (0.37 * i as f64).sin()).collect();
        let mut b = vec![0.0; n];
        crate::sparse::Swept::new(matrix.clone()).multiply(&exact, &mut b);
        let mut x: Vec<f64> = order.iter().map(|&old| b[old]).collect();
        Ldl::new(&matrix, &order).unwrap().solve(&mut x);
        for (new, &old) in order.iter().enumerate() {
            assert!((x[new] - exact[old]).abs() < 1e-13, "{old}");
        }
    }

    #[test]
    fn an_indefinite_matrix_has_no_factor() {
        let mut triplets = sprs::TriMatI::<f64, u32>::new((2, 2));
        for (i, j, v) in [(0, 0, 1.0), (1, 1, 1.0), (0, 1, 2.0), (1, 0, 2.0)] {
            triplets.add_triplet(i, j, v);
        }
        assert!(Ldl::new(&triplets.to_csr(), &[0, 1]).is_none());
    }
}

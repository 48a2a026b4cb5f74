//! Fill-reducing order for the coarsest factorisation: nested dissection by level sets.
//!
//! Source: A. George, J. Liu, Computer Solution of Large Sparse Positive Definite Systems (1981), ch. 8 (from memory).

use super::matrix::Matrix;

/// Sets of this size are not divided further: their own fill is small.
const N_LEAF: usize = 48;
/// Walks to find a far end of a set; each lengthens the level structure, few help.
const N_WALKS: usize = 3;

/// Order of elimination: new position → old. Separators come last, for each half again.
pub fn nested_dissection(matrix: &Matrix) -> Vec<usize> {
    let n = matrix.rows();
    let mut search = Search { matrix, set_of: vec![0; n], level: vec![u32::MAX; n] };
    let mut n_sets = 1;
    let mut reversed: Vec<usize> = Vec::with_capacity(n);
    let mut stack: Vec<(u32, Vec<usize>)> = vec![(0, (0..n).collect())];
    // Every division takes at least the separator out, so the stack empties.
    while let Some((id, set)) = stack.pop() {
        if set.len() <= N_LEAF {
            reversed.extend(set);
            continue;
        }
        let levels = search.levels(id, &set);
        let Some(middle) = best_level(&levels) else {
            reversed.extend(set);
            continue;
        };
        let [mut before, mut after] = [Vec::new(), Vec::new()];
        for &(v, level) in &levels {
            match level.cmp(&middle) {
                std::cmp::Ordering::Equal => {
                    reversed.push(v);
                    search.set_of[v] = u32::MAX;
                }
                std::cmp::Ordering::Less => before.push(v),
                std::cmp::Ordering::Greater => after.push(v),
            }
        }
        // What the walk did not reach hangs together with nothing: put it to one half.
        if levels.len() < set.len() {
            after.extend(set.into_iter().filter(|&v| search.level[v] == u32::MAX));
        }
        for half in [before, after] {
            half.iter().for_each(|&v| search.set_of[v] = n_sets);
            stack.push((n_sets, half));
            n_sets += 1;
        }
    }
    reversed.reverse();
    reversed
}

/// The smallest level that leaves a fifth or more of the vertices on both sides, else the median one; `None` with fewer than
/// three levels. Graded meshes have few levels, and some are wide.
fn best_level(levels: &[(usize, u32)]) -> Option<u32> {
    let last = levels.last()?.1;
    if last < 2 {
        return None;
    }
    let n = levels.len();
    let end = |level: u32| levels.partition_point(|&(_, l)| l <= level);
    let is_balanced = |&level: &u32| n <= 5 * end(level - 1) && 5 * end(level) <= 4 * n;
    let smallest = (1..last).filter(is_balanced).min_by_key(|&level| end(level) - end(level - 1));
    smallest.or_else(|| Some(levels[n / 2].1.clamp(1, last - 1)))
}

struct Search<'a> {
    matrix: &'a Matrix,
    /// Set of each vertex; `u32::MAX` in a separator.
    set_of: Vec<u32>,
    level: Vec<u32>,
}

impl Search<'_> {
    /// Breadth-first levels, ascending, of the part of `set` that hangs together with its first vertex.
    fn levels(&mut self, id: u32, set: &[usize]) -> Vec<(usize, u32)> {
        let start = self.matrix.indptr().into_raw_storage();
        let mut root = set[0];
        let mut found = Vec::new();
        for _ in 0..N_WALKS {
            set.iter().for_each(|&v| self.level[v] = u32::MAX);
            found.clear();
            found.push((root, 0));
            self.level[root] = 0;
            let mut head = 0;
            while head < found.len() {
                let (v, level) = found[head];
                head += 1;
                for &j in &self.matrix.indices()[start[v]..start[v + 1]] {
                    let j = j as usize;
                    if self.set_of[j] == id && self.level[j] == u32::MAX {
                        self.level[j] = level + 1;
                        found.push((j, level + 1));
                    }
                }
            }
            // The vertex reached last is far from the root: the next walk starts there.
            root = found.last().map_or(root, |last| last.0);
        }
        found
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn order_is_a_permutation_and_its_last_entries_separate_a_grid() {
        let (m, n) = (30, 30 * 30 + 3);
        let mut triplets = sprs::TriMatI::<f64, u32>::new((n, n));
        for i in 0..n {
            triplets.add_triplet(i, i, 4.0);
        }
        for x in 0..m {
            for y in 0..m {
                for (dx, dy) in [(1, 0), (0, 1)] {
                    if x + dx < m && y + dy < m {
                        let (a, b) = (x * m + y, (x + dx) * m + y + dy);
                        triplets.add_triplet(a, b, -1.0);
                        triplets.add_triplet(b, a, -1.0);
                    }
                }
            }
        }
        let order = nested_dissection(&triplets.to_csr());
        let mut sorted = order.clone();
        sorted.sort_unstable();
        assert!(sorted.iter().enumerate().all(|(i, &v)| i == v));
        // A level set of a grid walked from a corner is an anti-diagonal.
        let separator: Vec<usize> = order[n - m / 2..].iter().map(|&v| v / m + v % m).collect();
        assert!(separator.iter().all(|&sum| sum == separator[0]), "{separator:?}");
    }
}

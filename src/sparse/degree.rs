//! Fill-reducing order for the coarsest factorisation: approximate minimum degree on the quotient graph.
//!
//! Source: P. Amestoy, T. Davis, I. Duff, SIAM J. Matrix Anal. Appl. 17 (1996) 886 (from memory; without its supervariables,
//! for in a mesh of the plane the elements stay small). A mesh that is graded towards a thin gap is like a tree: level sets
//! are wide in it and separate badly (70 times the fill was seen), degrees stay small.

use super::matrix::Matrix;
use std::ops::Range;

/// No vertex.
const NONE: u32 = u32::MAX;

/// Order of elimination: new position → old. The pattern must be symmetric.
pub fn minimum_degree(matrix: &Matrix) -> Vec<usize> {
    let n = matrix.rows();
    let mut graph = Graph::new(matrix);
    let mut queue = Queue { first: vec![NONE; n], links: vec![[NONE; 2]; n], degree: vec![0; n] };
    for i in 0..n {
        queue.push(i, graph.n_neighbours[i]);
    }
    let (mut order, mut degree) = (Vec::with_capacity(n), 0);
    while let Some(pivot) = queue.pop(&mut degree) {
        order.push(pivot);
        for m in graph.eliminate(pivot) {
            let i = graph.members[m] as usize;
            queue.remove(i);
            let bound = graph.renew(i, pivot).min((n - order.len() - 1) as u32);
            degree = degree.min(bound as usize);
            queue.push(i, bound);
        }
    }
    order
}

/// What is left of the graph of the matrix. An eliminated vertex becomes an element, the clique of its neighbours; an element
/// that lies within a later one is absorbed by it.
struct Graph {
    /// The room of a vertex is that of its row: its elements from the front, from the back its neighbours by entries of the
    /// matrix that no element covers. Where an element comes in, a neighbour or an element goes.
    around: Vec<u32>,
    start: Vec<usize>,
    n_elements: Vec<u32>,
    n_neighbours: Vec<u32>,
    /// Vertices of all elements, one element after the other, and where those of each lie.
    members: Vec<u32>,
    element: Vec<Range<usize>>,
    is_absorbed: Vec<bool>,
    /// The last pivot that met this vertex or element.
    met: Vec<u32>,
    /// Vertices that an element has outside the newest one, if that met it.
    n_outside: Vec<u32>,
}

impl Graph {
    fn new(matrix: &Matrix) -> Graph {
        let n = matrix.rows();
        let rows = matrix.indptr().into_raw_storage();
        let (mut around, mut start) = (Vec::with_capacity(matrix.nnz()), vec![0]);
        for i in 0..n {
            let row = &matrix.indices()[rows[i]..rows[i + 1]];
            around.extend(row.iter().filter(|&&j| j as usize != i));
            start.push(around.len());
        }
        Graph {
            n_elements: vec![0; n],
            n_neighbours: start.windows(2).map(|ends| (ends[1] - ends[0]) as u32).collect(),
            members: Vec::with_capacity(4 * around.len()),
            element: vec![0..0; n],
            is_absorbed: vec![false; n],
            met: vec![NONE; n],
            n_outside: vec![0; n],
            around,
            start,
        }
    }

    fn elements(&self, i: usize) -> Range<usize> {
        self.start[i]..self.start[i] + self.n_elements[i] as usize
    }

    fn neighbours(&self, i: usize) -> Range<usize> {
        self.start[i + 1] - self.n_neighbours[i] as usize..self.start[i + 1]
    }

    /// Turns a vertex into an element; where its members lie.
    fn eliminate(&mut self, pivot: usize) -> Range<usize> {
        let first = self.members.len();
        self.met[pivot] = pivot as u32;
        for k in self.elements(pivot) {
            let e = self.around[k] as usize;
            self.is_absorbed[e] = true;
            for m in self.element[e].clone() {
                self.join(self.members[m], pivot);
            }
        }
        for k in self.neighbours(pivot) {
            self.join(self.around[k], pivot);
        }
        let members = first..self.members.len();
        for m in members.clone() {
            for k in self.elements(self.members[m] as usize) {
                let e = self.around[k] as usize;
                if self.met[e] != pivot as u32 {
                    self.met[e] = pivot as u32;
                    self.n_outside[e] = self.element[e].len() as u32;
                }
                self.n_outside[e] -= 1;
            }
        }
        self.element[pivot] = members.clone();
        members
    }

    /// Makes a vertex a member of the newest element, once.
    fn join(&mut self, v: u32, pivot: usize) {
        if self.met[v as usize] != pivot as u32 {
            self.met[v as usize] = pivot as u32;
            self.members.push(v);
        }
    }

    /// Gives a member of the newest element that element in the place of all that it covers; a bound of the member's degree.
    fn renew(&mut self, i: usize, pivot: usize) -> u32 {
        let mut degree = self.element[pivot].len() as u32 - 1;
        let end = self.start[i + 1];
        let mut kept = end;
        for k in self.neighbours(i).rev() {
            let j = self.around[k];
            if self.met[j as usize] != pivot as u32 {
                kept -= 1;
                self.around[kept] = j;
            }
        }
        self.n_neighbours[i] = (end - kept) as u32;
        degree += self.n_neighbours[i];
        let mut kept = self.start[i];
        for k in self.elements(i) {
            let e = self.around[k] as usize;
            // Without a vertex outside it lies within the newest one.
            self.is_absorbed[e] |= self.n_outside[e] == 0;
            if !self.is_absorbed[e] {
                self.around[kept] = e as u32;
                kept += 1;
                degree += self.n_outside[e];
            }
        }
        self.around[kept] = pivot as u32;
        self.n_elements[i] = (kept + 1 - self.start[i]) as u32;
        degree
    }
}

/// The vertices that are left, in a list for each degree; the last one put to a degree is the first one taken.
struct Queue {
    first: Vec<u32>,
    /// Before and after in the list.
    links: Vec<[u32; 2]>,
    degree: Vec<u32>,
}

impl Queue {
    fn push(&mut self, i: usize, degree: u32) {
        let next = std::mem::replace(&mut self.first[degree as usize], i as u32);
        self.links[i] = [NONE, next];
        self.degree[i] = degree;
        if next != NONE {
            self.links[next as usize][0] = i as u32;
        }
    }

    fn remove(&mut self, i: usize) {
        let [before, after] = self.links[i];
        match before {
            NONE => self.first[self.degree[i] as usize] = after,
            _ => self.links[before as usize][1] = after,
        }
        if after != NONE {
            self.links[after as usize][0] = before;
        }
    }

    /// Takes a vertex of the smallest degree; none is smaller than `degree`, which is raised to it.
    fn pop(&mut self, degree: &mut usize) -> Option<usize> {
        while *self.first.get(*degree)? == NONE {
            *degree += 1;
        }
        let i = self.first[*degree] as usize;
        self.remove(i);
        Some(i)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// A matrix with an entry for each pair, both ways, and its diagonal.
    fn joined(n: usize, pairs: impl Iterator<Item = (usize, usize)>) -> Matrix {
        let mut triplets = sprs::TriMatI::new((n, n));
        (0..n).for_each(|i| triplets.add_triplet(i, i, 4.0));
        for (a, b) in pairs {
            triplets.add_triplet(a, b, -1.0);
            triplets.add_triplet(b, a, -1.0);
        }
        triplets.to_csr()
    }

    /// Entries below the diagonal of the factor, by eliminating row after row.
    fn n_factor(matrix: &Matrix) -> usize {
        let order = minimum_degree(matrix);
        let mut sorted = order.clone();
        sorted.sort_unstable();
        assert!(sorted.iter().enumerate().all(|(i, &v)| i == v), "no permutation: {order:?}");
        let mut around: Vec<std::collections::BTreeSet<usize>> = (0..matrix.rows())
            .map(|i| matrix.outer_view(i).unwrap().indices().iter().map(|&j| j as usize).collect())
            .collect();
        let mut n_entries = 0;
        for pivot in order {
            let mut clique = std::mem::take(&mut around[pivot]);
            clique.remove(&pivot);
            n_entries += clique.len();
            for &i in &clique {
                around[i].extend(&clique);
                around[i].remove(&pivot);
            }
        }
        n_entries
    }

    #[test]
    fn a_tree_is_eliminated_without_fill() {
        let n = 500;
        assert_eq!(n_factor(&joined(n, (1..n).map(|i| ((i - 1) / 3, i)))), n - 1);
    }

    #[test]
    fn a_grid_fills_a_third_of_its_band() {
        let m = 30;
        let right = (0..m * m).filter(|i| i % m + 1 < m).map(|i| (i, i + 1));
        let up = (0..m * (m - 1)).map(|i| (i, i + m));
        let n_entries = n_factor(&joined(m * m, right.chain(up)));
        // 9 284 measured; row by row it would be a band of 30 below the diagonal, 26 500.
        assert!(n_entries < 10_000, "{n_entries}");
    }

    #[test]
    fn parts_that_hang_together_with_nothing_are_ordered_too() {
        assert_eq!(n_factor(&joined(7, [(0, 4), (5, 6)].into_iter())), 2);
        assert_eq!(minimum_degree(&joined(0, std::iter::empty())), [0; 0]);
    }
}

//! One quadratic triangle → the pieces of lines of equal ψ inside it, from a sampling grid and exact roots on its edges.

use super::{Chain, Found, NOWHERE};
use crate::mesh::Mesh;
use crate::report::dots::{Dot, dot};
use crate::solve::Solution;

/// ψ at barycentric coordinates: Σ v_k λ_k + 4 Σ e_k λ_k λ_{k+1}.
fn psi_at(shape: &Shape, [a, b, c]: [f64; 3]) -> f64 {
    let ([u, v, w], [e, f, g]) = (shape.vertex, shape.edge);
    u * a + v * b + w * c + 4.0 * (e * a * b + f * b * c + g * c * a)
}

/// ψ of one triangle: values at the corners, coefficients of the edges 01, 12, 20.
#[derive(Clone, Copy)]
pub(super) struct Shape {
    vertex: [f64; 3],
    edge: [f64; 3],
}

impl Shape {
    pub(super) fn new(mesh: &Mesh, solution: &Solution, t: usize) -> Shape {
        Shape {
            vertex: mesh.triangles[t].map(|v| solution.vertex[v as usize]),
            edge: mesh.triangle_edges[t].map(|e| solution.edge[e as usize]),
        }
    }

    /// Bounds of ψ on the triangle: the least and the largest of its Bernstein coefficients.
    pub(super) fn range(&self) -> [f64; 2] {
        let (v, e) = (self.vertex, self.edge);
        let middle = [0, 1, 2].map(|k| 0.5 * (v[k] + v[(k + 1) % 3]) + 2.0 * e[k]);
        let all = v.into_iter().chain(middle);
        all.fold([f64::MAX, f64::MIN], |[low, high], x| [low.min(x), high.max(x)])
    }
}

/// Steps of the sampling grid along an edge at most; a sub-edge then fits into a byte.
const N_STEPS_MAX: usize = 8;
/// Distance [px] by which a line may miss its place.
const MISS: f64 = 0.08;
/// Sub-triangles need not be smaller than this [px].
const STEP_MIN: f64 = 3.0;

/// Directions of sub-edges: along the triangle's edges 01, 12, 20.
const ALONG: [u8; 3] = [0, 64, 128];
/// Sub-edges are numbered below this.
const N_SUB_EDGES: usize = 192;
const NONE: u8 = u8::MAX;

/// A line's piece in one sub-triangle, from sub-edge to sub-edge.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub(super) struct Segment {
    pub(super) level: u32,
    from: u8,
    to: u8,
}

/// Where a line meets a sub-edge.
pub(super) struct Crossing {
    at: Dot,
    /// 2·edge of the mesh + (0 or 1: the first or the second root on it); `NOWHERE` inside the triangle.
    place: usize,
}

/// ψ sampled at (i, j): barycentric (1 − (i + j)/n, i/n, j/n).
pub(super) struct Grid<'a> {
    shape: Shape,
    corners: &'a [[f64; 2]; 3],
    /// Numbers of the edges in the mesh.
    edges: [usize; 3],
    /// Whether the mesh numbers the vertices of each edge the other way round.
    is_turned: [bool; 3],
    n: usize,
    psi: [[f64; N_STEPS_MAX + 1]; N_STEPS_MAX + 1],
}

impl<'a> Grid<'a> {
    pub(super) fn new(mesh: &Mesh, t: usize, shape: Shape, corners: &'a [[f64; 2]; 3]) -> Grid<'a> {
        let n = n_steps(&shape, corners);
        let mut psi = [[0.0; N_STEPS_MAX + 1]; N_STEPS_MAX + 1];
        let step = 1.0 / n as f64;
        for i in 0..=n {
            for j in 0..=n - i {
                let (b, c) = (step * i as f64, step * j as f64);
                psi[i][j] = psi_at(&shape, [1.0 - b - c, b, c]);
            }
        }
        // Corners to the bit, so that neighbours agree on which side of a level they are.
        [psi[0][0], psi[n][0], psi[0][n]] = shape.vertex;
        let v = mesh.triangles[t];
        let edges = mesh.triangle_edges[t].map(|e| e as usize);
        Grid { shape, corners, edges, is_turned: [v[1] < v[0], v[2] < v[1], v[0] < v[2]], n, psi }
    }

    /// Collects the pieces of all levels from `first` on, sub-triangle by sub-triangle.
    pub(super) fn cut(&self, levels: &[f64], first: usize, segments: &mut Vec<Segment>) {
        segments.clear();
        let name = |along: usize, i: usize, j: usize| ALONG[along] + (N_STEPS_MAX * j + i) as u8;
        for i in 0..self.n {
            for j in 0..self.n - i {
                let (p, q, r) = (self.psi[i][j], self.psi[i + 1][j], self.psi[i][j + 1]);
                let sides = [name(0, i, j), name(1, i, j), name(2, i, j)];
                cut_one([p, q, r], sides, levels, first, segments);
                if i + j + 2 <= self.n {
                    let sides = [name(2, i + 1, j), name(0, i, j + 1), name(1, i, j)];
                    cut_one([q, self.psi[i + 1][j + 1], r], sides, levels, first, segments);
                }
            }
        }
    }

    /// Links the segments of one level into chains.
    pub(super) fn trace(&self, level: f64, segments: &[Segment], index: usize, found: &mut Found) {
        let mut next = [NONE; N_SUB_EDGES];
        let mut is_end = [false; N_SUB_EDGES];
        for segment in segments {
            next[usize::from(segment.from)] = segment.to;
            is_end[usize::from(segment.to)] = true;
        }
        // Open chains first; what is left after them are loops, which may start anywhere.
        for wants_open in [true, false] {
            for segment in segments {
                let start = usize::from(segment.from);
                if next[start] == NONE || (wants_open && is_end[start]) {
                    continue;
                }
                let (first, enter) = (found.points.len(), self.crossing(level, start));
                found.points.push(enter.at);
                let (mut at, mut leave) = (start, enter.place);
                while next[at] != NONE {
                    let to = usize::from(next[at]);
                    next[at] = NONE;
                    at = to;
                    let crossing = self.crossing(level, at);
                    found.points.push(crossing.at);
                    leave = crossing.place;
                }
                let n_points = found.points.len() - first;
                found.chains[index].push(Chain { first, n_points, ends: [enter.place, leave] });
            }
        }
    }

    fn crossing(&self, level: f64, sub_edge: usize) -> Crossing {
        let (along, i, j) = (sub_edge / 64, sub_edge % N_STEPS_MAX, sub_edge % 64 / N_STEPS_MAX);
        let ([i, j], [k, l]) = match along {
            0 => ([i, j], [i + 1, j]),
            1 => ([i + 1, j], [i, j + 1]),
            _ => ([i, j + 1], [i, j]),
        };
        let is_on_edge = match along {
            0 => j == 0,
            1 => i + j == self.n,
            _ => i == 0,
        };
        let (p, q) = (self.psi[i][j], self.psi[k][l]);
        let step = 1.0 / self.n as f64;
        let share = (level - p) / (q - p);
        if is_on_edge {
            // Steps along the edge in the triangle's own direction.
            let done = [i, j, self.n - j][along] as f64;
            return self.on_edge(along, level, step * (done + share));
        }
        let mix = |from: usize, to: usize| step * (from as f64 + share * (to as f64 - from as f64));
        let (b, c) = (mix(i, k), mix(j, l));
        let [u, v, w] = self.corners;
        let at = [0, 1].map(|x| u[x] + b * (v[x] - u[x]) + c * (w[x] - u[x]));
        Crossing { at: dot(at), place: NOWHERE }
    }

    /// The exact root nearest to `guess` along edge `k`, computed in the mesh's direction of that edge: both
    /// triangles at the edge get the same bits.
    fn on_edge(&self, k: usize, level: f64, guess: f64) -> Crossing {
        let ends = [k, (k + 1) % 3];
        let [a, b] = if self.is_turned[k] { [ends[1], ends[0]] } else { ends };
        let guess = if self.is_turned[k] { 1.0 - guess } else { guess };
        let (t, root) =
            root([self.shape.vertex[a], self.shape.vertex[b]], self.shape.edge[k], level, guess);
        let (p, q) = (self.corners[a], self.corners[b]);
        let at = [0, 1].map(|x| p[x] + t * (q[x] - p[x]));
        Crossing { at: dot(at), place: 2 * self.edges[k] + root }
    }
}

/// Adds the piece of every level that crosses one linear sub-triangle; sides run from corner to corner.
fn cut_one(
    psi: [f64; 3],
    sides: [u8; 3],
    levels: &[f64],
    first: usize,
    segments: &mut Vec<Segment>,
) {
    let low = psi[0].min(psi[1]).min(psi[2]);
    let high = psi[0].max(psi[1]).max(psi[2]);
    for (i, &level) in levels.iter().enumerate().skip(first) {
        if high < level {
            break;
        }
        if level <= low {
            continue;
        }
        let is_high = psi.map(|p| level <= p);
        let (mut from, mut to) = (NONE, NONE);
        for k in 0..3 {
            match (is_high[k], is_high[(k + 1) % 3]) {
                (true, false) => from = sides[k],
                (false, true) => to = sides[k],
                _ => {}
            }
        }
        if from != NONE && to != NONE {
            segments.push(Segment { level: i as u32, from, to });
        }
    }
}

/// Steps that keep linear pieces within [`MISS`] of the quadratic: a bend e is missed by e/n² at most.
fn n_steps(shape: &Shape, corners: &[[f64; 2]; 3]) -> usize {
    let [p, q, r] = *corners;
    let (u, v) = ([q[0] - p[0], q[1] - p[1]], [r[0] - p[0], r[1] - p[1]]);
    let w = [v[0] - u[0], v[1] - u[1]];
    let longest = [u, v, w].map(|d| d[0] * d[0] + d[1] * d[1]).into_iter().fold(0.0, f64::max);
    let n_by_size = (longest.sqrt() / STEP_MIN).ceil();
    let (a, b) = (shape.vertex[1] - shape.vertex[0], shape.vertex[2] - shape.vertex[0]);
    let twice_area = (u[0] * v[1] - u[1] * v[0]).abs();
    let slope = [a * v[1] - b * u[1], b * u[0] - a * v[0]].map(|x| x / twice_area);
    let steepness = (slope[0] * slope[0] + slope[1] * slope[1]).sqrt();
    let bend = shape.edge.iter().fold(0.0f64, |m, e| m.max(e.abs()));
    let n_by_bend = (bend / (MISS * steepness)).sqrt().ceil();
    // A flat or degenerate triangle gives infinity or NaN here; both fall to the other bound.
    n_by_bend.min(n_by_size).min(N_STEPS_MAX as f64).max(1.0) as usize
}

/// Root of v₀(1 − t) + v₁t + 4e·t(1 − t) = level that is nearest to `guess`, and whether it is the second one.
fn root([v0, v1]: [f64; 2], e: f64, level: f64, guess: f64) -> (f64, usize) {
    // a t² + b t + c = 0
    let (a, b, c) = (-4.0 * e, v1 - v0 + 4.0 * e, v0 - level);
    let inner = (b * b - 4.0 * a * c).max(0.0).sqrt();
    let half = -0.5 * (b + if b < 0.0 { -inner } else { inner });
    let (s, t) = (half / a, c / half);
    let roots = if s < t || !t.is_finite() { [s, t] } else { [t, s] };
    let distance = |t: f64| if t.is_finite() { (t - guess).abs() } else { f64::MAX };
    let second = usize::from(distance(roots[1]) < distance(roots[0]));
    let t = roots[second];
    (if t.is_finite() { t.clamp(0.0, 1.0) } else { guess }, second)
}

#[cfg(test)]
mod tests {
    use super::root;

    #[test]
    fn roots_on_an_edge_are_exact_and_told_apart() {
        // 4·t(1 − t) = 0.75 at t = ¼ and ¾; a straight edge has one root.
        assert_eq!(root([0.0, 0.0], 1.0, 0.75, 0.2), (0.25, 0));
        assert_eq!(root([0.0, 0.0], 1.0, 0.75, 0.8), (0.75, 1));
        assert_eq!(root([1.0, 3.0], 0.0, 2.0, 0.4).0, 0.5);
        assert_eq!(root([3.0, 1.0], 0.0, 1.5, 0.4).0, 0.75);
    }
}

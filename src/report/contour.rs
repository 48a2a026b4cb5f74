//! ψ on quadratic triangles → lines of equal ψ, traced on sub-triangles and joined end to end.

use crate::mesh::Mesh;
use crate::solve::Solution;
use std::collections::BTreeMap;

/// ψ at barycentric coordinates of triangle `t`: Σ v_i λ_i + 4 Σ e_k λ_i λ_j.
pub(super) fn psi_at(mesh: &Mesh, solution: &Solution, t: usize, weights: [f64; 3]) -> f64 {
    let mut psi = 0.0;
    for k in 0..3 {
        psi += solution.vertex[mesh.triangles[t][k] as usize] * weights[k];
        psi += 4.0
            * solution.edge[mesh.triangle_edges[t][k] as usize]
            * weights[k]
            * weights[(k + 1) % 3];
    }
    psi
}

/// One sampled corner of a sub-triangle: page coordinates and ψ.
type Sample = ([f64; 2], f64);

/// Lines ψ = level for each of `levels` (ascending), as joined polylines in page coordinates.
///
/// `corners` are the page coordinates of each chosen triangle, `n_steps` its subdivision (the same for all, so that
/// neighbours meet on the same points).
pub(super) fn contours(
    mesh: &Mesh,
    solution: &Solution,
    triangles: &[(usize, [[f64; 2]; 3])],
    levels: &[f64],
    n_steps: usize,
) -> Vec<Vec<[f64; 2]>> {
    let mut segments: Vec<Vec<[[f64; 2]; 2]>> = vec![vec![]; levels.len()];
    for (t, corners) in triangles {
        let sample = |i: usize, j: usize| -> Sample {
            let [b, c] = [i, j].map(|x| x as f64 / n_steps as f64);
            let weights = [1.0 - b - c, b, c];
            let at = [0, 1].map(|axis| (0..3).map(|k| weights[k] * corners[k][axis]).sum());
            (at, psi_at(mesh, solution, *t, weights))
        };
        for i in 0..n_steps {
            for j in 0..n_steps - i {
                cut(&[sample(i, j), sample(i + 1, j), sample(i, j + 1)], levels, &mut segments);
                if i + j + 2 <= n_steps {
                    cut(
                        &[sample(i + 1, j), sample(i + 1, j + 1), sample(i, j + 1)],
                        levels,
                        &mut segments,
                    );
                }
            }
        }
    }
    segments.into_iter().flat_map(|s| join(&s)).map(|line| thin_out(&line)).collect()
}

/// Adds the piece of every level that crosses one linear sub-triangle.
fn cut(samples: &[Sample; 3], levels: &[f64], segments: &mut [Vec<[[f64; 2]; 2]>]) {
    let low = samples.iter().map(|s| s.1).fold(f64::MAX, f64::min);
    let high = samples.iter().map(|s| s.1).fold(f64::MIN, f64::max);
    let first = levels.partition_point(|&l| l <= low);
    for (level, list) in
        levels.iter().zip(segments.iter_mut()).skip(first).take_while(|(l, _)| **l <= high)
    {
        let mut ends = vec![];
        for k in 0..3 {
            let (p, q) = (samples[k], samples[(k + 1) % 3]);
            if (p.1 < *level) != (q.1 < *level) {
                // Always from the lower end, so that both neighbours of an edge compute the same bits.
                let (p, q) = if p.1 < q.1 { (p, q) } else { (q, p) };
                let t = (level - p.1) / (q.1 - p.1);
                ends.push([p.0[0] + t * (q.0[0] - p.0[0]), p.0[1] + t * (q.0[1] - p.0[1])]);
            }
        }
        if let [a, b] = ends[..] {
            list.push([a, b]);
        }
    }
}

/// A point as a key: thousandths of a pixel.
fn key(p: [f64; 2]) -> (i64, i64) {
    ((1e3 * p[0]).round() as i64, (1e3 * p[1]).round() as i64)
}

/// Joins segments that share an end into polylines; each segment is used once.
fn join(segments: &[[[f64; 2]; 2]]) -> Vec<Vec<[f64; 2]>> {
    let mut at: BTreeMap<(i64, i64), Vec<usize>> = BTreeMap::new();
    for (i, segment) in segments.iter().enumerate() {
        for end in segment {
            at.entry(key(*end)).or_default().push(i);
        }
    }
    let mut is_used = vec![false; segments.len()];
    let mut lines = vec![];
    for start in 0..segments.len() {
        if is_used[start] {
            continue;
        }
        is_used[start] = true;
        let [a, b] = segments[start];
        let mut line = walk(segments, &at, &mut is_used, a);
        line.reverse();
        line.extend([a, b]);
        line.extend(walk(segments, &at, &mut is_used, b));
        lines.push(line);
    }
    lines
}

/// The points beyond `from`, along segments that are still free; bounded by their number.
fn walk(
    segments: &[[[f64; 2]; 2]],
    at: &BTreeMap<(i64, i64), Vec<usize>>,
    is_used: &mut [bool],
    from: [f64; 2],
) -> Vec<[f64; 2]> {
    let mut points = vec![];
    let mut end = from;
    for _ in 0..segments.len() {
        let next = at.get(&key(end)).and_then(|list| list.iter().find(|&&i| !is_used[i]));
        let Some(&i) = next else { break };
        is_used[i] = true;
        let [a, b] = segments[i];
        end = if key(a) == key(end) { b } else { a };
        points.push(end);
    }
    points
}

/// Largest distance [px] between a dropped point and the chord that replaces it: below what a screen shows.
const CHORD: f64 = 0.08;
/// Points between two kept ones at most, so that the look ahead stays short.
const N_SKIP_MAX: usize = 24;

/// Drops points that lie on the straight line between their neighbours to within [`CHORD`].
fn thin_out(line: &[[f64; 2]]) -> Vec<[f64; 2]> {
    let mut kept = vec![line[0]];
    let mut from = 0;
    while from + 1 < line.len() {
        let mut to = from + 1;
        while to + 1 < line.len() && to - from < N_SKIP_MAX {
            let is_straight =
                (from + 1..=to).all(|i| distance(line[i], line[from], line[to + 1]) <= CHORD);
            if !is_straight {
                break;
            }
            to += 1;
        }
        kept.push(line[to]);
        from = to;
    }
    kept
}

/// Distance of `p` from the line through `a` and `b` (from `a` when both coincide).
fn distance(p: [f64; 2], a: [f64; 2], b: [f64; 2]) -> f64 {
    let (d, e) = ([b[0] - a[0], b[1] - a[1]], [p[0] - a[0], p[1] - a[1]]);
    let length = d[0].hypot(d[1]);
    if length < 1e-9 { e[0].hypot(e[1]) } else { (d[0] * e[1] - d[1] * e[0]).abs() / length }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::report::fixture;

    #[test]
    fn contours_of_a_parabola_are_traced_to_a_thousandth() {
        // ψ = r²/2 is in the quadratic space: the contour ψ = c must lie at r = √(2c).
        let mut field = fixture::field(4);
        for (i, p) in field.mesh.points.iter().enumerate() {
            field.solution.vertex[i] = 0.5 * (1e3 * p.r).powi(2);
        }
        for (e, &[a, b]) in field.mesh.edges.iter().enumerate() {
            let [p, q] = [a, b].map(|v| 1e3 * field.mesh.points[v as usize].r);
            field.solution.edge[e] = 0.125 * (p + q).powi(2) - 0.25 * (p * p + q * q);
        }
        let n = field.mesh.triangles.len() - 1;
        let corners = |t: usize| {
            field.mesh.triangles[t].map(|v| {
                let p = field.mesh.points[v as usize];
                [1e3 * p.r, 1e3 * p.z]
            })
        };
        let triangles: Vec<_> = (0..n).map(|t| (t, corners(t))).collect();
        let lines = contours(&field.mesh, &field.solution, &triangles, &[20.3, 51.3], 40);
        assert_eq!(lines.len(), 2, "each level is one joined line");
        for (line, r) in lines.iter().zip([40.6f64.sqrt(), 102.6f64.sqrt()]) {
            // Linear interpolation of r²/2 over a sub-step h = 0.1 is off by h²/8/r ≤ 2e-4, thinning by CHORD at most.
            assert!(line.iter().all(|p| (p[0] - r).abs() < 1e-3), "{line:?}");
            let ends = [line[0][1], line[line.len() - 1][1]];
            assert!((ends[0] - ends[1]).abs() > 31.9, "the line runs from end to end: {ends:?}");
        }
    }

    #[test]
    fn closed_lines_end_where_they_began() {
        let square = [
            [[0.0, 0.0], [1.0, 0.0]],
            [[1.0, 1.0], [0.0, 1.0]],
            [[1.0, 0.0], [1.0, 1.0]],
            [[0.0, 1.0], [0.0, 0.0]],
        ];
        let lines = join(&square);
        assert_eq!(lines.len(), 1);
        assert_eq!((lines[0].len(), lines[0][0]), (5, lines[0][4]));
    }
}

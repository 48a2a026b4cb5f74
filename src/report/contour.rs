//! ψ on quadratic triangles → lines of equal ψ, traced triangle by triangle and joined across shared edges.
//!
//! Inside a triangle ψ is sampled on a small grid, as fine as its curvature asks for; where a line leaves the
//! triangle its point is the exact root on that edge, so neighbours meet however finely each is sampled.

mod grid;

use super::dots::{CHORD, Dot, thin_out};
use crate::mesh::Mesh;
use crate::solve::Solution;
use grid::{Grid, Shape};

/// Lines ψ = level for each of `levels` (ascending), joined, in dots of the page.
///
/// `triangles` are numbers of the mesh with their corners on the page [px].
pub(super) fn contours(
    mesh: &Mesh,
    solution: &Solution,
    triangles: &[(usize, [[f64; 2]; 3])],
    levels: &[f64],
) -> Vec<Vec<Dot>> {
    let mut found = Found { points: vec![], chains: vec![vec![]; levels.len()] };
    let mut segments = vec![];
    for (t, corners) in triangles {
        let shape = Shape::new(mesh, solution, *t);
        let [low, high] = shape.range();
        let first = levels.partition_point(|&l| l <= low);
        if levels.get(first).is_none_or(|&l| high < l) {
            continue;
        }
        let grid = Grid::new(mesh, *t, shape, corners);
        grid.cut(levels, first, &mut segments);
        segments.sort_unstable();
        for group in segments.chunk_by(|a, b| a.level == b.level) {
            let index = group[0].level as usize;
            grid.trace(levels[index], group, index, &mut found);
        }
    }
    join(&found, mesh.edges.len())
}

/// Pieces of lines, one a triangle that they pass.
struct Found {
    points: Vec<Dot>,
    /// Of every level.
    chains: Vec<Vec<Chain>>,
}

/// A piece of a line with its higher side on the same hand all along, so each end meets at most one other start.
#[derive(Clone, Copy)]
struct Chain {
    first: usize,
    n_points: usize,
    /// Where it enters and leaves, as [`grid::Crossing`] has it; `NOWHERE` for a loop inside one triangle.
    ends: [usize; 2],
}

/// Not on an edge of the mesh.
const NOWHERE: usize = usize::MAX;

/// Joins the chains of every level where one leaves and another enters; each is used once.
fn join(found: &Found, n_edges: usize) -> Vec<Vec<Dot>> {
    let mut starts = vec![NOWHERE; 2 * n_edges];
    let mut lines = vec![];
    for chains in &found.chains {
        let is_real = |place: usize| place != NOWHERE;
        for (i, chain) in chains.iter().enumerate().filter(|(_, c)| is_real(c.ends[0])) {
            starts[chain.ends[0]] = i;
        }
        let follower = |chain: &Chain| match chain.ends[1] {
            NOWHERE => NOWHERE,
            place => starts[place],
        };
        let next: Vec<usize> = chains.iter().map(follower).collect();
        let mut has_one_before = vec![false; chains.len()];
        next.iter().filter(|&&i| is_real(i)).for_each(|&i| has_one_before[i] = true);
        let mut is_used = vec![false; chains.len()];
        // Lines with a beginning first; what is left are loops.
        let heads = (0..chains.len()).filter(|&i| !has_one_before[i]);
        for start in heads.chain(0..chains.len()) {
            let (mut at, mut line) = (start, vec![]);
            while is_real(at) && !is_used[at] {
                is_used[at] = true;
                let chain = chains[at];
                line.extend_from_slice(&found.points[chain.first..chain.first + chain.n_points]);
                at = next[at];
            }
            if !line.is_empty() {
                lines.push(thin_out(&line, CHORD));
            }
        }
        for chain in chains.iter().filter(|c| is_real(c.ends[0])) {
            starts[chain.ends[0]] = NOWHERE;
        }
    }
    lines
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::report::fixture;

    /// The fixture's mesh with ψ of `psi` (mm), which must be in the quadratic space, drawn at 100 px a millimetre.
    fn lines(psi: impl Fn(f64, f64) -> f64, levels: &[f64]) -> Vec<Vec<[f64; 2]>> {
        let mut field = fixture::field(4);
        let at = |i: u32| field.mesh.points[i as usize];
        for (i, p) in field.mesh.points.iter().enumerate() {
            field.solution.vertex[i] = psi(1e3 * p.r, 1e3 * p.z);
        }
        for (e, &[a, b]) in field.mesh.edges.iter().enumerate() {
            let (p, q) = (at(a), at(b));
            let middle = psi(500.0 * (p.r + q.r), 500.0 * (p.z + q.z));
            let ends = field.solution.vertex[a as usize] + field.solution.vertex[b as usize];
            field.solution.edge[e] = middle - 0.5 * ends;
        }
        let corners = |t: usize| field.mesh.triangles[t].map(|v| [1e5 * at(v).r, 1e5 * at(v).z]);
        let triangles: Vec<_> =
            (0..field.mesh.triangles.len() - 1).map(|t| (t, corners(t))).collect();
        let millimeters =
            |line: &Vec<Dot>| line.iter().map(|d| d.map(|x| 1e-4 * f64::from(x))).collect();
        contours(&field.mesh, &field.solution, &triangles, levels).iter().map(millimeters).collect()
    }

    #[test]
    fn contours_of_a_parabola_are_straight_lines_from_end_to_end() {
        let lines = lines(|r, _| 0.5 * r * r, &[20.3, 51.3]);
        assert_eq!(lines.len(), 2, "each level is one joined line");
        for (line, r) in lines.iter().zip([40.6f64.sqrt(), 102.6f64.sqrt()]) {
            // Triangles of some 400 px are sampled with 8 steps at most: r²/2 over h = 0.5 mm is off by h²/8/r.
            assert!(line.iter().all(|p| (p[0] - r).abs() < 0.25 / 8.0 / r + 2e-3), "{line:?}");
            let ends = [line[0][1], line[line.len() - 1][1]];
            assert!((ends[0] - ends[1]).abs() > 31.9, "the line runs from end to end: {ends:?}");
        }
    }

    #[test]
    fn a_closed_line_is_one_loop_that_ends_where_it_began() {
        let lines = lines(|r, z| (r - 8.0).powi(2) + z * z, &[16.0]);
        assert_eq!(lines.len(), 1, "{lines:?}");
        let line = &lines[0];
        assert_eq!(line[0], line[line.len() - 1]);
        let miss = |p: &[f64; 2]| (p[0] - 8.0).hypot(p[1]) - 4.0;
        assert!(line.iter().all(|p| miss(p).abs() < 0.02), "{line:?}");
    }
}

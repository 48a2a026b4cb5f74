//! Newest-vertex bisection: refines marked triangles, keeps the mesh conforming, carries ψ along.
//!
//! The closure crosses the shared polygon edges and the cap's rays like any other edge. Spaces nest, so ψ is carried over
//! exactly: a new vertex takes the edge's midpoint value, new bubbles follow from second differences.
//! Source: W. F. Mitchell, ACM Trans. Math. Softw. 15 (1989) 326 (bisection by newest vertex).

use super::{Chart, Mesh, Point, RegionId};

/// Marks an edge that is not cut.
const UNCUT: u32 = u32::MAX;

/// The coefficients that travel with the mesh: ψ on vertices, bubbles on edges.
#[derive(Debug)]
pub struct Carried<'a> {
    pub vertex: &'a mut Vec<f64>,
    pub edge: &'a mut Vec<f64>,
}

/// What a call did to the triangles, in their new numbers.
#[derive(Debug, Clone, Default)]
pub struct Changes {
    /// Triangles that this call made, ascending.
    pub fresh: Vec<u32>,
    /// Old number of every triangle that stayed, [`MADE`] for the fresh ones; no triangle moves to a smaller number.
    pub origin: Vec<u32>,
}

/// Marks a triangle that this call made.
pub const MADE: u32 = u32::MAX;

/// Cuts all three edges of every marked triangle and closes the mesh.
///
/// Children take their parent's place in the order and edges follow the triangles, so that what touches in the plane lies
/// near in memory at every size.
///
/// - `edge_triangles`: of the mesh as it is
/// - `marked`: triangles to refine
/// - `carried`: coefficients on the old mesh in, on the new mesh out
pub fn bisect(
    mesh: &mut Mesh,
    edge_triangles: &[[u32; 2]],
    marked: &[u32],
    carried: &mut Carried,
) -> Changes {
    let is_cut = close(mesh, edge_triangles, marked);
    let cut = cut_edges(mesh, &is_cut, carried);
    let is_old_and_cut = |e: u32| cut.get(e as usize).is_some_and(|cut| cut.vertex != UNCUT);
    let mut new = Reordered::with_room(mesh);
    for t in 0..mesh.triangles.len() {
        let whole = Piece { corners: mesh.triangles[t], edges: mesh.triangle_edges[t] };
        if !is_old_and_cut(whole.edges[0]) {
            new.push(mesh, t, whole, t as u32);
            continue;
        }
        for half in split(mesh, whole, &cut, Generation::First, carried) {
            // The parent's other edges are the children's refinement edges; they may be cut as well.
            if is_old_and_cut(half.edges[0]) {
                for quarter in split(mesh, half, &cut, Generation::Second, carried) {
                    new.push(mesh, t, quarter, MADE);
                }
            } else {
                new.push(mesh, t, half, MADE);
            }
        }
    }
    let changes = new.replace(mesh, carried.edge);
    mesh.level_sizes.push(mesh.points.len());
    changes
}

/// The new triangles in their order, and the edges in the order in which these meet them.
struct Reordered {
    triangles: Vec<[u32; 3]>,
    triangle_edges: Vec<[u32; 3]>,
    regions: Vec<RegionId>,
    charts: Vec<Chart>,
    changes: Changes,
    /// Final number of an edge, [`UNMET`] as long as no triangle has met it.
    place: Vec<u32>,
    /// Edges in their final order.
    edges: Vec<u32>,
}

/// Marks an edge without a final number.
const UNMET: u32 = u32::MAX;

impl Reordered {
    /// Room for what becomes of a mesh whose new vertices are there already: of a disc, twice as many triangles.
    fn with_room(mesh: &Mesh) -> Reordered {
        let n_new = 2 * mesh.points.len();
        Reordered {
            triangles: Vec::with_capacity(n_new),
            triangle_edges: Vec::with_capacity(n_new),
            regions: Vec::with_capacity(n_new),
            charts: Vec::with_capacity(n_new),
            changes: Changes { fresh: Vec::new(), origin: Vec::with_capacity(n_new) },
            place: vec![UNMET; mesh.edges.len()],
            edges: Vec::with_capacity(mesh.edges.len()),
        }
    }

    /// Appends a triangle, `parent` being the old one whose region and chart it has.
    fn push(&mut self, mesh: &Mesh, parent: usize, piece: Piece, origin: u32) {
        if origin == MADE {
            self.changes.fresh.push(self.triangles.len() as u32);
        }
        self.changes.origin.push(origin);
        self.triangles.push(piece.corners);
        self.regions.push(mesh.regions[parent]);
        self.charts.push(mesh.charts[parent]);
        self.place.resize(mesh.edges.len(), UNMET);
        self.triangle_edges.push(piece.edges.map(|e| {
            let place = &mut self.place[e as usize];
            if *place == UNMET {
                *place = self.edges.len() as u32;
                self.edges.push(e);
            }
            *place
        }));
    }

    fn replace(self, mesh: &mut Mesh, coefficients: &mut Vec<f64>) -> Changes {
        mesh.triangles = self.triangles;
        mesh.triangle_edges = self.triangle_edges;
        mesh.regions = self.regions;
        mesh.charts = self.charts;
        mesh.edges = self.edges.iter().map(|&e| mesh.edges[e as usize]).collect();
        *coefficients = self.edges.iter().map(|&e| coefficients[e as usize]).collect();
        self.changes
    }
}

/// Edges to cut: those of the marked triangles, and the refinement edge wherever any other edge is cut.
fn close(mesh: &Mesh, edge_triangles: &[[u32; 2]], marked: &[u32]) -> Vec<bool> {
    let mut is_cut = vec![false; mesh.edges.len()];
    let mut stack: Vec<u32> = Vec::new();
    for &t in marked {
        for e in mesh.triangle_edges[t as usize] {
            if !is_cut[e as usize] {
                is_cut[e as usize] = true;
                stack.push(e);
            }
        }
    }
    // Every edge enters the stack at most once.
    while let Some(e) = stack.pop() {
        for t in edge_triangles[e as usize] {
            if t == super::fans::NO_TRIANGLE {
                continue;
            }
            let first = mesh.triangle_edges[t as usize][0];
            if !is_cut[first as usize] {
                is_cut[first as usize] = true;
                stack.push(first);
            }
        }
    }
    is_cut
}

/// What became of an old edge: its middle vertex and its second half (the first half keeps the number).
#[derive(Debug, Clone, Copy)]
struct Cut {
    vertex: u32,
    second_half: u32,
    /// Bubble coefficient before the cut.
    bubble: f64,
}

/// Makes the middle vertices and halves of all cut edges, in edge order.
fn cut_edges(mesh: &mut Mesh, is_cut: &[bool], carried: &mut Carried) -> Vec<Cut> {
    let mut cut = Vec::with_capacity(is_cut.len());
    for (e, &is_cut) in is_cut.iter().enumerate() {
        let bubble = carried.edge[e];
        if !is_cut {
            cut.push(Cut { vertex: UNCUT, second_half: UNCUT, bubble });
            continue;
        }
        let [a, b] = mesh.edges[e];
        let (p, q) = (mesh.points[a as usize], mesh.points[b as usize]);
        let vertex = mesh.points.len() as u32;
        mesh.points.push(Point { r: 0.5 * (p.r + q.r), z: 0.5 * (p.z + q.z) });
        mesh.on_axis.push(mesh.on_axis[a as usize] && mesh.on_axis[b as usize]);
        mesh.parents.push([a, b]);
        carried
            .vertex
            .push(0.5 * (carried.vertex[a as usize] + carried.vertex[b as usize]) + bubble);
        let second_half = mesh.edges.len() as u32;
        mesh.edges[e] = [a, vertex];
        mesh.edges.push([vertex, b]);
        // A quadratic restricted to half of the edge has a quarter of the second difference.
        carried.edge[e] = 0.25 * bubble;
        carried.edge.push(0.25 * bubble);
        cut.push(Cut { vertex, second_half, bubble });
    }
    cut
}

/// A triangle is cut at most twice in depth in one call.
#[derive(Debug, Clone, Copy, PartialEq)]
enum Generation {
    /// Its edges are those of the old mesh.
    First,
    /// A child of this call: one edge of the old mesh, the refinement edge; the others are halves or new.
    Second,
}

/// A triangle on its way into the new mesh.
#[derive(Debug, Clone, Copy)]
struct Piece {
    corners: [u32; 3],
    edges: [u32; 3],
}

/// Cuts a triangle across its refinement edge.
fn split(
    mesh: &mut Mesh,
    whole: Piece,
    cut: &[Cut],
    generation: Generation,
    carried: &mut Carried,
) -> [Piece; 2] {
    let [a, b, c] = whole.corners;
    let [ab, bc, ca] = whole.edges;
    let Cut { vertex: m, second_half, bubble } = cut[ab as usize];
    let (half_a, half_b) =
        if mesh.edges[ab as usize][0] == a { (ab, second_half) } else { (second_half, ab) };

    // ψ along m → c: bubble (b_bc + b_ca)/2 − b_ab/4 with the uncut edges' coefficients (eq. 13).
    let uncut = |e: u32| match generation {
        Generation::First => cut[e as usize].bubble,
        Generation::Second => carried.edge[e as usize],
    };
    let inner_bubble = 0.5 * (uncut(bc) + uncut(ca)) - 0.25 * bubble;
    let inner = mesh.edges.len() as u32;
    mesh.edges.push([m, c]);
    carried.edge.push(inner_bubble);
    [
        Piece { corners: [c, a, m], edges: [ca, half_a, inner] },
        Piece { corners: [b, c, m], edges: [bc, inner, half_b] },
    ]
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::mesh::Cap;
    use crate::mesh::fans::edge_triangles;

    /// The square 1 < r < 2, 0 < z < 1 in two triangles, no axis.
    fn square() -> Mesh {
        let point = |r, z| Point { r, z };
        Mesh {
            points: vec![point(1.0, 0.0), point(2.0, 0.0), point(2.0, 1.0), point(1.0, 1.0)],
            on_axis: vec![false; 4],
            triangles: vec![[2, 0, 1], [0, 2, 3]],
            triangle_edges: vec![[0, 1, 2], [0, 3, 4]],
            edges: vec![[0, 2], [0, 1], [1, 2], [2, 3], [3, 0]],
            regions: vec![RegionId(0); 2],
            charts: vec![Chart::Inside; 2],
            parents: vec![[u32::MAX; 2]; 4],
            level_sizes: vec![4],
            cap: Cap { center_z: 0.0, radius: 10.0, n_facets: 8 },
        }
    }

    fn area(mesh: &Mesh, t: usize) -> f64 {
        let [a, b, c] = mesh.triangles[t].map(|v| mesh.points[v as usize]);
        0.5 * ((b.r - a.r) * (c.z - a.z) - (c.r - a.r) * (b.z - a.z))
    }

    /// ψ at (r, z), found by searching all triangles.
    fn evaluate(mesh: &Mesh, vertex: &[f64], edge: &[f64], at: Point) -> f64 {
        for t in 0..mesh.triangles.len() {
            let corners = mesh.triangles[t].map(|v| mesh.points[v as usize]);
            let part =
                |p: Point, q: Point| (p.r - at.r) * (q.z - at.z) - (q.r - at.r) * (p.z - at.z);
            let whole = 2.0 * area(mesh, t);
            let lambda =
                [0, 1, 2].map(|k| part(corners[(k + 1) % 3], corners[(k + 2) % 3]) / whole);
            if lambda.iter().all(|&l| -1e-12 < l) {
                return (0..3)
                    .map(|k| {
                        let pair = lambda[k] * lambda[(k + 1) % 3];
                        lambda[k] * vertex[mesh.triangles[t][k] as usize]
                            + 4.0 * pair * edge[mesh.triangle_edges[t][k] as usize]
                    })
                    .sum();
            }
        }
        panic!("no triangle holds {at:?}");
    }

    #[test]
    fn carries_quadratics_over_exactly_and_stays_conforming() {
        let mut mesh = square();
        let mut vertex = vec![0.3, -1.0, 2.0, 0.7];
        let mut edge = vec![0.5, -0.2, 0.9, 1.1, -0.4];
        let samples: Vec<Point> = (0..40)
            .map(|k| Point { r: 1.0 + (0.137 * k as f64) % 1.0, z: (0.311 * k as f64) % 1.0 })
            .collect();
        let before: Vec<f64> =
            samples.iter().map(|&p| evaluate(&mesh, &vertex, &edge, p)).collect();
        for round in 0..5 {
            let marked: Vec<u32> =
                (0..mesh.triangles.len() as u32).filter(|t| t % 3 == round % 2).collect();
            let before_cut = mesh.triangles.clone();
            let pairs = edge_triangles(&mesh);
            let mut carried = Carried { vertex: &mut vertex, edge: &mut edge };
            let Changes { fresh, origin } = bisect(&mut mesh, &pairs, &marked, &mut carried);
            assert_eq!(origin.len(), mesh.triangles.len());
            for (t, &old) in origin.iter().enumerate() {
                assert_eq!(fresh.contains(&(t as u32)), old == MADE);
                if old != MADE {
                    assert!(old as usize <= t);
                    assert_eq!(mesh.triangles[t], before_cut[old as usize]);
                }
            }
            let total: f64 = (0..mesh.triangles.len()).map(|t| area(&mesh, t)).sum();
            assert!((total - 1.0).abs() < 1e-14);
            for t in 0..mesh.triangles.len() {
                assert!(0.0 < area(&mesh, t));
                for k in 0..3 {
                    let mut ends = mesh.edges[mesh.triangle_edges[t][k] as usize];
                    let mut corners = [mesh.triangles[t][k], mesh.triangles[t][(k + 1) % 3]];
                    ends.sort();
                    corners.sort();
                    assert_eq!(ends, corners, "triangle {t} edge {k}");
                }
            }
            for (p, before) in samples.iter().zip(&before) {
                let after = evaluate(&mesh, &vertex, &edge, *p);
                assert!((after - before).abs() < 1e-13, "{p:?}: {before} became {after}");
            }
        }
        // Euler: vertices − edges + triangles = 1 for a disc without hanging nodes.
        assert_eq!(mesh.points.len() + mesh.triangles.len(), mesh.edges.len() + 1);
    }
}

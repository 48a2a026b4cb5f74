//! Who touches whom: the two triangles of an edge, and the triangles round each vertex in cyclic order.

use super::Mesh;

/// Marks the missing second triangle of an axis edge.
pub const NO_TRIANGLE: u32 = u32::MAX;

/// A triangle seen from one of its corners.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Blade {
    pub triangle: u32,
    /// Local index of the corner.
    pub corner: u8,
}

/// Adjacency of a mesh.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Fans {
    /// Triangles of each edge; the second is [`NO_TRIANGLE`] on the axis.
    pub edge_triangles: Vec<[u32; 2]>,
    /// `blades[start[v]..start[v + 1]]` are the triangles round v, in the surface's orientation.
    pub start: Vec<u32>,
    pub blades: Vec<Blade>,
    /// All vertices in the order in which the triangles meet them.
    pub tour: Vec<u32>,
}

impl Fans {
    /// Builds the adjacency. A fan of an axis vertex starts and ends on an axis edge; the others close.
    pub fn new(mesh: &Mesh) -> Fans {
        let edge_triangles = edge_triangles(mesh);
        let n = mesh.points.len();
        let mut start = vec![0u32; n + 1];
        let mut tour = Vec::with_capacity(n);
        let mut first = vec![Blade { triangle: NO_TRIANGLE, corner: 0 }; n];
        for (t, corners) in mesh.triangles.iter().enumerate() {
            for (k, &v) in corners.iter().enumerate() {
                let v = v as usize;
                start[v + 1] += 1;
                if first[v].triangle == NO_TRIANGLE {
                    tour.push(v as u32);
                }
                let opens = edge_triangles[mesh.triangle_edges[t][k] as usize][1] == NO_TRIANGLE;
                if first[v].triangle == NO_TRIANGLE || opens {
                    first[v] = Blade { triangle: t as u32, corner: k as u8 };
                }
            }
        }
        for v in 0..n {
            start[v + 1] += start[v];
        }
        let mut blades = Vec::with_capacity(start[n] as usize);
        for v in 0..n {
            let n_blades = (start[v + 1] - start[v]) as usize;
            let mut blade = first[v];
            for step in 0..n_blades {
                blades.push(blade);
                if step + 1 < n_blades {
                    blade = turn(mesh, &edge_triangles, blade);
                }
            }
        }
        Fans { edge_triangles, start, blades, tour }
    }

    /// The triangles round vertex v.
    pub fn around(&self, v: usize) -> &[Blade] {
        &self.blades[self.start[v] as usize..self.start[v + 1] as usize]
    }
}

/// The next triangle round the same corner.
fn turn(mesh: &Mesh, edge_triangles: &[[u32; 2]], blade: Blade) -> Blade {
    let (t, k) = (blade.triangle as usize, blade.corner as usize);
    let v = mesh.triangles[t][k];
    let pair = edge_triangles[mesh.triangle_edges[t][(k + 2) % 3] as usize];
    let next = beside(pair, blade.triangle);
    assert!(next != NO_TRIANGLE, "fan of vertex {v} is torn");
    Blade { triangle: next, corner: place_of(&mesh.triangles[next as usize], v) }
}

/// The other triangle of an edge's two.
#[inline]
pub fn beside(pair: [u32; 2], triangle: u32) -> u32 {
    if pair[0] == triangle { pair[1] } else { pair[0] }
}

/// Local index of a vertex or an edge among a triangle's three, of which it is one.
#[inline]
pub fn place_of(three: &[u32; 3], which: u32) -> u8 {
    u8::from(three[1] == which) + 2 * u8::from(three[2] == which)
}

/// The one or two triangles of each edge, in triangle order.
pub fn edge_triangles(mesh: &Mesh) -> Vec<[u32; 2]> {
    let mut pairs = vec![[NO_TRIANGLE; 2]; mesh.edges.len()];
    for (t, edges) in mesh.triangle_edges.iter().enumerate() {
        for &e in edges {
            let pair = &mut pairs[e as usize];
            let slot = usize::from(pair[0] != NO_TRIANGLE);
            assert!(pair[slot] == NO_TRIANGLE, "edge {e} has three triangles");
            pair[slot] = t as u32;
        }
    }
    pairs
}

//! Numbering of the unknowns: off-axis vertices first, then edges with both ends off the axis.
//!
//! On the axis ψ = 0; an edge with one end on the axis carries ψ = ψ_end·t², so its bubble coefficient is −¼ of
//! the end's value and no unknown of its own (finite energy needs ψ = O(r²)).

use crate::mesh::Mesh;

/// Marks a vertex or edge without an unknown.
pub const NONE: u32 = u32::MAX;

/// Numbers of the unknowns.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Space {
    pub vertex_dof: Vec<u32>,
    pub edge_dof: Vec<u32>,
    pub n_vertex_dofs: usize,
    pub n_dofs: usize,
}

impl Space {
    /// Numbers the unknowns of a mesh; vertices keep their order, so a coarser round's vertices come first.
    pub fn new(mesh: &Mesh) -> Space {
        let mut count = 0;
        let mut next = |is_free: bool| {
            if !is_free {
                return NONE;
            }
            count += 1;
            count - 1
        };
        let vertex_dof: Vec<u32> = mesh.on_axis.iter().map(|&on| next(!on)).collect();
        let n_vertex_dofs = vertex_dof.iter().filter(|&&d| d != NONE).count();
        let is_free = |e: &[u32; 2]| !mesh.on_axis[e[0] as usize] && !mesh.on_axis[e[1] as usize];
        let edge_dof: Vec<u32> = mesh.edges.iter().map(|e| next(is_free(e))).collect();
        let n_dofs = count as usize;
        Space { vertex_dof, edge_dof, n_vertex_dofs, n_dofs }
    }

    /// Coefficients on all vertices and edges, constrained ones filled in, from the vector of unknowns.
    pub fn expand(&self, mesh: &Mesh, x: &[f64]) -> (Vec<f64>, Vec<f64>) {
        let vertex: Vec<f64> =
            self.vertex_dof.iter().map(|&d| if d == NONE { 0.0 } else { x[d as usize] }).collect();
        let edge = self.edge_dof.iter().zip(&mesh.edges).map(|(&d, ends)| match d {
            // One of the ends is 0: the sum is the other.
            NONE => -0.25 * (vertex[ends[0] as usize] + vertex[ends[1] as usize]),
            d => x[d as usize],
        });
        let edge = edge.collect();
        (vertex, edge)
    }

    /// The vector of unknowns from coefficients on all vertices and edges.
    pub fn restrict(&self, vertex: &[f64], edge: &[f64]) -> Vec<f64> {
        let mut x = vec![0.0; self.n_dofs];
        for (&d, &value) in self.vertex_dof.iter().zip(vertex).chain(self.edge_dof.iter().zip(edge))
        {
            if d != NONE {
                x[d as usize] = value;
            }
        }
        x
    }

    /// Unknowns of a triangle: three vertices, then edges (0,1), (1,2), (2,0); `NONE` where constrained.
    #[inline]
    pub fn dofs(&self, mesh: &Mesh, t: usize) -> [u32; 6] {
        let [a, b, c] = mesh.triangles[t].map(|v| self.vertex_dof[v as usize]);
        let [d, e, f] = mesh.triangle_edges[t].map(|k| self.edge_dof[k as usize]);
        [a, b, c, d, e, f]
    }
}

//! Field → `field.vtu`: quadratic triangles of the real half plane with ψ, B, H, permeability, region and share.
//!
//! Only the XML path of vtkio is used; its other writers put legacy text under a `.vtu` name.

use crate::mesh::{Chart, Mesh};
use crate::results::sample::CellValues;
use crate::solve::Solution;
use vtkio::model::{
    Attribute, Attributes, ByteOrder, CellType, Cells, DataSet, UnstructuredGridPiece, Version,
    VertexNumbers, Vtk,
};

/// Why the file could not be made.
#[derive(Debug, thiserror::Error)]
pub enum VtkError {
    #[error("{what}: {found} values for {wanted}")]
    Length { what: &'static str, found: usize, wanted: usize },
    #[error("the VTK writer failed: {0}")]
    Writer(String),
}

/// Bytes of an XML unstructured grid (r, z, 0) [m]: corners then middles 01, 12, 20, cell type 22.
///
/// ψ at a middle is ½(ψ_i + ψ_j) + edge coefficient, since the edge function 4λ_iλ_j is 1 there.
/// - `cells`, `shares`: the field, and the share of the interval's width [J]; one entry a triangle of the mesh (those of the
///   cap are skipped in the file)
///
/// Fails when an array does not match the mesh.
pub fn field_vtu(
    mesh: &Mesh,
    solution: &Solution,
    cells: &CellValues,
    shares: &[f64],
) -> Result<Vec<u8>, VtkError> {
    check_lengths(mesh, solution, cells, shares)?;
    let inside: Vec<usize> =
        (0..mesh.triangles.len()).filter(|&t| mesh.charts[t] == Chart::Inside).collect();
    let nodes = number_nodes(mesh, solution, &inside);
    let n_cells = inside.len();
    let piece = UnstructuredGridPiece {
        points: nodes.points.into(),
        cells: Cells {
            cell_verts: VertexNumbers::XML {
                connectivity: nodes.connectivity,
                offsets: (1..=n_cells as u64).map(|i| 6 * i).collect(),
            },
            types: vec![CellType::QuadraticTriangle; n_cells],
        },
        data: Attributes {
            point: vec![Attribute::scalars("psi [Wb per rad]", 1).with_data(nodes.psi)],
            cell: cell_data(mesh, cells, shares, &inside),
        },
    };
    let file = Vtk {
        version: Version::new_xml(1, 0),
        title: String::new(),
        byte_order: ByteOrder::LittleEndian,
        file_path: None,
        data: DataSet::inline(piece),
    };
    let mut bytes = vec![];
    file.write_xml(&mut bytes)
        .map_err(|e| VtkError::Writer(super::numbers::clip(&e.to_string(), 200)))?;
    Ok(bytes)
}

fn check_lengths(
    mesh: &Mesh,
    solution: &Solution,
    cells: &CellValues,
    shares: &[f64],
) -> Result<(), VtkError> {
    let n = mesh.triangles.len();
    for (what, found, wanted) in [
        ("charts", mesh.charts.len(), n),
        ("regions", mesh.regions.len(), n),
        ("B", cells.b.len(), n),
        ("H", cells.h.len(), n),
        ("permeability", cells.permeability.len(), n),
        ("share", shares.len(), n),
        ("vertex coefficients", solution.vertex.len(), mesh.points.len()),
        ("edge coefficients", solution.edge.len(), mesh.edges.len()),
    ] {
        if found != wanted {
            return Err(VtkError::Length { what, found, wanted });
        }
    }
    Ok(())
}

struct Nodes {
    /// x, y, z of each node, flat.
    points: Vec<f64>,
    psi: Vec<f64>,
    /// Six nodes a cell, flat.
    connectivity: Vec<u64>,
}

/// Numbers the corners and middles of the chosen triangles in order of first appearance.
fn number_nodes(mesh: &Mesh, solution: &Solution, inside: &[usize]) -> Nodes {
    let n_vertices = mesh.points.len();
    let mut numbers = vec![u64::MAX; n_vertices + mesh.edges.len()];
    let mut nodes = Nodes { points: vec![], psi: vec![], connectivity: vec![] };
    for &t in inside {
        let corners = mesh.triangles[t].map(|v| v as usize);
        let middles = mesh.triangle_edges[t].map(|e| n_vertices + e as usize);
        for key in corners.into_iter().chain(middles) {
            if numbers[key] == u64::MAX {
                numbers[key] = nodes.psi.len() as u64;
                let (r, z, psi) = node(mesh, solution, key);
                nodes.points.extend([r, z, 0.0]);
                nodes.psi.push(psi);
            }
            nodes.connectivity.push(numbers[key]);
        }
    }
    nodes
}

/// (r, z, ψ) of a vertex, or of the middle of edge `key − n_vertices`.
fn node(mesh: &Mesh, solution: &Solution, key: usize) -> (f64, f64, f64) {
    let n_vertices = mesh.points.len();
    if key < n_vertices {
        return (mesh.points[key].r, mesh.points[key].z, solution.vertex[key]);
    }
    let edge = key - n_vertices;
    let [i, j] = mesh.edges[edge].map(|v| v as usize);
    let (p, q) = (mesh.points[i], mesh.points[j]);
    let psi = 0.5 * (solution.vertex[i] + solution.vertex[j]) + solution.edge[edge];
    (0.5 * (p.r + q.r), 0.5 * (p.z + q.z), psi)
}

fn cell_data(mesh: &Mesh, cells: &CellValues, shares: &[f64], inside: &[usize]) -> Vec<Attribute> {
    let vectors = |name: &str, values: &[[f64; 2]]| {
        let flat: Vec<f64> =
            inside.iter().flat_map(|&t| [values[t][0], values[t][1], 0.0]).collect();
        Attribute::vectors(name).with_data(flat)
    };
    let scalars = |name: &str, value: &dyn Fn(usize) -> f64| {
        let flat: Vec<f64> = inside.iter().map(|&t| value(t)).collect();
        Attribute::scalars(name, 1).with_data(flat)
    };
    let regions: Vec<i32> = inside.iter().map(|&t| i32::from(mesh.regions[t].0)).collect();
    vec![
        vectors("B [T]", &cells.b),
        vectors("H [A per m]", &cells.h),
        scalars("magnitude of B [T]", &|t| cells.b[t][0].hypot(cells.b[t][1])),
        scalars("relative permeability", &|t| cells.permeability[t]),
        Attribute::scalars("region", 1).with_data(regions),
        scalars("interval share [J]", &|t| shares[t]),
    ]
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::report::fixture;
    use vtkio::model::Piece;

    fn read_back(bytes: &[u8]) -> UnstructuredGridPiece {
        let file = Vtk::parse_xml(bytes).unwrap();
        let DataSet::UnstructuredGrid { pieces, .. } = file.data else {
            panic!("not an unstructured grid")
        };
        let Some(Piece::Inline(piece)) = pieces.into_iter().next() else {
            panic!("no inline piece")
        };
        *piece
    }

    #[test]
    fn file_reads_back_with_quadratic_triangles_and_without_the_cap() {
        let field = fixture::field(4);
        let piece = read_back(
            &field_vtu(&field.mesh, &field.solution, &field.cells, &field.shares).unwrap(),
        );
        let n_inside = field.mesh.triangles.len() - 1;
        assert_eq!(piece.cells.types, vec![CellType::QuadraticTriangle; n_inside]);
        assert_eq!(piece.data.cell.len(), 6);
    }

    #[test]
    fn middles_lie_half_way_in_the_order_01_12_20_and_carry_the_quadratic_value() {
        let field = fixture::field(4);
        let piece = read_back(
            &field_vtu(&field.mesh, &field.solution, &field.cells, &field.shares).unwrap(),
        );
        let points: Vec<f64> = piece.points.into_vec().unwrap();
        let Attribute::DataArray(psi) = &piece.data.point[0] else { panic!("no array") };
        let psi: Vec<f64> = psi.data.clone().into_vec().unwrap();
        let VertexNumbers::XML { connectivity, .. } = piece.cells.cell_verts else {
            panic!("legacy cells")
        };
        let cell = &connectivity[24..30];
        for k in 0..3 {
            let [i, j, m] = [cell[k], cell[(k + 1) % 3], cell[3 + k]].map(|n| n as usize);
            for axis in 0..2 {
                let half = 0.5 * (points[3 * i + axis] + points[3 * j + axis]);
                assert!((points[3 * m + axis] - half).abs() < 1e-15, "node {m} is not half way");
            }
            // The fixture's coefficients interpolate its ψ at the middles.
            let edge = field.mesh.triangle_edges[4][k] as usize;
            let ends = field.mesh.edges[edge].map(|v| field.solution.vertex[v as usize]);
            assert_eq!(psi[m], 0.5 * (ends[0] + ends[1]) + field.solution.edge[edge]);
        }
    }

    #[test]
    fn a_missing_value_is_named() {
        let mut field = fixture::field(2);
        field.shares.pop();
        let error =
            field_vtu(&field.mesh, &field.solution, &field.cells, &field.shares).unwrap_err();
        assert_eq!(error.to_string(), "share: 16 values for 17");
    }
}

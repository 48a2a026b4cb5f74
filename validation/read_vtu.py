"""Reads field.vtu with the VTK library and compares B with the derivatives that VTK itself takes of psi.

Run:   python3 validation/read_vtu.py field.vtu
Exit:  0 agrees, 1 does not, 77 the library is not installed.
Checks: only quadratic triangles (cell type 22); corners counter-clockwise; every array there and finite;
B_r = -(1/r) d psi/dz and B_z = (1/r) d psi/dr at the centroid, which fails if the node order or a value is wrong.
"""

import sys

try:
    import vtk
    from vtk.util.numpy_support import vtk_to_numpy
except ImportError:
    print("skipped, not installed: the Python package vtk")
    sys.exit(77)

# B and psi are double precision; a derivative loses about eps * psi / (h * r * B), 1e-7 on the finest triangles here.
TOLERANCE = 1e-6
CELL_ARRAYS = [
    "B [T]",
    "H [A per m]",
    "magnitude of B [T]",
    "relative permeability",
    "region",
    "interval share [J]",
]


def main(path):
    reader = vtk.vtkXMLUnstructuredGridReader()
    reader.SetFileName(path)
    reader.Update()
    grid = reader.GetOutput()
    n_cells = grid.GetNumberOfCells()
    assert 0 < n_cells, "no cells were read"
    psi = vtk_to_numpy(grid.GetPointData().GetArray("psi [Wb per rad]"))
    arrays = {}
    for name in CELL_ARRAYS:
        array = grid.GetCellData().GetArray(name)
        assert array is not None, f"{name} is missing"
        arrays[name] = vtk_to_numpy(array)
        assert len(arrays[name]) == n_cells, f"{name} has {len(arrays[name])} values for {n_cells} cells"
        assert abs(arrays[name]).max() < 1e30, f"{name} is not finite"
    b = arrays["B [T]"]
    largest = abs(b).max()
    worst = 0.0
    for i in range(n_cells):
        cell = grid.GetCell(i)
        assert cell.GetCellType() == 22, f"cell {i} has type {cell.GetCellType()}"
        points = [cell.GetPoints().GetPoint(k) for k in range(6)]
        (x0, y0), (x1, y1), (x2, y2) = [p[:2] for p in points[:3]]
        assert 0 < (x1 - x0) * (y2 - y0) - (x2 - x0) * (y1 - y0), f"cell {i} is clockwise"
        values = [float(psi[cell.GetPointId(k)]) for k in range(6)]
        derivatives = [0.0] * 3
        cell.Derivatives(0, [1 / 3, 1 / 3, 0.0], values, 1, derivatives)
        r = sum(p[0] for p in points[:3]) / 3
        off = max(abs(-derivatives[1] / r - b[i][0]), abs(derivatives[0] / r - b[i][1]))
        worst = max(worst, off / largest)
    print(f"{n_cells} cells, B differs from VTK's own derivative by at most {worst:.1e} of its largest value")
    return 0 if worst <= TOLERANCE else 1


sys.exit(main(sys.argv[1]))

"""Reads field.vtu with the vtk library and computes every winding's flux linkage anew.

    python3 validation/linkage_from_vtu.py SHEET OUTPUT_DIRECTORY

Flux linkage = 2 pi N/A_w * integral of psi dA over the cells of the winding's sections [Wb]. A cell is a straight-edged
quadratic triangle: the integral of psi is exactly area * (sum of its three mid-edge values)/3. Cells belong to the
section whose rectangle holds their centroid; the sum of their areas must be the rectangle's.

Prints one JSON object: for each winding its linkage by the file, and the value and ends of result.json.
Needs `pip install vtk` (BSD licence). Source of the cell's node order: VTK File Formats, VTK_QUADRATIC_TRIANGLE = 22.
"""

import json
import math
import pathlib
import sys
import tomllib

import vtk

PSI = "psi [Wb per rad]"
MILLIMETER = 1e-3


def read(path):
    """Unstructured grid of an XML file."""
    reader = vtk.vtkXMLUnstructuredGridReader()
    reader.SetFileName(str(path))
    reader.Update()
    grid = reader.GetOutput()
    assert grid.GetNumberOfCells() > 0, f"{path} has no cells"
    return grid


def triangles(grid):
    """Per cell: centroid (r, z) [m], area [m2], integral of psi [Wb m2/rad]."""
    psi = grid.GetPointData().GetArray(PSI)
    assert psi is not None, f"no array {PSI!r}"
    for k in range(grid.GetNumberOfCells()):
        assert grid.GetCellType(k) == vtk.VTK_QUADRATIC_TRIANGLE
        cell = grid.GetCell(k)
        nodes = [cell.GetPointId(i) for i in range(6)]
        (a, b, c, *middles) = [grid.GetPoint(node) for node in nodes]
        for middle, (p, q) in zip(middles, ((a, b), (b, c), (c, a))):
            for x, y, z in zip(middle, p, q):
                assert abs(x - 0.5 * (y + z)) <= 1e-12, "a middle node is not in the middle"
        area = 0.5 * ((b[0] - a[0]) * (c[1] - a[1]) - (c[0] - a[0]) * (b[1] - a[1]))
        assert area > 0.0, f"cell {k} is inverted"
        centroid = tuple(sum(p[i] for p in (a, b, c)) / 3.0 for i in range(2))
        yield centroid, area, area * sum(psi.GetValue(node) for node in nodes[3:]) / 3.0


def linkage(sections, cells):
    """Flux linkage of sections in series [Wb]."""
    total = 0.0
    for section in sections:
        r = [MILLIMETER * x for x in section["radii"]]
        z = [MILLIMETER * x for x in section["heights"]]
        inside = [c for c in cells if r[0] < c[0][0] < r[1] and z[0] < c[0][1] < z[1]]
        area = math.fsum(c[1] for c in inside)
        rectangle = (r[1] - r[0]) * (z[1] - z[0])
        assert abs(area / rectangle - 1.0) <= 1e-9, f"cells of {section} cover {area}, not {rectangle}"
        total += 2.0 * math.pi * section["turns"] / area * math.fsum(c[2] for c in inside)
    return total


def main(sheet, directory):
    sheet = tomllib.loads(pathlib.Path(sheet).read_text(encoding="utf-8"))
    directory = pathlib.Path(directory)
    result = json.loads((directory / "result.json").read_text(encoding="utf-8"))
    grid = read(directory / "field.vtu")
    cells = list(triangles(grid))
    answer = []
    for winding, told in zip(sheet["windings"], result["windings"], strict=True):
        assert winding["name"] == told["name"]
        by_file = linkage(winding.get("sections", [winding]), cells)
        answer.append({"name": winding["name"], "by_file": by_file, **told["flux_linkage"]})
    print(json.dumps(answer))


if __name__ == "__main__":
    main(*sys.argv[1:])

"""The same field by a general finite-element library: times and errors beside our binary. See README.md."""

import json
import os
import resource
import subprocess
import sys
import time
from pathlib import Path

for name in ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS"):
    os.environ[name] = "1"

MU0 = 1.25663706212e-6
ROOT = Path(__file__).resolve().parents[2]
# Rectangles [r0, r1, z1] of the upper half in mm, each reaching down to z0: (r0, r1, z0, z1).
# Inductances: p = 8 general finite elements on graded meshes, exterior by inversion; relative error below 7e-9.
CASES = {
    "R1": {
        "sheet": "buoy_choke", "inductance": 7.006158150237224e-4, "permeability": 2000, "turns": 42,
        "core": [(2.7, 5.75, 0.15, 5.5), (2.7, 12.75, 5.5, 8.05), (10.6, 12.75, 0, 5.5)],
        "coil": (6.6, 10.2, 0, 4.9), "size": 13,
    },
    "R5": {
        "sheet": "solid_post", "inductance": 8.713868009336684e-4, "permeability": 1500, "turns": 60,
        "core": [(0, 7, 0.5, 8), (0, 16, 8, 11.5), (14, 16, 0, 8)],
        "coil": (8.2, 13.4, 0, 7.2), "size": 16,
    },
    "R8": {
        "sheet": "rod_coil", "inductance": 6.23435014866332e-4, "permeability": 500, "turns": 80,
        "core": [(0, 5, 0, 50)], "coil": (5.5, 7, 0, 10), "size": 50,
    },
}
TARGETS = (1e-3, 1e-4, 1e-5)
# Truncation error of a dipole: about the third power of this.
FAR = 60
RUNS = int(os.environ.get("RUNS", "5"))


def first_mesh(case):
    """Conforming triangles of all rectangles inside a quarter box, by a general-purpose mesher."""
    import numpy as np
    import triangle as tr

    far = FAR * case["size"]
    boxes = [*case["core"], case["coil"], (0, far, 0, far)]
    rs = sorted({r for b in boxes for r in b[:2]})
    zs = sorted({z for b in boxes for z in b[2:]})
    points, segments = {}, set()
    index = lambda p: points.setdefault(p, len(points))
    for r0, r1, z0, z1 in boxes:
        # Sides are cut where another rectangle has a corner, so that touching rectangles share their edges.
        for z in (z0, z1):
            cuts = [r for r in rs if r0 <= r <= r1 and (r in (r0, r1) or touches(boxes, r, z))]
            segments |= {tuple(sorted((index((a, z)), index((b, z))))) for a, b in zip(cuts, cuts[1:])}
        for r in (r0, r1):
            cuts = [z for z in zs if z0 <= z <= z1 and (z in (z0, z1) or touches(boxes, r, z))]
            segments |= {tuple(sorted((index((r, a)), index((r, b))))) for a, b in zip(cuts, cuts[1:])}
    made = tr.triangulate({"vertices": np.array(list(points)), "segments": np.array(sorted(segments))}, "pq25")
    return made["vertices"].T, made["triangles"].T


def touches(boxes, r, z):
    return any(r in b[:2] and z in b[2:] for b in boxes)


def inside(box, x):
    return (box[0] < x[0]) & (x[0] < box[1]) & (box[2] < x[1]) & (x[1] < box[3])


def solve(name, target, order):
    """Refines until the *true* error is below the target: kinder than any estimate could be. Reports its own estimate too."""
    import numpy as np
    import skfem
    from scipy.sparse.linalg import splu

    case = CASES[name]
    start = time.process_time()
    points, triangles = first_mesh(case)
    mesh = skfem.MeshTri(np.ascontiguousarray(points), np.ascontiguousarray(triangles))
    element = {2: skfem.ElementTriP2, 3: skfem.ElementTriP3, 4: skfem.ElementTriP4}[order]()
    r0, r1, z0, z1 = case["coil"]
    density = case["turns"] / ((r1 - r0) * 2 * (z1 - z0))

    @skfem.BilinearForm
    def energy(u, v, w):
        r = w.x[0]
        return w["nu"] * r * ((2 * u + r * u.grad[0]) * (2 * v + r * v.grad[0]) + r * r * u.grad[1] * v.grad[1])

    @skfem.LinearForm
    def load(v, w):
        return w["j"] * w.x[0] ** 2 * v

    @skfem.Functional
    def jump(w):
        # Jump of the tangential field H, weighted so that its square is an energy.
        r, n = w.x[0], w.n
        flux = lambda u, nu: nu * (n[0] * (2 * u + r * u.grad[0]) + n[1] * r * u.grad[1])
        return w.h * r * (flux(w["u1"], w["nu1"]) - flux(w["u2"], w["nu2"])) ** 2 / (w["nu1"] + w["nu2"])

    history, steps = [], 0
    for steps in range(1, 80):
        center = mesh.p[:, mesh.t].mean(axis=1)
        is_core = np.any([inside(b, center) for b in case["core"]], axis=0)
        nu = np.where(is_core, 1.0 / case["permeability"], 1.0)
        basis = skfem.Basis(mesh, element)
        whole = lambda v: np.broadcast_to(v[:, None], (mesh.nelements, basis.X.shape[-1]))
        matrix = energy.assemble(basis, nu=whole(nu))
        right = load.assemble(basis, j=whole(np.where(inside(case["coil"], center), density, 0.0)))
        far = FAR * case["size"] * (1 - 1e-9)
        fixed = basis.get_dofs(lambda x: (far < x[0]) | (far < x[1])).flatten()
        free = np.setdiff1d(np.arange(basis.N), fixed)
        factor = splu(matrix[free][:, free].tocsc(), permc_spec="MMD_AT_PLUS_A", diag_pivot_thresh=0.0,
                      options={"SymmetricMode": True})
        u = np.zeros(basis.N)
        u[free] = factor.solve(right[free])
        # Lengths in mm: psi has mm, energy has A^2*mm; both halves count.
        inductance = 2 * 2 * np.pi * MU0 * 1e-3 * (right @ u)
        history.append(inductance)
        error = estimate(history)
        if abs(inductance / case["inductance"] - 1) < target:
            break
        facets = [skfem.InteriorFacetBasis(mesh, element, side=i) for i in (0, 1)]
        cells = [mesh.f2t[i, facets[0].find] for i in (0, 1)]
        wide = lambda v: np.broadcast_to(v[:, None], (len(v), facets[0].X.shape[-1]))
        shares = jump.elemental(facets[0], u1=facets[0].interpolate(u), u2=facets[1].interpolate(u),
                                nu1=wide(nu[cells[0]]), nu2=wide(nu[cells[1]]))
        eta = np.zeros(mesh.nelements)
        for i in (0, 1):
            np.add.at(eta, cells[i], shares)
        ranked = np.argsort(-eta)
        enough = np.searchsorted(np.cumsum(eta[ranked]), 0.7 * eta.sum()) + 1
        mesh = mesh.refined(ranked[:enough])
    seconds = time.process_time() - start
    print(json.dumps({"inductance": inductance, "estimate": error / inductance, "unknowns": len(free),
                      "rounds": steps, "seconds": seconds}))


def estimate(history):
    """What is left of a geometric series of changes; infinite before there are two of them."""
    if len(history) < 3:
        return float("inf")
    before, last = abs(history[-2] - history[-3]), abs(history[-1] - history[-2])
    rate = min(last / before, 0.9) if before > 0 else 0.0
    return last * rate / (1 - rate)


def median(values):
    return sorted(values)[len(values) // 2]


def spent():
    """Processor time of all finished children: other programs on the machine hardly disturb it."""
    used = resource.getrusage(resource.RUSAGE_CHILDREN)
    return used.ru_utime + used.ru_stime


def timed(command):
    start = spent()
    done = subprocess.run(command, capture_output=True, text=True)
    assert done.stdout, done.stderr
    return spent() - start, done.stdout


def ours(binary, name, target):
    sheet = ROOT / "meshes" / f"{CASES[name]['sheet']}.toml"
    command = [binary, "solve", sheet, "--json", "--threads", "1", "--interval", str(target)]
    runs = [timed(command) for _ in range(RUNS)]
    starting = median([timed([binary, "--version"])[0] for _ in range(RUNS)])
    result = json.loads(runs[0][1])
    whole = median([w for w, _ in runs])
    exact, value = CASES[name]["inductance"], result["inductance"]
    return {
        "whole": whole,
        "solve": whole - starting,
        "unknowns": result["unknowns"],
        "error": abs(value["value"] / exact - 1),
        "end": max(abs(value[e] / exact - 1) for e in ("low", "high")),
    }


def peer(name, target):
    best = None
    for order in (2, 3, 4):
        command = [sys.executable, __file__, "--solve", name, str(target), str(order)]
        runs = [timed(command) for _ in range(RUNS)]
        results = [json.loads(text) for _, text in runs]
        found = {
            "order": order,
            "whole": median([w for w, _ in runs]),
            "solve": median([r["seconds"] for r in results]),
            "unknowns": results[0]["unknowns"],
            "error": abs(results[0]["inductance"] / CASES[name]["inductance"] - 1),
            "estimate": results[0]["estimate"],
        }
        if best is None or found["solve"] < best["solve"]:
            best = found
    return best


def main(binary):
    print("peer time by ours (whole process, solve only), processor times in ms, true relative errors of the inductance")
    print("ours: interval of that width, guaranteed; `end` is the worse end's error. peer: stopped by the true error, `own` is its estimate")
    print(f"{'whole':>7} {'solve':>7}  case wanted | {'whole':>8} {'solve':>8} {'unkn':>6} {'error':>8} {'end':>8} |"
          f" {'whole':>8} {'solve':>8} {'unkn':>6} {'error':>8} {'own':>8} order")
    for name in CASES:
        for target in TARGETS:
            a, b = ours(binary, name, target), peer(name, target)
            print(f"{b['whole'] / a['whole']:6.0f}x {b['solve'] / a['solve']:6.0f}x  {name:4} {target:6.0e} |"
                  f" {1e3 * a['whole']:8.1f} {1e3 * a['solve']:8.2f} {a['unknowns']:6} {a['error']:8.1e} {a['end']:8.1e} |"
                  f" {1e3 * b['whole']:8.0f} {1e3 * b['solve']:8.0f} {b['unknowns']:6} {b['error']:8.1e} {b['estimate']:8.1e} {b['order']:5}",
                  flush=True)


if __name__ == "__main__":
    if sys.argv[1:2] == ["--solve"]:
        solve(sys.argv[2], float(sys.argv[3]), int(sys.argv[4]))
    else:
        main(sys.argv[1] if len(sys.argv) > 1 else str(ROOT / "target/release/gapwright"))

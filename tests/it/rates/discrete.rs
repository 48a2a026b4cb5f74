//! Galerkin solutions of a given right-hand side on a given mesh, and their errors against a known field.
//!
//! Uses the stages' own space, stiffness, axis rule and cap tensor; load vector and boundary values are the test's.

use gapwright::fem::assemble;
use gapwright::fem::element::{Frame, Pair, blend, contract, dot};
use gapwright::fem::elements::{Elements, LOCAL_EDGES};
use gapwright::fem::moments::rule_of;
use gapwright::fem::{Coefficients, Reluctivity, Rules, Space, evaluate};
use gapwright::mesh::fans::{Fans, NO_TRIANGLE, edge_triangles};
use gapwright::mesh::{Mesh, RegionId};
use gapwright::model::Point;
use gapwright::solve::Solution;
use gapwright::sparse::{Hierarchy, Matrix, Multilevel, Stop, Storage, Swept, Workspace};

/// A field that is known everywhere: ψ, ∇ψ and the current density that drives it, in physical space.
pub trait Exact {
    /// Reluctivity of a region.
    fn reluctivity(&self, region: RegionId) -> f64;
    /// ψ at a point.
    fn psi(&self, region: RegionId, at: Point) -> f64;
    /// [∂ψ/∂r, ∂ψ/∂z].
    fn gradient(&self, region: RegionId, at: Point) -> Pair;
    /// J = −div((ν/r)∇ψ).
    fn current_density(&self, region: RegionId, at: Point) -> f64;
}

/// Relative errors of one mesh.
#[derive(Debug, Clone, Copy)]
pub struct Errors {
    pub n_unknowns: usize,
    /// √(∫(ψ_h − ψ)²/r / ∫ψ²/r): A = ψ/r in L2 over the volume.
    pub psi: f64,
    /// √(∫(ν/r)|∇(ψ_h − ψ)|² / ∫(ν/r)|∇ψ|²): B in the energy norm.
    pub field: f64,
    /// The same two over the real triangles only, without the cap's copy.
    pub inside: [f64; 2],
}

/// Where a reference point of a triangle lies in space, with |∂x/∂y| and the chart's gradient of a physical one.
struct Place {
    at: Point,
    /// |det ∂x/∂y|: 1 inside, 1/g⁴ in the cap.
    stretch: f64,
    /// ∂x_i/∂y_j: the identity inside, M/g² in the cap.
    derivative: [Pair; 2],
}

impl Place {
    fn new(mesh: &Mesh, t: usize, frame: &Frame, lambda: &[f64; 3]) -> Place {
        let y = frame.position(lambda);
        let at = evaluate::to_space(mesh, mesh.charts[t], y);
        match frame.gauge {
            None => Place { at, stretch: 1.0, derivative: [[1.0, 0.0], [0.0, 1.0]] },
            Some(gauge) => {
                let (g, relative) = gauge.at(y);
                let derivative = gauge.fold(g, relative).map(|row| row.map(|m| m / (g * g)));
                Place { at, stretch: g.powi(-4), derivative }
            }
        }
    }

    /// Reference covector (along the edges from corner 0) of a physical gradient.
    fn pull_back(&self, frame: &Frame, gradient: Pair) -> Pair {
        let d = &self.derivative;
        let chart = [
            d[0][0] * gradient[0] + d[1][0] * gradient[1],
            d[0][1] * gradient[0] + d[1][1] * gradient[1],
        ];
        let c = &frame.corners;
        [1, 2].map(|k| dot([c[k].r - c[0].r, c[k].z - c[0].z], chart))
    }
}

/// Solves on `mesh` with ψ given on its open border off the axis, and measures.
pub fn errors(mesh: &Mesh, exact: &dyn Exact) -> Errors {
    let space = Space::new(mesh);
    let n_regions = 1 + mesh.regions.iter().map(|r| r.0).max().unwrap();
    let coefficients = Coefficients {
        reluctivity: (0..n_regions)
            .map(|k| Reluctivity::Constant(exact.reluctivity(RegionId(k))))
            .collect(),
        current_density: vec![0.0; n_regions as usize],
    };
    let mut elements = Elements::default();
    let all: Vec<u32> = (0..mesh.triangles.len() as u32).collect();
    elements.update_constant(mesh, &coefficients, &Rules::working(), &all);
    let matrix = assemble::stiffness(mesh, &space, &Fans::new(mesh), &elements, Storage::default());
    let load = load(mesh, &space, exact);
    let fixed = border_values(mesh, &space, exact);
    let x = solve(&matrix, load, &fixed);
    let (vertex, edge) = space.expand(mesh, &x);
    let n_unknowns = fixed.iter().filter(|f| f.is_none()).count();
    measure(mesh, &Solution { vertex, edge }, exact, n_unknowns)
}

/// b_i = ∫ J φ_i, by the rules that measure the errors too: higher than the element needs.
fn load(mesh: &Mesh, space: &Space, exact: &dyn Exact) -> Vec<f64> {
    let rules = Rules::reference(8);
    let mut b = vec![0.0; space.n_dofs];
    for t in 0..mesh.triangles.len() {
        let frame = Frame::new(mesh, t);
        let rule = rule_of(&rules, &frame);
        let mut local = [0.0; 6];
        for (l, &weight) in rule.points.iter().zip(&rule.weights) {
            let place = Place::new(mesh, t, &frame, l);
            let density = exact.current_density(mesh.regions[t], place.at);
            let part = weight * frame.det_abs * place.stretch * density;
            for k in 0..3 {
                let (i, j) = LOCAL_EDGES[k];
                local[k] += part * l[k];
                local[3 + k] += part * 4.0 * l[i] * l[j];
            }
        }
        let dofs = space.dofs(mesh, t);
        let mut add = |d: u32, value: f64| {
            if let Some(b) = b.get_mut(d as usize) {
                *b += value;
            }
        };
        for k in 0..6 {
            add(dofs[k], local[k]);
        }
        for (k, (i, j)) in LOCAL_EDGES.into_iter().enumerate() {
            // An edge with one end on the axis carries −¼ of its free end.
            if dofs[3 + k] as usize >= space.n_dofs {
                add(dofs[i], -0.25 * local[3 + k]);
                add(dofs[j], -0.25 * local[3 + k]);
            }
        }
    }
    b
}

/// Interpolated ψ for the unknowns on the border off the axis, `None` for the others.
fn border_values(mesh: &Mesh, space: &Space, exact: &dyn Exact) -> Vec<Option<f64>> {
    let mut fixed = vec![None; space.n_dofs];
    for (e, pair) in edge_triangles(mesh).iter().enumerate() {
        let ends = mesh.edges[e].map(|v| v as usize);
        if pair[1] != NO_TRIANGLE || ends.iter().all(|&v| mesh.on_axis[v]) {
            continue;
        }
        let region = mesh.regions[pair[0] as usize];
        let [p, q] = ends.map(|v| mesh.points[v]);
        let middle = Point { r: 0.5 * (p.r + q.r), z: 0.5 * (p.z + q.z) };
        let [a, b] = [p, q].map(|p| exact.psi(region, p));
        for (v, value) in ends.into_iter().zip([a, b]) {
            if let Some(slot) = fixed.get_mut(space.vertex_dof[v] as usize) {
                *slot = Some(value);
            }
        }
        if let Some(slot) = fixed.get_mut(space.edge_dof[e] as usize) {
            *slot = Some(exact.psi(region, middle) - 0.5 * (a + b));
        }
    }
    fixed
}

/// A x = b with some unknowns given: their rows become the identity. Gauss–Seidel preconditioner, to rounding.
fn solve(matrix: &Matrix, mut b: Vec<f64>, fixed: &[Option<f64>]) -> Vec<f64> {
    let n = b.len();
    let (mut start, mut columns, mut values) = (vec![0], vec![], vec![]);
    for (i, row) in matrix.outer_iterator().enumerate() {
        if fixed[i].is_some() {
            columns.push(i as u32);
            values.push(1.0);
        } else {
            for (j, &value) in row.iter() {
                match fixed[j] {
                    Some(given) => b[i] -= value * given,
                    None => {
                        columns.push(j as u32);
                        values.push(value);
                    }
                }
            }
        }
        start.push(columns.len());
    }
    for (b, given) in b.iter_mut().zip(fixed) {
        if given.is_some() {
            *b = 0.0;
        }
    }
    let reduced = Swept::new(Matrix::new((n, n), start, columns, values));
    let mut x = vec![0.0; n];
    // 1e-22 of the energy is 1e-11 of the field: far below the smallest error that is measured.
    let stop = Stop { outstanding: 1e-22, of_lowered: 0.0, n_iterations_max: 20_000 };
    let (hierarchy, mut work) = (Hierarchy::default(), Workspace::default());
    Multilevel::new(&reduced, &hierarchy, &mut work).solve(&b, &mut x, &stop, 0.0).unwrap();
    for (x, given) in x.iter_mut().zip(fixed) {
        *x = given.unwrap_or(*x);
    }
    x
}

/// Both relative errors by quadrature.
fn measure(mesh: &Mesh, solution: &Solution, exact: &dyn Exact, n_unknowns: usize) -> Errors {
    let rules = Rules::reference(8);
    let (mut sums, mut inside) = ([0.0; 4], [0.0; 4]);
    for t in 0..mesh.triangles.len() {
        let frame = Frame::new(mesh, t);
        let (vertex, edge) = solution.local(mesh, t);
        let gradients = solution.gradients(mesh, t);
        let region = mesh.regions[t];
        let rule = rule_of(&rules, &frame);
        for (l, &weight) in rule.points.iter().zip(&rule.weights) {
            let place = Place::new(mesh, t, &frame, l);
            let psi = exact.psi(region, place.at);
            let du = place.pull_back(&frame, exact.gradient(region, place.at));
            let u = blend(l, &gradients);
            let difference = [u[0] - du[0], u[1] - du[1]];
            let (kappa, metric) = frame.coefficient(l, exact.reluctivity(region));
            // The cap's copy is measured in its own coordinates: over space itself infinity would have no weight left.
            let volume = weight * frame.det_abs / frame.position(l).r;
            let parts = [
                volume * (evaluate::psi(vertex, edge, l) - psi).powi(2),
                volume * psi.powi(2),
                weight * kappa * contract(difference, metric, difference),
                weight * kappa * contract(du, metric, du),
            ];
            for k in 0..4 {
                sums[k] += parts[k];
                inside[k] += if frame.gauge.is_none() { parts[k] } else { 0.0 };
            }
        }
    }
    let [psi, field] = relative(sums);
    Errors { n_unknowns, psi, field, inside: relative(inside) }
}

fn relative(sums: [f64; 4]) -> Pair {
    [(sums[0] / sums[1]).sqrt(), (sums[2] / sums[3]).sqrt()]
}

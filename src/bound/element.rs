//! One triangle of the equilibration: defects, targets, and its part of the ends. Its Gram matrix is in `fem::elements`.

use super::{Field, Flux};
use crate::fem::element::{Frame, GRADIENT, POSITION, Pair, blend, contract, dot, wedge};
use crate::fem::elements::{LOCAL_EDGES, Packed};
use crate::fem::moments::rule_of;
use crate::mesh::Mesh;
use crate::model::Law;

/// Everything that the patch problems need of a triangle beyond its Gram matrix.
#[derive(Debug, Clone, Copy)]
pub struct Patchwork {
    /// F_a: what the patch of each corner must carry away here.
    pub defect: [f64; 3],
    /// For each corner a: (flux, tilt) of the interpolant of χ_a σ̃ on the spokes to a + 1 and a + 2.
    pub target: [[[f64; 2]; 2]; 3],
}

impl Patchwork {
    /// From the flux moments w_m = ∫ λ_m σ̂ (eq. 9).
    pub fn new(field: &Field, t: usize, w: &[Pair; 3]) -> Patchwork {
        let axis = field.mesh.triangles[t].map(|v| field.mesh.on_axis[v as usize]);
        let source = match field.coefficients.current_density[field.mesh.regions[t].0 as usize] {
            0.0 => 0.0,
            current_density => current_density * Frame::new(field.mesh, t).det_abs,
        };
        Patchwork { defect: defects(axis, w, source), target: targets(axis, w) }
    }
}

/// ½ tᵀM t of the flux on a triangle: its part of `high`.
pub fn half_square(gram: &Packed, x: &[f64; 6]) -> f64 {
    let (mut sum, mut place) = (0.0, 0);
    for i in 0..6 {
        let mut row = 0.5 * gram[place] * x[i];
        for j in i + 1..6 {
            row += gram[place + j - i] * x[j];
        }
        sum += row * x[i];
        place += 6 - i;
    }
    sum
}

/// F_a = ∇λ_a·Σ w − J|det|/6, half-axis edges moved from their free end to the axis by R_e/4 (eq. 9).
fn defects(axis: [bool; 3], w: &[Pair; 3], source: f64) -> [f64; 3] {
    let sum = [w[0][0] + w[1][0] + w[2][0], w[0][1] + w[1][1] + w[2][1]];
    let share = source / 6.0;
    let mut defect = [-sum[0] - sum[1] - share, sum[0] - share, sum[1] - share];
    for (i, j) in LOCAL_EDGES {
        let (v, pole) = match (axis[i], axis[j]) {
            (false, true) => (i, j),
            (true, false) => (j, i),
            _ => continue,
        };
        let bubble = 4.0 * (dot(GRADIENT[pole], w[v]) + dot(GRADIENT[v], w[pole])) - share;
        defect[v] -= 0.25 * bubble;
        defect[pole] += 0.25 * bubble;
    }
    defect
}

/// Flux and tilt of the interpolant of χ_a σ̃ on both spokes of each corner, σ̃ the P1 projection of σ̂ (eq. 10).
fn targets(axis: [bool; 3], w: &[Pair; 3]) -> [[[f64; 2]; 2]; 3] {
    let sum = [w[0][0] + w[1][0] + w[2][0], w[0][1] + w[1][1] + w[2][1]];
    let s = w.map(|w| [24.0 * w[0] - 6.0 * sum[0], 24.0 * w[1] - 6.0 * sum[1]]);
    let mut targets = [[[0.0; 2]; 2]; 3];
    for (a, j, side) in [(0, 1, 0), (0, 2, 1), (1, 2, 0), (1, 0, 1), (2, 0, 0), (2, 1, 1)] {
        let e = [POSITION[j][0] - POSITION[a][0], POSITION[j][1] - POSITION[a][1]];
        let (at_a, at_j) = (wedge(s[a], e), wedge(s[j], e));
        targets[a][side] = match (axis[a], axis[j]) {
            (true, false) => [at_a * (5.0 / 12.0) + 0.25 * at_j, 0.55 * at_a - 0.05 * at_j],
            (false, true) => [0.25 * at_a + at_j / 12.0, 0.45 * at_a + 0.05 * at_j],
            _ => [at_a / 3.0 + at_j / 6.0, 0.5 * at_a],
        };
    }
    targets
}

/// (flux, flux, flux, tilt, tilt, tilt) on the local edges, fluxes turned into local direction.
pub fn local_numbers(mesh: &Mesh, t: usize, flux: &Flux) -> [f64; 6] {
    let mut x = [0.0; 6];
    for k in 0..3 {
        let e = mesh.triangle_edges[t][k] as usize;
        let is_along = mesh.edges[e][0] == mesh.triangles[t][k];
        x[k] = if is_along { flux.through[e] } else { -flux.through[e] };
        x[3 + k] = flux.tilt[e];
    }
    x
}

/// Values ω^m of τ's 1-form at the three vertices, from its local numbers: ω = Σ λ_m ω^m.
pub fn local_form(x: &[f64; 6]) -> [Pair; 3] {
    let mut form = [[0.0; 2]; 3];
    for (m, next, last) in [(0, 1, 2), (1, 2, 0), (2, 0, 1)] {
        // Edge m leaves the vertex towards `next`; edge `last` arrives from `last`.
        let (out, back) = (x[m] + x[3 + m], x[3 + last] - x[last]);
        form[m] = [
            out * GRADIENT[next][0] + back * GRADIENT[last][0],
            out * GRADIENT[next][1] + back * GRADIENT[last][1],
        ];
    }
    form
}

/// ∫ dψ∧ω = ∫ ∇ψ·τ over the reference triangle.
pub fn wedge_integral(u: &[Pair; 3], form: &[Pair; 3]) -> f64 {
    let sum = |v: &[Pair; 3]| [v[0][0] + v[1][0] + v[2][0], v[0][1] + v[1][1] + v[2][1]];
    let diagonal: f64 = (0..3).map(|m| wedge(u[m], form[m])).sum();
    (wedge(sum(u), sum(form)) + diagonal) / 24.0
}

/// ∫ r·w*(|τ|) of a saturating triangle, by quadrature (eq. 4).
///
/// With ∫ r·w(B) by the same points and ∫ ∇ψ·τ, which they integrate exactly, the share is a sum of Fenchel–Young
/// defects, each ≥ 0.
pub fn saturating_coenergy(field: &Field, t: usize, law: &Law, form: &[Pair; 3]) -> f64 {
    let frame = Frame::new(field.mesh, t);
    let rule = rule_of(field.rules, &frame);
    let mut dual = 0.0;
    for (lambda, &weight) in rule.points.iter().zip(&rule.weights) {
        let radius = frame.position(lambda).r;
        let omega = blend(lambda, form);
        // |τ|² = ω·S ω/|det J| in the inside chart; |τ| is H.
        let h = (contract(omega, frame.metric, omega) / frame.det_abs).max(0.0).sqrt();
        dual += weight * radius * frame.det_abs * law.coenergy_density(h);
    }
    dual
}

//! Force on a gap by virtual work in domain form, on one mesh (eq. 15).
//!
//! The nodes of the gap's faces move apart, others follow or stay; the derivative of every triangle's energy at fixed ψ and
//! fixed current is exact, so no second solution and no difference quotient is needed.
//! Source: J. L. Coulomb, IEEE Trans. Magn. 19 (1983) 2514 (local derivative of the Jacobian; from memory).

use super::sample::Sampler;
use crate::fem::Reluctivity;
use crate::fem::element::{Frame, Pair, Tensor, blend, contract, dot, sides, wedge};
use crate::fem::moments::{PAIRS, flux_density_magnitude, rule_of};
use crate::fem::quadrature::Rule;
use crate::geometry::{Leg, RegionKind};
use crate::mesh::Chart;
use crate::model::{Across, Law, Model, Point};
use crate::units::{Meter, Newton};
use std::f64::consts::TAU;

/// −dW'/dl at fixed currents for gap `gap` growing [N]: positive pulls the gap shut.
pub fn gap_force(model: &Model, sampler: &Sampler, gap: usize) -> Newton {
    let velocity = match model.gaps[gap].across {
        Across::Spacer => spacer_velocity(model, sampler),
        Across::Post | Across::Wall => ground_velocity(model, sampler, gap),
    };
    let mesh = &sampler.outcome.mesh;
    let mut change = 0.0;
    for (t, corners) in mesh.triangles.iter().enumerate() {
        let speed = corners.map(|v| velocity[v as usize]);
        // What moves as a whole keeps its energy.
        let is_bent = speed[0] != speed[1] || speed[0] != speed[2];
        if is_bent && mesh.charts[t] == Chart::Inside {
            change += coenergy_rate(sampler, t, speed);
        }
    }
    -TAU * change
}

/// d(∫Jψ − ∫r·w)/dl of one triangle whose corners move with dz/dl = `speed`, ψ's coefficients held.
fn coenergy_rate(sampler: &Sampler, t: usize, speed: [f64; 3]) -> f64 {
    let (frame, gradients) = sampler.local(t);
    let (e1, e2) = sides(&frame.corners);
    let (d1, d2): (Pair, Pair) = ([0.0, speed[1] - speed[0]], [0.0, speed[2] - speed[0]]);
    // Inside triangles are counter-clockwise: det = |det|.
    let det_rate = (wedge(d1, e2) + wedge(e1, d2)) / frame.det_abs;
    let side_rates = [2.0 * dot(e2, d2), -dot(d1, e2) - dot(e1, d2), 2.0 * dot(e1, d1)];
    let metric_rate = [0, 1, 2].map(|i| side_rates[i] / frame.det_abs - frame.metric[i] * det_rate);

    let energy_rate = match sampler.reluctivity(t) {
        Reluctivity::Constant(_) => {
            linear_energy_rate(&frame, &gradients, metric_rate, &sampler.outcome.elements.k[t])
        }
        Reluctivity::Saturating(law) => {
            let rule = rule_of(&sampler.rules, &frame);
            saturating_energy_rate(&frame, &gradients, metric_rate, det_rate, rule, law)
        }
    };
    let mesh = &sampler.outcome.mesh;
    match sampler.outcome.coefficients.current_density[mesh.regions[t].0 as usize] {
        0.0 => -energy_rate,
        density => density * sampler.outcome.solution.integral(mesh, t) * det_rate - energy_rate,
    }
}

/// d(½∫ (ν/r) u·S u)/dl for a constant law: k_mn = s_mn·S with s_mn = ∫ λ_m λ_n ν/r, and only S changes.
fn linear_energy_rate(
    frame: &Frame,
    gradients: &[Pair; 3],
    metric_rate: Tensor,
    k: &[Tensor; 6],
) -> f64 {
    let mut sum = 0.0;
    for (k, (m, n)) in k.iter().zip(PAIRS) {
        let twice = if m == n { 1.0 } else { 2.0 };
        sum += twice * (k[0] + k[2]) * contract(gradients[m], metric_rate, gradients[n]);
    }
    // The traces, which are never 0, tell s_mn.
    0.5 * sum / (frame.metric[0] + frame.metric[2])
}

/// d(∫ r·w·|det|)/dl for a saturating law, at fixed relative rates of the metric and the determinant.
fn saturating_energy_rate(
    frame: &Frame,
    gradients: &[Pair; 3],
    metric_rate: Tensor,
    det_rate: f64,
    rule: &Rule,
    law: &Law,
) -> f64 {
    let mut rate = 0.0;
    for (lambda, &weight) in rule.points.iter().zip(&rule.weights) {
        let r = frame.position(lambda).r;
        let u = blend(lambda, gradients);
        let at = law.at(flux_density_magnitude(frame, r, u));
        let (square, stretch) = (contract(u, frame.metric, u), contract(u, metric_rate, u));
        rate += weight
            * (r * at.energy * frame.det_abs * det_rate
                + 0.5 * at.reluctivity / r * (stretch - square * det_rate));
    }
    rate
}

/// Halves moved rigidly apart: ±½ on the core above and below z = 0, 0 elsewhere.
///
/// Corners of a winding that lie on the face of a leg stay: only the normal motion of a face matters, so they may slide
/// along it, and the winding keeps its height.
fn spacer_velocity(model: &Model, sampler: &Sampler) -> Vec<f64> {
    let mesh = &sampler.outcome.mesh;
    let mut velocity = vec![0.0; mesh.points.len()];
    for_kinds(sampler, |kind, v| {
        if matches!(kind, RegionKind::Leg(_) | RegionKind::Joint(_)) {
            velocity[v] = 0.5 * mesh.points[v].z.signum();
        }
    });
    let top = model.core.as_ref().map_or(0.0, |core| core.dimensions(&model.gaps).window_top);
    for_kinds(sampler, |kind, v| {
        let p = mesh.points[v];
        let is_plate = top * (1.0 - 1e-9) <= p.z.abs();
        if matches!(kind, RegionKind::Winding { .. })
            && must_stay(model, kind, usize::MAX, p)
            && !is_plate
        {
            velocity[v] = 0.0;
        }
    });
    velocity
}

/// Calls `visit` with the kind of region and the vertex for every corner of every inside triangle.
fn for_kinds(sampler: &Sampler, mut visit: impl FnMut(&RegionKind, usize)) {
    let mesh = &sampler.outcome.mesh;
    for (t, corners) in mesh.triangles.iter().enumerate() {
        if mesh.charts[t] == Chart::Inside {
            let kind = &sampler.region(t).kind;
            corners.iter().for_each(|&v| visit(kind, v as usize));
        }
    }
}

/// Faces of a ground gap move apart by ±½; the motion dies out linearly over `reach` along the leg and sideways.
fn ground_velocity(model: &Model, sampler: &Sampler, gap: usize) -> Vec<f64> {
    let mesh = &sampler.outcome.mesh;
    let Gapped { inner, outer, center, half, reach } = Gapped::new(model, gap);
    let ramp = |p: &Point| {
        let height = p.z - center;
        let beside = (p.r - outer).max(inner - p.r).max(0.0);
        if half + reach <= height.abs() || reach <= beside {
            return 0.0;
        }
        let along = if height.abs() <= half {
            height / half
        } else {
            (1.0 - (height.abs() - half) / reach) * height.signum()
        };
        0.5 * along.clamp(-1.0, 1.0) * (1.0 - beside / reach)
    };
    let mut velocity: Vec<f64> = mesh.points.iter().map(ramp).collect();
    for (t, corners) in mesh.triangles.iter().enumerate() {
        for v in corners.map(|v| v as usize) {
            // Far from the gap nothing moves anyway.
            if velocity[v] == 0.0 {
                continue;
            }
            let p = mesh.points[v];
            let is_face =
                inner <= p.r && p.r <= outer && (p.z - center).abs() <= half * (1.0 + 1e-9);
            let stays = !is_face && must_stay(model, &sampler.region(t).kind, gap, p);
            if stays || mesh.charts[t] != Chart::Inside {
                velocity[v] = 0.0;
            }
        }
    }
    velocity
}

/// Corners of other shapes must not move: top and bottom of windings, other gaps, plates, parts.
fn must_stay(model: &Model, kind: &RegionKind, gap: usize, p: Point) -> bool {
    match *kind {
        RegionKind::Winding { winding, section } => {
            let heights = model.windings[winding].sections[section].heights;
            heights.iter().any(|z| (p.z - z).abs() <= 1e-9 * (heights[1] - heights[0]))
        }
        RegionKind::Gap { gap: other, .. } => other != gap,
        RegionKind::Leg(Leg::UpperPlate | Leg::LowerPlate)
        | RegionKind::Part(_)
        | RegionKind::Joint(_) => true,
        RegionKind::Leg(_) | RegionKind::Outside | RegionKind::Window => false,
    }
}

/// Where a ground gap sits and how far its motion may reach.
struct Gapped {
    inner: Meter,
    outer: Meter,
    center: Meter,
    half: Meter,
    reach: Meter,
}

impl Gapped {
    fn new(model: &Model, gap: usize) -> Gapped {
        let this = &model.gaps[gap];
        let (mut inner, mut outer, mut top) = (0.0, 0.0, f64::INFINITY);
        if let Some(core) = &model.core {
            let d = core.dimensions(&model.gaps);
            [inner, outer] = match (this.across, d.wall_radii) {
                (Across::Wall, Some(radii)) => radii,
                _ => [d.hole_radius, d.post_radius],
            };
            top = d.window_top;
        }
        let half = 0.5 * this.length;
        // Half of the way to the end of the leg, but no farther than one leg radius: smooth on the mesh, clear of the plates.
        let room = (top - this.center.abs() - half).max(0.0);
        let reach = (0.5 * room).min(outer).max(1e-3 * this.length);
        Gapped { inner, outer, center: this.center, half, reach }
    }
}

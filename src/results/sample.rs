//! The finished field, made easy to ask: B, H and energy per triangle, the triangle of a point.

use crate::adapt::Outcome;
use crate::fem::Reluctivity;
use crate::fem::element::{Frame, Pair, blend};
use crate::fem::evaluate::{self, LocalField};
use crate::fem::moments::{flux_density_magnitude, linear_energy, rule_of};
use crate::fem::quadrature::Rules;
use crate::geometry::{Outline, Region};
use crate::model::Point;
use crate::results::ProbePoint;
use crate::units::{AmperePerMeter, Joule, MU0, Tesla};
use std::f64::consts::TAU;
use std::sync::LazyLock;

/// The field on every triangle, for pictures and files.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct CellValues {
    /// (B_r, B_z) at the centroid [T].
    pub b: Vec<[Tesla; 2]>,
    /// (H_r, H_z) at the centroid [A/m].
    pub h: Vec<[AmperePerMeter; 2]>,
    /// B/(µ0 H) at the centroid.
    pub permeability: Vec<f64>,
    /// |B| at the three corners, seen from inside the triangle [T].
    pub b_corner: Vec<[Tesla; 3]>,
}

/// A solved field with what asking needs.
pub struct Sampler<'a> {
    pub outcome: &'a Outcome,
    pub outline: &'a Outline,
    /// Asked for by saturating laws only.
    pub rules: LazyLock<Rules>,
    /// Triangles by region, ascending: those of region k are `by_region[starts[k]..starts[k + 1]]`.
    by_region: Vec<u32>,
    starts: Vec<usize>,
}

impl<'a> Sampler<'a> {
    /// Prepares a field for questions.
    pub fn new(outline: &'a Outline, outcome: &'a Outcome) -> Sampler<'a> {
        let of_triangle = &outcome.mesh.regions;
        let mut starts = vec![0; outline.regions.len() + 1];
        for region in of_triangle {
            starts[region.0 as usize + 1] += 1;
        }
        for k in 0..outline.regions.len() {
            starts[k + 1] += starts[k];
        }
        let mut next = starts.clone();
        let mut by_region = vec![0; of_triangle.len()];
        for (t, region) in of_triangle.iter().enumerate() {
            let place = &mut next[region.0 as usize];
            by_region[*place] = t as u32;
            *place += 1;
        }
        Sampler { outcome, outline, rules: LazyLock::new(Rules::working), by_region, starts }
    }

    /// Triangles of a region, ascending.
    pub fn triangles(&self, region: usize) -> impl ExactSizeIterator<Item = usize> {
        let range = self.starts[region]..self.starts[region + 1];
        self.by_region[range].iter().map(|&t| t as usize)
    }

    /// The region of triangle t.
    pub fn region(&self, t: usize) -> &'a Region {
        &self.outline.regions[self.outcome.mesh.regions[t].0 as usize]
    }

    /// Law of triangle t.
    pub fn reluctivity(&self, t: usize) -> &Reluctivity {
        &self.outcome.coefficients.reluctivity[self.outcome.mesh.regions[t].0 as usize]
    }

    /// Reluctivity of triangle t at flux density b [m/H].
    pub fn reluctivity_at(&self, t: usize, b: Tesla) -> f64 {
        match self.reluctivity(t) {
            Reluctivity::Constant(nu) => *nu,
            Reluctivity::Saturating(law) => law.reluctivity(b).0,
        }
    }

    /// Geometry and gradients of triangle t.
    pub fn local(&self, t: usize) -> (Frame, [Pair; 3]) {
        (Frame::new(&self.outcome.mesh, t), self.outcome.solution.gradients(&self.outcome.mesh, t))
    }

    /// The field on triangle t.
    pub fn field(&self, t: usize) -> LocalField {
        let (frame, gradients) = self.local(t);
        LocalField::new(frame, &gradients)
    }

    /// ∫ H·B dV and ∫ w(B) dV over triangle t [J].
    pub fn work_and_energy(&self, t: usize) -> (Joule, Joule) {
        let Outcome { mesh, solution, elements, .. } = self.outcome;
        let gradients = solution.gradients(mesh, t);
        match self.reluctivity(t) {
            Reluctivity::Constant(_) => {
                let energy = TAU * linear_energy(&elements.k[t], &gradients);
                (2.0 * energy, energy)
            }
            Reluctivity::Saturating(law) => {
                let frame = Frame::new(mesh, t);
                let rule = rule_of(&self.rules, &frame);
                let (mut work, mut energy) = (0.0, 0.0);
                for (lambda, &weight) in rule.points.iter().zip(&rule.weights) {
                    let r = frame.position(lambda).r;
                    let u = blend(lambda, &gradients);
                    let b = flux_density_magnitude(&frame, r, u);
                    let at = law.at(b);
                    let volume = TAU * weight * r * frame.det_abs;
                    work += volume * at.reluctivity * b * b;
                    energy += volume * at.energy;
                }
                (work, energy)
            }
        }
    }

    /// The field at a real point; `None` only if the mesh does not cover it, which cannot be inside the half plane.
    pub fn probe(&self, at: Point) -> Option<ProbePoint> {
        let mesh = &self.outcome.mesh;
        let (chart, position) = evaluate::to_chart(mesh, at);
        let (t, lambda) = evaluate::find(mesh, &self.outcome.fans.edge_triangles, chart, position)?;
        let [b_r, b_z] = self.field(t).components(&lambda);
        let nu: AmperePerMeter = self.reluctivity_at(t, b_r.hypot(b_z));
        let (vertex, edge) = self.outcome.solution.local(mesh, t);
        let psi = evaluate::psi(vertex, edge, &lambda);
        Some(ProbePoint { r: at.r, z: at.z, b_r, b_z, h_r: nu * b_r, h_z: nu * b_z, psi })
    }

    /// B, H and permeability on every triangle.
    pub fn cell_values(&self) -> CellValues {
        let mut values = CellValues::default();
        for t in 0..self.outcome.mesh.triangles.len() {
            let field = self.field(t);
            let b = field.components(&[1.0 / 3.0; 3]);
            let nu = self.reluctivity_at(t, b[0].hypot(b[1]));
            values.b.push(b);
            values.h.push(b.map(|b| nu * b));
            values.permeability.push(1.0 / (MU0 * nu));
            // At infinity's image the field is 0 and its formula 0/0.
            let infinity = field.frame.collapse.filter(|_| field.frame.gauge.is_some());
            let at_corner = |k: usize| match infinity == Some(k) {
                true => 0.0,
                false => field.magnitude(&[0, 1, 2].map(|i| f64::from(u8::from(i == k)))),
            };
            values.b_corner.push([0, 1, 2].map(at_corner));
        }
        values
    }
}

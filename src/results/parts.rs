//! What each magnetic region carries: volume, energy, exceeded flux densities, margin to the knee.

use super::PartResult;
use super::sample::Sampler;
use crate::fem::Reluctivity;
use crate::fem::element::Frame;
use crate::geometry::RegionKind;
use crate::model::Model;
use crate::solve::Solution;
use crate::units::{CubicMeter, Tesla};
use std::f64::consts::TAU;

/// Shares of the volume for which the exceeded flux density is told.
pub const EXCEEDED_SHARES: [f64; 3] = [0.01, 0.05, 0.50];

/// Barycentric sample points of equal area in a triangle.
const SAMPLES: [[f64; 3]; 3] = [
    [2.0 / 3.0, 1.0 / 6.0, 1.0 / 6.0],
    [1.0 / 6.0, 2.0 / 3.0, 1.0 / 6.0],
    [1.0 / 6.0, 1.0 / 6.0, 2.0 / 3.0],
];

/// One row for every leg, plate and part.
pub fn results(model: &Model, sampler: &Sampler) -> Vec<PartResult> {
    (sampler.outline.regions.iter().enumerate())
        .filter(|(_, region)| matches!(region.kind, RegionKind::Leg(_) | RegionKind::Part(_)))
        .map(|(k, region)| {
            let triangles = triangles_of(sampler, k);
            let samples = samples(sampler, &sampler.outcome.solution, &triangles);
            let volume = samples.iter().map(|s| s.1).sum();
            let exceeded = exceeded(samples);
            let knee = region.material.and_then(|id| model.materials[id.0 as usize].law.knee());
            PartResult {
                name: region.name.clone(),
                volume,
                energy: triangles.iter().map(|&t| sampler.work_and_energy(t).1).sum(),
                exceeded,
                margin: knee.map(|knee| 1.0 - exceeded[1] / knee),
            }
        })
        .collect()
}

/// Name and exceeded flux densities of every leg, plate and part for any field on the sampler's mesh.
pub fn exceedances(sampler: &Sampler, solution: &Solution) -> Vec<(String, [Tesla; 3])> {
    (sampler.outline.regions.iter().enumerate())
        .filter(|(_, region)| matches!(region.kind, RegionKind::Leg(_) | RegionKind::Part(_)))
        .map(|(k, region)| {
            let samples = samples(sampler, solution, &triangles_of(sampler, k));
            (region.name.clone(), exceeded(samples))
        })
        .collect()
}

fn triangles_of(sampler: &Sampler, region: usize) -> Vec<usize> {
    let regions = &sampler.outcome.mesh.regions;
    (0..regions.len()).filter(|&t| regions[t].0 as usize == region).collect()
}

/// (|B|, volume) at three points a triangle; the volumes add up exactly (the rule is exact for r).
fn samples(
    sampler: &Sampler,
    solution: &Solution,
    triangles: &[usize],
) -> Vec<(Tesla, CubicMeter)> {
    let mesh = &sampler.outcome.mesh;
    let mut samples = Vec::with_capacity(3 * triangles.len());
    for &t in triangles {
        let (frame, gradients) = (Frame::new(mesh, t), solution.gradients(mesh, t));
        for lambda in &SAMPLES {
            let [b_r, b_z] =
                crate::fem::evaluate::flux_density_components(&frame, &gradients, lambda);
            samples.push((b_r.hypot(b_z), TAU * frame.position(lambda).r * frame.det_abs / 6.0));
        }
    }
    samples
}

/// Flux densities that the shares of [`EXCEEDED_SHARES`] of the volume exceed.
fn exceeded(mut samples: Vec<(Tesla, CubicMeter)>) -> [Tesla; 3] {
    samples.sort_by(|a, b| b.0.total_cmp(&a.0));
    let total: CubicMeter = samples.iter().map(|s| s.1).sum();
    EXCEEDED_SHARES.map(|share| {
        let mut sum = 0.0;
        let found = samples.iter().find(|s| {
            sum += s.1;
            share * total <= sum
        });
        found.or(samples.last()).map_or(0.0, |s| s.0)
    })
}

/// Flux density above which a constant permeability deserves a word [T]: power ferrites saturate at 0.3 to 0.5 T (common
/// practice, no source).
const CONSTANT_LAW_DOUBTFUL: Tesla = 0.3;

/// A note when a permeable part of constant permeability carries more than a ferrite could.
pub fn constant_law_note(model: &Model, sampler: &Sampler, parts: &[PartResult]) -> Option<String> {
    let is_constant = |name: &str| {
        let region = sampler.outline.regions.iter().find(|region| region.name == name)?;
        let material = &model.materials[region.material?.0 as usize];
        (material.law.is_constant() && 1.0 < material.law.initial_permeability())
            .then_some(&material.name)
    };
    let hottest = parts.iter().max_by(|a, b| a.exceeded[0].total_cmp(&b.exceeded[0]))?;
    let material =
        is_constant(&hottest.name).filter(|_| CONSTANT_LAW_DOUBTFUL < hottest.exceeded[0])?;
    Some(format!(
        "`{material}` has a constant permeability, so nothing saturates here, though 1 % of {} carries more than {:.0} mT; \
         give it a B–H table (`bh`) to see what a real core does",
        hottest.name,
        1e3 * hottest.exceeded[0]
    ))
}

/// A note for every region whose field passes the last point of its table.
pub fn beyond_tables(model: &Model, sampler: &Sampler) -> Vec<String> {
    let mut notes = Vec::new();
    for (k, region) in sampler.outline.regions.iter().enumerate() {
        let Some(material) = region.material.map(|id| &model.materials[id.0 as usize]) else {
            continue;
        };
        let Some((_, b_last)) = material.law.last_point() else { continue };
        if !matches!(sampler.outcome.coefficients.reluctivity[k], Reluctivity::Saturating(_)) {
            continue;
        }
        let triangles = triangles_of(sampler, k);
        let samples = samples(sampler, &sampler.outcome.solution, &triangles);
        let total: CubicMeter = samples.iter().map(|s| s.1).sum();
        let beyond: CubicMeter = samples.iter().filter(|s| b_last < s.0).map(|s| s.1).sum();
        let most = samples.iter().fold(0.0, |m: f64, s| m.max(s.0));
        if 0.0 < beyond {
            notes.push(format!(
                "{}: {:.2} % of the volume is beyond the last point of `{}` ({b_last} T), up to {most:.3} T; the law goes \
                 on with the slope of air",
                region.name,
                100.0 * beyond / total,
                material.name,
            ));
        }
    }
    notes
}

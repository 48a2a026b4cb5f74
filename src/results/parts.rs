//! What each magnetic region carries: volume, energy, exceeded flux densities, margin to the knee.

use super::PartResult;
use super::collect::Work;
use super::sample::Sampler;
use crate::fem::Reluctivity;
use crate::fem::element::{Frame, blend};
use crate::fem::moments::flux_density_magnitude;
use crate::geometry::{Outline, Region, RegionKind};
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

/// |B| and the volume it stands for.
#[derive(Debug, Clone, Copy)]
struct Sample {
    b: Tesla,
    volume: CubicMeter,
}

/// One row for every leg, plate and part.
///
/// - `work`: of every region
pub fn results(model: &Model, sampler: &Sampler, work: &[Work]) -> Vec<PartResult> {
    legs_and_parts(sampler.outline)
        .map(|(k, region)| {
            let mut samples = samples(sampler, &sampler.outcome.solution, k);
            let volume = samples.iter().map(|s| s.volume).sum();
            let exceeded = exceeded(&mut samples);
            let knee = region.material.and_then(|id| model.materials[id.0 as usize].law.knee());
            PartResult {
                name: region.name.clone(),
                volume,
                energy: work[k].energy,
                exceeded,
                margin: knee.map(|knee| 1.0 - exceeded[1] / knee),
            }
        })
        .collect()
}

/// Name and exceeded flux densities of every leg, plate and part for any field on the sampler's mesh.
pub fn exceedances(sampler: &Sampler, solution: &Solution) -> Vec<(String, [Tesla; 3])> {
    legs_and_parts(sampler.outline)
        .map(|(k, region)| (region.name.clone(), exceeded(&mut samples(sampler, solution, k))))
        .collect()
}

fn legs_and_parts(outline: &Outline) -> impl Iterator<Item = (usize, &Region)> {
    let is_solid =
        |region: &Region| matches!(region.kind, RegionKind::Leg(_) | RegionKind::Part(_));
    outline.regions.iter().enumerate().filter(move |(_, region)| is_solid(region))
}

/// Three samples a triangle of the region; the volumes add up exactly (the rule is exact for r).
fn samples(sampler: &Sampler, solution: &Solution, region: usize) -> Vec<Sample> {
    let mesh = &sampler.outcome.mesh;
    let triangles = sampler.triangles(region);
    let mut samples = Vec::with_capacity(3 * triangles.len());
    for t in triangles {
        let (frame, gradients) = (Frame::new(mesh, t), solution.gradients(mesh, t));
        for lambda in &SAMPLES {
            let r = frame.position(lambda).r;
            let b = flux_density_magnitude(&frame, r, blend(lambda, &gradients));
            samples.push(Sample { b, volume: TAU * r * frame.det_abs / 6.0 });
        }
    }
    samples
}

/// Flux densities that the shares of [`EXCEEDED_SHARES`] of the volume exceed; reorders the samples.
fn exceeded(samples: &mut [Sample]) -> [Tesla; 3] {
    let mut exceeded = [0.0; 3];
    let total: CubicMeter = samples.iter().map(|s| s.volume).sum();
    let mut hotter = samples;
    // The largest share first: the others are found among its samples.
    for (b, share) in exceeded.iter_mut().zip(EXCEEDED_SHARES).rev() {
        let Some(n) = hottest(hotter, share * total) else { break };
        *b = hotter[n].b;
        hotter = &mut hotter[..=n];
    }
    exceeded
}

/// Brings the hottest samples to the front and returns the first place at which their volumes add up to `volume` (the last
/// place if they never do); halves the samples in question until one is left, so the time is linear.
fn hottest(samples: &mut [Sample], mut volume: CubicMeter) -> Option<usize> {
    let (mut start, mut end) = (0, samples.len());
    while start + 1 < end {
        let middle = start.midpoint(end);
        let open = &mut samples[start..end];
        open.select_nth_unstable_by(middle - start, |a, b| b.b.total_cmp(&a.b));
        let of_hotter: CubicMeter = open[..middle - start].iter().map(|s| s.volume).sum();
        if volume <= of_hotter {
            end = middle;
        } else {
            volume -= of_hotter;
            start = middle;
        }
    }
    (start < end).then_some(start)
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
        let samples = samples(sampler, &sampler.outcome.solution, k);
        let total: CubicMeter = samples.iter().map(|s| s.volume).sum();
        let beyond: CubicMeter = samples.iter().filter(|s| b_last < s.b).map(|s| s.volume).sum();
        let most = samples.iter().fold(0.0, |m: f64, s| m.max(s.b));
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

#[cfg(test)]
mod tests {
    use super::*;

    /// [`exceeded`] by sorting.
    fn by_sorting(samples: &[Sample]) -> [Tesla; 3] {
        let mut sorted = samples.to_vec();
        sorted.sort_by(|a, b| b.b.total_cmp(&a.b));
        let total: CubicMeter = sorted.iter().map(|s| s.volume).sum();
        EXCEEDED_SHARES.map(|share| {
            let mut volume = 0.0;
            let found = sorted.iter().find(|s| {
                volume += s.volume;
                share * total <= volume
            });
            found.or(sorted.last()).map_or(0.0, |s| s.b)
        })
    }

    #[test]
    fn exceeded_flux_densities_are_those_of_the_sorted_samples() {
        for n in [0, 1, 2, 3, 10, 101, 1000] {
            // Scattered, some of them equal, in volumes that differ by powers of two: sums of these are exact.
            let mut samples: Vec<Sample> = (0..n)
                .map(|i| Sample { b: f64::from(i * 37 % 89), volume: 2_f64.powi(i * 11 % 7) })
                .collect();
            let sorted = by_sorting(&samples);
            assert_eq!(exceeded(&mut samples), sorted, "{n} samples");
        }
    }
}

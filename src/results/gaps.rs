//! Fringing factors and forces of the gaps.

use super::hand::gap_area;
use super::linkage::Linkage;
use super::sample::Sampler;
use super::{GapResult, LedgerRow, force};
use crate::geometry::{Outline, RegionKind};
use crate::model::Model;
use crate::units::{MU0, PerHenry};
use std::f64::consts::PI;

/// F_gap, plain reluctance and force of every gap; a spacer has one row for each leg that it crosses.
pub fn results(
    model: &Model,
    sampler: &Sampler,
    carrier: Option<usize>,
    linkage: &[Linkage],
) -> Vec<GapResult> {
    let flux = carrier.map(|w| (linkage[w].value / model.windings[w].turns()).abs());
    (sampler.outline.regions.iter().enumerate())
        .filter_map(|(k, region)| match region.kind {
            RegionKind::Gap { gap, leg } => Some((k, &region.name, gap, leg)),
            _ => None,
        })
        .map(|(k, name, gap, leg)| {
            let length = model.gaps[gap].length;
            let area = gap_area(model, gap, leg);
            let mmf = mmf_across(sampler, k, area);
            // Mean B_z in the gap's own cylinder [T].
            let flux_density = MU0 * mmf / length;
            GapResult {
                name: name.clone(),
                gap_based: flux.map(|flux| flux * length / (MU0 * area * mmf.abs())),
                plain_reluctance: length / (MU0 * area),
                force: force::gap_force(model, sampler, gap),
                plain_force: flux_density * flux_density * area / (2.0 * MU0),
            }
        })
        .collect()
}

/// U = (1/A)∫ H_z dV over the gap's region [A]; ∫ B_z dV = 2π ∫ ∂ψ/∂r dr dz, exact for quadratics.
fn mmf_across(sampler: &Sampler, region: usize, area: f64) -> f64 {
    let mut sum = 0.0;
    for t in sampler.triangles(region) {
        let (frame, u) = sampler.local(t);
        let mean = [0, 1].map(|i| (u[0][i] + u[1][i] + u[2][i]) / 3.0);
        sum += 2.0 * PI * 0.5 * frame.det_abs * frame.chart_gradient(mean)[0];
    }
    sum / (MU0 * area)
}

/// F_L: the one factor that makes N²/(R_core + R_gap,plain/F) equal to L, R_core from the ledger's magnetic regions.
///
/// `None` without gaps, or when the core alone has all of the reluctance.
pub fn common_factor(
    outline: &Outline,
    gaps: &[GapResult],
    ledger: &[LedgerRow],
    total: PerHenry,
) -> Option<f64> {
    let is_core = |name: &str| {
        let mut regions = outline.regions.iter();
        regions.any(|r| {
            r.name == name
                && matches!(r.kind, RegionKind::Leg(_) | RegionKind::Part(_) | RegionKind::Joint(_))
        })
    };
    let core: PerHenry =
        ledger.iter().filter(|row| is_core(&row.region)).filter_map(|row| row.reluctance).sum();
    let plain: PerHenry = gaps.iter().map(|gap| gap.plain_reluctance).sum();
    let factor = plain / (total - core);
    (0.0 < plain && factor.is_finite() && 0.0 < factor).then_some(factor)
}

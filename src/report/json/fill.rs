//! `Results` → the entries of `result.json`, one to one.

use super::{
    BoundedQuantity, EstimateEntry, Exceeded, FluxLinkage, GapEntry, GapFactors, HotSpotEntry,
    LedgerEntry, PartEntry, ProbeEntry, ProbePointEntry, Quantity, RequireEntry, ResultFile,
    RippleCurrentEntry, RippleEntry, RipplePartEntry, RoundEntry, TimingEntry, WindingEntry,
};
use crate::report::{StageTimes, shortfall};
use crate::results::{Guaranteed, LedgerRow, PartResult, RequirementResult, Results, RippleResult};

impl BoundedQuantity {
    fn new(quantity: &Guaranteed, unit: &'static str) -> BoundedQuantity {
        BoundedQuantity { value: quantity.value, low: quantity.low, high: quantity.high, unit }
    }
}

impl ResultFile {
    pub(super) fn from_results(results: &Results, times: Option<&StageTimes>) -> ResultFile {
        ResultFile {
            program: concat!("gapwright ", env!("CARGO_PKG_VERSION")).to_string(),
            title: results.title.clone(),
            unknowns: results.n_unknowns,
            triangles: results.n_triangles,
            rounds: results
                .rounds
                .iter()
                .map(|r| RoundEntry { unknowns: r.n_unknowns, low: r.low, high: r.high })
                .collect(),
            inductance: results.inductance.as_ref().map(|q| BoundedQuantity::new(q, "H")),
            inductance_factor: results
                .inductance_factor
                .as_ref()
                .map(|q| BoundedQuantity::new(q, "H")),
            incremental_inductance: results
                .incremental_inductance
                .map(|value| Quantity { value, unit: "H" }),
            estimated_error: results.estimated_error,
            coenergy: BoundedQuantity::new(&results.coenergy, "J"),
            energy: Quantity { value: results.energy, unit: "J" },
            windings: windings(results),
            ledger: results.ledger.iter().map(LedgerEntry::from_row).collect(),
            gap_factors: gap_factors(results),
            hot_spots: hot_spots(results),
            parts: results.parts.iter().map(PartEntry::from_part).collect(),
            ripple: results.ripple.as_ref().map(RippleEntry::from_ripple),
            probes: probes(results),
            estimate: estimate(results),
            require: require_entries(&results.requirements),
            losses: None,
            notes: shortfall(results).into_iter().chain(results.notes.iter().cloned()).collect(),
            timings: times.map(timing_entries),
        }
    }
}

impl RippleEntry {
    fn from_ripple(ripple: &RippleResult) -> RippleEntry {
        let windings = ripple.currents.iter().map(|c| RippleCurrentEntry {
            name: c.winding.clone(),
            trough: c.trough,
            peak: c.peak,
        });
        let parts = ripple.parts.iter().map(|p| RipplePartEntry {
            name: p.name.clone(),
            swing: p.swing,
            peak: p.peak,
        });
        RippleEntry { windings: windings.collect(), parts: parts.collect() }
    }
}

impl LedgerEntry {
    fn from_row(row: &LedgerRow) -> LedgerEntry {
        LedgerEntry {
            region: row.region.clone(),
            share: row.share,
            reluctance: row.reluctance,
            hand: row.hand,
        }
    }
}

impl PartEntry {
    fn from_part(part: &PartResult) -> PartEntry {
        let [one_percent, five_percent, half] = part.exceeded;
        PartEntry {
            name: part.name.clone(),
            volume: part.volume,
            energy: part.energy,
            exceeded: Exceeded { one_percent, five_percent, half },
            margin: part.margin,
        }
    }
}

/// One entry a stage, in the order of the run.
pub(in crate::report) fn timing_entries(times: &StageTimes) -> Vec<TimingEntry> {
    let entry =
        |(stage, seconds): &(String, f64)| TimingEntry { stage: stage.clone(), seconds: *seconds };
    times.stages.iter().map(entry).collect()
}

fn windings(results: &Results) -> Vec<WindingEntry> {
    let entry = |w: &crate::results::WindingResult| WindingEntry {
        name: w.name.clone(),
        turns: w.turns,
        current: w.current,
        flux_linkage: FluxLinkage {
            value: w.flux_linkage,
            low: w.flux_linkage_ends.map(|e| e[0]),
            high: w.flux_linkage_ends.map(|e| e[1]),
        },
    };
    results.windings.iter().map(entry).collect()
}

fn gap_factors(results: &Results) -> GapFactors {
    let entry = |g: &crate::results::GapResult| GapEntry {
        name: g.name.clone(),
        gap_based: g.gap_based,
        plain_reluctance: g.plain_reluctance,
        force: g.force,
    };
    GapFactors {
        inductance_based: results.inductance_based,
        gaps: results.gaps.iter().map(entry).collect(),
    }
}

fn hot_spots(results: &Results) -> Vec<HotSpotEntry> {
    let entry = |s: &crate::results::HotSpot| HotSpotEntry {
        part: s.part.clone(),
        r: s.r,
        z: s.z,
        flux_density: s.flux_density,
    };
    results.hot_spots.iter().map(entry).collect()
}

fn probes(results: &Results) -> Vec<ProbeEntry> {
    let point = |p: &crate::results::ProbePoint| ProbePointEntry {
        r: p.r,
        z: p.z,
        b_r: p.b_r,
        b_z: p.b_z,
        h_r: p.h_r,
        h_z: p.h_z,
        psi: p.psi,
    };
    let entry = |p: &crate::results::ProbeResult| ProbeEntry {
        name: p.name.clone(),
        points: p.points.iter().map(point).collect(),
    };
    results.probes.iter().map(entry).collect()
}

fn estimate(results: &Results) -> Option<EstimateEntry> {
    let verdict = results.verdict.as_ref()?;
    Some(EstimateEntry {
        inductance: verdict.inductance,
        deviation: verdict.deviation,
        within_tolerance: verdict.within_tolerance,
        blame: verdict.blame.clone(),
    })
}

pub(in crate::report) fn require_entries(requirements: &[RequirementResult]) -> Vec<RequireEntry> {
    let entry = |r: &crate::results::RequirementResult| RequireEntry {
        winding: r.winding.clone(),
        current: r.current,
        kind: if r.incremental { "incremental" } else { "apparent" },
        least: r.least,
        most: r.most,
        inductance: r.inductance,
        low: r.ends.map(|e| e[0]),
        high: r.ends.map(|e| e[1]),
        met: r.met,
        certain: r.is_certain,
    };
    requirements.iter().map(entry).collect()
}

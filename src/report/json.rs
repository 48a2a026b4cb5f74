//! `Results` → `result.json` and its JSON Schema. The file's shape is private to this module; all values are SI.

use super::{StageTimes, shortfall};
use crate::results::{Guaranteed, LedgerRow, PartResult, RequirementResult, Results, RippleResult};
use schemars::JsonSchema;
use schemars::generate::SchemaSettings;
use serde::Serialize;

/// The text of `result.json`: equal results give equal bytes; stage times only when the caller measured some.
pub fn result_json(results: &Results, times: Option<&StageTimes>) -> String {
    let file = ResultFile::from_results(results, times);
    // The shape has text keys and finite depth, so serialising cannot fail; an empty object would break the schema test.
    let mut text = serde_json::to_string_pretty(&file).unwrap_or_else(|_| "{}".to_string());
    text.push('\n');
    text
}

/// The JSON Schema of `result.json` (draft 2020-12).
pub fn result_schema() -> serde_json::Value {
    SchemaSettings::draft2020_12()
        .for_serialize()
        .into_generator()
        .into_root_schema_for::<ResultFile>()
        .to_value()
}

/// What `gapwright solve` answers; every number in SI units.
#[derive(Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
#[schemars(title = "gapwright result")]
struct ResultFile {
    /// Name and version of the program that wrote the file.
    program: String,
    title: String,
    unknowns: usize,
    triangles: usize,
    /// One entry a solve-bound-refine step.
    rounds: Vec<RoundEntry>,
    /// Flux linkage over current; null when several windings carry current.
    inductance: Option<BoundedQuantity>,
    /// Inductance over turns squared.
    inductance_factor: Option<BoundedQuantity>,
    /// Slope of the flux linkage at the bias.
    incremental_inductance: Option<Quantity>,
    /// Relative error of the best flux linkage and inductance of a saturating core: an estimate, not a guarantee;
    /// null where the inductance carries the interval.
    estimated_error: Option<f64>,
    coenergy: BoundedQuantity,
    energy: Quantity,
    windings: Vec<WindingEntry>,
    /// Where the reluctance sits: field beside hand sum.
    ledger: Vec<LedgerEntry>,
    gap_factors: GapFactors,
    hot_spots: Vec<HotSpotEntry>,
    parts: Vec<PartEntry>,
    /// What the ripple does, all windings in phase; null without one.
    ripple: Option<RippleEntry>,
    probes: Vec<ProbeEntry>,
    /// The verdict on the estimate.
    estimate: Option<EstimateEntry>,
    require: Vec<RequireEntry>,
    /// Reserved for core and winding losses; null until a drive is computed.
    losses: Option<serde_json::Value>,
    notes: Vec<String>,
    /// Seconds of each stage, only with --timings.
    #[serde(skip_serializing_if = "Option::is_none")]
    timings: Option<Vec<TimingEntry>>,
}

#[derive(Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct Quantity {
    value: f64,
    unit: &'static str,
}

/// A value with its guaranteed ends.
#[derive(Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct BoundedQuantity {
    value: f64,
    low: f64,
    high: f64,
    unit: &'static str,
}

#[derive(Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct RoundEntry {
    unknowns: usize,
    /// Lower end of the quantity that `interval` speaks of.
    low: f64,
    high: f64,
}

#[derive(Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct WindingEntry {
    name: String,
    turns: f64,
    /// [A]
    current: f64,
    flux_linkage: FluxLinkage,
}

/// [Wb]; the ends are null where nothing is guaranteed.
#[derive(Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct FluxLinkage {
    value: f64,
    low: Option<f64>,
    high: Option<f64>,
}

#[derive(Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct LedgerEntry {
    region: String,
    /// Integral of H·B over the region by that over everything.
    share: f64,
    /// [1/H]; null when several windings carry current.
    reluctance: Option<f64>,
    /// The hand value [1/H]; null where there is none.
    hand: Option<f64>,
}

#[derive(Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct GapFactors {
    /// Common factor F_L that makes the hand formula give the computed inductance.
    inductance_based: Option<f64>,
    gaps: Vec<GapEntry>,
}

#[derive(Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct GapEntry {
    name: String,
    gap_based: Option<f64>,
    /// l/(µ0 A) [1/H]
    plain_reluctance: f64,
    /// [N], positive pulls the gap shut.
    force: f64,
}

#[derive(Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct HotSpotEntry {
    part: String,
    /// [m]
    r: f64,
    /// [m]
    z: f64,
    /// [T], averaged over a disc.
    flux_density: f64,
}

#[derive(Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct PartEntry {
    name: String,
    /// [m³]
    volume: f64,
    /// [J]
    energy: f64,
    exceeded: Exceeded,
    /// 1 − B/B_knee with B the 5 % value; null for a constant permeability.
    margin: Option<f64>,
}

/// Flux density [T] that this share of the part's volume exceeds.
#[derive(Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct Exceeded {
    #[serde(rename = "1 %")]
    one_percent: f64,
    #[serde(rename = "5 %")]
    five_percent: f64,
    #[serde(rename = "50 %")]
    half: f64,
}

#[derive(Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct ProbeEntry {
    name: String,
    points: Vec<ProbePointEntry>,
}

#[derive(Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct ProbePointEntry {
    /// [m]
    r: f64,
    /// [m]
    z: f64,
    /// [T]
    b_r: f64,
    b_z: f64,
    /// [A/m]
    h_r: f64,
    h_z: f64,
    /// r·A_φ [Wb/rad]
    psi: f64,
}

#[derive(Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct EstimateEntry {
    /// The judged inductance [H].
    inductance: f64,
    /// Judged over computed, less one.
    deviation: f64,
    within_tolerance: bool,
    blame: String,
}

#[derive(Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
pub(super) struct RequireEntry {
    winding: String,
    /// [A]
    current: f64,
    kind: &'static str,
    /// [H]
    least: Option<f64>,
    /// [H]
    most: Option<f64>,
    /// Best value [H].
    inductance: f64,
    /// Guaranteed ends [H]; null where nothing is guaranteed.
    low: Option<f64>,
    high: Option<f64>,
    met: bool,
    /// True when the guaranteed ends decide, false when only the best value does.
    certain: bool,
}

#[derive(Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct RippleEntry {
    windings: Vec<RippleCurrentEntry>,
    parts: Vec<RipplePartEntry>,
}

#[derive(Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct RippleCurrentEntry {
    name: String,
    /// current − ripple/2 [A]
    trough: f64,
    /// current + ripple/2 [A]
    peak: f64,
}

#[derive(Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct RipplePartEntry {
    name: String,
    /// Peak-to-peak change of the flux density that 5 % of the volume exceed [T].
    swing: f64,
    /// Flux density at the peak current that 5 % of the volume exceed [T].
    peak: f64,
}

#[derive(Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct TimingEntry {
    stage: String,
    seconds: f64,
}

impl BoundedQuantity {
    fn new(quantity: &Guaranteed, unit: &'static str) -> BoundedQuantity {
        BoundedQuantity { value: quantity.value, low: quantity.low, high: quantity.high, unit }
    }
}

impl ResultFile {
    fn from_results(results: &Results, times: Option<&StageTimes>) -> ResultFile {
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
            timings: times.map(|t| {
                t.stages
                    .iter()
                    .map(|(stage, seconds)| TimingEntry { stage: stage.clone(), seconds: *seconds })
                    .collect()
            }),
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

pub(super) fn require_entries(requirements: &[RequirementResult]) -> Vec<RequireEntry> {
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

#[cfg(test)]
mod tests;

//! `Results` → `result.json` and its JSON Schema. The file's shape is private to this module; all values are SI.

mod fill;

pub(super) use fill::{require_entries, timing_entries};

use super::StageTimes;
use crate::results::Results;
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
pub(super) struct TimingEntry {
    stage: String,
    seconds: f64,
}

#[cfg(test)]
mod tests;

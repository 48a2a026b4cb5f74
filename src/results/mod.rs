//! `Solution` → inductance, ledger, gap factors, hot spots, forces. All SI; formats live in `report`.

mod collect;
mod force;
mod gaps;
pub mod hand;
mod hot_spots;
mod ledger;
pub mod linkage;
pub mod parts;
mod requirements;
mod ripple;
pub mod sample;

pub use collect::{collect, single_carrier};
pub use requirements::check_requirements;
pub use ripple::ripple;

use crate::model::Point;
use crate::units::{Ampere, CubicMeter, Henry, Joule, Meter, Newton, PerHenry, Tesla, Weber};

/// A quantity with its guaranteed ends.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Guaranteed {
    /// Best estimate, inside [low, high].
    pub value: f64,
    pub low: f64,
    pub high: f64,
}

/// One solve-bound-refine step.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Round {
    pub n_unknowns: usize,
    pub n_triangles: usize,
    pub n_cg_iterations: usize,
    pub n_newton_steps: usize,
    /// Ends of the quantity that `interval` speaks of.
    pub low: f64,
    pub high: f64,
}

/// What one winding does.
#[derive(Debug, Clone, PartialEq)]
pub struct WindingResult {
    pub name: String,
    pub turns: f64,
    pub current: Ampere,
    pub flux_linkage: Weber,
    /// Guaranteed ends; `None` where nothing is guaranteed.
    pub flux_linkage_ends: Option<[Weber; 2]>,
}

/// One row of the ledger.
#[derive(Debug, Clone, PartialEq)]
pub struct LedgerRow {
    pub region: String,
    /// ∫_region H·B dV / ∫_all H·B dV.
    pub share: f64,
    /// share·N²/L; `None` with several currents.
    pub reluctance: Option<PerHenry>,
    /// The hand value, where there is one.
    pub hand: Option<PerHenry>,
}

/// Fringing and force of one gap.
#[derive(Debug, Clone, PartialEq)]
pub struct GapResult {
    pub name: String,
    /// F_gap = Φ·l/(µ0 A U).
    pub gap_based: Option<f64>,
    /// l/(µ0 A).
    pub plain_reluctance: PerHenry,
    /// −dW'/dl at fixed current; positive pulls the gap shut.
    pub force: Newton,
    /// B²A/2µ0 with B = Φ/A.
    pub plain_force: Newton,
}

/// A place of high flux density.
#[derive(Debug, Clone, PartialEq)]
pub struct HotSpot {
    pub part: String,
    pub r: Meter,
    pub z: Meter,
    pub flux_density: Tesla,
}

/// What one magnetic part carries.
#[derive(Debug, Clone, PartialEq)]
pub struct PartResult {
    pub name: String,
    pub volume: CubicMeter,
    pub energy: Joule,
    /// Flux density that 1 %, 5 % and 50 % of the volume exceed.
    pub exceeded: [Tesla; 3],
    /// 1 − B(5 %)/B_knee; `None` for a constant law.
    pub margin: Option<f64>,
}

/// The field at one probe point.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct ProbePoint {
    pub r: Meter,
    pub z: Meter,
    pub b_r: Tesla,
    pub b_z: Tesla,
    pub h_r: f64,
    pub h_z: f64,
    /// ψ = r·A_φ [Wb/rad].
    pub psi: f64,
}

/// A probe's points.
#[derive(Debug, Clone, PartialEq)]
pub struct ProbeResult {
    pub name: String,
    pub points: Vec<ProbePoint>,
}

/// The verdict on the estimate.
#[derive(Debug, Clone, PartialEq)]
pub struct Verdict {
    /// The judged inductance [H].
    pub inductance: Henry,
    /// True when the hand sum is judged because nothing was stated.
    pub is_hand_sum: bool,
    /// judged/computed − 1.
    pub deviation: f64,
    pub tolerance: f64,
    pub within_tolerance: bool,
    /// One sentence: which reluctance is to blame.
    pub blame: String,
}

/// The verdict on one requirement.
#[derive(Debug, Clone, PartialEq)]
pub struct RequirementResult {
    pub winding: String,
    pub current: Ampere,
    pub incremental: bool,
    pub least: Option<Henry>,
    pub most: Option<Henry>,
    /// Best value.
    pub inductance: Henry,
    /// Guaranteed ends of an apparent inductance; `None` where nothing is guaranteed.
    pub ends: Option<[Henry; 2]>,
    pub met: bool,
    /// True when the guaranteed ends decide; false when only the best value does.
    pub is_certain: bool,
}

/// What the ripple does to one part.
#[derive(Debug, Clone, PartialEq)]
pub struct RipplePart {
    pub name: String,
    /// |B(peak) − B(trough)| that 5 % of the volume exceed: the flux-density swing, peak to peak.
    pub swing: Tesla,
    /// |B| at the peak current that 5 % of the volume exceed.
    pub peak: Tesla,
}

/// The currents between which a winding swings.
#[derive(Debug, Clone, PartialEq)]
pub struct RippleCurrent {
    pub winding: String,
    pub trough: Ampere,
    pub peak: Ampere,
}

/// Bias and ripple together, all windings in phase.
#[derive(Debug, Clone, PartialEq)]
pub struct RippleResult {
    pub currents: Vec<RippleCurrent>,
    pub parts: Vec<RipplePart>,
}

/// Everything that `solve` answers.
#[derive(Debug, Clone, PartialEq)]
pub struct Results {
    pub title: String,
    pub n_unknowns: usize,
    pub n_triangles: usize,
    pub rounds: Vec<Round>,
    /// Wanted relative width; `reached` tells whether the rounds got there.
    pub wanted: f64,
    pub reached: bool,
    /// Where no mesh resolves the field, if that is what stopped the rounds.
    pub unresolved: Option<Point>,
    /// `None` with several currents.
    pub inductance: Option<Guaranteed>,
    pub inductance_factor: Option<Guaranteed>,
    pub incremental_inductance: Option<Henry>,
    pub coenergy: Guaranteed,
    pub energy: Joule,
    /// True when every law is constant: then the inductance carries the interval.
    pub is_linear: bool,
    /// Estimated relative error of the best flux linkage and inductance of a saturating core, not a guarantee; `None`
    /// with constant laws, where the inductance carries the interval.
    pub estimated_error: Option<f64>,
    pub windings: Vec<WindingResult>,
    pub ledger: Vec<LedgerRow>,
    /// F_L; `None` without gaps or with several currents.
    pub inductance_based: Option<f64>,
    pub gaps: Vec<GapResult>,
    pub hot_spots: Vec<HotSpot>,
    pub parts: Vec<PartResult>,
    pub probes: Vec<ProbeResult>,
    pub verdict: Option<Verdict>,
    /// `None` without a ripple.
    pub ripple: Option<RippleResult>,
    pub requirements: Vec<RequirementResult>,
    pub notes: Vec<String>,
}

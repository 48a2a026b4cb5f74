//! SI aliases that name a unit, and µ0. Text with units ("0.3 mm") lives in `parse` and `print`.

mod parse;
mod print;

pub use parse::{Dimension, QuantityError, Reading, decimal, read, reading, spellings};
pub use print::{ends, engineering, millimeters, number, percent};

/// Length.
pub type Meter = f64;
/// Electric current; also magnetomotive force (ampere-turns).
pub type Ampere = f64;
/// Current density.
pub type AmperePerSquareMeter = f64;
/// Magnetic field strength H.
pub type AmperePerMeter = f64;
/// Flux density B.
pub type Tesla = f64;
/// Inductance; also permeance.
pub type Henry = f64;
/// Reluctance.
pub type PerHenry = f64;
/// Flux and flux linkage.
pub type Weber = f64;
/// The unknown ψ = r·A_φ: flux through a disc divided by 2π.
pub type WeberPerRadian = f64;
/// Energy and coenergy.
pub type Joule = f64;
/// Energy density.
pub type JoulePerCubicMeter = f64;
/// Force.
pub type Newton = f64;
/// Volume.
pub type CubicMeter = f64;
/// Area.
pub type SquareMeter = f64;
/// Reluctivity ν = 1/µ.
pub type MeterPerHenry = f64;

/// Magnetic constant µ0 [H/m], CODATA 2022 (relative uncertainty 1.6e-10).
pub const MU0: f64 = 1.256_637_061_27e-6;

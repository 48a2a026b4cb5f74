//! Material laws: B(H), its inverse H(B), and the energies w(B) = ∫H dB and w*(H) = ∫B dH.
//!
//! Every law is isotropic, H parallel to B, and strictly monotone with dB/dH ≥ µ0 (a `Constant` below
//! µr = 1 excepted), so the two energies are a Legendre pair: w(b) + w*(h) ≥ b·h, with equality on the curve.
//! The interval of the whole program rests on that inequality. Arguments are magnitudes, ≥ 0; the direction of
//! the field is the caller's business. Nothing here reads files: columns come in, a law comes out.

mod error;
mod piece;
mod saturation;
mod table;
#[cfg(test)]
mod tests;

pub use error::LawError;
pub use table::{BhTable, Interpolation};

use crate::units::{AmperePerMeter, JoulePerCubicMeter, MU0, MeterPerHenry, Tesla};
use saturation::Saturation;

/// One isotropic material law, H parallel to B, strictly monotone.
///
/// Make it with [`Law::constant`], [`Law::saturation`] or [`BhTable::new`]: they check the numbers.
#[derive(Debug, Clone, PartialEq)]
pub enum Law {
    /// B = µ0 µr H with the relative permeability µr.
    Constant { permeability: f64 },
    /// Tabulated.
    Table(BhTable),
    /// Two parameters: relative initial permeability and saturation polarisation.
    Saturation { initial_permeability: f64, flux_density: Tesla },
}

/// A law at one flux density.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct LawPoint {
    /// ν = H/B [m/H], its limit at B = 0.
    pub reluctivity: MeterPerHenry,
    /// dH/dB [m/H].
    pub tangent: MeterPerHenry,
    /// w(B) = ∫₀ᴮ H dB [J/m³].
    pub energy: JoulePerCubicMeter,
}

impl Law {
    /// B = µ0 µr H. Fails unless µr is a finite number > 0.
    pub fn constant(permeability: f64) -> Result<Law, LawError> {
        if permeability.is_finite() && 0.0 < permeability {
            Ok(Law::Constant { permeability })
        } else {
            Err(LawError::Permeability { permeability })
        }
    }

    /// Two-parameter saturation B = µ0 H + J_s·H/(H + H_a), H_a = J_s/(µ0(µ_i − 1)).
    ///
    /// - `initial_permeability`: µ_i, relative, finite and > 1
    /// - `flux_density`: saturation polarisation J_s [T], > 0 and at most 1e7
    ///
    /// Source: Fröhlich 1881, Kennelly 1891 (from memory).
    pub fn saturation(initial_permeability: f64, flux_density: Tesla) -> Result<Law, LawError> {
        if !(initial_permeability.is_finite() && 1.0 < initial_permeability) {
            return Err(LawError::InitialPermeability { initial_permeability });
        }
        if !(0.0 < flux_density && flux_density <= table::FLUX_DENSITY_MAX) {
            return Err(LawError::SaturationFluxDensity { flux_density });
        }
        Ok(Law::Saturation { initial_permeability, flux_density })
    }

    /// H(B) [A/m] for B ≥ 0.
    pub fn field(&self, b: Tesla) -> AmperePerMeter {
        match self {
            Law::Constant { permeability } => b / (MU0 * permeability),
            Law::Table(table) => table.field(b),
            Law::Saturation { .. } => self.kernel().field(b),
        }
    }

    /// B(H) [T] for H ≥ 0.
    pub fn flux_density(&self, h: AmperePerMeter) -> Tesla {
        match self {
            Law::Constant { permeability } => MU0 * permeability * h,
            Law::Table(table) => table.flux_density(h),
            Law::Saturation { .. } => self.kernel().flux_density(h),
        }
    }

    /// (ν, dH/dB) [m/H] at B ≥ 0: the chord ν = H/B (its limit dH/dB at B = 0) and the tangent.
    ///
    /// Where a table has a corner, the tangent is the one towards larger B.
    pub fn reluctivity(&self, b: Tesla) -> (MeterPerHenry, MeterPerHenry) {
        let (field, slope) = match self {
            Law::Constant { permeability } => {
                let reluctivity = 1.0 / (MU0 * permeability);
                return (reluctivity, reluctivity);
            }
            Law::Table(table) => table.field_and_slope(b),
            Law::Saturation { .. } => {
                let kernel = self.kernel();
                let field = kernel.field(b);
                (field, kernel.slope(field))
            }
        };
        let tangent = 1.0 / slope;
        // Below the smallest normal number the quotient has no digits left, and the limit is exact.
        (if b < f64::MIN_POSITIVE { tangent } else { field / b }, tangent)
    }

    /// ν, dH/dB and w together: what a Newton step asks at one B, for the price of one inversion of B(H).
    ///
    /// The same numbers as [`Law::reluctivity`] and [`Law::energy_density`], to the last bit.
    pub fn at(&self, b: Tesla) -> LawPoint {
        let (field, slope, energy) = match self {
            Law::Constant { permeability } => {
                let reluctivity = 1.0 / (MU0 * permeability);
                let energy = self.energy_density(b);
                return LawPoint { reluctivity, tangent: reluctivity, energy };
            }
            Law::Table(table) => table.field_slope_and_energy(b),
            Law::Saturation { .. } => {
                let kernel = self.kernel();
                let field = kernel.field(b);
                (field, kernel.slope(field), kernel.energy_density_of_field(field))
            }
        };
        let tangent = 1.0 / slope;
        // As in `reluctivity`: below the smallest normal number the limit is exact.
        let reluctivity = if b < f64::MIN_POSITIVE { tangent } else { field / b };
        LawPoint { reluctivity, tangent, energy }
    }

    /// w(B) = ∫₀ᴮ H dB [J/m³] for B ≥ 0.
    pub fn energy_density(&self, b: Tesla) -> JoulePerCubicMeter {
        match self {
            Law::Constant { permeability } => 0.5 * b * (b / (MU0 * permeability)),
            Law::Table(table) => table.energy_density(b),
            Law::Saturation { .. } => {
                let kernel = self.kernel();
                kernel.energy_density_of_field(kernel.field(b))
            }
        }
    }

    /// w*(H) = ∫₀ᴴ B dH [J/m³] for H ≥ 0.
    pub fn coenergy_density(&self, h: AmperePerMeter) -> JoulePerCubicMeter {
        match self {
            Law::Constant { permeability } => 0.5 * h * (MU0 * permeability * h),
            Law::Table(table) => table.coenergy_density(h),
            Law::Saturation { .. } => self.kernel().coenergy_density(h),
        }
    }

    /// dB/dH [H/m] at H ≥ 0; at a corner of a table the one towards larger H.
    pub fn permeability_differential(&self, h: AmperePerMeter) -> f64 {
        match self {
            Law::Constant { permeability } => MU0 * permeability,
            Law::Table(table) => table.slope(h),
            Law::Saturation { .. } => self.kernel().slope(h),
        }
    }

    /// Largest dB/dH [H/m] over all H ≥ 0.
    pub fn permeability_differential_max(&self) -> f64 {
        match self {
            Law::Constant { permeability } => MU0 * permeability,
            Law::Table(table) => table.slope_max(),
            Law::Saturation { .. } => self.kernel().slope(0.0),
        }
    }

    /// The knee [T]: beyond it dB/dH stays below 20 % of its largest value.
    ///
    /// None for a constant law, and where 20 % of the largest dB/dH is not above µ0: such a law never bends that far.
    pub fn knee(&self) -> Option<Tesla> {
        let level = KNEE_FRACTION * self.permeability_differential_max();
        match self {
            Law::Constant { .. } => None,
            Law::Table(table) => table.last_above(level),
            Law::Saturation { .. } => self.kernel().last_above(level),
        }
    }

    /// The last row (H [A/m], B [T]) of a table; beyond it the law is an assumption (slope µ0). None for other laws.
    pub fn last_point(&self) -> Option<(AmperePerMeter, Tesla)> {
        match self {
            Law::Table(table) => Some(table.last_point()),
            Law::Constant { .. } | Law::Saturation { .. } => None,
        }
    }

    /// The same permeability at every field.
    pub fn is_constant(&self) -> bool {
        matches!(self, Law::Constant { .. })
    }

    /// Relative permeability (dB/dH)/µ0 at H → 0.
    pub fn initial_permeability(&self) -> f64 {
        match self {
            Law::Constant { permeability } => *permeability,
            Law::Table(table) => table.slope(0.0) / MU0,
            Law::Saturation { initial_permeability, .. } => *initial_permeability,
        }
    }

    /// The closed form behind `Saturation`; one division, so it is not stored.
    ///
    /// Panics on another law: only the arms above call it.
    fn kernel(&self) -> Saturation {
        match self {
            Law::Saturation { initial_permeability, flux_density } => {
                Saturation::new(*initial_permeability, *flux_density)
            }
            Law::Constant { .. } | Law::Table(_) => unreachable!("not a saturation law"),
        }
    }
}

/// Share of the largest dB/dH that marks the knee; common practice, no source.
const KNEE_FRACTION: f64 = 0.2;

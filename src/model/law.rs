//! Material laws: B(H), its inverse H(B), and the energies w(B) = ∫H dB and w*(H) = ∫B dH.

use crate::units::{AmperePerMeter, JoulePerCubicMeter, MU0, Tesla};

/// How a table is joined.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Interpolation {
    /// Monotone cubic of the polarisation over H.
    Smooth,
    /// Straight lines in (H, B).
    Linear,
}

/// A checked B–H table (filled in by its owner).
#[derive(Debug, Clone, PartialEq)]
pub struct BhTable {
    pub h: Vec<AmperePerMeter>,
    pub b: Vec<Tesla>,
    pub interpolation: Interpolation,
}

/// Why a table was refused; `row` counts from 1.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum LawError {
    #[error("row {row}: {reason}")]
    Row { row: usize, reason: String },
}

/// One isotropic material law, H parallel to B, strictly monotone.
#[derive(Debug, Clone, PartialEq)]
pub enum Law {
    /// B = µ0 µr H.
    Constant { permeability: f64 },
    /// Tabulated.
    Table(BhTable),
    /// Two parameters.
    Saturation { initial_permeability: f64, flux_density: Tesla },
}

impl Law {
    /// The same permeability at every field.
    pub fn is_constant(&self) -> bool {
        matches!(self, Law::Constant { .. })
    }

    /// H(B) [A/m] for B ≥ 0.
    pub fn field(&self, b: Tesla) -> AmperePerMeter {
        match self {
            Law::Constant { permeability } => b / (MU0 * permeability),
            _ => unimplemented!("owner of model::law"),
        }
    }

    /// (ν, dH/dB) at B.
    pub fn reluctivity(&self, b: Tesla) -> (f64, f64) {
        (self.field(b) / b, self.field(b) / b)
    }

    /// w(B) = ∫₀ᴮ H dB [J/m³].
    pub fn energy_density(&self, b: Tesla) -> JoulePerCubicMeter {
        0.5 * b * self.field(b)
    }

    /// w*(H) [J/m³].
    pub fn coenergy_density(&self, h: AmperePerMeter) -> JoulePerCubicMeter {
        match self {
            Law::Constant { permeability } => 0.5 * MU0 * permeability * h * h,
            _ => unimplemented!("owner of model::law"),
        }
    }
}

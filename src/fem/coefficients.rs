//! What the kernels need to know of each region: its law and its current density.

use crate::model::Law;
use crate::units::{AmperePerSquareMeter, MeterPerHenry};

/// Reluctivity of a region.
#[derive(Debug, Clone, PartialEq)]
pub enum Reluctivity {
    /// ν = 1/µ [m/H].
    Constant(MeterPerHenry),
    Saturating(Law),
}

/// Indexed by `RegionId`.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Coefficients {
    pub reluctivity: Vec<Reluctivity>,
    pub current_density: Vec<AmperePerSquareMeter>,
}

impl Coefficients {
    /// True when no region saturates.
    pub fn is_linear(&self) -> bool {
        self.reluctivity.iter().all(|r| matches!(r, Reluctivity::Constant(_)))
    }
}

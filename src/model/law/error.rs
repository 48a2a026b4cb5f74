//! Why numbers do not make a law, with the row to blame and what to do.

use crate::units::{AmperePerMeter, Tesla};

/// Why a law was refused; `row` counts the rows of data from 1.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum LawError {
    #[error("the columns differ in length: {n_h} values of H, {n_b} of B; give one B for each H")]
    ColumnLengths { n_h: usize, n_b: usize },
    #[error(
        "a B-H table needs at least 2 rows, this one has {n_rows}; start with 0,0 and add measured points"
    )]
    TooFewRows { n_rows: usize },
    #[error(
        "row {row}: H = {h} A/m, B = {b} T: needs finite numbers, H up to 1e12 A/m and B up to 1e7 T"
    )]
    OutOfRange { row: usize, h: AmperePerMeter, b: Tesla },
    #[error(
        "row 1: H = {h} A/m, B = {b} T, but the first row must be 0,0; give the virgin curve from zero up"
    )]
    FirstRowNotZero { h: AmperePerMeter, b: Tesla },
    #[error(
        "row {row}: H = {h} A/m does not rise above the {h_before} A/m of the row before; sort the rows by H and drop repeated ones"
    )]
    FieldNotIncreasing { row: usize, h_before: AmperePerMeter, h: AmperePerMeter },
    #[error(
        "row {row}: B = {b} T does not rise above the {b_before} T of the row before, but B must grow with H; smooth or drop the row"
    )]
    FluxDensityNotIncreasing { row: usize, b_before: Tesla, b: Tesla },
    #[error(
        "row {row}: B rises by {rise} T over {step} A/m, less than the {vacuum_rise} T of empty space (slope µ0); check the units (A/m and T) and that B is the flux density, not the polarisation"
    )]
    SlopeBelowVacuum { row: usize, step: AmperePerMeter, rise: Tesla, vacuum_rise: Tesla },
    #[error(
        "row {row}: B rises by {rise} T over {step} A/m, a relative permeability of {permeability:.3e} where 1e9 is the most; check the units (A/m and T)"
    )]
    SlopeTooSteep { row: usize, step: AmperePerMeter, rise: Tesla, permeability: f64 },
    #[error("permeability = {permeability}: needs a finite number > 0, relative to empty space")]
    Permeability { permeability: f64 },
    #[error(
        "initial_permeability = {initial_permeability}: needs a finite number > 1, relative to empty space"
    )]
    InitialPermeability { initial_permeability: f64 },
    #[error("saturation flux_density = {flux_density} T: needs a number > 0 and at most 1e7 T")]
    SaturationFluxDensity { flux_density: Tesla },
}

impl LawError {
    /// The row of data to underline, counted from 1; None where no single row is to blame.
    pub fn row(&self) -> Option<usize> {
        match self {
            LawError::FirstRowNotZero { .. } => Some(1),
            LawError::OutOfRange { row, .. }
            | LawError::FieldNotIncreasing { row, .. }
            | LawError::FluxDensityNotIncreasing { row, .. }
            | LawError::SlopeBelowVacuum { row, .. }
            | LawError::SlopeTooSteep { row, .. } => Some(*row),
            LawError::ColumnLengths { .. }
            | LawError::TooFewRows { .. }
            | LawError::Permeability { .. }
            | LawError::InitialPermeability { .. }
            | LawError::SaturationFluxDensity { .. } => None,
        }
    }
}

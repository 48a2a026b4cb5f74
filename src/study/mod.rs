//! Many solves of one sheet → tables: inductance against current. Knows no text, no files.

pub mod saturate;

use crate::adapt::AdaptError;
use crate::solve::SolveError;
use crate::sparse::CgError;
use crate::units::Ampere;

/// Why a study gave no table.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum StudyError {
    #[error(transparent)]
    Adapt(#[from] AdaptError),
    #[error("at {current:.4} A: {source}")]
    Solve { current: Ampere, source: SolveError },
    #[error(
        "no winding carries current in the sheet; give the first one a current, the study scales it"
    )]
    NoCurrent,
    #[error("the tangent problem at {current:.4} A: {source}")]
    Tangent { current: Ampere, source: CgError },
}

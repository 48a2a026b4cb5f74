//! STAND-IN, to be replaced by `BhTable::new` and `Law::saturation` of `model::law` when they are merged.

use crate::model::{BhTable, Interpolation, Law, LawError};
use crate::units::MU0;

fn refused(row: usize, reason: String) -> Result<BhTable, LawError> {
    Err(LawError::Row { row, reason })
}

/// Checks order, sign, first point and slope of a table.
pub(super) fn table(h: Vec<f64>, b: Vec<f64>, interpolation: Interpolation) -> Result<BhTable, LawError> {
    if h.len() < 2 {
        return refused(h.len(), "a table needs at least two points".into());
    }
    if h[0] != 0.0 || b[0] != 0.0 {
        return refused(1, format!("the first point is ({}, {}), not (0, 0)", h[0], b[0]));
    }
    for i in 1..h.len() {
        if h[i] < 0.0 || b[i] < 0.0 {
            return refused(i + 1, format!("({}, {}) is negative", h[i], b[i]));
        }
        if h[i] <= h[i - 1] || b[i] <= b[i - 1] {
            let before = format!("({}, {})", h[i - 1], b[i - 1]);
            return refused(i + 1, format!("({}, {}) does not rise above {before}", h[i], b[i]));
        }
        let slope = (b[i] - b[i - 1]) / (h[i] - h[i - 1]);
        if slope < MU0 {
            let ratio = slope / MU0;
            return refused(i + 1, format!("the slope from the point before is {ratio:.3} µ0, less than that of air"));
        }
    }
    Ok(BhTable { h, b, interpolation })
}

/// Two-parameter law.
pub(super) fn saturation(initial_permeability: f64, flux_density: f64) -> Result<Law, LawError> {
    if initial_permeability <= 1.0 {
        let reason = format!("initial permeability {initial_permeability} is not above 1");
        return Err(LawError::Row { row: 0, reason });
    }
    Ok(Law::Saturation { initial_permeability, flux_density })
}

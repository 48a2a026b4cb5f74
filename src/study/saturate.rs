//! Inductance against current: one mesh, points where the curve bends, currents at which the inductance has fallen.
//!
//! One adaptive run at the highest current gives the mesh; a point whose interval is too wide there refines it, and all
//! rows are solved again. The points are warm-started solves, each with its own guaranteed coenergy. All currents scale with that of
//! the first winding that carries some.

mod bench;
mod place;
#[cfg(test)]
mod tests;

use super::StudyError;
use crate::geometry::Outline;
use crate::model::Model;
use crate::results::linkage::unit_density;
use crate::results::{Guaranteed, RequirementResult, check_requirements, single_carrier};
use crate::units::{Ampere, Henry, Joule, Tesla, Weber};
use bench::Bench;

/// What is wanted.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Wish {
    /// Highest current of the scaled winding [A], > 0.
    pub to: Ampere,
    /// Rows, that of I → 0 included; at least 3.
    pub n_points: usize,
}

/// One point of the curve.
#[derive(Debug, Clone, PartialEq)]
pub struct Row {
    /// Current of the scaled winding, counted in the sense it has in the sheet.
    pub current: Ampere,
    /// Flux linkage of that winding.
    pub flux_linkage: Weber,
    /// Guaranteed ends by convexity of the coenergy; `None` when several windings carry current.
    pub flux_linkage_ends: Option<[Weber; 2]>,
    /// λ/I; the limit in the row of I → 0.
    pub apparent: Henry,
    /// dλ/dI, all currents scaled together.
    pub incremental: Henry,
    /// ½LI² with the apparent inductance.
    pub half_square: Joule,
    pub coenergy: Guaranteed,
    /// Flux density that 5 % of each part's volume exceed, in the order of [`Saturation::parts`].
    pub exceeded: Vec<Tesla>,
    pub n_unknowns: usize,
    pub n_newton_steps: usize,
}

/// Where the incremental inductance has fallen by a share of its value at I → 0.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Fall {
    pub share: f64,
    /// `None` where it does not fall so far up to the highest current.
    pub current: Option<Ampere>,
}

/// Shares for which [`Fall`] is told.
pub const FALLS: [f64; 4] = [0.1, 0.2, 0.3, 0.5];

/// What the study used.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Work {
    pub n_solves: usize,
    pub n_newton_steps: usize,
    pub n_cg_iterations: usize,
    /// Meshes tried: 1 when that of the highest current served all rows.
    pub n_meshes: usize,
}

/// The whole table.
#[derive(Debug, Clone, PartialEq)]
pub struct Saturation {
    pub title: String,
    /// The winding whose current is scaled.
    pub winding: String,
    /// Names of the parts, in the order of [`Row::exceeded`].
    pub parts: Vec<String>,
    /// By rising current, the first at I → 0.
    pub rows: Vec<Row>,
    pub falls: Vec<Fall>,
    pub requirements: Vec<RequirementResult>,
    /// Wanted relative width of the coenergy; `reached` tells whether every row got there.
    pub wanted: f64,
    pub reached: bool,
    pub work: Work,
    pub notes: Vec<String>,
}

/// The table of `model` up to `wish.to`; `progress` sees (finished, wanted) rows.
pub fn saturate(
    model: &Model,
    outline: &Outline,
    wish: &Wish,
    progress: &mut dyn FnMut(usize, usize),
) -> Result<Saturation, StudyError> {
    let w = scaled_winding(model).ok_or(StudyError::NoCurrent)?;
    let mut bench = Bench::new(model, outline, w, wish.to)?;
    let mut points = place::rows(&mut bench, wish, progress)?;
    bench.linkage_ends(&mut points)?;
    let falls = place::falls(&mut bench, &points)?;
    if !model.requirements.is_empty() {
        // The promises start from the sheet's own field.
        bench.move_to(model.windings[w].current.abs())?;
    }
    let (requirements, mut notes) = check_requirements(model, outline, &mut bench.outcome)
        .map_err(|source| StudyError::Solve { current: bench.current, source })?;
    notes.extend(self::notes(model, w, &points));
    Ok(Saturation {
        title: model.title.clone(),
        winding: model.windings[w].name.clone(),
        parts: bench.part_names(),
        reached: points
            .iter()
            .all(|row| is_narrow(row.coenergy.low, row.coenergy.high, model.accuracy.interval)),
        rows: points,
        falls,
        requirements,
        wanted: model.accuracy.interval,
        work: bench.work,
        notes,
    })
}

/// The first winding that carries current in the sheet.
fn scaled_winding(model: &Model) -> Option<usize> {
    model.windings.iter().position(|winding| winding.current != 0.0)
}

/// Is (high − low) at most the wanted share of the middle?
fn is_narrow(low: Joule, high: Joule, wanted: f64) -> bool {
    high - low <= wanted * 0.5 * (low + high)
}

fn notes(model: &Model, w: usize, rows: &[Row]) -> Vec<String> {
    let mut notes = vec![
        "guaranteed are the ends of the coenergy and those of the flux linkage, which follow from its convexity; \
         flux linkage and inductances themselves are best values with an error of about the coenergy's relative width \
         (estimated)"
            .to_string(),
    ];
    if single_carrier(model).is_none() {
        notes.push(format!(
            "several windings carry current and all scale together: the inductances are flux linkage of {0} over its \
             own current and its slope along that scale; the flux linkage has no guaranteed ends",
            model.windings[w].name
        ));
    }
    if rows.windows(2).any(|pair| pair[0].n_unknowns != pair[1].n_unknowns) {
        notes.push(
            "the rows stand on different meshes, so that differences between them hold part of the discretisation \
             error; the column of unknowns tells them apart"
                .to_string(),
        );
    }
    for material in &model.materials {
        if let Some((_, b_last)) = material.law.last_point() {
            let is_beyond = rows.last().is_some_and(|r| r.exceeded.iter().any(|b| b_last < *b));
            if is_beyond {
                notes.push(format!(
                    "at the highest current parts lie beyond the last point of `{}` ({b_last} T), where the law is an \
                     assumption: slope of air",
                    material.name
                ));
            }
        }
    }
    notes
}

/// Density of each region for 1 A in winding w with all others scaled along, and for w alone.
fn densities(model: &Model, outline: &Outline, w: usize) -> [Vec<f64>; 2] {
    let size = model.windings[w].current.abs();
    let along = outline.regions.iter().map(|r| r.current_density / size).collect();
    // λ is counted in the sense of the current.
    let sense = model.windings[w].current.signum();
    let alone = unit_density(model, outline, w).into_iter().map(|j| sense * j).collect();
    [along, alone]
}

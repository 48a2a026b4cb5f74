//! `Model` → the hand sum: R = Σ l/(µA), gaps by a handbook correction, L = N²/R. Uses no field.
//!
//! Also judges an estimate against the computed inductance and names the reluctance that is to blame.

mod effective;
mod fringing;
mod poles;
#[cfg(test)]
mod tests;
mod verdict;

pub use effective::{Effective, Path, Plate, Sums, effective, path};
pub use fringing::{GapPole, corner, corner_permeance, factor, log, one_gap_length, roters};
pub use poles::{gap_area, gap_pole};
pub use verdict::{blame, verdict};

use crate::geometry::{Leg, RegionKind};
use crate::model::{Across, Core, Dimensions, Form, GapCorrection, Law, Model, Section, Winding};
use crate::units::{Henry, MU0, PerHenry, Tesla};

/// One reluctance of the hand sum.
#[derive(Debug, Clone, PartialEq)]
pub struct HandRow {
    /// Name of the region in the ledger, as the outline has it.
    pub region: String,
    /// The region of the outline: `Leg`, `Gap` or `Joint`.
    pub kind: RegionKind,
    /// With the gap correction [1/H].
    pub reluctance: PerHenry,
    /// Without it: l/(µA).
    pub plain: PerHenry,
    /// The correction's factor F; 1 for iron and joint.
    pub factor: f64,
}

/// The sum on paper of one closed magnetic path.
#[derive(Debug, Clone, PartialEq)]
pub struct HandSum {
    /// Post, wall, plates, gaps in the sheet's order, joints.
    pub rows: Vec<HandRow>,
    /// Σ reluctance [1/H].
    pub total: PerHenry,
    /// Σ plain [1/H].
    pub plain_total: PerHenry,
    pub correction: GapCorrection,
    /// Relative initial permeability of the core.
    pub permeability: f64,
    /// Turns of the first winding that carries current.
    pub turns: f64,
    /// N²/total [H].
    pub inductance: Henry,
    /// Parts of the sheet that the sum does not know.
    pub left_out: Vec<String>,
}

impl HandSum {
    /// Hand value of a region of the outline [1/H]; `None` where the sum has none (air, windings, parts).
    pub fn reluctance(&self, kind: RegionKind) -> Option<PerHenry> {
        self.rows.iter().find(|row| row.kind == kind).map(|row| row.reluctance)
    }

    /// A_L [H] of the core closed and without any gap or joint: 1/Σ over posts, walls and plates.
    pub fn closed_inductance_factor(&self) -> Henry {
        let is_iron = |row: &&HandRow| matches!(row.kind, RegionKind::Leg(_));
        let closed: PerHenry = self.rows.iter().filter(is_iron).map(|row| row.plain).sum();
        1.0 / closed
    }
}

/// Why there is no hand sum: a note beside the results, not a failure.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum NoHandSum {
    #[error("no hand sum: there is no core given by its form, so no mean path is known")]
    NoCore,
    #[error(
        "no hand sum: the path of a {form} closes through air, where no length and area can be stated"
    )]
    OpenPath { form: &'static str },
    #[error("no hand sum: no winding carries current")]
    NoCurrent,
    #[error(
        "no hand sum: winding `{winding}` is not wholly inside the window, so not all of its turns link the post's flux"
    )]
    OutsideWindow { winding: String },
}

/// The hand sum of a pot core.
///
/// - post and wall: l/(µA), l net of every gap ground out of them
/// - each plate: ln(r3/r2)/(2πµt) and its two corners, [`path`]
/// - gaps: l/(µ0 A F) with the estimate's correction ("log" where none is stated), [`factor`]; a spacer gives a row a leg
/// - joints: joint/(µ0 A) in each leg whose faces mate (none with a spacer, not a leg with a gap at z = 0)
///
/// µ is the material's initial permeability. Errors: [`NoHandSum`].
pub fn hand_sum(model: &Model) -> Result<HandSum, NoHandSum> {
    let core = model.core.as_ref().ok_or(NoHandSum::NoCore)?;
    let dimensions = core.dimensions(&model.gaps);
    let path = path(&dimensions).ok_or(NoHandSum::OpenPath { form: form_name(&core.form) })?;
    let winding = model.windings.iter().find(|w| w.current != 0.0).ok_or(NoHandSum::NoCurrent)?;
    if !winding.sections.iter().all(|section| is_in_window(section, &dimensions)) {
        return Err(NoHandSum::OutsideWindow { winding: winding.name.clone() });
    }

    let correction = model.estimate.map_or(GapCorrection::Log, |estimate| estimate.gap_correction);
    let permeability = initial_permeability(&model.materials[usize::from(core.material.0)].law);
    let mut rows = iron_rows(model, &path, permeability);
    rows.extend(gap_rows(model, correction));
    rows.extend(joint_rows(model, core, &path));
    Ok(total(model, winding, rows, correction, permeability))
}

fn total(
    model: &Model,
    winding: &Winding,
    rows: Vec<HandRow>,
    correction: GapCorrection,
    permeability: f64,
) -> HandSum {
    let total: PerHenry = rows.iter().map(|row| row.reluctance).sum();
    let turns = winding.turns();
    HandSum {
        total,
        plain_total: rows.iter().map(|row| row.plain).sum(),
        correction,
        permeability,
        turns,
        inductance: turns * turns / total,
        left_out: model.parts.iter().map(|part| part.name.clone()).collect(),
        rows,
    }
}

/// Post, wall and plates, for the law's initial permeability.
fn iron_rows(model: &Model, path: &Path, permeability: f64) -> Vec<HandRow> {
    let mu = MU0 * permeability;
    let iron = |leg, c1: f64| row(leg_name(leg).into(), RegionKind::Leg(leg), c1 / mu, 1.0);
    let ground = |across| -> f64 {
        model.gaps.iter().filter(|g| g.across == across).map(|g| g.length).sum()
    };
    let plate = path.plate.disc.c1 + path.plate.wall_corner.c1 + path.plate.post_corner.c1;
    vec![
        iron(Leg::Post, (path.leg_length - ground(Across::Post)) / path.post_area),
        iron(Leg::Wall, (path.leg_length - ground(Across::Wall)) / path.wall_area),
        iron(Leg::UpperPlate, plate),
        iron(Leg::LowerPlate, plate),
    ]
}

fn gap_rows(model: &Model, correction: GapCorrection) -> Vec<HandRow> {
    let mut rows = Vec::new();
    for (i, gap) in model.gaps.iter().enumerate() {
        for leg in [Leg::Post, Leg::Wall] {
            let Some(pole) = gap_pole(model, i, leg) else { continue };
            let region = match gap.across {
                Across::Spacer => format!("{} {}", gap.name, leg_name(leg)),
                Across::Post | Across::Wall => gap.name.clone(),
            };
            let plain = gap.length / (MU0 * pole.area());
            rows.push(row(
                region,
                RegionKind::Gap { gap: i, leg },
                plain,
                factor(correction, &pole),
            ));
        }
    }
    rows
}

/// Residual gaps of the mating faces; no rows without one.
fn joint_rows(model: &Model, core: &Core, path: &Path) -> Vec<HandRow> {
    let mut rows = Vec::new();
    for (leg, area) in [(Leg::Post, path.post_area), (Leg::Wall, path.wall_area)] {
        let is_mated = !poles::spans(&model.gaps, leg)
            .iter()
            .any(|span| span.bottom <= 0.0 && 0.0 <= span.top);
        if is_mated && 0.0 < core.joint {
            let region = format!("{} joint", leg_name(leg));
            rows.push(row(region, RegionKind::Joint(leg), core.joint / (MU0 * area), 1.0));
        }
    }
    rows
}

fn row(region: String, kind: RegionKind, plain: PerHenry, factor: f64) -> HandRow {
    HandRow { region, kind, reluctance: plain / factor, plain, factor }
}

/// The outline's name of a leg or plate.
fn leg_name(leg: Leg) -> &'static str {
    match leg {
        Leg::Post => "post",
        Leg::Wall => "wall",
        Leg::UpperPlate => "upper plate",
        Leg::LowerPlate => "lower plate",
    }
}

fn form_name(form: &Form) -> &'static str {
    match form {
        Form::Pot { .. } => "pot core",
        Form::Drum { .. } => "drum core",
        Form::Rod { .. } => "rod",
    }
}

/// Relative slack of the comparison with the window: coordinates may touch its walls to rounding.
const WINDOW_SLACK: f64 = 1e-9;

fn is_in_window(section: &Section, dimensions: &Dimensions) -> bool {
    let Some([wall_inner, _]) = dimensions.wall_radii else { return false };
    let slack = WINDOW_SLACK * wall_inner;
    let [inner, outer] = section.radii;
    let [bottom, top] = section.heights;
    dimensions.post_radius <= inner + slack
        && outer <= wall_inner + slack
        && -dimensions.window_top <= bottom + slack
        && top <= dimensions.window_top + slack
}

/// Flux density at which a law counts as having its initial permeability: some millionths of the earth's field.
const NO_FIELD: Tesla = 1e-10;

/// Relative permeability at no field. To be replaced by the law's own `initial_permeability` once it has one.
fn initial_permeability(law: &Law) -> f64 {
    match law {
        Law::Constant { permeability } => *permeability,
        Law::Saturation { initial_permeability, .. } => *initial_permeability,
        Law::Table(_) => NO_FIELD / (MU0 * law.field(NO_FIELD)),
    }
}

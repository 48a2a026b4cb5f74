//! The cuts of the legs: ground gaps, spacers and the joint's layer, checked and in order of height.

use super::Leg;
use super::fault::{fault, label, mm};
use crate::model::{Across, Core, Dimensions, Fault, Form, Law, Model, Subject};

/// What fills a cut.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Filling {
    /// Air of that gap.
    Gap(usize),
    /// The joint's layer, with its relative permeability.
    Joint(f64),
}

/// A layer taken out of a leg, from `low` to `high` [m].
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Cut {
    pub low: f64,
    pub high: f64,
    pub filling: Filling,
}

/// A leg of the form with its cuts from bottom to top.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct CutLeg {
    pub leg: Leg,
    /// Inner and outer radius [m].
    pub radii: [f64; 2],
    /// The leg spans |z| ≤ `half` [m].
    pub half: f64,
    pub cuts: Vec<Cut>,
}

/// Thickness of a joint's layer in units of the joint: the thicker, the fewer triangles; bounded by the leg.
const JOINT_LAYER: f64 = 32.0;

/// Largest thickness of a joint's layer in units of the leg's width.
const JOINT_LAYER_MAX: f64 = 0.05;

/// The legs of a core with everything that is cut out of them.
///
/// # Errors
/// Gaps of no length, outside their leg or overlapping, in a leg that the form does not have; a joint that does not fit.
pub(super) fn cut_legs(model: &Model, core: &Core, d: &Dimensions) -> Result<Vec<CutLeg>, Fault> {
    for (index, gap) in model.gaps.iter().enumerate() {
        check_gap(model, core, index)?;
        if gap.across == Across::Spacer {
            continue;
        }
        check_room(model, core, d, index)?;
    }
    let post = [d.hole_radius, d.post_radius];
    let mut legs =
        vec![CutLeg { leg: Leg::Post, radii: post, half: d.window_top, cuts: Vec::new() }];
    if let Some(radii) = d.wall_radii {
        legs.push(CutLeg { leg: Leg::Wall, radii, half: d.window_top, cuts: Vec::new() });
    }
    for leg in &mut legs {
        leg.cuts = air_cuts(model, leg.leg, d);
        check_cuts(model, leg)?;
        if core.joint > 0.0 {
            add_joint(model, core, leg)?;
        }
    }
    Ok(legs)
}

/// Whether the gap has a length and its form has that leg.
fn check_gap(model: &Model, core: &Core, index: usize) -> Result<(), Fault> {
    let gap = &model.gaps[index];
    let (subject, name) = (Subject::Gap(index), label(model, Subject::Gap(index)));
    if !(gap.length > 0.0 && gap.length.is_finite()) {
        let message =
            format!("{name} has a length of {} mm; it must be greater than 0", mm(gap.length));
        return Err(fault(
            subject,
            Some("length"),
            message,
            "write its length, for example 0.3, or delete the gap",
        ));
    }
    if !gap.center.is_finite() {
        let message = format!("the center of {name} is {}, not a height", gap.center);
        return Err(fault(
            subject,
            Some("center"),
            message,
            "write the height of the gap's middle",
        ));
    }
    let refused = match (gap.across, core.form) {
        (Across::Spacer, Form::Rod { .. }) => {
            Some("a rod has no halves that a spacer could move apart")
        }
        (Across::Wall, Form::Rod { .. }) => Some("a rod has no wall"),
        (Across::Wall, Form::Drum { .. }) => Some("a drum has no wall"),
        _ => None,
    };
    match refused {
        Some(why) => {
            let message = format!("{name} cannot be: {why}");
            Err(fault(
                subject,
                Some("across"),
                message,
                "write across = \"post\" for a gap ground out of the post",
            ))
        }
        None => Ok(()),
    }
}

/// Whether a ground gap lies within the straight part of its leg and leaves something of it.
fn check_room(model: &Model, core: &Core, d: &Dimensions, index: usize) -> Result<(), Fault> {
    let gap = &model.gaps[index];
    let (low, high) = (gap.center - 0.5 * gap.length, gap.center + 0.5 * gap.length);
    let room = d.window_top - core.corner_radius;
    let leg = if gap.across == Across::Post { "post" } else { "wall" };
    // Flush with the plate up to rounding is meant to be flush.
    let slack = 1e-9 * d.core_top;
    if low < -room - slack || high > room + slack {
        let message = format!(
            "{} lies outside its leg: it spans z = {} to {} mm, the straight part of the {leg} z = {} to {} mm",
            label(model, Subject::Gap(index)),
            mm(low),
            mm(high),
            mm(-room),
            mm(room)
        );
        let help = format!("keep center ± length/2 within ±{} mm", mm(room));
        return Err(fault(Subject::Gap(index), Some("center"), message, help));
    }
    if low <= -d.window_top + slack && high >= d.window_top - slack {
        let message = format!(
            "{} of {} mm takes the whole {leg} away, which is {} mm high",
            label(model, Subject::Gap(index)),
            mm(gap.length),
            mm(2.0 * d.window_top)
        );
        return Err(fault(Subject::Gap(index), Some("length"), message, "write a shorter length"));
    }
    Ok(())
}

/// Gaps and spacers of one leg by height; spacers are stacked about z = 0 in their order in the sheet.
fn air_cuts(model: &Model, leg: Leg, d: &Dimensions) -> Vec<Cut> {
    let mut cuts = Vec::new();
    let mut stacked = -0.5 * d.spacers;
    for (index, gap) in model.gaps.iter().enumerate() {
        let (low, high) = match (gap.across, leg) {
            (Across::Spacer, _) => {
                let low = stacked;
                stacked += gap.length;
                (low, stacked)
            }
            (Across::Post, Leg::Post) | (Across::Wall, Leg::Wall) => {
                (gap.center - 0.5 * gap.length, gap.center + 0.5 * gap.length)
            }
            _ => continue,
        };
        cuts.push(Cut { low, high, filling: Filling::Gap(index) });
    }
    cuts.sort_by(|a, b| a.low.total_cmp(&b.low).then(a.high.total_cmp(&b.high)));
    cuts
}

/// Whether no two cuts of a leg overlap; touching is fine.
fn check_cuts(model: &Model, leg: &CutLeg) -> Result<(), Fault> {
    for pair in leg.cuts.windows(2) {
        let (Filling::Gap(lower), Filling::Gap(upper)) = (pair[0].filling, pair[1].filling) else {
            continue;
        };
        if pair[1].low < pair[0].high - 1e-9 * leg.half {
            let message = format!(
                "{} and {} overlap from z = {} to {} mm in the same leg",
                label(model, Subject::Gap(lower)),
                label(model, Subject::Gap(upper)),
                mm(pair[1].low),
                mm(pair[0].high.min(pair[1].high))
            );
            let help = "move one of them by its center, or write one gap of their common length";
            let later = lower.max(upper);
            let key = if model.gaps[later].across == Across::Spacer { "length" } else { "center" };
            let mut it = fault(Subject::Gap(later), Some(key), message, help);
            it.other = Some(Subject::Gap(lower.min(upper)));
            return Err(it);
        }
    }
    Ok(())
}

/// Puts the joint's layer into a leg whose halves meet at z = 0.
///
/// The layer of thickness t stands for the residual gap j and the core that it displaces:
/// t/(µ0 µ A) = j/(µ0 A) + (t − j)/(µ0 µ_r A), hence µ = t/(j + (t − j)/µ_r) for a constant law; for every other law the
/// displaced core is neglected, µ = t/j. t is 32 joints, at most 5 % of the leg's width, at least j itself.
fn add_joint(model: &Model, core: &Core, leg: &mut CutLeg) -> Result<(), Fault> {
    if leg.cuts.iter().any(|cut| cut.low <= 0.0 && 0.0 <= cut.high) {
        return Ok(());
    }
    let joint = core.joint;
    let width = leg.radii[1] - leg.radii[0];
    let near = leg.cuts.iter().map(|cut| cut.low.abs().min(cut.high.abs()));
    let room = near.fold(leg.half - core.corner_radius, f64::min);
    let thickness = joint.max((JOINT_LAYER * joint).min(JOINT_LAYER_MAX * width).min(room));
    if 0.5 * thickness >= room {
        let message = format!(
            "the joint of {} mm does not fit at z = 0: the next gap or corner is {} mm away",
            mm(joint),
            mm(room)
        );
        return Err(fault(
            Subject::Core,
            Some("joint"),
            message,
            "write the joint as a gap at the mating faces",
        ));
    }
    let displaced = match &model.materials[core.material.0 as usize].law {
        Law::Constant { permeability } => (thickness - joint) / permeability,
        _ => 0.0,
    };
    let filling = Filling::Joint(thickness / (joint + displaced));
    leg.cuts.push(Cut { low: -0.5 * thickness, high: 0.5 * thickness, filling });
    leg.cuts.sort_by(|a, b| a.low.total_cmp(&b.low));
    Ok(())
}

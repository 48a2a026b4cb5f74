//! What `check` says: the sheet's dimensions, turns and materials read back, and the hand sum's figures.

use super::numbers::{clip, millimeters, percent, wrap};
use crate::model::{
    Across, Claim, Estimate, GapCorrection, InductanceKind, Law, Model, Requirement, Winding,
};
use crate::results::hand::Effective;
use crate::units::{Henry, PerHenry};
use crate::units::{engineering, number};
use serde_json::json;

/// What was understood, beside the model: figures that other stages computed.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Understood {
    /// `None` for a drum, a rod and free parts: their flux closes through air.
    pub effective: Option<Effective>,
    /// A_L of the closed core without any gap [H].
    pub ungapped_inductance_factor: Option<Henry>,
    /// Name and l/(µ0 A) [1/H] of every gap.
    pub gaps: Vec<(String, PerHenry)>,
    /// A_L of the whole hand sum with its gap correction [H].
    pub hand_inductance_factor: Option<Henry>,
    /// The correction that its gaps have.
    pub gap_correction: Option<GapCorrection>,
    /// Remarks that do not stop a run.
    pub notes: Vec<String>,
}

/// Columns of the screen.
const WIDTH: usize = 80;
/// Column where the values begin.
const LABEL_WIDTH: usize = 24;

/// The screen of `check`, lengths in mm, ending in a line break.
pub fn check_screen(model: &Model, understood: &Understood) -> String {
    let mut text = String::new();
    for line in wrap(&model.title, WIDTH) {
        text.push_str(&format!("{line}\n"));
    }
    let origin = if model.core.is_some() { ", z from the core's middle" } else { "" };
    text.push_str(&format!("  No mistakes found. Lengths in mm, r from the axis{origin}.\n"));
    materials(&mut text, model);
    core(&mut text, model);
    gaps(&mut text, model, understood);
    windings(&mut text, model);
    parts(&mut text, model);
    hand_sum(&mut text, understood);
    wishes(&mut text, model);
    if !understood.notes.is_empty() {
        text.push_str("\nNotes\n");
        for note in &understood.notes {
            for (i, line) in wrap(note, WIDTH - 4).iter().enumerate() {
                text.push_str(&format!("  {} {line}\n", if i == 0 { "·" } else { " " }));
            }
        }
    }
    text
}

/// What `check --json` prints: title, turns and the hand sum's figures in SI; null where there is none.
pub fn check_json(model: &Model, understood: &Understood) -> String {
    let effective = understood.effective.map(|e| {
        json!({
            "area": e.area, "length": e.length, "volume": e.volume, "c1": e.c1, "c2": e.c2, "area_min": e.area_min
        })
    });
    let windings: Vec<_> = model
        .windings
        .iter()
        .map(|w| json!({ "name": w.name, "turns": w.turns(), "current": w.current }))
        .collect();
    let gaps: Vec<_> = understood
        .gaps
        .iter()
        .map(|(region, plain)| json!({ "region": region, "plain_reluctance": plain }))
        .collect();
    let file = json!({
        "program": concat!("gapwright ", env!("CARGO_PKG_VERSION")),
        "title": model.title,
        "windings": windings,
        "effective": effective,
        "gaps": gaps,
        "ungapped_inductance_factor": understood.ungapped_inductance_factor,
        "hand_inductance_factor": understood.hand_inductance_factor,
        "notes": understood.notes,
    });
    format!("{file:#}\n")
}

fn line(text: &mut String, label: &str, value: &str) {
    let rows = wrap(value, WIDTH - LABEL_WIDTH - 2);
    for (i, row) in rows.iter().enumerate() {
        let label = if i == 0 { clip(label, LABEL_WIDTH - 1) } else { String::new() };
        text.push_str(&format!("  {label:LABEL_WIDTH$}{row}\n"));
    }
}

fn materials(text: &mut String, model: &Model) {
    if model.materials.is_empty() {
        return;
    }
    text.push_str("\nMaterials\n");
    for material in &model.materials {
        let law = match &material.law {
            Law::Constant { permeability } => {
                format!("relative permeability {permeability}, constant")
            }
            Law::Table(table) => {
                let (h, b) = material.law.last_point().unwrap_or((0.0, 0.0));
                let [h, b] = [engineering(h, "A/m", 3), engineering(b, "T", 3)];
                format!("B-H table of {} points up to {b} at {h}", table.rows().len())
            }
            Law::Saturation { initial_permeability, flux_density } => format!(
                "initial permeability {initial_permeability}, saturating towards {}",
                engineering(*flux_density, "T", 3)
            ),
        };
        line(text, &material.name, &law);
    }
}

fn core(text: &mut String, model: &Model) {
    let Some(core) = &model.core else { return };
    let size = core.dimensions(&model.gaps);
    let diameter = |radius: f64| format!("Ø {}", millimeters(2.0 * radius));
    text.push_str("\nCore\n");
    let hole = if size.hole_radius == 0.0 {
        "solid".to_string()
    } else {
        format!("hole {}", diameter(size.hole_radius))
    };
    line(text, "post", &format!("{}, {hole}", diameter(size.post_radius)));
    if let Some([inner, outer]) = size.wall_radii {
        line(text, "wall", &format!("{} to {}", diameter(inner), diameter(outer)));
    }
    if 0.0 < size.plate_thickness {
        let (plate, thickness) = (diameter(size.plate_radius), millimeters(size.plate_thickness));
        line(text, "end plates", &format!("{plate}, {thickness} thick"));
        line(text, "window", &format!("height {}", millimeters(2.0 * size.window_top)));
    }
    line(text, "whole", &format!("height {}", millimeters(2.0 * size.core_top)));
    if 0.0 < core.corner_radius {
        line(text, "window corners", &format!("radius {}", millimeters(core.corner_radius)));
    }
    if 0.0 < core.joint {
        line(text, "mating faces", &format!("residual gap {}", engineering(core.joint, "m", 2)));
    }
}

fn gaps(text: &mut String, model: &Model, understood: &Understood) {
    if model.gaps.is_empty() {
        return;
    }
    text.push_str("\nGaps\n");
    for gap in &model.gaps {
        let across = match gap.across {
            Across::Post => "ground out of the post",
            Across::Wall => "ground out of the wall",
            Across::Spacer => "spacer between the halves",
        };
        let center = if gap.across == Across::Spacer || gap.center == 0.0 {
            String::new()
        } else {
            format!(", middle at z {}", millimeters(gap.center))
        };
        line(text, &gap.name, &format!("{} {across}{center}", millimeters(gap.length)));
    }
    for (name, reluctance) in &understood.gaps {
        let plain = format!("{} /µH", number(1e-6 * reluctance, 4));
        line(text, &format!("l/(µ0 A) of {}", clip(name, 11)), &plain);
    }
}

fn windings(text: &mut String, model: &Model) {
    text.push_str("\nWindings\n");
    for winding in &model.windings {
        line(text, &winding.name, &headline(winding));
        for section in &winding.sections {
            let [inner, outer] = section.radii.map(millimeters);
            let [bottom, top] = section.heights.map(millimeters);
            let turns = if winding.sections.len() > 1 {
                format!("{} turns, ", section.turns)
            } else {
                String::new()
            };
            line(text, "", &format!("{turns}r {inner} to {outer}, z {bottom} to {top}"));
        }
    }
}

/// "42 turns at 1.80 A, ripple 0.40 A".
fn headline(winding: &Winding) -> String {
    let ripple = if winding.ripple == 0.0 {
        String::new()
    } else {
        format!(", ripple {} peak to peak", engineering(winding.ripple, "A", 3))
    };
    format!("{} turns at {}{ripple}", winding.turns(), engineering(winding.current, "A", 3))
}

fn parts(text: &mut String, model: &Model) {
    if model.parts.is_empty() {
        return;
    }
    text.push_str("\nParts\n");
    for part in &model.parts {
        let span = |of: &dyn Fn(&crate::model::Corner) -> f64| {
            let values = part.outline.iter().map(of);
            let (low, high) =
                values.fold((f64::MAX, f64::MIN), |(low, high), v| (low.min(v), high.max(v)));
            format!("{} to {}", millimeters(low), millimeters(high))
        };
        let (r, z) = (span(&|c| c.at.r), span(&|c| c.at.z));
        let material =
            model.materials.get(usize::from(part.material.0)).map_or("", |m| m.name.as_str());
        let n = part.outline.len();
        line(text, &part.name, &format!("{n} corners, r {r}, z {z}, of {material}"));
    }
}

fn hand_sum(text: &mut String, understood: &Understood) {
    if understood.effective.is_none() && understood.hand_inductance_factor.is_none() {
        return;
    }
    text.push_str("\nBy hand\n");
    if let Some(core) = &understood.effective {
        line(text, "A_e", &format!("{:.2} mm²", 1e6 * core.area));
        line(text, "l_e", &format!("{:.2} mm", 1e3 * core.length));
        line(text, "V_e", &format!("{:.1} mm³", 1e9 * core.volume));
        line(text, "C1", &format!("{:.4} /mm", 1e-3 * core.c1));
        line(text, "C2", &format!("{:.4e} /mm³", 1e-9 * core.c2));
    }
    if let Some(factor) = understood.ungapped_inductance_factor {
        line(text, "A_L without any gap", &engineering(factor, "H", 4));
    }
    if let Some(factor) = understood.hand_inductance_factor {
        let correction = understood.gap_correction.filter(|_| !understood.gaps.is_empty());
        let correction = correction
            .map_or(String::new(), |c| format!(", gap correction: {}", correction_name(c)));
        line(text, "A_L of the hand sum", &format!("{}{correction}", engineering(factor, "H", 4)));
    }
}

/// What the sheet calls a correction.
fn correction_name(correction: GapCorrection) -> String {
    match correction {
        GapCorrection::None => "none".to_string(),
        GapCorrection::OneGapLength => "one gap length".to_string(),
        GapCorrection::Log => "log".to_string(),
        GapCorrection::Corner => "corner".to_string(),
        GapCorrection::Roters => "roters".to_string(),
        GapCorrection::Factor(factor) => format!("factor {factor}"),
    }
}

fn wishes(text: &mut String, model: &Model) {
    text.push_str("\nAsked for\n");
    let is_linear = model.materials.iter().all(|m| matches!(m.law, Law::Constant { .. }));
    let quantity = if is_linear { "inductance" } else { "coenergy" };
    let width = percent(model.accuracy.interval, 3);
    line(text, "interval", &format!("{width} of the {quantity} at most"));
    if let Some(estimate) = &model.estimate {
        line(text, "figure to be judged", &claim(estimate));
    }
    for requirement in &model.requirements {
        line(text, "requirement", &promise(model, requirement));
    }
    for probe in &model.probes {
        let at = |p: crate::model::Point| format!("r {}, z {}", millimeters(p.r), millimeters(p.z));
        let place = if probe.n_points == 1 {
            at(probe.from)
        } else {
            format!("{} points from {} to {}", probe.n_points, at(probe.from), at(probe.to))
        };
        line(text, &format!("probe {}", probe.name), &place);
    }
}

/// "inductance 700.0 µH, ±3 %".
fn claim(estimate: &Estimate) -> String {
    let figure = match estimate.claim {
        Claim::Inductance(value) => format!("inductance {}", engineering(value, "H", 4)),
        Claim::InductanceFactor(value) => format!("A_L {}", engineering(value, "H", 4)),
        Claim::HandSum => "the hand sum".to_string(),
    };
    format!("{figure}, ±{}", percent(estimate.tolerance, 3))
}

/// "main at 2.50 A: apparent inductance at least 650.0 µH".
fn promise(model: &Model, requirement: &Requirement) -> String {
    let winding = model.windings.get(requirement.winding).map_or("", |w| w.name.as_str());
    let kind = match requirement.kind {
        InductanceKind::Apparent => "apparent",
        InductanceKind::Incremental => "incremental",
    };
    let limit = |word: &str, value: Option<Henry>| {
        value.map(|v| format!("{word} {}", engineering(v, "H", 4).replace(' ', "\u{a0}")))
    };
    let limits = [limit("at least", requirement.least), limit("at most", requirement.most)];
    let limits: Vec<String> = limits.into_iter().flatten().collect();
    let current = engineering(requirement.current, "A", 3);
    format!("{winding} at {current}: {kind} inductance {}", limits.join(" and "))
}

#[cfg(test)]
mod tests;

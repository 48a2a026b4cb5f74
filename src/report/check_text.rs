//! What `check` says: the sheet's dimensions, turns and materials read back, and the hand sum's figures.

use super::numbers::{clip, millimeters, percent, wrap};
use crate::model::{Across, Law, Model, Winding};
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
    text.push_str(
        "  Read and found in order. Lengths in mm, r from the axis, z from the middle.\n",
    );
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
        let plain = format!("{} 1/µH", number(1e-6 * reluctance, 4));
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
        line(text, "A_L of the hand sum", &engineering(factor, "H", 4));
    }
}

fn wishes(text: &mut String, model: &Model) {
    text.push_str("\nAsked for\n");
    line(text, "interval", &format!("{} wide at most", percent(model.accuracy.interval, 3)));
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

#[cfg(test)]
mod tests {
    use super::*;
    use crate::report::fixture;
    use expect_test::expect;

    fn understood() -> Understood {
        Understood {
            effective: Some(Effective {
                area_min: 80e-6,
                area: 92e-6,
                length: 37e-3,
                volume: 3.4e-6,
                c1: 400.0,
                c2: 4.4e6,
            }),
            ungapped_inductance_factor: Some(6.2e-6),
            gaps: vec![("post gap".to_string(), 2.947e6)],
            hand_inductance_factor: Some(380e-9),
            notes: vec![],
        }
    }

    #[test]
    fn the_sheet_is_read_back() {
        expect![[r#"
            Buoy charger choke
              Read and found in order. Lengths in mm, r from the axis, z from the middle.

            Materials
              soft_ferrite            relative permeability 2000, constant

            Core
              post                    Ø 11.5, hole Ø 5.4
              wall                    Ø 21.2 to Ø 25.5
              end plates              Ø 25.5, 2.55 thick
              window                  height 11
              whole                   height 16.1

            Gaps
              post gap                0.3 ground out of the post
              l/(µ0 A) of post gap    2.947 1/µH

            Windings
              main                    42 turns at 1.80 A
                                      r 6.6 to 10.2, z −4.9 to 4.9

            By hand
              A_e                     92.00 mm²
              l_e                     37.00 mm
              V_e                     3400.0 mm³
              C1                      0.4000 /mm
              C2                      4.4000e-3 /mm³
              A_L without any gap     6.200 µH
              A_L of the hand sum     380.0 nH

            Asked for
              interval                0.1 % wide at most
        "#]]
        .assert_eq(&check_screen(&fixture::model(), &understood()));
    }

    #[test]
    fn a_coil_without_a_core_has_no_hand_sum() {
        let mut model = fixture::model();
        model.core = None;
        model.gaps.clear();
        model.materials.clear();
        let text = check_screen(&model, &Understood::default());
        assert!(
            !text.contains("By hand") && !text.contains("Core") && text.contains("42 turns"),
            "{text}"
        );
    }

    #[test]
    fn long_names_leave_the_columns_in_place() {
        let mut model = fixture::model();
        model.windings[0].name =
            "a winding with a very long name indeed, longer than a column".to_string();
        for line in check_screen(&model, &understood()).lines() {
            assert!(line.chars().count() <= 80, "{line}");
        }
    }
}

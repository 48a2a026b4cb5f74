//! Words of the geometry's faults: lengths in millimetres, names of shapes. Decides nothing.

use crate::model::{Fault, Model, Point, Subject};

/// A length in millimetres as text with at most six significant digits, without needless zeros.
pub(super) fn mm(length: f64) -> String {
    let value = length * 1e3;
    if !value.is_finite() || value == 0.0 {
        return format!("{}", value + 0.0);
    }
    let decimals = (5 - value.abs().log10().floor() as i32).clamp(0, 9) as usize;
    let text = format!("{value:.decimals$}");
    let text =
        if text.contains('.') { text.trim_end_matches('0').trim_end_matches('.') } else { &text };
    if text == "0" || text == "-0" { format!("{value:.3e}") } else { text.to_string() }
}

/// A place as text: "r = 4.1 mm, z = 0 mm".
pub(super) fn place(p: Point) -> String {
    format!("r = {} mm, z = {} mm", mm(p.r), mm(p.z))
}

/// A fault of one subject.
pub(super) fn fault(
    subject: Subject,
    key: Option<&'static str>,
    message: String,
    help: impl Into<String>,
) -> Fault {
    Fault { subject, key, other: None, message, help: help.into() }
}

/// What the user calls a subject: "gap `g1`", "winding `main`", "the core".
pub(super) fn label(model: &Model, subject: Subject) -> String {
    match subject {
        Subject::Core => "the core".to_string(),
        Subject::Gap(gap) => format!("gap `{}`", model.gaps[gap].name),
        Subject::Winding { winding, section } => {
            let w = &model.windings[winding];
            match w.sections.len() {
                0 | 1 => format!("winding `{}`", w.name),
                _ => format!("section {} of winding `{}`", section + 1, w.name),
            }
        }
        Subject::Part(part) => format!("part `{}`", model.parts[part].name),
        Subject::Material(material) => format!("material `{}`", model.materials[material].name),
        Subject::Probe(probe) => format!("probe `{}`", model.probes[probe].name),
        Subject::Sheet => "the sheet".to_string(),
    }
}

#[cfg(test)]
mod tests {
    use super::mm;

    #[test]
    fn lengths_print_short_in_millimetres() {
        for (length, text) in [
            (0.00575, "5.75"),
            (5e-6, "0.005"),
            (0.0, "0"),
            (-0.0049, "-4.9"),
            (1.0 / 3.0 * 1e-3, "0.333333"),
            (0.025_5, "25.5"),
            (2.0, "2000"),
            (1e-15, "1.000e-12"),
        ] {
            assert_eq!(mm(length), text);
        }
    }
}

//! The command `check`: read, validate, say what was understood, draw the section.

use super::options::Options;
use super::{End, Stop, files, screen, sheet};
use gapwright::geometry::RegionKind;
use gapwright::model::Model;
use gapwright::report::check_text::{Understood, check_json, check_screen};
use gapwright::report::section::section_svg;
use gapwright::results::hand;

/// Runs `check`.
pub fn check(options: &Options) -> Result<End, Stop> {
    let (sheet, outline) = sheet::read(options)?;
    let understood = understood(&sheet.model);
    if !options.json || options.out.is_some() {
        let out = files::directory(&options.sheet, options.out.as_deref());
        files::write_all(
            &out,
            &[("section.svg", section_svg(&sheet.model, &outline).into_bytes())],
        )?;
        if !options.json && !options.quiet {
            screen::print(&check_screen(&sheet.model, &understood))?;
            screen::print(&format!("\nDrawn: {}\n", files::shown(&out.join("section.svg"))))?;
        }
    }
    if options.json {
        screen::print(&check_json(&sheet.model, &understood))?;
    }
    Ok(End::Done)
}

/// The hand sum's figures; why there are none becomes a note.
fn understood(model: &Model) -> Understood {
    let effective =
        model.core.as_ref().and_then(|core| hand::effective(&core.dimensions(&model.gaps)));
    match hand::hand_sum(model) {
        Err(reason) => {
            Understood { effective, notes: vec![reason.to_string()], ..Understood::default() }
        }
        Ok(sum) => {
            let gaps = sum.rows.iter().filter(|row| matches!(row.kind, RegionKind::Gap { .. }));
            Understood {
                effective,
                ungapped_inductance_factor: Some(sum.closed_inductance_factor()),
                gaps: gaps.map(|row| (row.region.clone(), row.plain)).collect(),
                hand_inductance_factor: Some(1.0 / sum.total),
                gap_correction: Some(sum.correction),
                notes: sum
                    .left_out
                    .iter()
                    .map(|part| format!("the hand sum does not know the part {part}"))
                    .collect(),
            }
        }
    }
}

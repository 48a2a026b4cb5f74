//! The tables below the answer: ledger, gaps, hot spots, parts.

use super::{Look, NAME_WIDTH, WIDTH, heading, push, push_table};
use crate::report::numbers::{clip, decimals_for, percent, signed, wrap};
use crate::results::{Results, RipplePart};
use crate::units::engineering;

pub(super) fn ledger(text: &mut String, results: &Results, look: &Look) {
    if results.ledger.is_empty() {
        return;
    }
    // Reluctances are printed in 1/µH, so that their reciprocal sum is the A_L that stands above.
    let decimals = decimals_for(
        1e-6 * results.ledger.iter().filter_map(|r| r.reluctance).fold(0.0, f64::max),
        4,
    );
    let reluctance =
        |value: Option<f64>| value.map_or("–".to_string(), |v| signed(1e-6 * v, decimals));
    let mut rows: Vec<Vec<String>> = results
        .ledger
        .iter()
        .map(|row| {
            let verdict = match (row.reluctance, row.hand) {
                (Some(field), Some(hand)) if field != 0.0 => off_by(hand / field - 1.0),
                _ => String::new(),
            };
            let (name, share) = (clip(&row.region, NAME_WIDTH), percent_of(row.share));
            vec![name, share, reluctance(row.reluctance), reluctance(row.hand), verdict]
        })
        .collect();
    rows.extend(ledger_sum(results, decimals));
    let has_field = results.ledger.iter().any(|row| row.reluctance.is_some());
    let has_hand = results.ledger.iter().any(|row| row.hand.is_some());
    let header = ["", "share", "field", "hand", "the hand value is"];
    // Columns without a single value are left out.
    let n_columns = if has_hand { 5 } else { 2 + usize::from(has_field) };
    rows.iter_mut().for_each(|row| row.truncate(n_columns));
    let unit = if 2 < n_columns { ", in 1/µH" } else { "" };
    heading(text, &format!("Where the reluctance sits{unit}"), look);
    push_table(text, &header[..n_columns], &rows);
    if has_hand && !results.gaps.is_empty() {
        push(text, "  A gap's hand value also stands for the flux that bulges round it; the field");
        push(text, "  counts that under window, windings and outside: compare the sums.");
    }
}

/// "77.0 %" of a share.
fn percent_of(share: f64) -> String {
    format!("{} %", signed(100.0 * share, 1))
}

/// The last line: all of the field's reluctances, which is 1/A_L, and all that the hand sum has. `None` where the
/// field has none.
fn ledger_sum(results: &Results, decimals: usize) -> Option<Vec<String>> {
    let field = results.ledger.iter().map(|row| row.reluctance).sum::<Option<f64>>()?;
    let hand: f64 = results.ledger.iter().filter_map(|row| row.hand).sum();
    let share: f64 = results.ledger.iter().map(|row| row.share).sum();
    let (hand, verdict) = match hand {
        0.0 => ("–".to_string(), String::new()),
        _ => (signed(1e-6 * hand, decimals), off_by(hand / field - 1.0)),
    };
    let field = signed(1e-6 * field, decimals);
    Some(vec!["sum = 1/A_L".to_string(), percent_of(share), field, hand, verdict])
}

/// "18 % high" of a relative deviation.
fn off_by(deviation: f64) -> String {
    let side = if deviation < 0.0 { "low" } else { "high" };
    let percents = 100.0 * deviation.abs();
    format!("{} % {side}", signed(percents, decimals_for(percents, 2)))
}

pub(super) fn gaps(text: &mut String, results: &Results, look: &Look) {
    if results.gaps.is_empty() {
        return;
    }
    heading(text, "Gaps: fringing factor and pull", look);
    let rows: Vec<Vec<String>> = results
        .gaps
        .iter()
        .map(|gap| {
            vec![
                clip(&gap.name, NAME_WIDTH),
                gap.gap_based.map_or("–".to_string(), |f| signed(f, 3)),
                signed(1e-6 * gap.plain_reluctance, decimals_for(1e-6 * gap.plain_reluctance, 4)),
                engineering(gap.force, "N", 3),
                engineering(gap.plain_force, "N", 3),
            ]
        })
        .collect();
    push_table(text, &["", "factor", "l/(µ0 A), 1/µH", "pull", "by B²A/2µ0"], &rows);
    if let Some(factor) = results.inductance_based {
        let sentence = format!(
            "For a spreadsheet, one factor for all gaps: N²/(R_core + R_gap/{factor:.3}) gives this inductance, with \
             R_gap = l/(µ0 A) and R_core from the column \"field\"."
        );
        for line in wrap(&sentence, WIDTH - 2) {
            push(text, &format!("  {line}"));
        }
    }
}

pub(super) fn hot_spots(text: &mut String, results: &Results, look: &Look) {
    if results.hot_spots.is_empty() {
        return;
    }
    heading(text, "Highest flux densities, each averaged over a small disc", look);
    let rows: Vec<Vec<String>> = results
        .hot_spots
        .iter()
        .map(|spot| {
            vec![
                clip(&spot.part, NAME_WIDTH),
                engineering(spot.flux_density, "T", 3),
                format!("r {} mm", signed(1e3 * spot.r, 2)),
                format!("z {} mm", signed(1e3 * spot.z, 2)),
            ]
        })
        .collect();
    push_table(text, &["", "|B|", "", ""], &rows);
}

pub(super) fn parts(text: &mut String, results: &Results, look: &Look) {
    if results.parts.is_empty() {
        return;
    }
    heading(text, "Flux density exceeded by a share of each part's volume", look);
    let has_knee = results.parts.iter().any(|part| part.margin.is_some());
    let rows: Vec<Vec<String>> = results
        .parts
        .iter()
        .map(|part| {
            let mut row = vec![clip(&part.name, NAME_WIDTH)];
            row.extend(part.exceeded.iter().map(|&b| engineering(b, "T", 3)));
            if has_knee {
                row.push(part.margin.map_or("–".to_string(), |m| {
                    if m < 0.0 { format!("{} beyond", percent(-m, 2)) } else { percent(m, 2) }
                }));
            }
            row
        })
        .collect();
    let header = ["", "1 %", "5 %", "50 %", "room to the knee"];
    push_table(text, &header[..4 + usize::from(has_knee)], &rows);
}

pub(super) fn ripple(text: &mut String, results: &Results, look: &Look) {
    let Some(ripple) = &results.ripple else { return };
    heading(text, "Ripple: swing of the flux density, and its peak, in 5 % of each part", look);
    for current in &ripple.currents {
        push(
            text,
            &format!(
                "  {} swings between {} and {}",
                clip(&current.winding, NAME_WIDTH),
                engineering(current.trough, "A", 3),
                engineering(current.peak, "A", 3)
            ),
        );
    }
    let row = |part: &RipplePart| {
        vec![
            clip(&part.name, NAME_WIDTH),
            engineering(part.swing, "T", 3),
            engineering(part.peak, "T", 3),
        ]
    };
    let rows: Vec<Vec<String>> = ripple.parts.iter().map(row).collect();
    push_table(text, &["", "swing", "peak"], &rows);
}

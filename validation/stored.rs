//! The table as stored in `table.txt`, so that its drift shows in a diff, and only a drift that means something.
//!
//! A number keeps its stored digits as long as the new one is within the scale of its interval (its limit, where there
//! is no interval): a better mesh moves the middle of every interval a little, which says nothing. To write all
//! numbers afresh, empty the file first.

use crate::table::{Row, laid_out, listed_reasons};

/// The text of the rows; `before` is the stored one.
pub fn text(rows: &[Row], left_out: &[[&str; 2]], before: &str) -> String {
    let head = ["case", "wanted", "ours", "reference", "deviation", "limit"];
    let cells = |row: &Row| {
        let [ours, deviation] =
            kept(row, before).unwrap_or_else(|| [row.short.clone(), row.short_deviation.clone()]);
        let Row { case, wanted, reference, limit, .. } = row;
        [case.clone(), wanted.clone(), ours, reference.clone(), deviation, limit.clone()]
    };
    let count = format!("\n{} rows\n", rows.len());
    laid_out(rows, head, cells) + &listed_reasons(left_out) + &count
}

/// Stored value and deviation of a row that has not moved beyond its scale.
fn kept(row: &Row, before: &str) -> Option<[String; 2]> {
    let middle = row.middle.filter(|_| row.passed)?;
    for line in before.lines() {
        let cells: Vec<&str> = line.split('|').map(str::trim).collect();
        if let [case, wanted, ours, _, deviation, ..] = cells[..]
            && case == row.case
            && wanted == row.wanted
        {
            let stored: f64 = ours.parse().ok()?;
            let near = (stored / middle - 1.0).abs() <= row.scale;
            return near.then(|| [ours.to_owned(), deviation.to_owned()]);
        }
    }
    None
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::table::{Judged, value};

    fn row(ours: f64) -> Row {
        let judged = Judged {
            case: "coil",
            wanted: Some(1e-3),
            reference: 2.0,
            unit: "m",
            slack: 0.0,
            limit: 5e-4,
            limit_text: "5e-4".to_owned(),
            reason: "why".to_owned(),
            source: "where",
        };
        value(&judged, Ok(ours))
    }

    #[test]
    fn a_move_within_the_scale_leaves_the_text_alone() {
        let before = text(&[row(2.0004)], &[], "");
        assert!(before.contains("2.0004"), "{before}");
        assert_eq!(text(&[row(1.9998)], &[], &before), before);
    }

    #[test]
    fn a_move_beyond_the_scale_or_a_failure_shows() {
        let before = text(&[row(2.0008)], &[], "");
        assert!(text(&[row(1.9996)], &[], &before).contains("1.9996"));
        let failed = text(&[row(2.002)], &[], &before);
        assert!(failed.contains("FAILED") && failed.contains("2.002"), "{failed}");
    }
}

//! The table of checks: one line each, reasons and sources as numbered notes below.
//!
//! Two texts of the same rows: [`printed`] is what a run found, with unknowns and ends of intervals; the stored one
//! (`stored.rs`) has fewer digits and moves only with the answers.

use crate::solver::Solved;

/// One check.
#[derive(Debug, Clone)]
pub struct Row {
    pub case: String,
    /// Wanted interval; empty where there is none.
    pub wanted: String,
    /// Unknowns of the last mesh; empty where there are several.
    pub n_unknowns: String,
    /// Our interval or value as found.
    pub ours: String,
    /// Middle of the interval, or the value; `None` where the row is not a number against a number.
    pub middle: Option<f64>,
    /// Relative scale below which a change of `middle` means nothing.
    pub scale: f64,
    /// Our value at the digits of that scale.
    pub short: String,
    pub reference: String,
    /// Middle against reference, or what else is judged, as found.
    pub deviation: String,
    /// The same for the stored text.
    pub short_deviation: String,
    pub limit: String,
    /// Why that limit.
    pub reason: String,
    pub source: String,
    pub passed: bool,
    /// How much of the limit was used: 1 is the last that passes; 0 where nothing is judged.
    pub used: f64,
}

/// Largest interval over true error that passes. The equilibrated flux costs about 2 asymptotically.
pub const EFFICIENCY_MAX: f64 = 3.5;

/// Where a reference comes from and how its number is scaled into the row's unit.
#[derive(Debug, Clone, Copy)]
pub struct Exact<'a> {
    /// Exact coenergy [J].
    pub coenergy: f64,
    /// Row value = `scale` × coenergy.
    pub scale: f64,
    pub unit: &'a str,
    /// Relative error of the reference itself; the interval may miss it by that, and the ratio is judged only for
    /// intervals at least a hundred times as wide.
    pub error: f64,
    pub source: &'a str,
}

/// A guaranteed interval against an exact coenergy: inside, and not needlessly wide.
pub fn guarantee(case: &str, wanted: f64, solved: &Result<Solved, String>, exact: &Exact) -> Row {
    let (ratio_max, limit, reason) = limit(wanted, exact.error);
    let ends = solved.as_ref().map(|s| [exact.scale * s.low, exact.scale * s.high]);
    let judged = Judged {
        case,
        wanted: Some(wanted),
        reference: exact.scale * exact.coenergy,
        unit: exact.unit,
        slack: exact.error,
        limit: 0.5 * wanted + exact.error,
        limit_text: limit,
        reason,
        source: exact.source,
    };
    let mut row = enclosure(&judged, ends.map_err(String::clone));
    if let Ok(solved) = solved {
        row.n_unknowns = solved.n_unknowns.to_string();
        row.passed &= solved.reached;
        if ratio_max.is_finite() {
            let ratio = solved.efficiency(exact.coenergy);
            row.deviation.push_str(&format!(", ratio {ratio:.1}"));
            row.short_deviation.clone_from(&row.deviation);
            row.passed &= (1.0..=ratio_max).contains(&ratio);
            row.used = row.used.max(ratio / ratio_max);
        }
    }
    row
}

/// Largest ratio, the limit in words and its reason.
fn limit(wanted: f64, reference_error: f64) -> (f64, String, String) {
    if wanted < 99.0 * reference_error {
        let reason = "the interval is a theorem, so the exact value lies inside; the reference is not sharp enough to judge the ratio";
        return (f64::INFINITY, format!("inside by {reference_error:.0e}"), reason.to_owned());
    }
    let reason = "the interval is a theorem, so the exact value lies inside; width over true error of the field is 2 on a fine mesh, 2.9 was the most measured on a first one";
    (EFFICIENCY_MAX, format!("inside, ratio <= {EFFICIENCY_MAX}"), reason.to_owned())
}

/// Everything about a row but our answer.
#[derive(Debug, Clone)]
pub struct Judged<'a> {
    pub case: &'a str,
    /// Interval asked of the solver.
    pub wanted: Option<f64>,
    pub reference: f64,
    pub unit: &'a str,
    /// By how much (relative) the ends may miss the reference.
    pub slack: f64,
    /// Largest relative deviation of the middle (of the value).
    pub limit: f64,
    pub limit_text: String,
    pub reason: String,
    pub source: &'a str,
}

/// An interval that must hold the reference up to the slack, with its middle within the limit.
pub fn enclosure(judged: &Judged, ends: Result<[f64; 2], String>) -> Row {
    let mut row = value(judged, ends.clone().map(|[low, high]| 0.5 * (low + high)));
    if let Ok([low, high]) = ends {
        let slack = judged.slack * judged.reference.abs();
        row.ours = format!("{} … {}", significant(low, 7), significant(high, 7));
        row.passed &= low - slack <= judged.reference && judged.reference <= high + slack;
        let half = 0.5 * (high - low) + slack;
        row.used = row.used.max((0.5 * (low + high) - judged.reference).abs() / half);
    }
    row
}

/// A value whose relative deviation must stay within the limit.
pub fn value(judged: &Judged, ours: Result<f64, String>) -> Row {
    let mut row = Row {
        case: judged.case.to_owned(),
        wanted: judged.wanted.map(percent).unwrap_or_default(),
        n_unknowns: String::new(),
        ours: String::new(),
        middle: None,
        scale: judged.limit,
        short: String::new(),
        reference: with_unit(&significant(judged.reference, 8), judged.unit),
        deviation: String::new(),
        short_deviation: String::new(),
        limit: judged.limit_text.clone(),
        reason: judged.reason.clone(),
        source: judged.source.to_owned(),
        passed: false,
        used: f64::INFINITY,
    };
    match ours {
        Err(message) => row.ours = format!("FAILED: {message}"),
        Ok(ours) => {
            let deviation = ours / judged.reference - 1.0;
            row.ours = significant(ours, 7);
            row.middle = Some(ours);
            row.short = significant(ours, digits_of(judged.limit));
            row.deviation = format!("{deviation:+.0e}");
            row.used = deviation.abs() / judged.limit;
            row.passed = row.used <= 1.0;
            row.short_deviation.clone_from(&row.deviation);
        }
    }
    row
}

/// Significant digits that end one place below the relative `scale`, at most 8.
pub fn digits_of(scale: f64) -> i32 {
    (1 + (-scale.log10()).ceil() as i32).clamp(1, 8)
}

/// A number with so many significant digits, without an exponent unless it is very small.
pub fn significant(value: f64, digits: i32) -> String {
    let rounded: f64 =
        format!("{value:.*e}", (digits - 1).max(0) as usize).parse().unwrap_or(value);
    let before = if rounded == 0.0 { 1 } else { rounded.abs().log10().floor() as i32 + 1 };
    if before < -2 {
        return format!("{rounded:.*e}", (digits - 1).max(0) as usize);
    }
    format!("{rounded:.*}", (digits - before).max(0) as usize)
}

/// Number and unit, without a blank where there is none.
fn with_unit(number: &str, unit: &str) -> String {
    format!("{number} {unit}").trim_end().to_owned()
}

/// Text of a relative width.
pub fn percent(width: f64) -> String {
    format!("{} %", (width * 1e6).round() / 1e4)
}

/// The table as found, with what is left out and how many rows there are.
pub fn printed(rows: &[Row], left_out: &[[&str; 2]]) -> String {
    let head = ["case", "wanted", "unknowns", "ours", "reference", "deviation", "limit"];
    let cells = |row: &Row| {
        let Row { case, wanted, n_unknowns, ours, reference, deviation, limit, .. } = row;
        [case, wanted, n_unknowns, ours, reference, deviation, limit].map(String::clone)
    };
    let worst = rows.iter().max_by(|a, b| a.used.total_cmp(&b.used));
    let worst = worst.map_or(String::new(), |row| {
        format!(
            "\n{} rows; most of its limit used by \"{}\": {:.2}\n",
            rows.len(),
            row.case,
            row.used
        )
    });
    laid_out(rows, head, cells) + &listed_reasons(left_out) + &worst
}

/// Lines with aligned columns, then the notes.
pub fn laid_out<const N: usize>(
    rows: &[Row],
    head: [&str; N],
    cells: impl Fn(&Row) -> [String; N],
) -> String {
    let (mut reasons, mut sources) = (Vec::new(), Vec::new());
    let mut lines: Vec<Vec<String>> =
        vec![head.into_iter().chain(["why", "source", ""]).map(str::to_owned).collect()];
    for row in rows {
        let mut line: Vec<String> = cells(row).into();
        line.push(format!("({})", number_of(&row.reason, &mut reasons)));
        line.push(format!("[{}]", number_of(&row.source, &mut sources)));
        line.push(if row.passed { String::new() } else { "FAILED".to_owned() });
        lines.push(line);
    }
    aligned(&lines)
        + &listed("Why that limit", '(', ')', &reasons)
        + &listed("Sources", '[', ']', &sources)
}

/// Number of a note, counted from 1 in the order of first use.
fn number_of(text: &str, notes: &mut Vec<String>) -> usize {
    let found = notes.iter().position(|note| note == text);
    found.unwrap_or_else(|| {
        notes.push(text.to_owned());
        notes.len() - 1
    }) + 1
}

/// Cells padded to the widest of their column.
fn aligned(lines: &[Vec<String>]) -> String {
    let n_columns = lines.first().map_or(0, Vec::len);
    let width = |i: usize| lines.iter().map(|line| line[i].chars().count()).max().unwrap_or(0);
    let widths: Vec<usize> = (0..n_columns).map(width).collect();
    let mut text = String::new();
    for line in lines {
        let padded =
            |i: usize| format!("{}{}", line[i], " ".repeat(widths[i] - line[i].chars().count()));
        let cells: Vec<String> = (0..n_columns).map(padded).collect();
        text.push_str(cells.join(" | ").trim_end_matches([' ', '|']));
        text.push('\n');
    }
    text
}

/// A numbered list under a heading.
fn listed(heading: &str, open: char, close: char, notes: &[String]) -> String {
    let lines: Vec<String> =
        notes.iter().enumerate().map(|(i, n)| format!("{open}{}{close} {n}\n", i + 1)).collect();
    format!("\n{heading}\n{}", lines.concat())
}

/// What the table leaves out, and why.
pub fn listed_reasons(left_out: &[[&str; 2]]) -> String {
    let lines = left_out.iter().map(|[what, why]| format!("{what}: {why}\n"));
    format!("\nLeft out\n{}", lines.collect::<String>())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn digits_end_below_the_scale() {
        assert_eq!(significant(700.6158, digits_of(5e-4)), "700.62");
        assert_eq!(significant(0.999_98, digits_of(5e-3)), "1.000");
        assert_eq!(significant(1.2566e-6, digits_of(1e-3)), "1.257e-6");
    }
}

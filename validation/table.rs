//! The table of checks: one line each, reasons and sources as numbered notes below.

use crate::solver::Solved;

/// One check.
#[derive(Debug, Clone)]
pub struct Row {
    pub case: String,
    /// Wanted interval, or what was asked.
    pub wanted: String,
    /// Unknowns of the last mesh.
    pub n_unknowns: String,
    /// Our interval or value.
    pub ours: String,
    pub reference: String,
    /// Middle against reference, or what else is judged.
    pub deviation: String,
    pub limit: String,
    /// Why that limit.
    pub reason: String,
    pub source: String,
    pub passed: bool,
}

/// Largest interval over true error that passes. The equilibrated flux costs about 2 asymptotically (design 4.4).
pub const EFFICIENCY_MAX: f64 = 3.5;
/// The same at 1 %, where the mesh is still the first one but for a few rounds.
pub const EFFICIENCY_MAX_COARSE: f64 = 4.0;

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
    let mut row = Row {
        case: case.to_owned(),
        wanted: percent(wanted),
        n_unknowns: String::new(),
        ours: String::new(),
        reference: format!("{} {}", significant(exact.scale * exact.coenergy, 8), exact.unit),
        deviation: String::new(),
        limit,
        reason: reason.to_owned(),
        source: exact.source.to_owned(),
        passed: false,
    };
    match solved {
        Err(message) => row.ours = format!("FAILED: {message}"),
        Ok(solved) => {
            let ratio = solved.efficiency(exact.coenergy);
            let slack = exact.error * exact.coenergy;
            let inside =
                solved.low - slack <= exact.coenergy && exact.coenergy <= solved.high + slack;
            let [low, high] =
                [solved.low, solved.high].map(|end| significant(exact.scale * end, 7));
            row.n_unknowns = solved.n_unknowns.to_string();
            row.ours = format!("{low} … {high}");
            row.deviation = format!("{:+.0e}", solved.coenergy() / exact.coenergy - 1.0);
            if ratio_max.is_finite() {
                row.deviation.push_str(&format!(", ratio {ratio:.1}"));
            }
            row.passed = solved.reached
                && inside
                && (ratio_max.is_infinite() || (1.0..=ratio_max).contains(&ratio));
        }
    }
    row
}

/// Largest ratio, the limit in words and its reason.
fn limit(wanted: f64, reference_error: f64) -> (f64, String, &'static str) {
    if wanted < 99.0 * reference_error {
        let reason =
            "the interval is a theorem; the reference is not sharp enough to judge the ratio";
        return (f64::INFINITY, format!("inside by {reference_error:.0e}"), reason);
    }
    if wanted > 5e-3 {
        let reason = "the interval is a theorem; at 1 % the mesh does not yet resolve the corners, so the ratio may be higher";
        return (
            EFFICIENCY_MAX_COARSE,
            format!("inside; ratio 1 to {EFFICIENCY_MAX_COARSE}"),
            reason,
        );
    }
    let reason = "the interval is a theorem; the ratio (width over true error of the field) is about 2 on a fine mesh";
    (EFFICIENCY_MAX, format!("inside; ratio 1 to {EFFICIENCY_MAX}"), reason)
}

/// A number with so many significant digits, without an exponent.
pub fn significant(value: f64, digits: i32) -> String {
    let before = if value == 0.0 { 1 } else { value.abs().log10().floor() as i32 + 1 };
    format!("{value:.*}", (digits - before).max(0) as usize)
}

/// Text of a relative width.
pub fn percent(width: f64) -> String {
    format!("{} %", (width * 1e4).round() / 100.0)
}

/// Lines with aligned columns, then the notes.
pub fn print(rows: &[Row]) -> String {
    let (mut reasons, mut sources) = (Vec::new(), Vec::new());
    let head = [
        "case",
        "wanted",
        "unknowns",
        "ours",
        "reference",
        "deviation",
        "limit",
        "why",
        "source",
        "",
    ]
    .map(str::to_owned);
    let mut lines = vec![head];
    for row in rows {
        let why = format!("({})", number_of(&row.reason, &mut reasons));
        let source = format!("[{}]", number_of(&row.source, &mut sources));
        let verdict = if row.passed { "" } else { "FAILED" };
        let cells = [
            &row.case,
            &row.wanted,
            &row.n_unknowns,
            &row.ours,
            &row.reference,
            &row.deviation,
            &row.limit,
            &why,
            &source,
        ];
        let mut line: Vec<String> = cells.into_iter().cloned().collect();
        line.push(verdict.to_owned());
        lines.push(std::array::from_fn(|i| line[i].clone()));
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
fn aligned<const N: usize>(lines: &[[String; N]]) -> String {
    let width = |i: usize| lines.iter().map(|line| line[i].chars().count()).max().unwrap_or(0);
    let widths: [usize; N] = std::array::from_fn(width);
    let mut text = String::new();
    for line in lines {
        let cells: Vec<String> = (0..N)
            .map(|i| format!("{}{}", line[i], " ".repeat(widths[i] - line[i].chars().count())))
            .collect();
        text.push_str(cells.join("  ").trim_end());
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

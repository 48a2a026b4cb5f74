//! `Saturation` → CSV, JSON with its schema, screen and plot. One list of columns serves CSV and JSON.

mod plot;
#[cfg(test)]
mod tests;

pub use plot::saturate_svg;

use super::csv::field;
use super::json::{RequireEntry, TimingEntry, require_entries, timing_entries};
use super::numbers::{clip, grouped, percent, wrap};
use super::terminal::{
    Look, NAME_WIDTH, WIDTH, heading, notes, opening, push, push_table, requirement_line,
    stage_times,
};
use super::{MORE_UNKNOWNS, StageTimes, too_wide};
use crate::study::saturate::{Row, Saturation};
use crate::units::engineering;
use schemars::JsonSchema;
use schemars::generate::SchemaSettings;
use serde::Serialize;
use std::collections::BTreeMap;
use std::fmt::Write;

/// Header of the column with the 5 % flux density of a part.
fn part_column(name: &str) -> String {
    format!("B 5 % {name} [T]")
}

/// One row with the CSV's column names as keys.
#[derive(Serialize, JsonSchema)]
struct RowEntry {
    #[serde(rename = "current [A]")]
    current: f64,
    #[serde(rename = "flux linkage [Wb]")]
    flux_linkage: f64,
    /// Guaranteed; null where nothing is guaranteed.
    #[serde(rename = "flux linkage low [Wb]")]
    flux_linkage_low: Option<f64>,
    #[serde(rename = "flux linkage high [Wb]")]
    flux_linkage_high: Option<f64>,
    /// Flux linkage over current; the limit in the row of 0 A.
    #[serde(rename = "apparent inductance [H]")]
    apparent: f64,
    /// Slope of the flux linkage.
    #[serde(rename = "incremental inductance [H]")]
    incremental: f64,
    /// Half the apparent inductance times the current squared.
    #[serde(rename = "half L I^2 [J]")]
    half_square: f64,
    #[serde(rename = "coenergy [J]")]
    coenergy: f64,
    /// Guaranteed.
    #[serde(rename = "coenergy low [J]")]
    coenergy_low: f64,
    #[serde(rename = "coenergy high [J]")]
    coenergy_high: f64,
    unknowns: usize,
    #[serde(rename = "Newton steps")]
    newton_steps: usize,
    /// Flux density that 5 % of a part's volume exceed, one key a part: "B 5 % NAME [T]".
    #[serde(flatten)]
    exceeded: BTreeMap<String, f64>,
}

/// Columns of the CSV before those of the parts, in the order of [`cells`].
const COLUMNS: [&str; 12] = [
    "current [A]",
    "flux linkage [Wb]",
    "flux linkage low [Wb]",
    "flux linkage high [Wb]",
    "apparent inductance [H]",
    "incremental inductance [H]",
    "half L I^2 [J]",
    "coenergy [J]",
    "coenergy low [J]",
    "coenergy high [J]",
    "unknowns",
    "Newton steps",
];

fn cells(row: &Row) -> Vec<String> {
    // `{:e}` is the shortest text that reads back as the same f64.
    let number = |value: f64| format!("{value:e}");
    let end = |k: usize| row.flux_linkage_ends.map_or(String::new(), |ends| number(ends[k]));
    let mut cells = vec![
        number(row.current),
        number(row.flux_linkage),
        end(0),
        end(1),
        number(row.apparent),
        number(row.incremental),
        number(row.half_square),
        number(row.coenergy.value),
        number(row.coenergy.low),
        number(row.coenergy.high),
        row.n_unknowns.to_string(),
        row.n_newton_steps.to_string(),
    ];
    cells.extend(row.exceeded.iter().map(|&b| number(b)));
    cells
}

/// `saturate.csv`: one line a row, SI units in the header, an empty cell where nothing is guaranteed.
pub fn saturate_csv(found: &Saturation) -> String {
    let parts = found.parts.iter().map(|name| part_column(name));
    let header: Vec<String> = COLUMNS.iter().map(|c| c.to_string()).chain(parts).collect();
    let header: Vec<String> = header.iter().map(|column| field(column)).collect();
    let mut text = header.join(",") + "\n";
    for row in &found.rows {
        // Writing into a String cannot fail.
        let _ = writeln!(text, "{}", cells(row).join(","));
    }
    text
}

/// What `gapwright saturate` answers; every number in SI units.
#[derive(Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
#[schemars(title = "gapwright saturate")]
struct SaturateFile {
    /// Name and version of the program that wrote the file.
    program: String,
    title: String,
    /// The winding whose current is scaled; all others scale along.
    winding: String,
    /// By rising current, the first at 0 A; the keys are the column names of saturate.csv.
    rows: Vec<RowEntry>,
    /// Where the incremental inductance has fallen by a share of its value at 0 A.
    falls: Vec<FallEntry>,
    require: Vec<RequireEntry>,
    work: WorkEntry,
    notes: Vec<String>,
    /// Seconds of each stage, only with --timings.
    #[serde(skip_serializing_if = "Option::is_none")]
    timings: Option<Vec<TimingEntry>>,
}

#[derive(Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct FallEntry {
    share: f64,
    /// [A]; null where it does not fall so far up to the highest current.
    current: Option<f64>,
}

/// What the table cost.
#[derive(Serialize, JsonSchema)]
#[serde(deny_unknown_fields)]
struct WorkEntry {
    solves: usize,
    newton_steps: usize,
    cg_iterations: usize,
    meshes: usize,
}

impl RowEntry {
    fn new(row: &Row, parts: &[String]) -> RowEntry {
        RowEntry {
            current: row.current,
            flux_linkage: row.flux_linkage,
            flux_linkage_low: row.flux_linkage_ends.map(|e| e[0]),
            flux_linkage_high: row.flux_linkage_ends.map(|e| e[1]),
            apparent: row.apparent,
            incremental: row.incremental,
            half_square: row.half_square,
            coenergy: row.coenergy.value,
            coenergy_low: row.coenergy.low,
            coenergy_high: row.coenergy.high,
            unknowns: row.n_unknowns,
            newton_steps: row.n_newton_steps,
            exceeded: parts.iter().map(|p| part_column(p)).zip(row.exceeded.clone()).collect(),
        }
    }
}

/// The text of `saturate.json`: equal tables give equal bytes; stage times only when the caller measured some.
pub fn saturate_json(found: &Saturation, times: Option<&StageTimes>) -> String {
    let file = SaturateFile {
        program: concat!("gapwright ", env!("CARGO_PKG_VERSION")).to_string(),
        title: found.title.clone(),
        winding: found.winding.clone(),
        rows: found.rows.iter().map(|row| RowEntry::new(row, &found.parts)).collect(),
        falls: found
            .falls
            .iter()
            .map(|f| FallEntry { share: f.share, current: f.current })
            .collect(),
        require: require_entries(&found.requirements),
        work: WorkEntry {
            solves: found.work.n_solves,
            newton_steps: found.work.n_newton_steps,
            cg_iterations: found.work.n_cg_iterations,
            meshes: found.work.n_meshes,
        },
        notes: shortfall(found).into_iter().chain(found.notes.iter().cloned()).collect(),
        timings: times.map(timing_entries),
    };
    // The shape has text keys and finite depth, so serialising cannot fail; an empty object would break the schema test.
    let mut text = serde_json::to_string_pretty(&file).unwrap_or_else(|_| "{}".to_string());
    text.push('\n');
    text
}

/// The JSON Schema of `saturate.json` (draft 2020-12).
pub fn saturate_schema() -> serde_json::Value {
    SchemaSettings::draft2020_12()
        .for_serialize()
        .into_generator()
        .into_root_schema_for::<SaturateFile>()
        .to_value()
}

/// The sentence that stands first when some row is wider than wanted.
fn shortfall(found: &Saturation) -> Option<String> {
    if found.reached {
        return None;
    }
    let width = |row: &Row| (row.coenergy.high - row.coenergy.low) / row.coenergy.value;
    let rows = found.rows.iter().filter(|row| 0.0 < row.current);
    let widest = rows.max_by(|a, b| width(a).total_cmp(&width(b)))?;
    let what = format!("coenergy at {}", engineering(widest.current, "A", 3));
    Some(too_wide(&what, width(widest), found.wanted, MORE_UNKNOWNS))
}

/// The whole screen of `saturate`, ending in a line break.
pub fn saturate_screen(found: &Saturation, look: &Look) -> String {
    let mut text = opening(&found.title, shortfall(found), look);
    falls(&mut text, found);
    for requirement in &found.requirements {
        requirement_line(&mut text, requirement, look);
    }
    let time = look.seconds.map_or(String::new(), |s| format!(", {s:.2} s"));
    let n_unknowns = found.rows.iter().map(|r| r.n_unknowns).max().unwrap_or(0);
    let work = format!(
        "  {} rows, {} unknowns, {} solves, {} Newton steps{time}",
        found.rows.len(),
        grouped(n_unknowns),
        found.work.n_solves,
        found.work.n_newton_steps
    );
    push(&mut text, &work);
    table(&mut text, found, look);
    notes(&mut text, &found.notes, look);
    if let Some(times) = look.times {
        stage_times(&mut text, times, look);
    }
    text
}

fn falls(text: &mut String, found: &Saturation) {
    let Some(first) = found.rows.first() else { return };
    let name = clip(&found.winding, NAME_WIDTH);
    let start = engineering(first.incremental, "H", 4).replace(' ', "\u{a0}");
    let sentence =
        format!("The incremental inductance of {name} is {start} at I → 0; it has fallen");
    for line in wrap(&sentence, WIDTH - 2) {
        push(text, &format!("  {line}"));
    }
    for fall in &found.falls {
        let highest = found.rows.last().map_or(0.0, |r| r.current);
        let place = match fall.current {
            Some(current) => format!("at {}", engineering(current, "A", 4)),
            None => format!("not up to {}", engineering(highest, "A", 3)),
        };
        push(text, &format!("    by {:>5}  {place}", percent(fall.share, 2)));
    }
}

fn table(text: &mut String, found: &Saturation, look: &Look) {
    heading(text, "Against current; B is the largest of the parts' 5 % flux densities", look);
    let row = |row: &Row| {
        let b = row.exceeded.iter().copied().fold(0.0, f64::max);
        vec![
            engineering(row.current, "A", 4),
            engineering(row.flux_linkage, "Wb", 4),
            engineering(row.apparent, "H", 4),
            engineering(row.incremental, "H", 4),
            engineering(row.half_square, "J", 4),
            engineering(row.coenergy.value, "J", 4),
            engineering(b, "T", 3),
        ]
    };
    let rows: Vec<Vec<String>> = found.rows.iter().map(row).collect();
    let header = ["current", "λ", "apparent", "incremental", "½LI²", "coenergy", "B"];
    push_table(text, &header, &rows);
}

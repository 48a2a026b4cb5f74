//! Rows of what the trade takes for granted, and of random air coils.

use crate::builders;
use crate::campaigns::{self, Summary};
use crate::solver::solve;
use crate::table::{EFFICIENCY_MAX, Row, percent};
use gapwright::model::Model;

const SOURCE: &str = "common practice, no source";
const COIL_SOURCE: &str = "Maxwell's loop formula (Treatise, art. 701) integrated over both sections, validation/coils.rs";

/// What the trade takes for granted.
pub fn rows() -> Vec<Row> {
    let inductance = |model: &Model| solve(model, 1e-3).map(|solved| 2.0 * solved.coenergy());
    let of = |turns: f64, current: f64| {
        inductance(&builders::r5(1500.0, turns, current)).unwrap_or(f64::NAN)
    };
    let factor = of(60.0, 1.0) / 3600.0;
    let square = of(120.0, 1.0) / 14400.0 / factor - 1.0;
    let current = of(60.0, 3.0) / 9.0 / 3600.0 / factor - 1.0;
    let without = inductance(&builders::r5(1.0, 60.0, 1.0)).unwrap_or(f64::NAN);

    let twice = |currents| inductance(&builders::r9(currents)).unwrap_or(f64::NAN);
    let (l11, l22) = (twice([1.0, 0.0]), twice([0.0, 1.0]));
    let mutual = 0.5 * (twice([1.0, 1.0]) - l11 - l22);
    let per_turn = (mutual / 15.0) / (l11 / 30.0) - 1.0;
    let leakage = twice([1.0, -2.0]) / l11.min(4.0 * l22);

    let same = "the problem is the same up to a factor: rounding only";
    let flux = "one post's flux; what differs is leakage, 0.7 % of L here, in part";
    let iron = "less than one by far: the core carries the flux";
    vec![
        fact("R5: L/N² at 120 turns over 60, less 1", square, 1e-9, same),
        fact("R5: A_L at 3 A over 1 A (constant law), less 1", current, 1e-9, same),
        fact("R9: volts per turn, open secondary over primary, less 1", per_turn, 0.01, flux),
        fact(
            "R5: ampere-turns for a flux linkage, iron over none",
            without / of(60.0, 1.0),
            0.5,
            iron,
        ),
        fact(
            "R9: leakage over the smaller self inductance",
            leakage,
            0.1,
            "less than one by far: windings on one post",
        ),
    ]
}

/// A fact whose number must stay below `limit` in size.
fn fact(case: &str, deviation: f64, limit: f64, reason: &str) -> Row {
    let passed = deviation.abs() < limit;
    let found = format!("{deviation:.1e}");
    // Below this, rounding: the digits say nothing.
    let tells = 1e-6 < limit;
    Row {
        case: case.to_owned(),
        wanted: percent(1e-3),
        n_unknowns: String::new(),
        ours: found.clone(),
        middle: tells.then_some(deviation),
        // The numbers are small differences of intervals.
        scale: 0.2,
        short: if tells || !passed { found.clone() } else { format!("< {limit:.0e}") },
        reference: String::new(),
        short_deviation: String::new(),
        deviation: String::new(),
        limit: format!("{limit:.0e}"),
        reason: reason.to_owned(),
        source: SOURCE.to_owned(),
        passed,
        used: deviation.abs() / limit,
    }
}

/// 200 random air coils at 1 % and 50 at 0.05 %.
pub fn random_coils() -> Vec<Row> {
    let campaign = |n_cases, seed, interval| {
        let summary = campaigns::run(n_cases, seed, |g| campaigns::one_air_coil(g, interval));
        random_row(&summary, seed, interval)
    };
    vec![campaign(200, 1, 1e-2), campaign(50, 1001, 5e-4)]
}

/// One campaign as a row.
fn random_row(summary: &Summary, seed: u64, interval: f64) -> Row {
    let [least, median, largest] = summary.efficiency.unwrap_or([f64::NAN; 3]);
    let inside = format!("{} inside", summary.n_cases - summary.failures.len());
    Row {
        case: format!("{} random air coils, seeds from {seed}", summary.n_cases),
        wanted: percent(interval),
        n_unknowns: String::new(),
        ours: inside.clone(),
        middle: None,
        scale: interval,
        short: inside,
        reference: "all inside".to_owned(),
        deviation: format!("ratio {least:.1} / {median:.1} / {largest:.1}"),
        short_deviation: String::new(),
        limit: format!("all inside, ratio <= {EFFICIENCY_MAX}"),
        reason: "the interval is a theorem: one miss is a defect (ratio: least / median / largest)"
            .to_owned(),
        source: COIL_SOURCE.to_owned(),
        passed: summary.failures.is_empty() && largest <= EFFICIENCY_MAX,
        used: largest / EFFICIENCY_MAX,
    }
}

//! Rows of coils in air: published self inductances, thin windings, pairs, loops.

use super::{centred, small};
use crate::builders;
use crate::coils::{Coil, mutual_inductance, self_inductance};
use crate::elliptic::loops;
use crate::references::{MU0_OF_CHECKS, Published, published};
use crate::solver::{solve, solve_wholly};
use crate::table::{Exact, Judged, Row, enclosure, guarantee};
use gapwright::model::Model;
use gapwright::units::MU0;
use rayon::prelude::*;
use std::f64::consts::PI;

/// Every row of this file.
pub fn rows() -> Vec<Row> {
    [self_inductances(), opposed(), touching(), sheets(), pairs_of_loops()].concat()
}

/// Published coils of rectangular section over µ0 N².
fn self_inductances() -> Vec<Row> {
    let thick: Vec<_> = published("SELF-").into_iter().filter(|row| row.input("h") > 0.0).collect();
    let row = |published: &Published| {
        let coil = centred([published.input("r1"), published.input("r2")], published.input("h"));
        let name = published.id.replace("SELF-", "coil ");
        of_published(published, &name, published.value(""), &builders::air_coil(&coil))
    };
    thick.par_iter().map(row).collect()
}

/// Open-air leakage of two windings of opposed equal ampere-turns.
fn opposed() -> Vec<Row> {
    let row = |published: &Published| {
        let edge = |name: &str| published.input(name);
        let inner = centred([edge("r1"), edge("r2")], edge("h"));
        let outer = centred([edge("r3"), edge("r4")], edge("h"));
        let model = builders::air_coils(&[(inner, 1.0, 1.0), (outer, 1.0, -1.0)]);
        let name = published.id.replace("LEAK-", "opposed coils ");
        of_published(published, &name, published.value("open_air_exact"), &model)
    };
    published("LEAK-").iter().map(row).collect()
}

/// Two coils that touch, with the published mutual inductance.
fn touching() -> Vec<Row> {
    let row = |published: &Published| {
        let coil = |v: Vec<f64>| Coil { radii: [v[0], v[1]], heights: [v[2], v[3]] };
        let pair = [coil(published.input_list("c1")), coil(published.input_list("c2"))];
        let both = self_inductance(&pair[0])
            + self_inductance(&pair[1])
            + 2.0 * published.value("M_over_mu0N1N2");
        let model = builders::air_coils(&pair.map(|coil| (coil, 1.0, 1.0)));
        of_published(published, "touching coils, both turns", both, &model)
    };
    published("COILS-").iter().map(row).collect()
}

/// One row at 0.1 % for a published figure 2W'/µ0.
fn of_published(published: &Published, name: &str, figure: f64, model: &Model) -> Row {
    let (scale, source) = (2.0 / MU0, published.cited());
    let exact = Exact { coenergy: figure / scale, scale, unit: "m", error: 1e-9, source: &source };
    guarantee(name, 1e-3, &solve(model, 1e-3), &exact)
}

/// Thickness of the thicker wall of a thin winding, over its radius.
const SHEET_WALL: f64 = 0.01;

/// Nagaoka's coefficient from windings of wall t and t/2, carried to t = 0 along a straight line.
fn sheets() -> Vec<Row> {
    published("NAGAOKA-").par_iter().map(sheet).collect()
}

fn sheet(published: &Published) -> Row {
    let (wanted, reference) = (5e-4, published.value(""));
    let length = 2.0 / published.input("two_a_over_l");
    let of_wall = |wall: f64| centred([1.0 - 0.5 * wall, 1.0 + 0.5 * wall], length);
    let walls = [SHEET_WALL, 0.5 * SHEET_WALL].map(of_wall);
    // K = L l/(µ0 N² π a²).
    let factor = length / PI;
    // What the straight line leaves, by quadrature of the same two coils.
    let line = 2.0 * self_inductance(&walls[1]) - self_inductance(&walls[0]);
    let bend = factor * line / reference - 1.0;
    let [thick, thin] = walls.map(|coil| solve_wholly(&builders::air_coil(&coil), wanted));
    let ends = thick.and_then(|thick| {
        let k = |coenergy: f64| factor * 2.0 / MU0 * coenergy;
        thin.map(|thin| [k(2.0 * thin.low - thick.high), k(2.0 * thin.high - thick.low)])
    });
    let slack = 1e-4;
    let ends = small(bend, slack, "the line misses the sheet").and(ends);
    let judged = Judged {
        case: &published.id.replace("NAGAOKA-", "thin solenoid, 2a/l = "),
        wanted: Some(wanted),
        reference,
        unit: "",
        slack,
        limit: 1.5 * wanted + slack,
        limit_text: "inside by 1e-4".to_owned(),
        reason: "windings of wall 0.01 and 0.005 radii carried to 0 along a straight line: three intervals wide; the line misses the sheet by less than 1e-4 (quadrature of both)".to_owned(),
        source: &published.cited(),
    };
    enclosure(&judged, ends)
}

/// Maxwell's loops as coils of a small square section: M = (W'(aiding) − W'(opposed))/(2 I²), I = 1 A.
fn pairs_of_loops() -> Vec<Row> {
    published("LOOPS-").par_iter().map(pair_of_loops).collect()
}

fn pair_of_loops(published: &Published) -> Row {
    let (wanted, reference) = (1e-4, published.value("M") / MU0_OF_CHECKS);
    let (a, b, z) = (published.input("a"), published.input("b"), published.input("z"));
    let side = 0.06 * (a - b).hypot(z).min(a).min(b);
    let square = |r: f64| centred([r - 0.5 * side, r + 0.5 * side], side);
    let (first, second) = (square(a), square(b).raised(z));
    let section = mutual_inductance(&first, &second) / loops(a, b, z) - 1.0;
    let both = |current: f64| {
        solve_wholly(&builders::air_coils(&[(first, 1.0, 1.0), (second, 1.0, current)]), wanted)
    };
    let ends = both(1.0).and_then(|aiding| {
        let m = |coenergy: f64| 0.5 * coenergy / MU0;
        both(-1.0).map(|opposed| [m(aiding.low - opposed.high), m(aiding.high - opposed.low)])
    });
    let slack = 5e-4;
    let ends = small(section, slack, "the section counts").and(ends);
    let judged = Judged {
        case: &format!("M of loops a {a}, b {b}, z {z}"),
        wanted: Some(wanted),
        reference,
        unit: "m",
        slack,
        limit: 4e-3,
        limit_text: "inside by 5e-4, middle 4e-3".to_owned(),
        reason: "two guaranteed coenergies subtracted: the self inductances are up to twenty times M; a square section of 0.06 of the distance or radius changes M by less than 5e-4 (quadrature)".to_owned(),
        source: &published.cited(),
    };
    enclosure(&judged, ends)
}

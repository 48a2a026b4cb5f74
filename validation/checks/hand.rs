//! Rows of the hand sum: how wrong each rule of thumb is, and the arithmetic that others publish as well. No field here.

use crate::references::{Published, published};
use crate::table::{Judged, Row, significant, value};
use gapwright::model::{Core, Form, GapCorrection, MaterialId, PotWall};
use gapwright::results::hand::{GapPole, corner_permeance, effective, factor};

const RULES: [(&str, GapCorrection, &str); 5] = [
    ("none", GapCorrection::None, "common practice, no source"),
    (
        "one gap length",
        GapCorrection::OneGapLength,
        "A. E. Fitzgerald, C. Kingsley, Electric Machinery",
    ),
    (
        "log",
        GapCorrection::Log,
        "W. T. McLyman, Transformer and Inductor Design Handbook; formula from memory",
    ),
    (
        "corner",
        GapCorrection::Corner,
        "A. Balakrishnan, W. T. Joines, T. G. Wilson, IEEE Trans. Power Electron. 12 (1997) 654; J. Muehlethaler, J. W. Kolar, A. Ecklebe, ECCE Asia 2011 (the limit, from memory)",
    ),
    (
        "roters",
        GapCorrection::Roters,
        "H. C. Roters, Electromagnetic Devices (1941), ch. V; coefficients from memory",
    ),
];

/// Every row of this file.
pub fn rows() -> Vec<Row> {
    let rules = published("HANDBOOK-").iter().flat_map(rules_of_thumb).collect::<Vec<Row>>();
    let corners = published("GAP2D-CORNER").iter().map(corner).collect();
    [rules, corners, effective_parameters()].concat()
}

/// The gap factor of every rule against the exact ratio L/L_bare of an ideal pot core; not judged.
fn rules_of_thumb(published: &Published) -> Vec<Row> {
    let input = |name: &str| published.input(name);
    let (a, half_gap, h) = (input("a"), input("half_gap"), input("h"));
    let pole = GapPole {
        inner_radius: 0.0,
        outer_radius: a,
        length: 2.0 * half_gap,
        window_height: 2.0 * (half_gap + h),
        inner_heights: [0.0; 2],
        outer_heights: [h; 2],
    };
    let exact = published.value("exact_ratio");
    let row = |(name, correction, source): &(&str, GapCorrection, &str)| {
        let ours = factor(*correction, &pole);
        let off = format!("{:+.1} %", 100.0 * (ours / exact - 1.0));
        let shape = published.id.replace("HANDBOOK-", "");
        Row {
            case: format!("rule \"{name}\", ideal pot {shape}"),
            wanted: String::new(),
            n_unknowns: String::new(),
            ours: significant(ours, 5),
            middle: Some(ours),
            // Arithmetic: the last digit shown.
            scale: 1e-5,
            short: significant(ours, 5),
            reference: significant(exact, 8),
            deviation: off.clone(),
            short_deviation: off,
            limit: "none".to_owned(),
            reason: "not judged: the row tells how far a rule of thumb is off".to_owned(),
            source: format!("rule: {source}; reference: mode matching, validation/modes.rs"),
            passed: true,
            used: 0.0,
        }
    };
    RULES.iter().map(row).collect()
}

/// A row of plain arithmetic.
fn arithmetic(case: &str, published: &Published, reference: f64, unit: &str, ours: f64) -> Row {
    let judged = Judged {
        case,
        wanted: None,
        reference,
        unit,
        slack: 0.0,
        limit: 1e-9,
        limit_text: "1e-9".to_owned(),
        reason: "the same formula evaluated twice: rounding, and the digits of the reference"
            .to_owned(),
        source: &published.cited(),
    };
    value(&judged, Ok(ours))
}

/// Permeance of a corner over a plane.
fn corner(published: &Published) -> Row {
    let h = published.input("h_over_l");
    let case = format!("corner over a plane, h/l {h}");
    arithmetic(&case, published, published.value(""), "", corner_permeance(h))
}

/// Effective parameters of a pot core without slots.
fn effective_parameters() -> Vec<Row> {
    let published = &published("POT-ARITH")[0];
    let form = Form::Pot {
        wall: PotWall::OuterDiameter(23e-3),
        wall_inner_diameter: 20e-3,
        post_diameter: 10e-3,
        hole_diameter: 0.0,
        height: 20e-3,
        window_height: 14e-3,
    };
    let core = Core { material: MaterialId(0), form, corner_radius: 0.0, joint: 0.0 };
    let ours = effective(&core.dimensions(&[])).unwrap();
    let row = |(name, key, unit, ours): (&str, &str, &str, f64)| {
        arithmetic(&format!("slotless pot: {name}"), published, published.value(key), unit, ours)
    };
    [
        ("core constant C1", "C1", "1/mm", 1e-3 * ours.c1),
        ("effective length", "le", "mm", 1e3 * ours.length),
        ("effective area", "Ae", "mm²", 1e6 * ours.area),
        ("effective volume", "Ve", "mm³", 1e9 * ours.volume),
    ]
    .map(row)
    .into()
}

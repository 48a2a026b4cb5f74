//! Rows of closed cores with ideal walls: gapped pots, posts, cells, leakage, endless solenoids.

use super::centred;
use crate::builders;
use crate::cell::Cell;
use crate::coils::Coil;
use crate::ideal::{self, Post, SMALL};
use crate::modes::GappedPot;
use crate::references::{Published, published};
use crate::solver::solve_wholly;
use crate::table::{Judged, Row, enclosure, value};
use gapwright::model::{BhTable, Interpolation, Law, Model};
use gapwright::units::MU0;
use rayon::prelude::*;
use std::f64::consts::PI;

/// Every row of this file.
pub fn rows() -> Vec<Row> {
    let all = |prefix: &str, row: fn(&Published) -> Row| -> Vec<Row> {
        published(prefix).par_iter().map(row).collect()
    };
    [
        all("POTCORE-", pot),
        all("POST-", post),
        all("GAP2D-WINDOW-h3", edge),
        all("GAP2D-WINDOW-h1-", edge),
        all("CELL-", cell),
        all("LEAK-", leakage),
        all("PERIODIC-", solenoid),
        all("NL-SOLENOID-", saturated_solenoid),
    ]
    .concat()
}

/// Interval asked of each of the two solutions.
const WANTED: f64 = 2e-4;
/// ε where windings of opposed ampere-turns share a closed core. Measured at 1e-6: the high end jumps about by the size
/// of the value from round to round and falls in only after tens of rounds; at 1e-5 it is a few per cent at most, at 1e-4 as good as elsewhere.
const OPPOSED: f64 = 1e-4;

/// A coenergy carried to ideal walls and read as a figure: figure = scale × coenergy − offset.
struct Carried<'a> {
    case: String,
    /// The smaller ε of the walls.
    epsilon: f64,
    published: &'a Published,
    reference: f64,
    unit: &'a str,
    scale: f64,
    offset: f64,
}

impl Carried<'_> {
    /// Ends of the figure at ε = 0.
    fn ends(&self, model: impl Fn(f64) -> Model) -> Result<[f64; 2], String> {
        let [hard, soft] =
            [self.epsilon, 2.0 * self.epsilon].map(|epsilon| solve_wholly(&model(epsilon), WANTED));
        let (hard, soft) = (hard?, soft?);
        let figure = |coenergy: f64| self.scale * coenergy - self.offset;
        Ok([figure(2.0 * hard.low - soft.high), figure(2.0 * hard.high - soft.low)])
    }

    fn row(&self, model: impl Fn(f64) -> Model) -> Row {
        let ends = self.ends(model);
        // Of the figure, not of the coenergy that it is read from.
        let limit = 1.5 * WANTED * (self.reference + self.offset) / self.reference + 1e-6;
        let judged = Judged {
            case: &self.case,
            wanted: Some(WANTED),
            reference: self.reference,
            unit: self.unit,
            slack: 1e-6,
            limit,
            limit_text: "inside by 1e-6".to_owned(),
            reason: format!(
                "walls of permeability {:.0e} (field-normal) and {:.0e} (flux-tight), and half as good, carried to ideal ones along a straight line: three intervals wide; what bends is below 1e-6",
                1.0 / self.epsilon,
                self.epsilon
            ),
            source: &self.published.cited(),
        };
        enclosure(&judged, ends)
    }
}

/// A gapped pot core of ideal iron.
fn pot(published: &Published) -> Row {
    let half_gap = 1e-3 * published.input("half_gap");
    let (post, wall) = (1e-3 * published.input("a"), 1e-3 * published.input("b"));
    let half_window = half_gap + 1e-3 * published.input("h");
    let pot = GappedPot { post, wall, half_gap, half_window, winding: [post, wall] };
    let reference = published.value("");
    let case = published.id.replace("POTCORE-", "ideal gapped pot ");
    let scale = 2e3 / MU0;
    Carried { case, epsilon: SMALL, published, reference, unit: "mm", scale, offset: 0.0 }
        .row(|epsilon| builders::gapped_pot(&pot, 1.0 / epsilon))
}

/// Permeance P/µ0 of a round post over a plane.
fn post(published: &Published) -> Row {
    let input = |name: &str| published.input(name);
    let (a, h, b) = (input("a_over_l"), input("h_over_l"), input("b_over_l"));
    let post = Post { radius: a, gap: 1.0, side: h, width: b };
    let case = format!("post over a plane, a/l {a}, h/l {h}, b/l {b}");
    permeance(&post, case, published, published.value("P_over_mu0l"))
        .row(|epsilon| ideal::post(&post, epsilon))
}

/// L/µ0 = P/2 of both halves in series and the driving coil's own field between its plates.
fn permeance<'a>(
    post: &Post,
    case: String,
    published: &'a Published,
    reference: f64,
) -> Carried<'a> {
    let ([inner, outer], height) = ideal::post_coil(post);
    let width = outer - inner;
    let own = 2.0 * PI / height * width * (inner / 3.0 + width / 12.0);
    let (scale, offset) = (4.0 / MU0, 2.0 * own);
    Carried { case, epsilon: SMALL, published, reference, unit: "", scale, offset }
}

/// Largest deviation of the fringing of an endless edge.
const EDGE_MAX: f64 = 1e-2;

/// Fringing of an endless edge from posts of three radii: F(a) = F + c₁/a + c₂/a² at a/l = 5, 10, 20.
fn edge(published: &Published) -> Row {
    let (side, width) = (published.input("h_over_l"), published.input("b_over_l"));
    let fringing = |a: f64| {
        let post = Post { radius: a, gap: 1.0, side, width };
        let carried = permeance(&post, String::new(), published, 0.0);
        let ends = carried.ends(|epsilon| ideal::post(&post, epsilon));
        // P/µ0l = π a² + 2π a F.
        ends.map(|[low, high]| 0.5 * (low + high) / (2.0 * PI * a) - 0.5 * a)
    };
    let ours = fringing(5.0).and_then(|near| {
        let (middle, far) = (fringing(10.0)?, fringing(20.0)?);
        Ok((near - 6.0 * middle + 8.0 * far) / 3.0)
    });
    let judged = Judged {
        case: &format!("edge over a plane, h/l {side}, b/l {width}, from round posts"),
        wanted: Some(WANTED),
        reference: published.value(""),
        unit: "",
        slack: 0.0,
        limit: EDGE_MAX,
        limit_text: format!("{EDGE_MAX:.0e}"),
        reason: "posts of 5, 10 and 20 gap lengths carried to an endless radius: what bends is below 3e-4 (mode matching), but the fringing is 13 % of the permeance at 20 and counts 8/3 times, so that the interval counts twenty times".to_owned(),
        source: &published.cited(),
    };
    value(&judged, ours)
}

/// One period of a row of coils on an endless rod in a flux-tight tube.
fn cell(published: &Published) -> Row {
    let input = |name: &str| published.input(name);
    let cell = Cell {
        rod: input("a"),
        permeability: input("mu"),
        radii: [input("r1"), input("r2")],
        height: input("h"),
        period: input("H"),
        tube: input("Rw"),
    };
    let case = published.id.replace("CELL-", "closed cell ");
    let reference = published.value("");
    Carried { case, epsilon: SMALL, published, reference, unit: "m", scale: 2.0 / MU0, offset: 0.0 }
        .row(|epsilon| ideal::cell(&cell, epsilon))
}

/// Two windings of opposed ampere-turns that fill the window's height of an ideal core: the field is straight.
fn leakage(published: &Published) -> Row {
    let edge = |name: &str| published.input(name);
    let inner = centred([edge("r1"), edge("r2")], edge("h"));
    let outer = centred([edge("r3"), edge("r4")], edge("h"));
    let case = published.id.replace("LEAK-", "leakage in ideal iron ");
    let reference = published.value("exact");
    let model = |epsilon: f64| {
        let hole = GappedPot {
            post: edge("r1"),
            wall: edge("r4"),
            half_gap: 0.0,
            half_window: 0.5 * edge("h"),
            winding: inner.radii,
        };
        let pot = builders::gapped_pot(&hole, 1.0 / epsilon);
        let windings = builders::air_coils(&[(inner, 1.0, 1.0), (outer, 1.0, -1.0)]).windings;
        Model { gaps: Vec::new(), windings, ..pot }
    };
    Carried {
        case,
        epsilon: OPPOSED,
        published,
        reference,
        unit: "m",
        scale: 2.0 / MU0,
        offset: 0.0,
    }
    .row(model)
}

/// Inductance per length of an endless solenoid with a rod.
fn solenoid(published: &Published) -> Row {
    let input = |name: &str| published.input(name);
    let (rod, permeability) = (input("a"), input("mu"));
    let coil = centred([input("r1"), input("r2")], 2.0);
    let case = published.id.replace("PERIODIC-", "endless solenoid ");
    // One turn a metre: N = 2, L/N² · N²/2 per metre.
    let (scale, reference) = (2.0 * 2.0 / MU0, published.value(""));
    Carried { case, epsilon: SMALL, published, reference, unit: "m²", scale, offset: 0.0 }
        .row(|epsilon| ideal::solenoid(Law::Constant { permeability }, rod, &coil, 1.0, epsilon))
}

/// Coenergy per length of an endless solenoid on saturating steel, the law linear between the table's points.
fn saturated_solenoid(reference: &Published) -> Row {
    let input = |name: &str| reference.input(name);
    let (rod, radius, field) = (input("a"), input("b"), input("nI"));
    let coil = centred([radius, 1.1 * radius], 2.0 * radius);
    let height = 2.0 * radius;
    // The reference has a thin winding: ours adds the field that falls across it, µ0 (nI)²/2 · 2π w (r/3 + w/12).
    let width = coil.radii[1] - radius;
    let own = MU0 * field * field * PI * width * (radius / 3.0 + width / 12.0);
    let steel = &published("TEAM13-BH")[0];
    let law = || {
        let (h, b) = (steel.value_list("H"), steel.value_list("B"));
        Law::Table(BhTable::new(h, b, Interpolation::Linear).unwrap())
    };
    let carried = Carried {
        case: reference.id.replace("NL-SOLENOID-nI", "endless solenoid on steel, A/m "),
        epsilon: SMALL,
        published: reference,
        reference: reference.value("coenergy_per_m"),
        unit: "J/m",
        scale: 1.0 / height,
        offset: own,
    };
    carried.row(|epsilon| ideal::solenoid(law(), rod, &coil, field * height, epsilon))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_coil_that_fills_its_window_has_the_field_of_an_endless_one() {
        // The share that `post` and `saturated_solenoid` take off, by the solenoid without a rod.
        let coil: Coil = centred([1.0, 1.5], 2.0);
        let law = Law::Constant { permeability: 1.0 };
        let solved = solve_wholly(&ideal::solenoid(law, 0.5, &coil, 1.0, SMALL), 1e-4).unwrap();
        let by_hand = 2.0 * PI / 2.0 * (0.5 + 0.5 * (1.0 / 3.0 + 0.5 / 12.0));
        // Half the interval, and ε.
        assert!((solved.inductance(1.0)[0] / MU0 / by_hand - 1.0).abs() < 1.1e-4);
    }
}

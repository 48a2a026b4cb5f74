//! Rows of spheres in coils and loops: the low end of the inscribed, the high end of the circumscribed polygon.

use super::{centred, small};
use crate::builders::{self, Chords};
use crate::coils::self_inductance;
use crate::references::{Published, published};
use crate::solver::solve_wholly;
use crate::sphere::{SphereCoil, sphere_share};
use crate::table::{Judged, Row, enclosure};
use gapwright::units::MU0;
use rayon::prelude::*;

/// Stands for an infinite permeability: ΔL falls short of the limit by less than 3e-6 (series).
const HARD: f64 = 1e6;

/// Every row of this file.
pub fn rows() -> Vec<Row> {
    let coils: Vec<Row> = published("SPHERE-COIL").par_iter().map(coil).collect();
    let loops: Vec<Row> = published("SPHERE-LOOP").par_iter().map(in_loop).collect();
    [coils, loops].concat()
}

/// The permeability at the end of an id.
fn permeability(published: &Published) -> f64 {
    let mu: f64 = published.id.rsplit("mu").next().unwrap().parse().unwrap();
    mu.min(HARD)
}

/// [L of the inscribed polygon's low end, L of the circumscribed one's high end]/µ0.
fn ends(case: &SphereCoil, wanted: f64) -> Result<[f64; 2], String> {
    let of = |chords| solve_wholly(&builders::sphere(case, 180, chords), wanted);
    let inside = of(Chords::Inside)?;
    Ok([inside.inductance(1.0)[0] / MU0, of(Chords::Outside)?.inductance(1.0)[1] / MU0])
}

/// A thick coil.
fn coil(published: &Published) -> Row {
    let (wanted, slack) = (5e-4, 3e-6);
    let coil = centred([published.input("r1"), published.input("r2")], published.input("h"));
    let permeability = permeability(published);
    let case = SphereCoil { radius: published.input("R"), permeability, coil };
    let judged = Judged {
        case: &published.id.replace("SPHERE-COIL-mu", "sphere in a coil, µr "),
        wanted: Some(wanted),
        reference: published.value("L_over_mu0N2"),
        unit: "m",
        slack,
        limit: wanted,
        limit_text: "inside, middle 5e-4".to_owned(),
        reason: "polygons of 180 chords inside and outside the circle enclose the sphere, and more iron cannot lower L; 1e6 stands for µr = inf".to_owned(),
        source: &published.cited(),
    };
    enclosure(&judged, ends(&case, wanted))
}

/// A loop, as a coil of small square section; the air coil's L is taken off by quadrature.
fn in_loop(published: &Published) -> Row {
    let (wanted, reference) = (3e-4, published.value(""));
    let radius = published.input("a_over_R");
    let half = 0.05 * (radius - 1.0).min(0.5);
    let coil = centred([radius - half, radius + half], 2.0 * half);
    let permeability = permeability(published);
    let case = SphereCoil { radius: 1.0, permeability, coil };
    let air = self_inductance(&coil);
    let section = sphere_share(&case) / reference - 1.0;
    let slack = 1.5e-3;
    let judged = Judged {
        case: &published.id.replace("SPHERE-LOOP-a", "sphere in a loop, a/R ").replace("-mu", ", µr "),
        wanted: Some(wanted),
        reference,
        unit: "",
        slack,
        limit: wanted * (1.0 + air / reference) + slack,
        limit_text: "inside by 1.5e-3".to_owned(),
        reason: "as the sphere in a coil, less the air coil's L (quadrature), so the interval counts 1 + L_air/ΔL times; a square section of a tenth of the clearance changes ΔL by less than 1.5e-3 (series)".to_owned(),
        source: &published.cited(),
    };
    let ends = small(section, slack, "the section counts").and_then(|()| ends(&case, wanted));
    enclosure(&judged, ends.map(|ends| ends.map(|end| end - air)))
}

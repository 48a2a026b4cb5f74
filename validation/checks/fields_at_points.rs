//! Rows of flux densities at points: on the axis of coils, in the middle of spheres and shells.
//!
//! No interval covers a field at a point: the limits are measured ones.

use super::{centred, small};
use crate::axis;
use crate::builders;
use crate::coils::Coil;
use crate::references::{MU0_OF_CHECKS, Published, published};
use crate::solver::probed;
use crate::table::{Judged, Row, value};
use crate::uniform;
use gapwright::model::{Corner, MaterialId, Model, Part, Point};
use gapwright::results::ProbePoint;
use gapwright::units::MU0;
use rayon::prelude::*;
use std::f64::consts::PI;

/// Interval asked for where a field at a point is judged.
const WANTED: f64 = 1e-4;
/// Largest relative deviation of a flux density on the axis of a coil.
const AXIS_MAX: f64 = 5e-3;
/// The same in the middle of spheres and shells, where the field is smooth and the mesh finer.
const MIDDLE_MAX: f64 = 1e-3;

/// Every row of this file.
pub fn rows() -> Vec<Row> {
    let thick: Vec<Row> = published("AXIS-THICK").par_iter().map(thick).collect();
    let spheres: Vec<Row> = published("SPHERE-CENTRE").par_iter().map(sphere).collect();
    let shells: Vec<Row> = published("SHELL-").par_iter().map(shell).collect();
    [thick, thin(), spheres, shells].concat()
}

/// A row of a flux density.
fn row(
    case: &str,
    published: &Published,
    reference: f64,
    ours: Result<f64, String>,
    (limit, reason): (f64, &str),
) -> Row {
    let judged = Judged {
        case,
        wanted: Some(WANTED),
        reference,
        unit: "",
        slack: 0.0,
        limit,
        limit_text: format!("{limit:.0e}"),
        reason: reason.to_owned(),
        source: &published.cited(),
    };
    value(&judged, ours)
}

const ON_AXIS: &str = "no interval covers a field at a point; on the axis B is constant in each triangle, so a part of air, 0.01 mean radii thick, makes the mesh fine there and a parabola is fitted to 61 probes within 0.15 mean radii (a plain probe on the coarse mesh was up to 20 % off)";

/// Probes on either side of a height.
const N_SIDE: usize = 30;

/// B_z/µ0 at heights on the axis of coils of this mean radius.
fn on_axis(model: Model, radius: f64, heights: &[f64]) -> Result<Vec<f64>, String> {
    let (half, step) = (0.01 * radius, 0.15 * radius / N_SIDE as f64);
    let least = heights.iter().fold(f64::INFINITY, |m, z| m.min(*z)) - 0.2 * radius;
    let most = heights.iter().fold(f64::NEG_INFINITY, |m, z| m.max(*z)) + 0.2 * radius;
    let corner = |r: f64, z: f64| Corner { at: Point { r, z }, fillet_radius: 0.0 };
    let outline = [corner(0.0, least), corner(half, least), corner(half, most), corner(0.0, most)];
    // The only material of these models is air.
    let air = Part { name: "air".to_owned(), material: MaterialId(0), outline: outline.into() };
    let model = Model { parts: vec![air], ..model };
    let offset = |k: usize| k as f64 - N_SIDE as f64;
    let at = |z: f64| (0..=2 * N_SIDE).map(move |k| Point { r: 0.0, z: z + step * offset(k) });
    let points: Vec<Point> = heights.iter().flat_map(|z| at(*z)).collect();
    let found = probed(&model, WANTED, &points)?;
    Ok(found.chunks(2 * N_SIDE + 1).map(|window| middle_of_parabola(window) / MU0).collect())
}

/// Least-squares parabola through B_z at equal distances, in the middle: Σ (s₄ − s₂ k²) B/(n s₄ − s₂²), s_p = Σ kᵖ.
fn middle_of_parabola(window: &[ProbePoint]) -> f64 {
    let n = window.len() as f64;
    let square = |i: usize| (i as f64 - 0.5 * (n - 1.0)).powi(2);
    let s2: f64 = (0..window.len()).map(square).sum();
    let s4: f64 = (0..window.len()).map(|i| square(i).powi(2)).sum();
    let weighted = window.iter().enumerate().map(|(i, p)| (s4 - s2 * square(i)) * p.b_z);
    weighted.sum::<f64>() / (n * s4 - s2 * s2)
}

/// B_z/(µ0 N I) on the axis of thick coils.
fn thick(published: &Published) -> Row {
    let coil = centred([published.input("r1"), published.input("r2")], published.input("h"));
    let radius = 0.5 * (coil.radii[0] + coil.radii[1]);
    let b = on_axis(builders::air_coil(&coil), radius, &[published.input("z")]);
    let case = published.id.replace("AXIS-THICK-", "axis of a coil ");
    let reference = published.value("") / MU0_OF_CHECKS;
    row(&case, published, reference, b.map(|b| b[0]), (AXIS_MAX, ON_AXIS))
}

/// Loops, sheets and Helmholtz's pair as coils of a section of 0.02 radii, which changes the field by less than 1e-4.
fn thin() -> Vec<Row> {
    let (side, h) = (0.02, 0.01);
    let ring = Coil { radii: [1.0 - h, 1.0 + h], heights: [-h, h] };
    let sheet = centred([1.0 - h, 1.0 + h], 2.0);
    let pair = [ring.raised(-0.5), ring.raised(0.5)];
    let reason = &format!("{ON_AXIS}; the section of {side} radii counts less than 1e-4");
    let field = |coils: &[Coil], z: &[f64]| {
        let model = builders::air_coils(&coils.iter().map(|c| (*c, 1.0, 1.0)).collect::<Vec<_>>());
        let of_section = |z: f64| coils.iter().map(|c| axis::of_coil(c, z)).sum::<f64>();
        on_axis(model, 1.0, z).map(|b| (b, z.iter().map(|z| of_section(*z)).collect::<Vec<f64>>()))
    };
    let cases = [
        ("AXIS-LOOP", field(&[ring], &[0.0, 1.0])),
        ("AXIS-SOLENOID", field(&[sheet], &[0.0, 1.0])),
    ];
    let mut rows = Vec::new();
    for (prefix, found) in cases {
        for (i, published) in published(prefix).iter().enumerate() {
            let reference = published.value("") / MU0_OF_CHECKS;
            let case = published.id.replace("AXIS-", "axis of a thin ").to_lowercase();
            let ours = found.clone().and_then(|(b, of_section)| {
                small(of_section[i] / reference - 1.0, 1e-4, "the section counts").map(|()| b[i])
            });
            rows.push(row(&case, published, reference, ours, (AXIS_MAX, reason)));
        }
    }
    let found = field(&pair, &[0.0, 0.1, 0.5]);
    for (i, published) in published("AXIS-HELMHOLTZ").iter().enumerate() {
        let case = published.id.replace("AXIS-", "axis, ");
        let ours = found.clone().map(|(b, _)| if i == 0 { b[0] } else { b[i] / b[0] });
        rows.push(row(&case, published, published.value(""), ours, (AXIS_MAX, reason)));
    }
    rows
}

/// Chords of a half circle here.
const N_CHORDS: usize = 90;

/// Corners of a half circle whose mean radius is `radius`, from the lower pole to the upper.
fn arc(radius: f64) -> Vec<Corner> {
    let half_angle = 0.5 * PI / N_CHORDS as f64;
    // Chords lie inside by half_angle²/3 in the mean.
    let radius = radius * (1.0 + half_angle * half_angle / 3.0);
    let corner = |i: usize| {
        let angle = -0.5 * PI + 2.0 * half_angle * i as f64;
        let r = if i == 0 || i == N_CHORDS { 0.0 } else { radius * angle.cos() };
        Corner { at: Point { r, z: radius * angle.sin() }, fillet_radius: 0.0 }
    };
    (0..=N_CHORDS).map(corner).collect()
}

/// Flux density in the middle over the applied one.
fn amplification(outline: Vec<Corner>, permeability: f64) -> Result<f64, String> {
    let coils = uniform::coils(2.0);
    let part = Part { name: "body".to_owned(), material: MaterialId(0), outline };
    let model = Model { parts: vec![part], ..coils.model(permeability) };
    let found = probed(&model, WANTED, &[Point { r: 0.0, z: 0.0 }])?;
    Ok(found[0].b_z / coils.flux_density())
}

/// Only the field's part that is uniform reaches the middle, whatever coils make it.
const MIDDLE: &str = "no interval covers a field at a point; only the uniform part of the coils' field reaches the middle, so the coils need not be far: 2e-4 was the most measured";

/// A solid sphere: 3µ/(µ + 2).
fn sphere(published: &Published) -> Row {
    let permeability = published.input("mu");
    let case = format!("B in a sphere over B applied, µr {permeability}");
    let ours = amplification(arc(1.0), permeability);
    row(&case, published, published.value(""), ours, (MIDDLE_MAX, MIDDLE))
}

/// A shell: the applied field over the one inside.
fn shell(published: &Published) -> Row {
    let (permeability, ratio) = (published.input("mu"), published.input("a_over_b"));
    let outline = arc(1.0).into_iter().chain(arc(ratio).into_iter().rev()).collect();
    let case = format!("shielding by a shell, µr {permeability}, a/b {ratio}");
    let ours = amplification(outline, permeability).map(|a| 1.0 / a);
    row(&case, published, published.value(""), ours, (MIDDLE_MAX, MIDDLE))
}

//! Rows of cylinders in a uniform field: mean magnetisation over the applied field, of the mid-plane (fluxmetric) and
//! of the whole (magnetometric factor).

use crate::references::{Published, published};
use crate::solver::probed;
use crate::table::{Judged, Row, value};
use crate::uniform;
use gapwright::model::{Core, Form, MaterialId, Model, Point};
use gapwright::units::MU0;
use rayon::prelude::*;

/// Interval asked for: the cylinder holds a few per cent of the coils' energy.
const WANTED: f64 = 3e-5;
/// Largest relative deviation of a mean magnetisation.
const MEAN_MAX: f64 = 1e-3;
/// Heights at which ψ on the side is taken, an odd number for Simpson's rule.
const N_HEIGHTS: usize = 401;
/// Stands for an infinite permeability: 1/χ = 1e-6 beside a factor of 0.04 or more.
const HARD: f64 = 1e6;

const REASON: &str = "no interval covers a magnetisation; the field of the six coils is uniform to 1.5e-4 over the cylinder; ψ on the side: 4e-4 was the most measured";

/// Two rows for every published cylinder.
pub fn rows() -> Vec<Row> {
    let pairs: Vec<[Row; 2]> = published("CYL-gamma").par_iter().map(cylinder).collect();
    pairs.concat()
}

/// M/H_a from N: 1/(N + 1/χ), with χ → ∞ where the row says so.
fn cylinder(published: &Published) -> [Row; 2] {
    let (aspect, permeability) = (published.input("gamma"), published.input("mu_r").min(HARD));
    let found = magnetisation(aspect, permeability);
    let row = |what: &str, reference: f64, ours: Result<f64, String>| {
        let name =
            published.id.replace("CYL-gamma", "cylinder, length/diameter ").replace("-mu", ", µr ");
        let judged = Judged {
            case: &format!("{name}: M/H {what}"),
            wanted: Some(WANTED),
            reference,
            unit: "",
            slack: 0.0,
            limit: MEAN_MAX,
            limit_text: format!("{MEAN_MAX:.0e}"),
            reason: REASON.to_owned(),
            source: &published.cited(),
        };
        value(&judged, ours)
    };
    [
        row("mid-plane", published.value("mu_app_mid") - 1.0, found.clone().map(|m| m[0])),
        row("whole", published.value("Mavg_over_Ha"), found.map(|m| m[1])),
    ]
}

/// Mean M/H_a of the mid-plane and of the volume, from M = B (1 − 1/µ)/µ0 and ∫ B_z dA = 2πψ on the side.
fn magnetisation(aspect: f64, permeability: f64) -> Result<[f64; 2], String> {
    // Radius 1, half-length `aspect`; the corners lie half-way to the coils.
    let coils = uniform::coils(2.0 * 1f64.hypot(aspect));
    let form = Form::Rod { diameter: 2.0, hole_diameter: 0.0, height: 2.0 * aspect };
    let core = Core { material: MaterialId(0), form, corner_radius: 0.0, joint: 0.0 };
    let model = Model { core: Some(core), ..coils.model(permeability) };
    let step = aspect / (N_HEIGHTS - 1) as f64;
    let side: Vec<Point> = (0..N_HEIGHTS).map(|k| Point { r: 1.0, z: step * k as f64 }).collect();
    let psi: Vec<f64> = probed(&model, WANTED, &side)?.iter().map(|p| p.psi).collect();
    let simpson = |k: usize| match k {
        0 => 1.0,
        _ if k == N_HEIGHTS - 1 => 1.0,
        _ if k % 2 == 1 => 4.0,
        _ => 2.0,
    };
    let mean =
        (0..N_HEIGHTS).map(|k| simpson(k) * psi[k]).sum::<f64>() / (3.0 * (N_HEIGHTS - 1) as f64);
    let over_applied = 2.0 * (1.0 - 1.0 / permeability) / (MU0 * coils.field(0.0));
    Ok([over_applied * psi[0], over_applied * mean])
}

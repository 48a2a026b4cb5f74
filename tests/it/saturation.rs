//! Saturating cores: identities that need no reference, reference values, hard laws and hard starts.

mod laws;
mod references;

use gapwright::adapt::again::{Again, at_density, scaled};
use gapwright::adapt::{self, Outcome};
use gapwright::bound::Bound;
use gapwright::geometry::{self, Outline};
use gapwright::input;
use gapwright::model::{BhTable, Interpolation, Law, Model};
use gapwright::results::linkage::{load, tangent, unit_density};
use gapwright::sparse::cg::dot;
use gapwright::units::MU0;
use std::f64::consts::TAU;
use std::fs;
use std::path::Path;

/// A sheet of `meshes/`.
fn sheet(name: &str) -> Model {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("meshes");
    let text = fs::read_to_string(folder.join(name)).unwrap();
    let read = |path: &str| fs::read_to_string(folder.join(path)).map_err(|e| e.to_string());
    input::read(&text, name, &read).unwrap_or_else(|found| panic!("{found:?}")).model
}

/// A finished run with what the identities ask.
struct Run {
    model: Model,
    outline: Outline,
    outcome: Outcome,
}

impl Run {
    fn new(mut model: Model, interval: f64) -> Run {
        model.accuracy.interval = interval;
        let outline = geometry::outline(&model).unwrap();
        let outcome = adapt::run(&model, &outline, &mut |_| {}).unwrap();
        Run { model, outline, outcome }
    }

    /// The field on the same mesh with the first winding at `current`, solved to rounding.
    fn at(&mut self, current: f64) -> Again {
        let density = unit_density(&self.model, &self.outline, 0);
        let density: Vec<f64> = density.iter().map(|j| j * current).collect();
        let start = scaled(&self.outcome.solution, current / self.model.windings[0].current);
        // A width of 1e-13 leaves a relative error of 3e-17 in the coenergy and 5e-9 in the field.
        at_density(&mut self.outcome, &density, &start, 1e-13).unwrap()
    }

    fn linkage(&self, again: &Again) -> f64 {
        let unit = load(&self.outcome, &unit_density(&self.model, &self.outline, 0));
        let solution = &again.solution;
        TAU * dot(&unit, &self.outcome.space.restrict(&solution.vertex, &solution.edge))
    }

    fn slope(&self, again: &Again) -> f64 {
        let unit = load(&self.outcome, &unit_density(&self.model, &self.outline, 0));
        tangent(&self.outcome, &again.elements, &unit, &unit).unwrap()
    }
}

#[track_caller]
fn near(ours: f64, wanted: f64, tolerance: f64) {
    let deviation = (ours / wanted - 1.0).abs();
    assert!(deviation <= tolerance, "{ours:.12e} against {wanted:.12e}: {deviation:.1e}");
}

#[test]
fn energy_and_coenergy_add_up_to_linkage_times_current() {
    let run = Run::new(sheet("lamp_choke_saturating.toml"), 1e-3);
    let sampler = gapwright::results::sample::Sampler::new(&run.outline, &run.outcome);
    let triangles = 0..run.outcome.mesh.triangles.len();
    let energy: f64 = triangles.map(|t| sampler.work_and_energy(t).1).sum();
    let x = run.outcome.space.restrict(&run.outcome.solution.vertex, &run.outcome.solution.edge);
    let unit = load(&run.outcome, &unit_density(&run.model, &run.outline, 0));
    // Without its margin the low end is the same sum as the energy by its own quadrature.
    near(energy + bare_low(&run.outcome.bound), TAU * dot(&unit, &x) * 4.0, 3e-9);
}

/// The low end before the margin.
fn bare_low(bound: &Bound) -> f64 {
    bound.low + bound.margin
}

#[test]
fn the_slope_of_the_coenergy_is_the_linkage_and_its_slope_the_incremental_inductance() {
    let mut run = Run::new(sheet("lamp_choke_saturating.toml"), 1e-3);
    let step = 2e-3;
    let [below, here, above] = [4.0 - step, 4.0, 4.0 + step].map(|current| run.at(current));
    // Central differences err by h²/6 of the third derivative: (5e-4)² times a number of order 1; coenergies of 7 mJ
    // rounded to 1e-15 of themselves over 4 mA leave 1e-12.
    let slope = (bare_low(&above.bound) - bare_low(&below.bound)) / (2.0 * step);
    near(slope, run.linkage(&here), 1e-6);
    let slope = (run.linkage(&above) - run.linkage(&below)) / (2.0 * step);
    near(slope, run.slope(&here), 1e-5);
}

#[test]
fn a_straight_table_gives_what_the_constant_law_gives() {
    let mut linear = Run::new(sheet("solid_post.toml"), 1e-2);
    let here = linear.at(1.0);
    // Straight up to 100 T, which no place reaches.
    let top = 100.0;
    let table =
        BhTable::new(vec![0.0, top / (1500.0 * MU0)], vec![0.0, top], Interpolation::Linear);
    linear.model.materials[0].law = Law::Table(table.unwrap());
    linear.outcome.coefficients = adapt::coefficients(&linear.model, &linear.outline.regions);
    assert!(!linear.outcome.coefficients.is_linear());
    let table = linear.at(1.0);
    // The margins of the two kinds of law differ.
    near(bare_low(&table.bound), bare_low(&here.bound), 1e-9);
    let bare_high = |bound: &Bound| bound.high - bound.margin;
    near(bare_high(&table.bound), bare_high(&here.bound), 1e-9);
    near(linear.linkage(&table), linear.linkage(&here), 1e-9);
    near(linear.slope(&table), linear.linkage(&here), 1e-9);
}

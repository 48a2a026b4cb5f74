//! The cases of the bench: sheets of `meshes/`, solved to several widths or up to a number of unknowns.

use gapwright::adapt::{self, Outcome};
use gapwright::geometry::{self, Outline};
use gapwright::model::{Accuracy, Model};
use std::path::Path;

/// A sheet of the bench and the exact inductance of its field model.
#[derive(Debug, Clone, Copy)]
pub struct Case {
    pub name: &'static str,
    pub sheet: &'static str,
    /// Inductance [H], computed with a p = 8 general finite-element library on graded meshes, exterior by inversion
    /// (R7: quadrature of the Bessel form); relative error below 7e-9.
    pub inductance: f64,
}

/// The four linear references; each is another path through the code: thin gap, long gap, cap only, open core.
pub const CASES: [Case; 4] = [
    Case { name: "R1", sheet: "buoy_choke", inductance: 7.006_158_150_237_224e-4 },
    Case { name: "R5", sheet: "solid_post", inductance: 8.713_868_009_336_684e-4 },
    Case { name: "R7", sheet: "air_coil", inductance: 5.738_606_975_260_747e-4 },
    Case { name: "R8", sheet: "rod_coil", inductance: 6.234_350_148_663_32e-4 },
];

/// How far a run goes.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Goal {
    /// Relative width of the interval.
    Interval(f64),
    /// As many unknowns as the rounds may have: a ladder rung.
    Unknowns(usize),
}

impl Goal {
    /// The accuracy wish that leads there.
    pub fn accuracy(self) -> Accuracy {
        match self {
            Goal::Interval(interval) => Accuracy { interval, n_unknowns_max: 5_000_000 },
            // No interval is this narrow: the margin of the bound alone is wider.
            Goal::Unknowns(n_unknowns_max) => Accuracy { interval: 1e-12, n_unknowns_max },
        }
    }

    /// As printed and stored.
    pub fn label(self) -> String {
        match self {
            Goal::Interval(interval) => format!("{} %", 100.0 * interval),
            Goal::Unknowns(n) => format!("{:.0e}", n as f64),
        }
    }
}

/// Case of that name. Panics when there is none.
pub fn case(name: &str) -> Case {
    let found = CASES.into_iter().find(|c| c.name == name);
    found.unwrap_or_else(|| panic!("no case {name}"))
}

/// Text of a sheet of `meshes/`.
pub fn sheet_text(sheet: &str) -> String {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("meshes").join(format!("{sheet}.toml"));
    std::fs::read_to_string(&path).unwrap_or_else(|e| panic!("{}: {e}", path.display()))
}

/// Model of a sheet's text with the goal's accuracy, and its section.
pub fn model(text: &str, goal: Goal) -> (Model, Outline) {
    let no_files = |name: &str| Err(format!("{name}: the bench reads no tables"));
    let sheet = gapwright::input::read(text, "bench.toml", &no_files)
        .unwrap_or_else(|found| panic!("{}", found[0].message));
    let mut model = sheet.model;
    model.accuracy = goal.accuracy();
    let outline = geometry::outline(&model).unwrap_or_else(|fault| panic!("{fault:?}"));
    (model, outline)
}

/// Solves a model to its goal.
pub fn run(model: &Model, outline: &Outline) -> Outcome {
    adapt::run(model, outline, &mut |_| ()).unwrap_or_else(|error| panic!("{error}"))
}

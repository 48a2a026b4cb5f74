//! The reference sections R1, R5, R7, R8 as sheets, with variations, and the way from text to results.

use gapwright::adapt::{self, Outcome};
use gapwright::bound::{self, Field};
use gapwright::fem::Rules;
use gapwright::geometry::{Outline, outline};
use gapwright::input::{read, render};
use gapwright::mesh::fans::Fans;
use gapwright::model::Model;
use gapwright::results::{Results, collect};

/// A reference section: its name in `validation/references/field_cases.json` and its sheet.
#[derive(Debug, Clone, Copy)]
pub struct Case {
    pub name: &'static str,
    pub sheet: &'static str,
}

/// Gapped pot core with a hole.
pub const R1: Case =
    Case { name: "R1", sheet: include_str!("../../validation/references/R1.toml") };

/// Gapped pot core with a solid post.
pub const R5: Case =
    Case { name: "R5", sheet: include_str!("../../validation/references/R5.toml") };

/// Air coil.
pub const R7: Case =
    Case { name: "R7", sheet: include_str!("../../validation/references/R7.toml") };

/// Rod with a short winding.
pub const R8: Case =
    Case { name: "R8", sheet: include_str!("../../validation/references/R8.toml") };

/// All four.
pub const ALL: [Case; 4] = [R1, R5, R7, R8];

impl Case {
    /// An output of the independent high-order computation.
    #[track_caller]
    pub fn reference(&self, output: &str) -> f64 {
        let text = include_str!("../../validation/references/field_cases.json");
        let all: serde_json::Value = serde_json::from_str(text).unwrap();
        all[self.name]["outputs"][output].as_f64().unwrap()
    }

    /// The model with another wanted interval.
    #[track_caller]
    pub fn model(&self, interval: f64) -> Model {
        model(self.sheet, interval)
    }
}

/// Sheet text → model, with that interval.
#[track_caller]
pub fn model(sheet: &str, interval: f64) -> Model {
    let no_files = |path: &str| Err(format!("{path}: these sheets name no files"));
    let sheet = read(sheet, "case.toml", &no_files).unwrap_or_else(|found| {
        let messages: String = found.iter().map(|d| render(d, sheet, false)).collect();
        panic!("{messages}")
    });
    let mut model = sheet.model;
    model.accuracy.interval = interval;
    model
}

/// A finished run with everything that led to it.
pub struct Run {
    pub model: Model,
    pub outline: Outline,
    pub outcome: Outcome,
}

impl Run {
    /// Solves a model to its interval.
    #[track_caller]
    pub fn new(model: Model) -> Run {
        let outline = outline(&model).unwrap();
        let outcome = adapt::run(&model, &outline, &mut |_| ()).unwrap();
        assert!(outcome.reached);
        Run { model, outline, outcome }
    }

    /// Everything that `solve` answers.
    pub fn results(&self) -> Results {
        collect(&self.model, &self.outline, &self.outcome)
    }

    /// Bound of any field on this run's mesh.
    pub fn bound_of(&self, solution: &gapwright::solve::Solution) -> bound::Bound {
        let rules = Rules::working();
        let field = Field {
            mesh: &self.outcome.mesh,
            coefficients: &self.outcome.coefficients,
            rules: &rules,
            elements: &self.outcome.elements,
            solution,
        };
        bound::bound(&field, &Fans::new(&self.outcome.mesh))
    }
}

/// Sheet text → finished run.
#[track_caller]
pub fn run(sheet: &str, interval: f64) -> Run {
    Run::new(model(sheet, interval))
}

/// True when the long campaigns are asked for.
pub fn is_slow() -> bool {
    std::env::var_os("RUN_SLOW_TESTS").is_some_and(|v| v == "1")
}

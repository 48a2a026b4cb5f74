//! STAND-IN, to be replaced by `results::collect` when it is merged: energies and one winding's inductance only.

use gapwright::adapt::Outcome;
use gapwright::geometry::Outline;
use gapwright::model::Model;
use gapwright::results::{Guaranteed, Results, Round};

/// What the coenergy alone says.
pub fn collect(model: &Model, _outline: &Outline, outcome: &Outcome) -> Results {
    let carrying: Vec<_> = model.windings.iter().filter(|w| w.current != 0.0).collect();
    let is_linear = model.materials.iter().all(|m| m.law.is_constant());
    let to_inductance = match carrying[..] {
        [winding] if is_linear => Some((2.0 / winding.current.powi(2), winding.turns().powi(2))),
        _ => None,
    };
    let coenergy = guaranteed(outcome.bound.low, outcome.bound.high, 1.0);
    let ends = |factor: f64| guaranteed(outcome.bound.low, outcome.bound.high, factor);
    let scale = to_inductance.map_or(1.0, |(factor, _)| factor);
    Results {
        title: model.title.clone(),
        n_unknowns: outcome.rounds.last().map_or(0, |r| r.n_unknowns),
        n_triangles: outcome.mesh.triangles.len(),
        rounds: outcome
            .rounds
            .iter()
            .map(|r| Round {
                n_unknowns: r.n_unknowns,
                n_triangles: r.n_triangles,
                n_cg_iterations: r.effort.n_cg_iterations,
                n_newton_steps: r.effort.n_newton_steps,
                low: scale * r.low,
                high: scale * r.high,
            })
            .collect(),
        wanted: model.accuracy.interval,
        reached: outcome.reached,
        inductance: to_inductance.map(|(factor, _)| ends(factor)),
        inductance_factor: to_inductance.map(|(factor, turns)| ends(factor / turns)),
        incremental_inductance: None,
        coenergy,
        energy: coenergy.value,
        is_linear,
        windings: vec![],
        ledger: vec![],
        inductance_based: None,
        gaps: vec![],
        hot_spots: vec![],
        parts: vec![],
        probes: vec![],
        verdict: None,
        requirements: vec![],
        notes: vec![],
    }
}

fn guaranteed(low: f64, high: f64, factor: f64) -> Guaranteed {
    Guaranteed { value: 0.5 * factor * (low + high), low: factor * low, high: factor * high }
}

//! The one entry of the stage: a finished run → [`Results`].

use super::sample::Sampler;
use super::{
    Guaranteed, ProbeResult, Results, Round, WindingResult, gaps, hand, hot_spots, ledger, linkage,
    parts,
};
use crate::adapt::Outcome;
use crate::geometry::Outline;
use crate::model::{Form, Model, PotWall};
use crate::units::{Henry, Joule};

/// Everything that `solve` answers, from the model, its outline and the last round.
pub fn collect(model: &Model, outline: &Outline, outcome: &Outcome) -> Results {
    let sampler = Sampler::new(outline, outcome);
    let work = region_work(&sampler);
    let linkage = linkage::linkages(model, &sampler);
    let carrier = single_carrier(model);
    let is_linear = outcome.coefficients.is_linear();
    let coenergy = guaranteed(outcome.bound.low, outcome.bound.high);
    let inductance = carrier.map(|w| match is_linear {
        true => scaled(coenergy, 2.0 / model.windings[w].current.powi(2)),
        false => linkage::apparent(model, &linkage[w], w),
    });
    let turns = carrier.map_or(1.0, |w| model.windings[w].turns());
    let value = inductance.map(|l| l.value);
    let energy: Joule = work.iter().map(|w| w.energy).sum();

    let hand = hand::hand_sum(model);
    let ledger = ledger::rows(outline, &work, value.map(|l| turns * turns / l), hand.as_ref().ok());
    let gaps = gaps::results(model, &sampler, carrier, &linkage);
    let parts = parts::results(model, &sampler, &work);
    let mut notes = notes(model, &sampler);
    notes.extend(parts::constant_law_note(model, &sampler, &parts));
    let verdict = match (&model.estimate, value) {
        (Some(estimate), Some(l)) => hand::verdict(estimate, hand.as_ref().ok(), l, turns, &ledger),
        _ => None,
    };
    if let (Err(why), Some(_)) = (&hand, &model.core) {
        notes.push(why.to_string());
    }
    let windings = (model.windings.iter().zip(&linkage))
        .map(|(w, l)| WindingResult {
            name: w.name.clone(),
            turns: w.turns(),
            current: w.current,
            flux_linkage: l.value,
            flux_linkage_ends: l.ends,
        })
        .collect();
    let incremental_inductance = match is_linear {
        true => value,
        false => carrier.and_then(|w| incremental(model, outline, outcome, w, &mut notes)),
    };
    Results {
        title: model.title.clone(),
        n_unknowns: outcome.rounds.last().map_or(0, |r| r.n_unknowns),
        n_triangles: outcome.mesh.triangles.len(),
        rounds: rounds(model, outcome, carrier.filter(|_| is_linear)),
        wanted: model.accuracy.interval,
        reached: outcome.reached,
        unresolved: outcome.unresolved,
        inductance,
        inductance_factor: inductance.map(|l| scaled(l, 1.0 / (turns * turns))),
        incremental_inductance,
        coenergy,
        energy: if is_linear { coenergy.value } else { energy },
        is_linear,
        estimated_error: (!is_linear).then(|| outcome.bound.relative_width()),
        windings,
        inductance_based: value
            .and_then(|l| gaps::common_factor(outline, &gaps, &ledger, turns * turns / l)),
        ledger,
        gaps,
        hot_spots: hot_spots::find(model, &sampler),
        parts,
        probes: probes(model, &sampler),
        verdict,
        ripple: None,
        requirements: Vec::new(),
        notes,
    }
}

/// dλ/dI of winding w at the bias; `None` and a note where its linear solve fails.
fn incremental(
    model: &Model,
    outline: &Outline,
    outcome: &Outcome,
    w: usize,
    notes: &mut Vec<String>,
) -> Option<Henry> {
    let unit = linkage::load(outcome, &linkage::unit_density(model, outline, w));
    let found = linkage::tangent(outcome, &outcome.elements, &unit, &unit);
    found.inspect_err(|why| notes.push(format!("no incremental inductance: {why}"))).ok()
}

/// Index of the only winding that carries current, if there is just one.
pub fn single_carrier(model: &Model) -> Option<usize> {
    let mut carrying = (0..model.windings.len()).filter(|&w| model.windings[w].current != 0.0);
    let first = carrying.next();
    first.filter(|_| carrying.next().is_none())
}

/// The middle of the ends is a good best value: the true error sits near half of the interval.
fn guaranteed(low: f64, high: f64) -> Guaranteed {
    Guaranteed { value: 0.5 * (low + high), low, high }
}

fn scaled(g: Guaranteed, factor: f64) -> Guaranteed {
    Guaranteed { value: g.value * factor, low: g.low * factor, high: g.high * factor }
}

/// ∫ H·B dV and ∫ w dV of one region [J].
#[derive(Debug, Clone, Copy, Default)]
pub struct Work {
    pub product: Joule,
    pub energy: Joule,
}

fn region_work(sampler: &Sampler) -> Vec<Work> {
    let mut work = vec![Work::default(); sampler.outline.regions.len()];
    for (t, region) in sampler.outcome.mesh.regions.iter().enumerate() {
        let (product, energy) = sampler.work_and_energy(t);
        work[region.0 as usize].product += product;
        work[region.0 as usize].energy += energy;
    }
    work
}

/// Ends of the quantity that `interval` speaks of: the inductance where there is one, else the coenergy.
fn rounds(model: &Model, outcome: &Outcome, carrier: Option<usize>) -> Vec<Round> {
    let factor = carrier.map_or(1.0, |w| 2.0 / model.windings[w].current.powi(2));
    (outcome.rounds.iter())
        .map(|r| Round {
            n_unknowns: r.n_unknowns,
            n_triangles: r.n_triangles,
            n_cg_iterations: r.effort.n_cg_iterations,
            n_newton_steps: r.effort.n_newton_steps,
            low: factor * r.low,
            high: factor * r.high,
        })
        .collect()
}

fn probes(model: &Model, sampler: &Sampler) -> Vec<ProbeResult> {
    (model.probes.iter())
        .map(|probe| {
            let points = probe.points().filter_map(|at| sampler.probe(at)).collect();
            ProbeResult { name: probe.name.clone(), points }
        })
        .collect()
}

/// Usable but doubtful: fields past the last point of a table, legs that are not round.
fn notes(model: &Model, sampler: &Sampler) -> Vec<String> {
    let mut notes = parts::beyond_tables(model, sampler);
    if let Some(at) = sampler.outcome.unresolved {
        notes.push(format!(
            "the interval cannot close further: near r = {:.6} mm, z = {:.6} mm the field is too sharp for any mesh; \
             parts that touch only in a point do that: let them share an edge or leave a gap",
            1e3 * at.r,
            1e3 * at.z
        ));
    }
    if !sampler.outcome.coefficients.is_linear() {
        notes.push(
            "guaranteed are the ends of the coenergy and, for a single current, those of the flux linkage and the \
             apparent inductance, which follow from its convexity; their best values carry an estimated error, and \
             the incremental inductance is a best value only"
                .to_string(),
        );
    }
    if let Some(core) = &model.core
        && let Form::Pot { wall: PotWall::OuterLegsArea(_), .. } = core.form
    {
        notes.push(
            "the outer legs are not round: they are replaced by a round wall of equal section, a model error of \
             per cents that no interval covers"
                .to_string(),
        );
    }
    notes
}

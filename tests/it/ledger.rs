//! Identities of the results that need no outside value: shares, sums, factors, energies, volumes.

use crate::cases::{ALL, R1, R5, Run, run};
use gapwright::fem::element::Frame;
use gapwright::fem::moments::linear_energy;
use gapwright::geometry::RegionKind;
use gapwright::model::{Across, Model, Point};
use gapwright::results::hand::hand_sum;
use gapwright::results::sample::Sampler;
use gapwright::units::MU0;
use std::f64::consts::TAU;

const MM: f64 = 1e-3;

/// Sums of 1e4 terms in double precision.
const ROUNDING: f64 = 1e-12;

/// Fails where two numbers differ by more than `tolerance`, relative.
#[track_caller]
pub fn equal(what: &str, a: f64, b: f64, tolerance: f64) {
    assert!(
        (a / b - 1.0).abs() <= tolerance,
        "{what}: {a:.15e} and {b:.15e} differ by {:.1e}",
        a / b - 1.0
    );
}

/// R5 with a spacer and a joint, so that every kind of region is there.
fn with_everything() -> Model {
    let mut model = R5.model(1e-3);
    let mut spacer = model.gaps[0].clone();
    (spacer.name, spacer.across, spacer.length) = ("foil".to_string(), Across::Spacer, 0.1e-3);
    model.gaps[0].center = 3e-3;
    model.gaps.push(spacer);
    model.core.as_mut().unwrap().corner_radius = 0.8e-3;
    model
}

fn jointed() -> Model {
    let mut model = R1.model(1e-3);
    model.core.as_mut().unwrap().joint = 5e-6;
    model
}

/// The references, and sections with spacer, fillets, joint.
pub fn all_models() -> Vec<Model> {
    ALL.iter().map(|case| case.model(1e-3)).chain([with_everything(), jointed()]).collect()
}

#[test]
fn shares_add_up_to_one_and_reluctances_to_the_whole() {
    for model in all_models() {
        let run = Run::new(model);
        let results = run.results();
        let sum: f64 = results.ledger.iter().map(|row| row.share).sum();
        equal("shares", sum, 1.0, ROUNDING);
        assert!(results.ledger.iter().all(|row| 0.0 <= row.share));
        let total = results.windings[0].turns.powi(2) / results.inductance.unwrap().value;
        let sum: f64 = results.ledger.iter().map(|row| row.reluctance.unwrap()).sum();
        equal("reluctances", sum, total, ROUNDING);
        assert_eq!(results.ledger.len(), run.outline.regions.len());
    }
}

#[test]
fn hand_rows_of_the_ledger_add_up_to_the_hand_total() {
    for model in [R1.model(1e-2), R5.model(1e-2), with_everything(), jointed()] {
        let hand = hand_sum(&model).unwrap();
        let results = Run::new(model).results();
        let sum: f64 = results.ledger.iter().filter_map(|row| row.hand).sum();
        equal("hand rows", sum, hand.total, ROUNDING);
    }
}

#[test]
fn the_common_factor_turns_the_spreadsheet_sum_into_the_inductance() {
    for model in [R1.model(1e-3), R5.model(1e-3), with_everything(), jointed()] {
        let run = Run::new(model);
        let results = run.results();
        let is_core = |name: &str| {
            run.outline.regions.iter().any(|r| {
                r.name == name
                    && matches!(
                        r.kind,
                        RegionKind::Leg(_) | RegionKind::Part(_) | RegionKind::Joint(_)
                    )
            })
        };
        let core: f64 = results
            .ledger
            .iter()
            .filter(|row| is_core(&row.region))
            .filter_map(|row| row.reluctance)
            .sum();
        let plain: f64 = results.gaps.iter().map(|gap| gap.plain_reluctance).sum();
        let turns = results.windings[0].turns;
        let by_sum = turns * turns / (core + plain / results.inductance_based.unwrap());
        equal("N²/(R_core + R_plain/F_L)", by_sum, results.inductance.unwrap().value, ROUNDING);
        assert!(1.0 < results.inductance_based.unwrap(), "fringing adds permeance");
    }
}

#[test]
fn the_gap_factor_compares_the_winding_flux_with_the_mmf_across_the_gap() {
    let run = run(R5.sheet, 1e-4);
    let results = run.results();
    let gap = &results.gaps[0];
    let (area, length) = (TAU / 2.0 * 7e-3_f64.powi(2), 1e-3);
    equal("l/(µ0 A)", gap.plain_reluctance, length / (MU0 * area), 1e-12);
    // U = (1/A)∫H_z dV = (1/µ0 A)·∫Φ(z) dz over the gap with Φ(z) = 2πψ(7 mm, z): Simpson on 64 panels; ψ is quadratic
    // on every triangle's edge along r = 7 mm.
    let sampler = Sampler::new(&run.outline, &run.outcome);
    let flux = |z: f64| TAU * sampler.probe(Point { r: 7e-3, z }).unwrap().psi;
    let n = 64;
    let simpson: f64 = (0..=n)
        .map(|k| {
            let weight = if k == 0 || k == n { 1.0 } else { 2.0 + 2.0 * (k % 2) as f64 };
            weight * flux(-0.5 * length + length * k as f64 / n as f64)
        })
        .sum();
    let mmf = simpson / (3 * n) as f64 * length / (MU0 * area);
    let flux_of_winding = results.windings[0].flux_linkage / 60.0;
    // Simpson's panels do not end where triangles do.
    equal("F_gap", gap.gap_based.unwrap(), flux_of_winding * length / (MU0 * area * mmf), 1e-5);
}

#[test]
fn energy_is_half_of_inductance_and_current_squared() {
    for model in all_models() {
        let run = Run::new(model);
        let results = run.results();
        let (l, current) = (results.inductance.unwrap(), results.windings[0].current);
        for (l, w) in [
            (l.value, results.coenergy.value),
            (l.low, results.coenergy.low),
            (l.high, results.coenergy.high),
            (l.value, results.energy),
        ] {
            equal("½LI²", 0.5 * l * current * current, w, 1e-14);
        }
        equal("λI/2", 0.5 * results.windings[0].flux_linkage * current, results.energy, 1e-14);
        equal("dλ/dI", results.incremental_inductance.unwrap(), l.value, 1e-14);
        // The field's own energy is that of the low end but for a(ψ_h, e), of first order in the solver's rest e, whose
        // energy is at most 3e-5 of an interval of 2e-3: √6e-8 = 2e-4 in the worst case; measured 1.4e-5.
        let outcome = &run.outcome;
        let of_field: f64 = (0..outcome.mesh.triangles.len())
            .map(|t| {
                TAU * linear_energy(
                    &outcome.elements.k[t],
                    &outcome.solution.gradients(&outcome.mesh, t),
                )
            })
            .sum();
        equal("energy of the field", of_field, results.coenergy.low, 2e-4);
        let of_parts: f64 = results.parts.iter().map(|p| p.energy).sum();
        assert!(0.0 <= of_parts && of_parts < of_field);
    }
}

#[test]
fn exceeded_flux_densities_fall_with_the_share_of_the_volume() {
    for model in all_models() {
        let run = Run::new(model);
        for part in run.results().parts {
            let [b1, b5, b50] = part.exceeded;
            assert!(b50 <= b5 && b5 <= b1 && 0.0 < b50, "{}: {:?}", part.name, part.exceeded);
        }
    }
}

#[test]
fn volumes_of_the_parts_are_those_of_the_drawing() {
    let run = run(R5.sheet, 1e-2);
    let (gap, post) = (1.0 * MM, 7.0 * MM);
    let pi = TAU / 2.0;
    let wanted = [
        ("post", pi * post * post * (16.0 * MM - gap)),
        ("wall", pi * ((16.0 * MM).powi(2) - (14.0 * MM).powi(2)) * 16.0 * MM),
        ("upper plate", pi * (16.0 * MM).powi(2) * 3.5 * MM),
        ("lower plate", pi * (16.0 * MM).powi(2) * 3.5 * MM),
    ];
    let parts = run.results().parts;
    assert_eq!(parts.len(), wanted.len());
    for (name, volume) in wanted {
        let part = parts.iter().find(|p| p.name == name).unwrap_or_else(|| panic!("no {name}"));
        equal(name, part.volume, volume, ROUNDING);
    }
    let whole: f64 = (0..run.outcome.mesh.triangles.len())
        .filter(|&t| {
            matches!(
                run.outline.regions[run.outcome.mesh.regions[t].0 as usize].kind,
                RegionKind::Leg(_)
            )
        })
        .map(|t| {
            let frame = Frame::new(&run.outcome.mesh, t);
            TAU * frame.det_abs / 2.0 * frame.corners.iter().map(|c| c.r).sum::<f64>() / 3.0
        })
        .sum();
    equal("core", whole, wanted.iter().map(|w| w.1).sum(), ROUNDING);
}

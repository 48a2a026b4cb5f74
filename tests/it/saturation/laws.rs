//! Random laws and hard starts: no failed Newton iteration, no negative share, intervals that hold a finer solve.

use super::{Run, sheet};
use crate::cases::is_slow;
use crate::dice::Dice;
use gapwright::adapt::again::at_density;
use gapwright::model::{BhTable, Interpolation, Law, Model};
use gapwright::solve::Solution;
use gapwright::units::MU0;

/// Newton steps that the hardest laws may need.
const N_STEPS_MAX: usize = 25;

/// A monotone table with slopes from µ0 to 10⁵ µ0 in random order: corners, knees, wasp waists.
fn random_table(dice: &mut Dice) -> Law {
    let n = 2 + (8.0 * dice.uniform(0.0, 1.0)) as usize;
    let (mut h, mut b) = (vec![0.0], vec![0.0]);
    for i in 0..n {
        let step = dice.log_uniform(10.0, 1e4);
        let slope = MU0 * dice.log_uniform(1.0, 1e5).max(1.000_01);
        // The steps of B stay below 1 T, so that the energies are those of materials.
        let rise = (slope * step).min(MU0 * step + dice.uniform(0.0, 1.0));
        h.push(h[i] + step);
        b.push(b[i] + rise);
    }
    let interpolation = if dice.with(0.5) { Interpolation::Smooth } else { Interpolation::Linear };
    Law::Table(BhTable::new(h, b, interpolation).unwrap())
}

fn with_law(law: Law, current: f64) -> Model {
    let mut model = sheet("lamp_choke_saturating.toml");
    model.materials[0].law = law;
    model.windings[0].current = current;
    model
}

#[test]
fn random_monotone_tables_never_fail_and_every_interval_holds_a_finer_solve() {
    let mut dice = Dice(20_240_611);
    for case in 0..if is_slow() { 100 } else { 10 } {
        let law = random_table(&mut dice);
        let current = dice.log_uniform(0.1, 300.0);
        // Shares are asserted inside: the test profile has debug assertions.
        let coarse = Run::new(with_law(law.clone(), current), 1e-2);
        let fine = Run::new(with_law(law, current), 1e-3);
        let (a, b) = (&coarse.outcome.bound, &fine.outcome.bound);
        assert!(coarse.outcome.reached && fine.outcome.reached, "case {case}");
        assert!(b.low <= a.high && a.low <= b.high, "case {case}: {} {}", a.low, a.high);
        let middle = 0.5 * (b.low + b.high);
        assert!(a.low <= middle && middle <= a.high, "case {case}: {middle}");
        for round in fine.outcome.rounds.iter().chain(&coarse.outcome.rounds) {
            assert!(round.effort.n_newton_steps <= N_STEPS_MAX, "case {case}: {round:?}");
        }
    }
}

#[test]
fn newton_converges_far_beyond_saturation_from_any_start() {
    let mut dice = Dice(7);
    for name in ["lamp_choke_saturating.toml", "saturating_choke.toml", "chamfered_tip.toml"] {
        let mut run = Run::new(sheet(name), 1e-2);
        // The knee is at a few amperes: 100 × beyond it.
        for factor in [1.0, 10.0, 100.0] {
            let density: Vec<f64> =
                run.outline.regions.iter().map(|r| r.current_density * factor).collect();
            let zero = |field: &[f64]| vec![0.0; field.len()];
            let solution = run.outcome.solution.clone();
            let mut noise = |field: &[f64]| -> Vec<f64> {
                field.iter().map(|_| 1e-3 * (dice.uniform(0.0, 1.0) - 0.5)).collect()
            };
            let times = |field: &[f64], f: f64| field.iter().map(|v| f * v).collect::<Vec<f64>>();
            let starts = [
                ("zero", [zero(&solution.vertex), zero(&solution.edge)]),
                ("own", [solution.vertex.clone(), solution.edge.clone()]),
                ("reversed", [times(&solution.vertex, -100.0), times(&solution.edge, -100.0)]),
                ("noise", [noise(&solution.vertex), noise(&solution.edge)]),
            ];
            for (start, [vertex, edge]) in starts {
                let start_field = Solution { vertex, edge };
                let again = at_density(&mut run.outcome, &density, &start_field, 1e-4)
                    .unwrap_or_else(|e| panic!("{name}, {factor} times, from {start}: {e}"));
                let n_steps = again.effort.n_newton_steps;
                assert!(n_steps <= N_STEPS_MAX, "{name}, {factor} times, {start}: {n_steps} steps");
            }
        }
    }
}

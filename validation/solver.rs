//! The one place that touches the library: a [`Model`] in, its guaranteed coenergy out.

use gapwright::model::{Accuracy, Model, Point, Probe};
use gapwright::results::{self, ProbePoint};
use gapwright::units::{Henry, Joule};
use gapwright::{adapt, geometry};

/// Bound on the unknowns of any validation case: far above what the narrowest interval here takes.
const N_UNKNOWNS_MAX: usize = 400_000;

/// What the library guarantees about one model.
#[derive(Debug, Clone, PartialEq)]
pub struct Solved {
    /// Guaranteed ends of the coenergy [J].
    pub low: Joule,
    pub high: Joule,
    /// The wanted width was reached.
    pub reached: bool,
    pub n_unknowns: usize,
    /// Ends after every round, first to last.
    pub rounds: Vec<[Joule; 2]>,
}

impl Solved {
    /// Middle of the interval [J].
    pub fn coenergy(&self) -> Joule {
        0.5 * (self.low + self.high)
    }

    /// The guaranteed ends as inductances 2W'/I² [H] for a given current.
    pub fn inductance(&self, current: f64) -> [Henry; 2] {
        [self.low, self.high].map(|end| 2.0 * end / (current * current))
    }

    /// The exact coenergy lies within the ends.
    pub fn holds(&self, exact: Joule) -> bool {
        self.low <= exact && exact <= self.high
    }

    /// (high − low)/(exact − low): the interval over the true error of the field that was computed.
    pub fn efficiency(&self, exact: Joule) -> f64 {
        (self.high - self.low) / (exact - self.low)
    }
}

/// Solves `model` to a relative width `interval` of the coenergy (linear: of the inductance).
pub fn solve(model: &Model, interval: f64) -> Result<Solved, String> {
    let accuracy = Accuracy { interval, n_unknowns_max: N_UNKNOWNS_MAX };
    let model = Model { accuracy, ..model.clone() };
    let outline = geometry::outline(&model).map_err(|fault| fault.to_string())?;
    let outcome = adapt::run(&model, &outline, &mut |_| {}).map_err(|error| error.to_string())?;
    let rounds = outcome.rounds.iter().map(|round| [round.low, round.high]).collect();
    let n_unknowns = outcome.rounds.last().map_or(0, |round| round.n_unknowns);
    Ok(Solved {
        low: outcome.bound.low,
        high: outcome.bound.high,
        reached: outcome.reached,
        n_unknowns,
        rounds,
    })
}

/// [`solve`], where an interval that was not reached is a failure.
pub fn solve_wholly(model: &Model, interval: f64) -> Result<Solved, String> {
    let solved = solve(model, interval)?;
    if solved.reached {
        return Ok(solved);
    }
    let width = (solved.high - solved.low) / solved.coenergy();
    let Solved { n_unknowns, rounds, .. } = &solved;
    Err(format!("{} rounds, {n_unknowns} unknowns: width {width:.1e}", rounds.len()))
}

/// The field at `points`, through the probes that a user has.
pub fn probed(model: &Model, interval: f64, points: &[Point]) -> Result<Vec<ProbePoint>, String> {
    let accuracy = Accuracy { interval, n_unknowns_max: N_UNKNOWNS_MAX };
    let probe = |at: &Point| Probe { name: String::new(), from: *at, to: *at, n_points: 1 };
    let probes = points.iter().map(probe).collect();
    let model = Model { accuracy, probes, ..model.clone() };
    let outline = geometry::outline(&model).map_err(|fault| fault.to_string())?;
    let outcome = adapt::run(&model, &outline, &mut |_| {}).map_err(|error| error.to_string())?;
    let found = results::collect(&model, &outline, &outcome);
    let points: Vec<ProbePoint> = found.probes.into_iter().flat_map(|probe| probe.points).collect();
    if found.reached { Ok(points) } else { Err("the interval was not reached".to_owned()) }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::builders;

    #[test]
    fn the_low_end_rises_with_every_round() {
        // Bisection nests the spaces; the algebraic error may take 3e-4 of the interval.
        for model in
            [builders::r1(), builders::r5(1500.0, 60.0, 1.0), builders::r7(), builders::r8()]
        {
            let solved = solve(&model, 1e-4).unwrap();
            assert!(solved.rounds.len() > 4);
            for pair in solved.rounds.windows(2) {
                assert!(
                    pair[0][0] < pair[1][0],
                    "low end fell from {} to {}",
                    pair[0][0],
                    pair[1][0]
                );
            }
        }
    }

    #[test]
    fn every_round_holds_the_last_interval() {
        let solved = solve(&builders::r8(), 1e-4).unwrap();
        for [low, high] in &solved.rounds {
            assert!(*low <= solved.coenergy() && solved.coenergy() <= *high);
        }
    }
}

//! The mesh of the study and the fields found on it: solves at any current from the nearest known ones.

use super::{Row, Work, densities, is_narrow};
use crate::adapt::again::{Again, adopt, at_density, linkage_width, rate_step, scaled};
use crate::adapt::{self, Outcome};
use crate::fem::Rules;
use crate::geometry::Outline;
use crate::mesh::first_mesh;
use crate::model::{Accuracy, Model};
use crate::results::linkage::{load, tangent};
use crate::results::sample::Sampler;
use crate::results::{Guaranteed, parts, single_carrier};
use crate::solve::Solution;
use crate::sparse::cg::dot;
use crate::study::StudyError;
use crate::units::{Ampere, Henry, Joule};
use std::f64::consts::TAU;

/// A point that needs a finer mesh gets one for this share of the wanted interval, so that its neighbours need no
/// further one.
const REFINE_SHARE: f64 = 0.7;

/// Ends of λ wider than this many times the best width 2√η are worth two more solves.
const N_BEST_WIDTHS_MAX: f64 = 1.5;

/// Outcome, loads and known fields.
pub struct Bench<'a> {
    model: &'a Model,
    outline: &'a Outline,
    pub outcome: Outcome,
    /// Current that the outcome stands at.
    pub current: Ampere,
    /// Current densities for 1 A with all others scaled along, and for 1 A in the winding alone.
    along: Vec<f64>,
    alone: Vec<f64>,
    /// Their loads on the present mesh.
    load_along: Vec<f64>,
    load_alone: Vec<f64>,
    /// Fields on the present mesh, by rising current.
    known: Vec<(Ampere, Solution)>,
    pub work: Work,
}

impl<'a> Bench<'a> {
    /// The rounds at the highest current.
    pub fn new(
        model: &'a Model,
        outline: &'a Outline,
        winding: usize,
        to: Ampere,
    ) -> Result<Bench<'a>, StudyError> {
        let [along, alone] = densities(model, outline, winding);
        let mut coefficients = adapt::coefficients(model, &outline.regions);
        coefficients.current_density = along.iter().map(|j| j * to).collect();
        let mesh = first_mesh(outline).map_err(adapt::AdaptError::Mesh)?;
        let start = Solution::zero(&mesh);
        let rules = Rules::working();
        let outcome =
            adapt::rounds(mesh, coefficients, start, &rules, &model.accuracy, &mut |_| {})?;
        let mut work = Work { n_solves: outcome.rounds.len(), ..Work::default() };
        for round in &outcome.rounds {
            work.n_newton_steps += round.effort.n_newton_steps;
            work.n_cg_iterations += round.effort.n_cg_iterations;
        }
        let (load_along, load_alone, known) = (Vec::new(), Vec::new(), Vec::new());
        let mut bench = Bench {
            model,
            outline,
            outcome,
            current: to,
            along,
            alone,
            load_along,
            load_alone,
            known,
            work,
        };
        bench.on_new_mesh();
        Ok(bench)
    }

    /// Forgets what belonged to the old mesh and keeps the outcome's own field.
    fn on_new_mesh(&mut self) {
        self.load_along = load(&self.outcome, &self.along);
        self.load_alone = load(&self.outcome, &self.alone);
        self.known = vec![(self.current, self.outcome.solution.clone())];
        self.work.n_meshes += 1;
    }

    /// The row at `current`, solved on the present mesh, and on finer ones until its interval is narrow enough.
    pub fn row(&mut self, current: Ampere) -> Result<Row, StudyError> {
        let steps = self.move_to(current)?;
        if 0.0 < current && !self.is_narrow() {
            let n_rounds = self.outcome.rounds.len();
            let (rules, wanted) = (Rules::working(), self.model.accuracy);
            let narrower = Accuracy { interval: REFINE_SHARE * wanted.interval, ..wanted };
            adapt::refine(&mut self.outcome, &rules, &narrower, &mut |_| {})?;
            if n_rounds < self.outcome.rounds.len() {
                self.on_new_mesh();
            }
        }
        self.read(steps)
    }

    /// Was this row solved on an older mesh than the present one?
    pub fn is_stale(&self, row: &Row) -> bool {
        row.n_unknowns != self.outcome.space.n_dofs
    }

    fn is_narrow(&self) -> bool {
        let bound = &self.outcome.bound;
        is_narrow(bound.low, bound.high, self.model.accuracy.interval)
    }

    /// Moves the outcome to `current`; returns the Newton steps.
    pub fn move_to(&mut self, current: Ampere) -> Result<usize, StudyError> {
        let density: Vec<f64> = self.along.iter().map(|j| j * current).collect();
        let again = self.solve(current, &density)?;
        let steps = again.effort.n_newton_steps;
        adopt(&mut self.outcome, &density, again);
        self.current = current;
        Ok(steps)
    }

    fn solve(&mut self, current: Ampere, density: &[f64]) -> Result<Again, StudyError> {
        let start = self.start(current);
        let width = linkage_width(self.model.accuracy.interval);
        let again = at_density(&mut self.outcome, density, &start, width)
            .map_err(|source| StudyError::Solve { current, source })?;
        self.work.n_solves += 1;
        self.work.n_newton_steps += again.effort.n_newton_steps;
        self.work.n_cg_iterations += again.effort.n_cg_iterations;
        let at = self.known.partition_point(|(known, _)| *known < current);
        self.known.insert(at, (current, again.solution.clone()));
        Ok(again)
    }

    /// Between two known currents the straight line through their fields, elsewhere the nearest one scaled.
    fn start(&self, current: Ampere) -> Solution {
        let above = self.known.partition_point(|(known, _)| *known <= current);
        match (above.checked_sub(1).map(|k| &self.known[k]), self.known.get(above)) {
            (Some((a, low)), Some((b, high))) => {
                let share = (current - a) / (b - a);
                let mix = |low: &[f64], high: &[f64]| -> Vec<f64> {
                    low.iter().zip(high).map(|(l, h)| l + share * (h - l)).collect()
                };
                Solution {
                    vertex: mix(&low.vertex, &high.vertex),
                    edge: mix(&low.edge, &high.edge),
                }
            }
            // Nothing is known below: 0 A has the field 0.
            (None, Some((b, field))) => scaled(field, current / b),
            (Some((a, field)), _) if 0.0 < *a => scaled(field, current / a),
            _ => scaled(&self.outcome.solution, 0.0),
        }
    }

    /// λ of the winding in the outcome's field [Wb].
    fn flux_linkage(&self) -> f64 {
        let solution = &self.outcome.solution;
        TAU * dot(&self.load_alone, &self.outcome.space.restrict(&solution.vertex, &solution.edge))
    }

    /// What carries λ of ψ_h, the low end where laws are constant, to the middle of the interval as `solve` tells it; 1 where
    /// something saturates, for there the middle belongs to the coenergy alone.
    fn lift(&self) -> f64 {
        match self.outcome.rounds.last() {
            Some(round) if self.outcome.coefficients.is_linear() => {
                0.5 * (round.low + round.high) / round.low
            }
            _ => 1.0,
        }
    }

    /// dλ/dI along the scale at the outcome's field [H].
    fn slope(&self) -> Result<Henry, StudyError> {
        tangent(&self.outcome, &self.outcome.elements, &self.load_alone, &self.load_along)
            .map_err(|source| StudyError::Tangent { current: self.current, source })
    }

    /// dλ/dI at `current`, for finding roots; the field is kept as a start value.
    pub fn slope_at(&mut self, current: Ampere) -> Result<Henry, StudyError> {
        self.move_to(current)?;
        self.slope()
    }

    fn read(&self, n_newton_steps: usize) -> Result<Row, StudyError> {
        let (current, bound) = (self.current, &self.outcome.bound);
        let lift = self.lift();
        let (flux_linkage, incremental) = (lift * self.flux_linkage(), lift * self.slope()?);
        let sampler = Sampler::new(self.outline, &self.outcome);
        let exceeded = parts::exceedances(&sampler, &self.outcome.solution);
        Ok(Row {
            current,
            flux_linkage,
            flux_linkage_ends: None,
            apparent: if current == 0.0 { incremental } else { flux_linkage / current },
            incremental,
            half_square: 0.5 * flux_linkage * current,
            coenergy: Guaranteed {
                value: 0.5 * (bound.low + bound.high),
                low: bound.low,
                high: bound.high,
            },
            exceeded: exceeded.iter().map(|(_, b)| b[1]).collect(),
            n_unknowns: self.outcome.space.n_dofs,
            n_newton_steps,
        })
    }

    /// Names of the parts in the order of [`Row::exceeded`].
    pub fn part_names(&self) -> Vec<String> {
        let sampler = Sampler::new(self.outline, &self.outcome);
        let parts = parts::exceedances(&sampler, &self.outcome.solution);
        parts.into_iter().map(|(name, _)| name).collect()
    }

    /// Fills in the guaranteed ends of λ from the rows' own coenergies; one solve above the highest current gives the
    /// last row its upper end, and rows that stand too far from their neighbours get two of their own.
    pub fn linkage_ends(&mut self, rows: &mut [Row]) -> Result<(), StudyError> {
        let Some(last) = rows.last() else { return Ok(()) };
        if single_carrier(self.model).is_none() {
            return Ok(());
        }
        let width = |row: &Row| (row.coenergy.high - row.coenergy.low) / row.coenergy.value;
        let mut support: Vec<(Ampere, [Joule; 2])> =
            rows.iter().map(|r| (r.current, [r.coenergy.low, r.coenergy.high])).collect();
        let beyond = last.current * (1.0 + rate_step(width(last)));
        support.push(self.support(beyond)?);
        for row in rows.iter().skip(1) {
            let at = support.partition_point(|(current, _)| *current < row.current);
            let [low, high] = ends(&support, at);
            // With neighbours in the best places the ends are 2√η apart.
            if N_BEST_WIDTHS_MAX * 2.0 * width(row).sqrt() * row.flux_linkage < high - low {
                for side in [-1.0, 1.0] {
                    let near = row.current * (1.0 + side * rate_step(width(row)));
                    let at = support.partition_point(|(current, _)| *current < near);
                    support.insert(at, self.support(near)?);
                }
            }
        }
        for row in rows.iter_mut() {
            let at = support.partition_point(|(current, _)| *current < row.current);
            row.flux_linkage_ends = Some(ends(&support, at));
        }
        Ok(())
    }

    /// A coenergy that no row shows: one more point that chords may end at.
    fn support(&mut self, current: Ampere) -> Result<(Ampere, [Joule; 2]), StudyError> {
        let density: Vec<f64> = self.along.iter().map(|j| j * current).collect();
        let bound = self.solve(current, &density)?.bound;
        Ok((current, [bound.low, bound.high]))
    }
}

/// Ends of dW'/dI at point i of `support` (current, safe ends of W'), by rising current.
///
/// W'(I) is convex: every chord from the point to a lower current is below its slope there and every chord to a higher
/// one above, each W' taken at its safe end. At 0 A the slope is 0, since the law is odd.
pub fn ends(support: &[(Ampere, [Joule; 2])], i: usize) -> [f64; 2] {
    let (current, [low, _]) = support[i];
    if current == 0.0 {
        return [0.0; 2];
    }
    let below = support[..i].iter().map(|(j, [_, high])| (low - high) / (current - j));
    let above = support[i + 1..].iter().map(|(j, [_, high])| (high - low) / (j - current));
    [below.fold(0.0, f64::max), above.fold(f64::INFINITY, f64::min)]
}

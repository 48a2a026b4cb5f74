//! Where the points go, and where the incremental inductance has fallen by a given share.

use super::bench::Bench;
use super::{FALLS, Fall, Row, Wish};
use crate::study::StudyError;
use crate::units::{Ampere, Henry};

/// The share of the rows that are spaced evenly; the others go where the curve bends.
const EVEN_SHARE: f64 = 1.0 / 3.0;
/// No interval is cut into pieces shorter than this share of the highest current.
const INTERVAL_MIN: f64 = 1e-3;
/// Relative accuracy of the currents in [`Fall`]; the discretisation error of the curve is larger.
const ROOT_ACCURACY: f64 = 1e-4;
/// Steps of the root search: bisection alone would need 14 for 1e-4.
const N_ROOT_STEPS_MAX: usize = 40;

/// Rows from I → 0 to `wish.to`: an even start, then bisection of the interval where straight lines fit worst.
pub fn rows(
    bench: &mut Bench,
    wish: &Wish,
    progress: &mut dyn FnMut(usize, usize),
) -> Result<Vec<Row>, StudyError> {
    let n_points = wish.n_points.max(3);
    let n_even = ((EVEN_SHARE * n_points as f64) as usize).clamp(2, n_points - 1);
    let step = wish.to / n_even as f64;
    // The lowest current first: it asks for another mesh than the highest, whose rounds are done already.
    let mut rows = vec![bench.row(step)?];
    for k in (2..=n_even).rev() {
        // The last one is `to` itself, not a rounding beside it.
        rows.push(bench.row(if k == n_even { wish.to } else { step * k as f64 })?);
        progress(rows.len(), n_points);
    }
    rows.push(bench.row(0.0)?);
    rows.sort_by(|a, b| a.current.total_cmp(&b.current));
    renew(bench, &mut rows)?;
    progress(rows.len(), n_points);
    while rows.len() < n_points {
        let Some(k) = worst(&rows, INTERVAL_MIN * wish.to) else { break };
        let middle = 0.5 * (rows[k].current + rows[k + 1].current);
        rows.insert(k + 1, bench.row(middle)?);
        renew(bench, &mut rows)?;
        progress(rows.len(), n_points);
    }
    Ok(rows)
}

/// How often the rows are solved again before different meshes are put up with.
const N_RENEWALS_MAX: usize = 3;

/// Solves every row that stands on an older mesh again on the present one: differences between rows then tell of the
/// current, not of the mesh.
fn renew(bench: &mut Bench, rows: &mut [Row]) -> Result<(), StudyError> {
    for _ in 0..N_RENEWALS_MAX {
        if !rows.iter().any(|row| bench.is_stale(row)) {
            break;
        }
        for row in rows.iter_mut().rev() {
            if bench.is_stale(row) {
                *row = bench.row(row.current)?;
            }
        }
    }
    Ok(())
}

/// Misfits below this share of the largest value are no bends that a plot could show.
const MISFIT_MIN: f64 = 1e-3;
/// Algebraic error of λ as a share of the coenergy's interval, see `linkage_width`.
const LINKAGE_REST: f64 = 0.02;

/// Index of the interval in which straight lines through the rows miss λ or the incremental inductance most; the longest
/// one where they miss nowhere.
fn worst(rows: &[Row], length_min: Ampere) -> Option<usize> {
    let scale_slope = rows.iter().map(|r| r.incremental).fold(0.0, f64::max);
    let last = rows.last()?;
    let width = (last.coenergy.high - last.coenergy.low) / last.coenergy.value;
    let length = |k: usize| rows[k + 1].current - rows[k].current;
    // What the rests of two λ make up in 3/2·|Δλ/h − …|: with constant laws there is nothing else.
    let rest = |k: usize| 3.0 * LINKAGE_REST * width * last.current / length(k);
    let error = |k: usize| {
        let [by_linkage, by_slope] = misfit(&rows[k], &rows[k + 1]);
        let error = (by_linkage / last.flux_linkage).max(by_slope / scale_slope);
        if error < MISFIT_MIN.max(rest(k)) { 0.0 } else { error }
    };
    (0..rows.len() - 1).filter(|&k| 2.0 * length_min <= length(k)).max_by(|&a, &b| {
        let by_length = length(a).total_cmp(&length(b));
        error(a).total_cmp(&error(b)).then(by_length).then(b.cmp(&a))
    })
}

/// How far λ and dλ/dI leave the chord at the middle of an interval, from their values and slopes at its ends.
///
/// λ by its cubic Hermite interpolant: h(L_a − L_b)/8. dλ/dI by the parabola with its ends and its mean, which the
/// rows know exactly, (λ_b − λ_a)/h: 3/2 of mean less trapezoid. A sixth of the drop is added: a drop with the shape of
/// an S has no such misfit, and yet a polygon misses it.
fn misfit(a: &Row, b: &Row) -> [f64; 2] {
    let length = b.current - a.current;
    let mean = (b.flux_linkage - a.flux_linkage) / length;
    let drop = (a.incremental - b.incremental).abs();
    let parabola = 1.5 * (mean - 0.5 * (a.incremental + b.incremental)).abs();
    [length * drop / 8.0, parabola + drop / 6.0]
}

/// The lowest currents at which the incremental inductance has fallen by each of [`FALLS`].
pub fn falls(bench: &mut Bench, rows: &[Row]) -> Result<Vec<Fall>, StudyError> {
    let Some(first) = rows.first() else { return Ok(Vec::new()) };
    let mut falls = Vec::with_capacity(FALLS.len());
    for share in FALLS {
        let wanted = (1.0 - share) * first.incremental;
        let crossing = rows.windows(2).find(|pair| pair[1].incremental < wanted);
        let current = match crossing {
            Some(pair) => Some(root(bench, wanted, [&pair[0], &pair[1]])?),
            None => None,
        };
        falls.push(Fall { share, current });
    }
    Ok(falls)
}

/// The current between two rows at which the incremental inductance is `wanted`: the Illinois form of regula falsi.
///
/// Source: M. Dowell, P. Jarratt, BIT 11 (1971) 168 (from memory).
fn root(bench: &mut Bench, wanted: Henry, [a, b]: [&Row; 2]) -> Result<Ampere, StudyError> {
    let (mut low, mut high) = (a.current, b.current);
    let (mut above, mut below) = (a.incremental - wanted, b.incremental - wanted);
    // +1 or −1 when the last step moved the low or the high end.
    let mut side = 0;
    let mut current = high;
    for _ in 0..N_ROOT_STEPS_MAX {
        let before = current;
        current = (low * below - high * above) / (below - above);
        if (current - before).abs().min(high - low) <= ROOT_ACCURACY * high {
            break;
        }
        let value = bench.slope_at(current)? - wanted;
        if value < 0.0 {
            (high, below) = (current, value);
            above *= if side == -1 { 0.5 } else { 1.0 };
            side = -1;
        } else {
            (low, above) = (current, value);
            below *= if side == 1 { 0.5 } else { 1.0 };
            side = 1;
        }
    }
    Ok(current)
}

//! Points where several shapes meet: angles too sharp to be meshed, fields too singular to be resolved.
//!
//! Near a point where sectors of permeability µ_k meet, ψ behaves like ρ^λ and the energy within ρ like ρ^2λ. Parts that touch
//! only in a point make λ small (two squares of permeability µ: λ = (4/π) atan(1/√µ)); then the energy sits at distances that
//! double precision cannot tell from zero, and no interval closes.

use super::drawing::Drawing;
use super::fault::{fault, place};
use super::plane::{Plane, key_of};
use crate::model::{Fault, Law, Model, Point};
use std::f64::consts::{PI, TAU};

/// Smallest angle between two borders [rad]. Measured on a wedge of permeability 2000: at 1.1e-4 an interval of 1 % takes
/// 3 600 unknowns, at 1.1e-5 it does not close with 200 000.
const ANGLE_MIN: f64 = 1e-4;

/// Decades of the distance over which the energy must fall to the wanted interval: what is refused never closes. Measured on
/// two squares beside a coil, at exponents just above: 1e-2, 1e-3 and 1e-4 close. Where the point is in the flux's way fewer
/// decades are too many; the rounds then end at triangles of rounding size, and a note names the point.
const N_DECADES: f64 = 14.0;

/// Largest exponent that is looked for: energies like ρ^0.5 converge in a few rounds. Where the permeability rises to one
/// peak only on the way round a point, every exponent is larger (M. Petzoldt, Z. Anal. Anwend. 20 (2001) 431; from memory,
/// and tested below).
const EXPONENT_MAX: f64 = 0.25;

/// Steps of the search up to [`EXPONENT_MAX`]; a refusal depends on the exponent's first two digits at most.
const N_STEPS: usize = 250;

/// One shape at a point: the directions in which its border leaves and arrives [rad], its interior between them.
#[derive(Debug, Clone, Copy)]
struct Sector {
    shape: usize,
    from: f64,
    to: f64,
}

/// Refuses points that no mesh can do justice to.
///
/// # Errors
/// Two borders that meet under less than [`ANGLE_MIN`]; sectors whose exponent keeps the wanted interval from closing.
pub(super) fn check(model: &Model, drawing: &Drawing, plane: &Plane) -> Result<(), Fault> {
    let mut sectors: Vec<Vec<Sector>> = vec![Vec::new(); plane.points.len()];
    for (shape, border) in plane.borders.iter().enumerate() {
        let n = border.len();
        for i in 0..n {
            let ids = [border[(i + n - 1) % n], border[i], border[(i + 1) % n]];
            let [before, at, after] = ids.map(|id| plane.points[id as usize]);
            let sector = Sector { shape, from: direction(at, after), to: direction(at, before) };
            sectors[ids[1] as usize].push(sector);
        }
    }
    for (sectors, &at) in sectors.iter().zip(&plane.points) {
        check_angles(drawing, sectors, at)?;
        check_exponent(model, drawing, sectors, at)?;
    }
    Ok(())
}

/// Direction from one point to another [rad], in [0, 2π).
fn direction(from: Point, to: Point) -> f64 {
    (to.z - from.z).atan2(to.r - from.r).rem_euclid(TAU)
}

/// Counter-clockwise angle from one direction to another, in (0, 2π].
fn turn(from: f64, to: f64) -> f64 {
    let angle = (to - from).rem_euclid(TAU);
    if angle == 0.0 { TAU } else { angle }
}

/// Angle of two borders that are one line (a shared edge) [rad]: far above rounding, far below [`ANGLE_MIN`].
const SAME: f64 = 1e-12;

fn check_angles(drawing: &Drawing, sectors: &[Sector], at: Point) -> Result<(), Fault> {
    let mut lines: Vec<(f64, usize)> =
        sectors.iter().flat_map(|s| [(s.from, s.shape), (s.to, s.shape)]).collect();
    if at.r == 0.0 && !lines.is_empty() {
        // The axis is a border as well.
        lines.extend([(0.5 * PI, sectors[0].shape), (1.5 * PI, sectors[0].shape)]);
    }
    lines.sort_by(|a, b| a.0.total_cmp(&b.0).then(a.1.cmp(&b.1)));
    for (i, &(from, first)) in lines.iter().enumerate() {
        let (to, second) = lines[(i + 1) % lines.len()];
        let angle = turn(from, to);
        if (SAME..ANGLE_MIN).contains(&angle) {
            let shape = &drawing.shapes[first.max(second)];
            let message = format!(
                "borders of {} meet under {:.1e}° at {}; the least that can be meshed is {:.1e}°",
                shape.label,
                angle.to_degrees(),
                place(at),
                ANGLE_MIN.to_degrees()
            );
            let help = "cut the tip off, or let the two borders run along one line";
            let mut it = fault(shape.subject, key_of(shape.subject), message, help);
            it.other = (first != second).then(|| drawing.shapes[first.min(second)].subject);
            return Err(it);
        }
    }
    Ok(())
}

fn check_exponent(
    model: &Model,
    drawing: &Drawing,
    sectors: &[Sector],
    at: Point,
) -> Result<(), Fault> {
    if sectors.len() < 2 || at.r == 0.0 {
        return Ok(());
    }
    let around = all_round(sectors, |shape| permeability(model, drawing, shape));
    if n_peaks(&around) < 2 {
        return Ok(());
    }
    let least = (1.0 / model.accuracy.interval).log10() / (2.0 * N_DECADES);
    let Some(exponent) = exponent(&around).filter(|&exponent| exponent < least) else {
        return Ok(());
    };
    // Of the shapes there that differ from air, the last is blamed for the first.
    let shapes = |pick: fn(usize, usize) -> usize| {
        let all = sectors.iter().map(|s| s.shape);
        let solid = all.filter(|&shape| permeability(model, drawing, shape) != 1.0);
        &drawing.shapes[solid.reduce(pick).unwrap_or(sectors[0].shape)]
    };
    let (first, last) = (shapes(usize::min), shapes(usize::max));
    let message = format!(
        "{} and {} touch only in a point, {}: the energy there goes with the {:.3}th power of the distance, which no mesh resolves \
         to the wanted interval",
        first.label,
        last.label,
        place(at),
        2.0 * exponent
    );
    let help = "let them share a piece of border, or leave a gap between them";
    let mut it = fault(last.subject, key_of(last.subject), message, help);
    it.other = Some(first.subject);
    Err(it)
}

/// Relative permeability of a shape near a singular point, where a material that saturates is no better than air.
fn permeability(model: &Model, drawing: &Drawing, shape: usize) -> f64 {
    let region = &drawing.regions[drawing.shapes[shape].region.0 as usize];
    match region.material.map(|id| &model.materials[id.0 as usize].law) {
        Some(Law::Constant { permeability }) => *permeability,
        Some(_) => 1.0,
        None => region.permeability,
    }
}

/// (angle, permeability) all the way round a point, air between the sectors.
fn all_round(sectors: &[Sector], permeability: impl Fn(usize) -> f64) -> Vec<(f64, f64)> {
    let mut sorted = sectors.to_vec();
    sorted.sort_by(|a, b| a.from.total_cmp(&b.from));
    let mut around = Vec::new();
    for (i, sector) in sorted.iter().enumerate() {
        around.push((turn(sector.from, sector.to), permeability(sector.shape)));
        let air = turn(sector.to, sorted[(i + 1) % sorted.len()].from);
        // A whole turn is none: two shapes that fill everything.
        if air < TAU - SAME && air > SAME {
            around.push((air, 1.0));
        }
    }
    around
}

/// How often the permeability falls again after it has risen, on the way round a point.
fn n_peaks(around: &[(f64, f64)]) -> usize {
    let mut levels: Vec<f64> = around.iter().map(|&(_, permeability)| permeability).collect();
    levels.dedup();
    if 1 < levels.len() && levels.first() == levels.last() {
        levels.pop();
    }
    let n = levels.len();
    (0..n)
        .filter(|&i| levels[(i + n - 1) % n] < levels[i] && levels[(i + 1) % n] < levels[i])
        .count()
}

/// Smallest exponent λ < [`EXPONENT_MAX`] of a field ρ^λ u(φ) in sectors (angle, permeability) all round a point, if any.
///
/// In each sector u'' + λ²u = 0; u and u'/µ (ψ and the tangential H) are continuous. The product of the sectors' transfer
/// matrices has determinant 1, so a solution closes round the point where its trace is 2. At λ = 0 the trace is 2; it falls
/// first, and where it comes back to 2 is the exponent.
fn exponent(around: &[(f64, f64)]) -> Option<f64> {
    let excess = |exponent: f64| {
        let mut m = [[1.0, 0.0], [0.0, 1.0]];
        for &(angle, permeability) in around {
            let (s, c) = (exponent * angle).sin_cos();
            let t = [[c, s * permeability], [-s / permeability, c]];
            m = [0, 1].map(|i| [0, 1].map(|j| t[i][0] * m[0][j] + t[i][1] * m[1][j]));
        }
        m[0][0] + m[1][1] - 2.0
    };
    (1..=N_STEPS)
        .map(|step| EXPONENT_MAX * step as f64 / N_STEPS as f64)
        .find(|&exponent| excess(exponent) >= 0.0)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_checkerboard_has_the_known_exponent() {
        for permeability in [50.0_f64, 300.0, 2000.0, 1.0 / 300.0] {
            let quarter = 0.5 * PI;
            let around =
                [(quarter, permeability), (quarter, 1.0), (quarter, permeability), (quarter, 1.0)];
            let contrast = permeability.max(1.0 / permeability);
            // Kellogg 1975, Appl. Anal. 4: λ = (4/π) atan(1/√contrast).
            let known = 4.0 / PI * (1.0 / contrast.sqrt()).atan();
            let step = EXPONENT_MAX / N_STEPS as f64;
            let found = exponent(&around).unwrap();
            assert!(known <= found && found < known + step, "{found} {known}");
        }
    }

    #[test]
    fn a_permeability_with_one_peak_has_no_exponent_up_to_a_quarter() {
        // Numbers in [0, 1) by a linear congruence (Knuth's MMIX constants).
        let mut state = 1_u64;
        let mut random = || {
            state = state
                .wrapping_mul(6_364_136_223_846_793_005)
                .wrapping_add(1_442_695_040_888_963_407);
            (state >> 11) as f64 / (1_u64 << 53) as f64
        };
        for _ in 0..3000 {
            let n = 3 + (5.0 * random()) as usize;
            let angles: Vec<f64> = (0..n).map(|_| 0.01 + random().powi(2)).collect();
            let mut levels: Vec<f64> = (0..n).map(|_| 10_f64.powf(5.0 * random())).collect();
            let (rising, falling) = levels.split_at_mut((n as f64 * random()) as usize);
            rising.sort_by(f64::total_cmp);
            falling.sort_by(|a, b| b.total_cmp(a));
            let whole: f64 = angles.iter().sum();
            let around: Vec<(f64, f64)> =
                angles.iter().map(|a| TAU * a / whole).zip(levels).collect();
            assert!(n_peaks(&around) < 2, "{around:?}");
            assert_eq!(exponent(&around), None, "{around:?}");
        }
    }

    #[test]
    fn peaks_are_counted_once_round_the_point() {
        let count = |levels: &[f64]| {
            let around: Vec<(f64, f64)> = levels.iter().map(|&level| (1.0, level)).collect();
            n_peaks(&around)
        };
        assert_eq!(count(&[1.0]), 0);
        assert_eq!(count(&[1.0, 2.0]), 1);
        assert_eq!(count(&[2.0, 1.0, 2.0]), 1);
        assert_eq!(count(&[2.0, 1.0, 3.0, 3.0, 1.0, 2.0]), 2);
        assert_eq!(count(&[2.0, 1.0, 2.0, 1.0]), 2);
    }

    #[test]
    fn ordinary_corners_have_no_small_exponent() {
        for around in [
            vec![(0.5 * PI, 1e5), (1.5 * PI, 1.0)],
            vec![(0.1, 1e5), (TAU - 0.1, 1.0)],
            vec![(PI, 1e5), (0.5 * PI, 1.0), (0.5 * PI, 10.0)],
            vec![(TAU, 1.0)],
        ] {
            assert_eq!(exponent(&around), None, "{around:?}");
        }
    }
}

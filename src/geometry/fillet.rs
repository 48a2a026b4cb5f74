//! Rounded corners as chords.
//!
//! Chords span at most 11.25° ([`CHORDS_PER_QUARTER`]), so they leave the arc by at most
//! 1 − cos 5.625° = 0.5 % of its radius. The guaranteed interval speaks of the chords' outline.

use super::fault::mm;
use super::polygon::{cross, distance};
use crate::model::{Corner, Point};
use std::f64::consts::FRAC_PI_2;

/// Chords for a quarter turn; even, so that the quarter's middle is a corner.
pub(super) const CHORDS_PER_QUARTER: usize = 8;

/// Fillet of a window corner whose edges run along `leg` (±1 in z) and `plate` (±1 in r) away from it.
///
/// From the tangent point on the leg to the tangent point on the plate, `CHORDS_PER_QUARTER` + 1 points;
/// for radius 0 the corner alone.
pub(super) fn window_fillet(corner: Point, leg: f64, plate: f64, radius: f64) -> Vec<Point> {
    if radius == 0.0 {
        return vec![corner];
    }
    let n = CHORDS_PER_QUARTER;
    (0..=n)
        .map(|i| {
            let (along_plate, along_leg) = (1.0 - quarter_cos(i), 1.0 - quarter_cos(n - i));
            Point {
                r: corner.r + plate * radius * along_plate,
                z: corner.z + leg * radius * along_leg,
            }
        })
        .collect()
}

/// Cosine of i chords of a quarter, exact at both ends.
fn quarter_cos(i: usize) -> f64 {
    if i == CHORDS_PER_QUARTER {
        return 0.0;
    }
    (FRAC_PI_2 * i as f64 / CHORDS_PER_QUARTER as f64).cos()
}

/// Corners with their fillets replaced by chords.
///
/// A fillet of radius R at a corner with interior angle α takes R/tan(α/2) of both its edges; the takings at the two
/// ends of an edge must fit into it.
///
/// # Errors
/// The first edge that is too short for its fillets, in words.
pub(super) fn rounded(outline: &[Corner]) -> Result<Vec<Point>, String> {
    let n = outline.len();
    let takings: Vec<f64> = (0..n)
        .map(|i| {
            let (before, at, after) =
                (outline[(i + n - 1) % n].at, outline[i].at, outline[(i + 1) % n].at);
            taking(before, at, after, outline[i].fillet_radius)
        })
        .collect();
    for i in 0..n {
        let next = (i + 1) % n;
        let (edge, taken) = (distance(outline[i].at, outline[next].at), takings[i] + takings[next]);
        // Equal up to rounding is a half round end, which is meant.
        if taken > edge * (1.0 + 1e-9) {
            let corner = if outline[i].fillet_radius > 0.0 { i } else { next };
            let radius = outline[corner].fillet_radius;
            let message = format!(
                "the fillet of {} mm at corner {} does not fit: the edge from corner {} to corner {} is {} mm long and its \
                 fillets take {} mm",
                mm(radius),
                corner + 1,
                i + 1,
                next + 1,
                mm(edge),
                mm(taken)
            );
            return Err(message);
        }
    }
    let mut points = Vec::new();
    for i in 0..n {
        let (before, at, after) =
            (outline[(i + n - 1) % n].at, outline[i].at, outline[(i + 1) % n].at);
        arc(before, at, after, outline[i].fillet_radius, takings[i], &mut points);
    }
    // Fillets that meet on an edge end in one point, up to rounding.
    let size = points.iter().fold(0.0_f64, |m, p| m.max(distance(points[0], *p)));
    points.dedup_by(|a, b| distance(*a, *b) <= 1e-8 * size);
    while points.len() > 1 && distance(points[0], points[points.len() - 1]) <= 1e-8 * size {
        points.pop();
    }
    Ok(points)
}

/// Length that a fillet takes from both edges of its corner [m].
fn taking(before: Point, at: Point, after: Point, radius: f64) -> f64 {
    if radius == 0.0 {
        return 0.0;
    }
    // tan of half the turning angle, from its sine and cosine.
    let (sine, cosine) = turn(before, at, after);
    radius * sine.abs() / (1.0 + cosine)
}

/// Sine and cosine of the turning angle at a corner.
fn turn(before: Point, at: Point, after: Point) -> (f64, f64) {
    let scale = distance(before, at) * distance(at, after);
    let dot = (at.r - before.r) * (after.r - at.r) + (at.z - before.z) * (after.z - at.z);
    (cross(before, at, after) / scale, dot / scale)
}

/// Appends the chords of one corner.
fn arc(before: Point, at: Point, after: Point, radius: f64, taken: f64, points: &mut Vec<Point>) {
    let (sine, cosine) = turn(before, at, after);
    if radius == 0.0 || sine == 0.0 {
        points.push(at);
        return;
    }
    let toward = |to: Point, length: f64| {
        let t = length / distance(at, to);
        Point { r: at.r + t * (to.r - at.r), z: at.z + t * (to.z - at.z) }
    };
    let (start, end) = (toward(before, taken), toward(after, taken));
    // The centre lies to the inner side of the edge, at right angles to it.
    let side = radius * sine.signum() / distance(before, at);
    let center =
        Point { r: start.r - side * (at.z - before.z), z: start.z + side * (at.r - before.r) };
    let angle = sine.atan2(cosine);
    // A tiny excess over a whole number of chords is rounding, not another chord.
    let n = ((angle.abs() / FRAC_PI_2 * CHORDS_PER_QUARTER as f64) - 1e-6).ceil().max(1.0) as usize;
    points.push(start);
    for i in 1..n {
        let (s, c) = (angle * i as f64 / n as f64).sin_cos();
        let (dr, dz) = (start.r - center.r, start.z - center.z);
        points.push(Point { r: center.r + c * dr - s * dz, z: center.z + s * dr + c * dz });
    }
    points.push(end);
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::geometry::polygon::area;

    fn square(fillet_radius: f64) -> Vec<Corner> {
        [(1.0, 0.0), (3.0, 0.0), (3.0, 2.0), (1.0, 2.0)]
            .map(|(r, z)| Corner { at: Point { r, z }, fillet_radius })
            .to_vec()
    }

    #[test]
    fn four_full_fillets_make_a_polygon_inside_the_circle() {
        let points = rounded(&square(1.0)).unwrap();
        assert_eq!(points.len(), 4 * CHORDS_PER_QUARTER);
        let n = 4.0 * CHORDS_PER_QUARTER as f64;
        let inscribed = 0.5 * n * (2.0 * std::f64::consts::PI / n).sin();
        assert!((area(&points) - inscribed).abs() < 1e-14);
    }

    #[test]
    fn a_fillet_too_large_for_its_edge_is_refused_with_the_numbers() {
        let problem = rounded(&square(1.001)).unwrap_err();
        assert!(
            problem.contains("at corner 1 does not fit") && problem.contains("2000 mm long"),
            "{problem}"
        );
    }

    #[test]
    fn a_reentrant_corner_is_filled_and_a_window_corner_too() {
        let l = [(1.0, 0.0), (3.0, 0.0), (3.0, 1.0), (2.0, 1.0), (2.0, 2.0), (1.0, 2.0)]
            .iter()
            .map(|&(r, z)| Corner {
                at: Point { r, z },
                fillet_radius: if (r, z) == (2.0, 1.0) { 0.5 } else { 0.0 },
            })
            .collect::<Vec<_>>();
        let points = rounded(&l).unwrap();
        assert!(
            area(&points) > 3.0
                && area(&points) < 3.0 + 0.25 * (1.0 - std::f64::consts::FRAC_PI_4) * 1.1
        );
        let fillet = window_fillet(Point { r: 2.0, z: 1.0 }, 1.0, 1.0, 0.5);
        assert_eq!(fillet[0], Point { r: 2.0, z: 1.5 });
        assert_eq!(fillet[CHORDS_PER_QUARTER], Point { r: 2.5, z: 1.0 });
        for q in &fillet {
            assert!((distance(*q, Point { r: 2.5, z: 1.5 }) - 0.5).abs() < 1e-15);
        }
    }
}

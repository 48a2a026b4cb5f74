//! Moves free vertices of bad triangles so that the smallest angle round them grows.
//!
//! Next to the cap's facets, which cannot be split, refinement sometimes has no place for the vertex that it wants; there a
//! small move does what no new vertex can. Triangles, borders and the outline's points stay as they are.

use super::size::{ANGLE_MIN, Measures};
use crate::geometry::Point;

/// Sweeps over all bad triangles; the gain after some is below a tenth of a degree.
const N_SWEEPS: usize = 6;

/// Halvings of the step of one vertex' search.
const N_HALVINGS: usize = 6;

/// Moves vertices that `is_free` until no bad triangle's smallest angle grows any more.
pub(super) fn smooth(points: &mut [Point], triangles: &[[u32; 3]], is_free: &[bool]) {
    let mut bad = bad_triangles(points, triangles);
    if bad.is_empty() {
        return;
    }
    let mut stars: Vec<Vec<u32>> = vec![Vec::new(); points.len()];
    for (t, triangle) in triangles.iter().enumerate() {
        for &id in triangle {
            stars[id as usize].push(t as u32);
        }
    }
    for _ in 0..N_SWEEPS {
        let mut moved = false;
        for &t in &bad {
            for &id in &triangles[t] {
                if is_free[id as usize] {
                    moved |= move_vertex(points, triangles, &stars[id as usize], id as usize);
                }
            }
        }
        bad = bad_triangles(points, triangles);
        if !moved || bad.is_empty() {
            return;
        }
    }
}

fn bad_triangles(points: &[Point], triangles: &[[u32; 3]]) -> Vec<usize> {
    let limit = ANGLE_MIN.sin();
    (0..triangles.len()).filter(|&t| sine(points, &triangles[t]) < limit).collect()
}

fn sine(points: &[Point], triangle: &[u32; 3]) -> f64 {
    Measures::of(&triangle.map(|id| points[id as usize])).sine_min()
}

/// Pattern search in eight directions for the place where the smallest angle of the star is largest.
fn move_vertex(points: &mut [Point], triangles: &[[u32; 3]], star: &[u32], id: usize) -> bool {
    let quality = |points: &[Point]| {
        star.iter().map(|&t| sine(points, &triangles[t as usize])).fold(f64::INFINITY, f64::min)
    };
    let start = quality(points);
    let mut best = start;
    if best >= ANGLE_MIN.sin() {
        return false;
    }
    let lengths = star
        .iter()
        .flat_map(|&t| Measures::of(&triangles[t as usize].map(|k| points[k as usize])).length2);
    let mut step = 0.5 * lengths.fold(f64::INFINITY, f64::min).sqrt();
    for _ in 0..N_HALVINGS {
        let home = points[id];
        let mut place = home;
        for (r, z) in [
            (1., 0.),
            (0., 1.),
            (-1., 0.),
            (0., -1.),
            (0.7, 0.7),
            (-0.7, 0.7),
            (-0.7, -0.7),
            (0.7, -0.7),
        ] {
            points[id] = Point { r: home.r + step * r, z: home.z + step * z };
            let sine = quality(points);
            if sine > best {
                (best, place) = (sine, points[id]);
            }
        }
        points[id] = place;
        if place == home {
            step *= 0.5;
        }
    }
    best > start * (1.0 + 1e-3)
}

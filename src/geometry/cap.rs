//! The half-round polygon around everything, and the axis inside it.

use super::polygon::{bounding_box, distance};
use super::{Cap, Outline};
use crate::model::Point;
use std::f64::consts::PI;

/// Facets of the polygon; its inradius is cos(π/16) = 0.98 of its radius.
pub const N_FACETS: usize = 8;

/// Radius of the polygon's corners in units of the farthest corner's distance.
///
/// The interval closes about equally fast for 1.15–1.3 (measured). The nearest facet then keeps 1.3·0.98 − 1 = 27 % of that
/// distance free, in which the mesh can grow from the finest detail to a whole facet without a bad angle.
const ROOM: f64 = 1.3;

impl Cap {
    /// The cap around a set of points: centred at their middle height.
    pub(super) fn around(points: &[Point]) -> Cap {
        let [_, _, low, high] = bounding_box(points);
        let center_z = 0.5 * (low + high);
        let center = Point { r: 0.0, z: center_z };
        let farthest = points.iter().fold(0.0_f64, |m, &p| m.max(distance(center, p)));
        Cap { center_z, radius: ROOM * farthest, n_facets: N_FACETS }
    }

    /// Corner k of the polygon, from the lower pole (0) to the upper (`n_facets`); the poles lie on r = 0 exactly.
    pub fn corner(&self, k: usize) -> Point {
        let n = self.n_facets;
        if k == 0 || k == n {
            let sign = if k == 0 { -1.0 } else { 1.0 };
            return Point { r: 0.0, z: self.center_z + sign * self.radius };
        }
        // From the equator up, so that both halves are mirror images to the last digit.
        let steps = 2 * k as i64 - n as i64;
        let (sine, cosine) = (PI * steps.abs() as f64 / (2 * n) as f64).sin_cos();
        let sine = sine * steps.signum() as f64;
        Point { r: self.radius * cosine, z: self.center_z + self.radius * sine }
    }
}

/// Adds the cap's polygon and the axis between its poles; ends with segments sorted and distinct.
pub(super) fn close(outline: &mut Outline) {
    let first = outline.points.len() as u32;
    let n = outline.cap.n_facets as u32;
    outline.points.extend((0..=n).map(|k| outline.cap.corner(k as usize)));
    outline.segments.extend((0..n).map(|k| [first + k, first + k + 1]));
    let mut axis: Vec<u32> =
        (0..outline.points.len() as u32).filter(|&i| outline.points[i as usize].r == 0.0).collect();
    axis.sort_by(|&a, &b| outline.points[a as usize].z.total_cmp(&outline.points[b as usize].z));
    outline.segments.extend(axis.windows(2).map(|pair| [pair[0], pair[1]]));
    for segment in &mut outline.segments {
        segment.sort_unstable();
    }
    outline.segments.sort_unstable();
    outline.segments.dedup();
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_polygon_is_mirror_symmetric_and_holds_its_points() {
        let points = [Point { r: 3.0, z: -1.0 }, Point { r: 1.0, z: 5.0 }];
        let cap = Cap::around(&points);
        assert_eq!(cap.center_z, 2.0);
        for k in 0..=N_FACETS {
            let (below, above) = (cap.corner(k), cap.corner(N_FACETS - k));
            assert_eq!(below.r, above.r);
            assert!((below.z - 2.0 + (above.z - 2.0)).abs() < 1e-15 * cap.radius);
            assert!(
                (distance(below, Point { r: 0.0, z: 2.0 }) - cap.radius).abs() < 1e-15 * cap.radius
            );
        }
        assert_eq!(cap.corner(N_FACETS), Point { r: 0.0, z: 2.0 + cap.radius });
    }
}

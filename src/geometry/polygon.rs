//! Plane tools: area, point in polygon, proper crossing, distance to a segment. Knows no shapes and no names.

use crate::model::Point;

/// Twice the signed area of the triangle a, b, c [m²]; positive when counter-clockwise with r to the right, z up.
pub fn cross(a: Point, b: Point, c: Point) -> f64 {
    (b.r - a.r) * (c.z - a.z) - (b.z - a.z) * (c.r - a.r)
}

/// Distance of two points [m].
pub fn distance(a: Point, b: Point) -> f64 {
    let (dr, dz) = (b.r - a.r, b.z - a.z);
    (dr * dr + dz * dz).sqrt()
}

/// Middle of two points.
pub fn midpoint(a: Point, b: Point) -> Point {
    Point { r: 0.5 * (a.r + b.r), z: 0.5 * (a.z + b.z) }
}

/// Signed area [m²], positive for a counter-clockwise polygon (shoelace about the first corner).
pub fn area(polygon: &[Point]) -> f64 {
    let twice: f64 = polygon.windows(2).map(|edge| cross(polygon[0], edge[0], edge[1])).sum();
    0.5 * twice
}

/// Whether a point lies inside a polygon (even–odd rule); on the boundary either answer is possible.
pub fn contains(polygon: &[Point], p: Point) -> bool {
    let mut inside = false;
    for (i, &b) in polygon.iter().enumerate() {
        let a = polygon[(i + polygon.len() - 1) % polygon.len()];
        if (a.z > p.z) != (b.z > p.z) && (cross(a, b, p) > 0.0) == (b.z > a.z) {
            inside = !inside;
        }
    }
    inside
}

/// Where the open segments a–b and c–d cross, if they cross properly (neither touches nor overlaps).
pub(super) fn crossing(a: Point, b: Point, c: Point, d: Point) -> Option<Point> {
    let (side_c, side_d) = (cross(a, b, c), cross(a, b, d));
    let (side_a, side_b) = (cross(c, d, a), cross(c, d, b));
    if side_c * side_d < 0.0 && side_a * side_b < 0.0 {
        let t = side_a / (side_a - side_b);
        return Some(Point { r: a.r + t * (b.r - a.r), z: a.z + t * (b.z - a.z) });
    }
    None
}

/// Fraction along a–b [0, 1] of the point nearest to p, and its distance from p [m].
pub(super) fn nearest_on_segment(a: Point, b: Point, p: Point) -> (f64, f64) {
    let (dr, dz) = (b.r - a.r, b.z - a.z);
    let length2 = dr * dr + dz * dz;
    let t = (((p.r - a.r) * dr + (p.z - a.z) * dz) / length2).clamp(0.0, 1.0);
    (t, distance(p, Point { r: a.r + t * dr, z: a.z + t * dz }))
}

/// Smallest box around points: [r_min, r_max, z_min, z_max].
pub(super) fn bounding_box<'a>(points: impl IntoIterator<Item = &'a Point>) -> [f64; 4] {
    let start = [f64::INFINITY, f64::NEG_INFINITY, f64::INFINITY, f64::NEG_INFINITY];
    points
        .into_iter()
        .fold(start, |b, p| [b[0].min(p.r), b[1].max(p.r), b[2].min(p.z), b[3].max(p.z)])
}

/// Whether two boxes share a point.
pub(super) fn boxes_meet(a: &[f64; 4], b: &[f64; 4]) -> bool {
    a[0] <= b[1] && b[0] <= a[1] && a[2] <= b[3] && b[2] <= a[3]
}

#[cfg(test)]
mod tests {
    use super::*;

    fn p(r: f64, z: f64) -> Point {
        Point { r, z }
    }

    #[test]
    fn area_is_signed_and_contains_follows_the_even_odd_rule() {
        let square = [p(1.0, 0.0), p(3.0, 0.0), p(3.0, 2.0), p(1.0, 2.0)];
        assert_eq!(area(&square), 4.0);
        let mut turned = square;
        turned.reverse();
        assert_eq!(area(&turned), -4.0);
        for (q, inside) in
            [(p(2.0, 1.0), true), (p(0.5, 1.0), false), (p(3.5, 0.5), false), (p(2.0, 2.5), false)]
        {
            assert_eq!(contains(&square, q), inside);
            assert_eq!(contains(&turned, q), inside);
        }
    }

    #[test]
    fn only_proper_crossings_count() {
        let x = crossing(p(0.0, 0.0), p(2.0, 2.0), p(0.0, 2.0), p(2.0, 0.0));
        assert_eq!(x, Some(p(1.0, 1.0)));
        assert_eq!(crossing(p(0.0, 0.0), p(2.0, 0.0), p(1.0, 0.0), p(1.0, 1.0)), None);
        assert_eq!(crossing(p(0.0, 0.0), p(2.0, 0.0), p(1.0, 0.0), p(3.0, 0.0)), None);
    }
}

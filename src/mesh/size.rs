//! What a good first triangle is: unit of length, size, smallest angle. Knows no triangulation.
//!
//! Gaps and thin walls need no size of their own: a border may not be longer than about three times the way to the opposite
//! border ([`is_encroached`]), so a gap gets one whole layer and the angle limit grades the size away from it. Everything
//! finer is the later rounds' work.

use crate::geometry::{Cap, Point};

/// Smallest angle [rad] aimed at, 22°: Delaunay refinement keeps 20.7° for certain (Ruppert 1995). Measured on a gap of
/// 0.005 mm: 2 400 triangles at 22°, 5 300 at 23°, because triangles can no longer double in size from layer to layer.
pub(super) const ANGLE_MIN: f64 = 22.0 / 180.0 * std::f64::consts::PI;

/// Longest edge in units of the cap's radius; a facet is 0.39.
pub(super) const EDGE_MAX: f64 = 0.75;

/// Cosine of the widest angle under which a point may see a border: 120°, the lens whose base angles are 30°.
pub(super) const COS_LENS: f64 = -0.5;

/// The same for a facet of the cap, which cannot be split: 124°, base angles of 28°, above the limit of 22° with room to spare.
pub(super) const COS_FACET_LENS: f64 = -0.559_192_903_470_746_8;

/// Shortest edge in units of the cap's radius: a hundred thousand times the rounding of coordinates.
pub(super) const EDGE_MIN: f64 = 1e-10;

/// Most vertices of a first mesh (four times as many unknowns); a gap of a 100 000th of the section needs about half.
pub(super) const N_VERTICES_MAX: usize = 100_000;

/// The power of two at or just below the cap's radius [m]: lengths divided by it lose no digit.
pub(super) fn unit(cap: &Cap) -> f64 {
    let exponent = (cap.radius.to_bits() >> 52) as i32 - 1023;
    2.0_f64.powi(exponent)
}

/// Whether p sees the border a–b under an angle wider than that of a cosine (negative), so that p is too near to it.
pub(super) fn is_encroached(a: Point, b: Point, p: Point, cosine: f64) -> bool {
    let (ar, az, br, bz) = (a.r - p.r, a.z - p.z, b.r - p.r, b.z - p.z);
    let dot = ar * br + az * bz;
    // Compared as squares; the sign of the dot product tells the half.
    dot < 0.0 && dot * dot > cosine * cosine * (ar * ar + az * az) * (br * br + bz * bz)
}

/// A triangle's measures: squared edge lengths (edge k joins corners k and k + 1), twice its area.
pub(super) struct Measures {
    pub length2: [f64; 3],
    pub area2: f64,
}

impl Measures {
    /// Measures of the triangle with those corners [m].
    pub fn of(c: &[Point; 3]) -> Measures {
        let length2 = [0, 1, 2].map(|k| {
            let (a, b) = (c[k], c[(k + 1) % 3]);
            (b.r - a.r).powi(2) + (b.z - a.z).powi(2)
        });
        let area2 = (c[1].r - c[0].r) * (c[2].z - c[0].z) - (c[1].z - c[0].z) * (c[2].r - c[0].r);
        Measures { length2, area2 }
    }

    /// Index of the shortest edge; the first of equals.
    pub fn shortest(&self) -> usize {
        (0..3).fold(0, |best, k| if self.length2[k] < self.length2[best] { k } else { best })
    }

    /// Sine of the smallest angle, which lies opposite the shortest edge.
    pub fn sine_min(&self) -> f64 {
        let k = self.shortest();
        self.area2 / (self.length2[(k + 1) % 3] * self.length2[(k + 2) % 3]).sqrt()
    }

    /// Length of the longest edge.
    pub fn longest(&self) -> f64 {
        self.length2.iter().fold(0.0_f64, |m, &l| m.max(l)).sqrt()
    }
}

/// Where a bad triangle wants a new vertex: its circumcentre, or nearer to its shortest edge when an angle just above the
/// limit can be had there (an off-centre, Üngör 2009: fewer vertices).
pub(super) fn wanted_point(c: &[Point; 3], m: &Measures, for_angle: bool) -> Point {
    let center = circumcenter(c, m);
    if !for_angle {
        return center;
    }
    let k = m.shortest();
    let (a, b) = (c[k], c[(k + 1) % 3]);
    let middle = Point { r: 0.5 * (a.r + b.r), z: 0.5 * (a.z + b.z) };
    let (dr, dz) = (center.r - middle.r, center.z - middle.z);
    let away = (dr * dr + dz * dz).sqrt();
    // Two degrees above the limit, so that rounding cannot make the new triangle bad again.
    let enough = 0.5 * m.length2[k].sqrt() / (0.5 * ANGLE_MIN + 0.0175).tan();
    if away <= enough {
        return center;
    }
    Point { r: middle.r + dr * enough / away, z: middle.z + dz * enough / away }
}

/// Circumcentre relative to corner 0, for few cancellations.
fn circumcenter(c: &[Point; 3], m: &Measures) -> Point {
    let (br, bz) = (c[1].r - c[0].r, c[1].z - c[0].z);
    let (cr, cz) = (c[2].r - c[0].r, c[2].z - c[0].z);
    let (b2, c2) = (m.length2[0], m.length2[2]);
    let r = (cz * b2 - bz * c2) / (2.0 * m.area2);
    let z = (br * c2 - cr * b2) / (2.0 * m.area2);
    Point { r: c[0].r + r, z: c[0].z + z }
}

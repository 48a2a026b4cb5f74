//! Air coils with rectangular sections on one axis: self and mutual inductance by real-space quadrature.
//!
//! Everything is divided by µ0 N₁N₂, so lengths in give lengths out. With r = t − s/2, r' = t + s/2, ζ = z' − z,
//!
//!     M/(µ0 N₁ N₂) = 1/(S₁S₂) ∬ ds dζ w(ζ) ∫ dt m(t − s/2, t + s/2, ζ)
//!
//! where m is Maxwell's formula for two loops and w(ζ) the overlap of the two heights shifted by ζ (piecewise linear).
//! m is singular as log(s² + ζ²) at s = ζ = 0 only, and at t = ±iζ/2. So the (s, ζ) plane is cut at the kinks of w and
//! of the limits of t, and each piece is halved until it is no longer than its distance to the origin; squares with
//! a corner at the origin are split along the diagonal and graded (u = x³). Panels in t are no longer than their
//! distance to ±iζ/2. Every panel then has a Bernstein ellipse of at least 4.6, so ten points leave 4.6⁻²⁰ = 6e-14,
//! and all terms are positive: the relative error is below 1e-11 for every shape (tested against doubled orders).

use crate::elliptic::loops_about;
use crate::quadrature::gauss;
use gapwright::units::Meter;

/// The section of a coil, uniformly filled with turns.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Coil {
    /// Inner and outer radius.
    pub radii: [Meter; 2],
    /// Bottom and top.
    pub heights: [Meter; 2],
}

impl Coil {
    /// Area of the section [m²].
    pub fn area(&self) -> f64 {
        (self.radii[1] - self.radii[0]) * (self.heights[1] - self.heights[0])
    }

    /// The same coil, `shift` higher.
    pub fn raised(&self, shift: Meter) -> Coil {
        Coil { radii: self.radii, heights: [self.heights[0] + shift, self.heights[1] + shift] }
    }
}

/// Points per panel in s, ζ and t.
#[derive(Debug, Clone, Copy)]
pub struct Orders {
    pub plane: usize,
    pub graded: usize,
    pub radial: usize,
}

/// The orders that the error statement of this file is about.
pub const ORDERS: Orders = Orders { plane: 10, graded: 16, radial: 8 };

/// Self inductance L/(µ0 N²) [m], relative error below 1e-11.
pub fn self_inductance(coil: &Coil) -> Meter {
    self_inductance_with(coil, ORDERS)
}

/// [`self_inductance`] with stated orders, to see the error of the quadrature.
pub fn self_inductance_with(coil: &Coil, orders: Orders) -> Meter {
    // The four quadrants of (s, ζ) are equal.
    let width = coil.radii[1] - coil.radii[0];
    let height = coil.heights[1] - coil.heights[0];
    let piece = Piece { s: [0.0, width], zeta: [0.0, height], signs: [1.0, 1.0] };
    let sections = Sections { first: *coil, second: *coil, weight: Weight::Overlap };
    4.0 * integrate(&sections, piece, orders) / (coil.area() * coil.area())
}

/// Mutual inductance M/(µ0 N₁ N₂) [m] of two coils that do not overlap (touching is allowed).
pub fn mutual_inductance(first: &Coil, second: &Coil) -> Meter {
    let sections = Sections { first: *first, second: *second, weight: Weight::Overlap };
    over_all_pieces(&sections) / (first.area() * second.area())
}

/// d(M/µ0 N₁ N₂)/dz [-] for the second coil moving up: force over µ0 N₁I₁ N₂I₂.
pub fn mutual_slope(first: &Coil, second: &Coil) -> f64 {
    let sections = Sections { first: *first, second: *second, weight: Weight::Slope };
    over_all_pieces(&sections) / (first.area() * second.area())
}

/// Inductance of a flat disc L/(µ0 N²) [m] with uniform turns per radius between the radii.
///
/// Source: J. Spielrein, Arch. Elektrotech. 3 (1915) 187, from memory; here by the quadrature of this file at ζ = 0.
pub fn disc(radii: [Meter; 2]) -> Meter {
    let width = radii[1] - radii[0];
    let coil = Coil { radii, heights: [0.0, 0.0] };
    let sections = Sections { first: coil, second: coil, weight: Weight::Overlap };
    // log s at the lower end: graded by s = x⁶, so that x⁵ log x is left.
    let rule = gauss(32);
    let mut sum = 0.0;
    for (x, weight) in rule.nodes.iter().zip(&rule.weights) {
        sum += weight * 6.0 * x.powi(5) * radial(&sections, width * x.powi(6), 0.0, ORDERS.radial);
    }
    2.0 * sum / width
}

/// What the ζ integral is weighted with.
#[derive(Debug, Clone, Copy)]
enum Weight {
    /// Length of the overlap of the heights, one shifted by ζ.
    Overlap,
    /// Derivative of the overlap to a rise of the second coil.
    Slope,
}

/// The two sections and the weight.
#[derive(Debug, Clone, Copy)]
struct Sections {
    first: Coil,
    second: Coil,
    weight: Weight,
}

/// A rectangle of the quadrant |s|, |ζ|, with the signs of s and ζ.
#[derive(Debug, Clone, Copy)]
struct Piece {
    s: [f64; 2],
    zeta: [f64; 2],
    signs: [f64; 2],
}

/// Sum over the rectangles between the kinks of the weight and of the radial limits.
fn over_all_pieces(sections: &Sections) -> f64 {
    let s_cuts = cuts(sections.first.radii, sections.second.radii);
    let zeta_cuts = cuts(sections.first.heights, sections.second.heights);
    let mut sum = 0.0;
    for s in s_cuts.windows(2) {
        for zeta in zeta_cuts.windows(2) {
            let (s_range, s_sign) = folded(s[0], s[1]);
            let (zeta_range, zeta_sign) = folded(zeta[0], zeta[1]);
            let piece = Piece { s: s_range, zeta: zeta_range, signs: [s_sign, zeta_sign] };
            sum += integrate(sections, piece, ORDERS);
        }
    }
    sum
}

/// Differences second − first of the ends, and 0 if it lies between, ascending; values at rounding level are 0.
fn cuts(first: [f64; 2], second: [f64; 2]) -> Vec<f64> {
    let scale = first.iter().chain(&second).fold(0.0, |m: f64, x| m.max(x.abs()));
    let mut cuts = vec![
        second[0] - first[1],
        second[0] - first[0],
        second[1] - first[1],
        second[1] - first[0],
    ];
    for cut in &mut cuts {
        if cut.abs() < 1e-13 * scale {
            *cut = 0.0;
        }
    }
    cuts.sort_by(f64::total_cmp);
    if cuts[0] < 0.0 && 0.0 < cuts[3] {
        cuts.push(0.0);
        cuts.sort_by(f64::total_cmp);
    }
    cuts.dedup_by(|a, b| (*a - *b).abs() < 1e-13 * scale);
    cuts
}

/// The range of absolute values of an interval that does not hold 0 inside, and its sign.
fn folded(from: f64, to: f64) -> ([f64; 2], f64) {
    if from < 0.0 { ([-to, -from], -1.0) } else { ([from, to], 1.0) }
}

/// ∬ over one piece: cut until every part is smooth on its own scale.
fn integrate(sections: &Sections, whole: Piece, orders: Orders) -> f64 {
    let mut stack = vec![whole];
    let mut sum = 0.0;
    while let Some(piece) = stack.pop() {
        let [width, height] = [piece.s[1] - piece.s[0], piece.zeta[1] - piece.zeta[0]];
        let (long, short) = (width.max(height), width.min(height));
        let distance = piece.s[0].hypot(piece.zeta[0]);
        if distance == 0.0 {
            if long <= 1.5 * short {
                sum += corner(sections, &piece, orders);
            } else {
                stack.extend(split(&piece, short));
            }
        } else if long <= distance {
            sum += tensor(sections, &piece, orders);
        } else {
            stack.extend(split(&piece, 0.5 * long));
        }
    }
    sum
}

/// Cuts the longer side at `length` from its lower end.
fn split(piece: &Piece, length: f64) -> [Piece; 2] {
    let (mut near, mut far) = (*piece, *piece);
    if piece.s[1] - piece.s[0] >= piece.zeta[1] - piece.zeta[0] {
        near.s[1] = piece.s[0] + length;
        far.s[0] = near.s[1];
    } else {
        near.zeta[1] = piece.zeta[0] + length;
        far.zeta[0] = near.zeta[1];
    }
    [near, far]
}

/// Product rule on a piece away from the origin.
fn tensor(sections: &Sections, piece: &Piece, orders: Orders) -> f64 {
    let rule = gauss(orders.plane);
    let [width, height] = [piece.s[1] - piece.s[0], piece.zeta[1] - piece.zeta[0]];
    let mut sum = 0.0;
    for i in 0..orders.plane {
        let s = piece.s[0] + width * rule.nodes[i];
        for j in 0..orders.plane {
            let zeta = piece.zeta[0] + height * rule.nodes[j];
            sum += rule.weights[i] * rule.weights[j] * value(sections, piece, s, zeta, orders);
        }
    }
    sum * width * height
}

/// Two triangles from the origin, u = x³ along the ray: the integrand is u (a(u, v) log u + b(u, v)), a and b smooth.
fn corner(sections: &Sections, piece: &Piece, orders: Orders) -> f64 {
    let (along, across) = (gauss(orders.graded), gauss(orders.plane));
    let [width, height] = [piece.s[1], piece.zeta[1]];
    let mut sum = 0.0;
    for i in 0..orders.graded {
        let x = along.nodes[i];
        let u = x * x * x;
        let factor = along.weights[i] * 3.0 * x * x * u;
        for j in 0..orders.plane {
            let v = across.nodes[j];
            let lower = value(sections, piece, u * width, u * v * height, orders);
            let upper = value(sections, piece, u * v * width, u * height, orders);
            sum += factor * across.weights[j] * (lower + upper);
        }
    }
    sum * width * height
}

/// Weight times radial integral at |s|, |ζ| of a piece.
fn value(sections: &Sections, piece: &Piece, s: f64, zeta: f64, orders: Orders) -> f64 {
    let signed_zeta = piece.signs[1] * zeta;
    let weight = match sections.weight {
        Weight::Overlap => overlap(sections, signed_zeta),
        Weight::Slope => overlap_slope(sections, signed_zeta),
    };
    if weight == 0.0 {
        0.0
    } else {
        weight * radial(sections, piece.signs[0] * s, zeta, orders.radial)
    }
}

/// Length of {z : z in the first coil's heights, z + ζ in the second's}.
fn overlap(sections: &Sections, zeta: f64) -> f64 {
    let [bottom, top] = sections.first.heights;
    let [bottom2, top2] = sections.second.heights;
    (top.min(top2 - zeta) - bottom.max(bottom2 - zeta)).max(0.0)
}

/// Derivative of [`overlap`] when the second coil rises: +1 while its top limits, −1 while its bottom does.
fn overlap_slope(sections: &Sections, zeta: f64) -> f64 {
    let [bottom, top] = sections.first.heights;
    let [bottom2, top2] = sections.second.heights;
    let by_top = if top2 - zeta < top { 1.0 } else { 0.0 };
    let by_bottom = if bottom2 - zeta > bottom { 1.0 } else { 0.0 };
    by_top - by_bottom
}

/// ∫ m dt over the mean radius at fixed s, ζ.
fn radial(sections: &Sections, s: f64, zeta: f64, n_points: usize) -> f64 {
    let rule = gauss(n_points);
    let half = 0.5 * s;
    let low = (sections.first.radii[0] + half).max(sections.second.radii[0] - half);
    let high = (sections.first.radii[1] + half).min(sections.second.radii[1] - half);
    let mut sum = 0.0;
    let mut from = low;
    while from < high {
        let to = high.min(from + from.hypot(0.5 * zeta));
        let width = to - from;
        for i in 0..n_points {
            let t = from + width * rule.nodes[i];
            sum += width * rule.weights[i] * loops_about(t, s, zeta);
        }
        from = to;
    }
    sum
}

#[cfg(test)]
mod tests;

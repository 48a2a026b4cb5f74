//! Which triangles to refine.

use crate::mesh::Mesh;

/// Unknowns that a marked triangle brings on average, closure included (measured 6–10 on graded meshes).
const N_UNKNOWNS_A_MARK: usize = 12;

/// The fewest triangles that hold `share` of the total, largest first (ties by index).
///
/// Source: W. Dörfler, SIAM J. Numer. Anal. 33 (1996) 1106.
pub fn doerfler(shares: &[f64], share: f64) -> Vec<u32> {
    let mut order: Vec<u32> = (0..shares.len() as u32).collect();
    order.sort_unstable_by(|&a, &b| {
        shares[b as usize].total_cmp(&shares[a as usize]).then(a.cmp(&b))
    });
    let total: f64 = shares.iter().map(|s| s.max(0.0)).sum();
    let mut sum = 0.0;
    let n = order.iter().take_while(|&&t| {
        let is_needed = sum < share * total;
        sum += shares[t as usize].max(0.0);
        is_needed
    });
    let n = n.count().max(1);
    order.truncate(n);
    order
}

/// How many triangles may be marked before the number of unknowns passes its limit.
pub fn affordable(n_unknowns: usize, n_unknowns_max: usize) -> usize {
    n_unknowns_max.saturating_sub(n_unknowns) / N_UNKNOWNS_A_MARK
}

/// Longest edge, as a share of the cap's radius, below which a triangle is not cut: four more bisections would round its
/// corners together.
const SMALLEST_EDGE: f64 = 1e-12;

/// Is triangle t large enough to be cut? Where parts touch only in a point the field is so singular that no mesh resolves
/// it and the rounds would halve triangles down to rounding.
pub fn is_divisible(mesh: &Mesh, t: usize) -> bool {
    let corners = mesh.corners(t);
    let length = |k: usize| {
        let (p, q) = (corners[k], corners[(k + 1) % 3]);
        (p.r - q.r).hypot(p.z - q.z)
    };
    let longest = (0..3).map(length).fold(0.0, f64::max);
    SMALLEST_EDGE * (mesh.cap.radius + mesh.cap.center_z.abs()) < longest
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn marks_the_fewest_triangles_that_hold_the_share() {
        assert_eq!(doerfler(&[0.1, 0.4, -1e-18, 0.2, 0.3], 0.7), [1, 4]);
        assert_eq!(doerfler(&[0.1, 0.4, 0.2, 0.3], 0.71), [1, 3, 2]);
        assert_eq!(doerfler(&[0.0, 0.0], 0.7), [0]);
    }
}

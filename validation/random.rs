//! Random cases from fixed seeds: the same on every machine.

use crate::coils::Coil;
use crate::modes::GappedPot;
use crate::sphere::SphereCoil;

/// The splitmix64 sequence. Source: G. L. Steele, D. Lea, C. H. Flood, OOPSLA 2014 (constants from memory).
#[derive(Debug, Clone)]
pub struct Generator {
    state: u64,
}

impl Generator {
    /// A sequence of its own for every seed.
    pub fn new(seed: u64) -> Generator {
        Generator { state: seed }
    }

    /// The next 64 bits.
    pub fn bits(&mut self) -> u64 {
        self.state = self.state.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.state;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        z ^ (z >> 31)
    }

    /// Uniform in [low, high).
    pub fn uniform(&mut self, low: f64, high: f64) -> f64 {
        low + (high - low) * ((self.bits() >> 11) as f64 / (1u64 << 53) as f64)
    }

    /// Uniform in the logarithm, in [low, high).
    pub fn log_uniform(&mut self, low: f64, high: f64) -> f64 {
        self.uniform(low.ln(), high.ln()).exp()
    }
}

/// An air coil with shape ratios log-uniform: mean radius 1–100 mm, width/mean radius 0.02–1.9, height/mean radius 0.02–20,
/// one in ten solid (inner radius 0), at any height.
pub fn air_coil(generator: &mut Generator) -> Coil {
    let mean = generator.log_uniform(1e-3, 0.1);
    let width = mean * generator.log_uniform(0.02, 1.9);
    let height = mean * generator.log_uniform(0.02, 20.0);
    let middle = mean * generator.uniform(-1.0, 1.0);
    let solid = generator.uniform(0.0, 1.0) < 0.1;
    let radii = if solid { [0.0, 2.0 * mean] } else { [mean - 0.5 * width, mean + 0.5 * width] };
    Coil { radii, heights: [middle - 0.5 * height, middle + 0.5 * height] }
}

/// Two air coils that stand apart or above one another by 0.01–1 of the smaller one's size, turns 10–1000 each,
/// and currents with either sign.
pub fn coil_pair(generator: &mut Generator) -> [(Coil, f64, f64); 2] {
    let first = air_coil(generator);
    let second = air_coil(generator);
    let size = |c: &Coil| (c.radii[1] - c.radii[0]).min(c.heights[1] - c.heights[0]);
    let clearance = size(&first).min(size(&second)) * generator.log_uniform(0.01, 1.0);
    let placed = if generator.uniform(0.0, 1.0) < 0.5 {
        second.raised(first.heights[1] + clearance - second.heights[0])
    } else {
        let shift = first.radii[1] + clearance - second.radii[0];
        Coil { radii: [second.radii[0] + shift, second.radii[1] + shift], heights: second.heights }
    };
    [first, placed].map(|coil| {
        let current = generator.log_uniform(0.1, 10.0)
            * if generator.uniform(0.0, 1.0) < 0.5 { 1.0 } else { -1.0 };
        (coil, generator.log_uniform(10.0, 1000.0).round(), current)
    })
}

/// A gapped pot with ideal walls: post 2–10 mm, window 0.2–2.5 posts wide and 0.6–5 posts high, gap 0.01–0.8 posts
/// (at most half the window), winding from the post to the wall or clear of both.
pub fn gapped_pot_case(generator: &mut Generator) -> GappedPot {
    let post = generator.log_uniform(2e-3, 10e-3);
    let wall = post * (1.0 + generator.log_uniform(0.2, 2.5));
    let half_window = 0.5 * post * generator.log_uniform(0.6, 5.0);
    let half_gap = (0.5 * post * generator.log_uniform(0.01, 0.8)).min(0.5 * half_window);
    let full = generator.uniform(0.0, 1.0) < 0.5;
    let width = wall - post;
    let winding = if full {
        [post, wall]
    } else {
        [post + width * generator.uniform(0.05, 0.3), wall - width * generator.uniform(0.05, 0.3)]
    };
    GappedPot { post, wall, half_gap, half_window, winding }
}

/// A sphere of 2–20 mm with a coil round it: clearance 0.05–1 radii, section 0.1–1 radii, moved up or down by up to a
/// radius, permeability 2–5000.
pub fn sphere_coil(generator: &mut Generator) -> SphereCoil {
    let radius = generator.log_uniform(2e-3, 20e-3);
    let inner = radius * (1.0 + generator.log_uniform(0.05, 1.0));
    let outer = inner + radius * generator.log_uniform(0.1, 1.0);
    let height = radius * generator.log_uniform(0.1, 1.0);
    let middle = radius * generator.uniform(-1.0, 1.0);
    let coil =
        Coil { radii: [inner, outer], heights: [middle - 0.5 * height, middle + 0.5 * height] };
    SphereCoil { radius, permeability: generator.log_uniform(2.0, 5000.0), coil }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_sequence_never_changes() {
        let mut generator = Generator::new(1234567);
        // First value of the reference sequence for this seed, from memory.
        assert_eq!(generator.bits(), 6457827717110365317);
    }

    #[test]
    fn uniform_numbers_fill_their_range() {
        let mut generator = Generator::new(3);
        let numbers: Vec<f64> = (0..1000).map(|_| generator.uniform(2.0, 4.0)).collect();
        let mean = numbers.iter().sum::<f64>() / 1000.0;
        assert!(numbers.iter().all(|x| (2.0..4.0).contains(x)));
        // Standard deviation of the mean 2/√12/√1000 = 0.018; five of them.
        assert!((mean - 3.0).abs() < 0.09, "{mean}");
    }
}

//! Random numbers from fixed seeds: the same on every machine.

/// The splitmix64 sequence. Source: G. L. Steele, D. Lea, C. H. Flood, OOPSLA 2014 (constants from memory).
#[derive(Debug, Clone)]
pub struct Dice(pub u64);

impl Dice {
    /// The next 64 bits.
    pub fn bits(&mut self) -> u64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
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

    /// True with that probability.
    pub fn with(&mut self, probability: f64) -> bool {
        self.uniform(0.0, 1.0) < probability
    }

    /// A whole number below n.
    pub fn below(&mut self, n: usize) -> usize {
        (self.bits() % n.max(1) as u64) as usize
    }

    /// One of a list.
    pub fn pick<T: Copy>(&mut self, list: &[T]) -> T {
        list[self.below(list.len())]
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_sequence_never_changes() {
        // First value of the reference sequence for this seed, from memory.
        assert_eq!(Dice(1_234_567).bits(), 6_457_827_717_110_365_317);
    }

    #[test]
    fn uniform_numbers_fill_their_range() {
        let mut dice = Dice(3);
        let numbers: Vec<f64> = (0..1000).map(|_| dice.uniform(2.0, 4.0)).collect();
        let mean = numbers.iter().sum::<f64>() / 1000.0;
        assert!(numbers.iter().all(|x| (2.0..4.0).contains(x)));
        // Standard deviation of the mean 2/√12/√1000 = 0.018; five of them.
        assert!((mean - 3.0).abs() < 0.09, "{mean}");
    }
}

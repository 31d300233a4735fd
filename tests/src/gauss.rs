//! Errors of reading that are the same on every computer.

/// Numbers of a normal distribution with mean 0 and standard deviation 1, from a seed: splitmix64 (Steele, Lea & Flood 2014)
/// and the method of Box & Muller (1958).
#[derive(Debug, Clone)]
pub struct Gauss(u64);

impl Gauss {
    /// The sequence of a seed.
    pub fn new(seed: u64) -> Self {
        Self(seed)
    }

    /// The next number.
    #[allow(clippy::should_implement_trait)]
    pub fn next(&mut self) -> f64 {
        let (u, v) = (self.uniform(), self.uniform());
        (-2.0 * (1.0 - u).ln()).sqrt() * (std::f64::consts::TAU * v).cos()
    }

    /// From 0, below 1.
    fn uniform(&mut self) -> f64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        ((z ^ (z >> 31)) >> 11) as f64 / (1u64 << 53) as f64
    }
}

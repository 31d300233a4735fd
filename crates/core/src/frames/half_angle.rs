use nalgebra::Vector3;

/// An angle between 0 and π, kept as sine and cosine of its half: both ends of the range keep all their digits, and sums
/// of angles need no trigonometric function.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct HalfAngle {
    /// sin(angle/2), 0 to 1.
    pub sin: f64,
    /// cos(angle/2), 0 to 1.
    pub cos: f64,
}

impl HalfAngle {
    /// The angle between two unit vectors.
    #[inline]
    pub fn between(a: &Vector3<f64>, b: &Vector3<f64>) -> Self {
        Self { sin: 0.5 * (a - b).norm(), cos: 0.5 * (a + b).norm() }
    }

    /// The angle in radians.
    #[inline]
    pub fn angle(self) -> f64 {
        2.0 * self.sin.atan2(self.cos)
    }

    /// Sine of the whole angle.
    #[inline]
    pub fn full_sin(self) -> f64 {
        2.0 * self.sin * self.cos
    }

    /// Cosine of the whole angle.
    #[inline]
    pub fn full_cos(self) -> f64 {
        (self.cos - self.sin) * (self.cos + self.sin)
    }

    /// sin and cos of half the sum with another angle; the sum may pass π.
    #[inline]
    pub fn half_sum(self, other: Self) -> (f64, f64) {
        (self.sin * other.cos + self.cos * other.sin, self.cos * other.cos - self.sin * other.sin)
    }

    /// sin and cos of half the difference to another angle; the sine has its sign.
    #[inline]
    pub fn half_difference(self, other: Self) -> (f64, f64) {
        (self.sin * other.cos - self.cos * other.sin, self.cos * other.cos + self.sin * other.sin)
    }
}

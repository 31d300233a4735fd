use nalgebra::Vector3;

use crate::lanes::{Real, Triple};

/// An angle between 0 and π, kept as sine and cosine of its half: both ends of the range keep all their digits, and sums
/// of angles need no trigonometric function.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct HalfAngle<T = f64> {
    /// sin(angle/2), 0 to 1.
    pub sin: T,
    /// cos(angle/2), 0 to 1.
    pub cos: T,
}

impl<T: Real> HalfAngle<T> {
    /// The angle between two unit vectors.
    #[inline(always)]
    pub fn between(a: &Triple<T>, b: &Vector3<f64>) -> Self {
        let (apart, along) = ([a[0] - b.x, a[1] - b.y, a[2] - b.z], [a[0] + b.x, a[1] + b.y, a[2] + b.z]);
        Self { sin: norm(apart) * 0.5, cos: norm(along) * 0.5 }
    }

    /// This angle for as many numbers as `number` has.
    #[inline(always)]
    pub fn like(fixed: HalfAngle, number: T) -> Self {
        Self { sin: number.like(fixed.sin), cos: number.like(fixed.cos) }
    }

    /// The angle in radians.
    #[inline(always)]
    pub fn angle(self) -> T {
        self.sin.atan2(self.cos) * 2.0
    }

    /// Sine of the whole angle.
    #[inline(always)]
    pub fn full_sin(self) -> T {
        self.sin * self.cos * 2.0
    }

    /// Cosine of the whole angle.
    #[inline(always)]
    pub fn full_cos(self) -> T {
        (self.cos - self.sin) * (self.cos + self.sin)
    }

    /// sin and cos of half the sum with another angle; the sum may pass π.
    #[inline(always)]
    pub fn half_sum(self, other: Self) -> (T, T) {
        (self.sin * other.cos + self.cos * other.sin, self.cos * other.cos - self.sin * other.sin)
    }

    /// sin and cos of half the difference to another angle; the sine has its sign.
    #[inline(always)]
    pub fn half_difference(self, other: Self) -> (T, T) {
        (self.sin * other.cos - self.cos * other.sin, self.cos * other.cos + self.sin * other.sin)
    }
}

#[inline(always)]
fn norm<T: Real>([x, y, z]: Triple<T>) -> T {
    (x * x + y * y + z * z).sqrt()
}

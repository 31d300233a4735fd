//! Numbers side by side: one text of a formula, worked through for one reflection or for several at once.
//!
//! Formulas that a table of a million reflections goes through are written over [`Real`], which is a plain `f64` for one
//! reflection and a pack of as many as the processor takes at a time ([`widest`]) for a table. A place where
//! reflections part ways is a [`Mask`] and a [`Real::choose`] instead of a branch. Every operation, the arctangent
//! included, rounds the same way at any width, and no products are fused: one reflection, a table, an old computer and a
//! new one agree to the last bit.

mod arctangent;
mod pack;
#[cfg(test)]
mod tests;

use std::fmt::Debug;
use std::ops::{Add, BitAnd, BitOr, BitXor, Div, Mul, Neg, Not, Sub};

#[cfg(test)]
pub(crate) use pack::every_width;
pub(crate) use pack::{Wide, widest};

/// A number, or several side by side that go through the same formula. The methods give plain IEEE arithmetic; what they
/// make of NaN is not specified, only that no lane touches another.
pub(crate) trait Real:
    Copy
    + Debug
    + Add<Output = Self>
    + Sub<Output = Self>
    + Mul<Output = Self>
    + Div<Output = Self>
    + Neg<Output = Self>
    + Add<f64, Output = Self>
    + Sub<f64, Output = Self>
    + Mul<f64, Output = Self>
{
    /// A yes or no for each number.
    type Mask: Mask;

    /// How many numbers stand side by side.
    const WIDTH: usize;

    /// As many numbers as here, all of this value.
    fn like(self, value: f64) -> Self;

    /// As many numbers as here, the first of a slice; `self` if the slice has fewer.
    fn load(self, from: &[f64]) -> Self;

    /// Writes the numbers to the front of a slice that has room for all of them.
    fn store(self, to: &mut [f64]);

    /// Size without sign.
    fn abs(self) -> Self;

    /// Square root.
    fn sqrt(self) -> Self;

    /// The smaller of two numbers.
    fn smaller(self, other: Self) -> Self;

    /// The larger of two numbers.
    fn larger(self, other: Self) -> Self;

    /// The size of this number with the sign of another.
    fn with_sign_of(self, other: Self) -> Self;

    /// Whether this is less than another.
    fn below(self, other: Self) -> Self::Mask;

    /// The first number where the mask says yes, the second elsewhere.
    fn choose(mask: Self::Mask, yes: Self, no: Self) -> Self;

    /// The angle in radians, −π to π, of the planar direction (x, y) with y = `self`, within 2 units in the last place;
    /// 0 for a direction without length.
    #[inline(always)]
    fn atan2(self, x: Self) -> Self {
        arctangent::atan2(self, x)
    }

    /// Radians to degrees.
    #[inline(always)]
    fn to_degrees(self) -> Self {
        self * (180.0 / std::f64::consts::PI)
    }
}

/// A yes or no for each of the numbers of a [`Real`].
pub(crate) trait Mask:
    Copy + Debug + BitAnd<Output = Self> + BitOr<Output = Self> + BitXor<Output = Self> + Not<Output = Self>
{
    /// Whether it is yes anywhere.
    fn any(self) -> bool;
}

impl Mask for bool {
    #[inline(always)]
    fn any(self) -> bool {
        self
    }
}

impl Real for f64 {
    type Mask = bool;

    const WIDTH: usize = 1;

    #[inline(always)]
    fn like(self, value: f64) -> Self {
        value
    }

    #[inline(always)]
    fn load(self, from: &[f64]) -> Self {
        from.first().copied().unwrap_or(self)
    }

    #[inline(always)]
    fn store(self, to: &mut [f64]) {
        if let Some(to) = to.first_mut() {
            *to = self;
        }
    }

    #[inline(always)]
    fn abs(self) -> Self {
        self.abs()
    }

    #[inline(always)]
    fn sqrt(self) -> Self {
        self.sqrt()
    }

    #[inline(always)]
    fn smaller(self, other: Self) -> Self {
        if self < other { self } else { other }
    }

    #[inline(always)]
    fn larger(self, other: Self) -> Self {
        if self > other { self } else { other }
    }

    #[inline(always)]
    fn with_sign_of(self, other: Self) -> Self {
        self.copysign(other)
    }

    #[inline(always)]
    fn below(self, other: Self) -> bool {
        self < other
    }

    #[inline(always)]
    fn choose(mask: bool, yes: Self, no: Self) -> Self {
        if mask { yes } else { no }
    }
}

/// Three components side by side.
pub(crate) type Triple<T> = [T; 3];

/// Scalar product with a vector that is the same for all.
#[inline(always)]
pub(crate) fn dot<T: Real>(fixed: &nalgebra::Vector3<f64>, v: &Triple<T>) -> T {
    v[0] * fixed.x + v[1] * fixed.y + v[2] * fixed.z
}

/// The most numbers that stand side by side.
const MOST: usize = 16;

/// For formulas that have no wide form: takes them through one number after the other.
#[inline(always)]
pub(crate) fn one_by_one<T: Real, const N: usize, const M: usize>(
    numbers: &[T; N],
    mut formula: impl FnMut(&[f64; N]) -> [f64; M],
) -> [T; M] {
    let (mut from, mut to) = ([[0.0; MOST]; N], [[0.0; MOST]; M]);
    for (buffer, number) in from.iter_mut().zip(numbers) {
        number.store(buffer);
    }
    for i in 0..T::WIDTH {
        let found = formula(&std::array::from_fn(|row| from[row][i]));
        for (row, value) in to.iter_mut().zip(found) {
            row[i] = value;
        }
    }
    to.map(|row| numbers[0].load(&row))
}

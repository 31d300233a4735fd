use std::fmt;
use std::ops::Neg;

use nalgebra::Vector3;

/// Indices of a node of reciprocal space. Real numbers: satellites and grid points have fractional ones.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Hkl {
    /// First index, along a*.
    pub h: f64,
    /// Second index, along b*.
    pub k: f64,
    /// Third index, along c*.
    pub l: f64,
}

impl Hkl {
    /// The node with these indices.
    pub const fn new(h: f64, k: f64, l: f64) -> Self {
        Self { h, k, l }
    }

    /// The indices as a column vector.
    pub fn to_vector(self) -> Vector3<f64> {
        Vector3::new(self.h, self.k, self.l)
    }

    /// The node whose indices are the components of a column vector.
    pub fn from_vector(v: &Vector3<f64>) -> Self {
        Self::new(v.x, v.y, v.z)
    }

    /// The indices as integers, if every one is within 1e-6 of one.
    pub fn as_integers(self) -> Option<[i32; 3]> {
        let near = |x: f64| ((x - x.round()).abs() < 1e-6 && x.abs() < 1e9).then_some(x.round() as i32);
        Some([near(self.h)?, near(self.k)?, near(self.l)?])
    }

    /// Whether every index is a finite number.
    pub fn is_finite(self) -> bool {
        self.h.is_finite() && self.k.is_finite() && self.l.is_finite()
    }
}

impl From<[i32; 3]> for Hkl {
    fn from([h, k, l]: [i32; 3]) -> Self {
        Self::new(f64::from(h), f64::from(k), f64::from(l))
    }
}

impl Neg for Hkl {
    type Output = Self;
    fn neg(self) -> Self {
        Self::new(-self.h, -self.k, -self.l)
    }
}

/// Indices separated by spaces, with as many decimals as they need: `1 0 -2`, `0.5 1 0`.
impl fmt::Display for Hkl {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        // Adding 0.0 turns a negative zero into a plain one.
        write!(f, "{} {} {}", self.h + 0.0, self.k + 0.0, self.l + 0.0)
    }
}

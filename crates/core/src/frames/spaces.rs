use std::marker::PhantomData;
use std::ops::{Add, Mul, Neg, Sub};

use nalgebra::{Matrix3, Rotation3, Unit, Vector3};

/// A frame that a [`Vector`] can be written in.
pub trait Frame: Copy + 'static {}

macro_rules! frame {
    ($(#[$doc:meta])* $name:ident) => {
        $(#[$doc])*
        #[derive(Debug, Clone, Copy, PartialEq, Eq)]
        pub enum $name {}
        impl Frame for $name {}
    };
}
frame!(
    /// The laboratory: +z along the beam, +y up.
    Lab
);
frame!(
    /// Fixed to the innermost sample axis; equals the lab when every sample axis is at angle zero.
    Head
);
frame!(
    /// The crystal's Cartesian frame of Busing & Levy (1967): x ∥ a*, z ∥ c.
    CrystalCartesian
);

/// A vector together with the frame it is written in. Costs no more than the three numbers.
#[derive(Debug, PartialEq)]
pub struct Vector<F: Frame> {
    xyz: Vector3<f64>,
    frame: PhantomData<F>,
}

impl<F: Frame> Clone for Vector<F> {
    fn clone(&self) -> Self {
        *self
    }
}
impl<F: Frame> Copy for Vector<F> {}

impl<F: Frame> Vector<F> {
    /// The vector with these components in frame `F`.
    pub fn new(x: f64, y: f64, z: f64) -> Self {
        Self::from_raw(Vector3::new(x, y, z))
    }

    /// Declares that plain components are written in frame `F`.
    pub fn from_raw(xyz: Vector3<f64>) -> Self {
        Self { xyz, frame: PhantomData }
    }

    /// The plain components.
    pub fn raw(&self) -> &Vector3<f64> {
        &self.xyz
    }

    /// Length.
    pub fn norm(&self) -> f64 {
        self.xyz.norm()
    }

    /// Scalar product.
    pub fn dot(&self, other: &Self) -> f64 {
        self.xyz.dot(&other.xyz)
    }

    /// Vector product.
    pub fn cross(&self, other: &Self) -> Self {
        Self::from_raw(self.xyz.cross(&other.xyz))
    }

    /// The direction, or nothing for a vector too short to have one.
    pub fn direction(&self) -> Option<Unit<Vector3<f64>>> {
        Unit::try_new(self.xyz, 1e-300)
    }

    /// The angle to another vector in radians, 0 to π.
    pub fn angle_to(&self, other: &Self) -> f64 {
        angle_between(&self.xyz, &other.xyz)
    }
}

/// The angle between two vectors in radians, 0 to π, accurate near 0 and π too.
pub fn angle_between(a: &Vector3<f64>, b: &Vector3<f64>) -> f64 {
    a.cross(b).norm().atan2(a.dot(b))
}

impl<F: Frame> Add for Vector<F> {
    type Output = Self;
    fn add(self, other: Self) -> Self {
        Self::from_raw(self.xyz + other.xyz)
    }
}
impl<F: Frame> Sub for Vector<F> {
    type Output = Self;
    fn sub(self, other: Self) -> Self {
        Self::from_raw(self.xyz - other.xyz)
    }
}
impl<F: Frame> Neg for Vector<F> {
    type Output = Self;
    fn neg(self) -> Self {
        Self::from_raw(-self.xyz)
    }
}
impl<F: Frame> Mul<f64> for Vector<F> {
    type Output = Self;
    fn mul(self, factor: f64) -> Self {
        Self::from_raw(self.xyz * factor)
    }
}

/// A rotation that takes vectors of frame `From` into frame `To`. Inner names of a product must match, so a wrong chain
/// does not compile: `lab_from_head * head_from_crystal`.
#[derive(Debug, PartialEq)]
pub struct Rotation<To: Frame, From: Frame> {
    matrix: Matrix3<f64>,
    frames: PhantomData<(To, From)>,
}

impl<To: Frame, From: Frame> Clone for Rotation<To, From> {
    fn clone(&self) -> Self {
        *self
    }
}
impl<To: Frame, From: Frame> Copy for Rotation<To, From> {}

impl<To: Frame, From: Frame> Rotation<To, From> {
    /// Declares that a rotation takes frame `From` into frame `To`.
    pub fn from_rotation(rotation: Rotation3<f64>) -> Self {
        Self { matrix: rotation.into_inner(), frames: PhantomData }
    }

    /// The rotation with this matrix, or nothing if the matrix misses orthogonality or determinant +1 by more than
    /// `tolerance` in any element. It is brought to the nearest rotation.
    pub fn from_matrix(matrix: &Matrix3<f64>, tolerance: f64) -> Option<Self> {
        let off = (matrix.transpose() * matrix - Matrix3::identity()).abs().max();
        if !(off <= tolerance && matrix.determinant() > 0.0) {
            return None;
        }
        let svd = matrix.svd(true, true);
        let nearest = svd.u? * svd.v_t?;
        Some(Self { matrix: nearest, frames: PhantomData })
    }

    /// The 3×3 matrix, to be multiplied onto columns.
    pub fn matrix(&self) -> &Matrix3<f64> {
        &self.matrix
    }

    /// The rotation the other way.
    pub fn inverse(&self) -> Rotation<From, To> {
        Rotation { matrix: self.matrix.transpose(), frames: PhantomData }
    }

    /// The angle in radians, 0 to π, of the rotation between this one and another.
    pub fn angle_to(&self, other: &Self) -> f64 {
        Rotation3::from_matrix_unchecked(self.matrix.transpose() * other.matrix).angle()
    }
}

impl<A: Frame, B: Frame, C: Frame> Mul<Rotation<B, C>> for Rotation<A, B> {
    type Output = Rotation<A, C>;
    fn mul(self, inner: Rotation<B, C>) -> Rotation<A, C> {
        Rotation { matrix: self.matrix * inner.matrix, frames: PhantomData }
    }
}

impl<To: Frame, From: Frame> Mul<Vector<From>> for Rotation<To, From> {
    type Output = Vector<To>;
    fn mul(self, v: Vector<From>) -> Vector<To> {
        Vector::from_raw(self.matrix * v.xyz)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn quarter_turn_about_up_takes_the_beam_to_the_left() {
        let lab_from_head: Rotation<Lab, Head> =
            Rotation::from_rotation(Rotation3::from_axis_angle(&Vector3::y_axis(), std::f64::consts::FRAC_PI_2));
        let turned = lab_from_head * Vector::<Head>::new(0.0, 0.0, 1.0);
        assert!((turned - Vector::new(1.0, 0.0, 0.0)).norm() < 1e-15);
    }

    #[test]
    fn a_mirror_and_a_shear_are_no_rotations() {
        let mirror = Matrix3::from_diagonal(&Vector3::new(1.0, 1.0, -1.0));
        assert!(Rotation::<Lab, Head>::from_matrix(&mirror, 1e-6).is_none());
        let mut shear = Matrix3::identity();
        shear[(0, 1)] = 1e-3;
        assert!(Rotation::<Lab, Head>::from_matrix(&shear, 1e-6).is_none());
        assert!(Rotation::<Lab, Head>::from_matrix(&shear, 1e-2).is_some());
    }

    #[test]
    fn angles_near_zero_keep_their_digits() {
        let a = Vector3::new(1.0, 0.0, 0.0);
        let b = Vector3::new(1.0, 1e-9, 0.0);
        assert!((angle_between(&a, &b) - 1e-9).abs() < 1e-18);
    }
}

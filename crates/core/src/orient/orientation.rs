use nalgebra::Matrix3;

use crate::crystal::UnitCell;
use crate::frames::{CrystalCartesian, Head, Hkl, Rotation, Vector};

/// How the crystal sits on the goniometer head.
#[derive(Debug, Clone, PartialEq)]
pub struct Orientation {
    /// U: takes the crystal Cartesian frame into the head frame.
    pub head_from_crystal: Rotation<Head, CrystalCartesian>,
    /// UB in Å⁻¹ (1/d, no 2π), to be multiplied onto columns of indices; its columns are a*, b*, c* in the head frame.
    pub ub: Matrix3<f64>,
    /// Whether a third peak, out of the plane of the first two, has agreed.
    pub confirmed: bool,
}

impl Orientation {
    /// The orientation with this U of a crystal with this cell.
    pub fn new(head_from_crystal: Rotation<Head, CrystalCartesian>, cell: &UnitCell, confirmed: bool) -> Self {
        let ub = head_from_crystal.matrix() * cell.b_matrix();
        Self { head_from_crystal, ub, confirmed }
    }

    /// The node UB h in the head frame, in Å⁻¹: what the sample axes have to bring to where Q points.
    pub fn q_in_head(&self, hkl: Hkl) -> Vector<Head> {
        Vector::from_raw(self.ub * hkl.to_vector())
    }
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use nalgebra::{Rotation3, Vector3};

    use super::*;

    #[test]
    fn ub_is_u_after_b() {
        let cell = UnitCell::new(4.0, 5.0, 8.0, 90.0, 90.0, 90.0).unwrap();
        let quarter = Rotation3::from_axis_angle(&Vector3::z_axis(), std::f64::consts::FRAC_PI_2);
        let orientation = Orientation::new(Rotation::from_rotation(quarter), &cell, false);
        // A quarter turn about z takes a* (along x) to y, and b* (along y) to −x.
        assert!((orientation.q_in_head(Hkl::new(1.0, 0.0, 0.0)) - Vector::new(0.0, 0.25, 0.0)).norm() < 1e-15);
        assert!((orientation.q_in_head(Hkl::new(0.0, 1.0, 0.0)) - Vector::new(-0.2, 0.0, 0.0)).norm() < 1e-15);
        assert!((orientation.q_in_head(Hkl::new(0.0, 0.0, 2.0)) - Vector::new(0.0, 0.0, 0.25)).norm() < 1e-15);
    }
}

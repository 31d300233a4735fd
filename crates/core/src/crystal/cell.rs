use nalgebra::Matrix3;

use crate::frames::{CrystalCartesian, Hkl, Vector};
use crate::quantity::{CellAngle, Length, QuantityError};

/// Why six numbers are no unit cell.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
pub enum CellError {
    /// One of the six is no length or no cell angle.
    #[error(transparent)]
    Quantity(#[from] QuantityError),
    /// Three angles that cannot stand at one corner.
    #[error(
        "the angles {alpha}°, {beta}° and {gamma}° close no cell: each must be smaller than the sum of the other two, \
         and all three together smaller than 360°"
    )]
    AnglesCloseNoCell {
        /// α in degrees.
        alpha: f64,
        /// β in degrees.
        beta: f64,
        /// γ in degrees.
        gamma: f64,
    },
    /// A matrix whose columns span no volume, or a left-handed one.
    #[error("the matrix UB has the determinant {0:.3e} Å⁻³; that of a right-handed cell is positive, about 1/V")]
    NoRightHandedCell(f64),
}

/// The seven crystal systems, by the constraints they put on a cell.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum CrystalSystem {
    /// No constraint.
    Triclinic,
    /// Two right angles.
    Monoclinic,
    /// Three right angles.
    Orthorhombic,
    /// a = b, three right angles.
    Tetragonal,
    /// Hexagonal axes, or a = b = c with three equal angles.
    Trigonal,
    /// a = b, γ = 120°.
    Hexagonal,
    /// a = b = c, three right angles.
    Cubic,
}

/// A unit cell: three lengths in Å and three angles in degrees that are known to close.
#[derive(Debug, Clone, PartialEq)]
pub struct UnitCell {
    lengths: [f64; 3],
    angles_deg: [f64; 3],
    b: Matrix3<f64>,
}

/// Smallest (V / abc)² that counts as a cell and not as a plane: angles closer to flat than about 0.001°.
const FLATTEST: f64 = 1e-9;

impl UnitCell {
    /// The cell with edges a, b, c in Å and angles α, β, γ in degrees.
    ///
    /// # Errors
    /// If a number is out of range, or if the angles close no cell.
    pub fn new(a: f64, b: f64, c: f64, alpha: f64, beta: f64, gamma: f64) -> Result<Self, CellError> {
        for length in [a, b, c] {
            Length::new(length)?;
        }
        for angle in [alpha, beta, gamma] {
            CellAngle::new(angle)?;
        }
        let [ca, cb, cg] = [alpha, beta, gamma].map(cos_deg);
        let flatness = 1.0 - ca * ca - cb * cb - cg * cg + 2.0 * ca * cb * cg;
        let closes =
            alpha + beta + gamma < 360.0 && alpha < beta + gamma && beta < alpha + gamma && gamma < alpha + beta;
        if !closes || flatness < FLATTEST {
            return Err(CellError::AnglesCloseNoCell { alpha, beta, gamma });
        }
        Ok(Self {
            lengths: [a, b, c],
            angles_deg: [alpha, beta, gamma],
            b: busing_levy_b([a, b, c], [alpha, beta, gamma], flatness.sqrt()),
        })
    }

    /// The cell of an orientation matrix whose columns are a*, b*, c* in Å⁻¹ (1/d, no 2π), in any Cartesian frame:
    /// G* = (UB)ᵀ(UB), G = (G*)⁻¹.
    ///
    /// # Errors
    /// If the columns span no right-handed volume, or a cell out of range.
    pub fn from_ub(ub: &Matrix3<f64>) -> Result<Self, CellError> {
        let det = ub.determinant();
        let metric = (ub.transpose() * ub).try_inverse();
        let Some(g) = metric.filter(|_| det > 0.0 && det.is_finite()) else {
            return Err(CellError::NoRightHandedCell(det));
        };
        let [a, b, c] = [0, 1, 2].map(|i| g[(i, i)].sqrt());
        let angle = |cosine: f64| {
            let sine = (1.0 - cosine * cosine).max(0.0).sqrt();
            sine.atan2(cosine).to_degrees()
        };
        Self::new(a, b, c, angle(g[(1, 2)] / (b * c)), angle(g[(0, 2)] / (a * c)), angle(g[(0, 1)] / (a * b)))
    }

    /// Edges a, b, c in Å.
    pub fn lengths(&self) -> [f64; 3] {
        self.lengths
    }

    /// Angles α, β, γ in degrees.
    pub fn angles_deg(&self) -> [f64; 3] {
        self.angles_deg
    }

    /// B of Busing & Levy (1967): columns a*, b*, c* in the crystal Cartesian frame, in Å⁻¹; upper triangular.
    pub fn b_matrix(&self) -> &Matrix3<f64> {
        &self.b
    }

    /// The metric tensor G in Å²: a·a, a·b and so on.
    pub fn metric(&self) -> Matrix3<f64> {
        let [a, b, c] = self.lengths;
        let [ca, cb, cg] = self.angles_deg.map(cos_deg);
        Matrix3::new(a * a, a * b * cg, a * c * cb, a * b * cg, b * b, b * c * ca, a * c * cb, b * c * ca, c * c)
    }

    /// The metric tensor of the reciprocal lattice, G* = BᵀB, in Å⁻².
    pub fn reciprocal_metric(&self) -> Matrix3<f64> {
        self.b.transpose() * self.b
    }

    /// Volume in Å³.
    pub fn volume(&self) -> f64 {
        1.0 / self.b.determinant()
    }

    /// The node G of these indices in the crystal Cartesian frame, in Å⁻¹.
    pub fn node(&self, hkl: Hkl) -> Vector<CrystalCartesian> {
        Vector::from_raw(self.b * hkl.to_vector())
    }

    /// The spacing d = 1/|G| in Å; infinite for 0 0 0.
    pub fn d_spacing(&self, hkl: Hkl) -> f64 {
        1.0 / self.node(hkl).norm()
    }

    /// The angle between two nodes as seen from the origin, in radians.
    pub fn angle_between(&self, first: Hkl, second: Hkl) -> f64 {
        self.node(first).angle_to(&self.node(second))
    }
}

/// cos of an angle in degrees, exact for right angles and 60° and 120°, so that their cells carry no rounding dust.
fn cos_deg(angle: f64) -> f64 {
    match angle {
        90.0 => 0.0,
        60.0 => 0.5,
        120.0 => -0.5,
        _ => angle.to_radians().cos(),
    }
}

fn sin_deg(angle: f64) -> f64 {
    if angle == 90.0 { 1.0 } else { angle.to_radians().sin() }
}

/// `v` is V / abc.
fn busing_levy_b([a, b, c]: [f64; 3], angles: [f64; 3], v: f64) -> Matrix3<f64> {
    let [ca, cb, cg] = angles.map(cos_deg);
    let [sa, sb, sg] = angles.map(sin_deg);
    let (a_star, b_star, c_star) = (sa / (a * v), sb / (b * v), sg / (c * v));
    let cos_gamma_star = (ca * cb - cg) / (sa * sb);
    let cos_beta_star = (ca * cg - cb) / (sa * sg);
    let sin_gamma_star = v / (sa * sb);
    let sin_beta_star = v / (sa * sg);
    Matrix3::new(
        a_star,
        b_star * cos_gamma_star,
        c_star * cos_beta_star,
        0.0,
        b_star * sin_gamma_star,
        -c_star * sin_beta_star * ca,
        0.0,
        0.0,
        1.0 / c,
    )
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;

    #[test]
    fn b_inverts_the_direct_metric() {
        let cell = UnitCell::new(6.2686, 8.196, 6.084, 111.81, 101.01, 110.62).unwrap();
        let identity = cell.reciprocal_metric() * cell.metric();
        assert!((identity - Matrix3::identity()).abs().max() < 1e-12);
        assert!(cell.b_matrix()[(1, 0)] == 0.0 && cell.b_matrix()[(2, 1)] == 0.0);
        assert!((cell.volume() - cell.metric().determinant().sqrt()).abs() < 1e-9);
    }

    #[test]
    fn a_cell_comes_back_from_its_b() {
        let cell = UnitCell::new(5.0, 6.5, 9.0, 82.0, 103.0, 118.0).unwrap();
        let back = UnitCell::from_ub(cell.b_matrix()).unwrap();
        for i in 0..3 {
            assert!((cell.lengths()[i] - back.lengths()[i]).abs() < 1e-12);
            assert!((cell.angles_deg()[i] - back.angles_deg()[i]).abs() < 1e-11);
        }
    }

    #[test]
    fn angles_that_close_no_cell_are_refused() {
        for (al, be, ga) in [(30.0, 30.0, 61.0), (120.0, 120.0, 120.0), (130.0, 120.0, 115.0)] {
            let refused = UnitCell::new(5.0, 5.0, 5.0, al, be, ga);
            assert!(matches!(refused, Err(CellError::AnglesCloseNoCell { .. })), "{al} {be} {ga}");
        }
    }

    #[test]
    fn a_left_handed_matrix_is_refused() {
        let b = UnitCell::new(5.0, 5.0, 5.0, 90.0, 90.0, 90.0).unwrap().b_matrix() * -1.0;
        assert!(matches!(UnitCell::from_ub(&b), Err(CellError::NoRightHandedCell(_))));
    }
}

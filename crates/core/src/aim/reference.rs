use nalgebra::{Matrix3, Unit, Vector3};
use serde::{Deserialize, Serialize};

use crate::frames::{Head, Vector};
use crate::quantity::Index;

/// A direction fixed to the crystal's lattice: the reference of an azimuth, or the outward normal of a surface.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
#[allow(missing_docs)]
pub enum Reference {
    /// Along h a* + k b* + l c*.
    Reciprocal { h: Index, k: Index, l: Index },
    /// Along u a + v b + w c.
    Direct { u: Index, v: Index, w: Index },
}

impl Reference {
    /// The components as written.
    pub fn components(&self) -> [f64; 3] {
        match self {
            Self::Reciprocal { h, k, l } => [h.get(), k.get(), l.get()],
            Self::Direct { u, v, w } => [u.get(), v.get(), w.get()],
        }
    }

    /// Whether it has a direction at all.
    pub fn has_direction(&self) -> bool {
        self.components().iter().any(|&c| c != 0.0)
    }

    /// The direction in the head frame, for UB in Å⁻¹. Nothing for (0 0 0).
    pub fn in_head(&self, ub: &Matrix3<f64>) -> Option<Vector<Head>> {
        let components = Vector3::from(self.components());
        let raw = match self {
            Self::Reciprocal { .. } => ub * components,
            // The columns of (UB)⁻ᵀ are a, b and c.
            Self::Direct { .. } => ub.try_inverse()?.transpose() * components,
        };
        Unit::try_new(raw, 1e-300).map(|unit| Vector::from_raw(unit.into_inner()))
    }
}

impl std::fmt::Display for Reference {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        let [x, y, z] = self.components();
        match self {
            Self::Reciprocal { .. } => write!(f, "({x} {y} {z})*"),
            Self::Direct { .. } => write!(f, "[{x} {y} {z}]"),
        }
    }
}

/// What rules need to know of a crystal: its lattice as it sits on the head, and its surface.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct CrystalOnHead {
    /// Columns a*, b*, c* in the head frame, in Å⁻¹.
    pub ub: Matrix3<f64>,
    /// The outward normal of its surface, if it has one.
    pub surface: Option<Reference>,
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;
    use crate::crystal::UnitCell;

    #[test]
    fn direct_and_reciprocal_directions_are_dual() {
        let cell = UnitCell::new(5.0, 6.0, 7.0, 80.0, 95.0, 105.0).unwrap();
        let at = |text: &str| ron::from_str::<Reference>(text).unwrap().in_head(cell.b_matrix()).unwrap();
        let c = at("Direct(u: 0, v: 0, w: 1)");
        // The crystal's Cartesian frame has z along c; a* and b* are perpendicular to it.
        assert!((c.raw() - Vector3::z()).norm() < 1e-12);
        assert!(at("Reciprocal(h: 1, k: 2, l: 0)").dot(&c).abs() < 1e-12);
        assert!(ron::from_str::<Reference>("Reciprocal(h: 0, k: 0, l: 0)").unwrap().in_head(cell.b_matrix()).is_none());
    }
}

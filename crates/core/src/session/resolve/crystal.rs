use nalgebra::Matrix3;

use super::super::Session;
use super::super::problem::FieldProblem;
use crate::crystal::{SpaceGroup, SymmetryError, UnitCell};
use crate::frames::Rotation;
use crate::orient::Orientation;

/// A kept U is written with a limited number of digits: four decimals miss a rotation by less than this.
const ROTATION_TOLERANCE: f64 = 1e-4;

impl Session {
    /// The cell, and the space group in the setting that its symbol names, the cell decides or the defaults give.
    ///
    /// # Errors
    /// If the angles close no cell, if there is no such group, or if the cell breaks its constraints.
    pub fn resolve_crystal(&self) -> Result<(UnitCell, SpaceGroup), FieldProblem> {
        let c = &self.crystal.cell;
        let cell = UnitCell::new(
            c.a_angstrom.get(),
            c.b_angstrom.get(),
            c.c_angstrom.get(),
            c.alpha_deg.get(),
            c.beta_deg.get(),
            c.gamma_deg.get(),
        );
        let cell = cell.map_err(|error| FieldProblem::new("crystal.cell", error.to_string()))?;
        match SpaceGroup::resolve(&self.crystal.symmetry, &cell) {
            Ok(space_group) => Ok((cell, space_group)),
            Err(error @ (SymmetryError::CellBreaksGroup { .. } | SymmetryError::NeitherAxes { .. })) => {
                Err(FieldProblem::new("crystal.cell", error.to_string()))
            }
            Err(error) => Err(FieldProblem::new("crystal.symmetry", error.to_string())),
        }
    }

    /// The orientation that was kept, if there is one, brought to the nearest rotation.
    ///
    /// # Errors
    /// If its U misses a rotation by more than its digits explain.
    pub fn resolve_orientation(&self, cell: &UnitCell) -> Result<Option<Orientation>, FieldProblem> {
        let Some(kept) = &self.orientation else { return Ok(None) };
        let (r1, r2, r3) = kept.u;
        let rows = [r1, r2, r3].map(|(x, y, z)| [x.get(), y.get(), z.get()]);
        let u = Matrix3::from_fn(|row, column| rows[row][column]);
        match Rotation::from_matrix(&u, ROTATION_TOLERANCE) {
            Some(rotation) => Ok(Some(Orientation::new(rotation, cell, kept.confirmed))),
            None => {
                let off = (u.transpose() * u - Matrix3::identity()).abs().max();
                let message = format!(
                    "U is no rotation: its determinant is {:.6}, and UᵀU misses the unit matrix by up to {off:.2e}; accepted \
                     is a matrix with determinant +1 that misses it by at most {ROTATION_TOLERANCE:e}",
                    u.determinant()
                );
                Err(FieldProblem::new("orientation.u", message))
            }
        }
    }
}

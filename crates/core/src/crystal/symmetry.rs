//! Symmetry: from what a person wrote to the operations of a space group, and what follows from them.
//!
//! Operations come from the Hall symbols of the 530 tabulated settings and are exact; absences and equivalents follow from
//! the operations alone, never from a table of conditions.

mod absence;
mod constraint;
mod describe;
mod equivalents;
mod error;
mod generate;
mod group;
mod lattice;
mod operation;
mod query;
mod resolve;
mod settings;
mod symbol;
#[cfg(test)]
mod tests;

pub use absence::{AbsenceTest, Presence};
pub use constraint::{EQUAL_ANGLES_DEG, EQUAL_LENGTHS};
pub use error::{SymmetryError, UnknownSymbol};
pub use group::SpaceGroup;
pub use lattice::{LATTICE_TOLERANCE, lattice_rotations};
pub use operation::{Operation, TRANSLATION_STEPS};
pub use query::{Centring, SymmetryQuery};

//! The crystal: its cell, B, its symmetry, and the nodes of its reciprocal lattice.
//!
//! All of this would be true with no instrument in the building.

mod cell;

pub use cell::{CellError, CrystalSystem, UnitCell};

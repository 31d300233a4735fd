//! The crystal: its cell, B, its symmetry, and the nodes of its reciprocal lattice.
//!
//! All of this would be true with no instrument in the building.

mod cell;
mod nodes;
mod symmetry;

pub use cell::{CellError, CrystalSystem, UnitCell};
pub use nodes::{AbsentNodes, D_EDGE, DRange, MOST_NODES, NodeColumns, NodesError, NodesOutcome, nodes};
pub use symmetry::{
    AbsenceTest, Centring, EQUAL_ANGLES_DEG, EQUAL_LENGTHS, LATTICE_TOLERANCE, Operation, Presence, SpaceGroup,
    SymmetryError, SymmetryQuery, TRANSLATION_STEPS, UnknownSymbol, lattice_rotations,
};

//! The document: what a user would lose if the disk died. Inputs only, no results but an orientation that was kept.

mod document;

pub use document::{
    CellDocument, CrystalDocument, FormatVersion, Matrix, MachineChoice, OrientationDocument, PeakDocument, Session,
    TargetNode, Targets,
};

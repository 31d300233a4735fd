//! The document: what a user would lose if the disk died. Inputs only, no results but an orientation that was kept.
//!
//! A session file is RON with a version. Reading goes in two steps. [`Session::from_text`] (or [`OpenedSession::open`])
//! takes the document, in which each number has passed its own check; [`Session::resolve`] then checks how they fit together
//! and gives what the other rooms use. A refusal of either names file, line, column, field, what was met and what would be
//! accepted; the places of the second kind are found by reading the text again ([`place_problems`]). Saving is atomic and
//! keeps whatever it would lose ([`Session::save`]).

mod demo;
mod document;
mod files;
mod layout;
mod machines;
mod opened;
mod place;
mod problem;
mod read;
mod resolve;
mod save;
mod tokens;
mod words;

pub use demo::{DEMOS, Demo, demo};
pub use document::{
    CellDocument, CrystalDocument, FormatVersion, MachineChoice, Matrix, OrientationDocument, PeakDocument, Session,
    TargetNode, Targets,
};
pub use files::write_whole;
pub use machines::{LibraryError, MachineLibrary};
pub use opened::{OpenedSession, place_problems};
pub use problem::{FieldProblem, FileProblem, SessionError};
pub use read::read_machine;
pub use resolve::{MOST_NODES, Note, Peak, Resolved};
pub use save::{SaveError, SaveOutcome};
pub use tokens::has_comments;

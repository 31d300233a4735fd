//! From found peaks to the orientation of the crystal: U and UB, and how far they can be trusted.
//!
//! 1. [`Observation`]: what the readings of one peak say about Q, through the whole stack, with its uncertainty.
//! 2. [`orient_by_two`]: U and UB by the construction of Busing & Levy (1967).
//! 3. [`Mend`]: where angle or d do not fit, which other indices would.
//! 4. [`OtherAssignments`]: two peaks cannot prove themselves; everything else that fits them, and whether positions or
//!    only intensities can tell it apart.
//! 5. [`Third`] and [`Confirmation`]: the reachable reflection that decides, and whether it has been found.
//! 6. [`OrientationReport`]: all of it, as values for the window and as a page of text.

mod error;
mod later;
mod mend;
mod near;
mod observation;
mod orientation;
mod others;
mod peak;
mod report;
mod setup;
mod shell;
#[cfg(test)]
#[allow(clippy::unwrap_used, clippy::expect_used)]
mod tests;
mod text;
mod third;
mod two;
mod warning;

pub use error::OrientError;
pub use later::{Confirmation, Doubt, LaterPeak};
pub use mend::{ChangeKind, IndexChange, Mend};
pub use near::Miss;
pub use observation::{Observation, SMALLEST_TWO_THETA_DEG};
pub use orientation::Orientation;
pub use others::{OtherAssignment, OtherAssignments, SAME_ORIENTATION_DEG, Search};
pub use peak::{ASSUMED_UNCERTAINTY_DEG, Peak, PeakError, ReadingUncertainty};
pub use report::OrientationReport;
pub use setup::Setup;
pub use shell::Fit;
pub use third::{DecidingReflection, LEAST_MISS_DEG, LEAST_OUT_OF_PLANE_DEG, MISS_MARGIN, Third};
pub use two::{ALLOWED_SIGMAS, Compared, SMALLEST_PAIR_ANGLE_DEG, TwoPeakOrientation, orient_by_two};
pub use warning::Warning;

//! From many allowed settings to one night: the order, the drives between rows, and the proof of any list.
//!
//! [`DriveList::plan`] puts reachable reflections in an order, [`Prover`] proves or rejects rows of any list, whoever made
//! it, and [`Fingerprint`] tells whether a list and a session belong together.

mod clock;
mod fingerprint;
mod given;
mod list;
mod order;
mod proof;
mod rounding;
#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests;

pub use fingerprint::{Fingerprint, FingerprintError};
pub use given::{GivenList, GivenRow, RowCheck, SessionMatch, Verification};
pub use list::{Candidate, Course, DriveList, DriveRow, LeftOut, LeftOutReason, MOST_ROWS, RouteError};
pub use proof::{DEFAULT_TOLERANCE_DEG, Fault, Prover, RowProof};
pub use rounding::DECIMALS;

//! Drive lists as CSV: `order,h,k,l`, one column per axis named as on the machine, `drive_s,elapsed_s`. Comment lines start
//! with `#`. Angles are dial readings in degrees with 4 decimals, times in s.

mod read;
mod write;

pub use read::{ListError, read};
pub use write::{Heading, write};
pub(super) use write::{angle_text, index_text};

/// What the comment with the fingerprint starts with.
const FINGERPRINT: &str = "fingerprint:";
/// What the comment with the number of rows starts with.
const ROWS: &str = "rows:";

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests;

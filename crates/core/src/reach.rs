//! Whether a setting is allowed, and why not; which of the settings of a reflection to take.

mod azimuth;
mod constraint;
mod freest;
mod judge;
mod table;
mod verdict;

pub use azimuth::{AzimuthFamily, AzimuthWindows, Window};
pub use constraint::{AboveSurface, Constraint, Scan};
pub use judge::{Judge, JudgedSetting, Judgement, Room, Settings};
pub use table::{ReachRow, ReachTable, Stopped, Wanted};
pub use verdict::Verdict;

//! Whether a setting is allowed, and why not; which of the settings of a reflection to take.

mod judge;
mod score;
mod stretch;
mod table;
mod verdict;

pub use judge::{Judge, JudgedSetting, Judgement, Settings};
pub use table::{ReachRow, ReachTable, Stopped, Wanted};
pub use verdict::Verdict;

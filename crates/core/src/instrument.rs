//! The machine alone: stacks of rotation axes with limits, speeds and roles, read from data.
//!
//! A new machine is a RON file, never code. [`MachineDescription`] is what the file says, [`Instrument`] is the same after
//! every check, ready to turn dial readings into rotations.

mod axis;
mod description;
mod drive;
mod library;
mod readings;
mod setting;
mod stack;
mod travel;

pub use axis::{Axis, AxisName, AxisNameError, RESERVED_COLUMNS};
pub use description::{
    Approach, AxisDescription, FormatVersion, Inclined, Interval, Limits, MachineDescription, MachineProblem,
};
pub use library::{BUILT_IN_MACHINES, built_in_machine};
pub(crate) use readings::readings_without_doubles;
pub use setting::{MAX_AXES, Setting};
pub use stack::Instrument;
pub(crate) use travel::{LIMIT_DUST_DEG, wrap_deg};
pub use travel::{Travel, TravelCheck};

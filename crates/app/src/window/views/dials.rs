//! The selected reflection: every setting with its verdict, and each axis of the one shown drawn against its limits.

mod gauge;
mod list;
mod view;

pub use view::axis_dials;

//! Vectors and rotations that know their frame, and the closed-form rotation subproblems.
//!
//! Geometry that knows no crystal and no machine. See [`crate::conventions`] for the frames themselves.

mod half_angle;
mod hkl;
mod spaces;
pub(crate) mod subproblem;

pub(crate) use half_angle::HalfAngle;
pub use hkl::Hkl;
pub use spaces::{CrystalCartesian, Frame, Head, Lab, Rotation, Vector, angle_between};

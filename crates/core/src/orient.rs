//! From found peaks to the orientation of the crystal: U and UB, and how far they can be trusted.

mod orientation;

pub use orientation::Orientation;

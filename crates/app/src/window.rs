//! The window: one workplace from the inputs to the drive list.

mod shared;
pub mod views;

pub use shared::{Picked, Reach, Results};

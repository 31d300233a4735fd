//! Planning of a measurement on a single-crystal goniometer: the science, with no window and no clock.
//!
//! One document, the [`session`], goes in; everything else is derived from it by pure functions. The rooms, in the
//! order data walks through them, are the modules below; each calls only those above it. Frames, signs and units
//! are stated once, in [`conventions`].

pub mod aim;
pub mod conventions;
pub mod crystal;
pub mod exchange;
pub mod frames;
pub mod instrument;
mod lanes;
pub mod orient;
pub mod pace;
pub mod quantity;
pub mod radiation;
pub mod reach;
pub mod route;
pub mod session;
pub mod targets;
pub mod work;

#[cfg(test)]
mod testing;

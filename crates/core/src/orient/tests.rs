//! The laws of orienting, on simulated peaks whose truth is known.

mod construction;
mod deciding;
mod errors;
mod mending;
mod other_indices;
mod simulation;
mod uncertainty;

//! Checks of Ringwright against published values and independent packages; each module names its sources.
#![allow(clippy::unwrap_used, clippy::expect_used)]

mod axis_frames;
mod beam_turn;
mod busing_levy;
mod cells;
mod cells_measured;
mod diffraction;
mod kappa_list;
mod kappa_positions;
mod kappa_relation;
mod million_nodes;
mod published_ub;
mod radiation;
mod settings_by_search;
mod simultaneous;
mod standards;
mod symmetry;

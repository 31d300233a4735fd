//! The views driven through egui_kittest, drawn without a driver.
#![allow(clippy::unwrap_used, clippy::expect_used, clippy::panic)]

mod dials;
mod fixture;
mod lattice;
mod pages;
mod renderer;
mod table;

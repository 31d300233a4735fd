//! Checks of Ringwright against published values and independent packages; each module names its sources.
#![allow(clippy::unwrap_used, clippy::expect_used)]

mod symmetry;

//! The window of Ringwright, as a library so that tests and benchmarks can drive it without a screen.

#[cfg(feature = "window")]
pub mod window;

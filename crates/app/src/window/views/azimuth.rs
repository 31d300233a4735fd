//! The azimuth of the selected reflection: a ribbon over ψ that tells what is allowed and why not, and turns the setting.

mod content;
mod hover;
mod paint;
mod view;

pub use view::AzimuthRibbon;

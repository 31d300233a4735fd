//! One file for each verb.

mod azimuth;
mod demo;
mod night;
mod orient;
mod plan;
mod reach;
mod verify;
mod window;

pub use azimuth::azimuth;
pub use demo::demo;
pub use orient::orient;
pub use plan::plan;
pub use reach::reach;
pub use verify::verify;
pub use window::window;

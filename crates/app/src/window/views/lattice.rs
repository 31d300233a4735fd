//! The reciprocal lattice in the lab frame at one setting, with the Ewald sphere: drawn by the software renderer into one
//! texture, which is made again only when scene, eye or size change.

mod gesture;
mod label;
mod nodes;
mod overlay;
mod picture;
mod scene;
mod view;

pub use view::{LatticeView, ViewOptions};

//! What the window shows of the results: the lattice in three dimensions, the table of reflections, the azimuth and
//! the dials of the selected reflection. Views draw only from one [`super::Reach`] and change nothing but the selection and themselves.

mod azimuth;
mod dials;
mod lattice;
mod legend;
mod number;
mod palette;
mod settings;
mod table;
#[cfg(test)]
#[allow(clippy::unwrap_used)]
pub(super) mod test_renderer;

pub use azimuth::AzimuthRibbon;
pub use dials::axis_dials;
pub use lattice::{LatticeView, ViewOptions};
pub use legend::legend;
pub use palette::{Kind, Palette, ShownKinds, paint_mark};
pub use settings::PickedSettings;
pub use table::ReflectionTable;
#[cfg(test)]
mod tests;

//! A small depth-buffered software renderer: a [`Scene`] of plain primitives, seen by an [`Eye`], painted
//! into a [`Canvas`] that holds a colour and an id for every pixel. No window, no graphics driver.
//!
//! * Positions and lengths of a scene are world units of the caller's choice; the frame is right-handed.
//! * Positions on the canvas are pixels, x to the right, y down, (0, 0) the outer corner of the first pixel,
//!   so a pixel's centre lies at half-integers.
//! * Colours are sRGB. A [`Colour`] has straight alpha, the canvas premultiplied alpha; light and blending
//!   are computed on the gamma-encoded values, as user interfaces do, so a picture looks the same inside one.
//! * [`paint`] uses as many threads as rayon gives it; the picture does not depend on their number.
//!
//! [`flat`] paints textured triangles in pixel coordinates: a user interface without a driver.

mod canvas;
mod colour;
mod eye;
mod fill;
pub mod flat;
mod mesh;
mod paint;
mod scene;
#[cfg(test)]
mod testing;
mod vector;
mod view;

pub use canvas::{Canvas, CanvasError, MAX_PIXELS, MAX_SIDE, NO_ID};
pub use colour::Colour;
pub use eye::{Eye, EyeError, Lens};
pub use mesh::{Mesh, MeshError, Placement};
pub use paint::{MAX_OVERSAMPLING, paint};
pub use scene::{Arrow, Ball, Circle, Dash, Disc, Fade, Line, Mark, Scene, Size, Triangle};
pub use view::{Ray, Screen, View};

//! Textured triangles in pixel coordinates, one over the other in the order given: what a user interface hands
//! to a graphics driver, painted without one.
//!
//! All colours are premultiplied sRGB; a texel is multiplied by the vertex colour and laid over the canvas on the
//! gamma-encoded values, each layer rounded to bytes. Edges are not smoothed: interfaces feather them in the mesh.

mod texture;

use rayon::prelude::*;

pub use texture::{Filter, Texture, TextureError, Wrap};

use crate::canvas::Canvas;
use crate::colour::over;
use crate::fill::{Corner, Window, fill};

/// A corner of a flat triangle.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct FlatVertex {
    /// Pixels from the left and from the top edge of the canvas.
    pub position: [f32; 2],
    /// Place in the texture: (0, 0) its upper left corner, (1, 1) its lower right corner.
    pub uv: [f32; 2],
    /// Premultiplied sRGB.
    pub colour: [u8; 4],
}

/// Triangles with one texture and one clip rectangle.
#[derive(Debug, Clone, Copy)]
pub struct FlatMesh<'a> {
    /// Left, top, right and bottom in pixels, rounded to whole ones; nothing is painted outside.
    pub clip: [f32; 4],
    /// Corners.
    pub vertices: &'a [FlatVertex],
    /// Three for each triangle; a triangle that names a corner that does not exist is left out.
    pub indices: &'a [u32],
    /// Sampled at the centre of each pixel.
    pub texture: &'a Texture,
}

const BAND_ROWS: usize = 32;

/// Paints meshes over the colours of a canvas; depth and ids stay.
pub fn paint_flat(meshes: &[FlatMesh<'_>], canvas: &mut Canvas) {
    let width = canvas.width();
    if width == 0 {
        return;
    }
    canvas.colour.par_chunks_mut(BAND_ROWS * width).enumerate().for_each(|(index, colour)| {
        let top = index * BAND_ROWS;
        let band =
            Window { left: 0, top: top as i64, right: width as i64, bottom: (top + colour.len() / width) as i64 };
        let mut target = Target { width, top, colour };
        for mesh in meshes {
            let window = clipped(band, mesh.clip);
            if window.left < window.right && window.top < window.bottom {
                target.paint(mesh, window);
            }
        }
    });
}

fn clipped(band: Window, clip: [f32; 4]) -> Window {
    let [left, top, right, bottom] = clip.map(|edge| edge.round() as i64);
    Window {
        left: band.left.max(left),
        top: band.top.max(top),
        right: band.right.min(right),
        bottom: band.bottom.min(bottom),
    }
}

struct Target<'a> {
    width: usize,
    top: usize,
    colour: &'a mut [[u8; 4]],
}

impl Target<'_> {
    fn paint(&mut self, mesh: &FlatMesh<'_>, window: Window) {
        for triangle in mesh.indices.chunks_exact(3) {
            let corner = |i: usize| triangle.get(i).and_then(|&index| mesh.vertices.get(index as usize));
            if let (Some(a), Some(b), Some(c)) = (corner(0), corner(1), corner(2)) {
                self.triangle([a, b, c], mesh.texture, window);
            }
        }
    }

    fn triangle(&mut self, vertices: [&FlatVertex; 3], texture: &Texture, window: Window) {
        let [a, b, c] = vertices;
        let rows = vertices.map(|v| v.position[1]);
        let above = rows.iter().all(|&y| y < window.top as f32);
        let below = rows.iter().all(|&y| y > window.bottom as f32);
        if above || below {
            return;
        }
        if a.colour == b.colour && a.colour == c.colour && a.uv == b.uv && a.uv == c.uv {
            let source = texture.sample(a.uv).tinted(a.colour.map(f32::from));
            let corners = vertices.map(|v| Corner { x: v.position[0].into(), y: v.position[1].into(), values: [] });
            fill(corners, window, |run| {
                for pixel in self.pixels(run.y, run.start, run.end) {
                    *pixel = over(source, *pixel);
                }
            });
            return;
        }
        let corners = vertices.map(|v| {
            let [u, w] = v.uv.map(f64::from);
            let [r, g, b, a] = v.colour.map(f64::from);
            Corner { x: v.position[0].into(), y: v.position[1].into(), values: [u, w, r, g, b, a] }
        });
        fill(corners, window, |run| {
            let mut values = run.values;
            for pixel in self.pixels(run.y, run.start, run.end) {
                let [u, w, r, g, b, a] = values.map(|v| v as f32);
                *pixel = over(texture.sample([u, w]).tinted([r, g, b, a]), *pixel);
                for (value, step) in values.iter_mut().zip(run.step) {
                    *value += step;
                }
            }
        });
    }

    fn pixels(&mut self, y: usize, start: usize, end: usize) -> &mut [[u8; 4]] {
        let row = (y - self.top) * self.width;
        &mut self.colour[row + start..row + end]
    }
}

#[cfg(test)]
mod tests;

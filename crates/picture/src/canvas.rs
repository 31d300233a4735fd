use crate::colour::Colour;

/// The id of a pixel that shows nothing to be picked.
pub const NO_ID: u32 = u32::MAX;

/// The most pixels one canvas may have (8192 × 8192, about 800 MB).
pub const MAX_PIXELS: usize = 8192 * 8192;

/// The longest side one canvas may have, in pixels.
pub const MAX_SIDE: usize = 32_768;

/// Why a canvas cannot be made.
#[derive(Debug, Clone, Copy, PartialEq, Eq, thiserror::Error)]
pub enum CanvasError {
    /// More pixels than [`MAX_PIXELS`], or a side longer than [`MAX_SIDE`].
    #[error(
        "a picture of {width} x {height} pixels is too large: at most {MAX_PIXELS} pixels in all and {MAX_SIDE} on a side"
    )]
    TooLarge {
        /// Width asked for, in pixels.
        width: usize,
        /// Height asked for, in pixels.
        height: usize,
    },
}

/// A picture in memory: premultiplied sRGB colour, nearness and id for every pixel, row after row from the top.
///
/// *Nearness* grows towards the eye and is linear across the picture for anything flat: 1/depth in perspective,
/// −depth in an orthographic view (see [`crate::Screen::nearness`]).
#[derive(Debug, Clone, PartialEq)]
pub struct Canvas {
    width: usize,
    height: usize,
    pub(crate) colour: Vec<[u8; 4]>,
    pub(crate) nearness: Vec<f32>,
    pub(crate) id: Vec<u32>,
    /// The nearness of a pixel that shows nothing.
    pub(crate) nothing: f32,
}

impl Canvas {
    /// A clear canvas of this size in pixels; a side of zero is allowed and holds no pixels.
    pub fn new(width: usize, height: usize) -> Result<Self, CanvasError> {
        let pixels = width
            .checked_mul(height)
            .filter(|&pixels| pixels <= MAX_PIXELS && width.max(height) <= MAX_SIDE)
            .ok_or(CanvasError::TooLarge { width, height })?;
        let nothing = f32::NEG_INFINITY;
        Ok(Self {
            width,
            height,
            colour: vec![[0; 4]; pixels],
            nearness: vec![nothing; pixels],
            id: vec![NO_ID; pixels],
            nothing,
        })
    }

    /// Width in pixels.
    pub fn width(&self) -> usize {
        self.width
    }

    /// Height in pixels.
    pub fn height(&self) -> usize {
        self.height
    }

    /// Forgets the picture and fills the colour.
    pub fn clear(&mut self, background: Colour) {
        self.colour.fill(background.premultiplied());
        self.nearness.fill(self.nothing);
        self.id.fill(NO_ID);
    }

    /// Premultiplied sRGB pixels.
    pub fn rgba(&self) -> &[[u8; 4]] {
        &self.colour
    }

    /// The same pixels as bytes, four each.
    pub fn rgba_bytes(&self) -> &[u8] {
        self.colour.as_flattened()
    }

    /// Bytes with straight alpha, as image files want them.
    pub fn straight_rgba_bytes(&self) -> Vec<u8> {
        self.colour.iter().flat_map(|&pixel| straight(pixel)).collect()
    }

    /// Premultiplied colour of one pixel; `None` outside the canvas.
    pub fn colour_at(&self, x: usize, y: usize) -> Option<[u8; 4]> {
        self.index(x, y).and_then(|i| self.colour.get(i).copied())
    }

    /// The id that a pixel shows; `None` outside the canvas and where there is none.
    pub fn id_at(&self, x: usize, y: usize) -> Option<u32> {
        self.index(x, y).and_then(|i| self.id.get(i).copied()).filter(|&id| id != NO_ID)
    }

    /// The nearness of what a pixel shows; `None` outside the canvas and where it shows the background.
    /// Translucent things are looked through.
    pub fn nearness_at(&self, x: usize, y: usize) -> Option<f32> {
        self.index(x, y).and_then(|i| self.nearness.get(i).copied()).filter(|&n| n > self.nothing)
    }

    /// The id seen closest to a position in pixels, no farther away than `reach` pixels; for picking with a pointer.
    pub fn pick(&self, x: f64, y: f64, reach: f64) -> Option<u32> {
        if !(x.is_finite() && y.is_finite() && reach.is_finite() && reach >= 0.0) {
            return None;
        }
        let first = |centre: f64| (centre - reach).floor().max(0.0) as usize;
        let end = |centre: f64, size: usize| ((centre + reach).floor().max(-1.0) + 1.0).min(size as f64) as usize;
        let mut best: Option<(f64, u32)> = None;
        for py in first(y)..end(y, self.height) {
            for px in first(x)..end(x, self.width) {
                let Some(id) = self.id_at(px, py) else { continue };
                // Distance to the pixel's square, so the pixel under the pointer counts as 0.
                let beyond = |p: usize, at: f64| (p as f64 - at).max(at - (p as f64 + 1.0)).max(0.0);
                let distance = beyond(px, x).hypot(beyond(py, y));
                if distance <= reach && best.is_none_or(|(d, _)| distance < d) {
                    best = Some((distance, id));
                }
            }
        }
        best.map(|(_, id)| id)
    }

    fn index(&self, x: usize, y: usize) -> Option<usize> {
        (x < self.width && y < self.height).then(|| y * self.width + x)
    }
}

fn straight([r, g, b, a]: [u8; 4]) -> [u8; 4] {
    let divide = |c: u8| {
        let alpha = u32::from(a).max(1);
        ((u32::from(c) * 255 + alpha / 2) / alpha).min(255) as u8
    };
    [divide(r), divide(g), divide(b), a]
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;

    #[test]
    fn size_is_bounded_and_zero_is_fine() {
        assert!(Canvas::new(0, 700).unwrap().rgba().is_empty());
        assert!(matches!(Canvas::new(usize::MAX, 2), Err(CanvasError::TooLarge { .. })));
        assert!(matches!(Canvas::new(8193, 8192), Err(CanvasError::TooLarge { width: 8193, height: 8192 })));
        assert!(matches!(Canvas::new(0, usize::MAX), Err(CanvasError::TooLarge { .. })));
    }

    #[test]
    fn picking_takes_the_closest_id_in_reach() {
        let mut canvas = Canvas::new(10, 10).unwrap();
        canvas.id[5 * 10 + 2] = 7;
        canvas.id[5 * 10 + 8] = 9;
        assert_eq!(canvas.pick(2.5, 5.5, 0.0), Some(7));
        assert_eq!(canvas.pick(4.5, 5.5, 3.0), Some(7));
        assert_eq!(canvas.pick(6.9, 5.5, 6.0), Some(9));
        assert_eq!(canvas.pick(4.5, 5.5, 1.0), None);
        assert_eq!(canvas.pick(-0.5, 5.5, 4.0), Some(7), "from outside the canvas");
        assert_eq!(canvas.pick(f64::NAN, 5.5, 4.0), None);
        assert_eq!(canvas.pick(5.0, 5.0, 1e300), Some(7), "reach larger than the canvas");
    }

    #[test]
    fn straight_alpha_undoes_the_product() {
        let colour = Colour { r: 200, g: 100, b: 0, a: 51 };
        let mut canvas = Canvas::new(1, 1).unwrap();
        canvas.clear(colour);
        assert_eq!(canvas.rgba(), &[[40, 20, 0, 51]]);
        assert_eq!(canvas.straight_rgba_bytes(), vec![200, 100, 0, 51]);
        canvas.clear(Colour::CLEAR);
        assert_eq!(canvas.straight_rgba_bytes(), vec![0; 4]);
    }
}

/// How a texture is read between its texels.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, Default)]
pub enum Filter {
    /// The texel that holds the place.
    Nearest,
    /// The four texels around the place, weighted.
    #[default]
    Linear,
}

/// What a texture shows beyond its edges.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, Default)]
pub enum Wrap {
    /// Its outermost texels.
    #[default]
    Edge,
    /// Itself again.
    Repeat,
    /// Its mirror image, then itself, and so on.
    Mirror,
}

/// Why a texture cannot be made.
#[derive(Debug, Clone, Copy, PartialEq, Eq, thiserror::Error)]
pub enum TextureError {
    /// Number of texels and size do not agree, or there are none.
    #[error("a texture of {width} x {height} needs that many texels, at least one; {texels} were given")]
    Size {
        /// Width asked for.
        width: usize,
        /// Height asked for.
        height: usize,
        /// Texels given.
        texels: usize,
    },
    /// A patch that does not lie inside the texture.
    #[error(
        "a patch of {patch_width} x {patch_height} at ({x}, {y}) does not fit into a texture of {width} x {height}"
    )]
    Patch {
        /// Column of the patch's first texel.
        x: usize,
        /// Row of the patch's first texel.
        y: usize,
        /// Width of the patch.
        patch_width: usize,
        /// Height of the patch.
        patch_height: usize,
        /// Width of the texture.
        width: usize,
        /// Height of the texture.
        height: usize,
    },
}

/// An image to be drawn with: premultiplied sRGB texels, row after row from the top.
#[derive(Debug, Clone, PartialEq)]
pub struct Texture {
    width: usize,
    height: usize,
    texels: Vec<[u8; 4]>,
    /// How it is read between texels.
    pub filter: Filter,
    /// What it shows beyond its edges.
    pub wrap: Wrap,
}

/// A colour read from a texture: premultiplied, channels 0 … 255.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct Texel([f32; 4]);

impl Texel {
    /// Multiplied by a vertex colour with channels 0 … 255, rounded to bytes.
    pub fn tinted(self, colour: [f32; 4]) -> [u8; 4] {
        // The conversion saturates, so values out of range do no harm.
        std::array::from_fn(|i| (self.0[i] * colour[i] / 255.0 + 0.5) as u8)
    }
}

impl Texture {
    /// A texture from premultiplied sRGB texels.
    pub fn new(width: usize, height: usize, texels: Vec<[u8; 4]>) -> Result<Self, TextureError> {
        if texels.is_empty() || width.checked_mul(height) != Some(texels.len()) {
            return Err(TextureError::Size { width, height, texels: texels.len() });
        }
        Ok(Self { width, height, texels, filter: Filter::default(), wrap: Wrap::default() })
    }

    /// Width and height in texels.
    pub fn size(&self) -> [usize; 2] {
        [self.width, self.height]
    }

    /// Replaces the texels of a patch whose first texel is at (x, y).
    pub fn patch(&mut self, x: usize, y: usize, patch: &Self) -> Result<(), TextureError> {
        let fits = |at: usize, size: usize, room: usize| at.checked_add(size).is_some_and(|end| end <= room);
        if !fits(x, patch.width, self.width) || !fits(y, patch.height, self.height) {
            return Err(TextureError::Patch {
                x,
                y,
                patch_width: patch.width,
                patch_height: patch.height,
                width: self.width,
                height: self.height,
            });
        }
        let rows = self.texels.chunks_exact_mut(self.width).skip(y);
        for (row, source) in rows.zip(patch.texels.chunks_exact(patch.width)) {
            row[x..x + patch.width].copy_from_slice(source);
        }
        Ok(())
    }

    pub(crate) fn sample(&self, [u, v]: [f32; 2]) -> Texel {
        let (x, y) = (u * self.width as f32, v * self.height as f32);
        if self.filter == Filter::Nearest {
            return Texel(self.texel(x.floor() as i64, y.floor() as i64).map(f32::from));
        }
        let (x, y) = (x - 0.5, y - 0.5);
        let (left, top) = (x.floor(), y.floor());
        // Infinity minus itself is NaN, which the conversion to bytes turns into 0.
        let (right_part, bottom_part) = (x - left, y - top);
        let (left, top) = (left as i64, top as i64);
        let corner = |dx: i64, dy: i64| self.texel(left.saturating_add(dx), top.saturating_add(dy)).map(f32::from);
        let [a, b, c, d] = [corner(0, 0), corner(1, 0), corner(0, 1), corner(1, 1)];
        Texel(std::array::from_fn(|i| {
            let upper = a[i] + (b[i] - a[i]) * right_part;
            let lower = c[i] + (d[i] - c[i]) * right_part;
            upper + (lower - upper) * bottom_part
        }))
    }

    fn texel(&self, x: i64, y: i64) -> [u8; 4] {
        let (x, y) = (self.wrap.index(x, self.width), self.wrap.index(y, self.height));
        self.texels[y * self.width + x]
    }
}

impl Wrap {
    fn index(self, at: i64, size: usize) -> usize {
        let size = size as i64;
        let inside = match self {
            Self::Edge => at.clamp(0, size - 1),
            Self::Repeat => at.rem_euclid(size),
            Self::Mirror => {
                let phase = at.rem_euclid(2 * size);
                phase.min(2 * size - 1 - phase)
            }
        };
        inside as usize
    }
}

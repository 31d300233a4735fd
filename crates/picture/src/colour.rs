/// An sRGB colour with straight (not premultiplied) alpha; alpha 255 is opaque.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub struct Colour {
    /// Red.
    pub r: u8,
    /// Green.
    pub g: u8,
    /// Blue.
    pub b: u8,
    /// Alpha: 0 shows nothing, 255 is opaque.
    pub a: u8,
}

impl Colour {
    /// Nothing at all.
    pub const CLEAR: Self = Self { r: 0, g: 0, b: 0, a: 0 };

    /// An opaque colour.
    pub const fn rgb(r: u8, g: u8, b: u8) -> Self {
        Self { r, g, b, a: 255 }
    }

    /// The same colour with another alpha.
    pub const fn with_alpha(self, a: u8) -> Self {
        Self { a, ..self }
    }

    pub(crate) const fn is_opaque(self) -> bool {
        self.a == 255
    }

    /// The colour channels moved towards `other` by `amount` in 0 … 1; alpha stays.
    pub(crate) fn towards(self, other: Self, amount: f32) -> Self {
        if amount <= 0.0 {
            return self;
        }
        let mix = |from: u8, to: u8| (f32::from(from) + (f32::from(to) - f32::from(from)) * amount + 0.5) as u8;
        Self { r: mix(self.r, other.r), g: mix(self.g, other.g), b: mix(self.b, other.b), a: self.a }
    }

    /// Premultiplied bytes, as the canvas holds them.
    pub(crate) fn premultiplied(self) -> [u8; 4] {
        let times = |c: u8| scale_byte(c, self.a);
        [times(self.r), times(self.g), times(self.b), self.a]
    }
}

/// a × b / 255, rounded to nearest: exact for all bytes.
#[inline]
pub(crate) fn scale_byte(a: u8, b: u8) -> u8 {
    let t = u32::from(a) * u32::from(b) + 128;
    ((t + (t >> 8)) >> 8) as u8
}

/// Premultiplied `source` laid over premultiplied `below`: source + below × (1 − source alpha), for all four
/// channels (Porter & Duff 1984, "over").
#[inline]
pub(crate) fn over(source: [u8; 4], below: [u8; 4]) -> [u8; 4] {
    let keep = 255 - source[3];
    std::array::from_fn(|i| source[i].saturating_add(scale_byte(below[i], keep)))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn scaling_bytes_is_the_rounded_quotient() {
        for a in 0..=255_u8 {
            for b in 0..=255_u8 {
                let exact = (f64::from(a) * f64::from(b) / 255.0).round() as u8;
                assert_eq!(scale_byte(a, b), exact, "{a} x {b}");
            }
        }
    }

    #[test]
    fn opaque_covers_and_clear_leaves() {
        let below = [10, 20, 30, 255];
        assert_eq!(over(Colour::rgb(1, 2, 3).premultiplied(), below), [1, 2, 3, 255]);
        assert_eq!(over(Colour::CLEAR.premultiplied(), below), below);
    }

    #[test]
    fn half_white_over_black_is_mid_grey() {
        assert_eq!(
            over(Colour::rgb(255, 255, 255).with_alpha(128).premultiplied(), [0, 0, 0, 255]),
            [128, 128, 128, 255]
        );
    }
}

use super::frame::Frame;
use crate::canvas::NO_ID;
use crate::colour::{over, scale_byte};
use crate::fill::Window;

/// Some rows of samples, all of the same width.
pub(crate) struct Strip<'a> {
    width: usize,
    /// Row of the whole picture that is the first here.
    top: usize,
    colour: &'a mut [[u8; 4]],
    nearness: &'a mut [f32],
    id: &'a mut [u32],
}

/// One row of a strip, open for painting.
pub(crate) struct Row<'a> {
    pub colour: &'a mut [[u8; 4]],
    pub nearness: &'a mut [f32],
    pub id: &'a mut [u32],
}

/// The surface that shows in a sample.
#[derive(Clone, Copy)]
pub(crate) struct Paint {
    pub rgb: [u8; 3],
    pub alpha: u8,
    pub id: u32,
}

impl Row<'_> {
    /// Puts paint at `x` if it is nearer than what is there.
    #[inline(always)]
    pub fn plot(&mut self, x: usize, nearness: f32, paint: Paint) {
        if nearness > self.nearness[x] {
            let [r, g, b] = paint.rgb;
            if paint.alpha == 255 {
                self.nearness[x] = nearness;
                self.id[x] = paint.id;
                self.colour[x] = [r, g, b, 255];
            } else {
                let a = paint.alpha;
                let source = [scale_byte(r, a), scale_byte(g, a), scale_byte(b, a), a];
                self.colour[x] = over(source, self.colour[x]);
            }
        }
    }
}

impl<'a> Strip<'a> {
    /// The three slices have `width` samples for each row.
    pub fn new(
        width: usize,
        top: usize,
        colour: &'a mut [[u8; 4]],
        nearness: &'a mut [f32],
        id: &'a mut [u32],
    ) -> Self {
        Self { width, top, colour, nearness, id }
    }

    pub fn clear(&mut self, frame: &Frame) {
        self.colour.fill(frame.background.premultiplied());
        self.nearness.fill(frame.nothing);
        self.id.fill(NO_ID);
    }

    fn height(&self) -> usize {
        self.colour.len() / self.width.max(1)
    }

    pub fn window(&self) -> Window {
        let bottom = self.top + self.height();
        Window { left: 0, top: self.top as i64, right: self.width as i64, bottom: bottom as i64 }
    }

    /// Rows of the whole picture that lie here and whose centres are within `from` … `to`.
    pub fn rows_between(&self, [from, to]: [f32; 2]) -> std::ops::Range<usize> {
        centres([from, to], self.top, self.top + self.height())
    }

    /// Columns whose centres are within `from` … `to`.
    pub fn columns_between(&self, [from, to]: [f32; 2]) -> std::ops::Range<usize> {
        centres([from, to], 0, self.width)
    }

    /// Row `y` of the whole picture; it must lie in this strip.
    #[inline]
    pub fn row(&mut self, y: usize) -> Row<'_> {
        let start = (y - self.top) * self.width;
        let range = start..start + self.width;
        Row {
            colour: &mut self.colour[range.clone()],
            nearness: &mut self.nearness[range.clone()],
            id: &mut self.id[range],
        }
    }

    /// Reduces n × n samples to one pixel: mean colour, depth and id of the nearest sample.
    pub fn reduce(&self, n: usize, colour: &mut [[u8; 4]], nearness: &mut [f32], id: &mut [u32]) {
        let pixels_per_row = self.width / n;
        let weight = (n * n) as u32;
        for (pixel, ((colour, nearness), id)) in colour.iter_mut().zip(nearness).zip(id).enumerate() {
            let first = (pixel / pixels_per_row) * n * self.width + (pixel % pixels_per_row) * n;
            let mut sum = [0_u32; 4];
            let mut nearest = first;
            for row in 0..n {
                let start = first + row * self.width;
                for sample in start..start + n {
                    for (total, &part) in sum.iter_mut().zip(&self.colour[sample]) {
                        *total += u32::from(part);
                    }
                    if self.nearness[sample] > self.nearness[nearest] {
                        nearest = sample;
                    }
                }
            }
            *colour = sum.map(|total| ((total + weight / 2) / weight) as u8);
            *nearness = self.nearness[nearest];
            *id = self.id[nearest];
        }
    }
}

/// Whole numbers n in `low..high` with n + ½ within `from` … `to`; empty if those are not numbers.
#[inline]
fn centres([from, to]: [f32; 2], low: usize, high: usize) -> std::ops::Range<usize> {
    // Conversions from float saturate and turn NaN into 0; a canvas is far smaller than their range. Cutting off is
    // rounding down for what is not negative, and cheaper than asking for it.
    let from = (from - 0.5).max(0.0);
    let whole = from as i32;
    let start = (whole as usize + usize::from((whole as f32) < from)).max(low);
    let end = (to + 0.5).max(0.0) as i32 as usize;
    start..end.min(high).max(start)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn centres_lie_between() {
        // Centres 2.5, 3.5, 4.5.
        assert_eq!(centres([2.5, 4.5], 0, 9), 2..5);
        assert_eq!(centres([2.49, 4.51], 0, 9), 2..5);
        assert_eq!(centres([2.51, 4.49], 0, 9), 3..4);
        assert_eq!(centres([-7.0, 99.0], 1, 9), 1..9);
        assert_eq!(centres([f32::NEG_INFINITY, f32::INFINITY], 1, 9), 1..9);
        for nothing in [[-9.0, -1.0], [20.0, 30.0], [2.6, 3.4], [5.0, 1.0], [f32::INFINITY, f32::INFINITY]] {
            assert!(centres(nothing, 0, 9).is_empty(), "{nothing:?}");
        }
        assert!(centres([f32::NAN, f32::NAN], 0, 9).is_empty());
    }
}

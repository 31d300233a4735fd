use rayon::prelude::*;

use super::frame::Frame;
use super::strip::Strip;

/// Something that can be drawn into strips.
pub(crate) trait Shape {
    /// Highest and lowest position it reaches, in samples.
    fn rows(&self) -> [f32; 2];
    /// Depth by which it is sorted.
    fn depth(&self) -> f32;
    fn draw(&self, frame: &Frame, strip: &mut Strip<'_>);
}

/// Shapes sorted into bands of rows; within a band they keep the order of the scene.
pub(crate) struct Bins<S> {
    /// Of each chunk of the scene, of each band, the shapes that reach into it.
    chunks: Vec<Vec<Vec<S>>>,
}

const CHUNK: usize = 4096;

impl<S: Shape + Clone + Send> Bins<S> {
    /// Turns each item into any number of shapes and files them.
    pub fn sort<T: Sync>(
        items: &[T],
        frame: &Frame,
        band_rows: usize,
        shapes: impl Fn(&T, &mut dyn FnMut(S)) + Sync,
    ) -> Self {
        let bands = frame.height.div_ceil(band_rows);
        let last = frame.height.saturating_sub(1);
        let file = |chunk: &[T]| {
            let mut filed: Vec<Vec<S>> = vec![Vec::new(); bands];
            for item in chunk {
                shapes(item, &mut |shape| {
                    let [top, bottom] = shape.rows();
                    if bottom >= 0.0 && top <= frame.height as f32 {
                        let first = top.max(0.0) as usize / band_rows;
                        let end = (bottom as usize).min(last) / band_rows + 1;
                        for band in filed.iter_mut().take(end).skip(first) {
                            band.push(shape.clone());
                        }
                    }
                });
            }
            filed
        };
        Self { chunks: items.par_chunks(CHUNK).map(file).collect() }
    }

    /// The shapes of `other` after these.
    pub fn and(mut self, other: Self) -> Self {
        self.chunks.extend(other.chunks);
        self
    }

    /// Draws the nearest first, so that what they hide is rejected before it is shaded. Only for opaque shapes.
    pub fn draw_nearest_first(&self, band: usize, frame: &Frame, strip: &mut Strip<'_>) {
        let shapes = self.chunks.iter().filter_map(|bands| bands.get(band)).flatten();
        let mut order: Vec<(u64, &S)> =
            shapes.enumerate().map(|(place, shape)| (nearest_key(shape.depth(), place as u32), shape)).collect();
        order.sort_unstable_by_key(|&(key, _)| key);
        // Copied into a row first: fetching them from all over memory one by one would stall each drawing.
        let sorted: Vec<S> = order.into_iter().map(|(_, shape)| shape.clone()).collect();
        for shape in &sorted {
            shape.draw(frame, strip);
        }
    }

    pub fn draw(&self, band: usize, frame: &Frame, strip: &mut Strip<'_>) {
        for shape in self.chunks.iter().filter_map(|bands| bands.get(band)).flatten() {
            shape.draw(frame, strip);
        }
    }
}

/// Sorts by depth, then by place; whole numbers sort faster than a comparison of floats.
fn nearest_key(depth: f32, place: u32) -> u64 {
    let bits = depth.to_bits();
    // Makes the order of the bits that of the numbers, negative ones included.
    let ordered = if bits >> 31 == 0 { bits | 1 << 31 } else { !bits };
    u64::from(ordered) << 32 | u64::from(place)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn keys_sort_like_depths_then_places() {
        let ordered = [(-2.0, 0), (-1.0, 5), (0.0, 1), (1e-20, 0), (1.0, 2), (1.0, 3), (3.5, 0), (1e20, 0)];
        assert!(ordered.is_sorted_by_key(|&(depth, place)| nearest_key(depth, place)));
    }
}

//! Which pixels belong to a triangle, exactly, and what its corners' values are there.
//!
//! Method: corners are snapped to 1/256 pixel and edges evaluated in integers (Pineda 1988, Comput. Graph. 22 (4), 17), so
//! two triangles with a common edge agree about every pixel centre; a centre on an edge belongs to the triangle
//! that has it on its top or left side.

/// A corner in pixels with values that vary linearly over the picture.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct Corner<const N: usize> {
    pub x: f64,
    pub y: f64,
    pub values: [f64; N],
}

/// A rectangle of whole pixels: `left <= x < right`, `top <= y < bottom`.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) struct Window {
    pub left: i64,
    pub top: i64,
    pub right: i64,
    pub bottom: i64,
}

/// A run of pixels in one row: the values at its first pixel and what they grow by from pixel to pixel.
pub(crate) struct Run<const N: usize> {
    pub y: usize,
    pub start: usize,
    pub end: usize,
    pub values: [f64; N],
    pub step: [f64; N],
}

const SUBPIXELS: f64 = 256.0;
const PIXEL: i64 = 256;
/// Corners farther out are cut off first: products of two coordinates then stay well inside 64 bits.
const GUARD: f64 = 1_048_576.0;

/// Calls `row` for every row of pixels whose centres lie inside the triangle and the window. The window must lie
/// at coordinates that are not negative.
pub(crate) fn fill<const N: usize>(corners: [Corner<N>; 3], window: Window, mut row: impl FnMut(Run<N>)) {
    let finite = |c: &Corner<N>| c.x.is_finite() && c.y.is_finite() && c.values.iter().all(|v| v.is_finite());
    if !corners.iter().all(finite) || window.left >= window.right || window.top >= window.bottom {
        return;
    }
    if corners.iter().all(|c| c.x.abs() < GUARD && c.y.abs() < GUARD) {
        fill_snapped(corners, window, &mut row);
        return;
    }
    let polygon = cut_to_guard(&corners);
    for pair in polygon.windows(2).skip(1) {
        if let (Some(&hub), &[a, b]) = (polygon.first(), pair) {
            fill_snapped([hub, a, b], window, &mut row);
        }
    }
}

struct Edge {
    /// Value at the centre of pixel (0, 0), and its growth per pixel in x and y.
    origin: i64,
    dx: i64,
    dy: i64,
    /// −1 where a centre exactly on the edge belongs to the neighbour.
    bias: i64,
}

impl Edge {
    fn new([ax, ay]: [i64; 2], [bx, by]: [i64; 2]) -> Self {
        let (run, rise) = (bx - ax, by - ay);
        let half = PIXEL / 2;
        let owns_boundary = rise < 0 || (rise == 0 && run > 0);
        Self {
            origin: run * (half - ay) - rise * (half - ax),
            dx: -rise * PIXEL,
            dy: run * PIXEL,
            bias: if owns_boundary { 0 } else { -1 },
        }
    }

    fn at(&self, x: i64, y: i64) -> i64 {
        self.origin + x * self.dx + y * self.dy
    }

    /// Narrows the pixels [start, end) of row y to those inside this edge.
    fn narrow(&self, y: i64, start: &mut i64, end: &mut i64) {
        let at_zero = self.origin + y * self.dy + self.bias;
        match self.dx {
            0 if at_zero < 0 => *end = *start,
            0 => {}
            dx if dx > 0 => *start = (*start).max((-at_zero).div_euclid(dx) + i64::from((-at_zero).rem_euclid(dx) > 0)),
            dx => *end = (*end).min(at_zero.div_euclid(-dx) + 1),
        }
    }
}

fn fill_snapped<const N: usize>(corners: [Corner<N>; 3], window: Window, row: &mut impl FnMut(Run<N>)) {
    let snap = |c: &Corner<N>| [(c.x * SUBPIXELS).round() as i64, (c.y * SUBPIXELS).round() as i64];
    let [a, mut b, mut c] = corners;
    let [pa, mut pb, mut pc] = [snap(&a), snap(&b), snap(&c)];
    let mut area = (pb[0] - pa[0]) * (pc[1] - pa[1]) - (pb[1] - pa[1]) * (pc[0] - pa[0]);
    if area == 0 {
        return;
    }
    if area < 0 {
        std::mem::swap(&mut b, &mut c);
        std::mem::swap(&mut pb, &mut pc);
        area = -area;
    }
    let edges = [Edge::new(pb, pc), Edge::new(pc, pa), Edge::new(pa, pb)];
    let per_area = 1.0 / area as f64;
    let step = std::array::from_fn(|i| {
        let weighted =
            edges[0].dx as f64 * a.values[i] + edges[1].dx as f64 * b.values[i] + edges[2].dx as f64 * c.values[i];
        weighted * per_area
    });
    let low = |axis: usize| pa[axis].min(pb[axis]).min(pc[axis]).div_euclid(PIXEL);
    let high = |axis: usize| pa[axis].max(pb[axis]).max(pc[axis]).div_euclid(PIXEL) + 1;
    let (left, right) = (low(0).max(window.left), high(0).min(window.right));
    for y in low(1).max(window.top)..high(1).min(window.bottom) {
        let (mut start, mut end) = (left, right);
        for edge in &edges {
            edge.narrow(y, &mut start, &mut end);
        }
        if start >= end {
            continue;
        }
        let weights = [0, 1, 2].map(|e: usize| edges[e].at(start, y) as f64 * per_area);
        let values =
            std::array::from_fn(|i| weights[0] * a.values[i] + weights[1] * b.values[i] + weights[2] * c.values[i]);
        row(Run { y: y as usize, start: start as usize, end: end as usize, values, step });
    }
}

/// Sutherland & Hodgman (1974): the part of the triangle inside the guard square, as a convex polygon.
fn cut_to_guard<const N: usize>(corners: &[Corner<N>; 3]) -> Vec<Corner<N>> {
    let bound = GUARD * 0.5;
    let sides: [fn(&Corner<N>, f64) -> f64; 4] = [|c, b| b - c.x, |c, b| b + c.x, |c, b| b - c.y, |c, b| b + c.y];
    let mut polygon = corners.to_vec();
    for side in sides {
        let mut kept = Vec::with_capacity(polygon.len() + 1);
        for (i, this) in polygon.iter().enumerate() {
            let Some(next) = polygon.get((i + 1) % polygon.len()) else { continue };
            let (here, there) = (side(this, bound), side(next, bound));
            if here >= 0.0 {
                kept.push(*this);
            }
            // From the inner to the outer corner, so that a neighbour with the same edge finds the same point.
            if here >= 0.0 && there < 0.0 {
                kept.push(between(this, next, here / (here - there)));
            } else if here < 0.0 && there >= 0.0 {
                kept.push(between(next, this, there / (there - here)));
            }
        }
        polygon = kept;
    }
    polygon.retain(|c| c.x.is_finite() && c.y.is_finite() && c.values.iter().all(|v| v.is_finite()));
    // A cut between numbers of 300 digits may miss the square by more than its size.
    for corner in &mut polygon {
        corner.x = corner.x.clamp(-bound, bound);
        corner.y = corner.y.clamp(-bound, bound);
    }
    polygon
}

pub(crate) fn between<const N: usize>(a: &Corner<N>, b: &Corner<N>, part: f64) -> Corner<N> {
    let mix = |from: f64, to: f64| from * (1.0 - part) + to * part;
    Corner { x: mix(a.x, b.x), y: mix(a.y, b.y), values: std::array::from_fn(|i| mix(a.values[i], b.values[i])) }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    const SIDE: i64 = 40;
    const WINDOW: Window = Window { left: 0, top: 0, right: SIDE, bottom: SIDE };

    fn corner([x, y]: [f64; 2]) -> Corner<2> {
        // The values are the position itself, so what comes out can be checked without a second road.
        Corner { x, y, values: [x, y] }
    }

    fn counts(triangles: &[[[f64; 2]; 3]]) -> Vec<u32> {
        let mut counts = vec![0; (SIDE * SIDE) as usize];
        for triangle in triangles {
            fill(triangle.map(corner), WINDOW, |run| {
                for x in run.start..run.end {
                    counts[run.y * SIDE as usize + x] += 1;
                }
            });
        }
        counts
    }

    #[test]
    fn centres_on_the_boundary_go_to_top_and_left() {
        // A square whose sides pass through pixel centres: 2.5 ≤ x, y < 5.5 are 3 × 3 pixels.
        let [p, q, r, s] = [[2.5, 2.5], [5.5, 2.5], [5.5, 5.5], [2.5, 5.5]];
        let hit = counts(&[[p, q, r], [p, r, s]]);
        let inside: Vec<usize> = (0..hit.len()).filter(|&i| hit[i] > 0).collect();
        let expected: Vec<usize> = (2..5).flat_map(|y| (2..5).map(move |x| y * SIDE as usize + x)).collect();
        assert_eq!(inside, expected);
        assert!(hit.iter().all(|&n| n <= 1));
    }

    #[test]
    fn far_corners_are_cut_not_bent() {
        // x < 20, reaching out of the guard square on three sides.
        let far = 1e12;
        let hit = counts(&[[[20.0, -far], [20.0, far], [-far, 0.0]]]);
        for (i, &n) in hit.iter().enumerate() {
            assert_eq!(n, u32::from(i % (SIDE as usize) < 20), "pixel {i}");
        }
    }

    fn point() -> impl Strategy<Value = [f64; 2]> {
        // Often on halves, where ties are.
        prop::array::uniform2(prop_oneof![(-20..140_i32).prop_map(|n| f64::from(n) / 2.0), -10.0..60.0_f64])
    }

    proptest! {
        #![proptest_config(crate::testing::cases())]

        #[test]
        fn a_fan_covers_every_pixel_exactly_once(hub in prop::array::uniform2(0.5..39.5_f64)) {
            // Four triangles around any inner point tile the whole canvas.
            let side = SIDE as f64;
            let [p, q, r, s] = [[0.0, 0.0], [side, 0.0], [side, side], [0.0, side]];
            let hit = counts(&[[p, q, hub], [r, q, hub], [hub, r, s], [s, p, hub]]);
            prop_assert!(hit.iter().all(|&n| n == 1));
        }

        #[test]
        fn no_pixel_twice_on_a_shared_edge(a in point(), b in point(), c in point(), along in -1.0..2.0_f64, out in 0.2..2.0_f64) {
            let side = |p: [f64; 2]| (b[0] - a[0]) * (p[1] - a[1]) - (b[1] - a[1]) * (p[0] - a[0]);
            // On the other side of ab than c, or the triangles would overlap.
            let d = [0, 1].map(|i| a[i] + along * (b[i] - a[i]) - out * (c[i] - a[i]));
            // Snapping moves corners by 1/512 pixel; keep clear of flipping one over.
            prop_assume!(side(c).abs() > 1.0 && side(d).abs() > 1.0);
            prop_assert!(counts(&[[a, b, c], [b, a, d]]).iter().all(|&n| n <= 1));
        }

        #[test]
        fn values_are_those_of_the_pixel_centre(a in point(), b in point(), c in point()) {
            fill([corner(a), corner(b), corner(c)], WINDOW, |run| {
                for x in run.start..run.end {
                    let k = (x - run.start) as f64;
                    // Snapping moves corners by at most 1/512 pixel each way.
                    assert!((run.values[0] + k * run.step[0] - (x as f64 + 0.5)).abs() < 0.01);
                    assert!((run.values[1] + k * run.step[1] - (run.y as f64 + 0.5)).abs() < 0.01);
                }
            });
        }

        #[test]
        fn any_numbers_stay_in_the_window(numbers in prop::array::uniform6(any::<f64>())) {
            let [a, b, c, d, e, f] = numbers;
            fill([corner([a, b]), corner([c, d]), corner([e, f])], WINDOW, |run| {
                assert!(run.y < SIDE as usize && run.start < run.end && run.end <= SIDE as usize);
            });
        }
    }
}

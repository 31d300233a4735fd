use super::bins::Shape;
use super::frame::{Frame, lit, shaded};
use super::strip::{Paint, Strip};
use crate::scene::{Disc, Mark};

/// The smallest radius in samples: a circle of it always holds the centre of a sample.
const SMALLEST: f64 = 0.75;

/// A mark on its way to the canvas.
#[derive(Clone, Copy)]
pub(crate) struct Spot {
    x: f32,
    y: f32,
    radius: f32,
    depth: f32,
    /// How far the middle of the ball stands out towards the eye, in world units.
    bulge: f32,
    rgb: [u8; 3],
    alpha: u8,
    id: u32,
    mark: Mark,
}

impl Spot {
    pub fn new(disc: &Disc, frame: &Frame) -> Option<Self> {
        let screen = frame.view.project(disc.centre)?;
        let asked = frame.size(disc.radius, screen.scale);
        let (width, height) = (frame.width as f64, frame.height as f64);
        // Positive also excludes NaN.
        if !(asked > 0.0 && asked.is_finite()) {
            return None;
        }
        let radius = asked.max(SMALLEST);
        let reach = radius * extent(disc.mark);
        if screen.x + reach < 0.0 || screen.x - reach > width || screen.y + reach < 0.0 || screen.y - reach > height {
            return None;
        }
        let faded = disc.colour.towards(frame.background, frame.fade_at(screen.depth));
        Some(Self {
            x: screen.x as f32,
            y: screen.y as f32,
            radius: radius as f32,
            depth: screen.depth as f32,
            bulge: (radius / screen.scale) as f32,
            rgb: [faded.r, faded.g, faded.b],
            alpha: faded.a,
            id: disc.id,
            mark: disc.mark,
        })
    }

    fn draw_ball(&self, frame: &Frame, strip: &mut Strip<'_>) {
        let per_radius = 1.0 / self.radius;
        let nearest_depth = self.depth - self.bulge;
        let at = |height: f32| {
            let depth = self.depth - self.bulge * height;
            if frame.perspective { 1.0 / depth.max(frame.view.near as f32) } else { -depth }
        };
        let nearest = if frame.perspective && nearest_depth <= 0.0 { f32::INFINITY } else { at(1.0) };
        let columns = strip.columns_between([self.x - self.radius, self.x + self.radius]);
        let first = (columns.start as f32 + 0.5 - self.x) * per_radius;
        for y in strip.rows_between(self.rows()) {
            let mut row = strip.row(y);
            // Most rows of most marks are hidden by nearer ones. Without an early exit the loop has no branch to guess.
            if !row.nearness[columns.clone()].iter().fold(false, |shows, &there| shows | (nearest > there)) {
                continue;
            }
            let down = (y as f32 + 0.5 - self.y) * per_radius;
            let left_over = 1.0 - down * down;
            let mut right = first;
            for x in columns.clone() {
                let square = left_over - right * right;
                if square >= 0.0 && nearest > row.nearness[x] {
                    let height = square.sqrt();
                    let nearness = at(height);
                    if nearness > row.nearness[x] {
                        let rgb = lit(self.rgb, [right, -down, height]);
                        row.plot(x, nearness, Paint { rgb, alpha: self.alpha, id: self.id });
                    }
                }
                right += per_radius;
            }
        }
    }

    fn draw_flat(&self, frame: &Frame, strip: &mut Strip<'_>) {
        let per_radius = 1.0 / self.radius;
        let nearness = frame.nearness(self.depth);
        let reach = self.radius * extent(self.mark) as f32;
        // A ring's stroke stays visible however small the ring.
        let hole = (1.0 - (0.36_f32).max(1.25 * per_radius * frame.samples as f32)).max(0.0);
        let columns = strip.columns_between([self.x - reach, self.x + reach]);
        for y in strip.rows_between(self.rows()) {
            let down = (y as f32 + 0.5 - self.y) * per_radius;
            let mut row = strip.row(y);
            for x in columns.clone() {
                if nearness <= row.nearness[x] {
                    continue;
                }
                let right = (x as f32 + 0.5 - self.x) * per_radius;
                let out = outward(self.mark, right, down);
                let in_hole = self.mark == Mark::Ring && out < hole;
                if out <= 1.0 && !in_hole {
                    // Darker towards the border, so that neighbours of one colour stay apart.
                    let border = out * out;
                    let rgb = shaded(self.rgb, 1.06 - 0.3 * border * border - 0.08 * down, 0.0);
                    row.plot(x, nearness, Paint { rgb, alpha: self.alpha, id: self.id });
                }
            }
        }
    }
}

impl Shape for Spot {
    fn rows(&self) -> [f32; 2] {
        let reach = self.radius * extent(self.mark) as f32;
        [self.y - reach, self.y + reach]
    }

    fn depth(&self) -> f32 {
        self.depth
    }

    fn draw(&self, frame: &Frame, strip: &mut Strip<'_>) {
        match self.mark {
            Mark::Disc => self.draw_ball(frame, strip),
            _ => self.draw_flat(frame, strip),
        }
    }
}

// Sizes of the marks for the area π of the unit circle.
/// Half the side of the square: √π / 2.
const SQUARE_HALF: f32 = 0.886_227;
/// Half the diagonal of the diamond: √(π / 2).
const DIAMOND_HALF: f32 = 1.253_314;
/// Inner radius of the triangle, √(π / 3√3); its corners are twice as far out.
const TRIANGLE_INNER: f32 = 0.777_560;
/// Half width and half height of the bar: their product is π / 4.
const BAR_HALF: [f32; 2] = [0.55, 1.427_997];

/// How far a mark reaches from its centre, in radii.
fn extent(mark: Mark) -> f64 {
    match mark {
        Mark::Disc | Mark::Ring => 1.0,
        Mark::Square => f64::from(SQUARE_HALF),
        Mark::Diamond => f64::from(DIAMOND_HALF),
        Mark::Triangle | Mark::Wedge => 2.0 * f64::from(TRIANGLE_INNER),
        Mark::Bar => f64::from(BAR_HALF[1]),
    }
}

/// How far out a place is, in radii right and down of the centre: 0 in the middle, 1 on the outline.
fn outward(mark: Mark, right: f32, down: f32) -> f32 {
    match mark {
        Mark::Disc | Mark::Ring => (right * right + down * down).sqrt(),
        Mark::Square => right.abs().max(down.abs()) / SQUARE_HALF,
        Mark::Diamond => (right.abs() + down.abs()) / DIAMOND_HALF,
        Mark::Triangle => {
            let slope = 0.866_025 * right.abs() - 0.5 * down;
            slope.max(down) / TRIANGLE_INNER
        }
        Mark::Wedge => outward(Mark::Triangle, right, -down),
        Mark::Bar => (right.abs() / BAR_HALF[0]).max(down.abs() / BAR_HALF[1]),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn all_marks_have_the_area_of_the_disc() {
        let steps = 800;
        for mark in [Mark::Disc, Mark::Ring, Mark::Square, Mark::Diamond, Mark::Triangle, Mark::Wedge, Mark::Bar] {
            let at = |i: i32| (i as f32 + 0.5) / steps as f32 * 4.0 - 2.0;
            let mut inside = 0_u32;
            for i in 0..steps {
                for j in 0..steps {
                    let (right, down) = (at(i), at(j));
                    if outward(mark, right, down) <= 1.0 {
                        inside += 1;
                        let reach = extent(mark) as f32 + 0.01;
                        assert!(right.abs() <= reach && down.abs() <= reach, "{mark:?} reaches farther than said");
                    }
                }
            }
            let area = f64::from(inside) * 16.0 / f64::from(steps * steps);
            assert!((area - std::f64::consts::PI).abs() < 0.02, "{mark:?}: {area}");
        }
    }

    #[test]
    fn the_triangle_points_up() {
        assert!(outward(Mark::Triangle, 0.0, -1.5) < 1.0 && outward(Mark::Triangle, 0.0, 1.0) > 1.0);
    }
}

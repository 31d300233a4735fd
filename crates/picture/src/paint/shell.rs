use super::bins::Shape;
use super::frame::{Frame, lit};
use super::strip::{Paint, Strip};
use crate::colour::{Colour, over};
use crate::scene::Ball;

/// Which wall of a ball to paint, and how.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Side {
    /// The near wall, opaque and lit.
    Lit,
    /// The far wall, translucent.
    Far,
    /// The near wall, translucent.
    Near,
    /// Both translucent walls, nothing being between them.
    Both,
}

/// A ball on its way to the canvas. Each sample's line of sight is cut with the ball, so outline and depth are exact
/// at any size and from any distance, also from inside.
#[derive(Clone)]
pub(crate) struct Shell {
    /// Right, up, depth from the eye.
    centre: [f32; 3],
    radius: f32,
    columns: [f32; 2],
    rows: [f32; 2],
    side: Side,
    rgb: [u8; 3],
    id: u32,
    /// Premultiplied colour of a wall by how squarely it faces the line of sight (0 at the rim, 255 square on).
    walls: Vec<[u8; 4]>,
}

impl Shell {
    pub fn new(ball: &Ball, side: Side, frame: &Frame) -> Option<Self> {
        let centre = frame.view.in_eye(ball.centre);
        let finite = centre.iter().all(|v| v.is_finite()) && ball.radius.is_finite();
        if !finite || ball.radius <= 0.0 || (frame.perspective && centre[2] + ball.radius <= frame.view.near) {
            return None;
        }
        let [middle_x, middle_y] = frame.view.middle;
        let focal = frame.view.focal;
        let [left, right] = interval(centre[0], centre[2], ball.radius, frame);
        let [down, up] = interval(centre[1], centre[2], ball.radius, frame);
        let walls = if side == Side::Lit { Vec::new() } else { wall_colours(ball.colour, ball.rim_alpha) };
        Some(Self {
            centre: centre.map(|v| v as f32),
            radius: ball.radius as f32,
            columns: [middle_x + left * focal, middle_x + right * focal].map(|v| v as f32),
            rows: [middle_y - up * focal, middle_y - down * focal].map(|v| v as f32),
            side,
            rgb: [ball.colour.r, ball.colour.g, ball.colour.b],
            id: ball.id,
            walls,
        })
    }

    /// If this is the far wall and `near` the near wall of the same ball, becomes both.
    pub fn join(&mut self, near: &Self) -> bool {
        let same = self.centre == near.centre && self.radius == near.radius && self.walls == near.walls;
        let joins = same && self.side == Side::Far && near.side == Side::Near;
        if joins {
            self.side = Side::Both;
        }
        joins
    }

    fn paint_row(&self, frame: &Frame, row: &mut super::strip::Row<'_>, first: usize, cuts: &Cuts) {
        for (i, &[near, far]) in cuts.nearness.iter().enumerate() {
            let facing = cuts.facing[i];
            // The line of sight misses the ball.
            if facing.is_nan() {
                continue;
            }
            let x = first + i;
            let seen = |nearness: f32, there: f32| nearness > there && nearness <= frame.too_near;
            if self.side == Side::Lit {
                if seen(near, row.nearness[x]) {
                    let rgb = lit(self.rgb, self.normal(frame, cuts.across[i], cuts.up, near));
                    row.plot(x, near, Paint { rgb, alpha: 255, id: self.id });
                }
                continue;
            }
            let wall = self.walls[(facing * 255.0) as u8 as usize];
            if self.side != Side::Near && seen(far, row.nearness[x]) {
                row.colour[x] = over(wall, row.colour[x]);
            }
            if self.side != Side::Far && seen(near, row.nearness[x]) {
                row.colour[x] = over(wall, row.colour[x]);
            }
        }
    }

    fn normal(&self, frame: &Frame, across: f32, up: f32, nearness: f32) -> [f32; 3] {
        let depth = if frame.perspective { 1.0 / nearness } else { -nearness };
        let spread = if frame.perspective { depth } else { 1.0 };
        let [right, high, deep] = self.centre;
        [(across * spread - right) / self.radius, (up * spread - high) / self.radius, (deep - depth) / self.radius]
    }
}

/// What the lines of sight of one row find.
#[derive(Default)]
struct Cuts {
    up: f32,
    across: Vec<f32>,
    /// Cosine between the line of sight and the walls; NaN where the ball is missed.
    facing: Vec<f32>,
    /// Of the near and of the far wall.
    nearness: Vec<[f32; 2]>,
}

impl Cuts {
    /// Fills in a row whose `across` and `up` are set. Straight loops over plain numbers, which compilers vectorise.
    fn find(&mut self, shell: &Shell, perspective: bool) {
        let [right, high, deep] = shell.centre;
        let square = shell.radius * shell.radius;
        let per_radius = 1.0 / shell.radius;
        let up = self.up;
        self.facing.resize(self.across.len(), 0.0);
        self.nearness.resize(self.across.len(), [0.0; 2]);
        let slots = self.across.iter().zip(&mut self.facing).zip(&mut self.nearness);
        if perspective {
            // The line of sight is t (across, up, 1), so t is the depth. |line × centre|² / |line|² is the square
            // of the distance between line and centre.
            for ((&across, facing), nearness) in slots {
                let squared = across * across + up * up + 1.0;
                let along = across * right + up * high + deep;
                let cross = [up * deep - high, right - across * deep, across * high - up * right];
                let half = (square * squared - cross[0] * cross[0] - cross[1] * cross[1] - cross[2] * cross[2]).sqrt();
                *facing = half * per_radius / squared.sqrt();
                *nearness = [squared / (along - half), squared / (along + half)];
            }
        } else {
            for ((&across, facing), nearness) in slots {
                let half = (square - (across - right) * (across - right) - (up - high) * (up - high)).sqrt();
                *facing = half * per_radius;
                *nearness = [half - deep, -half - deep];
            }
        }
    }
}

impl Shape for Shell {
    fn rows(&self) -> [f32; 2] {
        self.rows
    }

    fn depth(&self) -> f32 {
        match self.side {
            Side::Lit | Side::Near => self.centre[2] - self.radius,
            Side::Far | Side::Both => self.centre[2] + self.radius,
        }
    }

    fn draw(&self, frame: &Frame, strip: &mut Strip<'_>) {
        let [middle_x, middle_y] = frame.view.middle;
        let per_focal = 1.0 / frame.view.focal;
        let columns = strip.columns_between(self.columns);
        let mut cuts = Cuts {
            across: columns.clone().map(|x| ((x as f64 + 0.5 - middle_x) * per_focal) as f32).collect(),
            ..Cuts::default()
        };
        for y in strip.rows_between(self.rows) {
            cuts.up = ((middle_y - y as f64 - 0.5) * per_focal) as f32;
            cuts.find(self, frame.perspective);
            self.paint_row(frame, &mut strip.row(y), columns.start, &cuts);
        }
    }
}

/// The range of across (or up) values whose lines of sight can meet the ball; everything if the eye is inside or beside.
fn interval(aside: f64, depth: f64, radius: f64, frame: &Frame) -> [f64; 2] {
    if !frame.perspective {
        return [aside - radius, aside + radius];
    }
    let room = depth * depth - radius * radius;
    if depth <= radius || room <= 0.0 {
        return [f64::NEG_INFINITY, f64::INFINITY];
    }
    // Slopes of the two tangents from the eye.
    let root = radius * (aside * aside + room).sqrt();
    [(aside * depth - root) / room, (aside * depth + root) / room]
}

fn wall_colours(colour: Colour, rim_alpha: u8) -> Vec<[u8; 4]> {
    (0..=255_u8)
        .map(|facing| {
            let rim = 1.0 - f32::from(facing) / 255.0;
            let gain = f32::from(rim_alpha) * rim * rim * rim;
            colour.with_alpha((f32::from(colour.a) + gain).round().min(254.0) as u8).premultiplied()
        })
        .collect()
}

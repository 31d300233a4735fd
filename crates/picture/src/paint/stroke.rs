use super::bins::Shape;
use super::frame::{Frame, lit};
use super::strip::{Paint, Strip};
use super::surface;
use crate::colour::Colour;
use crate::scene::{Arrow, Dash, Line};
use crate::vector::{V3, is_finite};

/// A line on its way to the canvas: a segment within reach of the canvas, thickened by a radius.
#[derive(Clone)]
pub(crate) struct Stroke {
    from: [f32; 2],
    to: [f32; 2],
    nearness: [f32; 2],
    depth: f32,
    radius: f32,
    rgb: [[f32; 3]; 2],
    alpha: u8,
    /// Samples drawn, period, and where in the period the segment begins.
    dash: Option<[f32; 3]>,
    /// Shaded like a round rod.
    round: bool,
    id: u32,
}

struct Look {
    width_px: f64,
    colour: Colour,
    dash: Option<Dash>,
    /// Of an arrow: shaded like a rod, never faded.
    rod: bool,
    id: u32,
}

impl Stroke {
    pub fn of_line(line: &Line, frame: &Frame) -> Option<Self> {
        let look = Look { width_px: line.width_px, colour: line.colour, dash: line.dash, rod: false, id: line.id };
        Self::new(line.from, line.to, look, frame)
    }

    /// The rod of an arrow, up to its head.
    pub fn of_arrow(arrow: &Arrow, frame: &Frame) -> Option<Self> {
        let look = Look {
            width_px: arrow.width_px,
            colour: arrow.colour.with_alpha(255),
            dash: None,
            rod: true,
            id: arrow.id,
        };
        Self::new(arrow.from, surface::arrow_neck(arrow, frame), look, frame)
    }

    fn new(from: V3, to: V3, look: Look, frame: &Frame) -> Option<Self> {
        let radius = (look.width_px * frame.samples / 2.0).max(0.5);
        let (mut a, mut b) = (frame.view.in_eye(from), frame.view.in_eye(to));
        if !(radius.is_finite() && look.width_px > 0.0 && is_finite(a) && is_finite(b)) {
            return None;
        }
        match (frame.view.is_before(a), frame.view.is_before(b)) {
            (false, false) => return None,
            (true, true) => {}
            (a_before, _) => {
                let near = frame.view.near;
                let part = ((near - a[2]) / (b[2] - a[2])).clamp(0.0, 1.0);
                let cut = [a[0] + (b[0] - a[0]) * part, a[1] + (b[1] - a[1]) * part, near];
                if a_before { b = cut } else { a = cut }
            }
        }
        let ends = [frame.view.project_in_eye(a), frame.view.project_in_eye(b)];
        let [start, end] = within_reach(frame, radius, ends.map(|e| [e.x, e.y]))?;
        let at = |part: f64| {
            let mix = |from: f64, to: f64| from * (1.0 - part) + to * part;
            let nearness = mix(ends[0].nearness, ends[1].nearness);
            ([mix(ends[0].x, ends[1].x), mix(ends[0].y, ends[1].y)], nearness, frame.view.depth_from_nearness(nearness))
        };
        let [(p, p_near, p_depth), (q, q_near, q_depth)] = [at(start), at(end)];
        let faded = |depth: f64| {
            let fade = if look.rod { 0.0 } else { frame.fade_at(depth) };
            let c = look.colour.towards(frame.background, fade);
            [c.r, c.g, c.b].map(f32::from)
        };
        let skipped = start * (ends[1].x - ends[0].x).hypot(ends[1].y - ends[0].y);
        Some(Self {
            from: p.map(|v| v as f32),
            to: q.map(|v| v as f32),
            nearness: [p_near as f32, q_near as f32],
            depth: ((p_depth + q_depth) / 2.0) as f32,
            radius: radius as f32,
            rgb: [faded(p_depth), faded(q_depth)],
            alpha: look.colour.a,
            dash: look.dash.and_then(|dash| pattern(dash, frame.samples, skipped)),
            round: look.rod,
            id: look.id,
        })
    }

    /// Columns that row `y` can touch.
    fn columns(&self, y: f32) -> [f32; 2] {
        let [dx, dy] = [self.to[0] - self.from[0], self.to[1] - self.from[1]];
        let part = |edge: f32| ((edge - self.from[1]) / dy).clamp(0.0, 1.0);
        let (a, b) = if dy.abs() < 1e-3 { (0.0, 1.0) } else { (part(y - self.radius), part(y + self.radius)) };
        let (xa, xb) = (self.from[0] + dx * a, self.from[0] + dx * b);
        [xa.min(xb) - self.radius, xa.max(xb) + self.radius]
    }

    fn rgb_at(&self, part: f32, aside: f32) -> [u8; 3] {
        let [from, to] = self.rgb;
        let rgb: [u8; 3] = std::array::from_fn(|i| (from[i] + (to[i] - from[i]) * part) as u8);
        if !self.round {
            return rgb;
        }
        // Across the rod the normal turns from one side over the viewer to the other side.
        let [dx, dy] = [self.to[0] - self.from[0], self.to[1] - self.from[1]];
        let length = dx.hypot(dy).max(1e-6);
        let aside = aside.clamp(-1.0, 1.0);
        lit(rgb, [-dy / length * aside, -dx / length * aside, (1.0 - aside * aside).sqrt()])
    }
}

fn pattern(dash: Dash, samples: f64, skipped: f64) -> Option<[f32; 3]> {
    let (on, off) = (dash.on_px * samples, dash.off_px * samples);
    let usable = on.is_finite() && off.is_finite() && on > 0.0 && off > 0.0;
    usable.then(|| [on as f32, (on + off) as f32, skipped.rem_euclid(on + off) as f32])
}

/// The parts of a segment between which it comes near the canvas (Liang & Barsky 1984).
fn within_reach(frame: &Frame, radius: f64, [a, b]: [[f64; 2]; 2]) -> Option<[f64; 2]> {
    let (mut start, mut end) = (0.0_f64, 1.0_f64);
    for (axis, size) in [(0, frame.width as f64), (1, frame.height as f64)] {
        let (low, high) = (-radius - 1.0, size + radius + 1.0);
        let run = b[axis] - a[axis];
        if !run.is_finite() {
            return None;
        }
        if run == 0.0 {
            if a[axis] < low || a[axis] > high {
                return None;
            }
            continue;
        }
        let (one, other) = ((low - a[axis]) / run, (high - a[axis]) / run);
        start = start.max(one.min(other));
        end = end.min(one.max(other));
    }
    (start <= end).then_some([start, end])
}

impl Shape for Stroke {
    fn rows(&self) -> [f32; 2] {
        [self.from[1].min(self.to[1]) - self.radius, self.from[1].max(self.to[1]) + self.radius]
    }

    fn depth(&self) -> f32 {
        self.depth
    }

    fn draw(&self, frame: &Frame, strip: &mut Strip<'_>) {
        let [dx, dy] = [self.to[0] - self.from[0], self.to[1] - self.from[1]];
        let length = dx.hypot(dy);
        let per_square = if length > 1e-6 { 1.0 / (length * length) } else { 0.0 };
        for y in strip.rows_between(self.rows()) {
            let down = y as f32 + 0.5 - self.from[1];
            let columns = strip.columns_between(self.columns(y as f32 + 0.5));
            let mut row = strip.row(y);
            for x in columns {
                let right = x as f32 + 0.5 - self.from[0];
                let part = ((right * dx + down * dy) * per_square).clamp(0.0, 1.0);
                let [off_x, off_y] = [right - dx * part, down - dy * part];
                let square = off_x * off_x + off_y * off_y;
                if square > self.radius * self.radius {
                    continue;
                }
                if let Some([on, period, begin]) = self.dash
                    && (part * length + begin) % period > on
                {
                    continue;
                }
                let nearness = self.nearness[0] + (self.nearness[1] - self.nearness[0]) * part;
                if nearness > row.nearness[x] && nearness <= frame.too_near {
                    let side = if off_x * -dy + off_y * dx >= 0.0 { 1.0 } else { -1.0 };
                    let rgb = self.rgb_at(part, side * square.sqrt() / self.radius);
                    row.plot(x, nearness, Paint { rgb, alpha: self.alpha, id: self.id });
                }
            }
        }
    }
}

use super::bins::Shape;
use super::frame::{Frame, lit};
use super::strip::{Paint, Strip};
use crate::eye::Lens;
use crate::fill::{Corner, fill};
use crate::scene::{Arrow, Triangle};
use crate::vector::{V3, add, any_perpendicular, cross, is_finite, length, scale, sub, unit};
use crate::view::InEye;

/// Nearness, normal (right, up, toward the eye) and part of the background.
type Values = [f64; 5];

/// A triangle on its way to the canvas, all of it in front of the eye.
#[derive(Clone)]
pub(crate) struct Face {
    corners: [Corner<5>; 3],
    depth: f32,
    rgb: [u8; 3],
    alpha: u8,
    id: u32,
}

#[derive(Clone, Copy)]
struct Seen {
    in_eye: InEye,
    normal: V3,
}

impl Face {
    /// The visible part of a triangle as faces: one, or two where a corner is behind the eye. It sinks into the
    /// background with distance.
    pub fn visible(triangle: &Triangle, frame: &Frame, push: &mut dyn FnMut(Self)) {
        Self::cut(triangle, frame, |depth| frame.fade_at(depth), push);
    }

    /// The same for a part of an arrow, which never fades.
    pub fn visible_unfaded(triangle: &Triangle, frame: &Frame, push: &mut dyn FnMut(Self)) {
        Self::cut(triangle, frame, |_| 0.0, push);
    }

    fn cut(triangle: &Triangle, frame: &Frame, fade: impl Fn(f64) -> f32, push: &mut dyn FnMut(Self)) {
        let [a, b, c] = triangle.corners;
        let (Some(flat), true) = (unit(cross(sub(b, a), sub(c, a))), triangle.corners.iter().all(|&p| is_finite(p)))
        else {
            return;
        };
        let seen: [Seen; 3] = std::array::from_fn(|i| Seen {
            in_eye: frame.view.in_eye(triangle.corners[i]),
            normal: frame.view.direction_in_eye(unit(triangle.normals[i]).unwrap_or(flat)),
        });
        let polygon = before_the_eye(&seen, frame);
        for pair in polygon.windows(2).skip(1) {
            if let (Some(&hub), &[p, q]) = (polygon.first(), pair) {
                push(Self::new([hub, p, q], triangle, frame, &fade));
            }
        }
    }

    fn new(seen: [Seen; 3], triangle: &Triangle, frame: &Frame, fade: impl Fn(f64) -> f32) -> Self {
        let depth = seen.iter().map(|s| s.in_eye[2]).sum::<f64>() / 3.0;
        let corners = seen.map(|Seen { in_eye, normal }| {
            let screen = frame.view.project_in_eye(in_eye);
            let fade = f64::from(fade(screen.depth));
            let values: Values = [screen.nearness, normal[0], normal[1], normal[2], fade];
            Corner { x: screen.x, y: screen.y, values }
        });
        let colour = triangle.colour;
        Self { corners, depth: depth as f32, rgb: [colour.r, colour.g, colour.b], alpha: colour.a, id: triangle.id }
    }
}

/// The part of a triangle that is far enough in front of the eye, as a polygon of up to four corners.
fn before_the_eye(seen: &[Seen; 3], frame: &Frame) -> Vec<Seen> {
    if frame.view.lens == Lens::Orthographic {
        return seen.to_vec();
    }
    let near = frame.view.near;
    let cut = |inner: &Seen, outer: &Seen| {
        let part = ((inner.in_eye[2] - near) / (inner.in_eye[2] - outer.in_eye[2])).clamp(0.0, 1.0);
        let mix = |a: V3, b: V3| add(scale(a, 1.0 - part), scale(b, part));
        let [right, up, _] = mix(inner.in_eye, outer.in_eye);
        Seen { in_eye: [right, up, near], normal: mix(inner.normal, outer.normal) }
    };
    let mut kept = Vec::with_capacity(4);
    for (i, this) in seen.iter().enumerate() {
        let next = &seen[(i + 1) % 3];
        let (here, there) = (frame.view.is_before(this.in_eye), frame.view.is_before(next.in_eye));
        if here {
            kept.push(*this);
        }
        if here && !there {
            kept.push(cut(this, next));
        } else if !here && there {
            kept.push(cut(next, this));
        }
    }
    kept
}

impl Shape for Face {
    fn rows(&self) -> [f32; 2] {
        let [a, b, c] = self.corners.each_ref().map(|corner| corner.y as f32);
        [a.min(b).min(c), a.max(b).max(c)]
    }

    fn depth(&self) -> f32 {
        self.depth
    }

    fn draw(&self, frame: &Frame, strip: &mut Strip<'_>) {
        let background = frame.background;
        fill(self.corners, strip.window(), |run| {
            let mut row = strip.row(run.y);
            let mut values = run.values;
            for x in run.start..run.end {
                let [nearness, right, up, toward, fade] = values.map(|v| v as f32);
                if nearness > row.nearness[x] && nearness <= frame.too_near {
                    let norm = (right * right + up * up + toward * toward).sqrt().max(1e-6);
                    // The side that is seen is the lit one.
                    let sign = if toward < 0.0 { -1.0 / norm } else { 1.0 / norm };
                    let lit = lit(self.rgb, [right * sign, up * sign, toward * sign]);
                    let mix = |c: u8, to: u8| (f32::from(c) + (f32::from(to) - f32::from(c)) * fade) as u8;
                    let rgb = [mix(lit[0], background.r), mix(lit[1], background.g), mix(lit[2], background.b)];
                    row.plot(x, nearness, Paint { rgb, alpha: self.alpha, id: self.id });
                }
                for (value, step) in values.iter_mut().zip(run.step) {
                    *value += step;
                }
            }
        });
    }
}

const CONE_SIDES: u32 = 24;
/// Radius of the cone by its length.
const CONE_SLENDERNESS: f64 = 0.34;

/// Length of an arrow's head in world units, and the arrow's direction.
fn head(arrow: &Arrow, frame: &Frame) -> Option<(f64, V3)> {
    let along = sub(arrow.to, arrow.from);
    let tip = frame.view.project(arrow.to)?;
    let wanted = arrow.head_px * frame.samples / tip.scale;
    (wanted.is_finite() && wanted > 0.0).then_some((wanted.min(length(along) / 2.0), unit(along)?))
}

/// Where an arrow's rod ends and its head begins.
pub(crate) fn arrow_neck(arrow: &Arrow, frame: &Frame) -> V3 {
    head(arrow, frame).map_or(arrow.to, |(size, direction)| sub(arrow.to, scale(direction, size)))
}

/// The cone at the tip of an arrow; none if the tip is not in front of the eye.
pub(crate) fn arrow_head(arrow: &Arrow, frame: &Frame) -> Vec<Triangle> {
    let Some((size, direction)) = head(arrow, frame) else { return Vec::new() };
    let base = sub(arrow.to, scale(direction, size));
    let radius = size * CONE_SLENDERNESS;
    let first = any_perpendicular(direction);
    let second = cross(direction, first);
    let around = |step: u32| {
        let (sin, cos) = (std::f64::consts::TAU * f64::from(step % CONE_SIDES) / f64::from(CONE_SIDES)).sin_cos();
        add(scale(first, cos), scale(second, sin))
    };
    let normal = |out: V3| add(out, scale(direction, CONE_SLENDERNESS));
    let colour = arrow.colour.with_alpha(255);
    let mut triangles = Vec::with_capacity(2 * CONE_SIDES as usize);
    for step in 0..CONE_SIDES {
        let (one, other) = (around(step), around(step + 1));
        let (p, q) = (add(base, scale(one, radius)), add(base, scale(other, radius)));
        let middle = normal(add(scale(one, 0.5), scale(other, 0.5)));
        let id = arrow.id;
        let normals = [middle, normal(one), normal(other)];
        triangles.push(Triangle { corners: [arrow.to, p, q], normals, colour, id });
        triangles.push(Triangle { corners: [base, q, p], normals: [scale(direction, -1.0); 3], colour, id });
    }
    triangles
}

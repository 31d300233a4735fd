use crate::eye::{Eye, Lens};
use crate::vector::{V3, add, dot, is_finite, scale, sub};

/// Where a point of the world appears.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Screen {
    /// Pixels from the left edge of the canvas.
    pub x: f64,
    /// Pixels from the top edge of the canvas.
    pub y: f64,
    /// World units from the eye, along the line through the middle of the picture.
    pub depth: f64,
    /// Grows towards the eye: 1/depth in perspective, −depth in an orthographic view. Compare it with
    /// [`crate::Canvas::nearness_at`] to know whether the point is hidden.
    pub nearness: f64,
    /// Pixels per world unit at that depth, across the line of sight.
    pub scale: f64,
}

/// A line of sight.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Ray {
    /// A point of it: the eye, or for an orthographic view a point level with the eye.
    pub origin: [f64; 3],
    /// Unit vector into the picture.
    pub direction: [f64; 3],
}

/// One eye and one canvas size: the projection used alike for drawing, labels and picking.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct View {
    position: V3,
    axes: [V3; 3],
    pub(crate) lens: Lens,
    /// Perspective: pixels per unit at depth 1. Orthographic: pixels per unit.
    pub(crate) focal: f64,
    /// The middle of the canvas in pixels.
    pub(crate) middle: [f64; 2],
    /// Perspective only: nothing with less depth is drawn.
    pub(crate) near: f64,
    distance: f64,
}

/// A point relative to the eye: right, up, depth.
pub(crate) type InEye = [f64; 3];

impl View {
    pub(crate) fn new(eye: &Eye, width: usize, height: usize) -> Self {
        let half_height = height as f64 / 2.0;
        let tangent = (eye.field_deg().to_radians() / 2.0).tan();
        let focal = match eye.lens {
            Lens::Perspective => half_height / tangent,
            Lens::Orthographic => half_height / (tangent * eye.distance()),
        };
        Self {
            position: eye.position(),
            axes: eye.axes(),
            lens: eye.lens,
            focal,
            middle: [width as f64 / 2.0, half_height],
            near: eye.distance() * 1e-3,
            distance: eye.distance(),
        }
    }

    /// Distance from the eye to its target.
    pub(crate) fn target_depth(&self) -> f64 {
        self.distance
    }

    /// Where a world point appears; it may lie outside the canvas. `None` for a point that is not finite and, in
    /// perspective, for one beside or behind the eye.
    pub fn project(&self, point: [f64; 3]) -> Option<Screen> {
        let in_eye = self.in_eye(point);
        (is_finite(in_eye) && self.is_before(in_eye)).then(|| self.project_in_eye(in_eye))
    }

    /// The line of sight through a position on the canvas; `None` if that is not finite or the canvas has no height.
    pub fn ray(&self, x: f64, y: f64) -> Option<Ray> {
        let [across, up] = self.across(x, y)?;
        let [right_axis, up_axis, toward] = self.axes;
        let aside = add(scale(right_axis, across), scale(up_axis, up));
        Some(match self.lens {
            Lens::Perspective => {
                let ahead = sub(aside, toward);
                let length = (1.0 + across * across + up * up).sqrt();
                Ray { origin: self.position, direction: scale(ahead, 1.0 / length) }
            }
            Lens::Orthographic => Ray { origin: add(self.position, aside), direction: scale(toward, -1.0) },
        })
    }

    /// The world point at a position on the canvas and a depth; `None` where [`View::ray`] gives none.
    pub fn point_at_depth(&self, x: f64, y: f64, depth: f64) -> Option<[f64; 3]> {
        let [across, up] = self.across(x, y)?;
        let spread = match self.lens {
            Lens::Perspective => depth,
            Lens::Orthographic => 1.0,
        };
        let [right_axis, up_axis, toward] = self.axes;
        let aside = add(scale(right_axis, across * spread), scale(up_axis, up * spread));
        let point = add(add(self.position, aside), scale(toward, -depth));
        is_finite(point).then_some(point)
    }

    /// The depth that a nearness stands for.
    pub fn depth_from_nearness(&self, nearness: f64) -> f64 {
        match self.lens {
            Lens::Perspective => 1.0 / nearness,
            Lens::Orthographic => -nearness,
        }
    }

    pub(crate) fn nearness(&self, depth: f64) -> f64 {
        match self.lens {
            Lens::Perspective => 1.0 / depth,
            Lens::Orthographic => -depth,
        }
    }

    /// Position across the line of sight, at depth 1 in perspective.
    fn across(&self, x: f64, y: f64) -> Option<[f64; 2]> {
        let across = [(x - self.middle[0]) / self.focal, (self.middle[1] - y) / self.focal];
        across.iter().all(|v| v.is_finite()).then_some(across)
    }

    #[inline]
    pub(crate) fn in_eye(&self, point: V3) -> InEye {
        let from_eye = sub(point, self.position);
        [dot(from_eye, self.axes[0]), dot(from_eye, self.axes[1]), -dot(from_eye, self.axes[2])]
    }

    /// A direction as right, up, toward the eye: the frame in which light is given.
    #[inline]
    pub(crate) fn direction_in_eye(&self, direction: V3) -> V3 {
        self.axes.map(|axis| dot(direction, axis))
    }

    /// Whether a point is far enough in front of the eye to be projected.
    #[inline]
    pub(crate) fn is_before(&self, in_eye: InEye) -> bool {
        self.lens == Lens::Orthographic || in_eye[2] >= self.near
    }

    #[inline]
    pub(crate) fn project_in_eye(&self, [right, up, depth]: InEye) -> Screen {
        let scale = match self.lens {
            Lens::Perspective => self.focal / depth,
            Lens::Orthographic => self.focal,
        };
        Screen {
            x: self.middle[0] + right * scale,
            y: self.middle[1] - up * scale,
            depth,
            nearness: self.nearness(depth),
            scale,
        }
    }
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;
    use crate::vector::{cross, length};
    use proptest::prelude::*;

    fn eye(lens: Lens, yaw: f64, pitch: f64, distance: f64, field_deg: f64) -> Eye {
        let mut eye = Eye::new([0.3, -0.2, 0.1], distance).unwrap();
        eye.orbit(yaw, pitch);
        eye.set_field_deg(field_deg);
        eye.lens = lens;
        eye
    }

    fn with_lens(lens: Lens) -> Eye {
        let mut eye = Eye::default();
        eye.lens = lens;
        eye
    }

    #[test]
    fn right_is_right_and_up_is_up() {
        for lens in [Lens::Perspective, Lens::Orthographic] {
            let view = with_lens(lens).view(200, 100);
            let at = |p| view.project(p).unwrap();
            assert!((at([0.0; 3]).x - 100.0).abs() < 1e-9 && (at([0.0; 3]).y - 50.0).abs() < 1e-9);
            assert!(at([0.1, 0.0, 0.0]).x > 100.0, "+x to the right");
            assert!(at([0.0, 0.1, 0.0]).y < 50.0, "+y up");
            assert!(at([0.0, 0.0, 0.1]).nearness > at([0.0; 3]).nearness, "+z towards the eye");
            assert!((at([0.0; 3]).depth - 5.0).abs() < 1e-12);
            // The field of 30° spans the height: the top edge is at 5 tan 15°.
            let top = at([0.0, 5.0 * 15_f64.to_radians().tan(), 0.0]);
            assert!(top.y.abs() < 1e-9);
        }
    }

    #[test]
    fn behind_the_eye_shows_only_without_perspective() {
        let mut eye = Eye::default();
        assert!(eye.view(100, 100).project([0.0, 0.0, 6.0]).is_none());
        eye.lens = Lens::Orthographic;
        assert!(eye.view(100, 100).project([0.0, 0.0, 6.0]).is_some());
        assert!(eye.view(100, 0).ray(1.0, 1.0).is_none(), "no height, no line of sight");
    }

    proptest! {
        #![proptest_config(crate::testing::cases())]

        #[test]
        fn a_ray_passes_through_what_was_projected(
            point in prop::array::uniform3(-1.0..1.0_f64),
            yaw in 0.0..6.3_f64, pitch in -1.5..1.5_f64, distance in 3.0..50.0_f64, field_deg in 2.0..100.0_f64,
            orthographic: bool,
        ) {
            let lens = if orthographic { Lens::Orthographic } else { Lens::Perspective };
            let view = eye(lens, yaw, pitch, distance, field_deg).view(640, 480);
            let seen = view.project(point).unwrap();
            let ray = view.ray(seen.x, seen.y).unwrap();
            let miss = length(cross(sub(point, ray.origin), ray.direction));
            prop_assert!(miss < 1e-9, "misses by {miss}");
            prop_assert!(dot(sub(point, ray.origin), ray.direction) > 0.0);
            let back = view.point_at_depth(seen.x, seen.y, view.depth_from_nearness(seen.nearness)).unwrap();
            prop_assert!(length(sub(back, point)) < 1e-9);
        }

        #[test]
        fn scale_is_pixels_per_unit(right in -0.5..0.5_f64, z in -1.0..1.0_f64, orthographic: bool) {
            let lens = if orthographic { Lens::Orthographic } else { Lens::Perspective };
            let view = with_lens(lens).view(640, 480);
            let a = view.project([right, 0.2, z]).unwrap();
            let b = view.project([right + 0.01, 0.2, z]).unwrap();
            prop_assert!(((b.x - a.x) / 0.01 - a.scale).abs() < 1e-6 * a.scale);
        }
    }
}

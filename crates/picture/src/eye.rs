use std::f64::consts::{FRAC_PI_2, TAU};

use crate::vector::{V3, add, any_perpendicular, cross, dot, is_finite, scale, sub, unit};
use crate::view::View;

/// How depth shows in the picture.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Lens {
    /// Things farther away look smaller.
    #[default]
    Perspective,
    /// Parallel rays: lengths across the line of sight are true. Nothing is hidden for being behind the eye.
    Orthographic,
}

/// Why an eye cannot be placed as asked.
#[derive(Debug, Clone, Copy, PartialEq, thiserror::Error)]
pub enum EyeError {
    /// The target is not a place.
    #[error("the eye cannot look at ({}, {}, {}): finite coordinates are needed", .0[0], .0[1], .0[2])]
    Target([f64; 3]),
    /// The distance is not a positive finite number in the range an eye can have.
    #[error("the eye cannot be {0} away from its target: the distance must lie between 1e-6 and 1e9")]
    Distance(f64),
    /// A vector that should be a direction has none.
    #[error("({}, {}, {}) has no direction to look along or to hold upright", .0[0], .0[1], .0[2])]
    Direction([f64; 3]),
}

const DISTANCES: std::ops::RangeInclusive<f64> = 1e-6..=1e9;
const FIELDS_DEG: std::ops::RangeInclusive<f64> = 1.0..=120.0;

/// A viewer that circles around a target.
///
/// The *pole* is the axis that stays upright in the picture; yaw turns about it, pitch lifts the eye towards it.
/// Orbit, pan and zoom never fail: an amount that is not finite changes nothing, and ranges are kept.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Eye {
    target: V3,
    pole: V3,
    /// Perpendicular to the pole: where the eye stands, seen from the target, at yaw 0 and pitch 0.
    front: V3,
    yaw: f64,
    pitch: f64,
    distance: f64,
    field: f64,
    /// Perspective or orthographic; both show the target at the same size.
    pub lens: Lens,
}

impl Default for Eye {
    /// Looks at the origin from 5 units away on +z, +y up, with a vertical field of 30°.
    fn default() -> Self {
        Self {
            target: [0.0; 3],
            pole: [0.0, 1.0, 0.0],
            front: [0.0, 0.0, 1.0],
            yaw: 0.0,
            pitch: 0.0,
            distance: 5.0,
            field: 30_f64.to_radians(),
            lens: Lens::Perspective,
        }
    }
}

impl Eye {
    /// An eye `distance` away from `target`, in the direction of +z from it, with +y up.
    pub fn new(target: [f64; 3], distance: f64) -> Result<Self, EyeError> {
        if !is_finite(target) {
            return Err(EyeError::Target(target));
        }
        if !DISTANCES.contains(&distance) {
            return Err(EyeError::Distance(distance));
        }
        Ok(Self { target, distance, ..Self::default() })
    }

    /// The point that stays in the middle of the picture.
    pub fn target(&self) -> [f64; 3] {
        self.target
    }

    /// Distance from eye to target.
    pub fn distance(&self) -> f64 {
        self.distance
    }

    /// Where the eye is.
    pub fn position(&self) -> [f64; 3] {
        add(self.target, scale(self.toward(), self.distance))
    }

    /// Vertical field of view in degrees.
    pub fn field_deg(&self) -> f64 {
        self.field.to_degrees()
    }

    /// Sets the vertical field of view, kept between 1° and 120°.
    pub fn set_field_deg(&mut self, field_deg: f64) {
        if field_deg.is_finite() {
            self.field = field_deg.clamp(*FIELDS_DEG.start(), *FIELDS_DEG.end()).to_radians();
        }
    }

    /// Unit vectors (right, up, toward the eye) of the picture, in world coordinates.
    pub fn axes(&self) -> [[f64; 3]; 3] {
        let side = cross(self.pole, self.front);
        let (sin_yaw, cos_yaw) = self.yaw.sin_cos();
        let right = sub(scale(side, cos_yaw), scale(self.front, sin_yaw));
        let toward = self.toward();
        [right, cross(toward, right), toward]
    }

    fn toward(&self) -> V3 {
        let side = cross(self.pole, self.front);
        let (sin_yaw, cos_yaw) = self.yaw.sin_cos();
        let (sin_pitch, cos_pitch) = self.pitch.sin_cos();
        let level = add(scale(self.front, cos_yaw), scale(side, sin_yaw));
        add(scale(level, cos_pitch), scale(self.pole, sin_pitch))
    }

    /// Walks around the target: `yaw` radians to the viewer's right, `pitch` radians up, never past the pole.
    pub fn orbit(&mut self, yaw: f64, pitch: f64) {
        if yaw.is_finite() && pitch.is_finite() {
            self.yaw = (self.yaw + yaw).rem_euclid(TAU);
            self.pitch = (self.pitch + pitch).clamp(-FRAC_PI_2, FRAC_PI_2);
        }
    }

    /// Moves the picture by this many pixels (right and down) on a canvas `height_px` high; what lies at the target's
    /// depth follows exactly.
    pub fn pan(&mut self, right_px: f64, down_px: f64, height_px: usize) {
        let unit_per_px = 2.0 * self.distance * (self.field / 2.0).tan() / height_px.max(1) as f64;
        let [right, up, _] = self.axes();
        let step = add(scale(right, -right_px * unit_per_px), scale(up, down_px * unit_per_px));
        let moved = add(self.target, step);
        if is_finite(moved) {
            self.target = moved;
        }
    }

    /// Multiplies the distance by `factor` (below 1 comes closer), keeping the range of distances.
    pub fn zoom(&mut self, factor: f64) {
        if factor.is_finite() && factor > 0.0 {
            self.distance = (self.distance * factor).clamp(*DISTANCES.start(), *DISTANCES.end());
        }
    }

    /// Zooms so that what lies at the target's depth under pixel position (x, y) stays there.
    pub fn zoom_at(&mut self, factor: f64, x: f64, y: f64, width: usize, height: usize) {
        let from_middle = [x - width as f64 / 2.0, y - height as f64 / 2.0];
        if from_middle.iter().all(|v| v.is_finite()) {
            self.pan(-from_middle[0], -from_middle[1], height);
            self.zoom(factor);
            self.pan(from_middle[0], from_middle[1], height);
        }
    }

    /// Looks along `direction` (from the eye into the picture) with `up` upright; the target and the distance stay.
    /// `up` becomes the pole. If it is parallel to the direction, the way up in the picture is arbitrary.
    pub fn look_along(&mut self, direction: [f64; 3], up: [f64; 3]) -> Result<(), EyeError> {
        let toward = scale(unit(direction).ok_or(EyeError::Direction(direction))?, -1.0);
        let pole = unit(up).ok_or(EyeError::Direction(up))?;
        let across = sub(self.front, scale(pole, dot(self.front, pole)));
        // A front nearly along the new pole would lose its digits.
        let front = if dot(across, across) > 1e-6 { unit(across) } else { None };
        self.pole = pole;
        self.front = front.unwrap_or_else(|| any_perpendicular(pole));
        let side = cross(self.pole, self.front);
        let level = [dot(toward, self.front), dot(toward, side)];
        let level_length = level[0].hypot(level[1]);
        self.pitch = dot(toward, pole).atan2(level_length);
        if level_length > 1e-12 {
            self.yaw = level[1].atan2(level[0]).rem_euclid(TAU);
        }
        Ok(())
    }

    /// Moves to where a ball just fits into a canvas of this size, without turning.
    pub fn fit(&mut self, centre: [f64; 3], radius: f64, width: usize, height: usize) -> Result<(), EyeError> {
        if !is_finite(centre) {
            return Err(EyeError::Target(centre));
        }
        let narrow = (width as f64 / height.max(1) as f64).clamp(1e-3, 1.0);
        let half_field = ((self.field / 2.0).tan() * narrow).atan();
        let distance = match self.lens {
            Lens::Perspective => radius / half_field.sin(),
            Lens::Orthographic => radius / half_field.tan(),
        };
        if !DISTANCES.contains(&distance) {
            return Err(EyeError::Distance(distance));
        }
        self.target = centre;
        self.distance = distance;
        Ok(())
    }

    /// The projection onto a canvas of this size.
    pub fn view(&self, width: usize, height: usize) -> View {
        View::new(self, width, height)
    }
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;
    use crate::vector::length;
    use proptest::prelude::*;

    /// A few roundings of numbers of order one to ten.
    const TOL: f64 = 1e-9;

    fn close(a: V3, b: V3) -> bool {
        length(sub(a, b)) < TOL * (1.0 + length(a))
    }

    #[test]
    fn signs_on_basis_vectors() {
        let mut eye = Eye::default();
        assert!(close(eye.position(), [0.0, 0.0, 5.0]));
        eye.orbit(FRAC_PI_2, 0.0);
        assert!(close(eye.position(), [5.0, 0.0, 0.0]), "a quarter turn to the right of +z is +x");
        eye.orbit(0.0, 7.0);
        assert!(close(eye.position(), [0.0, 5.0, 0.0]), "pitch stops at the pole");
        let [right, up, _] = eye.axes();
        assert!(close(right, [0.0, 0.0, -1.0]) && close(up, [-1.0, 0.0, 0.0]));
    }

    #[test]
    fn bad_places_are_refused_and_bad_gestures_ignored() {
        assert!(matches!(Eye::new([f64::NAN, 0.0, 0.0], 1.0), Err(EyeError::Target(_))));
        assert!(matches!(Eye::new([0.0; 3], -1.0), Err(EyeError::Distance(_))));
        assert!(matches!(Eye::default().look_along([0.0; 3], [0.0, 1.0, 0.0]), Err(EyeError::Direction(_))));
        assert!(matches!(Eye::default().fit([0.0; 3], f64::NAN, 10, 10), Err(EyeError::Distance(_))));
        let mut eye = Eye::default();
        eye.orbit(f64::NAN, 0.0);
        eye.pan(f64::INFINITY, 0.0, 0);
        eye.zoom(0.0);
        eye.zoom_at(0.5, f64::NAN, 0.0, 10, 10);
        eye.set_field_deg(f64::NAN);
        assert_eq!(eye, Eye::default());
    }

    #[test]
    fn a_fitted_ball_touches_the_edge() {
        for lens in [Lens::Perspective, Lens::Orthographic] {
            for (width, height) in [(1000, 700), (300, 700)] {
                let mut eye = Eye { lens, ..Eye::default() };
                eye.fit([1.0, 2.0, 3.0], 2.0, width, height).unwrap();
                let view = eye.view(width, height);
                // The line of sight along the edge of the picture is a tangent of the ball.
                let (x, y) = if width < height { (0.0, 350.0) } else { (500.0, 0.0) };
                let ray = view.ray(x, y).unwrap();
                let miss = length(cross(sub([1.0, 2.0, 3.0], ray.origin), ray.direction));
                assert!((miss - 2.0).abs() < TOL, "{lens:?} {width}: {miss}");
            }
        }
    }

    fn direction() -> impl Strategy<Value = V3> {
        prop::array::uniform3(-1.0..1.0_f64).prop_filter("has a direction", |v| length(*v) > 0.05)
    }

    proptest! {
        #![proptest_config(crate::testing::cases())]

        #[test]
        fn orbit_keeps_distance_and_target(steps in prop::collection::vec((-9.0..9.0_f64, -9.0..9.0_f64), 1..20)) {
            let mut eye = Eye::new([1.0, -2.0, 3.0], 7.0).unwrap();
            for (yaw, pitch) in steps {
                eye.orbit(yaw, pitch);
                prop_assert!((length(sub(eye.position(), [1.0, -2.0, 3.0])) - 7.0).abs() < TOL);
                let [right, up, toward] = eye.axes();
                prop_assert!(close(cross(right, up), toward) && (length(right) - 1.0).abs() < TOL);
                prop_assert!(up[1] > -TOL && right[1].abs() < TOL, "the pole stays upright");
            }
        }

        #[test]
        fn looking_along_a_direction(along in direction(), up in direction(), yaw in -7.0..7.0_f64) {
            let mut eye = Eye::default();
            eye.orbit(yaw, yaw / 3.0);
            eye.look_along(along, up).unwrap();
            let [right, picture_up, toward] = eye.axes();
            let along = unit(along).unwrap();
            prop_assert!(close(toward, scale(along, -1.0)));
            prop_assert!(dot(right, up).abs() < TOL, "up does not lean sideways");
            prop_assert!(dot(picture_up, up) > -TOL);
        }

        #[test]
        fn zooming_at_a_pixel_keeps_what_is_under_it(x in 0.0..900.0_f64, y in 0.0..600.0_f64, factor in 0.2..4.0_f64, yaw in 0.0..6.0_f64) {
            let mut eye = Eye::default();
            eye.orbit(yaw, 0.4);
            let before = eye.view(900, 600);
            let held = before.point_at_depth(x, y, eye.distance()).unwrap();
            eye.zoom_at(factor, x, y, 900, 600);
            let seen = eye.view(900, 600).project(held).unwrap();
            prop_assert!((seen.x - x).abs() < 1e-6 && (seen.y - y).abs() < 1e-6);
        }
    }
}

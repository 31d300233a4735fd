//! The closed-form rotation subproblems: which angles of one or two axes take a direction to a direction.
//!
//! Paden & Kahan's subproblems (Paden 1985, thesis, Berkeley; Murray, Li & Sastry 1994, *A Mathematical Introduction to
//! Robotic Manipulation*, ch. 3, section 3.2), written as spherical triangles in half angles so that double roots and
//! coinciding axes keep their digits.

use nalgebra::Vector3;

use super::HalfAngle;

/// A triangle that misses closing by this much, in radians, is taken to close: a few thousand rounding errors, far below
/// the 1e-10 to which settings fulfil the diffraction condition.
pub const CLOSING_TOLERANCE_RAD: f64 = 1e-12;

/// Two directions perpendicular to a unit axis; the second is the axis times the first.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Dial {
    /// The axis.
    pub axis: Vector3<f64>,
    /// Where angles about the axis count from.
    pub mark: Vector3<f64>,
    /// A quarter turn on from the mark.
    pub quarter: Vector3<f64>,
}

impl Dial {
    /// Counts angles about a unit axis from the side where another direction lies; from any side if it is parallel.
    pub fn new(axis: Vector3<f64>, towards: &Vector3<f64>) -> Self {
        let across = towards - axis * axis.dot(towards);
        let mark = if across.norm() > 1e-9 { across.normalize() } else { any_perpendicular(&axis) };
        Self { axis, mark, quarter: axis.cross(&mark) }
    }

    /// The part of a vector across the axis, as its components along mark and quarter.
    #[inline]
    pub fn across(&self, v: &Vector3<f64>) -> [f64; 2] {
        [self.mark.dot(v), self.quarter.dot(v)]
    }
}

impl Dial {
    /// A vector turned about the axis by the angle with this cosine and sine.
    #[inline]
    pub fn turned(&self, v: &Vector3<f64>, cosine: f64, sine: f64) -> Vector3<f64> {
        let [x, y] = self.across(v);
        self.axis * self.axis.dot(v) + self.mark * (x * cosine - y * sine) + self.quarter * (x * sine + y * cosine)
    }
}

/// A unit vector perpendicular to a unit vector.
fn any_perpendicular(axis: &Vector3<f64>) -> Vector3<f64> {
    let other = if axis.x.abs() < 0.6 { Vector3::x() } else { Vector3::y() };
    axis.cross(&other).normalize()
}

/// The right-handed turn in radians, −π to π, from one planar direction to another; 0 if either has no length.
#[inline]
pub fn turn(from: [f64; 2], to: [f64; 2]) -> f64 {
    (from[0] * to[1] - from[1] * to[0]).atan2(from[0] * to[0] + from[1] * to[1])
}

/// Why an outer axis cannot bring a direction, carried by an inner axis, to a wanted angle from itself.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Miss {
    /// By how many radians the wanted angle lies outside what the two axes can make.
    pub by_rad: f64,
}

/// Two axes at `axes` from each other; a direction at `carried` from the inner one is turned about it until it stands at
/// `wanted` from the outer one. Gives the angle, 0 to π, between that place and the one nearest to the outer axis: the
/// turn is plus or minus this.
///
/// cos(wanted) = cos(axes) cos(carried) + sin(axes) sin(carried) cos(opening).
///
/// # Errors
/// By how much the triangle fails to close.
#[inline]
pub fn opening(axes: HalfAngle, carried: HalfAngle, wanted: HalfAngle) -> Result<HalfAngle, Miss> {
    opening_of(axes.half_difference(carried), axes.half_sum(carried), wanted)
}

/// [`opening`] with the half difference and half sum of axes and carried made beforehand.
#[inline]
pub fn opening_of(difference: (f64, f64), sum: (f64, f64), wanted: HalfAngle) -> Result<HalfAngle, Miss> {
    let HalfAngle { sin, cos } = wanted;
    let near = (sin * difference.1 + cos * difference.0) * (sin * difference.1 - cos * difference.0);
    let far = (sum.0 * cos + sum.1 * sin) * (sum.0 * cos - sum.1 * sin);
    if near < 0.0 || far < 0.0 {
        let by_rad = shortfall(difference, sum, wanted);
        if by_rad > CLOSING_TOLERANCE_RAD {
            return Err(Miss { by_rad });
        }
    }
    let (near, far) = (near.max(0.0), far.max(0.0));
    let length = near + far;
    // Both vanish where the carried direction lies along the inner axis: the turn is then free, and zero will do.
    if length > 0.0 {
        Ok(HalfAngle { sin: (near / length).sqrt(), cos: (far / length).sqrt() })
    } else {
        Ok(HalfAngle { sin: 0.0, cos: 1.0 })
    }
}

/// Radians by which `wanted` lies below |axes − carried| or above axes + carried (or 2π less that).
#[cold]
fn shortfall(difference: (f64, f64), sum: (f64, f64), wanted: HalfAngle) -> f64 {
    let wanted = wanted.angle();
    let least = 2.0 * difference.0.abs().atan2(difference.1);
    let sum = 2.0 * sum.0.atan2(sum.1);
    let most = sum.min(2.0 * std::f64::consts::PI - sum);
    (least - wanted).max(wanted - most).max(0.0)
}

/// Where a direction, carried by an inner axis and turned by `side` × `opening` away from the place nearest to the outer
/// axis, stands about the outer axis: components along the side where the inner axis lies and a quarter turn on (not
/// normalised). `side` is +1 or −1.
#[inline]
pub fn bearing(axes: HalfAngle, carried: HalfAngle, opening: HalfAngle, side: f64) -> [f64; 2] {
    let sine = carried.full_sin();
    let difference = {
        let (s, c) = axes.half_difference(carried);
        2.0 * s * c
    };
    [
        difference + 2.0 * sine * axes.full_cos() * opening.sin * opening.sin,
        -side * 2.0 * sine * opening.sin * opening.cos,
    ]
}

#[cfg(test)]
mod tests {
    use nalgebra::{Rotation3, Unit};
    use proptest::prelude::*;

    use super::*;
    use crate::testing::{cases, unit_vector};

    fn rotate(axis: Vector3<f64>, angle: f64, v: Vector3<f64>) -> Vector3<f64> {
        Rotation3::from_axis_angle(&Unit::new_unchecked(axis), angle) * v
    }

    proptest! {
        #![proptest_config(cases())]

        /// What is turned by the two angles found arrives where it should.
        #[test]
        fn two_axes_take_a_direction_to_a_direction(
            outer in unit_vector(), inner in unit_vector(), carried in unit_vector(), t1 in -3.0..3.0f64, t2 in -3.0..3.0f64,
        ) {
            let axes = HalfAngle::between(&outer, &inner);
            prop_assume!(axes.full_sin() > 1e-3);
            let target = rotate(outer, t1, rotate(inner, t2, carried));
            let arm = HalfAngle::between(&inner, &carried);
            let open = opening(axes, arm, HalfAngle::between(&outer, &target));
            prop_assert!(open.is_ok());
            let Ok(open) = open else { return Ok(()) };
            let (about_outer, about_inner) = (Dial::new(outer, &inner), Dial::new(inner, &outer));
            for side in [1.0, -1.0] {
                let a2 = turn(about_inner.across(&carried), [1.0, 0.0]) + side * open.angle();
                let a1 = turn(bearing(axes, arm, open, side), about_outer.across(&target));
                let arrived = rotate(outer, a1, rotate(inner, a2, carried));
                prop_assert!((arrived - target).norm() < 1e-11, "{side}: {}", (arrived - target).norm());
            }
        }
    }

    #[test]
    fn a_miss_says_by_how_much() {
        let tilt = |deg: f64| Vector3::new(deg.to_radians().sin(), deg.to_radians().cos(), 0.0);
        let axes = HalfAngle::between(&tilt(0.0), &tilt(50.0));
        let arm = HalfAngle::between(&tilt(50.0), &tilt(0.0));
        let miss = opening(axes, arm, HalfAngle::between(&tilt(0.0), &tilt(107.0)));
        assert!(miss.is_err_and(|m| (m.by_rad.to_degrees() - 7.0).abs() < 1e-9), "two axes 50° apart reach to 100°");
        let narrow = HalfAngle::between(&tilt(50.0), &tilt(30.0));
        let near = opening(axes, narrow, HalfAngle::between(&tilt(0.0), &tilt(12.0)));
        assert!(near.is_err_and(|m| (m.by_rad.to_degrees() - 18.0).abs() < 1e-9), "30° is as near as it comes");
    }

    #[test]
    fn the_edge_is_a_double_root() {
        let tilt = |deg: f64| Vector3::new(deg.to_radians().sin(), deg.to_radians().cos(), 0.0);
        let axes = HalfAngle::between(&tilt(0.0), &tilt(50.0));
        let edge = opening(axes, axes, HalfAngle::between(&tilt(0.0), &tilt(100.0)));
        assert!(edge.is_ok_and(|o| (o.angle() - std::f64::consts::PI).abs() < 1e-6));
    }
}

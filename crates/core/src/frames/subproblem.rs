//! The closed-form rotation subproblems: which angles of one or two axes take a direction to a direction.
//!
//! Paden & Kahan's subproblems (Paden 1985, thesis, Berkeley; Murray, Li & Sastry 1994, *A Mathematical Introduction to
//! Robotic Manipulation*, ch. 3, section 3.2), written as spherical triangles in half angles so that double roots and
//! coinciding axes keep their digits.

use nalgebra::Vector3;

use super::HalfAngle;
use crate::lanes::{Mask, Real, Triple, dot};

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
    #[inline(always)]
    pub fn across<T: Real>(&self, v: &Triple<T>) -> [T; 2] {
        [dot(&self.mark, v), dot(&self.quarter, v)]
    }
}

/// A unit vector perpendicular to a unit vector.
fn any_perpendicular(axis: &Vector3<f64>) -> Vector3<f64> {
    let other = if axis.x.abs() < 0.6 { Vector3::x() } else { Vector3::y() };
    axis.cross(&other).normalize()
}

/// The right-handed turn in radians, −π to π, from one planar direction to another; 0 if either has no length.
#[inline(always)]
pub fn turn<T: Real>(from: [T; 2], to: [T; 2]) -> T {
    (from[0] * to[1] - from[1] * to[0]).atan2(from[0] * to[0] + from[1] * to[1])
}

/// How far the triangle of two axes and a carried direction opens.
#[derive(Debug, Clone, Copy)]
pub struct Opening<T: Real> {
    /// The angle, 0 to π, between the place of the carried direction and the one nearest to the outer axis.
    pub half: HalfAngle<T>,
    /// Where the triangle does not close, unless by rounding.
    fails: T::Mask,
    wanted: HalfAngle<T>,
}

/// Two axes at `axes` from each other; a direction at `carried` from the inner one is turned about it until it stands at
/// `wanted` from the outer one. Gives the angle, 0 to π, between that place and the one nearest to the outer axis: the
/// turn is plus or minus this. `difference` and `sum` are the sines and cosines of half of axes − carried and of half of
/// axes + carried.
///
/// cos(wanted) = cos(axes) cos(carried) + sin(axes) sin(carried) cos(opening).
#[inline(always)]
pub fn opening<T: Real>(difference: (T, T), sum: (T, T), wanted: HalfAngle<T>) -> Opening<T> {
    let HalfAngle { sin, cos } = wanted;
    let zero = sin.like(0.0);
    let near = (sin * difference.1 + cos * difference.0) * (sin * difference.1 - cos * difference.0);
    let far = (sum.0 * cos + sum.1 * sin) * (sum.0 * cos - sum.1 * sin);
    let fails = near.below(zero) | far.below(zero);
    let (near, far) = (near.larger(zero), far.larger(zero));
    let length = near + far;
    // Both vanish where the carried direction lies along the inner axis: the turn is then free, and zero will do.
    let closes = zero.below(length);
    let (sin, cos) = ((near / length).sqrt(), (far / length).sqrt());
    let half = HalfAngle { sin: T::choose(closes, sin, zero), cos: T::choose(closes, cos, zero.like(1.0)) };
    Opening { half, fails, wanted }
}

impl<T: Real> Opening<T> {
    /// By how many radians the wanted angle lies below `least` or above `most`, the angles that the two axes can make
    /// ([`extremes`]); 0 where the triangle closes.
    #[inline(always)]
    pub fn miss_rad(&self, extremes: (T, T)) -> T {
        let zero = self.wanted.sin.like(0.0);
        if !self.fails.any() {
            return zero;
        }
        let wanted = self.wanted.angle();
        let by_rad = (extremes.0 - wanted).larger(wanted - extremes.1);
        T::choose(self.fails & zero.like(CLOSING_TOLERANCE_RAD).below(by_rad), by_rad, zero)
    }
}

/// The smallest and the largest angle in radians from the outer axis that a carried direction can be brought to:
/// |axes − carried|, and axes + carried or 2π less that. Arguments as for [`opening`].
#[inline(always)]
pub fn extremes<T: Real>(difference: (T, T), sum: (T, T)) -> (T, T) {
    let least = difference.0.abs().atan2(difference.1) * 2.0;
    let most = sum.0.atan2(sum.1) * 2.0;
    (least, most.smaller(-most + 2.0 * std::f64::consts::PI))
}

/// Where a direction, carried by an inner axis and turned by `side` × `opening` away from the place nearest to the outer
/// axis, stands about the outer axis: components along the side where the inner axis lies and a quarter turn on (not
/// normalised). `side` is +1 or −1.
#[inline(always)]
pub fn bearing<T: Real>(axes: HalfAngle<T>, carried: HalfAngle<T>, opening: HalfAngle<T>, side: f64) -> [T; 2] {
    let sine = carried.full_sin() * 2.0;
    let (s, c) = axes.half_difference(carried);
    [s * c * 2.0 + sine * axes.full_cos() * opening.sin * opening.sin, sine * opening.sin * opening.cos * -side]
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

    fn between(a: &Vector3<f64>, b: &Vector3<f64>) -> HalfAngle {
        HalfAngle::between(&(*a).into(), b)
    }

    /// The opening, and by how many radians the triangle fails to close.
    fn open(axes: HalfAngle, carried: HalfAngle, wanted: HalfAngle) -> (HalfAngle, f64) {
        let (difference, sum) = (axes.half_difference(carried), axes.half_sum(carried));
        let open = opening(difference, sum, wanted);
        (open.half, open.miss_rad(extremes(difference, sum)))
    }

    proptest! {
        #![proptest_config(cases())]

        /// What is turned by the two angles found arrives where it should.
        #[test]
        fn two_axes_take_a_direction_to_a_direction(
            outer in unit_vector(), inner in unit_vector(), carried in unit_vector(), t1 in -3.0..3.0f64, t2 in -3.0..3.0f64,
        ) {
            let axes = between(&outer, &inner);
            prop_assume!(axes.full_sin() > 1e-3);
            let target = rotate(outer, t1, rotate(inner, t2, carried));
            let arm = between(&inner, &carried);
            let (open, miss) = open(axes, arm, between(&outer, &target));
            prop_assert_eq!(miss, 0.0);
            let (about_outer, about_inner) = (Dial::new(outer, &inner), Dial::new(inner, &outer));
            for side in [1.0, -1.0] {
                let a2 = turn(about_inner.across(&carried.into()), [1.0, 0.0]) + side * open.angle();
                let a1 = turn(bearing(axes, arm, open, side), about_outer.across(&target.into()));
                let arrived = rotate(outer, a1, rotate(inner, a2, carried));
                prop_assert!((arrived - target).norm() < 1e-11, "{side}: {}", (arrived - target).norm());
            }
        }
    }

    #[test]
    fn a_miss_says_by_how_much() {
        let tilt = |deg: f64| Vector3::new(deg.to_radians().sin(), deg.to_radians().cos(), 0.0);
        let axes = between(&tilt(0.0), &tilt(50.0));
        let arm = between(&tilt(50.0), &tilt(0.0));
        let (_, miss) = open(axes, arm, between(&tilt(0.0), &tilt(107.0)));
        assert!((miss.to_degrees() - 7.0).abs() < 1e-9, "two axes 50° apart reach to 100°");
        let narrow = between(&tilt(50.0), &tilt(30.0));
        let (_, near) = open(axes, narrow, between(&tilt(0.0), &tilt(12.0)));
        assert!((near.to_degrees() - 18.0).abs() < 1e-9, "30° is as near as it comes");
    }

    #[test]
    fn the_edge_is_a_double_root() {
        let tilt = |deg: f64| Vector3::new(deg.to_radians().sin(), deg.to_radians().cos(), 0.0);
        let axes = between(&tilt(0.0), &tilt(50.0));
        let (edge, miss) = open(axes, axes, between(&tilt(0.0), &tilt(100.0)));
        assert!(miss == 0.0 && (edge.angle() - std::f64::consts::PI).abs() < 1e-6);
    }
}

use super::attempts::{Attempts, Freedom};
use super::chain::Chain;
use super::detector::DetectorPlace;
use crate::frames::HalfAngle;
use crate::frames::subproblem::{Dial, bearing, extremes, opening, turn};
use crate::lanes::{Real, Triple};

/// Below this sine a direction counts as lying along an axis, whose angle is then free.
const ALONG_AXIS: f64 = 1e-9;

/// Two moving axes: A₁(t₁) A₂(t₂) takes a direction to a direction.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Pair {
    outer: Dial,
    inner: Dial,
    between: HalfAngle,
    /// The two axes lie along one line.
    one_line: bool,
    /// Positions of the two axes among all axes of the machine, and their zero offsets in degrees.
    axes: [usize; 2],
    zero_deg: [f64; 2],
}

impl Pair {
    /// The two moving axes of a chain.
    pub fn new(chain: &Chain) -> Option<Self> {
        let [a1, a2] = chain.directions[..] else { return None };
        let between = HalfAngle::between(&a1.into(), &a2);
        Some(Self {
            outer: Dial::new(a1, &a2),
            inner: Dial::new(a2, &a1),
            between,
            one_line: between.full_sin() < ALONG_AXIS,
            axes: chain.indices[..].try_into().ok()?,
            zero_deg: chain.zero_deg[..].try_into().ok()?,
        })
    }

    /// Both ways (side +1, −1) to take the direction `carried` (a unit vector) onto Q̂ for each place of the detector. Fills
    /// the rows of the two axes.
    #[inline(always)]
    pub fn solve<T: Real>(&self, carried: &Triple<T>, places: &[DetectorPlace<T>; 2], attempts: &mut Attempts<T>) {
        let zero = carried[0].like(0.0);
        let (between, arm) = (HalfAngle::like(self.between, zero), HalfAngle::between(carried, &self.inner.axis));
        let (difference, sum) = (between.half_difference(arm), between.half_sum(arm));
        let along_axis = zero.like(ALONG_AXIS);
        let inner_free = arm.full_sin().below(along_axis);
        let seen = turn(self.inner.across(carried), [zero.like(1.0), zero]);
        for (sign, place) in places.iter().enumerate() {
            let wanted = HalfAngle::between(&place.q, &self.outer.axis);
            let outer_free = wanted.full_sin().below(along_axis);
            let target = self.outer.across(&place.q);
            let open = opening(difference, sum, wanted);
            let miss_deg = open.miss_rad(extremes(difference, sum)).to_degrees();
            let freedom = self.freedom(inner_free, outer_free, zero);
            for (branch, side) in [(2 * sign, 1.0), (2 * sign + 1, -1.0)] {
                let (outer, inner) = if self.one_line {
                    // Only the sum of the two angles counts: the inner one stays at 0.
                    (turn(self.outer.across(carried), target), zero)
                } else {
                    let outer = turn(bearing(between, arm, open.half, side), target);
                    (outer, T::choose(inner_free, zero, seen + open.half.angle() * side))
                };
                let outer = T::choose(outer_free, zero, outer);
                for (row, angle) in [outer, inner].into_iter().enumerate() {
                    attempts.readings_deg[self.axes[row]][branch] = angle.to_degrees() + self.zero_deg[row];
                }
                attempts.miss_deg[branch] = miss_deg;
                attempts.freedom[branch] = freedom;
            }
        }
    }

    /// What is free, as [`Freedom::code`].
    #[inline(always)]
    fn freedom<T: Real>(&self, inner_free: T::Mask, outer_free: T::Mask, zero: T) -> T {
        if self.one_line {
            return zero.like(Freedom::OnlySumFixed.code());
        }
        let outer = T::choose(outer_free, zero.like(Freedom::OuterAxis.code()), zero);
        T::choose(inner_free, zero.like(Freedom::InnerAxis.code()), outer)
    }
}

use nalgebra::Vector3;

use super::attempts::{Attempts, Freedom};
use super::chain::Chain;
use super::detector::DetectorPlace;
use crate::frames::HalfAngle;
use crate::frames::subproblem::{Dial, bearing, opening, turn};

/// Below this sine a direction counts as lying along an axis, whose angle is then free.
const ALONG_AXIS: f64 = 1e-9;

/// Two moving axes: A₁(t₁) A₂(t₂) takes a direction to a direction.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Pair {
    outer: Dial,
    inner: Dial,
    between: HalfAngle,
}

/// One of the two ways to set the pair.
#[derive(Debug, Clone, Copy)]
pub(super) struct PairAngles {
    /// Angles of outer and inner axis in radians.
    pub angles_rad: [f64; 2],
    /// What was free.
    pub freedom: Freedom,
}

impl Pair {
    /// The two moving axes of a chain.
    pub fn new(chain: &Chain) -> Option<Self> {
        let [a1, a2] = chain.directions[..] else { return None };
        Some(Self::of(a1, a2))
    }

    /// Outer and inner axis, unit vectors.
    pub fn of(a1: Vector3<f64>, a2: Vector3<f64>) -> Self {
        Self { outer: Dial::new(a1, &a2), inner: Dial::new(a2, &a1), between: HalfAngle::between(&a1, &a2) }
    }

    /// Both ways to take the direction `carried` (a unit vector) onto Q̂ for each place of the detector. Fills the rows of
    /// the two axes, without their zero offsets.
    pub fn solve(&self, carried: &Vector3<f64>, places: &[DetectorPlace; 2], axes: &[usize], attempts: &mut Attempts) {
        for (sign, place) in places.iter().enumerate() {
            let ways = self.angles(carried, &place.q);
            for way in 0..2 {
                let branch = 2 * sign + way;
                match ways {
                    Err(by_rad) => attempts.miss_deg[branch] = by_rad.to_degrees(),
                    Ok(ways) => {
                        attempts.miss_deg[branch] = 0.0;
                        attempts.freedom[branch] = ways[way].freedom;
                        for (&axis, angle) in axes.iter().zip(ways[way].angles_rad) {
                            attempts.readings_deg[axis][branch] = angle.to_degrees();
                        }
                    }
                }
            }
        }
    }

    /// Both ways (side +1, side −1) to take `carried` to `target`, unit vectors.
    ///
    /// # Errors
    /// By how many radians the target is out of reach.
    pub fn angles(&self, carried: &Vector3<f64>, target: &Vector3<f64>) -> Result<[PairAngles; 2], f64> {
        let arm = HalfAngle::between(&self.inner.axis, carried);
        let wanted = HalfAngle::between(&self.outer.axis, target);
        let open = opening(self.between, arm, wanted).map_err(|miss| miss.by_rad)?;
        let outer_free = wanted.full_sin() < ALONG_AXIS;
        let one_line = self.between.full_sin() < ALONG_AXIS;
        let inner_free = arm.full_sin() < ALONG_AXIS || one_line;
        let freedom = match (one_line, inner_free, outer_free) {
            (true, _, _) => Freedom::OnlySumFixed,
            (false, true, _) => Freedom::InnerAxis,
            (false, false, true) => Freedom::OuterAxis,
            (false, false, false) => Freedom::None,
        };
        let seen = self.inner.across(carried);
        let way = |side: f64| {
            let t2 = if inner_free { 0.0 } else { turn(seen, [1.0, 0.0]) + side * open.angle() };
            let t1 = if outer_free {
                0.0
            } else if one_line {
                // Only the sum of the two angles counts: the inner one stays at 0.
                turn(self.outer.across(carried), self.outer.across(target))
            } else {
                turn(bearing(self.between, arm, open, side), self.outer.across(target))
            };
            PairAngles { angles_rad: [t1, t2], freedom }
        };
        Ok([way(1.0), way(-1.0)])
    }
}

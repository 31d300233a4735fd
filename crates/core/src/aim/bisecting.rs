use nalgebra::Vector3;

use super::chain::Chain;
use super::solver::Freedom;
use crate::frames::HalfAngle;
use crate::frames::subproblem::{CLOSING_TOLERANCE_RAD, Dial, opening_of, turn};

/// Below this sine of the angle between Q and an axis the axis turns the crystal about Q only.
const ALONG_AXIS: f64 = 1e-9;

/// Three moving axes under *bisecting*, everything that depends on the stack alone.
///
/// The spindle a₃ is carried to a direction in the plane of Q̂ and the reference axis a₁, at its fixed angle ρ from Q̂:
/// on one side of Q̂ or the other (`κ` = ±1). With μ the angle from a₁ to Q̂, that direction stands at ζ = μ + κρ from a₁.
/// The triangle a₁, a₂, a₃ then gives the middle angle, and the bearings of its sides about a₁ and about a₃ give the
/// other two.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Bisecting {
    outer: Dial,
    inner: Dial,
    /// The middle angle at which the spindle stands nearest to the reference axis.
    middle_zero: f64,
    difference: (f64, f64),
    sum: (f64, f64),
    outer_bearing: Bearing,
    inner_bearing: Bearing,
}

/// Angles of the three axes.
#[derive(Debug, Clone, Copy)]
pub(super) struct BisectingAngles {
    /// Outer, middle and inner angle in radians.
    pub angles_rad: [f64; 3],
    /// What was free.
    pub freedom: Freedom,
}

/// The side of Q̂ and the sign of the opening, as bits of a branch number.
pub(super) const SIDES: [f64; 2] = [1.0, -1.0];

impl Bisecting {
    /// For a chain of three axes, neither neighbours parallel.
    pub fn new(chain: &Chain) -> Option<Self> {
        let [a1, a2, a3] = chain.directions[..] else { return None };
        let (first, second) = (HalfAngle::between(&a1, &a2), HalfAngle::between(&a2, &a3));
        if first.full_sin() < 1e-6 || second.full_sin() < 1e-6 {
            return None;
        }
        let middle = Dial::new(a2, &a1);
        let (difference, sum) = (first.half_difference(second), first.half_sum(second));
        Some(Self {
            outer: Dial::new(a1, &a2),
            inner: Dial::new(a3, &a2),
            middle_zero: turn(middle.across(&a3), [1.0, 0.0]),
            difference,
            sum,
            outer_bearing: Bearing::new(first, second, difference.0, sum.1),
            inner_bearing: Bearing::new(second, first, -difference.0, sum.1),
        })
    }

    /// The four ways to bring the direction `carried` onto `q` (unit vectors), in the order κ = +1, −1 and within it
    /// opening +, −: `found` gets the number of the way and its angles or by how many radians it misses.
    #[inline]
    pub fn each(
        &self,
        carried: &Vector3<f64>,
        q: &Vector3<f64>,
        mut found: impl FnMut(u8, Result<BisectingAngles, f64>),
    ) {
        let mu = HalfAngle::between(q, &self.outer.axis);
        let rho = HalfAngle::between(carried, &self.inner.axis);
        let (q_across, carried_across) = (self.outer.across(q), self.inner.across(carried));
        let spindle_free = rho.full_sin() < ALONG_AXIS;
        for (i, kappa) in SIDES.into_iter().enumerate() {
            let (s, c) = if kappa > 0.0 { mu.half_sum(rho) } else { mu.half_difference(rho) };
            let sign = if s * c < 0.0 { -1.0 } else { 1.0 };
            let zeta = HalfAngle { sin: s.abs(), cos: c.abs() };
            let number = 2 * i as u8;
            let open = match opening_of(self.difference, self.sum, zeta) {
                Ok(open) => open,
                Err(miss) => {
                    found(number, Err(miss.by_rad));
                    found(number + 1, Err(miss.by_rad));
                    continue;
                }
            };
            let opening_rad = open.angle();
            let freedom = match (spindle_free, zeta.full_sin() < ALONG_AXIS) {
                (true, _) => Freedom::InnerAxis,
                (false, true) => Freedom::OnlySumFixed,
                (false, false) => Freedom::None,
            };
            for (j, side) in SIDES.into_iter().enumerate() {
                let at_outer = self.outer_bearing.at(open, -side);
                let at_inner = self.inner_bearing.at(open, side);
                let t1 = turn(at_outer, q_across.map(|x| sign * x));
                let t3 = turn(carried_across, at_inner.map(|x| kappa * sign * x));
                let angles_rad = [t1, self.middle_zero + side * opening_rad, if spindle_free { 0.0 } else { t3 }];
                found(number + j as u8, Ok(BisectingAngles { angles_rad, freedom }));
            }
        }
    }
}

/// The direction in which one end of the triangle sees the other, as a function of the opening, with the factors that
/// vanish at touching axes divided out: so the limit of *bisecting* is met where spindle and reference axis coincide.
#[derive(Debug, Clone, Copy, PartialEq)]
enum Bearing {
    /// Sides of different lengths: sin(difference), 2 sin(far) cos(near), 2 sin(far).
    Plain { start: f64, along: f64, across: f64 },
    /// Equal sides: the ends meet at opening 0. cos of the side.
    Equal { cosine: f64 },
    /// Sides that add up to 180°: the ends oppose each other at opening 180°. cos of the near side.
    Supplementary { cosine: f64 },
    /// Both sides 90°.
    Right,
}

impl Bearing {
    fn new(near: HalfAngle, far: HalfAngle, half_sine_of_difference: f64, half_cosine_of_sum: f64) -> Self {
        let equal = half_sine_of_difference.abs() < CLOSING_TOLERANCE_RAD;
        let supplementary = half_cosine_of_sum.abs() < CLOSING_TOLERANCE_RAD;
        match (equal, supplementary) {
            (true, true) => Self::Right,
            (true, false) => Self::Equal { cosine: near.full_cos() },
            (false, true) => Self::Supplementary { cosine: near.full_cos() },
            (false, false) => {
                let (s, c) = near.half_difference(far);
                let across = 2.0 * far.full_sin();
                Self::Plain { start: 2.0 * s * c, along: across * near.full_cos(), across }
            }
        }
    }

    /// Components along the middle axis and a quarter turn on; `side` is the sign of the second.
    #[inline]
    fn at(self, open: HalfAngle, side: f64) -> [f64; 2] {
        match self {
            Self::Plain { start, along, across } => {
                [start + along * open.sin * open.sin, side * across * open.sin * open.cos]
            }
            Self::Equal { cosine } => [cosine * open.sin, side * open.cos],
            Self::Supplementary { cosine } => [-cosine * open.cos, side * open.sin],
            Self::Right => [0.0, side],
        }
    }
}

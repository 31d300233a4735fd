use nalgebra::Vector3;

use super::attempts::{Attempts, Freedom, MAX_BRANCHES};
use super::chain::Chain;
use super::detector::{DetectorArm, DetectorPlace};

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
    /// The middle angle in degrees at which the spindle stands nearest to the reference axis.
    middle_zero_deg: f64,
    difference: (f64, f64),
    sum: (f64, f64),
    outer_bearing: Bearing,
    inner_bearing: Bearing,
    /// The reference axis stands at the same angle from Q̂ for both signs of the detector, so the triangles are shared.
    both_signs_alike: bool,
}

/// The triangle a₁, a₂, a₃ for one side of Q̂: all that does not depend on where Q̂ stands about a₁. Angles in degrees.
#[derive(Debug, Clone, Copy)]
struct Triangle {
    /// By how much it fails to close; 0 if it closes.
    miss_deg: f64,
    opening_deg: f64,
    /// Bearing of the spindle about the reference axis, and of the reference axis about the spindle, at opening +.
    outer_deg: f64,
    inner_deg: f64,
    /// Whether ζ points to the other side of a₁ than Q̂ does.
    beyond: bool,
    only_sum_fixed: bool,
}

impl Bisecting {
    /// For a chain of three axes, neither neighbours parallel.
    pub fn new(chain: &Chain, arm: &DetectorArm) -> Option<Self> {
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
            middle_zero_deg: turn(middle.across(&a3), [1.0, 0.0]).to_degrees(),
            difference,
            sum,
            outer_bearing: Bearing::new(first, second, difference.0, sum.1),
            inner_bearing: Bearing::new(second, first, -difference.0, sum.1),
            both_signs_alike: arm.sideways().dot(&a1).abs() < 1e-14,
        })
    }

    /// The four ways to bring the direction `carried` (a unit vector) onto Q̂ for each place of the detector: κ = +1, −1
    /// and within it opening +, −. Fills the rows of the three axes, without their zero offsets.
    #[inline]
    pub fn solve(&self, carried: &Vector3<f64>, places: &[DetectorPlace; 2], axes: &[usize], attempts: &mut Attempts) {
        let rho = HalfAngle::between(carried, &self.inner.axis);
        let [cx, cy] = self.inner.across(carried);
        let carried_deg = cy.atan2(cx).to_degrees();
        let spindle_free = rho.full_sin() < ALONG_AXIS;
        let (mut outer, mut middle, mut inner) = ([0.0; MAX_BRANCHES], [0.0; MAX_BRANCHES], [0.0; MAX_BRANCHES]);
        let mut triangles = self.triangles(&places[0].q, rho);
        for (sign, place) in places.iter().enumerate() {
            if sign > 0 && !self.both_signs_alike {
                triangles = self.triangles(&place.q, rho);
            }
            let [qx, qy] = self.outer.across(&place.q);
            let q_deg = qy.atan2(qx).to_degrees();
            for (i, t) in triangles.iter().enumerate() {
                let at_outer = q_deg + half_turn_if(t.beyond);
                let at_inner = half_turn_if(t.beyond != (i == 1)) - carried_deg;
                let branch = 4 * sign + 2 * i;
                (outer[branch], outer[branch + 1]) = (at_outer + t.outer_deg, at_outer - t.outer_deg);
                middle[branch] = self.middle_zero_deg + t.opening_deg;
                middle[branch + 1] = self.middle_zero_deg - t.opening_deg;
                (inner[branch], inner[branch + 1]) = (at_inner + t.inner_deg, at_inner - t.inner_deg);
                let freedom = match (spindle_free, t.only_sum_fixed) {
                    (true, _) => Freedom::InnerAxis,
                    (false, true) => Freedom::OnlySumFixed,
                    (false, false) => Freedom::None,
                };
                for way in [branch, branch + 1] {
                    attempts.miss_deg[way] = t.miss_deg;
                    attempts.freedom[way] = freedom;
                }
            }
        }
        if spindle_free {
            inner = [0.0; MAX_BRANCHES];
        }
        for (&axis, row) in axes.iter().zip([outer, middle, inner]) {
            attempts.readings_deg[axis] = row;
        }
    }

    /// The triangles for κ = +1 and −1.
    #[inline]
    fn triangles(&self, q: &Vector3<f64>, rho: HalfAngle) -> [Triangle; 2] {
        let mu = HalfAngle::between(q, &self.outer.axis);
        [self.triangle(mu.half_sum(rho)), self.triangle(mu.half_difference(rho))]
    }

    /// The triangle for ζ, given as sine and cosine of its half; ζ may lie anywhere between −π and 2π.
    #[inline]
    fn triangle(&self, (s, c): (f64, f64)) -> Triangle {
        let zeta = HalfAngle { sin: s.abs(), cos: c.abs() };
        let (open, miss_deg) = match opening_of(self.difference, self.sum, zeta) {
            Ok(open) => (open, 0.0),
            Err(miss) => (HalfAngle { sin: 0.0, cos: 1.0 }, miss.by_rad.to_degrees()),
        };
        Triangle {
            miss_deg,
            opening_deg: open.angle().to_degrees(),
            outer_deg: self.outer_bearing.angle_rad(open).to_degrees(),
            inner_deg: self.inner_bearing.angle_rad(open).to_degrees(),
            beyond: s * c < 0.0,
            only_sum_fixed: zeta.full_sin() < ALONG_AXIS,
        }
    }
}

#[inline]
fn half_turn_if(condition: bool) -> f64 {
    if condition { 180.0 } else { 0.0 }
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

    /// The bearing in radians at opening +, away from the middle axis; at opening − it is the opposite.
    #[inline]
    fn angle_rad(self, open: HalfAngle) -> f64 {
        match self {
            Self::Plain { start, along, across } => {
                (across * open.sin * open.cos).atan2(start + along * open.sin * open.sin)
            }
            Self::Equal { cosine } => open.cos.atan2(cosine * open.sin),
            Self::Supplementary { cosine } => open.sin.atan2(-cosine * open.cos),
            Self::Right => std::f64::consts::FRAC_PI_2,
        }
    }
}

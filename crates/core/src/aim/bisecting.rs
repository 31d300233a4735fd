use super::attempts::{Attempts, Freedom};
use super::chain::Chain;
use super::detector::{DetectorArm, DetectorPlace};
use crate::frames::HalfAngle;
use crate::frames::subproblem::{CLOSING_TOLERANCE_RAD, Dial, extremes, opening, turn};
use crate::lanes::{Mask, Real, Triple};

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
    /// Positions of the three axes among all axes of the machine, and their zero offsets in degrees.
    axes: [usize; 3],
    zero_deg: [f64; 3],
    /// The reading of the middle axis in degrees at which the spindle stands nearest to the reference axis.
    middle_zero_deg: f64,
    difference: (f64, f64),
    sum: (f64, f64),
    /// The smallest and the largest angle in radians between spindle and reference axis.
    extremes_rad: (f64, f64),
    outer_bearing: Bearing,
    inner_bearing: Bearing,
    /// The reference axis stands at the same angle from Q̂ for both signs of the detector, so the triangles are shared.
    both_signs_alike: bool,
}

/// The triangle a₁, a₂, a₃ for one side of Q̂: all that does not depend on where Q̂ stands about a₁. Angles in degrees.
#[derive(Debug, Clone, Copy)]
struct Triangle<T: Real> {
    /// By how much it fails to close; 0 if it closes.
    miss_deg: T,
    opening_deg: T,
    /// Bearing of the spindle about the reference axis, and of the reference axis about the spindle, at opening +.
    outer_deg: T,
    inner_deg: T,
    /// Whether ζ points to the other side of a₁ than Q̂ does.
    beyond: T::Mask,
    only_sum_fixed: T::Mask,
}

impl Bisecting {
    /// For a chain of three axes, no neighbours parallel.
    pub fn new(chain: &Chain, arm: &DetectorArm) -> Option<Self> {
        let [a1, a2, a3] = chain.directions[..] else { return None };
        let (first, second) = (HalfAngle::between(&a1.into(), &a2), HalfAngle::between(&a2.into(), &a3));
        if first.full_sin() < 1e-6 || second.full_sin() < 1e-6 {
            return None;
        }
        let middle = Dial::new(a2, &a1);
        let zero_deg = chain.zero_deg[..].try_into().ok()?;
        let (difference, sum) = (first.half_difference(second), first.half_sum(second));
        Some(Self {
            outer: Dial::new(a1, &a2),
            inner: Dial::new(a3, &a2),
            axes: chain.indices[..].try_into().ok()?,
            zero_deg,
            middle_zero_deg: turn(middle.across(&a3.into()), [1.0, 0.0]).to_degrees() + zero_deg[1],
            difference,
            sum,
            extremes_rad: extremes(difference, sum),
            outer_bearing: Bearing::new(first, second, difference.0, sum.1),
            inner_bearing: Bearing::new(second, first, -difference.0, sum.1),
            both_signs_alike: arm.sideways().dot(&a1).abs() < 1e-14,
        })
    }

    /// The four ways to bring the direction `carried` (a unit vector) onto Q̂ for each place of the detector: κ = +1, −1
    /// and within it opening +, −. Fills the rows of the three axes.
    #[inline(always)]
    pub fn solve<T: Real>(&self, carried: &Triple<T>, places: &[DetectorPlace<T>; 2], attempts: &mut Attempts<T>) {
        let rho = HalfAngle::between(carried, &self.inner.axis);
        let [cx, cy] = self.inner.across(carried);
        let carried_deg = cy.atan2(cx).to_degrees();
        let spindle_free = rho.full_sin().below(cx.like(ALONG_AXIS));
        let [outer, middle, inner] = self.axes;
        let mut triangles = self.triangles(&places[0].q, rho);
        for (sign, place) in places.iter().enumerate() {
            if sign > 0 && !self.both_signs_alike {
                triangles = self.triangles(&place.q, rho);
            }
            let [qx, qy] = self.outer.across(&place.q);
            let q_deg = qy.atan2(qx).to_degrees() + self.zero_deg[0];
            for (i, t) in triangles.iter().enumerate() {
                let at_outer = q_deg + half_turn_where(t.beyond, cx);
                let to_inner = half_turn_where(if i == 1 { !t.beyond } else { t.beyond }, cx) - carried_deg;
                let at_inner = to_inner + self.zero_deg[2];
                let free = T::choose(t.only_sum_fixed, cx.like(Freedom::OnlySumFixed.code()), cx.like(0.0));
                let freedom = T::choose(spindle_free, cx.like(Freedom::InnerAxis.code()), free);
                for (branch, side) in [(4 * sign + 2 * i, 1.0), (4 * sign + 2 * i + 1, -1.0)] {
                    attempts.readings_deg[outer][branch] = at_outer + t.outer_deg * side;
                    attempts.readings_deg[middle][branch] = t.opening_deg * side + self.middle_zero_deg;
                    attempts.readings_deg[inner][branch] = at_inner + t.inner_deg * side;
                    attempts.miss_deg[branch] = t.miss_deg;
                    attempts.freedom[branch] = freedom;
                }
            }
        }
        if spindle_free.any() {
            for reading in &mut attempts.readings_deg[inner] {
                *reading = T::choose(spindle_free, cx.like(self.zero_deg[2]), *reading);
            }
        }
    }

    /// The triangles for κ = +1 and −1.
    #[inline(always)]
    fn triangles<T: Real>(&self, q: &Triple<T>, rho: HalfAngle<T>) -> [Triangle<T>; 2] {
        let mu = HalfAngle::between(q, &self.outer.axis);
        [self.triangle(mu.half_sum(rho)), self.triangle(mu.half_difference(rho))]
    }

    /// The triangle for ζ, given as sine and cosine of its half; ζ may lie anywhere between −π and 2π.
    #[inline(always)]
    fn triangle<T: Real>(&self, (s, c): (T, T)) -> Triangle<T> {
        let zeta = HalfAngle { sin: s.abs(), cos: c.abs() };
        let open = opening(pair(self.difference, s), pair(self.sum, s), zeta);
        Triangle {
            miss_deg: open.miss_rad(pair(self.extremes_rad, s)).to_degrees(),
            opening_deg: open.half.angle().to_degrees(),
            outer_deg: self.outer_bearing.angle_rad(open.half).to_degrees(),
            inner_deg: self.inner_bearing.angle_rad(open.half).to_degrees(),
            beyond: (s * c).below(s.like(0.0)),
            only_sum_fixed: zeta.full_sin().below(s.like(ALONG_AXIS)),
        }
    }
}

#[inline(always)]
fn pair<T: Real>((a, b): (f64, f64), like: T) -> (T, T) {
    (like.like(a), like.like(b))
}

#[inline(always)]
fn half_turn_where<T: Real>(mask: T::Mask, like: T) -> T {
    T::choose(mask, like.like(180.0), like.like(0.0))
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
    #[inline(always)]
    fn angle_rad<T: Real>(self, open: HalfAngle<T>) -> T {
        let HalfAngle { sin, cos } = open;
        match self {
            Self::Plain { start, along, across } => (sin * cos * across).atan2(sin * sin * along + start),
            Self::Equal { cosine } => cos.atan2(sin * cosine),
            Self::Supplementary { cosine } => sin.atan2(cos * -cosine),
            Self::Right => sin.like(std::f64::consts::FRAC_PI_2),
        }
    }
}

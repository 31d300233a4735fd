use nalgebra::Vector3;

use crate::frames::subproblem::CLOSING_TOLERANCE_RAD;
use crate::lanes::{Mask, Real, Triple};

/// A detector on one axis: where Q points for each of its two signs.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct DetectorArm {
    /// axis × ẑ, a unit vector: where the detector swings to.
    sideways: Vector3<f64>,
    /// The part of ẑ across the axis, a unit vector.
    forward: Vector3<f64>,
    /// Sine of the angle between axis and beam.
    sine: f64,
}

/// The place of the detector for one sign.
#[derive(Debug, Clone, Copy)]
pub(super) struct DetectorPlace<T> {
    /// Angle of the detector axis in degrees.
    pub angle_deg: T,
    /// Unit vector along Q in the lab frame.
    pub q: Triple<T>,
}

impl DetectorArm {
    /// Nothing if the axis lies along the beam, where it swings nothing.
    pub fn new(axis: &Vector3<f64>) -> Option<Self> {
        let sideways = axis.cross(&Vector3::z());
        let sine = sideways.norm();
        if sine < 1e-6 {
            return None;
        }
        let forward = (Vector3::z() - axis * axis.z) / sine;
        Some(Self { sideways: sideways / sine, forward, sine })
    }

    /// The direction to which a positive angle swings the detector, a unit vector.
    pub fn sideways(&self) -> &Vector3<f64> {
        &self.sideways
    }

    /// Both places, the one at a positive angle first, for sin θ from 0 to 1, and by how many degrees 2θ lies beyond what
    /// the arm reaches.
    ///
    /// With ẑ·D(δ)ẑ = cos 2θ it follows that sin(δ/2) = sin θ / sin(axis, beam).
    #[inline(always)]
    pub fn places<T: Real>(&self, sin_theta: T) -> ([DetectorPlace<T>; 2], T) {
        let one = sin_theta.like(1.0);
        let s = sin_theta * (1.0 / self.sine);
        let miss_deg = self.miss_deg(sin_theta, one.below(s));
        let s = s.smaller(one);
        let c = cosine(s);
        let angle_deg = (s.atan2(c) * 2.0).to_degrees();
        let plus = DetectorPlace { angle_deg, q: self.q(s, c) };
        let minus = DetectorPlace { angle_deg: -angle_deg, q: self.q(s, -c) };
        ([plus, minus], miss_deg)
    }

    #[inline(always)]
    fn q<T: Real>(&self, back: T, swing: T) -> Triple<T> {
        let Self { sideways, forward, .. } = self;
        [
            swing * sideways.x - back * forward.x,
            swing * sideways.y - back * forward.y,
            swing * sideways.z - back * forward.z,
        ]
    }

    #[inline(always)]
    fn miss_deg<T: Real>(&self, sin_theta: T, beyond: T::Mask) -> T {
        let zero = sin_theta.like(0.0);
        if !beyond.any() {
            return zero;
        }
        let reach_rad = self.sine.min(1.0).asin();
        let by_rad = (sin_theta.atan2(cosine(sin_theta)) - reach_rad) * 2.0;
        T::choose(beyond & zero.like(CLOSING_TOLERANCE_RAD).below(by_rad), by_rad.to_degrees(), zero)
    }
}

/// The cosine, not negative, of an angle with this sine.
#[inline(always)]
fn cosine<T: Real>(sine: T) -> T {
    let one = sine.like(1.0);
    ((one - sine) * (one + sine)).sqrt()
}

use nalgebra::Vector3;

use crate::frames::subproblem::CLOSING_TOLERANCE_RAD;

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
pub(super) struct DetectorPlace {
    /// Angle of the detector axis in radians.
    pub angle_rad: f64,
    /// Unit vector along Q in the lab frame.
    pub q: Vector3<f64>,
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

    /// Both places, the one at a positive angle first, for sin θ above 0.
    ///
    /// With ẑ·D(δ)ẑ = cos 2θ it follows that sin(δ/2) = sin θ / sin(axis, beam).
    ///
    /// # Errors
    /// By how many radians 2θ lies beyond what the arm reaches.
    #[inline]
    pub fn places(&self, sin_theta: f64) -> Result<[DetectorPlace; 2], f64> {
        let mut s = sin_theta / self.sine;
        if s > 1.0 {
            let by_rad = 2.0 * (sin_theta.min(1.0).asin() - self.sine.min(1.0).asin());
            if by_rad > CLOSING_TOLERANCE_RAD {
                return Err(by_rad);
            }
            s = 1.0;
        }
        let c = ((1.0 - s) * (1.0 + s)).sqrt();
        let angle_rad = 2.0 * s.atan2(c);
        let (swing, back) = (self.sideways * c, self.forward * s);
        Ok([DetectorPlace { angle_rad, q: swing - back }, DetectorPlace { angle_rad: -angle_rad, q: -swing - back }])
    }
}

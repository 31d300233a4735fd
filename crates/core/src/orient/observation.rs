use nalgebra::{Matrix3, Rotation3, Vector3};

use super::{OrientError, Peak, ReadingUncertainty};
use crate::frames::{Head, Hkl, Vector};
use crate::instrument::Instrument;

/// Below this 2θ in degrees a reading is that of the direct beam: Q is then shorter than the error of any reading.
pub const SMALLEST_TWO_THETA_DEG: f64 = 0.01;

/// What the readings of a peak say about Q, through the whole stack, zero offsets included.
#[derive(Debug, Clone, PartialEq)]
pub struct Observation {
    /// The indices that were given to the peak.
    pub hkl: Hkl,
    /// Q in the head frame, R⁻¹ Q, in Å⁻¹.
    pub q_in_head: Vector<Head>,
    /// The observed 2θ in degrees.
    pub two_theta_deg: f64,
    /// The observed d = 1/|Q| in Å.
    pub d_angstrom: f64,
    /// Standard uncertainty of d in Å.
    pub d_sigma_angstrom: f64,
    /// The standard uncertainty of the readings.
    pub readings: ReadingUncertainty,
    /// Covariance of Q in the head frame, in Å⁻².
    pub covariance: Matrix3<f64>,
}

impl Observation {
    /// Looks through the stack.
    ///
    /// The uncertainty is that of independent readings of every axis that moves, to first order. Axes set by hand stand
    /// where they stand for all peaks; their error is a turn of the crystal like any other and goes into U.
    ///
    /// # Errors
    /// If the peak has not one reading for each axis, or was read in the direct beam.
    pub fn of(peak: &Peak, instrument: &Instrument, wavelength_angstrom: f64) -> Result<Self, OrientError> {
        let (hkl, setting) = (peak.hkl(), peak.setting());
        let (given, axes) = (setting.readings_deg().len(), instrument.axis_count());
        if given != axes {
            return Err(OrientError::Readings { hkl, given, axes });
        }
        let two_theta_deg = instrument.two_theta_rad(setting).to_degrees();
        if two_theta_deg < SMALLEST_TWO_THETA_DEG {
            return Err(OrientError::DirectBeam { hkl, two_theta_deg, smallest_deg: SMALLEST_TWO_THETA_DEG });
        }
        let head_from_lab = instrument.lab_from_head(setting).inverse();
        let q_in_head = head_from_lab * instrument.q_in_lab(setting, wavelength_angstrom);
        let readings = peak.reading_uncertainty();
        let variance = readings.deg.to_radians().powi(2);
        let covariance = slopes(peak, instrument, wavelength_angstrom)
            .iter()
            .fold(Matrix3::zeros(), |sum, slope| sum + slope * slope.transpose() * variance);
        let d_angstrom = 1.0 / q_in_head.norm();
        let q = q_in_head.raw();
        let d_sigma_angstrom = d_angstrom.powi(3) * q.dot(&(covariance * q)).max(0.0).sqrt();
        Ok(Self { hkl, q_in_head, two_theta_deg, d_angstrom, d_sigma_angstrom, readings, covariance })
    }

    /// Unit vector along Q in the head frame.
    pub fn direction(&self) -> Vector3<f64> {
        self.q_in_head.raw() * self.d_angstrom
    }

    /// Covariance of the unit vector along Q, in rad²: two directions across Q, nothing along it.
    pub fn direction_covariance(&self) -> Matrix3<f64> {
        let along = self.direction();
        let across = (Matrix3::identity() - along * along.transpose()) * self.d_angstrom;
        across * self.covariance * across
    }

    /// Standard uncertainties of the direction in degrees along the two principal directions across Q, larger first.
    pub fn across_sigma_deg(&self) -> [f64; 2] {
        let mut of = self.direction_covariance().symmetric_eigenvalues();
        of.as_mut_slice().sort_by(|a, b| b.total_cmp(a));
        [of[0], of[1]].map(|variance| variance.max(0.0).sqrt().to_degrees())
    }
}

/// How Q in the head frame moves with each reading, in Å⁻¹ per radian: −R⁻¹ (a × Q) for a sample axis that stands at a in
/// the lab, R⁻¹ (a × k_f) for a detector axis.
fn slopes(peak: &Peak, instrument: &Instrument, wavelength_angstrom: f64) -> Vec<Vector3<f64>> {
    let setting = peak.setting();
    let head_from_lab = instrument.lab_from_head(setting).inverse();
    let q = *instrument.q_in_lab(setting, wavelength_angstrom).raw();
    let k_f = instrument.diffracted_direction(setting).raw() / wavelength_angstrom;
    let sample_count = instrument.sample_axes().len();
    let mut slopes = Vec::new();
    let mut outer = Rotation3::identity();
    for (i, (axis, &reading)) in instrument.axes().zip(setting.readings_deg()).enumerate() {
        if i == sample_count {
            outer = Rotation3::identity();
        }
        if !axis.set_by_hand {
            let a = outer * axis.direction.into_inner();
            let in_lab = if i < sample_count { -a.cross(&q) } else { a.cross(&k_f) };
            slopes.push(head_from_lab.matrix() * in_lab);
        }
        outer *= Rotation3::from_axis_angle(&axis.direction, axis.angle_rad(reading));
    }
    slopes
}

/// The angle between two observed directions in radians, and its standard uncertainty.
pub(super) fn angle_between_rad(first: &Observation, second: &Observation) -> (f64, f64) {
    let (u, v) = (first.direction(), second.direction());
    let angle = crate::frames::angle_between(&u, &v);
    let sine = u.cross(&v).norm();
    // The gradient of the angle: unit vectors across each direction, away from the other.
    let (along_u, along_v) = ((u * angle.cos() - v) / sine, (v * angle.cos() - u) / sine);
    let variance = along_u.dot(&(first.direction_covariance() * along_u))
        + along_v.dot(&(second.direction_covariance() * along_v));
    (angle, variance.max(0.0).sqrt())
}

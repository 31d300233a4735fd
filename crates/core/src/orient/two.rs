use nalgebra::{Matrix3, Rotation3, Vector3};

use super::observation::angle_between_rad;
use super::{Observation, OrientError, Orientation, Peak};
use crate::crystal::{CellError, UnitCell};
use crate::frames::{CrystalCartesian, Head, Hkl, Rotation, Vector};
use crate::instrument::Instrument;

/// How far two peaks must be from one line, in degrees. Nearer to it, an error of 0.05° in a reading turns the crystal
/// about them by 3° and more.
pub const SMALLEST_PAIR_ANGLE_DEG: f64 = 1.0;

/// A misfit of more than this many standard uncertainties is worth a warning.
pub const ALLOWED_SIGMAS: f64 = 3.0;

/// An observed value against the calculated one.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Compared {
    /// From the readings.
    pub observed: f64,
    /// Standard uncertainty of the observed value.
    pub sigma: f64,
    /// From cell and indices.
    pub calculated: f64,
}

impl Compared {
    /// Observed minus calculated.
    pub fn misfit(&self) -> f64 {
        self.observed - self.calculated
    }

    /// Whether the misfit is within [`ALLOWED_SIGMAS`] standard uncertainties (and rounding).
    pub fn agrees(&self) -> bool {
        self.misfit().abs() <= ALLOWED_SIGMAS * self.sigma + 1e-9
    }
}

/// An orientation from two peaks, with what tells whether to trust it.
#[derive(Debug, Clone, PartialEq)]
pub struct TwoPeakOrientation {
    /// U and UB; never confirmed by two peaks alone.
    pub orientation: Orientation,
    /// The peak whose direction is met exactly.
    pub first: Observation,
    /// The peak that is met only in its plane with the first.
    pub second: Observation,
    /// The angle between the two in degrees. Its misfit is the residual of the second peak within the plane.
    pub angle_deg: Compared,
    /// By how many degrees U misses the second peak across the plane: nothing but rounding.
    pub second_across_deg: f64,
    /// d of each peak in Å.
    pub d_angstrom: [Compared; 2],
    /// Determinant of U.
    pub det_u: f64,
    /// UB in Å⁻¹, rounded as it is written.
    pub ub_written: Matrix3<f64>,
    /// With how many decimals it is written.
    pub ub_decimals: usize,
    /// The cell that UB *as written* implies. It is the given cell, up to the rounding of the written digits: the two
    /// peaks turn the cell, they do not change it. What they say about its size is in [`Self::scale`].
    pub cell_of_ub: Result<UnitCell, CellError>,
    /// Covariance of the small turn (a vector in the head frame, rad²) by which U may be wrong.
    pub turn_covariance: Matrix3<f64>,
}

impl TwoPeakOrientation {
    /// d observed / d calculated of each peak: the factor by which all cell edges (or 1/λ) would have to grow to explain
    /// the detector angle of that peak, and its standard uncertainty.
    pub fn scale(&self) -> [(f64, f64); 2] {
        self.d_angstrom.map(|d| (d.observed / d.calculated, d.sigma / d.calculated))
    }

    /// The largest standard uncertainty of a turn of the crystal, in degrees: about the axis known worst.
    pub fn turn_sigma_deg(&self) -> f64 {
        self.turn_covariance.symmetric_eigenvalues().max().max(0.0).sqrt().to_degrees()
    }

    /// Covariance in rad² of a predicted direction (a unit vector in the head frame) that comes from U alone.
    pub fn predicted_covariance(&self, direction: &Vector3<f64>) -> Matrix3<f64> {
        let turned = -direction.cross_matrix();
        turned * self.turn_covariance * turned.transpose()
    }

    /// Whether the angle and both d agree with the indices within the uncertainties.
    pub fn agrees(&self) -> bool {
        self.angle_deg.agrees() && self.d_angstrom.iter().all(Compared::agrees)
    }
}

/// U and UB from two peaks (Busing & Levy 1967, Acta Cryst. 22, 457): a triad from B h₁ and B h₂, another from the two
/// observed directions in the head frame, first axis along the first peak, third along the cross product; U takes one
/// into the other. The first peak is met exactly, the second in its plane.
///
/// # Errors
/// If the peaks are parallel, by their indices or their readings, if one cannot diffract at this wavelength, or if
/// readings are missing or of the direct beam.
pub fn orient_by_two(
    cell: &UnitCell,
    wavelength_angstrom: f64,
    instrument: &Instrument,
    first: &Peak,
    second: &Peak,
) -> Result<TwoPeakOrientation, OrientError> {
    for peak in [first, second] {
        check_sphere(cell, wavelength_angstrom, peak.hkl())?;
    }
    let observe = |peak| Observation::of(peak, instrument, wavelength_angstrom);
    let (first, second) = (observe(first)?, observe(second)?);
    let (h, k) = (first.hkl, second.hkl);
    let limit_deg = SMALLEST_PAIR_ANGLE_DEG;
    let on_a_line = |angle_deg: f64| angle_deg < limit_deg || angle_deg > 180.0 - limit_deg;
    let calculated = cell.angle_between(h, k).to_degrees();
    if on_a_line(calculated) {
        return Err(OrientError::ParallelIndices { first: h, second: k, angle_deg: calculated, limit_deg });
    }
    let (angle_rad, sigma_rad) = angle_between_rad(&first, &second);
    if on_a_line(angle_rad.to_degrees()) {
        return Err(OrientError::ParallelReadings {
            first: h,
            second: k,
            angle_deg: angle_rad.to_degrees(),
            limit_deg,
        });
    }
    let head_triad = triad(&first.direction(), &second.direction());
    let head_from_crystal = turn_between(cell, (h, k), &head_triad);
    let orientation = Orientation::new(head_from_crystal, cell, false);
    let (ub_written, ub_decimals) = as_written(&orientation.ub);
    let predicted = orientation.q_in_head(k);
    let across = predicted.raw().dot(&head_triad.column(2)) / predicted.norm();
    let compare = |observed: &Observation| Compared {
        observed: observed.d_angstrom,
        sigma: observed.d_sigma_angstrom,
        calculated: cell.d_spacing(observed.hkl),
    };
    Ok(TwoPeakOrientation {
        angle_deg: Compared { observed: angle_rad.to_degrees(), sigma: sigma_rad.to_degrees(), calculated },
        second_across_deg: across.clamp(-1.0, 1.0).asin().to_degrees(),
        d_angstrom: [compare(&first), compare(&second)],
        det_u: head_from_crystal.matrix().determinant(),
        cell_of_ub: UnitCell::from_ub(&ub_written),
        ub_written,
        ub_decimals,
        turn_covariance: turn_covariance(&first, &second, &head_triad),
        orientation,
        first,
        second,
    })
}

/// A node beyond the sphere of radius 2/λ cannot have been seen.
pub(super) fn check_sphere(cell: &UnitCell, wavelength_angstrom: f64, hkl: Hkl) -> Result<(), OrientError> {
    let d_angstrom = cell.d_spacing(hkl);
    let longest_wavelength_angstrom = 2.0 * d_angstrom;
    if wavelength_angstrom > longest_wavelength_angstrom * (1.0 + 1e-12) {
        return Err(OrientError::CannotDiffract { hkl, d_angstrom, wavelength_angstrom, longest_wavelength_angstrom });
    }
    Ok(())
}

/// Right-handed unit vectors as columns: along `a`, across it towards `b`, along a × b.
pub(super) fn triad(a: &Vector3<f64>, b: &Vector3<f64>) -> Matrix3<f64> {
    let along = a.normalize();
    let normal = a.cross(b).normalize();
    Matrix3::from_columns(&[along, normal.cross(&along), normal])
}

/// U for two indices that belong to an observed triad.
pub(super) fn turn_between(
    cell: &UnitCell,
    (first, second): (Hkl, Hkl),
    head_triad: &Matrix3<f64>,
) -> Rotation<Head, CrystalCartesian> {
    let [a, b]: [Vector<CrystalCartesian>; 2] = [first, second].map(|hkl| cell.node(hkl));
    let crystal_triad = triad(a.raw(), b.raw());
    Rotation::from_rotation(Rotation3::from_matrix_unchecked(head_triad * crystal_triad.transpose()))
}

/// Rounds UB so that its largest element keeps eight significant digits, and says with how many decimals.
fn as_written(ub: &Matrix3<f64>) -> (Matrix3<f64>, usize) {
    let leading = ub.abs().max().log10().floor();
    let decimals = (7.0 - leading).clamp(0.0, 15.0);
    let factor = 10f64.powf(decimals);
    (ub.map(|x| (x * factor).round() / factor + 0.0), decimals as usize)
}

/// How the errors of two directions turn the triad: along the first across both its directions, about it by what the
/// second is off across the plane.
fn turn_covariance(first: &Observation, second: &Observation, triad: &Matrix3<f64>) -> Matrix3<f64> {
    let (t1, t2, t3) = (triad.column(0), triad.column(1), triad.column(2));
    let v = second.direction();
    let (cosine, sine) = (v.dot(&t1), v.dot(&t2));
    // The turn w has t1·w = (δv·t3 − cos·δu·t3) / sin, t2·w = −δu·t3 and t3·w = δu·t2.
    let from_first = t1 * t3.transpose() * (-cosine / sine) - t2 * t3.transpose() + t3 * t2.transpose();
    let from_second = t1 * t3.transpose() / sine;
    from_first * first.direction_covariance() * from_first.transpose()
        + from_second * second.direction_covariance() * from_second.transpose()
}

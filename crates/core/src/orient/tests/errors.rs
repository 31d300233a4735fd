use super::simulation::*;
use crate::crystal::{SymmetryQuery, UnitCell};
use crate::frames::Hkl;
use crate::instrument::{Setting, built_in_machine};
use crate::orient::{OrientError, OrientationReport, Peak, orient_by_two};

fn try_pair(first: Peak, second: Peak) -> OrientError {
    let cell = UnitCell::new(5.0, 5.0, 5.0, 90.0, 90.0, 90.0).unwrap();
    let instrument = built_in_machine("eulerian-four-circle").unwrap();
    orient_by_two(&cell, WAVELENGTH, &instrument, &first, &second).unwrap_err()
}

fn at(hkl: [i32; 3], readings: &[f64]) -> Peak {
    peak(Hkl::from(hkl), Setting::new(readings), None)
}

#[test]
fn parallel_and_antiparallel_peaks_are_refused_with_their_angle() {
    let away = at([1, 1, 0], &[10.0, 0.0, 0.0, 20.0]);
    for (h, k, angle) in [([1, 0, 0], [2, 0, 0], 0.0), ([1, 0, 0], [-3, 0, 0], 180.0)] {
        let refused = try_pair(at(h, &[10.0, 0.0, 0.0, 20.0]), at(k, &[10.0, 0.0, 70.0, 20.0]));
        let OrientError::ParallelIndices { angle_deg, limit_deg, .. } = refused else { panic!("{refused}") };
        assert!((angle_deg - angle).abs() < 1e-6 && limit_deg == 1.0);
    }
    let refused = try_pair(away, at([1, 0, 0], &[10.0, 0.0, 0.5, 20.0]));
    let OrientError::ParallelReadings { angle_deg, .. } = &refused else { panic!("{refused}") };
    assert!((angle_deg - 0.5).abs() < 1e-9);
    assert!(refused.to_string().contains("0.500°") && refused.to_string().contains("1° to 179°"), "{refused}");
    let refused = try_pair(away, at([1, 0, 0], &[10.0, 0.0, 180.3, 20.0]));
    assert!(refused.to_string().contains("antiparallel"), "{refused}");
}

#[test]
fn a_peak_beyond_the_sphere_is_refused_with_the_wavelength_that_would_do() {
    let refused = try_pair(at([15, 0, 0], &[10.0, 0.0, 0.0, 20.0]), at([0, 1, 0], &[10.0, 0.0, 80.0, 20.0]));
    let OrientError::CannotDiffract { longest_wavelength_angstrom, .. } = refused else { panic!("{refused}") };
    // d = 5/15 Å.
    assert!((longest_wavelength_angstrom - 2.0 / 3.0).abs() < 1e-12);
}

#[test]
fn the_direct_beam_and_another_machine_s_readings_are_refused() {
    let good = at([0, 1, 0], &[10.0, 0.0, 80.0, 20.0]);
    assert!(matches!(try_pair(at([1, 0, 0], &[0.0; 4]), good), OrientError::DirectBeam { .. }));
    assert!(matches!(try_pair(at([1, 0, 0], &[0.0, 20.0]), good), OrientError::Readings { given: 2, axes: 4, .. }));
}

#[test]
fn one_peak_is_too_few() {
    let night = Night::new([5.0, 6.0, 7.0, 90.0, 90.0, 90.0], SymmetryQuery::Number(16));
    let peaks = [night.found([1, 0, 0], [1, 0, 0], 0.02)];
    for n in 0..2 {
        let refused = OrientationReport::new(&night.setup(), &peaks[..n], &|_| true).unwrap_err();
        assert_eq!(refused, OrientError::TooFewPeaks { given: n });
    }
}

//! What else fits two peaks, and whether positions can tell.

use super::simulation::*;
use crate::crystal::SymmetryQuery;
use crate::frames::Hkl;
use crate::orient::{OrientationReport, OtherAssignment, Search};

fn report(cell: [f64; 6], number: u16, h: [i32; 3], k: [i32; 3]) -> OrientationReport {
    let night = Night::new(cell, SymmetryQuery::Number(number));
    night.report(&[night.found(h, h, 0.01), night.found(k, k, 0.01)])
}

fn has(list: &[OtherAssignment], pair: [[i32; 3]; 2]) -> bool {
    list.iter().any(|other| other.hkl == pair.map(Hkl::from))
}

#[test]
fn both_reversed_is_left_to_a_third_reflection_in_a_triclinic_crystal() {
    let report = report([5.1, 6.3, 7.8, 83.0, 98.0, 105.0], 2, [1, 2, 0], [0, 1, 3]);
    assert_eq!(report.others.laue_rotations, 1);
    assert_eq!(report.others.only_intensities, []);
    assert!(has(&report.others.by_position, [[-1, -2, 0], [0, -1, -3]]));
    assert_eq!(report.others.search, Search::Complete);
}

/// The plane of h0l and h'0l' has the twofold axis for its normal: both reversed is the same crystal turned by it.
#[test]
fn both_reversed_across_a_twofold_axis_of_the_crystal_is_the_same_thing() {
    let report = report([5.1, 6.3, 7.8, 90.0, 98.0, 90.0], 3, [1, 0, 0], [1, 0, 3]);
    assert_eq!(report.others.laue_rotations, 2);
    assert_eq!((report.others.only_intensities.len(), report.others.by_position.len()), (0, 0));
}

/// β = 90°: the lattice is orthorhombic, the crystal is not. Rotations about a and c lie in one coset of 2/m.
#[test]
fn a_monoclinic_crystal_with_a_right_angle_hides_a_lattice_rotation() {
    let cell = [5.1, 6.3, 7.8, 90.0, 90.0, 90.0];
    let out_of_axes = report(cell, 3, [1, 2, 0], [0, 1, 3]);
    assert_eq!(out_of_axes.others.laue_rotations, 2);
    assert_eq!(out_of_axes.others.only_intensities.len(), 1);
    assert!(has(&out_of_axes.others.by_position, [[-1, -2, 0], [0, -1, -3]]));
    // Both in the plane across c: reversing both is the rotation about c, which the crystal lacks.
    let across_c = report(cell, 3, [1, 2, 0], [2, -1, 0]);
    assert!(has(&across_c.others.only_intensities, [[-1, -2, 0], [-2, 1, 0]]));
    assert!(!has(&across_c.others.by_position, [[-1, -2, 0], [-2, 1, 0]]));
    // In an orthorhombic crystal the same is no question at all.
    assert_eq!(report(cell, 16, [1, 2, 0], [0, 1, 3]).others.only_intensities, []);
}

/// The fourfold axis is a rotation of every cubic lattice; m-3 lacks it, m-3m has it (International Tables A, table 3.2.1.2).
#[test]
fn a_cubic_crystal_without_fourfold_axis_is_told_so() {
    let cell = [6.2, 6.2, 6.2, 90.0, 90.0, 90.0];
    let m3 = report(cell, 200, [1, 2, 0], [0, 1, 3]);
    assert_eq!((m3.others.laue_rotations, m3.others.only_intensities.len()), (12, 1));
    let m3m = report(cell, 221, [1, 2, 0], [0, 1, 3]);
    assert_eq!((m3m.others.laue_rotations, m3m.others.only_intensities.len()), (24, 0));
}

/// P 2₁ 3-like absences: Pa-3 forbids 0kl with odd k, so turning 0 2 1 by the fourfold axis asks for a peak that cannot be.
#[test]
fn indices_that_symmetry_forbids_are_no_alternative() {
    let report = report([6.2, 6.2, 6.2, 90.0, 90.0, 90.0], 205, [0, 2, 1], [2, 1, 1]);
    assert_eq!(report.others.only_intensities, []);
}

/// Turned by a rotation of the lattice, every node falls on a node: the matrix between the indices has whole elements.
#[test]
fn no_position_decides_between_lattice_rotations() {
    let report = report([5.1, 6.3, 7.8, 90.0, 90.0, 90.0], 3, [1, 2, 0], [0, 1, 3]);
    let ub = &report.pair.orientation.ub;
    for other in &report.others.only_intensities {
        let indices = ub.try_inverse().unwrap() * other.orientation.ub;
        assert!((indices - indices.map(f64::round)).abs().max() < 1e-9, "{indices}");
    }
    for other in &report.others.by_position {
        let indices = ub.try_inverse().unwrap() * other.orientation.ub;
        assert!((indices - indices.map(f64::round)).abs().max() > 1e-3, "{indices}");
    }
}

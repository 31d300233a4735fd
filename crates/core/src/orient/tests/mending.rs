use proptest::prelude::*;

use super::simulation::*;
use crate::crystal::SymmetryQuery;
use crate::frames::Hkl;
use crate::orient::{ChangeKind, Mend, OrientationReport, Warning};
use crate::testing::cases;

fn changes(report: &OrientationReport) -> &[crate::orient::IndexChange] {
    match &report.mend {
        Mend::Changes { listed, .. } => listed,
        other => panic!("{other:?}"),
    }
}

fn integers(hkl: Hkl) -> [i32; 3] {
    hkl.as_integers().unwrap()
}

#[test]
fn right_indices_need_no_mending() {
    let night = Night::new([5.1, 7.3, 9.8, 90.0, 90.0, 90.0], SymmetryQuery::Number(16));
    let report = night.report(&[night.found([2, 0, 1], [2, 0, 1], 0.02), night.found([1, 2, 0], [1, 2, 0], 0.02)]);
    assert_eq!(report.mend, Mend::NotNeeded);
    assert_eq!(report.warnings, []);
}

#[test]
fn exchanged_indices_are_found() {
    let night = Night::new([5.1, 7.3, 9.8, 90.0, 90.0, 90.0], SymmetryQuery::Number(16));
    let report = night.report(&[night.found([2, 0, 1], [2, 0, 1], 0.02), night.found([2, 1, 0], [1, 2, 0], 0.02)]);
    assert!(report.warnings.iter().any(|w| matches!(w, Warning::Angle { .. })));
    assert!(report.warnings.iter().any(|w| matches!(w, Warning::Spacing { hkl, .. } if integers(*hkl) == [1, 2, 0])));
    let best = changes(&report)[0];
    assert_eq!(best.to.map(integers), [[2, 0, 1], [2, 1, 0]]);
    assert_eq!(best.kind, [ChangeKind::Kept, ChangeKind::Order]);
    assert!(best.fit.angle_deg.abs() < 1e-6 && best.fit.d_angstrom[1].abs() < 1e-8);
}

#[test]
fn a_wrong_sign_is_the_simplest_change() {
    let night = Night::new([5.1, 7.3, 9.8, 90.0, 104.0, 90.0], SymmetryQuery::Number(3));
    let report = night.report(&[night.found([1, 2, -2], [1, 2, 2], 0.02), night.found([2, 0, 1], [2, 0, 1], 0.02)]);
    let best = changes(&report)[0];
    assert_eq!(best.kind.iter().max(), Some(&ChangeKind::OneSign));
    assert_eq!(best.to.map(integers), [[1, 2, -2], [2, 0, 1]]);
}

#[test]
fn two_wrong_peaks_are_found_together() {
    let night = Night::new([5.1, 7.3, 9.8, 90.0, 90.0, 90.0], SymmetryQuery::Number(16));
    let report = night.report(&[night.found([1, 0, 2], [2, 0, 1], 0.02), night.found([2, 1, 0], [1, 2, 0], 0.02)]);
    let best = changes(&report)[0];
    assert_eq!(best.to.map(integers), [[1, 0, 2], [2, 1, 0]]);
}

#[test]
fn a_wrong_cell_is_no_wrong_index() {
    let night = Night::new([5.1, 7.3, 9.8, 90.0, 90.0, 90.0], SymmetryQuery::Number(16));
    let peaks = [night.found([2, 0, 1], [2, 0, 1], 0.02), night.found([1, 2, 0], [1, 2, 0], 0.02)];
    let larger = Night::new([5.1 * 1.02, 7.3 * 1.02, 9.8 * 1.02, 90.0, 90.0, 90.0], SymmetryQuery::Number(16));
    let report = larger.report(&peaks);
    assert_eq!(report.mend, Mend::NoIndexChange);
    let scales: Vec<f64> = report
        .warnings
        .iter()
        .filter_map(|w| if let Warning::SameScale { scale, .. } = w { Some(*scale) } else { None })
        .collect();
    assert_eq!(scales.len(), 1);
    assert!((scales[0] - 1.0 / 1.02).abs() < 1e-6);
}

proptest! {
    #![proptest_config(cases())]

    /// Whatever single index was exchanged or reversed in a triclinic crystal: if the misfit shows, the truth is among the
    /// changes.
    #[test]
    fn a_deliberate_mistake_is_found(
        lengths in prop::array::uniform3(4.0..9.0f64),
        angles in prop::array::uniform3(75.0..88.0f64),
        u in any_u(),
        h in prop::array::uniform3(-3..=3i32),
        k in prop::array::uniform3(-3..=3i32),
        mistake in 0..4usize,
    ) {
        let wrong = match mistake {
            0 => [-k[0], k[1], k[2]],
            1 => [k[0], k[1], -k[2]],
            2 => [k[1], k[0], k[2]],
            _ => [k[2], k[0], k[1]],
        };
        prop_assume!(wrong != k && h != [0; 3]);
        let [a, b, c] = lengths;
        let [al, be, ga] = angles;
        let night = Night::with([a, b, c, al, be, ga], SymmetryQuery::Number(1), "eulerian-four-circle", u);
        let apart = |x: [i32; 3]| (night.cell.angle_between(h.into(), x.into()).to_degrees() - 90.0).abs() < 70.0;
        prop_assume!(apart(k) && apart(wrong));
        let report = night.report(&[night.found(h, h, 0.005), night.found(k, wrong, 0.005)]);
        if !report.pair.agrees() {
            let found = changes(&report).iter().any(|change| change.to.map(integers) == [h, k]);
            prop_assert!(found, "{:?} was {:?}: {:?}", wrong, k, report.mend);
        }
    }
}

//! The reflection that decides really decides.

use proptest::prelude::*;

use super::simulation::*;
use crate::crystal::SymmetryQuery;
use crate::frames::{Hkl, Vector};
use crate::orient::{
    ALLOWED_SIGMAS, Confirmation, DecidingReflection, Doubt, LEAST_MISS_DEG, LEAST_OUT_OF_PLANE_DEG, MISS_MARGIN,
    OrientationReport, Third, Warning,
};
use crate::testing::cases;

const TRICLINIC: [f64; 6] = [5.1, 6.3, 7.8, 83.0, 98.0, 105.0];

fn third(report: &OrientationReport) -> &DecidingReflection {
    match &report.confirmation {
        Confirmation::Unconfirmed { next: Third::Measure(third), .. } => third,
        other => panic!("{other:?}"),
    }
}

fn indices(hkl: Hkl) -> [i32; 3] {
    hkl.as_integers().unwrap()
}

/// Degrees by which the nearest node of another orientation misses a place, by looking at all of them.
fn nearest_by_looking(night: &Night, ub: &nalgebra::Matrix3<f64>, place: &nalgebra::Vector3<f64>) -> f64 {
    let two_theta = |q: f64| 2.0 * (0.5 * WAVELENGTH * q).min(1.0).asin();
    let mut least = f64::INFINITY;
    for h in -14..=14 {
        for k in -14..=14 {
            for l in -14..=14 {
                let hkl = Hkl::from([h, k, l]);
                let q = ub * hkl.to_vector();
                if [h, k, l] != [0; 3] && q.norm() < 2.0 / WAVELENGTH && !night.group.absence(hkl).is_absent() {
                    let turn = crate::frames::angle_between(&q, place);
                    least = least.min(turn.max((two_theta(q.norm()) - two_theta(place.norm())).abs()).to_degrees());
                }
            }
        }
    }
    least
}

proptest! {
    #![proptest_config(cases())]

    #[test]
    fn no_other_assignment_has_a_node_there(
        lengths in prop::array::uniform3(4.0..8.0f64),
        angles in prop::array::uniform3(78.0..102.0f64),
        u in any_u(),
    ) {
        let [a, b, c] = lengths;
        let [al, be, ga] = angles;
        let night = Night::with([a, b, c, al, be, ga], SymmetryQuery::Number(2), "eulerian-four-circle", u);
        let peaks = [night.found([1, 2, 0], [1, 2, 0], 0.02), night.found([0, -1, 2], [0, -1, 2], 0.02)];
        let report = night.report(&peaks);
        let third = third(&report);
        prop_assert!(third.out_of_plane_deg >= LEAST_OUT_OF_PLANE_DEG);
        let sigma = third.predicted_sigma_deg.hypot(0.02);
        let needed = LEAST_MISS_DEG.max(MISS_MARGIN * ALLOWED_SIGMAS * sigma);
        let place = *report.orientation().q_in_head(third.hkl).raw();
        let misses = report.others.by_position.iter().map(|o| nearest_by_looking(&night, &o.orientation.ub, &place));
        let ruled_out: Vec<f64> = misses.filter(|miss| *miss > needed).collect();
        prop_assert_eq!((third.decides, third.of), (ruled_out.len(), report.others.by_position.len()));
        let closest = ruled_out.into_iter().fold(f64::INFINITY, f64::min);
        let (_, stated) = third.closest.unwrap();
        prop_assert!((stated.at_least_deg() - closest).abs() < 1e-6 || closest > stated.at_least_deg());
        // Angles within some hundredths of a degree of 90° make a false twofold axis that no reflection reveals.
        if third.decides < third.of {
            return Ok(());
        }
        // Measured where it is predicted, it confirms.
        let hkl = indices(third.hkl);
        let confirmed = night.report(&[peaks[0], peaks[1], night.found(hkl, hkl, 0.02)]);
        let is_so = matches!(&confirmed.confirmation, Confirmation::Confirmed { by, too_alike: 0 } if by == &[2]);
        prop_assert!(is_so, "{:?}", confirmed.confirmation);
        prop_assert!(confirmed.orientation().confirmed);
    }
}

/// The crystal really sits the other way round. Its own peak with the deciding indices is then found elsewhere, and says so.
#[test]
fn if_the_truth_is_reversed_the_third_peak_objects() {
    let night = Night::new(TRICLINIC, SymmetryQuery::Number(2));
    let peaks = [night.found([1, 2, 0], [1, 2, 0], 0.02), night.found([0, 1, 3], [0, 1, 3], 0.02)];
    let report = night.report(&peaks);
    let hkl = indices(third(&report).hkl);
    let reversed = report.others.by_position.iter().find(|o| o.hkl[0] == Hkl::new(-1.0, -2.0, 0.0)).unwrap();
    let truth = Night::new(TRICLINIC, SymmetryQuery::Number(2)).turned_to(&reversed.orientation);
    let weighed = truth.report(&[peaks[0], peaks[1], truth.found(hkl, hkl, 0.02)]);
    let Confirmation::Unconfirmed { because: Doubt::Contradicted(who), .. } = &weighed.confirmation else {
        panic!("{:?}", weighed.confirmation)
    };
    assert_eq!(who, &[2]);
    assert!(!weighed.orientation().confirmed);
    let Some(Warning::LaterPeak { direction_deg, .. }) = weighed.warnings.first() else { panic!("a warning") };
    assert!(direction_deg.misfit() > LEAST_MISS_DEG);
}

#[test]
fn a_third_peak_in_the_plane_proves_nothing() {
    let night = Night::new(TRICLINIC, SymmetryQuery::Number(2));
    let found = |hkl| night.found(hkl, hkl, 0.02);
    let report = night.report(&[found([1, 2, 0]), found([0, 1, 3]), found([1, 3, 3])]);
    assert!(matches!(report.confirmation, Confirmation::Unconfirmed { because: Doubt::AllInPlane, .. }));
}

#[test]
fn only_reachable_reflections_are_proposed_and_none_is_said_so() {
    let night = Night::new(TRICLINIC, SymmetryQuery::Number(2));
    let peaks = [night.found([1, 2, 0], [1, 2, 0], 0.02), night.found([0, 1, 3], [0, 1, 3], 0.02)];
    let half = |q: Vector<crate::frames::Head>| q.raw().y > 0.3;
    let report = OrientationReport::new(&night.setup(), &peaks, &half).unwrap();
    assert!(report.orientation().q_in_head(third(&report).hkl).raw().y > 0.3);
    let report = OrientationReport::new(&night.setup(), &peaks, &|_| false).unwrap();
    let Confirmation::Unconfirmed { next: Third::NoneFound { tried, .. }, .. } = report.confirmation else { panic!() };
    assert_eq!(tried, 0);
}

/// β = 90.02° is neither a lattice rotation by its tolerance nor decidable with readings of 0.05°: it must not stand in the
/// way for ever.
#[test]
fn what_no_reflection_can_tell_apart_does_not_block_confirmation() {
    let night = Night::new([5.1, 6.3, 7.8, 90.0, 90.03, 90.0], SymmetryQuery::Number(3));
    let found = |hkl| night.found(hkl, hkl, 0.05);
    let peaks = [found([1, 2, 0]), found([0, 1, 3])];
    let report = night.report(&peaks);
    let third = third(&report);
    assert!(third.decides < third.of, "the false twofold axes stay");
    let hkl = indices(third.hkl);
    let report = night.report(&[peaks[0], peaks[1], found(hkl)]);
    assert!(matches!(report.confirmation, Confirmation::Confirmed { too_alike: 1.., .. }), "{:?}", report.confirmation);
}

#[test]
fn the_page_begins_with_the_verdict_and_the_next_step() {
    let night = Night::new(TRICLINIC, SymmetryQuery::Number(2));
    let peaks = [night.found([1, 2, 0], [1, 2, 0], 0.02), night.found([0, 1, 3], [0, 1, 3], 0.02)];
    let report = night.report(&peaks);
    let page = report.render();
    let lines: Vec<&str> = page.lines().collect();
    assert!(lines[0].starts_with("UNCONFIRMED"), "{page}");
    assert!(lines[1].starts_with(&format!("Measure {} next", third(&report).hkl)), "{page}");
    for needed in [
        "wavelength 0.7100000 Å",
        "± 0.02°",
        "det U = 1.0000000",
        "5.1000 6.3000 7.8000 Å, 83.000 98.000 105.000°",
        "-1 -2 0",
    ] {
        assert!(page.contains(needed), "{needed} is missing:\n{page}");
    }
    let hkl = indices(third(&report).hkl);
    let page = night.report(&[peaks[0], peaks[1], night.found(hkl, hkl, 0.02)]).render();
    assert!(page.starts_with("CONFIRMED"), "{page}");
}

/// A large cell read coarsely: hundreds of pairs of nodes fit, not all can be followed, and a third peak proves too little.
#[test]
fn a_search_that_was_cut_confirms_nothing() {
    let night = Night::new([30.1, 33.3, 37.8, 91.0, 93.0, 105.0], SymmetryQuery::Number(1));
    let found = |hkl| night.found(hkl, hkl, 0.1);
    let report = night.report(&[found([14, 16, 20]), found([-10, 14, 26]), found([4, -5, 3])]);
    assert_eq!(report.others.search, crate::orient::Search::Cut);
    assert!(matches!(report.confirmation, Confirmation::Unconfirmed { because: Doubt::NotAllCompared, .. }));
}

#[test]
fn a_page_about_wrong_indices_says_what_to_change_before_what_to_measure() {
    let night = Night::new([5.1, 7.3, 9.8, 90.0, 90.0, 90.0], SymmetryQuery::Number(16));
    let page =
        night.report(&[night.found([2, 0, 1], [2, 0, 1], 0.02), night.found([2, 1, 0], [1, 2, 0], 0.02)]).render();
    assert!(page.contains("second peak 1 2 0 → 2 1 0: angle then 0.000° off"), "{page}");
    assert!(!page.contains("Measure"), "{page}");
    assert!(page.lines().all(|line| line.trim_end() == line), "no line ends in blanks:\n{page}");
}

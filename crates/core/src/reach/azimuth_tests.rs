//! Windows and *freest* against plain looking.

use nalgebra::Matrix3;
use proptest::prelude::*;

use super::*;
use crate::aim::Preference;
use crate::instrument::{built_in_machine, wrap_deg};
use crate::testing::{cases, unit_vector};

const WAVELENGTH: f64 = 0.7;

/// Machines and rules with the azimuth open.
const CASES: [(&str, &[&str]); 5] = [
    ("eulerian-four-circle", &["Freest(reference: Direct(u: 0, v: 0, w: 1))"]),
    ("kappa-four-circle", &["Freest(reference: Direct(u: 0, v: 0, w: 1))"]),
    (
        "six-circle",
        &[
            "Hold(axis: \"mu\", at_deg: 0)",
            "Freest(reference: Direct(u: 0, v: 0, w: 1))",
            "Hold(axis: \"nu\", at_deg: 0)",
        ],
    ),
    (
        "six-circle",
        &[
            "Hold(axis: \"mu\", at_deg: 5)",
            "Hold(axis: \"chi\", at_deg: 40)",
            "Freest(reference: Direct(u: 0, v: 0, w: 1))",
        ],
    ),
    ("six-circle", &["Bisecting", "DiffractionPlane(turned_deg: 90)", "Freest(reference: Direct(u: 0, v: 0, w: 1))"]),
];

struct Bench {
    family: AzimuthFamily,
    judge: Judge,
}

fn bench((machine, rules): (&str, &[&str]), surface: bool) -> Bench {
    let instrument = built_in_machine(machine).unwrap();
    let rules: Vec<Rule> = rules.iter().map(|rule| ron::from_str(rule).unwrap()).collect();
    let surface = surface.then(|| ron::from_str("Reciprocal(h: 1, k: 1, l: 1)").unwrap());
    let crystal = CrystalOnHead { ub: Matrix3::identity() * 0.1, surface };
    let reference = ron::from_str("Direct(u: 0, v: 0, w: 1)").unwrap();
    let family = AzimuthFamily::new(&instrument, &rules, &crystal, &reference).unwrap();
    let judge = Judge::for_crystal(&instrument, &rules, &Preference::default(), &crystal).unwrap();
    Bench { family, judge }
}

fn within(windows: &[(f64, f64)], psi_deg: f64, margin: f64) -> Option<bool> {
    let mut inside = false;
    for &(from, to) in windows {
        let at_end = [from, to].iter().any(|end| wrap_deg(psi_deg - end).abs() < margin);
        if at_end {
            return None;
        }
        inside |= from < psi_deg && psi_deg < to;
    }
    Some(inside)
}

proptest! {
    #![proptest_config(ProptestConfig { cases: cases().cases.div_ceil(8), max_shrink_iters: 0, ..cases() })]

    /// What sampling at 0.01° sees is what the windows say, but within 0.001° of their ends.
    #[test]
    fn windows_agree_with_sampling(direction in unit_vector(), length in 0.1..2.0f64, case in 0..CASES.len(), surface: bool) {
        let bench = bench(CASES[case], surface);
        let q = Vector::from_raw(direction * length);
        let windows = bench.family.windows(&bench.judge, q, WAVELENGTH).unwrap();
        for i in 0..36_000 {
            let psi_deg = -180.0 + 0.01 * (f64::from(i) + 0.5);
            let best = bench.family.verdict_at(&bench.judge, q, WAVELENGTH, psi_deg.to_radians()).unwrap();
            let allowed = best.is_some_and(|judged| judged.verdict.is_reachable());
            if let Some(inside) = within(&windows.any_deg, psi_deg, 0.001) {
                prop_assert_eq!(inside, allowed, "{:?} at {}: {:?}", CASES[case], psi_deg, windows);
            }
        }
        for window in &windows.windows {
            prop_assert!(window.from_deg < window.to_deg && window.from_deg >= -180.0 - 1e-9);
            prop_assert_eq!(window.before.is_none(), window.to_deg - window.from_deg >= 360.0);
            prop_assert!(window.before.is_none_or(|reason| !reason.is_reachable()));
            prop_assert!(window.after.is_none_or(|reason| !reason.is_reachable()));
        }
    }

    /// *Freest* is at least as good as the best of a plain search, and unreachable only where no window is.
    #[test]
    fn freest_beats_a_plain_search(direction in unit_vector(), length in 0.1..2.0f64, case in 0..CASES.len()) {
        let bench = bench(CASES[case], false);
        let q = Vector::from_raw(direction * length);
        let chosen = bench.judge.verdict(q, WAVELENGTH);
        let mut best = f64::NEG_INFINITY;
        for i in 0..7200 {
            let psi = (0.05 * f64::from(i)).to_radians();
            if let Some(judged) = bench.family.verdict_at(&bench.judge, q, WAVELENGTH, psi).unwrap()
                && judged.verdict.is_reachable()
            {
                best = best.max(judged.clearance_deg);
            }
        }
        let windows = bench.family.windows(&bench.judge, q, WAVELENGTH).unwrap();
        prop_assert_eq!(chosen.verdict.is_reachable(), !windows.windows.is_empty());
        if best.is_finite() && best > 0.0 {
            let clearance = chosen.setting.unwrap().clearance_deg;
            prop_assert!(clearance > best - 1e-6, "{:?}: {} against {}", CASES[case], clearance, best);
        }
    }
}

#[test]
fn a_machine_with_no_spare_angle_has_no_family() {
    let instrument = built_in_machine("fixed-chi-three-circle").unwrap();
    let crystal = CrystalOnHead { ub: Matrix3::identity(), surface: None };
    let reference = ron::from_str("Direct(u: 0, v: 0, w: 1)").unwrap();
    assert!(matches!(AzimuthFamily::new(&instrument, &[], &crystal, &reference), Err(RuleError::NotCovered(_))));
}

/// The cone about the direct beam refuses whatever the azimuth, one setting as the ribbon.
#[test]
fn in_the_direct_beam_no_azimuth_is_allowed() {
    let mut bench = bench(CASES[0], false);
    let instrument = built_in_machine("eulerian-four-circle").unwrap();
    let mut described = instrument.description().clone();
    described.direct_beam_half_angle_deg = ron::from_str("20.0").unwrap();
    let instrument = Instrument::new(described).unwrap();
    let crystal = CrystalOnHead { ub: Matrix3::identity() * 0.1, surface: None };
    bench.judge = Judge::for_crystal(&instrument, bench.family.rules(), &Preference::default(), &crystal).unwrap();
    let q = Vector::from_raw(nalgebra::Vector3::new(0.2, 0.1, 0.1));
    let mut count = 0;
    bench
        .family
        .at(&bench.judge, q, WAVELENGTH, 0.3, &mut |judged| {
            assert!(matches!(judged.verdict, Verdict::InDirectBeam { .. }), "{:?}", judged.verdict);
            count += 1;
        })
        .unwrap();
    assert!(count > 1);
    assert!(bench.family.windows(&bench.judge, q, WAVELENGTH).unwrap().any_deg.is_empty());
}

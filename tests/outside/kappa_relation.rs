//! The kappa geometry against the Eulerian cradle that it stands for.
//!
//! Source: the published relation χ = 2 asin(sin α sin(κ/2)), ω_E = ω_κ + δ, φ_E = φ_κ + δ, tan δ = cos α tan(κ/2)
//! (common practice; International Tables Vol. C, section 2.2.6, *from memory*); `reference/s4_kappa_euler.csv`, *computed*
//! with it by an independent script in the senses of Busing & Levy.
//!
//! Signs. For axes ω = φ = +e, χ along n and κ along cos α e + sin α n, all right-handed, every sign of the relation is
//! plus: a small κ turns by κ cos α about e and κ sin α about n. So it is for the built-in kappa machine, e = (0, 1, 0),
//! n = (0, 0, 1). In the senses of Busing & Levy e = (0, −1, 0), n = (0, 0, 1), and the kappa axis is (0, −cos α, sin α).

use nalgebra::Vector3;
use proptest::prelude::*;
use ringwright_acceptance::{
    all_settings, bisecting, four_circle, hold, random_cases, reference_rows, settings_contain, turn_between_deg,
};
use ringwright_core::aim::Attempt;
use ringwright_core::frames::Vector;
use ringwright_core::instrument::{Instrument, Setting, built_in_machine};

/// A kappa machine and the Eulerian cradle that it stands for, for a common axis e.
fn pair(common: Vector3<f64>, alpha_deg: f64) -> (Instrument, Instrument) {
    let chi = Vector3::z();
    let (sin, cos) = alpha_deg.to_radians().sin_cos();
    let kappa = common * cos + chi * sin;
    (four_circle(&common, ("kappa", kappa)), four_circle(&common, ("chi", chi)))
}

fn kappa_built_in() -> (Instrument, Instrument) {
    let kappa = built_in_machine("kappa-four-circle").unwrap();
    let (ours, eulerian) = pair(Vector3::y(), 50.0);
    for (built_in, written) in kappa.sample_axes().iter().zip(ours.sample_axes()) {
        assert!((built_in.direction.into_inner() - written.direction.into_inner()).norm() < 1e-12);
    }
    (kappa, eulerian)
}

/// The published relation: readings of the kappa machine into those of the Eulerian cradle.
fn eulerian_from_kappa(readings: &[f64], alpha_deg: f64) -> [f64; 4] {
    let (half, alpha) = (0.5 * readings[1].to_radians(), alpha_deg.to_radians());
    let chi = 2.0 * (alpha.sin() * half.sin()).asin();
    // tan δ = cos α tan(κ/2), in the quadrant that stays right beyond |κ| = 180°.
    let delta = (alpha.cos() * half.sin()).atan2(half.cos()).to_degrees();
    [readings[0] + delta, chi.to_degrees(), readings[2] + delta, readings[3]]
}

fn rotation_difference(a: (&Instrument, &Setting), b: (&Instrument, &Setting)) -> f64 {
    (a.0.lab_from_head(a.1).matrix() - b.0.lab_from_head(b.1).matrix()).abs().max()
}

#[test]
fn tabulated_kappa_angles_are_the_same_rotation() {
    let mut checked = 0;
    for row in reference_rows("s4_kappa_euler.csv") {
        let (kappa, eulerian) = pair(-Vector3::y(), row.number("alpha"));
        if row.number("solution") == 0.0 {
            continue;
        }
        checked += 1;
        let [omega, chi, phi] = row.numbers(["omega_E", "chi_E", "phi_E"]);
        let [omega_k, kappa_k, phi_k] = row.numbers(["omega_k", "kappa", "phi_k"]);
        let (as_kappa, as_euler) =
            (Setting::new(&[omega_k, kappa_k, phi_k, 40.0]), Setting::new(&[omega, chi, phi, 40.0]));
        let off = rotation_difference((&kappa, &as_kappa), (&eulerian, &as_euler));
        assert!(off < 5e-9, "{off:e}: {row:?}");

        // The same setting is found from the node it looks at, with ω held.
        let node = eulerian.lab_from_head(&as_euler).inverse() * eulerian.q_in_lab(&as_euler, 1.0);
        let found = all_settings(&hold(&kappa, "omega", omega_k), node, 1.0);
        assert!(settings_contain(&found, as_kappa.readings_deg(), 1e-4), "{row:?}");
    }
    assert_eq!(checked, 2 * 6 * 4 - 2 * 3, "two solutions each, but three beyond 2α = 48°");
}

/// Rows marked out of reach: the kappa axis carries φ no farther than 2α, and the solver says how much is missing.
#[test]
fn beyond_twice_alpha_the_solver_says_by_how_much_it_misses() {
    let mut checked = 0;
    for row in reference_rows("s4_kappa_euler.csv") {
        if row.number("solution") != 0.0 {
            continue;
        }
        checked += 1;
        let (kappa, eulerian) = pair(-Vector3::y(), row.number("alpha"));
        let chi = row.number("chi_E");
        // Bisecting with this χ: ω = θ on the same side as the detector.
        let setting = Setting::new(&[20.0, chi, row.number("phi_E"), 40.0]);
        let node = eulerian.lab_from_head(&setting).inverse() * eulerian.q_in_lab(&setting, 1.0);
        let mut misses = Vec::new();
        let solved = bisecting(&kappa).each_attempt(node, 1.0, |attempt| match attempt {
            Attempt::Setting { setting, .. } => panic!("{setting:?} cannot be"),
            Attempt::CannotMake { by_deg, .. } => misses.push(by_deg),
        });
        assert!(solved.is_ok() && misses.len() == 8);
        let expected = chi.abs() - 2.0 * row.number("alpha");
        assert!(misses.iter().any(|by_deg| (by_deg - expected).abs() < 1e-9), "{misses:?}, {expected}");
        // χ and 180° − χ are the two settings at this ω.
        let other = 180.0 - chi.abs() - 2.0 * row.number("alpha");
        assert!(misses.iter().all(|m| (m - expected).abs() < 1e-9 || (m - other).abs() < 1e-9), "{misses:?}");
    }
    assert_eq!(checked, 3);
}

proptest! {
    #![proptest_config(ProptestConfig { failure_persistence: None, ..ProptestConfig::with_cases(random_cases()) })]

    #[test]
    fn related_angles_are_the_same_rotation(
        readings in prop::array::uniform4(-179.0..179.0f64), alpha in 15.0..80.0f64, down in any::<bool>(),
    ) {
        let (kappa, eulerian) = pair(if down { -Vector3::y() } else { Vector3::y() }, alpha);
        let related = Setting::new(&eulerian_from_kappa(&readings, alpha));
        let off = rotation_difference((&kappa, &Setting::new(&readings)), (&eulerian, &related));
        prop_assert!(off < 1e-12, "{off:e}");
    }

    /// Bisecting means the same on both machines: each kappa setting, related, is an Eulerian one; and each Eulerian one
    /// within |χ| ≤ 2α is met by two kappa settings, κ and −κ.
    #[test]
    fn kappa_settings_map_onto_eulerian_ones(
        height in -0.999..0.999f64, azimuth in -3.1..3.1f64, length in 0.05..2.7f64,
    ) {
        let chi = height.asin().to_degrees().abs();
        prop_assume!((chi - 80.0).abs() > 1e-2);
        let (kappa, eulerian) = kappa_built_in();
        let across = (1.0 - height * height).sqrt();
        let node = Vector::new(across * azimuth.cos(), height, across * azimuth.sin()) * length;
        let wavelength = 0.71;
        let from_kappa = all_settings(&bisecting(&kappa), node, wavelength);
        let from_euler = all_settings(&bisecting(&eulerian), node, wavelength);
        prop_assert_eq!(from_euler.len(), 8);
        let related: Vec<Setting> =
            from_kappa.iter().map(|s| Setting::new(&eulerian_from_kappa(s.readings_deg(), 50.0))).collect();
        for setting in &related {
            prop_assert!(settings_contain(&from_euler, setting.readings_deg(), 1e-7), "{:?}", setting);
        }
        for setting in &from_euler {
            let chi = turn_between_deg(setting.readings_deg()[1], 0.0);
            let met = settings_contain(&related, setting.readings_deg(), 1e-7);
            prop_assert_eq!(met, chi.abs() <= 100.0, "χ = {}", chi);
        }
        prop_assert_eq!(from_kappa.len(), if chi > 80.0 { 8 } else { 4 });
    }
}

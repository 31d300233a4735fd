//! Azimuths of simultaneous reflections, and the relation between azimuth and incidence, against others' formulas.
//!
//! Sources: `reference/s4_renninger_si222.csv`, *computed* from |k_i + G| = 1/λ in another frame and with another origin of
//! the azimuth: its azimuths run from [1 -1 0] to k_i about +[2 2 2], ours from k_i + k_f to the reference, so they are −ψ.
//! The experiment: Renninger (1937), Z. Phys. 106, 141, *from memory*. Incidence: You (1999), J. Appl. Cryst. 32, 614.

use nalgebra::Matrix3;
use proptest::prelude::*;
use ringwright_acceptance::{random_cases, reference_rows, turn_between_deg};
use ringwright_core::aim::{Attempt, CrystalOnHead, Road, Rule, Turning};
use ringwright_core::crystal::UnitCell;
use ringwright_core::frames::{Head, Hkl, Vector};
use ringwright_core::instrument::built_in_machine;
use ringwright_core::reach::AboveSurface;

/// Azimuths in the table have five decimals.
const TABLE_TOL_DEG: f64 = 6e-6;

#[test]
fn silicon_222_is_crossed_where_the_table_says() {
    let cell = UnitCell::new(5.431020511, 5.431020511, 5.431020511, 90.0, 90.0, 90.0).unwrap();
    let node =
        |h: f64, k: f64, l: f64| -> Vector<Head> { Vector::from_raw(cell.b_matrix() * Hkl::new(h, k, l).to_vector()) };
    let turning = Turning::new(node(2.0, 2.0, 2.0), node(1.0, -1.0, 0.0), 1.5405929).unwrap();
    let mut allowed = 0;
    for row in reference_rows("s4_renninger_si222.csv") {
        let wanted = -row.number("azimuth_deg");
        let found = turning.azimuths_rad(node(row.number("h"), row.number("k"), row.number("l")));
        let nearest = found.map(|psi| turn_between_deg(psi.to_degrees(), wanted).abs()).fold(f64::INFINITY, f64::min);
        assert!(nearest < TABLE_TOL_DEG, "{row:?}: {nearest}° away");
        allowed += usize::from(row.text("both_allowed_in_diamond") == "yes");
    }
    assert!(allowed > 10, "{allowed} of them can disturb");
}

proptest! {
    #![proptest_config(ProptestConfig { failure_persistence: None, ..ProptestConfig::with_cases(random_cases()) })]

    /// sin α_i = cos τ sin θ − sin τ cos θ cos ψ on the six-circle, whatever settles the rest.
    #[test]
    fn incidence_follows_from_the_azimuth(
        h in 1..5i32, k in -4..5i32, l in -4..5i32, psi_deg in -180.0..180.0f64, mu in -5.0..60.0f64, chi in -90.0..90.0f64,
    ) {
        let instrument = built_in_machine("six-circle").unwrap();
        let ub = *UnitCell::new(7.0, 8.0, 9.5, 80.0, 95.0, 105.0).unwrap().b_matrix();
        let surface = ron::from_str("Reciprocal(h: 1, k: 2, l: 3)").unwrap();
        let crystal = CrystalOnHead { ub, surface: Some(surface) };
        let azimuth = format!("Azimuth(reference: Reciprocal(h: 1, k: 2, l: 3), at_deg: {psi_deg})");
        let holds = [format!("Hold(axis: \"mu\", at_deg: {mu})"), format!("Hold(axis: \"chi\", at_deg: {chi})")];
        let rules: Vec<Rule> = [azimuth].iter().chain(&holds).map(|rule| ron::from_str(rule).unwrap()).collect();
        let q: Vector<Head> = Vector::from_raw(ub * Hkl::from([h, k, l]).to_vector());
        let wavelength = 0.7;
        let above = AboveSurface::new(&instrument, &surface, &ub).unwrap();
        let tau = surface.in_head(&ub).unwrap().angle_to(&q);
        prop_assume!((0.05..3.09).contains(&tau));
        let theta = (0.5 * wavelength * q.norm()).asin();
        let sine = tau.cos() * theta.sin() - tau.sin() * theta.cos() * psi_deg.to_radians().cos();
        let road = Road::new(&instrument, &rules, Some(&crystal)).unwrap();
        let mut all = Vec::new();
        road.each_attempt(q, wavelength, &mut |attempt| {
            if let Attempt::Setting { setting, .. } = attempt {
                all.push(setting);
            }
        }).unwrap();
        for setting in &all {
            let [incident, diffracted] = above.grazing_deg(setting).map(|deg| deg.to_radians().sin());
            prop_assert!((incident - sine).abs() < 1e-10, "{incident} and {sine}");
            prop_assert!((incident + diffracted - 2.0 * theta.sin() * tau.cos()).abs() < 1e-10);
        }
    }
}

/// The matrix of directions is the crystal's own: a check that the test above is not about one cell only.
#[test]
fn a_direct_reference_is_perpendicular_to_its_plane() {
    let ub: Matrix3<f64> = *UnitCell::new(7.0, 8.0, 9.5, 80.0, 95.0, 105.0).unwrap().b_matrix();
    let direct: ringwright_core::aim::Reference = ron::from_str("Direct(u: 1, v: 1, w: 0)").unwrap();
    let in_zone = ub * Hkl::from([1, -1, 2]).to_vector();
    assert!(direct.in_head(&ub).unwrap().raw().dot(&in_zone).abs() < 1e-12);
}

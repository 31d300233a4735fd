//! Busing & Levy's four-circle geometry, turned into our laboratory frame.
//!
//! Source: W. R. Busing & H. A. Levy (1967), Acta Cryst. 22, 457. The test vectors `reference/s4_bl_angles.csv` and
//! `reference/s4_two_reflections.csv` are *computed* with their formulas by an independent script; the matrix between the
//! frames is that of `reference/s2_frames_to_mcstas.csv` (*computed*). That their ω, φ and 2θ turn left-handed about "up"
//! is *from memory*, borne out by a measured list of reflections.
//!
//! Their frame has z up and y along the beam, x = y × z: with F the matrix into our frame (x to the left, y up, z along
//! the beam), F x = −x, F y = z, F z = y. A left-handed turn about their z is a right-handed one about F(−z) = (0, −1, 0);
//! χ turns right-handed about their y, ours (0, 0, 1). Every rotation becomes F R F⁻¹, and U, which maps into their φ
//! frame, becomes F U.

use nalgebra::{Matrix3, Rotation3, Unit, Vector3};
use ringwright_acceptance::{Row, all_settings, bisecting, four_circle, hold, reference_rows, settings_contain};
use ringwright_core::aim::Solver;
use ringwright_core::crystal::UnitCell;
use ringwright_core::frames::{Head, Hkl, Vector};
use ringwright_core::instrument::{Instrument, Setting};
use ringwright_core::orient::{Peak, orient_by_two};

/// F: takes a vector of Busing & Levy's laboratory into ours.
pub(crate) fn lab_from_bl() -> Matrix3<f64> {
    let rows = reference_rows("s2_frames_to_mcstas.csv");
    rows.iter().find(|row| row.text("frame").starts_with("BL")).map(|row| row.matrix("m")).unwrap()
}

/// Their instrument: each axis is F times theirs, reversed where it turns left-handed.
fn instrument() -> Instrument {
    let f = lab_from_bl();
    let (down, chi) = (f * -Vector3::z(), f * Vector3::y());
    assert_eq!((down, chi), (-Vector3::y(), Vector3::z()));
    four_circle(&down, ("chi", chi))
}

fn cell(row: &Row) -> UnitCell {
    let [a, b, c, alpha, beta, gamma] = row.numbers(["a", "b", "c", "alpha", "beta", "gamma"]);
    UnitCell::new(a, b, c, alpha, beta, gamma).unwrap()
}

/// The node of a row in our head frame: F U B h.
fn node(row: &Row, hkl: [&str; 3]) -> Vector<Head> {
    let crystal = cell(row).node(Hkl::from_vector(&row.vector(hkl)));
    Vector::from_raw(lab_from_bl() * row.matrix("U") * crystal.raw())
}

fn listed(row: &Row) -> Setting {
    Setting::new(&row.numbers(["omega_absolute", "chi", "phi", "two_theta"]))
}

/// What seven decimals of a degree and nine of U leave: 1e-8 rad.
const DIRECTION_TOLERANCE: f64 = 1e-8;

#[test]
fn every_listed_setting_fulfils_the_diffraction_condition() {
    let instrument = instrument();
    for row in reference_rows("s4_bl_angles.csv") {
        let (node, wavelength) = (node(&row, ["h", "k", "l"]), row.number("lambda"));
        assert!((1.0 / node.norm() - row.number("d")).abs() < row.half_a_digit("d") + 1e-8, "{row:?}");
        let setting = listed(&row);
        let reached = instrument.lab_from_head(&setting) * node;
        let off = (reached - instrument.q_in_lab(&setting, wavelength)).norm() / node.norm();
        assert!(off < DIRECTION_TOLERANCE, "{off:e} at {row:?}");
    }
}

/// At ψ = 0 the listed angles are one of our settings under *bisecting*; elsewhere they are found when ω, or χ, is held.
#[test]
fn every_listed_setting_is_found() {
    let instrument = instrument();
    let (mut bisected, mut held, mut q_along_chi, mut q_along_phi) = (0, 0, 0, 0);
    for row in reference_rows("s4_bl_angles.csv") {
        let (node, wavelength) = (node(&row, ["h", "k", "l"]), row.number("lambda"));
        let setting = listed(&row);
        let angles = setting.readings_deg();
        let tolerance_deg = 1e-6 / angles[1].to_radians().cos().abs().max(1e-2);
        let found_by =
            |solver: &Solver| settings_contain(&all_settings(solver, node, wavelength), angles, tolerance_deg);
        let holding = |axis: &str, at_deg: f64| found_by(&hold(&instrument, axis, at_deg));
        let [offset, psi] = row.numbers(["omega_from_bisecting", "psi"]);
        if angles[1] == 90.0 && offset == 0.0 {
            // Q lies along the φ axis: only a held φ settles it. Bisecting, any φ will do; the list has one, we take 0.
            q_along_phi += 1;
            let any_phi = [angles[0], 90.0, 0.0, angles[3]];
            let found = all_settings(&bisecting(&instrument), node, wavelength);
            assert!(settings_contain(&found, &any_phi, 1e-6), "bisecting, {row:?}");
            assert!(holding("phi", angles[2]), "phi held, {row:?}");
        } else if psi == 0.0 {
            bisected += 1;
            assert!(found_by(&bisecting(&instrument)), "bisecting, {row:?}");
        } else if offset.abs() == 90.0 {
            // A quarter turn of ω from bisecting brings the χ axis along Q: only a held χ settles it.
            q_along_chi += 1;
            assert!(holding("chi", angles[1]), "chi held, {row:?}");
        } else {
            held += 1;
            assert!(holding("omega", angles[0]), "omega held, {row:?}");
            assert!(holding("chi", angles[1]), "chi held, {row:?}");
        }
    }
    assert_eq!((bisected, held, q_along_chi, q_along_phi), (46, 42, 4, 4));
}

/// From the bisecting setting of a row to its setting at ψ the crystal turns right-handed about Q by ψ.
#[test]
fn the_azimuth_is_a_right_handed_turn_about_q() {
    let instrument = instrument();
    let rows = reference_rows("s4_bl_angles.csv");
    let mut pairs = 0;
    for pair in rows.chunks(2) {
        let [start, turned] = pair else { panic!("rows come in pairs") };
        assert_eq!((start.number("psi"), turned.number("psi")), (0.0, 35.0));
        let lab = |row: &Row| *instrument.lab_from_head(&listed(row)).matrix();
        let q = instrument.q_in_lab(&listed(start), 1.0);
        let turn = Rotation3::from_axis_angle(&Unit::new_normalize(*q.raw()), 35f64.to_radians());
        let off = (lab(turned) - turn.matrix() * lab(start)).abs().max();
        assert!(off < 2e-8, "{off:e} at {turned:?}");
        pairs += 1;
    }
    assert_eq!(pairs, 48);
}

/// One of the two reflections of a row as a peak: the listed ω counts from the bisecting position.
fn peak(row: &Row, which: u8) -> Peak {
    let column = |name: &str| format!("{name}{which}");
    let number = |name: &str| row.number(&column(name));
    let omega = number("omega") + 0.5 * number("tth");
    let setting = Setting::new(&[omega, number("chi"), number("phi"), number("tth")]);
    Peak::new(Hkl::new(number("h"), number("k"), number("l")), setting, None).unwrap()
}

/// The listed U and UB map into Busing & Levy's φ frame; ours are F times theirs.
#[test]
fn two_reflections_give_the_listed_orientation() {
    let (instrument, f) = (instrument(), lab_from_bl());
    let rows = reference_rows("s4_two_reflections.csv");
    assert_eq!(rows.len(), 12);
    for row in &rows {
        let cell = cell(row);
        let wavelength = row.number("lambda");
        for (first, second) in [(1, 2), (2, 1)] {
            let found = orient_by_two(&cell, wavelength, &instrument, &peak(row, first), &peak(row, second)).unwrap();
            // Seven decimals of a degree and nine of a matrix, over the sine of the angle between the two.
            let u_off = (found.orientation.head_from_crystal.matrix() - f * row.matrix("U")).abs().max();
            assert!(u_off < 1e-8, "U: {u_off:e}, {row:?}");
            let ub_off = (found.orientation.ub - f * row.matrix("UB")).abs().max();
            assert!(ub_off < 3e-9, "UB: {ub_off:e}, {row:?}");
            assert!(found.angle_deg.misfit().abs() < 1e-6, "{row:?}");
        }
    }
}

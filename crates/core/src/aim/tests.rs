//! The laws of aiming: whatever the stack, every setting found fulfils R U B h = Q, and none is missing.

use nalgebra::Vector3;
use proptest::prelude::*;

use super::*;
use crate::frames::{Head, Vector};
use crate::instrument::{Instrument, MachineDescription, Setting, built_in_machine};
use crate::testing::{cases, unit_vector};

/// How well R U B h = Q must hold, relative to |Q|.
const FORWARD_TOLERANCE: f64 = 1e-10;

fn rule(text: &str) -> Rule {
    ron::from_str(text).unwrap()
}

fn solver(machine: &str, rules: &[&str]) -> (Instrument, Solver) {
    let instrument = built_in_machine(machine).unwrap();
    let rules: Vec<Rule> = rules.iter().map(|r| rule(r)).collect();
    let solver = Solver::new(&instrument, &rules).unwrap();
    (instrument, solver)
}

/// R · (node in the head frame) against Q = k_f − k_i, relative to |Q|.
fn forward_error(instrument: &Instrument, setting: &Setting, node: Vector<Head>, wavelength: f64) -> f64 {
    let reached = instrument.lab_from_head(setting) * node;
    (reached - instrument.q_in_lab(setting, wavelength)).norm() / node.norm()
}

fn attempts(solver: &Solver, node: Vector<Head>, wavelength: f64) -> Vec<Attempt> {
    let mut all = Vec::new();
    solver.each_attempt(node, wavelength, |attempt| all.push(attempt)).unwrap();
    all
}

/// Checks every attempt's forward equation and gives the distinct settings, counted modulo full turns.
fn checked_settings(instrument: &Instrument, solver: &Solver, node: Vector<Head>, wavelength: f64) -> Vec<Setting> {
    let mut distinct: Vec<Setting> = Vec::new();
    for attempt in attempts(solver, node, wavelength) {
        let Attempt::Setting { setting, .. } = attempt else { continue };
        let error = forward_error(instrument, &setting, node, wavelength);
        assert!(error < FORWARD_TOLERANCE, "{setting:?} misses by {error:e}");
        let same = |other: &Setting| {
            let pairs = other.readings_deg().iter().zip(setting.readings_deg());
            pairs.into_iter().all(|(a, b)| crate::instrument::wrap_deg(a - b).abs() < 1e-5)
        };
        if !distinct.iter().any(same) {
            distinct.push(setting);
        }
    }
    distinct
}

fn node(direction: Vector3<f64>, length: f64) -> Vector<Head> {
    Vector::from_raw(direction * length)
}

const WAVELENGTH: f64 = 0.71;

proptest! {
    #![proptest_config(cases())]

    #[test]
    fn eulerian_bisecting_has_eight_settings(direction in unit_vector(), length in 0.05..2.7f64) {
        let (instrument, solver) = solver("eulerian-four-circle", &["Bisecting"]);
        let found = checked_settings(&instrument, &solver, node(direction, length), WAVELENGTH);
        prop_assert_eq!(found.len(), 8);
        let theta = (0.5 * WAVELENGTH * length).asin().to_degrees();
        for setting in found {
            let r = setting.readings_deg();
            let off = crate::instrument::wrap_deg(2.0 * (r[0] - theta * r[3].signum()));
            prop_assert!(off.abs() < 1e-9, "omega is θ or θ + 180° on the detector's side: {r:?}");
        }
    }

    /// χ of the equivalent Eulerian cradle says how many settings kappa has (α = 50°): 8 where 80° ≤ |χ| ≤ 100°, else 4.
    #[test]
    fn kappa_bisecting_has_four_or_eight(direction in unit_vector(), length in 0.05..2.7f64) {
        let (instrument, solver) = solver("kappa-four-circle", &["Bisecting"]);
        let chi = direction.y.asin().abs().to_degrees();
        prop_assume!((chi - 80.0).abs() > 1e-3);
        let found = checked_settings(&instrument, &solver, node(direction, length), WAVELENGTH);
        prop_assert_eq!(found.len(), if chi > 80.0 { 8 } else { 4 });
    }

    #[test]
    fn the_fixed_chi_machine_has_four_settings_or_a_miss(direction in unit_vector(), length in 0.05..2.7f64) {
        let (instrument, solver) = solver("fixed-chi-three-circle", &[]);
        let q = node(direction, length);
        let found = checked_settings(&instrument, &solver, q, WAVELENGTH);
        // The phi axis stands 54.7356° from omega, Q across omega: reached are directions from 35.26° to 144.74° from phi.
        let phi = instrument.sample_axes()[1].direction;
        let from_phi = crate::frames::angle_between(&direction, &phi).to_degrees();
        let miss = (35.264_389_682_754_654 - from_phi).max(from_phi - 144.735_610_317_245_35);
        prop_assume!(miss.abs() > 1e-6);
        prop_assert_eq!(found.len(), if miss < 0.0 { 4 } else { 0 });
        for attempt in attempts(&solver, q, WAVELENGTH) {
            if let Attempt::CannotMake { by_deg, .. } = attempt {
                prop_assert!((by_deg - miss).abs() < 1e-9);
            }
        }
    }

    #[test]
    fn holding_an_axis_keeps_it_there(direction in unit_vector(), length in 0.05..2.7f64, at in -60.0..60.0f64, which in 0..3usize) {
        for machine in ["eulerian-four-circle", "kappa-four-circle"] {
            let instrument = built_in_machine(machine).unwrap();
            let name = instrument.sample_axes()[which].name.clone();
            let rules = [rule(&format!("Hold(axis: \"{name}\", at_deg: {at})"))];
            let solver = Solver::new(&instrument, &rules).unwrap();
            for setting in checked_settings(&instrument, &solver, node(direction, length), WAVELENGTH) {
                prop_assert_eq!(setting.readings_deg()[which], at);
            }
        }
    }

    /// A setting drawn at random, turned into the direction it looks at, is found again under *hold* of any of its axes.
    #[test]
    fn a_setting_is_found_again(t in prop::array::uniform3(-90.0..90.0f64), two_theta in 5.0..120.0f64, which in 0..3usize) {
        for machine in ["eulerian-four-circle", "kappa-four-circle"] {
            let instrument = built_in_machine(machine).unwrap();
            let drawn = Setting::new(&[t[0] * 0.6, t[1], t[2], two_theta]);
            let q = instrument.lab_from_head(&drawn).inverse() * instrument.q_in_lab(&drawn, WAVELENGTH);
            let name = instrument.sample_axes()[which].name.clone();
            let rules = [rule(&format!("Hold(axis: \"{name}\", at_deg: {})", drawn.readings_deg()[which]))];
            let solver = Solver::new(&instrument, &rules).unwrap();
            let nearest = attempts(&solver, q, WAVELENGTH).into_iter().filter_map(|attempt| match attempt {
                Attempt::Setting { setting, .. } => Some(largest_difference(&setting, &drawn)),
                Attempt::CannotMake { .. } => None,
            });
            prop_assert!(nearest.fold(f64::INFINITY, f64::min) < 1e-4);
        }
    }

    /// Three axes and a detector in any directions: the closed forms know no particular machine.
    #[test]
    fn any_stack_fulfils_the_forward_equation(
        axes in prop::array::uniform4(unit_vector()), zeros in prop::array::uniform4(-5.0..5.0f64),
        direction in unit_vector(), length in 0.05..2.7f64,
    ) {
        let Some(instrument) = machine_of(&axes, &zeros) else { return Ok(()) };
        let q = node(direction, length);
        for rules in [vec![rule("Bisecting")], vec![rule("Hold(axis: \"b\", at_deg: 20)")], vec![rule("Hold(axis: \"c\", at_deg: -20)")]] {
            let solver = match Solver::new(&instrument, &rules) {
                Ok(solver) => solver,
                Err(RuleError::NotCovered(_)) => continue,
                Err(other) => return Err(TestCaseError::fail(other.to_string())),
            };
            for setting in checked_settings(&instrument, &solver, q, WAVELENGTH) {
                if rules[0] != Rule::Bisecting { continue }
                let lab = |axis: usize| spindle_in_lab(&instrument, &setting, axis);
                let across = lab(0).cross(&instrument.q_in_lab(&setting, WAVELENGTH).raw().normalize());
                prop_assert!(lab(2).dot(&across).abs() < 1e-9, "the spindle lies in the plane of Q and the reference axis");
            }
        }
    }
}

fn largest_difference(a: &Setting, b: &Setting) -> f64 {
    let pairs = a.readings_deg().iter().zip(b.readings_deg());
    pairs.map(|(x, y)| crate::instrument::wrap_deg(x - y).abs()).fold(0.0, f64::max)
}

/// Where a sample axis points in the lab at a setting.
fn spindle_in_lab(instrument: &Instrument, setting: &Setting, axis: usize) -> Vector3<f64> {
    let direction = Vector::<Head>::from_raw(instrument.sample_axes()[axis].direction.into_inner());
    let outer: Vec<f64> = setting
        .readings_deg()
        .iter()
        .zip(instrument.axes())
        .enumerate()
        .map(|(i, (&reading, a))| if i < axis { reading } else { a.zero_offset_deg })
        .collect();
    *(instrument.lab_from_head(&Setting::new(&outer)) * direction).raw()
}

fn machine_of(axes: &[Vector3<f64>; 4], zeros: &[f64; 4]) -> Option<Instrument> {
    let axis = |i: usize, name: &str| {
        let d = axes[i];
        format!(
            "(name: \"{name}\", direction: ({}, {}, {}), limits: Endless, speed_deg_per_s: 1, zero_offset_deg: {})",
            d.x, d.y, d.z, zeros[i]
        )
    };
    let text = format!(
        "(version: 1, name: \"any\", sample_axes: [{}, {}, {}], detector_axes: [{}])",
        axis(0, "a"),
        axis(1, "b"),
        axis(2, "c"),
        axis(3, "d")
    );
    Instrument::new(ron::from_str::<MachineDescription>(&text).ok()?).ok()
}

#[test]
fn singular_places_are_answered() {
    let axes = [Vector3::x(), Vector3::y(), Vector3::z()];
    let skew = Vector3::new(1e-9, 1.0, 1e-10).normalize();
    for machine in ["eulerian-four-circle", "kappa-four-circle"] {
        let (instrument, solver) = solver(machine, &["Bisecting"]);
        for direction in axes.into_iter().chain(axes.map(|v| -v)).chain([skew, -skew]) {
            for length in [0.3, 2.0 / WAVELENGTH, 2.0 / WAVELENGTH * (1.0 - 1e-15)] {
                let found = checked_settings(&instrument, &solver, node(direction, length), WAVELENGTH);
                assert!(!found.is_empty(), "{machine} {direction:?} {length}");
            }
        }
    }
    for machine in ["eulerian-four-circle", "kappa-four-circle"] {
        for hold in ["omega", "phi"] {
            let (instrument, solver) = solver(machine, &[&format!("Hold(axis: \"{hold}\", at_deg: 0)")]);
            for direction in axes.into_iter().chain([skew]) {
                checked_settings(&instrument, &solver, node(direction, 0.5), WAVELENGTH);
            }
        }
    }
}

#[test]
fn spindle_along_the_reference_axis_takes_the_limit() {
    let (_, solver) = solver("eulerian-four-circle", &["Bisecting"]);
    let length = 1.0;
    let theta = (0.5 * WAVELENGTH * length).asin().to_degrees();
    for attempt in attempts(&solver, node(Vector3::x(), length), WAVELENGTH) {
        let Attempt::Setting { setting, freedom, .. } = attempt else { panic!("{attempt:?}") };
        assert_eq!(freedom, Freedom::OnlySumFixed);
        let r = setting.readings_deg();
        assert!(crate::instrument::wrap_deg(2.0 * (r[0] - theta * r[3].signum())).abs() < 1e-9, "{r:?}");
    }
}

#[test]
fn chi_held_at_zero_reaches_only_the_plane_and_says_by_how_much_it_misses() {
    let (instrument, solver) = solver("eulerian-four-circle", &["Hold(axis: \"chi\", at_deg: 0)"]);
    assert!(!checked_settings(&instrument, &solver, node(Vector3::x(), 0.8), WAVELENGTH).is_empty());
    let tilted = Vector3::new(12f64.to_radians().cos(), 12f64.to_radians().sin(), 0.0);
    for attempt in attempts(&solver, node(tilted, 0.8), WAVELENGTH) {
        let Attempt::CannotMake { by_deg, .. } = attempt else { panic!("{attempt:?}") };
        assert!((by_deg - 12.0).abs() < 1e-9);
    }
}

#[test]
fn kappa_at_its_edge_is_a_double_root() {
    let (instrument, solver) = solver("kappa-four-circle", &["Bisecting"]);
    let chi = 80f64.to_radians();
    let q = node(Vector3::new(chi.cos(), chi.sin(), 0.0), 0.7);
    let found = checked_settings(&instrument, &solver, q, WAVELENGTH);
    assert!(
        found.len() == 4 || found.len() == 6,
        "the pair at the edge is one setting for each detector sign: {found:?}"
    );
}

#[test]
fn nodes_beyond_the_limiting_sphere_say_which_wavelength_would_do() {
    let (_, solver) = solver("eulerian-four-circle", &["Bisecting"]);
    let outside = solver.each_attempt(node(Vector3::x(), 4.0), WAVELENGTH, |_| ()).unwrap_err();
    assert_eq!(outside.longest_wavelength_angstrom, 0.5);
}

#[test]
fn rules_are_counted() {
    let refuse = |machine: &str, rules: &[&str]| {
        let rules: Vec<Rule> = rules.iter().map(|r| rule(r)).collect();
        Solver::new(&built_in_machine(machine).unwrap(), &rules).unwrap_err().to_string()
    };
    assert!(
        refuse("fixed-chi-three-circle", &["Bisecting"]).contains("2 + 1 − 3 = 0, so no angle is spare, but 1 rule")
    );
    assert!(refuse("eulerian-four-circle", &[]).contains("3 + 1 − 3 = 1, so 1 angle is spare, but no rule is given"));
    assert!(refuse("eulerian-four-circle", &["Bisecting", "Bisecting"]).contains("stands here twice"));
    assert!(refuse("eulerian-four-circle", &["Hold(axis: \"two_theta\", at_deg: 3)"]).contains("only detector axis"));
    assert!(refuse("eulerian-four-circle", &["Hold(axis: \"kappa\", at_deg: 3)"]).contains("omega, chi and phi"));
    assert!(refuse("eulerian-four-circle", &["Hold(axis: \"chi\", at_deg: 130)"]).contains("lies 30.0000° outside"));
}

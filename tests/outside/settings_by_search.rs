//! Every setting of random cases, against a search that knows no closed form.
//!
//! Source: `reference/settings_by_search.ron`, *computed* by `scripts/settings_by_search.py` (numpy, scipy): damped
//! Gauss-Newton from thousands of random starts on the full system of equations in the angles of all axes, written from
//! the definitions alone. The script says when a case counts as searched through, and which draws it replaces.

use std::collections::{BTreeMap, BTreeSet};
use std::path::Path;

use nalgebra::{Matrix3, Vector3};
use ringwright_acceptance::turn_between_deg;
use ringwright_core::aim::{Attempt, CrystalOnHead, Reference, Road, Rule};
use ringwright_core::frames::{Head, Vector};
use ringwright_core::instrument::{AxisName, BUILT_IN_MACHINES, Instrument, Limits, Setting, built_in_machine};
use ringwright_core::quantity::Degrees;
use serde::Deserialize;

/// Readings stand in the file with ten decimals, and search and solver each solve to about 1e-12.
const ANGLE_TOL_DEG: f64 = 1e-6;

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
struct Case {
    machine: String,
    by_hand_deg: BTreeMap<AxisName, Degrees>,
    /// As in a session.
    rules: Vec<Rule>,
    /// As in a session.
    surface: Option<Reference>,
    /// Row by row, Å⁻¹, columns a*, b*, c* in the head frame.
    ub: [[f64; 3]; 3],
    hkl: [f64; 3],
    wavelength_angstrom: f64,
    /// Readings of all axes, in the order of the machine's file.
    settings_deg: Vec<Vec<f64>>,
}

impl Case {
    /// The machine without limits, its tilt arcs where the case has them.
    fn instrument(&self) -> Instrument {
        let mut description = built_in_machine(&self.machine).unwrap().description().clone();
        for axis in description.sample_axes.iter_mut().chain(&mut description.detector_axes) {
            axis.limits = Limits::Endless;
            if let Some(at) = self.by_hand_deg.get(&axis.name) {
                assert!(axis.set_by_hand);
                axis.park_deg = *at;
            }
        }
        Instrument::new(description).unwrap()
    }

    fn node_in_head(&self) -> Vector<Head> {
        let ub = Matrix3::from_row_iterator(self.ub.into_iter().flatten());
        Vector::from_raw(ub * Vector3::from(self.hkl))
    }
}

fn cases() -> Vec<Case> {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("reference/settings_by_search.ron");
    let cases: Vec<Case> = ron::from_str(&std::fs::read_to_string(path).unwrap()).unwrap();
    assert!(cases.len() >= 200, "{} cases", cases.len());
    cases
}

/// The script read the same machine files: what it found diffracts on the machines as the program knows them.
#[test]
fn what_the_search_found_diffracts() {
    let cases = cases();
    for (i, case) in cases.iter().enumerate() {
        let (instrument, node) = (case.instrument(), case.node_in_head());
        for readings in &case.settings_deg {
            assert_eq!(readings.len(), instrument.axis_count());
            let setting = Setting::new(readings);
            let q = instrument.q_in_lab(&setting, case.wavelength_angstrom);
            let off = (instrument.lab_from_head(&setting) * node - q).norm() / node.norm();
            assert!(off < 1e-10, "case {i}, {readings:?}: off by {off} |Q|");
            for (axis, reading) in instrument.axes().zip(readings).filter(|(axis, _)| axis.set_by_hand) {
                assert_eq!(axis.park_deg, *reading);
            }
        }
    }
    let machines: BTreeSet<&str> = cases.iter().map(|case| case.machine.as_str()).collect();
    assert_eq!(machines, BUILT_IN_MACHINES.iter().map(|(name, _)| *name).collect());
}

/// Two settings nearer than this on every axis, in degrees, are one: double roots come out this close.
const SAME_SETTING_DEG: f64 = 1e-5;

fn apart(setting: &Setting, readings: &[f64]) -> f64 {
    let pairs = setting.readings_deg().iter().zip(readings);
    pairs.map(|(a, b)| turn_between_deg(*a, *b).abs()).fold(0.0, f64::max)
}

/// Every setting that the program finds, equal ones once.
fn found(case: &Case, road: &Road) -> Vec<Setting> {
    let mut all: Vec<Setting> = Vec::new();
    let solved = road.each_attempt(case.node_in_head(), case.wavelength_angstrom, &mut |attempt| {
        if let Attempt::Setting { setting, .. } = attempt
            && !all.iter().any(|other| apart(other, setting.readings_deg()) < SAME_SETTING_DEG)
        {
            all.push(setting);
        }
    });
    assert_eq!(solved, Ok(()));
    all
}

/// What differs between the program's settings and the search's, in words; nothing if they are the same.
fn difference(case: &Case, road: &Road) -> Option<String> {
    let found = found(case, road);
    if found.len() != case.settings_deg.len() {
        return Some(format!("{} settings, the search has {}", found.len(), case.settings_deg.len()));
    }
    let nearest = |readings: &Vec<f64>| found.iter().map(|s| apart(s, readings)).fold(f64::INFINITY, f64::min);
    let worst = case.settings_deg.iter().map(nearest).fold(0.0, f64::max);
    (worst > ANGLE_TOL_DEG).then(|| format!("a setting of the search is {worst}° from the nearest"))
}

/// What the program refuses although the search can answer: two conditions of one kind, which it takes for a slip, and
/// ties of one axis to more than one other while the detector follows Q.
fn may_be_refused(rules: &[Rule]) -> bool {
    let bisecting = rules.iter().filter(|rule| matches!(rule, Rule::Bisecting | Rule::BisectingAbout { .. })).count();
    let ties = rules.iter().filter(|rule| matches!(rule, Rule::Tie { .. })).count();
    bisecting > 1 || ties > 1
}

#[test]
fn the_program_finds_the_same_settings() {
    let (mut compared, mut failures) = (0, Vec::new());
    for (i, case) in cases().iter().enumerate() {
        let ub = Matrix3::from_row_iterator(case.ub.into_iter().flatten());
        let crystal = CrystalOnHead { ub, surface: case.surface };
        let difference = match Road::new(&case.instrument(), &case.rules, Some(&crystal)) {
            Ok(road) => {
                compared += 1;
                difference(case, &road)
            }
            // Rules that settle one freedom twice have no setting unless by chance.
            Err(error) => (!may_be_refused(&case.rules) && !case.settings_deg.is_empty()).then(|| error.to_string()),
        };
        failures.extend(difference.map(|d| format!("case {i}, {} {:?}: {d}", case.machine, case.rules)));
    }
    assert!(failures.is_empty(), "{} differ\n{}", failures.len(), failures.join("\n"));
    assert!(compared >= 230, "{compared} cases compared");
}

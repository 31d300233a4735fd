//! Turning the whole experiment about the beam changes nothing: a law of unpolarised diffraction, no source needed.
//!
//! Every axis, the detector and the crystal are turned together about z; which settings there are, their readings and
//! what misses by how much stay the same.

use nalgebra::{Rotation3, Vector3};
use proptest::prelude::*;
use ringwright_acceptance::{random_cases, turn_between_deg};
use ringwright_core::aim::{Attempt, Freedom, Preference, Rule, Solver};
use ringwright_core::frames::{Head, Vector};
use ringwright_core::instrument::{BUILT_IN_MACHINES, Instrument, MachineDescription};
use ringwright_core::quantity::Component;
use ringwright_core::reach::{Judge, Judgement};

const WAVELENGTH: f64 = 0.71;

/// A built-in machine with every axis turned about the beam.
fn turned(text: &str, about_beam: &Rotation3<f64>) -> Instrument {
    let mut description: MachineDescription = ron::from_str(text).unwrap();
    for axis in description.sample_axes.iter_mut().chain(&mut description.detector_axes) {
        let vectors = std::iter::once(&mut axis.direction).chain(axis.inclined.as_mut().map(|lean| &mut lean.towards));
        for vector in vectors {
            let (x, y, z) = *vector;
            let new = about_beam * Vector3::new(x.get(), y.get(), z.get());
            let component = |v: f64| Component::new(v).unwrap();
            *vector = (component(new.x), component(new.y), component(new.z));
        }
    }
    Instrument::new(description).unwrap()
}

/// The rules that each machine is tried with, as text; none for machines with two detector axes.
fn rules(name: &str) -> Vec<Vec<Rule>> {
    let texts: &[&str] = match name {
        "eulerian-four-circle" | "eulerian-four-circle-vertical" => {
            &["Bisecting", "Hold(axis: \"omega\", at_deg: 20)", "Hold(axis: \"chi\", at_deg: -35)"]
        }
        "kappa-four-circle" | "kappa-four-circle-vertical" => {
            &["Bisecting", "Hold(axis: \"kappa\", at_deg: 60)", "Hold(axis: \"phi\", at_deg: 12)"]
        }
        "fixed-chi-three-circle" => return vec![Vec::new()],
        _ => return Vec::new(),
    };
    texts.iter().map(|text| vec![ron::from_str(text).unwrap()]).collect()
}

fn attempts(instrument: &Instrument, rules: &[Rule], node: Vector<Head>) -> Option<Vec<Attempt>> {
    let solver = Solver::new(instrument, rules).unwrap();
    let mut all = Vec::new();
    solver.each_attempt(node, WAVELENGTH, |attempt| all.push(attempt)).ok().map(|()| all)
}

/// The same solution, to `tolerance_deg`.
fn same(a: &Attempt, b: &Attempt, tolerance_deg: f64) -> bool {
    match (a, b) {
        (Attempt::Setting { branch, setting, freedom }, Attempt::Setting { branch: b, setting: s, freedom: f }) => {
            let mut pairs = setting.readings_deg().iter().zip(s.readings_deg());
            branch == b && freedom == f && pairs.all(|(x, y)| turn_between_deg(*x, *y).abs() < tolerance_deg)
        }
        (Attempt::CannotMake { branch, by_deg }, Attempt::CannotMake { branch: b, by_deg: by }) => {
            branch == b && (by_deg - by).abs() < tolerance_deg
        }
        _ => false,
    }
}

/// The verdict under the rule *bisecting*, or without a rule where no angle is spare.
fn verdict(instrument: &Instrument, node: &Vector3<f64>) -> Judgement {
    let rules = if instrument.sample_axes().len() == 3 { vec![Rule::Bisecting] } else { Vec::new() };
    let judge = Judge::new(instrument, &rules, &Preference::FarthestFromLimits).unwrap();
    judge.verdict(Vector::from_raw(*node), WAVELENGTH)
}

proptest! {
    #![proptest_config(ProptestConfig { failure_persistence: None, ..ProptestConfig::with_cases(random_cases()) })]

    #[test]
    fn turning_everything_about_the_beam_changes_no_attempt(
        angle in -180.0..180.0f64, height in -1.0..1.0f64, azimuth in -3.1..3.1f64, length in 0.05..3.5f64,
    ) {
        let about_beam = Rotation3::from_axis_angle(&Vector3::z_axis(), angle.to_radians());
        let across = (1.0 - height * height).sqrt();
        let node = Vector3::new(across * azimuth.cos(), height, across * azimuth.sin()) * length;
        for (name, text) in BUILT_IN_MACHINES {
            let (straight, turned) = (turned(text, &Rotation3::identity()), turned(text, &about_beam));
            for rules in rules(name) {
                let before = attempts(&straight, &rules, Vector::from_raw(node));
                let after = attempts(&turned, &rules, Vector::from_raw(about_beam * node));
                prop_assert_eq!(before.is_some(), after.is_some());
                prop_assert_eq!(before.is_some(), 0.5 * WAVELENGTH * length <= 1.0);
                let (before, after) = (before.unwrap_or_default(), after.unwrap_or_default());
                prop_assert_eq!(before.len(), after.len());
                for (a, b) in before.iter().zip(&after) {
                    // At the edge of what a stack can make, angles go as the root of the miss: such draws say nothing.
                    let at_edge = matches!(a, Attempt::CannotMake { by_deg, .. } if *by_deg < 1e-9);
                    let singular = matches!(a, Attempt::Setting { freedom, .. } if *freedom != Freedom::None);
                    prop_assert!(at_edge || singular || same(a, b, 1e-6), "{} {:?}: {:?} against {:?}", name, rules, a, b);
                }
            }
        }
    }

    #[test]
    fn turning_everything_about_the_beam_changes_no_verdict(
        angle in -180.0..180.0f64, height in -1.0..1.0f64, azimuth in -3.1..3.1f64, length in 0.02..3.5f64,
    ) {
        let about_beam = Rotation3::from_axis_angle(&Vector3::z_axis(), angle.to_radians());
        let across = (1.0 - height * height).sqrt();
        let node = Vector3::new(across * azimuth.cos(), height, across * azimuth.sin()) * length;
        for (name, text) in BUILT_IN_MACHINES.into_iter().filter(|(name, _)| !rules(name).is_empty()) {
            let before = verdict(&turned(text, &Rotation3::identity()), &node);
            let after = verdict(&turned(text, &about_beam), &(about_beam * node));
            let miss = before.verdict.miss_deg();
            let clearance = before.setting.map_or(f64::INFINITY, |s| s.clearance_deg);
            // Within rounding of a limit either verdict is right; such draws say nothing.
            let clear = if before.verdict.is_reachable() { clearance > 1e-7 } else { miss.is_none_or(|m| m > 1e-7) };
            if clear {
                prop_assert_eq!(before.verdict.word(), after.verdict.word(), "{}", name);
                let off = miss.unwrap_or(0.0) - after.verdict.miss_deg().unwrap_or(0.0);
                prop_assert!(off.abs() < 1e-6, "{}: {:?} against {:?}", name, before, after);
            }
            // The setting chosen may be another that is as roomy, so the room is compared.
            let room = |j: &Judgement| j.setting.map_or(0.0, |s| s.clearance_deg);
            if before.verdict.is_reachable() {
                let same = room(&before) == room(&after) || (room(&before) - room(&after)).abs() < 1e-6;
                prop_assert!(same, "{}: {:?} against {:?}", name, before, after);
            }
        }
    }
}

use egui_kittest::kittest::NodeT;
use ringwright_core::aim::Rule;
use ringwright_core::session::{CrystalDocument, Session};

use super::*;

fn misfit_deg(harness: &Harness<'_, App>) -> f64 {
    let oriented = harness.state().results().oriented.clone().unwrap();
    oriented.report.as_ref().unwrap().pair.angle_deg.misfit()
}

fn crystal(harness: &Harness<'_, App>) -> CrystalDocument {
    harness.state().session().crystal.clone()
}

#[test]
fn another_cell_length_changes_the_misfit() {
    let mut harness = demo(0);
    let before = misfit_deg(&harness);
    assert!(before.abs() < 0.2, "the demo's peaks fit: {before}");
    enter(&mut harness, "b, Å", "13.6");
    assert_eq!(crystal(&harness).cell.b_angstrom.get(), 13.6);
    assert!((misfit_deg(&harness) - before).abs() > 0.2, "{} and {before}", misfit_deg(&harness));
    assert!(harness.query_all_by_label_contains("unconfirmed, does not fit").count() > 0);
}

#[test]
fn a_wrong_value_is_refused_at_its_field_and_the_last_good_one_stays() {
    let mut harness = demo(0);
    let (before, reach) = (crystal(&harness), harness.state().results().reach.clone().unwrap());
    enter(&mut harness, "a, Å", "-3");
    // At the field, and as the next thing to do.
    let told = harness.query_all_by_label_contains("a, Å: -3 is not a length in Å between 0.1 and 10000");
    assert_eq!(told.count(), 2);
    assert_eq!(crystal(&harness), before);
    assert!(std::sync::Arc::ptr_eq(&reach, harness.state().results().reach.as_ref().unwrap()));
    // The rest goes on.
    enter(&mut harness, "Largest 2θ, degrees", "20");
    assert!(harness.state().results().reach.as_ref().unwrap().table.len() < reach.table.len());
    enter(&mut harness, "a, Å", "9.9");
    assert_eq!(harness.query_all_by_label_contains("is not a length").count(), 0);
    assert_eq!(crystal(&harness).cell.a_angstrom.get(), 9.9);
}

#[test]
fn inputs_that_do_not_fit_together_keep_the_last_answer() {
    let mut harness = demo(0);
    let reach = harness.state().results().reach.clone().unwrap();
    enter(&mut harness, "Space group", "P 4/m m m");
    let results = harness.state().results();
    assert!(!results.problems.is_empty());
    assert!(std::sync::Arc::ptr_eq(&reach, results.reach.as_ref().unwrap()));
    assert!(harness.query_by_label_contains("follows from earlier inputs").is_some());
    assert!(harness.query_by_label("Orientation of earlier inputs").is_some());
    assert!(results.current_plan().is_none(), "an old list must not leave as if it were of these inputs");
    enter(&mut harness, "Space group", "P m m m");
    assert!(harness.state().results().current_plan().is_some());
}

#[test]
fn with_one_peak_there_is_no_orientation_and_the_strip_says_so() {
    let mut harness = demo(0);
    press(&mut harness, "Peak 2 in use");
    press(&mut harness, "Peak 3 in use");
    assert!(harness.state().session().peaks[1].ignored);
    assert!(harness.state().results().orient_error.is_some());
    assert!(harness.query_by_label_contains("1 of 2 needed").is_some());
    assert!(harness.state().results().current_plan().is_none());
}

#[test]
fn a_predicted_peak_is_not_in_use() {
    let mut harness = demo(0);
    let before = harness.state().session().peaks.len();
    let hkl = harness.state().results().current_plan().unwrap().list.rows[0].hkl;
    let ctx = harness.ctx.clone();
    harness.state_mut().perform(&ctx, Command::Select(hkl));
    harness.run_steps(3);
    press(&mut harness, "Add as a peak to fill in");
    let peaks = &harness.state().session().peaks;
    assert_eq!(peaks.len(), before + 1);
    assert!(peaks[before].ignored);
    assert_eq!(peaks[before].readings_deg.len(), 4);
}

#[test]
fn long_work_can_be_stopped_and_taken_up_again() {
    let mut harness = demo(0);
    let before = harness.state().results().reach.clone().unwrap();
    // Some millions of nodes: long enough to be stopped.
    let long: Session = {
        let mut session = harness.state().session().clone();
        session.crystal.cell.a_angstrom = ringwright_core::quantity::Length::new(120.0).unwrap();
        session.targets = ron_targets(0.4);
        session
    };
    harness.state_mut().opened.session = long;
    harness.step();
    assert!(harness.state().results().busy.is_some());
    harness.run_steps(2);
    press(&mut harness, "Stop");
    let results = harness.state().results();
    assert!(results.stopped && results.reach_is_stale);
    assert!(std::sync::Arc::ptr_eq(&before, results.reach.as_ref().unwrap()), "the last answer stays");
    harness.state_mut().opened.session.targets = ron_targets(1.5);
    settle(&mut harness);
    assert!(!harness.state().results().stopped);
    assert!(!harness.state().results().reach_is_stale);
}

fn ron_targets(min: f64) -> ringwright_core::session::Targets {
    let min_angstrom = ringwright_core::quantity::Length::new(min).unwrap();
    ringwright_core::session::Targets::SpacingRange { min_angstrom, max_angstrom: None, with_absent: false }
}

#[test]
fn the_slots_tell_which_spare_angles_the_rules_fill() {
    let mut harness = demo(0);
    assert!(harness.query_by_label("3 + 1 \u{2212} 3 = 1 spare").is_some());
    assert!(harness.query_by_label("Spare angle 1: filled by bisecting").is_some());
    press(&mut harness, "Add a rule");
    assert!(harness.query_by_label("Spare angle 2: bisecting is one too many").is_some());
    assert!(harness.query_by_label("1 too many").is_some());
    press(&mut harness, "Remove rule 2");
    press(&mut harness, "Remove rule 1");
    assert!(harness.query_by_label("1 empty").is_some());
    assert!(harness.query_by_label("Spare angle 1: empty: one more rule is wanted").is_some());
}

#[test]
fn every_rule_can_be_chosen_that_the_machine_allows() {
    let mut harness = demo(0);
    for name in ["bisecting about chi", "hold chi", "azimuth", "freest azimuth", "tie", "bisecting"] {
        // A choice made without a pointer leaves the list open.
        if harness.query_by_label(name).is_none() {
            press(&mut harness, "Rule 1");
        }
        press(&mut harness, name);
        let rule = harness.state().session().rules[0].clone();
        assert!(name.contains(rule.word()), "{name}: {rule:?}");
        let problems = &harness.state().results().problems;
        assert!(problems.is_empty() || name == "hold chi", "{name}: {problems:?}");
    }
    if harness.query_by_label("azimuth").is_none() {
        press(&mut harness, "Rule 1");
    }
    press(&mut harness, "azimuth");
    enter(&mut harness, "Azimuth, degrees", "25");
    enter(&mut harness, "Rule 1 reference", "1 0 0");
    assert!(harness.state().results().problems.is_empty());
}

/// What a screen reader says is wrong with a field.
fn wrong(harness: &Harness<'_, App>, label: &str) -> Option<String> {
    let data = harness.get_by_label(label).accesskit_node().data().clone();
    data.invalid().map(|_| data.description().unwrap_or_default().to_owned())
}

#[test]
fn a_rule_that_does_not_fit_is_told_at_its_field_and_everything_else_stays() {
    let mut harness = demo(0);
    let reach = harness.state().results().reach.clone().unwrap();
    let cases = [
        (r#"Tie(axis: "omega", to: "omega", factor: 0.5, offset_deg: 0)"#, "Rule 1, axis it follows"),
        (r#"Tie(axis: "omega", to: "two_theta", factor: 0, offset_deg: 0)"#, "Factor of the tie"),
        (r#"Hold(axis: "two_theta", at_deg: 0)"#, "Rule 1"),
        ("Azimuth(reference: Reciprocal(h: 0, k: 0, l: 0), at_deg: 20)", "Rule 1 reference"),
        ("Freest(reference: Direct(u: 0, v: 0, w: 0))", "Rule 1 reference"),
    ];
    for (rule, field) in cases {
        harness.state_mut().opened.session.rules = vec![ron::from_str(rule).unwrap()];
        settle(&mut harness);
        let problems = harness.state().results().problems.clone();
        assert_eq!(problems.len(), 1, "{rule}: {problems:?}");
        assert_eq!(
            wrong(&harness, field).as_deref(),
            Some(problems[0].message.as_str()),
            "{rule}: {}",
            problems[0].path
        );
        // At the field and in the strip at most: not once more at the foot of the card.
        assert!(harness.query_all_by_label_contains(&problems[0].message).count() <= 2, "{rule}");
        assert!(std::sync::Arc::ptr_eq(&reach, harness.state().results().reach.as_ref().unwrap()));
    }
    harness.state_mut().opened.session.rules = vec![Rule::Bisecting];
    settle(&mut harness);
    assert!(wrong(&harness, "Rule 1").is_none());
    assert!(harness.state().results().current_plan().is_some());
}

/// A six-circle with a surface: every kind of rule can be on it.
fn six_circle() -> Harness<'static, App> {
    let mut harness = demo(0);
    let session = &mut harness.state_mut().opened.session;
    session.machine = ringwright_core::session::MachineChoice::Named("six-circle".to_owned());
    session.peaks.clear();
    session.rules = ["Hold(axis: \"mu\", at_deg: 0)", "Bisecting", "Hold(axis: \"nu\", at_deg: 0)"]
        .map(|rule| ron::from_str(rule).unwrap())
        .to_vec();
    settle(&mut harness);
    harness
}

/// Chooses from the list of a rule; a list that is open stays so where the choice is made without a pointer.
fn choose(harness: &mut Harness<'_, App>, list: &str, name: &str) {
    if harness.query_by_label(name).is_none() {
        press(harness, list);
    }
    press(harness, name);
}

#[test]
fn a_six_circle_with_a_surface_takes_the_rules_that_others_cannot() {
    let mut harness = six_circle();
    assert!(harness.query_by_label("4 + 2 \u{2212} 3 = 3 spare").is_some());
    press(&mut harness, "The crystal has a surface");
    enter(&mut harness, "Outward normal of the surface", "1 0 1");
    for (name, rule) in [
        ("diffraction plane", "DiffractionPlane(turned_deg: 0)"),
        ("incidence", "Incidence(at_deg: 0)"),
        ("exit", "Exit(at_deg: 0)"),
        ("equal incidence and exit", "EqualIncidenceAndExit"),
        ("hold delta", "Hold(axis: \"delta\", at_deg: 0)"),
        ("freest azimuth", "Freest(reference: Reciprocal(h: 0, k: 0, l: 1))"),
    ] {
        choose(&mut harness, "Rule 2", name);
        assert_eq!(harness.state().session().rules[1], ron::from_str::<Rule>(rule).unwrap(), "{name}");
        for i in 1..=3 {
            assert!(harness.query_by_label_contains(&format!("Spare angle {i}: filled by")).is_some(), "{name}, {i}");
        }
    }
    for (name, field, value, rule) in [
        ("diffraction plane", "Turn of the plane from horizontal, degrees", "90", "DiffractionPlane(turned_deg: 90)"),
        ("incidence", "Incidence, degrees", "1.5", "Incidence(at_deg: 1.5)"),
        ("exit", "Exit, degrees", "2", "Exit(at_deg: 2)"),
        ("hold delta", "Hold delta at, degrees", "12", "Hold(axis: \"delta\", at_deg: 12)"),
    ] {
        choose(&mut harness, "Rule 2", name);
        enter(&mut harness, field, value);
        assert_eq!(harness.state().session().rules[1], ron::from_str::<Rule>(rule).unwrap());
    }
}

#[test]
fn a_rule_that_cannot_be_is_greyed_and_says_why() {
    let mut harness = demo(0);
    press(&mut harness, "Rule 1");
    for name in ["diffraction plane", "incidence", "exit", "equal incidence and exit"] {
        assert!(harness.get_by_label(name).accesskit_node().is_disabled(), "{name}");
    }
    assert!(!harness.get_by_label("azimuth").accesskit_node().is_disabled());
    harness.get_by_label("diffraction plane").scroll_to_me();
    harness.run_steps(10);
    let at = harness.get_by_label("diffraction plane").rect().center();
    harness.hover_at(at);
    harness.run_steps(60);
    assert!(harness.query_by_label_contains("needs two detector axes").is_some());
}

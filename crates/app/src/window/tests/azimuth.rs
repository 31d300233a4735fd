use egui::accesskit::{Action, ActionRequest};
use egui_kittest::kittest::NodeT;
use ringwright_core::aim::Rule;
use ringwright_core::frames::Hkl;
use ringwright_core::instrument::Setting;

use super::*;

const RIBBON: &str = "Azimuth ribbon";

/// A demo with its third planned reflection selected.
fn selected(i: usize) -> Harness<'static, App> {
    let mut harness = demo(i);
    let hkl = harness.state().results().current_plan().unwrap().list.rows[2].hkl;
    perform(&mut harness, Command::Select(hkl));
    harness
}

fn shown(harness: &Harness<'_, App>) -> Setting {
    harness.state().views.settings.shown_setting().unwrap()
}

fn by_hand(harness: &Harness<'_, App>) -> Option<f64> {
    harness.state().views.settings.by_hand_deg()
}

/// ψ of the setting that is shown, worked out from its readings.
fn psi_of_shown(harness: &Harness<'_, App>) -> f64 {
    let reach = harness.state().results().reach.clone().unwrap();
    let hkl = harness.state().picked().hkl.unwrap();
    reach.azimuth.as_ref().unwrap().psi_deg(hkl, &shown(harness)).unwrap()
}

fn turns_apart(a: f64, b: f64) -> f64 {
    let by = a - b;
    (by - 360.0 * (by / 360.0).round()).abs()
}

/// Somewhere on the band, at a part of its width.
fn on_ribbon(harness: &Harness<'_, App>, part: f32) -> egui::Pos2 {
    let rect = harness.get_by_label(RIBBON).rect();
    egui::pos2(rect.left() + part * rect.width(), rect.top() + 20.0)
}

fn gauges(harness: &Harness<'_, App>) -> Vec<String> {
    harness.query_all_by_role(egui::Role::Meter).map(|node| node.accesskit_node().label().unwrap()).collect()
}

/// What is painted where the lattice stands.
fn pictured(harness: &mut Harness<'_, App>) -> Vec<[u8; 4]> {
    let rect = harness.get_by_label_contains("Reciprocal lattice").rect();
    let image = harness.render().unwrap();
    let [x, y, w, h] = [rect.left(), rect.top(), rect.width(), rect.height()].map(|side| side as u32);
    (y..y + h).flat_map(|y| (x..x + w).map(move |x| (x, y))).map(|(x, y)| image.get_pixel(x, y).0).collect()
}

#[test]
fn dragging_turns_the_setting_and_its_dials_but_not_the_session() {
    for i in 0..DEMOS.len() {
        let mut harness = selected(i);
        let (chosen, dials, session) = (shown(&harness), gauges(&harness), harness.state().session().clone());
        let lattice = pictured(&mut harness);
        assert!(by_hand(&harness).is_none());
        let start = on_ribbon(&harness, 0.5);
        harness.drag_at(start);
        harness.step();
        let mut before = by_hand(&harness).unwrap();
        assert!(before.abs() < 2.0, "the middle is 0: {before}");
        for step in 1..=6 {
            harness.hover_at(on_ribbon(&harness, 0.5 + 0.05 * step as f32));
            harness.step();
            let now = by_hand(&harness).unwrap();
            assert!(now > before + 15.0, "{now} after {before}");
            assert!(turns_apart(psi_of_shown(&harness), now) < 1e-6, "the readings are those at ψ {now}");
            before = now;
        }
        harness.drop_at(on_ribbon(&harness, 0.8));
        harness.run_steps(2);
        assert_ne!(gauges(&harness), dials);
        assert!(pictured(&mut harness) != lattice, "the lattice turns with it");
        assert_eq!(harness.state().session(), &session);
        harness.key_press(egui::Key::Escape);
        harness.run_steps(2);
        assert!(by_hand(&harness).is_none());
        assert_eq!((shown(&harness), gauges(&harness)), (chosen, dials));
    }
}

#[test]
fn arrow_keys_turn_by_a_degree() {
    let mut harness = selected(0);
    let start = psi_of_shown(&harness);
    harness.get_by_label(RIBBON).focus();
    harness.run_steps(2);
    for (key, by) in [(egui::Key::ArrowRight, 1.0), (egui::Key::ArrowRight, 2.0), (egui::Key::ArrowLeft, 1.0)] {
        harness.key_press(key);
        harness.run_steps(2);
        assert!(turns_apart(by_hand(&harness).unwrap(), start + by) < 1e-9);
    }
    assert!(harness.get_by_label(RIBBON).accesskit_node().is_focused(), "arrows stay with the ribbon");
}

#[test]
fn a_screen_reader_turns_it_and_a_button_goes_back() {
    let mut harness = selected(0);
    let (start, chosen) = (psi_of_shown(&harness), shown(&harness));
    let node = harness.get_by_label(RIBBON);
    let (target_node, target_tree) = node.accesskit_node().locate();
    let told = node.accesskit_node().data().description().unwrap().to_owned();
    assert!(told.starts_with("allowed ") && told.contains("simultaneous reflections"), "{told}");
    let request = ActionRequest { action: Action::Increment, target_node, target_tree, data: None };
    harness.event(egui::Event::AccessKitActionRequest(request));
    harness.run_steps(2);
    assert!(turns_apart(by_hand(&harness).unwrap(), start + 1.0) < 1e-9);
    press(&mut harness, "Back to the chosen setting");
    assert!(by_hand(&harness).is_none());
    assert_eq!(shown(&harness), chosen);
}

#[test]
fn a_double_click_goes_back_and_another_selection_forgets() {
    let mut harness = selected(0);
    let at = on_ribbon(&harness, 0.3);
    let click = |harness: &mut Harness<'_, App>| {
        harness.drag_at(at);
        harness.step();
        harness.drop_at(at);
        harness.step();
    };
    click(&mut harness);
    assert!(by_hand(&harness).is_some());
    click(&mut harness);
    assert!(by_hand(&harness).is_none(), "the second click of two");
    harness.run_steps(60);
    click(&mut harness);
    assert!(by_hand(&harness).is_some());
    let other = harness.state().results().current_plan().unwrap().list.rows[5].hkl;
    perform(&mut harness, Command::Select(other));
    assert!(by_hand(&harness).is_none());
}

/// What the ribbon shows as allowed is what the dials then show.
#[test]
fn what_is_allowed_on_the_ribbon_is_allowed_on_the_dials() {
    let mut harness = selected(0);
    let hkl = harness.state().picked().hkl.unwrap();
    let reach = harness.state().results().reach.clone().unwrap();
    let windows = reach.azimuth.as_ref().unwrap().windows(hkl).unwrap().any_deg;
    assert!(!windows.is_empty() && windows[0] != (-180.0, 180.0), "a reflection with ends: {windows:?}");
    let settings = &mut harness.state_mut().views.settings;
    let (mut allowed, mut refused) = (0, 0);
    for psi_deg in (-179..180).map(f64::from) {
        let away = windows.iter().flat_map(|&(a, b)| [a, b]).all(|end| turns_apart(end, psi_deg) > 0.01);
        settings.turn_to(psi_deg);
        let inside = windows.iter().any(|&(from, to)| (from..=to).contains(&psi_deg));
        if away {
            assert_eq!(settings.shown().unwrap().verdict.is_reachable(), inside, "ψ {psi_deg}");
        }
        *(if inside { &mut allowed } else { &mut refused }) += 1;
    }
    assert!(allowed > 10 && refused > 10, "{allowed} {refused}");
}

#[test]
fn under_the_pointer_an_azimuth_an_end_and_a_crossing_are_told() {
    let mut harness = selected(0);
    let hkl = harness.state().picked().hkl.unwrap();
    let reach = harness.state().results().reach.clone().unwrap();
    let view = reach.azimuth.as_ref().unwrap();
    let part = |deg: f64| (deg + 180.0) / 360.0;
    let rect = harness.get_by_label(RIBBON).rect().shrink2(vec2(8.0, 0.0));
    let x = |deg: f64| rect.left() + rect.width() * part(deg) as f32;
    let (from, to) = view.windows(hkl).unwrap().any_deg[0];
    let crossing = view.crossings(hkl)[0];
    let wanted = [
        (x(0.5 * (from + to)), 20.0, " settings allowed"),
        (x(to), 20.0, "A window ends at ψ"),
        (x(crossing.psi_deg), 5.0, "Simultaneous reflections (spacings above 2.0 Å)"),
    ];
    for (x, down, words) in wanted {
        harness.hover_at(egui::pos2(x, rect.top() + down));
        harness.run_steps(60);
        assert!(harness.query_by_label_contains(words).is_some(), "{words}");
    }
}

#[test]
fn without_a_spare_angle_the_reason_stands_in_its_place() {
    let mut harness = selected(0);
    harness.state_mut().opened.session.machine =
        ringwright_core::session::MachineChoice::Named("fixed-chi-three-circle".to_owned());
    harness.state_mut().opened.session.rules = Vec::<Rule>::new();
    harness.state_mut().opened.session.peaks.clear();
    harness.state_mut().opened.session.orientation = kept();
    settle(&mut harness);
    perform(&mut harness, Command::Select(Hkl::new(0.0, 2.0, 0.0)));
    assert!(harness.query_by_label(RIBBON).is_none());
    assert!(
        harness.query_by_label_contains("No azimuth ribbon: ").is_some(),
        "{:?}",
        harness.state().results().problems
    );
}

/// c* is what ψ counts from unless a rule says otherwise.
#[test]
fn along_the_reference_the_reason_stands_in_its_place() {
    let mut harness = demo(0);
    perform(&mut harness, Command::Select(Hkl::new(0.0, 0.0, 4.0)));
    assert!(harness.query_by_label(RIBBON).is_none());
    assert!(harness.query_by_label_contains("ψ counts from h k l = 0 0 1, and that is parallel to Q").is_some());
    assert_eq!(gauges(&harness).len(), 4, "the setting under the rules is still shown");
}

fn kept() -> Option<ringwright_core::session::OrientationDocument> {
    let c = |v: f64| ringwright_core::quantity::Component::new(v).unwrap();
    let u = ((c(1.0), c(0.0), c(0.0)), (c(0.0), c(1.0), c(0.0)), (c(0.0), c(0.0), c(1.0)));
    Some(ringwright_core::session::OrientationDocument { u, confirmed: false })
}

/// With two ties the windows of a six-circle take long: the ribbon says so, and can be turned meanwhile.
#[test]
fn while_the_windows_are_worked_out_the_reflection_can_be_turned() {
    let mut harness = demo(0);
    let session = &mut harness.state_mut().opened.session;
    session.machine = ringwright_core::session::MachineChoice::Named("six-circle".to_owned());
    session.peaks.clear();
    session.orientation = kept();
    session.targets = ron::from_str("List([(h: 1, k: 2, l: 3)])").unwrap();
    session.rules = [
        r#"Tie(axis: "mu", to: "chi", factor: 0.37, offset_deg: 3)"#,
        "Azimuth(reference: Reciprocal(h: 0, k: 0, l: 1), at_deg: 20)",
        r#"Tie(axis: "nu", to: "delta", factor: 0.5, offset_deg: 3)"#,
    ]
    .map(|rule| ron::from_str(rule).unwrap())
    .to_vec();
    settle(&mut harness);
    let ctx = harness.ctx.clone();
    harness.state_mut().perform(&ctx, Command::Select(Hkl::new(1.0, 2.0, 3.0)));
    harness.run_steps(3);
    if harness.state().views.azimuth.is_waiting() {
        let description =
            harness.get_by_label(RIBBON).accesskit_node().data().description().unwrap_or_default().to_owned();
        assert_eq!(description, "being worked out");
    }
    let at = on_ribbon(&harness, 0.7);
    harness.drag_at(at);
    harness.step();
    assert!(by_hand(&harness).is_some());
    settle(&mut harness);
    assert!(!harness.state().views.azimuth.is_waiting());
    assert!(by_hand(&harness).is_some(), "what was turned stays when the windows arrive");
}

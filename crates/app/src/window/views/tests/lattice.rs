use std::sync::Arc;

use egui::{Event, Key, Modifiers, MouseWheelSource, MouseWheelUnit, Pos2, Rect, Theme, TouchPhase, vec2};
use egui_kittest::Harness;
use egui_kittest::kittest::Queryable;
use ringwright_core::frames::Hkl;
use ringwright_core::instrument::Setting;

use super::super::*;
use super::fixture::{Workplace, first_of, harness, orthorhombic, small};
use crate::window::Reach;

fn view<'a>(reach: Option<Arc<Reach>>) -> Harness<'a, Workplace> {
    harness([640.0, 520.0], Theme::Dark, Workplace::of(reach), |ui, place| place.lattice_ui(ui))
}

fn picture_rect(harness: &Harness<'_, Workplace>) -> Rect {
    let is_picture = |label: String| label.starts_with("Reciprocal lattice");
    harness.get_by(|node| node.label().is_some_and(is_picture)).rect()
}

/// Where a node is seen: projected here from its position in the lab frame, not read off the view.
fn on_screen(harness: &Harness<'_, Workplace>, hkl: Hkl, setting: &Setting) -> Pos2 {
    let (reach, rect) = (harness.state().reach(), picture_rect(harness));
    let at = reach.instrument.lab_from_head(setting) * reach.orientation.q_in_head(hkl);
    let view = harness.state().lattice.eye().view(rect.width().round() as usize, rect.height().round() as usize);
    let seen = view.project([at.raw().x, at.raw().y, at.raw().z]).unwrap();
    rect.min + vec2(seen.x as f32, seen.y as f32)
}

fn click(harness: &mut Harness<'_, Workplace>, at: Pos2) {
    harness.hover_at(at);
    harness.step();
    harness.drag_at(at);
    harness.step();
    harness.drop_at(at);
    harness.step();
}

fn drag(harness: &mut Harness<'_, Workplace>, by: egui::Vec2) {
    let from = picture_rect(harness).center();
    harness.hover_at(from);
    harness.step();
    harness.drag_at(from);
    harness.step();
    harness.hover_at(from + by);
    harness.step();
    harness.drop_at(from + by);
    harness.step();
}

fn sparse() -> Arc<Reach> {
    orthorhombic("eulerian-four-circle", [4.1, 5.3, 6.2], 1.9, 1.2)
}

/// Nodes that no other node comes near to on the screen, so that a click can only mean them.
fn lonely(harness: &Harness<'_, Workplace>) -> Vec<(Hkl, Pos2)> {
    let reach = harness.state().reach();
    let park = reach.instrument.park();
    let all: Vec<(Hkl, Pos2)> = reach.table.rows().map(|row| (row.hkl, on_screen(harness, row.hkl, &park))).collect();
    let near = |a: Pos2, b: Pos2| (a - b).length() < 20.0;
    all.iter()
        .filter(|(hkl, at)| !all.iter().any(|(other, place)| other != hkl && near(*at, *place)))
        .copied()
        .collect()
}

#[test]
fn a_click_on_a_projected_node_picks_it_and_a_click_beside_does_not() {
    let harness_before = view(Some(sparse()));
    let targets = lonely(&harness_before);
    assert!(targets.len() >= 5, "only {} nodes stand alone", targets.len());
    for (hkl, at) in targets.into_iter().take(6) {
        let mut harness = view(Some(sparse()));
        click(&mut harness, at + vec2(11.0, 0.0));
        assert_eq!(harness.state().picked.hkl, None);
        click(&mut harness, at);
        assert_eq!(harness.state().picked.hkl, Some(hkl));
    }
}

#[test]
fn hovering_tells_what_the_node_is() {
    let mut harness = view(Some(sparse()));
    let (hkl, at) = lonely(&harness)[0];
    harness.hover_at(at);
    harness.run();
    assert_eq!(harness.state().picked.hovered, Some(hkl));
    let row = harness.state().reach().table.rows().find(|row| row.hkl == hkl).unwrap();
    harness.get_by_label_contains(&format!("{:.4}", row.d_angstrom));
}

#[test]
fn at_its_setting_the_node_stands_at_the_tip_of_q() {
    let reach = small();
    let hkl = first_of(&reach, Kind::Reachable);
    let mut place = Workplace::of(Some(Arc::clone(&reach)));
    place.picked.hkl = Some(hkl);
    place.begin();
    let setting = place.settings.shown_setting().unwrap();
    let node = reach.instrument.lab_from_head(&setting) * reach.orientation.q_in_head(hkl);
    let q = reach.instrument.q_in_lab(&setting, reach.wavelength_angstrom);
    assert!((node - q).norm() < 1e-9);
    // The chosen setting is the one of the table.
    let row = reach.table.rows().find(|row| row.hkl == hkl).unwrap();
    assert_eq!(row.setting.unwrap().readings_deg(), setting.readings_deg());
}

#[test]
fn the_legend_hides_a_kind_from_picture_and_picking() {
    let mut harness = view(Some(sparse()));
    let (hkl, at) = lonely(&harness)[0];
    let row = harness.state().reach().table.rows().find(|row| row.hkl == hkl).unwrap();
    let kind = Kind::of(row.verdict);
    harness.get_by_label_contains(kind.words()).click();
    harness.run();
    assert!(!harness.state().shown.shows(kind));
    click(&mut harness, at);
    assert_eq!(harness.state().picked.hkl, None);
    harness.get_by_label_contains(kind.words()).click();
    harness.run();
    click(&mut harness, at);
    assert_eq!(harness.state().picked.hkl, Some(hkl));
}

#[test]
fn drags_turn_and_move_and_a_double_click_resets() {
    let mut harness = view(Some(sparse()));
    let start = *harness.state().lattice.eye();
    drag(&mut harness, vec2(60.0, 0.0));
    let turned = *harness.state().lattice.eye();
    assert_eq!(turned.target(), start.target());
    // Dragging to the right walks the eye to its left.
    let [right, _, _] = start.axes();
    let step: Vec<f64> = turned.position().iter().zip(start.position()).map(|(a, b)| a - b).collect();
    assert!(step.iter().zip(right).map(|(s, r)| s * r).sum::<f64>() < 0.0);
    harness.event(Event::ModifiersChanged(Modifiers::SHIFT));
    drag(&mut harness, vec2(60.0, 0.0));
    harness.event(Event::ModifiersChanged(Modifiers::NONE));
    assert_ne!(harness.state().lattice.eye().target(), turned.target());
    let middle = picture_rect(&harness).center();
    harness.hover_at(middle);
    harness.step();
    for _ in 0..2 {
        harness.drag_at(middle);
        harness.drop_at(middle);
        harness.step();
    }
    harness.run();
    assert_eq!(*harness.state().lattice.eye(), start);
}

#[test]
fn the_wheel_and_the_keys_zoom_and_turn() {
    let mut harness = view(Some(sparse()));
    let start = *harness.state().lattice.eye();
    harness.hover_at(picture_rect(&harness).center());
    harness.step();
    let (unit, phase, source) = (MouseWheelUnit::Point, TouchPhase::Move, MouseWheelSource::Wheel);
    harness.event(Event::MouseWheel { unit, phase, source, delta: vec2(0.0, 80.0), modifiers: Modifiers::NONE });
    harness.run_steps(12);
    assert!(harness.state().lattice.eye().distance() < start.distance() * 0.95);
    let near_corner = picture_rect(&harness).min + vec2(6.0, 6.0);
    click(&mut harness, near_corner);
    let before = *harness.state().lattice.eye();
    harness.key_press(Key::ArrowLeft);
    harness.run();
    assert_ne!(harness.state().lattice.eye().position(), before.position());
    harness.key_press(Key::Home);
    harness.run();
    assert_eq!(*harness.state().lattice.eye(), start);
}

#[test]
fn a_picture_that_stands_still_is_painted_finely_and_then_left_alone() {
    let mut harness = view(Some(sparse()));
    harness.run_steps(8);
    assert!(harness.state().lattice.is_fine());
    let delay =
        |harness: &Harness<'_, Workplace>| harness.output().viewport_output.values().next().unwrap().repaint_delay;
    assert_eq!(delay(&harness), std::time::Duration::MAX, "an idle window asks for nothing");
    drag(&mut harness, vec2(5.0, 2.0));
    assert!(delay(&harness) < std::time::Duration::from_secs(1));
    harness.run_steps(8);
    assert!(harness.state().lattice.is_fine());
}

#[test]
fn without_results_it_says_what_to_do() {
    let harness = view(None);
    harness.get_by_label_contains("No orientation yet");
    harness.get_by_label_contains("two found peaks");
}

/// The largest distance of a node from the origin on the screen, in halves of the picture's smaller side.
fn filled(harness: &Harness<'_, Workplace>) -> f32 {
    let (reach, rect) = (harness.state().reach(), picture_rect(harness));
    let park = reach.instrument.park();
    let origin = on_screen(harness, Hkl::new(0.0, 0.0, 0.0), &park);
    let far = reach.table.rows().map(|row| (on_screen(harness, row.hkl, &park) - origin).length());
    far.fold(0.0, f32::max) / (0.5 * rect.size().min_elem())
}

#[test]
fn the_nodes_fill_the_picture_until_the_whole_sphere_is_asked_for() {
    // Few nodes deep inside a large sphere.
    let mut harness = view(Some(orthorhombic("eulerian-four-circle", [8.9, 6.3, 11.4], 2.6, 0.5)));
    assert!((0.7..0.9).contains(&filled(&harness)), "{}", filled(&harness));
    harness.get_by_label("Whole sphere").click();
    harness.run();
    assert!(filled(&harness) < 0.5, "{}", filled(&harness));
    let centre = harness.state().lattice.eye().view(640, 480).project([0.0, 0.0, -2.0]).unwrap();
    assert!((0.0..640.0).contains(&centre.x) && (0.0..480.0).contains(&centre.y));
    harness.get_by_label("Fit nodes").click();
    harness.run();
    assert!((0.7..0.9).contains(&filled(&harness)), "{}", filled(&harness));
}

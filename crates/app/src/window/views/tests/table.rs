use std::sync::Arc;

use egui::{Key, Theme};
use egui_kittest::Harness;
use egui_kittest::kittest::{NodeT, Queryable};
use ringwright_core::frames::Hkl;

use super::super::*;
use super::fixture::{Workplace, first_of, harness, small};

fn view<'a>() -> Harness<'a, Workplace> {
    harness([1180.0, 420.0], Theme::Dark, Workplace::of(Some(small())), |ui, place| place.table_ui(ui))
}

/// The rows in sight, as they are read out, from top to bottom.
fn rows(harness: &Harness<'_, Workplace>) -> Vec<String> {
    let mut rows: Vec<(f32, String)> = harness
        .query_all_by_role(egui::Role::Row)
        .map(|node| (node.rect().top(), node.accesskit_node().label().unwrap()))
        .collect();
    rows.sort_by(|a, b| a.0.total_cmp(&b.0));
    rows.into_iter().map(|(_, label)| label).collect()
}

fn spacings(harness: &Harness<'_, Workplace>) -> Vec<f64> {
    let number = |row: &String| row.split("d ").nth(1).unwrap().split(' ').next().unwrap().parse().unwrap();
    rows(harness).iter().map(number).collect()
}

fn type_filter(harness: &mut Harness<'_, Workplace>, text: &str) {
    harness.get_by_label("Filter").focus();
    harness.run();
    harness.get_by_role(egui::Role::TextInput).type_text(text);
    harness.run();
}

#[test]
fn a_header_sorts_up_then_down_then_not_at_all() {
    let mut harness = view();
    let by_table = rows(&harness);
    assert!(by_table.len() > 8);
    harness.get_by_label("Sort by d / Å").click();
    harness.run();
    let rising = spacings(&harness);
    assert!(rising.is_sorted() && (rising[0] - 0.56).abs() < 0.02, "{rising:?}");
    harness.get_by_label("Sort by d / Å, rising now").click();
    harness.run();
    let falling = spacings(&harness);
    assert!(falling.iter().rev().is_sorted() && falling[0] > 5.0, "{falling:?}");
    harness.get_by_label("Sort by d / Å, falling now").click();
    harness.run();
    assert_eq!(rows(&harness), by_table);
}

#[test]
fn a_filter_keeps_what_it_names_and_explains_what_it_does_not_know() {
    let mut harness = view();
    type_filter(&mut harness, "0 0 * not absent");
    let left = rows(&harness);
    assert!(!left.is_empty() && left.iter().all(|row| row.starts_with("0 0 ") && !row.contains("absent")), "{left:?}");
    // 2₁ along c: only even l, and |l| ≤ 7.4 / 0.56.
    let expected = 2 * (7.4f64 / 0.56 / 2.0).floor() as usize;
    harness.get_by_label_contains(&format!("{expected} of "));
    harness.get_by_label("Clear filter").click();
    harness.run();
    type_filter(&mut harness, "wobble");
    harness.get_by_label_contains("\"wobble\" is not known here");
    assert!(rows(&harness).len() > 8, "a filter that cannot be read hides nothing");
}

#[test]
fn nothing_left_says_how_to_go_on() {
    let mut harness = view();
    type_filter(&mut harness, "d > 500");
    harness.get_by_label_contains("No reflection meets the conditions");
    harness.get_by_label("Clear filter").click();
    harness.run();
    assert!(rows(&harness).len() > 8);
    for kind in Kind::ALL {
        harness.state_mut().shown.set(kind, false);
    }
    harness.run();
    harness.get_by_label("Show every verdict").click();
    harness.run();
    assert!(rows(&harness).len() > 8);
}

#[test]
fn a_click_selects_and_the_keys_go_on_from_there() {
    let mut harness = view();
    let seen = rows(&harness);
    harness.get_by_label(&seen[2]).click();
    harness.run();
    let table = harness.state().reach();
    let at = |i: usize| table.table.row(i).unwrap().hkl;
    assert_eq!(harness.state().picked.hkl, Some(at(2)));
    harness.key_press(Key::ArrowDown);
    harness.run();
    assert_eq!(harness.state().picked.hkl, Some(at(3)));
    harness.key_press(Key::ArrowUp);
    harness.key_press(Key::ArrowUp);
    harness.run();
    assert_eq!(harness.state().picked.hkl, Some(at(1)));
    harness.key_press(Key::End);
    harness.run();
    assert_eq!(harness.state().picked.hkl, Some(at(table.table.len() - 1)));
    let last = rows(&harness).last().unwrap().clone();
    assert!(last.contains(&format!("d {:.4}", table.table.row(table.table.len() - 1).unwrap().d_angstrom)), "{last}");
}

#[test]
fn a_selection_from_elsewhere_is_scrolled_to() {
    let mut harness = view();
    let reach = harness.state().reach();
    let far = reach.table.row(reach.table.len() / 2).unwrap();
    let words = format!("d {:.4} Å", far.d_angstrom);
    assert!(!rows(&harness).iter().any(|row| row.contains(&words)));
    harness.state_mut().picked.hkl = Some(far.hkl);
    harness.run();
    assert!(rows(&harness).iter().any(|row| row.contains(&words)));
}

#[test]
fn the_order_is_made_once_for_each_question() {
    let reach = small();
    let mut place = Workplace::of(Some(Arc::clone(&reach)));
    place.picked.hkl = Some(first_of(&reach, Kind::Reachable));
    let mut harness = harness([900.0, 400.0], Theme::Light, place, |ui, place| place.table_ui(ui));
    let made = harness.state().table.orders_made();
    harness.run_steps(5);
    harness.state_mut().picked.hkl = Some(Hkl::new(0.0, 0.0, 4.0));
    harness.run_steps(5);
    assert_eq!(harness.state().table.orders_made(), made);
    harness.get_by_label("Sort by 2θ / °").click();
    harness.run_steps(3);
    assert_eq!(harness.state().table.orders_made(), made + 1);
}

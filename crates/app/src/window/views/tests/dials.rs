use std::sync::Arc;

use egui::Theme;
use egui_kittest::Harness;
use egui_kittest::kittest::{NodeT, Queryable};
use ringwright_core::frames::Hkl;

use super::super::*;
use super::fixture::{Workplace, first_of, harness, small};

fn view<'a>(hkl: Option<Hkl>) -> Harness<'a, Workplace> {
    let mut place = Workplace::of(Some(small()));
    place.picked.hkl = hkl;
    harness([760.0, 520.0], Theme::Dark, place, |ui, place| place.dials_ui(ui))
}

fn of_kind<'a>(kind: Kind) -> Harness<'a, Workplace> {
    view(Some(first_of(&small(), kind)))
}

fn gauges(harness: &Harness<'_, Workplace>) -> Vec<String> {
    harness.query_all_by_role(egui::Role::Meter).map(|node| node.accesskit_node().label().unwrap()).collect()
}

#[test]
fn the_chosen_setting_comes_first_with_its_reason_and_its_readings() {
    let harness = of_kind(Kind::Reachable);
    harness.get_by_label_contains("chosen because it is farthest from every limit");
    let reach = harness.state().reach();
    let hkl = harness.state().picked.hkl.unwrap();
    let row = reach.table.rows().find(|row| row.hkl == hkl).unwrap();
    let gauges = gauges(&harness);
    assert_eq!(gauges.len(), 4);
    for ((gauge, axis), deg) in gauges.iter().zip(reach.instrument.axes()).zip(row.setting.unwrap().readings_deg()) {
        let value = format!("{deg:.3}").replace('-', "−");
        assert!(gauge.contains(axis.name.as_str()) && gauge.contains(&value), "{gauge}: {value}");
    }
    let clearances: Vec<f64> =
        harness.state().settings.all().iter().filter(|s| s.verdict.is_reachable()).map(|s| s.clearance_deg).collect();
    assert!(clearances[0] + 1e-6 >= clearances.iter().copied().fold(0.0, f64::max));
}

#[test]
fn a_click_shows_another_setting() {
    let mut harness = of_kind(Kind::Reachable);
    let chosen = harness.state().settings.shown_setting().unwrap();
    harness.get_by_label_contains("Setting 3:").click();
    harness.run();
    assert_eq!(harness.state().settings.shown_index(), 2);
    assert_ne!(harness.state().settings.shown_setting().unwrap(), chosen);
    harness.get_by_label_contains("not the one chosen");
    // Another reflection starts with its chosen setting again.
    let other = harness.state().reach().table.rows().filter(|row| row.verdict.is_reachable()).nth(40).unwrap().hkl;
    harness.state_mut().picked.hkl = Some(other);
    harness.run();
    assert_eq!(harness.state().settings.shown_index(), 0);
}

#[test]
fn an_axis_over_its_limit_says_by_how_much() {
    let harness = of_kind(Kind::OverLimit);
    harness.get_by_label_contains("None of ");
    let judged = *harness.state().settings.shown().unwrap();
    let by = format!("over by {:.2}°", judged.verdict.miss_deg().unwrap());
    assert!(gauges(&harness).iter().any(|gauge| gauge.contains(&by)), "{by}: {:?}", gauges(&harness));
}

#[test]
fn outside_the_sphere_names_the_wavelength_that_would_do() {
    let reach = small();
    let hkl = Hkl::new(20.0, 0.0, 0.0);
    let harness = view(Some(hkl));
    assert!(gauges(&harness).is_empty());
    let longest = 2.0 * reach.cell.d_spacing(hkl);
    harness.get_by_label_contains(&format!("{longest:.4} Å or less"));
}

#[test]
fn an_endless_axis_turns_for_ever_and_a_bare_machine_has_no_rule() {
    let reach = super::fixture::orthorhombic("fixed-chi-three-circle", [7.2, 9.8, 12.4], 1.0, 0.71);
    let mut place = Workplace::of(Some(Arc::clone(&reach)));
    place.picked.hkl = Some(first_of(&reach, Kind::Reachable));
    let harness = harness([760.0, 520.0], Theme::Light, place, |ui, place| place.dials_ui(ui));
    let endless = reach.instrument.axes().filter(|axis| axis.travel.is_endless()).count();
    let told = gauges(&harness).iter().filter(|gauge| gauge.contains("turns for ever")).count();
    assert!(endless > 0);
    assert_eq!(told, endless);
}

#[test]
fn without_a_selection_it_says_what_to_do() {
    view(None).get_by_label_contains("Click a node in the lattice");
}

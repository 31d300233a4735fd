//! Every state of the work says what to do next.

use egui_kittest::kittest::NodeT;
use ringwright_core::quantity::Index;
use ringwright_core::session::{TargetNode, Targets};

use super::*;

/// Asserts that the strip says this; the strip lies at the bottom.
fn next_is(harness: &Harness<'_, App>, part: &str) {
    let told = harness.query_all_by_label_contains(part).filter(|node| node.rect().top() > LAPTOP[1] - 45.0).count();
    assert!(told > 0, "{part}");
}

fn want(harness: &mut Harness<'_, App>, nodes: &[[f64; 3]]) {
    let index = |v: f64| Index::new(v).unwrap();
    let node = |[h, k, l]: &[f64; 3]| TargetNode { h: index(*h), k: index(*k), l: index(*l) };
    harness.state_mut().opened.session.targets = Targets::List(nodes.iter().map(node).collect());
    settle(harness);
}

#[test]
fn without_enough_peaks_it_asks_for_them() {
    let mut harness = demo(0);
    press(&mut harness, "Remove peak 3");
    press(&mut harness, "Peak 2 in use");
    next_is(&harness, "A second peak gives the orientation: tick one");
    press(&mut harness, "Remove peak 2");
    next_is(&harness, "Put in a second found peak");
    press(&mut harness, "Remove peak 1");
    next_is(&harness, "Put in two found peaks");
    assert!(harness.query_by_label("No orientation").is_some());
    assert!(harness.state().results().current_plan().is_none());
}

#[test]
fn a_third_peak_that_contradicts_is_named() {
    let mut harness = demo(0);
    enter(&mut harness, "Peak 3 chi, degrees", "60");
    next_is(&harness, "Not where this orientation puts it: −3 −1 2. Look at its indices and readings");
    assert!(harness.query_by_label("Orientation unconfirmed").is_some());
}

#[test]
fn where_nothing_can_be_reached_it_says_what_would_change_that() {
    let mut harness = demo(0);
    want(&mut harness, &[[30.0, 0.0, 0.0], [0.0, 25.0, 0.0]]);
    // 2 d of the larger spacing, 8.914 Å / 30.
    next_is(&harness, "shorten the wavelength to 0.5943 Å");
    want(&mut harness, &[[2.0, 3.0, 2.0]]);
    next_is(&harness, "Some axis would pass its limit");
    want(&mut harness, &[]);
    next_is(&harness, "No node lies in the targets");
}

#[test]
fn the_tabulator_goes_from_field_to_field_in_reading_order() {
    let mut harness = demo(0);
    harness.get_by_label("Name of the crystal").focus();
    harness.run_steps(2);
    let wanted = [
        "a, Å",
        "b, Å",
        "c, Å",
        "alpha, degrees",
        "beta, degrees",
        "gamma, degrees",
        "Kind of symmetry",
        "Space group",
    ];
    for label in wanted {
        harness.key_press(egui::Key::Tab);
        harness.run_steps(2);
        assert!(harness.get_by_label(label).accesskit_node().is_focused(), "{label} comes next");
    }
}

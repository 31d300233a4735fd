use std::sync::Arc;

use egui_kittest::kittest::NodeT;
use ringwright_core::instrument::{AxisDescription, Limits, MachineDescription};
use ringwright_core::session::MachineChoice;

use super::*;

fn written_out(harness: &Harness<'_, App>) -> MachineDescription {
    match &harness.state().session().machine {
        MachineChoice::Inline(description) => description.clone(),
        MachineChoice::Named(name) => panic!("only named: {name}"),
    }
}

fn axis(harness: &Harness<'_, App>, name: &str) -> AxisDescription {
    let machine = written_out(harness);
    machine.sample_axes.into_iter().chain(machine.detector_axes).find(|axis| axis.name.as_str() == name).unwrap()
}

fn reachable(harness: &Harness<'_, App>) -> usize {
    harness.state().results().reach.as_ref().unwrap().table.counts()[0]
}

/// The first demo, whose machine is written out, with its card and one axis unfolded.
fn unfolded(name: &str) -> Harness<'static, App> {
    let mut harness = demo(0);
    press(&mut harness, "Unfold Machine");
    press(&mut harness, &format!("Edit axis {name}"));
    harness
}

/// What a screen reader says is wrong with a field.
fn wrong(harness: &Harness<'_, App>, label: &str) -> Option<String> {
    let node = harness.get_by_label(label);
    let data = node.accesskit_node().data().clone();
    data.invalid().map(|_| data.description().unwrap_or_default().to_owned())
}

#[test]
fn a_named_machine_becomes_a_copy_that_can_be_edited() {
    let mut harness = demo(1);
    let before = harness.state().results().reach.clone().unwrap();
    press(&mut harness, "Unfold Machine");
    press(&mut harness, "Edit a copy in this session");
    let built_in = ringwright_core::instrument::built_in_machine("kappa-four-circle").unwrap();
    assert_eq!(written_out(&harness), *built_in.description());
    assert!(Arc::ptr_eq(&before, harness.state().results().reach.as_ref().unwrap()), "nothing follows differently");
    press(&mut harness, "Edit axis kappa");
    enter(&mut harness, "kappa limit 1 from, degrees", "-20");
    enter(&mut harness, "kappa limit 1 to, degrees", "40");
    enter(&mut harness, "kappa overshoot, degrees", "1.5");
    assert!(reachable(&harness) < before.table.counts()[0]);
    let at = harness.state().results().resolved.as_ref().unwrap().instrument.clone();
    let (least, most) = at.sample_axes()[1].travel.intervals_deg().next().unwrap();
    assert_eq!((least, most), (-20.0 + 1.5, 40.0), "the overshoot below is taken off");
}

#[test]
fn every_number_of_an_axis_reaches_the_session() {
    let mut harness = unfolded("chi");
    for (label, text) in [
        ("chi limit 1 from, degrees", "-30"),
        ("chi speed, degrees per second", "2.5"),
        ("chi time to start and stop, s", "0.7"),
        ("chi zero offset, degrees", "-0.25"),
        ("chi park reading, degrees", "12"),
        ("chi direction x", "0.01"),
        ("Half angle of the direct-beam cone, degrees", "4.5"),
        ("Name of the machine", "Ours"),
    ] {
        enter(&mut harness, label, text);
    }
    let chi = axis(&harness, "chi");
    let Limits::Intervals(limits) = &chi.limits else { panic!("{:?}", chi.limits) };
    assert_eq!(limits[0].from_deg.get(), -30.0);
    assert_eq!((chi.speed_deg_per_s.get(), chi.overhead_s.get()), (2.5, 0.7));
    assert_eq!((chi.zero_offset_deg.get(), chi.park_deg.get()), (-0.25, 12.0));
    assert_eq!(chi.direction.0.get(), 0.01);
    assert_eq!(written_out(&harness).direct_beam_half_angle_deg.get(), 4.5);
    assert_eq!(written_out(&harness).name, "Ours");
    assert!(harness.state().results().problems.is_empty());
}

#[test]
fn the_fields_of_an_axis_find_room_in_the_column() {
    let harness = unfolded("chi");
    // Where the column of inputs ends and the lattice begins; the bar at the top is no part of it.
    let edge = harness.get_by_label_contains("Reciprocal lattice").rect().left();
    let in_column = |rect: egui::Rect| rect.left() < edge && rect.top() > 40.0;
    for field in harness.query_all_by_role(egui::Role::TextInput).filter(|field| in_column(field.rect())) {
        assert!(field.rect().right() < edge - 6.0, "{:?}: {}", field.accesskit_node().label(), field.rect());
    }
    let remove = harness.get_by_label("Remove chi limit 1").rect();
    assert!(remove.right() < edge - 6.0, "{remove}");
}

#[test]
fn travel_and_approach_are_chosen_from_lists() {
    let mut harness = unfolded("phi");
    assert_eq!(axis(&harness, "phi").limits, Limits::Endless);
    press(&mut harness, "phi travel");
    press(&mut harness, "between limits");
    press(&mut harness, "Add an interval to phi");
    let Limits::Intervals(limits) = axis(&harness, "phi").limits else { panic!("still endless") };
    assert_eq!(limits.len(), 2);
    press(&mut harness, "Remove phi limit 2");
    press(&mut harness, "phi approach");
    press(&mut harness, "from above");
    enter(&mut harness, "phi overshoot, degrees", "0.8");
    let approach = format!("{:?}", axis(&harness, "phi").approach.unwrap());
    assert!(approach.contains("Downward") && approach.contains("0.8"), "{approach}");
    assert!(harness.state().results().problems.is_empty());
}

#[test]
fn a_machine_that_does_not_hold_is_told_at_its_field_and_the_rest_stays_alive() {
    let mut harness = unfolded("omega");
    let before = harness.state().results().reach.clone().unwrap();
    // Not taken at all.
    enter(&mut harness, "omega speed, degrees per second", "0");
    assert_eq!(axis(&harness, "omega").speed_deg_per_s.get(), 4.0);
    assert!(wrong(&harness, "omega speed, degrees per second").unwrap().contains("above 0"));
    enter(&mut harness, "omega speed, degrees per second", "4");
    // Taken, but the wrong way round.
    enter(&mut harness, "omega limit 1 to, degrees", "-80");
    assert!(wrong(&harness, "omega limit 1 from, degrees").is_some());
    assert!(wrong(&harness, "omega park reading, degrees").is_none());
    assert!(Arc::ptr_eq(&before, harness.state().results().reach.as_ref().unwrap()));
    enter(&mut harness, "Peak 1 chi, degrees", "9.8");
    assert_eq!(harness.state().session().peaks[0].readings_deg.values().next().unwrap().get(), 9.8);
    // A park reading outside the limits names what would be accepted.
    enter(&mut harness, "omega limit 1 to, degrees", "-5");
    assert!(wrong(&harness, "omega park reading, degrees").unwrap().contains("accepted is -65° to -5°"));
    enter(&mut harness, "omega limit 1 to, degrees", "95");
    assert!(harness.state().results().problems.is_empty());
    assert!(harness.state().results().current_plan().is_some());
}

#[test]
fn a_cell_that_does_not_fit_marks_its_fields_and_says_what_would() {
    let mut harness = demo(0);
    enter(&mut harness, "alpha, degrees", "150");
    let told = wrong(&harness, "alpha, degrees").unwrap();
    assert!(told.contains("needs α = β = γ = 90°") && told.contains("α = 150°"), "{told}");
    assert!(wrong(&harness, "a, Å").is_some(), "lengths and angles together break the group");
    enter(&mut harness, "beta, degrees", "20");
    let told = wrong(&harness, "gamma, degrees").unwrap();
    assert!(told.contains("close no cell") && told.contains("smaller than the sum of the other two"), "{told}");
    assert!(wrong(&harness, "a, Å").is_none(), "angles alone close no cell");
    enter(&mut harness, "alpha, degrees", "90");
    enter(&mut harness, "beta, degrees", "90");
    assert!(wrong(&harness, "alpha, degrees").is_none());
    assert!(harness.state().results().current_plan().is_some());
}

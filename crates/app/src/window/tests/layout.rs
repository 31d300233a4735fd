use super::*;

/// Where something is that a person has to see, found by a part of its label.
fn place(harness: &Harness<'_, App>, part: &str) -> egui::Rect {
    harness.get_by_label_contains(part).rect()
}

/// What decides is seen in the window of a laptop without any scrolling.
#[test]
fn trust_and_verdicts_are_in_sight_on_a_laptop() {
    let screen = egui::Rect::from_min_size(egui::Pos2::ZERO, vec2(LAPTOP[0], LAPTOP[1]));
    for i in 0..DEMOS.len() {
        let harness = demo(i);
        let side = place(&harness, "This reflection").left();
        for part in ["Orientation confirmed", "Misfits: angle", "Sort by absent", "Sort by verdict", "Sort by detail"] {
            let at = place(&harness, part);
            assert!(screen.contains_rect(at) && at.right() < side, "{part}: {at}");
        }
        let picture = harness.get_by_label_contains("Reciprocal lattice").rect();
        assert!(picture.height() > 240.0, "room is left for the lattice: {picture}");
        let rows = harness.query_all_by_role(egui::Role::Row).filter(|row| row.rect().bottom() < LAPTOP[1]).count();
        assert!(rows >= 6, "{rows} rows of the table");
    }
}

#[test]
fn an_orientation_that_is_not_confirmed_says_so_above_the_lattice() {
    let mut harness = demo(0);
    press(&mut harness, "Peak 3 in use");
    let at = harness.get_by_label("Orientation unconfirmed").rect();
    assert!(at.bottom() < 120.0, "{at}");
    assert!(harness.query_all_by_label_contains("Two peaks cannot prove themselves").count() > 0);
}

#[test]
fn what_a_row_has_no_room_for_is_told_under_the_pointer() {
    let mut harness = demo(0);
    press(&mut harness, "also those absent by symmetry");
    harness.get_by_label("Filter").focus();
    harness.run_steps(2);
    harness.get_by_label("Filter").type_text("3 0 0");
    settle(&mut harness);
    let row = harness.get_by_role(egui::Role::Row).rect();
    harness.hover_at(egui::pos2(row.left() + 20.0, row.center().y));
    harness.run_steps(60);
    // P n m a: h 0 0 with odd h is absent.
    assert!(harness.query_by_label_contains("absent by symmetry: ").is_some());
}

/// Nothing of a rule is cut off by the edge of its column, whatever the rule.
#[test]
fn rules_fit_into_their_column() {
    let mut harness = demo(0);
    let edge = place(&harness, "Reciprocal lattice").left() - 6.0;
    for (rule, labels) in [
        (
            r#"Tie(axis: "omega", to: "two_theta", factor: 0.5, offset_deg: 0)"#,
            ["Factor of the tie", "Rule 1, axis it follows", "Offset of the tie, degrees"],
        ),
        (
            "Azimuth(reference: Reciprocal(h: 0, k: 0, l: 1), at_deg: 20)",
            ["Azimuth, degrees", "Rule 1 reference, kind", "Remove rule 1"],
        ),
    ] {
        harness.state_mut().opened.session.rules = vec![ron::from_str(rule).unwrap()];
        settle(&mut harness);
        for label in labels {
            let at = harness.get_by_label(label).rect();
            assert!(at.right() < edge, "{label}: {at}, {edge}");
        }
    }
}

/// The ribbon and all dials of a four-circle are seen without scrolling, and the ribbon stays where it is while it is used.
#[test]
fn the_ribbon_is_in_sight_and_does_not_move() {
    let screen = egui::Rect::from_min_size(egui::Pos2::ZERO, vec2(LAPTOP[0], LAPTOP[1]));
    for i in 0..DEMOS.len() {
        let mut harness = demo(i);
        let hkl = harness.state().results().current_plan().unwrap().list.rows[2].hkl;
        perform(&mut harness, Command::Select(hkl));
        let before = harness.get_by_label("Azimuth ribbon").rect();
        for meter in harness.query_all_by_role(egui::Role::Meter) {
            assert!(screen.contains_rect(meter.rect()) && meter.rect().top() > before.bottom());
        }
        assert!(screen.contains_rect(before), "{before}");
        for part in [0.1, 0.5, 0.9] {
            let at = before.lerp_inside(vec2(part, 0.4));
            harness.drag_at(at);
            harness.run_steps(2);
            harness.drop_at(at);
            harness.run_steps(40);
            assert_eq!(harness.get_by_label("Azimuth ribbon").rect(), before, "{part}");
        }
    }
}

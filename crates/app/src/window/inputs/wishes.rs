use std::collections::BTreeMap;

use egui::{ComboBox, Ui};
use ringwright_core::aim::Preference;
use ringwright_core::instrument::{Axis, Instrument};
use ringwright_core::quantity::Degrees;

use super::super::edits::{Edits, Field, figure, number};
use super::Bench;
use super::card::{State, card, row_name};
use super::rules;

/// Rules for the spare angles, and the choice among settings.
pub fn show(ui: &mut Ui, bench: &mut Bench<'_>) {
    let mut state = bench.state("rules", None);
    let preference = bench.state("preference", None);
    if state.0 == State::Complete {
        state = preference;
    }
    let unmet = bench.results.reach_error.clone().filter(|error| error.starts_with("rules"));
    if unmet.is_some() {
        state = (State::Missing, "do not fit the machine".to_owned());
    }
    let summary = bench.session.rules.iter().map(rules::words).collect::<Vec<_>>().join(", ");
    card(ui, "How to aim", state, &summary, |ui| {
        rules::show(ui, bench);
        // Those of one rule stand below it.
        for problem in bench.results.problems.iter().filter(|problem| problem.path == "rules") {
            super::super::edits::error_line(ui, &problem.message);
        }
        if let Some(error) = &unmet {
            super::super::edits::error_line(ui, error);
        }
        choice(ui, bench);
        bench.show_errors(ui, "preference");
    });
}

fn choice(ui: &mut Ui, bench: &mut Bench<'_>) {
    const KINDS: [&str; 2] = ["farthest from limits", "nearest to a position"];
    ui.horizontal(|ui| {
        row_name(ui, "Of settings");
        let before = usize::from(matches!(bench.session.preference, Preference::NearestTo { .. }));
        let mut chosen = before;
        let combo = ComboBox::from_id_salt("preference").width(ui.available_width() - 8.0);
        let shown = combo.show_index(ui, &mut chosen, KINDS.len(), |i| KINDS[i]);
        super::super::name_combo(ui, &shown, "Choice among settings");
        if chosen != before {
            bench.edits.forget_under("preference");
            bench.session.preference = match chosen {
                0 => Preference::FarthestFromLimits,
                _ => Preference::NearestTo { readings_deg: parked(bench.instrument) },
            };
        }
    });
    if let Preference::NearestTo { readings_deg } = &mut bench.session.preference {
        for axis in bench.instrument.into_iter().flat_map(|machine| machine.axes()) {
            position(ui, bench.edits, readings_deg, axis);
        }
    }
}

fn parked(machine: Option<&Instrument>) -> BTreeMap<ringwright_core::instrument::AxisName, Degrees> {
    let axes = machine.into_iter().flat_map(|machine| machine.axes());
    axes.filter_map(|axis| Some((axis.name.clone(), Degrees::new(axis.park_deg).ok()?))).collect()
}

fn position(
    ui: &mut Ui,
    edits: &mut Edits,
    readings: &mut BTreeMap<ringwright_core::instrument::AxisName, Degrees>,
    axis: &Axis,
) {
    ui.horizontal(|ui| {
        row_name(ui, axis.name.as_str());
        let path = format!("preference.NearestTo.readings_deg.{}", axis.name);
        let label = format!("Nearest to {}, degrees", axis.name);
        let field = Field { path: &path, label: &label, width: 80.0, hint: "any" };
        let shown = readings.get(&axis.name).map_or_else(String::new, |deg| figure(deg.get()));
        let taken = edits.field(ui, &field, &shown, |text| {
            if text.trim().is_empty() {
                return Ok(None);
            }
            Degrees::new(number(text)?).map(Some).map_err(|e| e.to_string())
        });
        match taken {
            Some(Some(deg)) => drop(readings.insert(axis.name.clone(), deg)),
            Some(None) => drop(readings.remove(&axis.name)),
            None => {}
        }
        ui.label("°");
    });
}

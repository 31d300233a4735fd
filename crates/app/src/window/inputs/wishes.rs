use std::collections::BTreeMap;

use egui::{Button, ComboBox, Ui, vec2};
use ringwright_core::aim::{Preference, Rule};
use ringwright_core::instrument::{Axis, Instrument};
use ringwright_core::quantity::Degrees;

use super::super::edits::{Edits, Field, figure, number};
use super::Bench;
use super::card::{State, card, remark, row_name};

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
    let summary = bench.session.rules.iter().map(words).collect::<Vec<_>>().join(", ");
    card(ui, "How to aim", state, &summary, |ui| {
        if let Some(machine) = bench.instrument {
            let moving = machine.axes().filter(|axis| !axis.set_by_hand).count();
            let spare = moving.saturating_sub(3);
            remark(ui, &format!("{moving} moving axes leave {spare} spare: accepted {}.", rules_in_words(spare)));
        }
        rules(ui, bench);
        bench.show_errors(ui, "rules");
        if let Some(error) = &unmet {
            super::super::edits::error_line(ui, error);
        }
        choice(ui, bench);
        bench.show_errors(ui, "preference");
    });
}

fn rules_in_words(spare: usize) -> String {
    match spare {
        0 => "is no rule".to_owned(),
        1 => "is one rule".to_owned(),
        n => format!("are {n} rules"),
    }
}

fn words(rule: &Rule) -> String {
    match rule {
        Rule::Bisecting => "bisecting".to_owned(),
        Rule::Hold { axis, at_deg } => format!("hold {axis} at {}°", figure(at_deg.get())),
        Rule::Tie { axis, to, .. } => format!("{axis} tied to {to}"),
        Rule::Azimuth { at_deg, .. } => format!("azimuth {}°", figure(at_deg.get())),
        Rule::Incidence { at_deg } => format!("incidence {}°", figure(at_deg.get())),
        Rule::Exit { at_deg } => format!("exit {}°", figure(at_deg.get())),
        Rule::BisectingAbout { axis } => format!("bisecting about {axis}"),
        other => other.word().to_owned(),
    }
}

fn rules(ui: &mut Ui, bench: &mut Bench<'_>) {
    let mut remove = None;
    for (i, rule) in bench.session.rules.iter_mut().enumerate() {
        ui.horizontal(|ui| {
            row_name(ui, if i == 0 { "Rule" } else { "and" });
            rule_kind(ui, rule, bench.instrument, i);
            if let Rule::Hold { axis, at_deg } = rule {
                let path = format!("rules[{i}].Hold.at_deg");
                let label = format!("Hold {axis} at, degrees");
                let field = Field { path: &path, label: &label, width: 58.0, hint: "" };
                if let Some(new) = bench.edits.number(ui, "at", &field, (at_deg.get(), 0.5), Degrees::new) {
                    *at_deg = new;
                }
            }
            let button = ui.add(Button::new("✕").min_size(vec2(22.0, 22.0)));
            ui.ctx().accesskit_node_builder(button.id, |node| node.set_label(format!("Remove rule {}", i + 1)));
            if button.clicked() {
                remove = Some(i);
            }
        });
    }
    if let Some(i) = remove {
        bench.edits.forget_under("rules");
        bench.session.rules.remove(i);
    }
    if ui.button("Add a rule").clicked() {
        bench.session.rules.push(Rule::Bisecting);
    }
}

fn rule_kind(ui: &mut Ui, rule: &mut Rule, machine: Option<&Instrument>, i: usize) {
    let text = match &*rule {
        Rule::Bisecting => "bisecting".to_owned(),
        Rule::Hold { axis, .. } => format!("hold {axis}"),
        other => words(other),
    };
    let combo = ComboBox::from_id_salt(("rule", i)).width(96.0).selected_text(text);
    let shown = combo.show_ui(ui, |ui| {
        if ui.selectable_label(*rule == Rule::Bisecting, "bisecting").clicked() {
            *rule = Rule::Bisecting;
        }
        let axes: Vec<&Axis> = machine.map_or_else(Vec::new, |machine| machine.axes().collect());
        for axis in axes.into_iter().filter(|axis| !axis.set_by_hand) {
            let held = matches!(rule, Rule::Hold { axis: name, .. } if *name == axis.name);
            if ui.selectable_label(held, format!("hold {}", axis.name)).clicked()
                && !held
                && let Ok(at_deg) = Degrees::new(axis.park_deg)
            {
                *rule = Rule::Hold { axis: axis.name.clone(), at_deg };
            }
        }
    });
    super::super::name_combo(ui, &shown.response, &format!("Rule {}", i + 1));
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

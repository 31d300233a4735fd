use egui::{Button, RichText, Ui, vec2};
use ringwright_core::instrument::AxisName;
use ringwright_core::quantity::{AngleUncertainty, Degrees, Index};
use ringwright_core::session::PeakDocument;

use super::super::command::Command;
use super::super::edits::{Edits, Field, figure, number};
use super::super::theme::{GAP, Tones};
use super::Bench;
use super::card::{State, card, doubt, remark};

/// The peaks found so far.
pub fn show(ui: &mut Ui, bench: &mut Bench<'_>) {
    let in_use = bench.session.peaks.iter().filter(|peak| !peak.ignored).count();
    let mut state = bench.state("peaks", None);
    if state.0 == State::Complete && in_use < 2 {
        let kept = bench.session.orientation.is_some();
        state = if kept {
            (State::Doubtful, "U kept from earlier".to_owned())
        } else {
            (State::Missing, format!("{in_use} of 2 needed"))
        };
    }
    let all = bench.session.peaks.len();
    card(ui, "Peaks found", state, &format!("{in_use} in use of {all}"), |ui| {
        if all == 0 {
            remark(ui, "None yet. Two peaks with their indices and the readings of every axis give the orientation.");
        }
        for i in 0..all {
            peak(ui, bench, i);
            bench.show_errors(ui, &format!("peaks[{i}]"));
            for note in bench.notes(&format!("peaks[{i}]")) {
                doubt(ui, &note);
            }
        }
        ui.add_space(GAP);
        if ui.button(Command::AddPeak.label()).clicked() {
            bench.commands.push(Command::AddPeak);
        }
    });
}

fn peak(ui: &mut Ui, bench: &mut Bench<'_>, i: usize) {
    let axes: Vec<AxisName> =
        bench.instrument.map_or_else(Vec::new, |machine| machine.axes().map(|axis| axis.name.clone()).collect());
    let Some(peak) = bench.session.peaks.get_mut(i) else { return };
    ui.add_space(GAP);
    ui.horizontal(|ui| {
        let mut used = !peak.ignored;
        let box_ = ui.checkbox(&mut used, RichText::new(format!("{}", i + 1)).strong());
        ui.ctx().accesskit_node_builder(box_.id, |node| node.set_label(format!("Peak {} in use", i + 1)));
        box_.on_hover_text("Whether this peak is in use; the first two in use give U");
        peak.ignored = !used;
        indices(ui, bench.edits, peak, i);
        uncertainty(ui, bench.edits, peak, i);
        let remove = Command::RemovePeak(i);
        let button = ui.add(Button::new("✕").min_size(vec2(22.0, 22.0)));
        ui.ctx().accesskit_node_builder(button.id, |node| node.set_label(remove.label()));
        if button.on_hover_text(remove.label()).clicked() {
            bench.commands.push(remove);
        }
    });
    readings(ui, bench.edits, peak, i, &axes);
}

fn indices(ui: &mut Ui, edits: &mut Edits, peak: &mut PeakDocument, i: usize) {
    for (name, value) in [("h", &mut peak.h), ("k", &mut peak.k), ("l", &mut peak.l)] {
        let (path, label) = (format!("peaks[{i}].{name}"), format!("Peak {} {name}", i + 1));
        let field = Field { path: &path, label: &label, width: 38.0, hint: name };
        if let Some(new) = edits.number(ui, "", &field, (value.get(), 1.0), Index::new) {
            *value = new;
        }
    }
}

fn uncertainty(ui: &mut Ui, edits: &mut Edits, peak: &mut PeakDocument, i: usize) {
    ui.label("±");
    let (path, label) = (format!("peaks[{i}].uncertainty_deg"), format!("Peak {} uncertainty, degrees", i + 1));
    let width = (ui.available_width() - 44.0).clamp(30.0, 60.0);
    let field = Field { path: &path, label: &label, width, hint: "σ" };
    let shown = peak.uncertainty_deg.map_or_else(String::new, |u| figure(u.get()));
    let taken = edits.field(ui, &field, &shown, |text| {
        if text.trim().is_empty() {
            return Ok(None);
        }
        AngleUncertainty::new(number(text)?).map(Some).map_err(|e| e.to_string())
    });
    if let Some(new) = taken {
        peak.uncertainty_deg = new;
    }
    ui.label("°");
}

fn readings(ui: &mut Ui, edits: &mut Edits, peak: &mut PeakDocument, i: usize, axes: &[AxisName]) {
    let quiet = Tones::in_ui(ui).quiet;
    let gap = ui.spacing().item_spacing.x;
    let count = axes.len().max(1) as f32;
    let width = ((ui.available_width() - gap * (count - 1.0)) / count).floor().max(40.0);
    ui.horizontal_wrapped(|ui| {
        for name in axes {
            ui.vertical(|ui| {
                ui.set_width(width);
                ui.spacing_mut().item_spacing.y = 0.0;
                ui.label(RichText::new(format!("{name}, °")).color(quiet).small());
                let (path, label) =
                    (format!("peaks[{i}].readings_deg.{name}"), format!("Peak {} {name}, degrees", i + 1));
                let field = Field { path: &path, label: &label, width, hint: "reading" };
                let shown = peak.readings_deg.get(name).map_or_else(String::new, |deg| figure(deg.get()));
                let take = |text: &str| Degrees::new(number(text)?).map_err(|e| e.to_string());
                if let Some(new) = edits.field(ui, &field, &shown, take) {
                    peak.readings_deg.insert(name.clone(), new);
                }
            });
        }
    });
    let strangers: Vec<AxisName> = peak.readings_deg.keys().filter(|name| !axes.contains(name)).cloned().collect();
    if !strangers.is_empty() && !axes.is_empty() {
        ui.horizontal(|ui| {
            let names = strangers.iter().map(AxisName::as_str).collect::<Vec<_>>().join(", ");
            remark(ui, &format!("readings of no axis here: {names}"));
            if ui.small_button("Drop them").clicked() {
                peak.readings_deg.retain(|name, _| axes.contains(name));
            }
        });
    }
}

use egui::{ComboBox, Grid, Ui};
use ringwright_core::instrument::Instrument;
use ringwright_core::session::MachineChoice;

use super::super::edits::figure;
use super::super::theme::Tones;
use super::Bench;
use super::card::{doubt, folded_card, remark};

/// The machine and its limits.
pub fn show(ui: &mut Ui, bench: &mut Bench<'_>) {
    let notes = bench.notes("machine");
    let state = bench.state("machine", (!notes.is_empty()).then(|| "see the note".to_owned()));
    let summary = bench.instrument.map_or_else(String::new, |machine| machine.name().to_owned());
    folded_card(ui, "Machine", state, &summary, |ui| {
        chooser(ui, bench);
        bench.show_errors(ui, "machine");
        if let Some(machine) = bench.instrument {
            limits(ui, machine);
        }
        for note in notes {
            doubt(ui, &note);
        }
    });
}

fn chooser(ui: &mut Ui, bench: &mut Bench<'_>) {
    let MachineChoice::Named(name) = &bench.session.machine else {
        remark(ui, "Written out in the session. Choosing another below replaces it.");
        let picked = names(ui, bench.machines, "as written in the session");
        replace(bench, picked);
        return;
    };
    let picked = names(ui, bench.machines, name);
    replace(bench, picked);
}

fn names(ui: &mut Ui, machines: &[String], selected: &str) -> Option<String> {
    let mut picked = None;
    let combo = ComboBox::from_id_salt("machine").width(ui.available_width() - 8.0).truncate().selected_text(selected);
    let shown = combo.show_ui(ui, |ui| {
        for name in machines {
            if ui.selectable_label(name == selected, name).clicked() && name != selected {
                picked = Some(name.clone());
            }
        }
    });
    super::super::name_combo(ui, &shown.response, "Machine");
    picked
}

fn replace(bench: &mut Bench<'_>, picked: Option<String>) {
    if let Some(name) = picked {
        bench.session.machine = MachineChoice::Named(name);
        bench.edits.forget_under("peaks");
    }
}

/// Every axis: what it does, how far it may go, how fast.
fn limits(ui: &mut Ui, instrument: &Instrument) {
    let quiet = Tones::in_ui(ui).quiet;
    let samples = instrument.sample_axes().len();
    Grid::new("axes").num_columns(4).min_row_height(15.0).spacing([10.0, 1.0]).show(ui, |ui| {
        for (i, axis) in instrument.axes().enumerate() {
            let small = |text: String| egui::RichText::new(text).small();
            ui.label(small(axis.name.to_string()));
            ui.label(small(if i < samples { "sample".to_owned() } else { "detector".to_owned() }).color(quiet));
            let spans: Vec<String> =
                axis.travel.intervals_deg().map(|(from, to)| format!("{}…{}°", figure(from), figure(to))).collect();
            ui.label(small(if spans.is_empty() { "endless".to_owned() } else { spans.join(", ") }));
            ui.label(small(if axis.set_by_hand {
                "by hand".to_owned()
            } else {
                format!("{}°/s", figure(axis.speed_deg_per_s))
            }));
            ui.end_row();
        }
    });
}

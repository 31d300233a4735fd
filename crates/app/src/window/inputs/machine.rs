use egui::{ComboBox, RichText, Ui};
use ringwright_core::instrument::{AxisName, MachineDescription};
use ringwright_core::quantity::ConeAngle;
use ringwright_core::session::MachineChoice;

use super::super::edits::Field;
use super::super::theme::Tones;
use super::card::{doubt, folded_card, remark, row_name};
use super::{Bench, axis};

/// Path of a machine that is written out in the session.
const INLINE: &str = "machine.Inline";

/// The spindle of a machine that names none.
const INNERMOST: &str = "innermost that moves";

/// The machine: by its name, or written out and open to edits.
pub fn show(ui: &mut Ui, bench: &mut Bench<'_>) {
    let notes = bench.notes("machine");
    let state = bench.state("machine", (!notes.is_empty()).then(|| "see the note".to_owned()));
    let summary = bench.instrument.map_or_else(String::new, |machine| machine.name().to_owned());
    folded_card(ui, "Machine", state, &summary, |ui| {
        match bench.session.machine.clone() {
            MachineChoice::Named(name) => by_name(ui, bench, &name),
            MachineChoice::Inline(description) => written_out(ui, bench, description),
        }
        for note in notes {
            doubt(ui, &note);
        }
    });
}

fn by_name(ui: &mut Ui, bench: &mut Bench<'_>, name: &str) {
    let picked = names(ui, bench.machines, name);
    bench.show_errors(ui, "machine");
    let machine = bench.instrument.filter(|_| bench.problems_under("machine").next().is_none());
    if let Some(machine) = machine {
        let samples = machine.sample_axes().len();
        let quiet = Tones::in_ui(ui).quiet;
        let description = machine.description();
        for (i, of) in description.sample_axes.iter().chain(&description.detector_axes).enumerate() {
            ui.horizontal(|ui| {
                ui.label(RichText::new(of.name.as_str()).small());
                let stack = if i < samples { "sample" } else { "detector" };
                let text = format!("{stack}, {}", axis::in_words(of));
                ui.add(egui::Label::new(RichText::new(text).color(quiet).small()).truncate());
            });
        }
        let help = "Writes the machine out in this session, where limits, speeds, offsets and the rest can be edited. The file it \
                    came from stays as it is.";
        if ui.button("Edit a copy in this session").on_hover_text(help).clicked() {
            bench.session.machine = MachineChoice::Inline(description.clone());
        }
    }
    replace(bench, picked);
}

fn written_out(ui: &mut Ui, bench: &mut Bench<'_>, mut description: MachineDescription) {
    let picked = names(ui, bench.machines, "written out in this session");
    name(ui, bench, &mut description);
    for (list, stack, axes) in [
        ("sample_axes", "sample", &mut description.sample_axes),
        ("detector_axes", "detector", &mut description.detector_axes),
    ] {
        for (i, of) in axes.iter_mut().enumerate() {
            let path = format!("{INLINE}.{list}[{i}]");
            axis::show(ui, bench.edits, &path, stack, of);
            bench.show_errors(ui, &path);
        }
    }
    spindle(ui, &mut description);
    bench.show_errors(ui, &format!("{INLINE}.spindle"));
    cone(ui, bench, &mut description);
    bench.show_errors(ui, &format!("{INLINE}.direct_beam_half_angle_deg"));
    bench.session.machine = MachineChoice::Inline(description);
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
        bench.edits.forget_under("machine");
    }
}

fn name(ui: &mut Ui, bench: &mut Bench<'_>, description: &mut MachineDescription) {
    let (path, width) = (format!("{INLINE}.name"), ui.available_width());
    let field = Field { path: &path, label: "Name of the machine", width, hint: "what the machine is called" };
    let shown = description.name.clone();
    if let Some(new) = bench.edits.field(ui, &field, &shown, |text| Ok(text.to_owned())) {
        description.name = new;
    }
}

fn spindle(ui: &mut Ui, description: &mut MachineDescription) {
    ui.horizontal(|ui| {
        row_name(ui, "Spindle");
        let shown = description.spindle.as_ref().map_or(INNERMOST, AxisName::as_str).to_owned();
        let mut picked = None;
        let combo = ComboBox::from_id_salt("spindle").width(150.0).selected_text(shown).show_ui(ui, |ui| {
            if ui.selectable_label(description.spindle.is_none(), INNERMOST).clicked() {
                picked = Some(None);
            }
            for axis in &description.sample_axes {
                let chosen = description.spindle.as_ref() == Some(&axis.name);
                if ui.selectable_label(chosen, axis.name.as_str()).clicked() {
                    picked = Some(Some(axis.name.clone()));
                }
            }
        });
        super::super::name_combo(ui, &combo.response, "Spindle");
        if let Some(picked) = picked {
            description.spindle = picked;
        }
    });
}

fn cone(ui: &mut Ui, bench: &mut Bench<'_>, description: &mut MachineDescription) {
    ui.horizontal(|ui| {
        let help = "Half angle of the cone about the direct beam that the detector must not enter.";
        row_name(ui, "Beam cone").on_hover_text(help);
        let path = format!("{INLINE}.direct_beam_half_angle_deg");
        let label = "Half angle of the direct-beam cone, degrees";
        let field = Field { path: &path, label, width: 50.0, hint: "" };
        let value = description.direct_beam_half_angle_deg.get();
        if let Some(new) = bench.edits.number(ui, "", &field, (value, 0.1), ConeAngle::new) {
            description.direct_beam_half_angle_deg = new;
        }
        ui.label("°");
    });
    // What belongs to the machine as a whole is told below its fields.
    let general =
        |path: &str| !["sample_axes[", "detector_axes[", "spindle", "direct_beam"].iter().any(|p| path.contains(p));
    for problem in bench.problems_under("machine").filter(|problem| general(&problem.path)) {
        super::super::edits::error_line(ui, &problem.message);
    }
    remark(ui, "Choosing a machine by its name above replaces this one.");
}

//! How far the orientation can be trusted, always in sight above the lattice: its state, the misfits of its peaks, and U.

use egui::{Align, Grid, Label, Layout, RichText, Ui, vec2};

use super::inputs;
use super::shared::Results;
use super::theme::Tones;
use super::trust;

/// Width of U with its name.
const MATRIX_WIDTH: f32 = 214.0;

/// Height of three lines.
const HEIGHT: f32 = 46.0;

/// Shows the band.
pub fn show(ui: &mut Ui, results: &Results) {
    let tones = Tones::in_ui(ui);
    let stale = results.reach_is_stale && results.busy.is_none() && results.reach.is_some();
    ui.horizontal_top(|ui| {
        let width = ui.available_width() - MATRIX_WIDTH - ui.spacing().item_spacing.x;
        ui.allocate_ui_with_layout(vec2(width, 18.0), Layout::top_down(Align::Min), |ui| {
            // The same room in every state, so that nothing below moves when the state changes.
            ui.set_min_size(vec2(width, HEIGHT));
            ui.set_max_width(width);
            ui.spacing_mut().item_spacing.y = 1.0;
            statement(ui, results);
            if stale {
                let text = "! What is shown below follows from earlier inputs: put right what is marked at the left.";
                ui.add(Label::new(RichText::new(text).color(tones.doubt).small()).wrap());
            } else if let Some(report) = results.oriented.as_ref().and_then(|oriented| oriented.report.as_ref()) {
                ui.add(Label::new(RichText::new(trust::misfits(report)).color(tones.quiet).small()).wrap());
            }
        });
        matrix(ui, results);
    });
}

fn statement(ui: &mut Ui, results: &Results) {
    let tones = Tones::in_ui(ui);
    let (state, words) = inputs::trust(results);
    ui.horizontal(|ui| {
        let (rect, _) = ui.allocate_exact_size(vec2(16.0, 18.0), egui::Sense::hover());
        inputs::mark(ui.painter(), rect.center(), state, tones);
        let words = if words == "none" { "No orientation".to_owned() } else { format!("Orientation {words}") };
        ui.label(RichText::new(words).color(tones.strong));
    });
}

fn matrix(ui: &mut Ui, results: &Results) {
    let Some(oriented) = results.oriented.as_ref().filter(|_| results.orient_error.is_none()) else { return };
    let tones = Tones::in_ui(ui);
    let u = oriented.orientation.head_from_crystal.matrix();
    ui.label(RichText::new("U").color(tones.quiet).small()).on_hover_text(
        "Takes the crystal's Cartesian frame (x along a*, z along c) into the head frame, which is the laboratory's with every \
         sample axis at angle 0. UB stands in the card Orientation.",
    );
    Grid::new("U in the band").num_columns(3).min_row_height(14.0).spacing([10.0, 0.0]).show(ui, |ui| {
        for row in 0..3 {
            for column in 0..3 {
                let text = trust::signs(&format!("{:+.6}", u[(row, column)]));
                ui.label(RichText::new(text).small().color(tones.text));
            }
            ui.end_row();
        }
    });
}

use egui::{Grid, RichText, Ui};
use ringwright_core::orient::{Compared, Mend, OrientationReport};

use super::super::command::Command;
use super::super::edits::error_line;
use super::super::shared::Results;
use super::super::theme::{GAP, Tones};
use super::super::trust;
use super::Bench;
use super::card::{State, card, doubt, remark};

/// U and its misfits, and whether to trust them.
pub fn show(ui: &mut Ui, bench: &mut Bench<'_>) {
    let (state, words) = state(bench.results);
    let summary = words.clone();
    card(ui, "Orientation", (state, words), &summary, |ui| {
        if let Some(error) = &bench.results.orient_error {
            error_line(ui, trust::peaks_wanted(bench.session).unwrap_or(error));
        }
        let Some(oriented) = &bench.results.oriented else {
            remark(ui, "Two peaks that are not parallel give U and UB.");
            return;
        };
        if bench.results.orient_error.is_some() {
            remark(ui, "Lattice and table still show the last orientation that the inputs gave.");
            return;
        }
        if !bench.results.problems.is_empty() {
            remark(ui, "Below is the last orientation that the inputs gave.");
        }
        match &oriented.report {
            Some(report) => figures(ui, bench.commands, report),
            None => {
                let text = "Kept from earlier. Two peaks or more in use take its place.";
                remark(ui, text);
            }
        }
        matrix(ui, &oriented.orientation);
        keep(ui, bench);
        bench.show_errors(ui, "orientation");
    });
}

/// How the orientation stands, with a word for it.
pub fn state(results: &Results) -> (State, String) {
    let Some(oriented) = results.oriented.as_ref().filter(|_| results.orient_error.is_none()) else {
        return (State::Missing, "none".to_owned());
    };
    if !results.problems.is_empty() {
        return (State::Doubtful, "of earlier inputs".to_owned());
    }
    match (&oriented.report, oriented.orientation.confirmed) {
        (_, true) => (State::Complete, "confirmed".to_owned()),
        (Some(report), false) if !report.pair.agrees() => (State::Missing, "unconfirmed, does not fit".to_owned()),
        (_, false) => (State::Doubtful, "unconfirmed".to_owned()),
    }
}

fn figures(ui: &mut Ui, commands: &mut Vec<Command>, report: &OrientationReport) {
    if let Some(text) = trust::doubt(report) {
        doubt(ui, &trust::signs(&text));
    }
    if let Some(third) = trust::next(report) {
        remark(ui, &trust::signs(&trust::why(third)));
        let show = Command::Select(third.hkl);
        if ui.button(show.label()).clicked() {
            commands.push(show);
        }
    } else if let Some(text) = trust::none_decides(report) {
        remark(ui, &text);
    }
    for warning in &report.warnings {
        doubt(ui, &trust::signs(&warning.to_string()));
    }
    mend(ui, &report.mend);
    ui.add_space(GAP);
    Grid::new("misfits").num_columns(4).min_row_height(16.0).spacing([10.0, 2.0]).striped(true).show(ui, |ui| {
        let quiet = Tones::in_ui(ui).quiet;
        for head in ["", "observed", "calculated", "misfit"] {
            ui.label(RichText::new(head).color(quiet).small());
        }
        ui.end_row();
        compared(ui, "angle", &report.pair.angle_deg, 3, "°");
        for (peak, d) in [&report.pair.first, &report.pair.second].into_iter().zip(&report.pair.d_angstrom) {
            compared(ui, &trust::signs(&format!("d {}", peak.hkl)), d, 4, " Å");
        }
        for peak in &report.later {
            compared(ui, &trust::signs(&format!("{} off", peak.observation.hkl)), &peak.direction_deg, 3, "°");
        }
    });
    let exact = format!("{} is met exactly, {} in its plane.", report.pair.first.hkl, report.pair.second.hkl);
    remark(ui, &trust::signs(&exact));
    if let Ok(cell) = &report.pair.cell_of_ub {
        let ([a, b, c], [al, be, ga]) = (cell.lengths(), cell.angles_deg());
        remark(ui, &format!("Cell that UB implies: {a:.4} {b:.4} {c:.4} Å, {al:.3} {be:.3} {ga:.3}°"));
    }
    others(ui, report);
}

fn compared(ui: &mut Ui, name: &str, of: &Compared, decimals: usize, unit: &str) {
    let tones = Tones::in_ui(ui);
    let plain = |value: f64| trust::signs(&format!("{value:.decimals$}{unit}"));
    ui.label(RichText::new(name).small());
    ui.label(RichText::new(plain(of.observed)).small());
    ui.label(RichText::new(plain(of.calculated)).small());
    let misfit = trust::signs(&format!("{:+.decimals$}{unit}", of.misfit()));
    let (sign, colour) = if of.agrees() { ("✓", tones.good) } else { ("!", tones.doubt) };
    let misfit = ui.label(RichText::new(format!("{sign} {misfit}")).color(colour).small());
    misfit.on_hover_text(format!("observed − calculated; the readings allow ± {:.decimals$}{unit} (1 σ)", of.sigma));
    ui.end_row();
}

fn mend(ui: &mut Ui, mend: &Mend) {
    match mend {
        Mend::NotNeeded => {}
        Mend::NoIndexChange => {
            remark(
                ui,
                "No change of indices mends it: look at the cell, the wavelength, zero offsets, and the readings.",
            );
        }
        Mend::Changes { listed, more } => {
            remark(ui, "What would mend it, the simplest first:");
            for change in listed {
                remark(ui, &trust::signs(&format!("• {}", trust::change(change))));
            }
            if *more > 0 {
                remark(ui, &format!("and {more} more"));
            }
        }
    }
}

fn others(ui: &mut Ui, report: &OrientationReport) {
    let positions = &report.others.by_position;
    let intensities = &report.others.only_intensities;
    if positions.is_empty() && intensities.is_empty() {
        return;
    }
    let name = match positions.len() + intensities.len() {
        1 => "Another way to index the two".to_owned(),
        n => format!("{n} other ways to index the two"),
    };
    ui.collapsing(name, |ui| {
        const MOST: usize = 8;
        for other in positions.iter().take(MOST) {
            remark(ui, &trust::signs(&format!("{} and {}: a third reflection can tell", other.hkl[0], other.hkl[1])));
        }
        for other in intensities.iter().take(MOST) {
            remark(ui, &trust::signs(&format!("{} and {}: only intensities can tell", other.hkl[0], other.hkl[1])));
        }
        let hidden = positions.len().saturating_sub(MOST) + intensities.len().saturating_sub(MOST);
        if hidden > 0 {
            remark(ui, &format!("and {hidden} more"));
        }
    });
}

fn matrix(ui: &mut Ui, orientation: &ringwright_core::orient::Orientation) {
    let quiet = Tones::in_ui(ui).quiet;
    let rows = [("UB, Å⁻¹", &orientation.ub, 6), ("U", orientation.head_from_crystal.matrix(), 6)];
    for (name, matrix, decimals) in rows {
        ui.horizontal_top(|ui| {
            ui.add_sized([48.0, 16.0], egui::Label::new(RichText::new(name).color(quiet).small()));
            Grid::new(name).num_columns(3).min_row_height(14.0).spacing([12.0, 0.0]).show(ui, |ui| {
                for row in 0..3 {
                    for column in 0..3 {
                        let value = matrix[(row, column)];
                        let text = trust::signs(&format!("{value:>+9.decimals$}"));
                        ui.label(RichText::new(text).small());
                    }
                    ui.end_row();
                }
            });
        });
    }
    let det = orientation.head_from_crystal.matrix().determinant();
    remark(ui, &format!("Columns of UB are a*, b*, c* in the head frame, no 2π. det U = {det:.9}"));
}

fn keep(ui: &mut Ui, bench: &mut Bench<'_>) {
    let from_peaks = bench.results.oriented.as_ref().is_some_and(|oriented| oriented.report.is_some());
    ui.horizontal(|ui| {
        for (offered, command) in
            [(from_peaks, Command::KeepOrientation), (bench.session.orientation.is_some(), Command::DropOrientation)]
        {
            if offered && ui.button(command.label()).clicked() {
                bench.commands.push(command);
            }
        }
    });
}

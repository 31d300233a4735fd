//! Questions before something is lost, and the cautions before a drive list leaves the program.

use egui::{Id, Modal, RichText, Ui, Window};

use super::command::Command;
use super::shared::Results;
use super::strip::duration;
use super::theme::{GROUP_GAP, Tones};

/// A question that waits for its answer.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Ask {
    /// The session has changes that are not saved; what was wanted.
    Unsaved(Command),
    /// Saving takes comments out of the file.
    CommentsGo,
    /// Cautions before the export.
    Export,
}

/// What was answered.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Reply {
    /// Save, then do what was wanted.
    SaveThen(Command),
    /// Do it without saving.
    WithoutSaving(Command),
    /// Save although comments go.
    SaveAnyway,
    /// Do another thing.
    Do(Command),
    /// Nothing.
    Leave,
}

impl Ask {
    /// Shows the question; gives the answer when there is one.
    pub fn show(self, ui: &Ui, file: &str, results: &Results) -> Option<Reply> {
        match self {
            Self::Unsaved(then) => modal(ui, "unsaved", |ui| unsaved(ui, file, then)),
            Self::CommentsGo => modal(ui, "comments", |ui| comments_go(ui, file)),
            Self::Export => export(ui, results),
        }
    }
}

fn modal(ui: &Ui, id: &str, content: impl FnOnce(&mut Ui) -> Option<Reply>) -> Option<Reply> {
    let shown = Modal::new(Id::unique(id)).frame(egui::Frame::window(ui.style())).show(ui.ctx(), |ui| {
        ui.set_width(420.0);
        content(ui)
    });
    let closed = shown.should_close();
    shown.inner.or(closed.then_some(Reply::Leave))
}

fn unsaved(ui: &mut Ui, file: &str, then: Command) -> Option<Reply> {
    ui.heading("Changes are not saved");
    ui.add_space(GROUP_GAP);
    ui.label(format!("What you have changed in {file} is only in this window."));
    ui.add_space(GROUP_GAP);
    ui.horizontal(|ui| {
        let save = ui.button("Save first").clicked().then_some(Reply::SaveThen(then));
        let words = if then == Command::Quit { "Quit without saving" } else { "Go on without saving" };
        let drop = ui.button(words).clicked().then_some(Reply::WithoutSaving(then));
        let stay = ui.button("Stay here").clicked().then_some(Reply::Leave);
        save.or(drop).or(stay)
    })
    .inner
}

fn comments_go(ui: &mut Ui, file: &str) -> Option<Reply> {
    ui.heading("The comments in this file will go");
    ui.add_space(GROUP_GAP);
    ui.label(format!(
        "{file} has comments, and a saved session cannot carry them. The file as it stands, comments and all, is kept \
         beside it as NAME.bak."
    ));
    ui.add_space(GROUP_GAP);
    ui.horizontal(|ui| {
        let save = ui.button("Save, keep NAME.bak").clicked().then_some(Reply::SaveAnyway);
        let other = ui.button("Save as…").clicked().then_some(Reply::Do(Command::SaveAs));
        let stay = ui.button("Not now").clicked().then_some(Reply::Leave);
        save.or(other).or(stay)
    })
    .inner
}

/// Not modal: nothing is lost by going on with other things.
fn export(ui: &Ui, results: &Results) -> Option<Reply> {
    let mut open = true;
    let shown = Window::new("Export the drive list")
        .open(&mut open)
        .collapsible(false)
        .resizable(false)
        .default_width(440.0)
        .anchor(egui::Align2::CENTER_CENTER, egui::Vec2::ZERO)
        .show(ui.ctx(), |ui| export_content(ui, results));
    let reply = shown.and_then(|shown| shown.inner).flatten();
    reply.or((!open).then_some(Reply::Leave))
}

fn export_content(ui: &mut Ui, results: &Results) -> Option<Reply> {
    let tones = Tones::in_ui(ui);
    ui.set_width(440.0);
    match results.current_plan() {
        Some(plan) => {
            let (rows, time) = (plan.list.rows.len(), duration(plan.list.total_s));
            ui.label(RichText::new(format!("{rows} rows, {time} of driving without counting")).color(tones.strong));
            if !plan.reach.orientation.confirmed {
                let text =
                    "! The orientation is unconfirmed: no third peak has agreed. Every angle in the list may be wrong.";
                ui.label(RichText::new(text).color(tones.doubt));
            }
        }
        None => {
            ui.label(RichText::new("The list is not ready.").color(tones.doubt));
        }
    }
    ui.add_space(GROUP_GAP);
    ui.label("The list is a proposal and drives nothing by itself.");
    ui.label("Interlocks, the machine's own limits, the facility's rules and the responsible scientist decide.");
    ui.label(RichText::new("Make the first run with the shutter closed.").color(tones.strong));
    ui.add_space(GROUP_GAP);
    ui.horizontal(|ui| {
        let ready = results.current_plan().is_some_and(|plan| !plan.list.rows.is_empty());
        let offer = |ui: &mut Ui, command: Command| {
            ui.add_enabled(ready, egui::Button::new(command.label())).clicked().then_some(Reply::Do(command))
        };
        let choose = offer(ui, Command::ExportChoose);
        let path = offer(ui, Command::ExportByPath);
        let stay = ui.button("Not now").clicked().then_some(Reply::Leave);
        choose.or(path).or(stay)
    })
    .inner
}

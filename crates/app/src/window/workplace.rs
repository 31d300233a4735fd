//! The layout: inputs at the left as a thread of cards, the lattice above the table in the middle, the selected reflection
//! at the right, the next step below.

use egui::{CentralPanel, Frame, Margin, MenuBar, Panel, RichText, ScrollArea, Stroke, ThemePreference, Ui};

use ringwright_core::session::DEMOS;

use super::App;
use super::band;
use super::command::Command;
use super::edits::{Edits, Field};
use super::inputs::{self, Bench};
use super::shared::{Picked, Results};
use super::strip;
use super::theme::{GAP, Tones};
use super::views::{AzimuthRibbon, LatticeView, PickedSettings, ReflectionTable, ShownKinds, axis_dials};

/// What the views keep from frame to frame.
#[derive(Default)]
pub struct Views {
    pub(super) lattice: LatticeView,
    pub(super) table: ReflectionTable,
    pub(super) settings: PickedSettings,
    pub(super) azimuth: AzimuthRibbon,
    pub(super) shown: ShownKinds,
}

/// Width of the left column.
const INPUTS_WIDTH: f32 = 326.0;

/// Width of the right column.
const DETAIL_WIDTH: f32 = 296.0;

impl eframe::App for App {
    fn logic(&mut self, ctx: &egui::Context, _frame: &mut eframe::Frame) {
        self.keep_up();
        self.go_on(ctx);
        if self.results.busy.is_some() {
            ctx.request_repaint_after(std::time::Duration::from_millis(100));
        }
        if ctx.input(|i| i.viewport().close_requested()) && !self.may_close() {
            ctx.send_viewport_cmd(egui::ViewportCommand::CancelClose);
        }
    }

    fn ui(&mut self, ui: &mut Ui, _frame: &mut eframe::Frame) {
        let mut commands = keys(ui);
        self.top(ui, &mut commands);
        self.bottom(ui, &mut commands);
        self.left(ui, &mut commands);
        self.views.settings.update(self.results.reach.as_ref(), &self.picked);
        self.views.azimuth.update(ui.ctx(), &self.results, &self.picked);
        self.right(ui, &mut commands);
        self.middle(ui);
        let file = self.opened.file().to_owned();
        if let Some(reply) = self.ask.and_then(|ask| ask.show(ui, &file, &self.results)) {
            self.reply(ui.ctx(), reply);
        }
        for command in commands {
            self.perform(ui.ctx(), command);
        }
        // An edit of this frame is worked on at once, not after the next event.
        self.keep_up();
    }
}

/// The commands whose keys were pressed.
fn keys(ui: &Ui) -> Vec<Command> {
    let pressed = |command: &Command| {
        let shortcut = command.shortcut();
        shortcut.is_some_and(|keys| ui.input_mut(|input| input.consume_shortcut(&keys)))
    };
    Command::WITH_KEYS.into_iter().filter(pressed).collect()
}

fn bar(ui: &Ui, margin: i8) -> Frame {
    let tones = Tones::in_ui(ui);
    Frame::new().fill(tones.card).inner_margin(Margin::symmetric(10, margin)).stroke(Stroke::NONE)
}

impl App {
    fn top(&mut self, ui: &mut Ui, commands: &mut Vec<Command>) {
        let frame = bar(ui, 5);
        Panel::top("top").frame(frame).show(ui, |ui| {
            MenuBar::new().ui(ui, |ui| {
                menu(ui, "Session", commands, session_menu);
                menu(ui, "View", commands, view_menu);
                ui.separator();
                let tones = Tones::in_ui(ui);
                let width = (ui.available_width() - 420.0).clamp(120.0, 460.0);
                let field = Field { path: "title", label: "Title of the session", width, hint: "title of the session" };
                let shown = self.opened.session.title.clone();
                if let Some(title) = self.edits.field(ui, &field, &shown, |text| Ok(text.to_owned())) {
                    self.opened.session.title = title;
                }
                let state = match (self.opened.path().is_some(), self.is_edited) {
                    (false, _) => "unsaved copy",
                    (true, true) => "changed, not saved",
                    (true, false) => "saved",
                };
                ui.label(RichText::new(state).color(if self.is_edited { tones.doubt } else { tones.quiet }));
                ui.with_layout(egui::Layout::right_to_left(egui::Align::Center), |ui| {
                    for command in [Command::Export, Command::Save, Command::Open] {
                        press(ui, command, commands);
                    }
                });
            });
        });
    }

    fn bottom(&mut self, ui: &mut Ui, commands: &mut Vec<Command>) {
        let frame = bar(ui, 6);
        Panel::bottom("next").frame(frame).show(ui, |ui| {
            let next = strip::next_step(&self.opened.session, &self.edits, &self.results);
            strip::show(ui, &next, &self.results, self.message.as_ref(), commands);
        });
        if self.files.bar_is_open() {
            let named = Panel::bottom("path").frame(frame).show(ui, |ui| {
                let own = self.opened.path().map(std::path::Path::to_owned);
                let comments = self.opened.has_comments();
                self.files.show_bar(ui, |path| {
                    let goes = comments && own.as_deref() == Some(path);
                    goes.then(|| {
                        "Its comments will go; the file as it stands is kept beside it as NAME.bak.".to_owned()
                    })
                })
            });
            if let Some(named) = named.inner {
                self.take_file(&named);
            }
        }
    }

    fn left(&mut self, ui: &mut Ui, commands: &mut Vec<Command>) {
        let frame =
            Frame::new().fill(Tones::in_ui(ui).ground).inner_margin(Margin { left: 6, right: 0, top: 2, bottom: 0 });
        Panel::left("inputs").exact_size(INPUTS_WIDTH).resizable(false).frame(frame).show(ui, |ui| {
            let Self { opened, edits, results, instrument, machines, .. } = self;
            let instrument = instrument.as_ref();
            let misfits = results.problems.iter().flat_map(|problem| {
                let fields = inputs::fields_of(&opened.session, problem);
                fields.into_iter().map(|field| (field, problem.message.clone()))
            });
            edits.mark(misfits);
            let mut bench = Bench { session: &mut opened.session, edits, results, instrument, machines, commands };
            inputs::show(ui, &mut bench);
        });
    }

    fn right(&mut self, ui: &mut Ui, commands: &mut Vec<Command>) {
        let frame = Frame::new().fill(Tones::in_ui(ui).card).inner_margin(Margin::symmetric(10, 6));
        Panel::right("reflection").exact_size(DETAIL_WIDTH).resizable(false).frame(frame).show(ui, |ui| {
            ScrollArea::vertical().auto_shrink(false).show(ui, |ui| {
                let Self { edits, results, picked, views, .. } = self;
                ui.horizontal(|ui| {
                    ui.label(RichText::new("This reflection").color(Tones::in_ui(ui).quiet));
                    chooser(ui, edits, results, picked);
                });
                edits.show_errors(ui, "reflection", &[]);
                axis_dials(ui, results, picked, &views.azimuth, &mut views.settings);
                if let Some(hkl) = picked.hkl.filter(|_| views.settings.shown_setting().is_some()) {
                    ui.add_space(GAP);
                    press(ui, Command::AddPredictedPeak(hkl), commands);
                }
            });
        });
    }

    fn middle(&mut self, ui: &mut Ui) {
        CentralPanel::no_frame().show(ui, |ui| self.lattice_above_table(ui));
    }

    fn lattice_above_table(&mut self, ui: &mut Ui) {
        let tones = Tones::in_ui(ui);
        let table = Frame::new().fill(tones.card).inner_margin(Margin::symmetric(8, 6));
        let Self { results, picked, views, .. } = self;
        picked.hovered = None;
        let ground = Frame::new().fill(tones.card).inner_margin(Margin::symmetric(10, 5));
        Panel::top("trust").frame(ground).show(ui, |ui| band::show(ui, results));
        let height = ui.available_height();
        Panel::bottom("table")
            .default_size(height * 0.42)
            .min_size(150.0)
            .max_size(height - 200.0)
            .resizable(true)
            .frame(table)
            .show(ui, |ui| {
                ui.set_min_height(ui.available_height());
                views.table.show(ui, results, picked, &mut views.shown);
            });
        CentralPanel::default().frame(Frame::new().fill(tones.ground)).show(ui, |ui| {
            views.lattice.show(ui, results, picked, &views.settings, &mut views.shown);
        });
    }
}

/// A field to select any reflection by its indices, wanted or not.
fn chooser(ui: &mut Ui, edits: &mut Edits, results: &Results, picked: &mut Picked) {
    if results.reach.is_none() {
        return;
    }
    let width = ui.available_width();
    let field = Field { path: "reflection", label: "Show reflection, h k l", width, hint: "h k l" };
    let shown = picked.hkl.map_or_else(String::new, |hkl| [hkl.h, hkl.k, hkl.l].map(super::edits::figure).join(" "));
    if let Some(hkl) = edits.field(ui, &field, &shown, inputs::read_hkl) {
        picked.hkl = Some(hkl);
    }
}

fn press(ui: &mut Ui, command: Command, commands: &mut Vec<Command>) {
    let fill = ui.visuals().widgets.noninteractive.weak_bg_fill;
    let button = ui.add(egui::Button::new(command.label()).fill(fill));
    let button = match command.shortcut() {
        Some(keys) => button.on_hover_text(ui.ctx().format_shortcut(&keys)),
        None => button,
    };
    if button.clicked() {
        commands.push(command);
    }
}

fn menu(ui: &mut Ui, name: &str, commands: &mut Vec<Command>, content: impl FnOnce(&mut Ui, &mut Vec<Command>)) {
    ui.menu_button(name, |ui| content(ui, commands));
}

fn item(ui: &mut Ui, command: Command, commands: &mut Vec<Command>) {
    let keys = command.shortcut().map_or_else(String::new, |keys| ui.ctx().format_shortcut(&keys));
    if ui.add(egui::Button::new(command.label()).shortcut_text(keys)).clicked() {
        commands.push(command);
    }
}

fn session_menu(ui: &mut Ui, commands: &mut Vec<Command>) {
    for command in [Command::Open, Command::OpenByPath] {
        item(ui, command, commands);
    }
    ui.menu_button("Begin with a demo", |ui| {
        for i in 0..DEMOS.len() {
            item(ui, Command::OpenDemo(i), commands);
        }
    });
    ui.separator();
    for command in [Command::Save, Command::SaveAs, Command::SaveAsByPath] {
        item(ui, command, commands);
    }
    ui.separator();
    item(ui, Command::Export, commands);
    ui.separator();
    item(ui, Command::Quit, commands);
}

fn view_menu(ui: &mut Ui, commands: &mut Vec<Command>) {
    for theme in [ThemePreference::Light, ThemePreference::Dark, ThemePreference::System] {
        item(ui, Command::Theme(theme), commands);
    }
    ui.separator();
    for command in [Command::Larger, Command::Smaller] {
        item(ui, command, commands);
    }
}

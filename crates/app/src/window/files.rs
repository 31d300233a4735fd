//! How a person names a file: the system's dialogue on a worker, or a path field of our own that needs nothing of the
//! system. A system without a working dialogue answers just as one whose dialogue was cancelled, so after either the path
//! field opens by itself, in a bar that blocks nothing.

use std::path::{Path, PathBuf};
use std::sync::mpsc::{Receiver, TryRecvError, channel};

use egui::{Key, TextEdit, Ui};

use super::edits::error_line;
use super::theme::Tones;

/// What a file is wanted for.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Purpose {
    /// A session to open.
    Open,
    /// Where to save the session.
    SaveAs,
    /// Where to write the drive list.
    Export,
}

impl Purpose {
    fn label(self) -> &'static str {
        match self {
            Self::Open => "Path of the session",
            Self::SaveAs => "Path to save to",
            Self::Export => "Path for the drive list",
        }
    }

    fn verb(self, replaces: bool) -> &'static str {
        match (self, replaces) {
            (Self::Open, _) => "Open this file",
            (Self::SaveAs, false) => "Save here",
            (Self::Export, false) => "Export here",
            (Self::SaveAs | Self::Export, true) => "Replace that file",
        }
    }

    fn ending(self) -> &'static str {
        if self == Self::Export { "csv" } else { "ron" }
    }
}

/// A file that a person has named.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Named {
    /// What for.
    pub purpose: Purpose,
    /// Its path.
    pub path: PathBuf,
}

/// The bar with the path field.
#[derive(Debug, Clone)]
struct PathBar {
    purpose: Purpose,
    text: String,
    /// Why it opened by itself.
    because: &'static str,
    error: Option<String>,
    fresh: bool,
}

/// Asks a person for a file, beginning at a path, and waits; nothing if there is no answer.
pub type Dialogue = fn(Purpose, &Path) -> Option<PathBuf>;

/// Dialogues and path field.
#[derive(Debug)]
pub struct Files {
    dialogue: Dialogue,
    waiting: Option<(Purpose, PathBuf, Receiver<Option<PathBuf>>)>,
    bar: Option<PathBar>,
}

impl Files {
    /// With a dialogue, and the path field where that gives nothing.
    pub fn new(dialogue: Dialogue) -> Self {
        Self { dialogue, waiting: None, bar: None }
    }

    /// Asks the dialogue on a worker. `start` is a path to begin with; `wake` is called when there is an answer.
    pub fn ask_system(&mut self, purpose: Purpose, start: &Path, wake: impl Fn() + Send + 'static) {
        if self.waiting.is_some() {
            return;
        }
        let (sender, receiver) = channel();
        let (begin, dialogue) = (start.to_owned(), self.dialogue);
        let started = std::thread::Builder::new().name("file dialogue".to_owned()).spawn(move || {
            // Nobody listens any more once the window is closed.
            let _ = sender.send(dialogue(purpose, &begin));
            wake();
        });
        match started {
            Ok(_) => self.waiting = Some((purpose, start.to_owned(), receiver)),
            Err(_) => self.ask_path(purpose, start, "The system's file dialogue did not start."),
        }
    }

    /// Opens the path field.
    pub fn ask_path(&mut self, purpose: Purpose, start: &Path, because: &'static str) {
        self.bar = Some(PathBar { purpose, text: start.display().to_string(), because, error: None, fresh: true });
    }

    /// The answer of the system's dialogue, if it has come.
    pub fn collect(&mut self) -> Option<Named> {
        let (purpose, start, receiver) = self.waiting.as_ref()?;
        let (purpose, start) = (*purpose, start.clone());
        let path = match receiver.try_recv() {
            Err(TryRecvError::Empty) => return None,
            Ok(path) => path,
            Err(TryRecvError::Disconnected) => None,
        };
        self.waiting = None;
        if path.is_none() {
            self.ask_path(purpose, &start, "The system's file dialogue gave no file. A path can be typed instead.");
        }
        path.map(|path| Named { purpose, path })
    }

    /// Whether the system's dialogue is open.
    pub fn is_waiting(&self) -> bool {
        self.waiting.is_some()
    }

    /// Whether the bar is open.
    pub fn bar_is_open(&self) -> bool {
        self.bar.is_some()
    }

    /// Closes the bar: the file was taken.
    pub fn close_bar(&mut self) {
        self.bar = None;
    }

    /// Shows in the bar why a file was not taken. Without a bar the message is given back.
    pub fn refuse(&mut self, message: String) -> Option<String> {
        match &mut self.bar {
            Some(bar) => {
                bar.error = Some(message);
                None
            }
            None => Some(message),
        }
    }

    /// The bar; gives a path when one was entered.
    pub fn show_bar(&mut self, ui: &mut Ui, note: impl Fn(&Path) -> Option<String>) -> Option<Named> {
        let bar = self.bar.as_mut()?;
        let mut named = None;
        let mut close = false;
        ui.horizontal(|ui| {
            let label = ui.label(bar.purpose.label());
            let width = (ui.available_width() - 190.0).max(120.0);
            let hint = format!("for example ~/night.{}", bar.purpose.ending());
            let field = TextEdit::singleline(&mut bar.text).hint_text(hint).desired_width(width);
            let field = ui.add(field).labelled_by(label.id);
            if std::mem::take(&mut bar.fresh) {
                field.request_focus();
            }
            if field.changed() {
                bar.error = None;
            }
            let path = full_path(&bar.text);
            let replaces = bar.purpose != Purpose::Open && path.as_ref().is_some_and(|path| path.is_file());
            let entered = field.lost_focus() && ui.input(|i| i.key_pressed(Key::Enter)) && !replaces;
            let button = ui.add_enabled(path.is_some(), egui::Button::new(bar.purpose.verb(replaces)));
            if button.clicked() || (entered && path.is_some()) {
                named = path.map(|path| Named { purpose: bar.purpose, path });
            }
            close = ui.button("Close").clicked() || (field.has_focus() && ui.input(|i| i.key_pressed(Key::Escape)));
        });
        let quiet = Tones::in_ui(ui).quiet;
        if !bar.because.is_empty() {
            ui.label(egui::RichText::new(bar.because).color(quiet).small());
        }
        if let Some(note) = full_path(&bar.text).and_then(|path| note(&path)) {
            ui.label(egui::RichText::new(note).color(quiet).small());
        }
        if let Some(error) = &bar.error {
            error_line(ui, error);
        }
        if close {
            self.bar = None;
        }
        named
    }
}

/// The dialogue of the system.
pub fn system_dialogue(purpose: Purpose, start: &Path) -> Option<PathBuf> {
    let words = if purpose == Purpose::Export { "Drive list" } else { "Session" };
    let mut dialogue = rfd::FileDialog::new().add_filter(words, &[purpose.ending()]);
    if let Some(folder) = start.parent().filter(|folder| folder.is_dir()) {
        dialogue = dialogue.set_directory(folder);
    }
    if let Some(name) = start.file_name().filter(|_| purpose != Purpose::Open) {
        dialogue = dialogue.set_file_name(name.to_string_lossy());
    }
    match purpose {
        Purpose::Open => dialogue.pick_file(),
        Purpose::SaveAs | Purpose::Export => dialogue.save_file(),
    }
}

/// The path that a person has typed: `~` is the home folder; nothing for an empty text.
fn full_path(text: &str) -> Option<PathBuf> {
    let text = text.trim();
    if text.is_empty() {
        return None;
    }
    let home = std::env::var_os("HOME").map(PathBuf::from);
    match (text.strip_prefix("~/"), home) {
        (Some(rest), Some(home)) => Some(home.join(rest)),
        _ => Some(PathBuf::from(text)),
    }
}

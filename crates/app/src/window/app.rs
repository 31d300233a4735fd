use std::path::{Path, PathBuf};
use std::sync::Arc;

use ringwright_core::instrument::Instrument;
use ringwright_core::session::{DEMOS, MachineLibrary, OpenedSession, Session, demo};

use super::ask::{Ask, Reply};
use super::command::Command;
use super::desk::Desk;
use super::edits::Edits;
use super::files::{Dialogue, Files, Named, Purpose, system_dialogue};
use super::shared::{Picked, Results};
use super::strip::Message;
use super::workplace::Views;
use super::{Start, theme};

/// The window's application. The document is `opened.session`; everything else here is a view of it or of what follows
/// from it.
pub struct App {
    pub(super) opened: OpenedSession,
    pub(super) edits: Edits,
    pub(super) results: Results,
    pub(super) picked: Picked,
    pub(super) views: Views,
    pub(super) files: Files,
    pub(super) ask: Option<Ask>,
    pub(super) message: Option<Message>,
    /// The machine as it is chosen now; a session that does not fit together can still have one.
    pub(super) instrument: Option<Instrument>,
    pub(super) machines: Vec<String>,
    /// A folder with more machine files.
    machine_folder: Option<PathBuf>,
    pub(super) is_edited: bool,
    pub(super) desk: Desk,
    pub(super) wake: Arc<dyn Fn() + Send + Sync>,
    /// What the desk was asked about last.
    seen: Option<Session>,
    /// Whether it is known that saving takes comments out of the file.
    comments_may_go: bool,
    may_quit: bool,
    /// What to do once the session has been saved under a name.
    after_save: Option<Command>,
}

/// What is different where there is nobody to ask.
#[derive(Debug, Clone)]
pub struct Options {
    /// How a person is asked for a file.
    pub dialogue: Dialogue,
    /// A folder with more machine files, looked through after those of the program and those beside the session.
    pub machines: Option<PathBuf>,
}

impl Default for Options {
    fn default() -> Self {
        Self { dialogue: system_dialogue, machines: None }
    }
}

impl App {
    /// Opens on a session.
    ///
    /// # Errors
    /// If the session cannot be opened; the message says why.
    pub fn new(ctx: &egui::Context, start: &Start, options: Options) -> Result<Self, String> {
        theme::apply(ctx);
        let opened = match start {
            Start::Demo(name) => {
                let demo = demo(name).ok_or_else(|| format!("no demo is called {name:?}"))?;
                demo.open().map_err(|error| error.to_string())?
            }
            Start::File(path) => OpenedSession::open(path).map_err(|error| error.to_string())?,
        };
        let waker = ctx.clone();
        let wake: Arc<dyn Fn() + Send + Sync> = Arc::new(move || waker.request_repaint());
        let woken = Arc::clone(&wake);
        let desk = Desk::new(move || woken()).map_err(|error| format!("no thread for the work: {error}"))?;
        let machines = opened.library(options.machines.clone()).names();
        Ok(Self {
            opened,
            edits: Edits::default(),
            results: Results::default(),
            picked: Picked::default(),
            views: Views::default(),
            files: Files::new(options.dialogue),
            ask: None,
            message: None,
            instrument: None,
            machines,
            machine_folder: options.machines,
            is_edited: false,
            desk,
            wake,
            seen: None,
            comments_may_go: false,
            may_quit: false,
            after_save: None,
        })
    }

    /// The session as it is in the window.
    pub fn session(&self) -> &Session {
        &self.opened.session
    }

    /// What follows from it, as far as it is known.
    pub fn results(&self) -> &Results {
        &self.results
    }

    /// The reflection that is selected.
    pub fn picked(&self) -> &Picked {
        &self.picked
    }

    /// Whether all work is done.
    pub fn is_settled(&self) -> bool {
        let rests = self.results.busy.is_none() && !self.files.is_waiting() && !self.views.azimuth.is_waiting();
        rests && self.seen.as_ref() == Some(&self.opened.session)
    }

    /// Takes in what workers have found and asks anew where the document has changed.
    pub(super) fn keep_up(&mut self) {
        self.desk.collect(&mut self.results);
        if let Some(named) = self.files.collect() {
            self.take_file(&named);
        }
        if self.seen.as_ref() != Some(&self.opened.session) {
            self.ask_desk();
        }
    }

    /// Where machines are looked for.
    pub(super) fn library(&self) -> MachineLibrary {
        self.opened.library(self.machine_folder.clone())
    }

    pub(super) fn ask_desk(&mut self) {
        let session = self.opened.session.clone();
        let library = self.library();
        if self.seen.as_ref().is_none_or(|seen| seen.machine != session.machine) {
            // While its description does not hold, the machine as it was keeps the fields of peaks and rules alive.
            self.instrument = session.resolve_machine(&library).ok().or(self.instrument.take());
        }
        self.is_edited = self.opened.is_edited();
        self.seen = Some(session.clone());
        self.desk.ask(session, library, &mut self.results);
    }

    /// Whether the window may close now; if not, the question is asked.
    pub(super) fn may_close(&mut self) -> bool {
        if !self.may_quit && self.opened.is_edited() {
            self.ask = Some(Ask::Unsaved(Command::Quit));
            return false;
        }
        true
    }

    /// Begins with another session. Nothing of the old one stays.
    fn replace(&mut self, opened: OpenedSession) {
        self.message = Some(Message { text: format!("Opened {}", opened.file()), failed: false });
        self.machines = opened.library(self.machine_folder.clone()).names();
        self.instrument = None;
        self.opened = opened;
        self.edits = Edits::default();
        self.results = Results::default();
        self.picked = Picked::default();
        self.views = Views::default();
        self.comments_may_go = false;
        self.seen = None;
        self.files.close_bar();
    }

    pub(super) fn open_demo(&mut self, i: usize) {
        let Some(demo) = DEMOS.get(i) else { return };
        match demo.open() {
            Ok(opened) => self.replace(opened),
            Err(error) => self.fail(error.to_string()),
        }
    }

    /// Opens, saves or exports to a path that was chosen.
    pub(super) fn take_file(&mut self, named: &Named) {
        let done = match named.purpose {
            Purpose::Open => {
                OpenedSession::open(&named.path).map_err(|e| e.to_string()).map(|opened| self.replace(opened))
            }
            Purpose::SaveAs => self.save_as(&with_ending(&named.path, "ron")),
            Purpose::Export => self.export(&with_ending(&named.path, "csv")),
        };
        match done {
            Ok(()) => self.files.close_bar(),
            Err(error) => {
                if let Some(error) = self.files.refuse(error) {
                    self.fail(error);
                }
            }
        }
    }

    pub(super) fn fail(&mut self, text: String) {
        self.message = Some(Message { text, failed: true });
    }

    pub(super) fn save(&mut self, comments_may_go: bool) {
        self.comments_may_go |= comments_may_go;
        if self.opened.path().is_none() {
            return self.ask_file(Purpose::SaveAs, false);
        }
        if self.opened.has_comments() && !self.comments_may_go {
            self.ask = Some(Ask::CommentsGo);
            return;
        }
        match self.opened.save() {
            Ok(outcome) => self.saved(&outcome),
            Err(error) => self.fail(error.to_string()),
        }
    }

    /// Saves, then does what was wanted. Where a name is needed first, what was wanted is left for another time.
    pub(super) fn save_then(&mut self, ctx: &egui::Context, then: Command) {
        self.after_save = Some(then);
        self.save(true);
        self.go_on(ctx);
    }

    /// Does what was to be done after a save, once nothing is unsaved.
    pub(super) fn go_on(&mut self, ctx: &egui::Context) {
        let still_asking = self.ask.is_some() || self.files.is_waiting() || self.files.bar_is_open();
        if self.after_save.is_none() || (self.is_edited && still_asking) {
            return;
        }
        // Where the save was given up, so is what was to follow it.
        let then = self.after_save.take().filter(|_| !self.is_edited);
        if let Some(then) = then {
            self.perform(ctx, then);
        }
    }

    fn save_as(&mut self, path: &Path) -> Result<(), String> {
        let outcome = self.opened.save_as(path).map_err(|error| error.to_string())?;
        self.machines = self.library().names();
        self.saved(&outcome);
        Ok(())
    }

    fn saved(&mut self, outcome: &ringwright_core::session::SaveOutcome) {
        self.is_edited = false;
        let mut text = format!("Saved {}", outcome.file.display());
        if let Some(backup) = &outcome.backup {
            let why = if outcome.changed_elsewhere { "someone else had changed it; " } else { "" };
            text.push_str(&format!("; {why}the old file is kept as {}", backup.display()));
        }
        self.message = Some(Message { text, failed: false });
    }

    fn export(&mut self, path: &Path) -> Result<(), String> {
        let plan = self.results.current_plan().ok_or("the drive list is not ready yet; accepted is a list that is")?;
        super::export::write(path, plan, &self.opened.session.title)?;
        let text = format!("Exported {} rows to {}", plan.list.rows.len(), path.display());
        self.message = Some(Message { text, failed: false });
        Ok(())
    }

    /// Asks for a file, in the system's dialogue or in the path field.
    pub(super) fn ask_file(&mut self, purpose: Purpose, by_path: bool) {
        let start = self.start_path(purpose);
        if by_path {
            self.files.ask_path(purpose, &start, "");
        } else {
            let wake = Arc::clone(&self.wake);
            self.files.ask_system(purpose, &start, move || wake());
        }
    }

    fn start_path(&self, purpose: Purpose) -> PathBuf {
        let folder = self.opened.path().and_then(Path::parent).map_or_else(home, Path::to_owned);
        let name = self.opened.file().trim_start_matches("demo ");
        let stem = Path::new(name).file_stem().map_or_else(|| "night".into(), |s| s.to_string_lossy());
        match purpose {
            Purpose::Open => folder.join(""),
            Purpose::SaveAs => folder.join(format!("{stem}.ron")),
            Purpose::Export => folder.join(format!("{stem}-list.csv")),
        }
    }

    pub(super) fn reply(&mut self, ctx: &egui::Context, reply: Reply) {
        self.ask = None;
        match reply {
            Reply::Leave => self.after_save = None,
            Reply::SaveAnyway => {
                self.save(true);
                self.go_on(ctx);
            }
            Reply::SaveThen(command) => self.save_then(ctx, command),
            Reply::WithoutSaving(command) => self.perform_at_once(ctx, command),
            Reply::Do(command) => self.perform(ctx, command),
        }
    }

    pub(super) fn quit(&mut self, ctx: &egui::Context) {
        self.may_quit = true;
        ctx.send_viewport_cmd(egui::ViewportCommand::Close);
    }
}

/// A name without an ending gets the customary one.
fn with_ending(path: &Path, ending: &str) -> PathBuf {
    if path.extension().is_some() { path.to_owned() } else { path.with_extension(ending) }
}

fn home() -> PathBuf {
    std::env::var_os("HOME").map_or_else(|| PathBuf::from("."), PathBuf::from)
}

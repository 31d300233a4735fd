//! The window: one workplace from the inputs to the drive list.
//!
//! [`App`] holds the document and what follows from it. A frame goes: take in what workers have found, show the layout
//! (`workplace`), carry out what was asked for (`perform`), ask the worker anew where the document has changed (`desk`,
//! `derive`). Views read and never execute; what a person is typing lives apart from the document (`edits`).

mod app;
mod ask;
mod band;
mod command;
mod derive;
mod desk;
mod edits;
mod export;
mod files;
mod inputs;
mod perform;
mod shared;
mod strip;
#[cfg(test)]
#[allow(clippy::unwrap_used, clippy::expect_used, clippy::panic)]
mod tests;
mod theme;
mod trust;
pub mod views;
mod workplace;

use std::path::PathBuf;
use std::sync::atomic::{AtomicBool, Ordering};

pub use app::{App, Options};
pub use command::Command;
pub use files::{Dialogue, Purpose};
pub use shared::{Busy, Picked, Plan, Reach, Results};

/// What the window opens on.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Start {
    /// A demo, by its name among those of the program.
    Demo(&'static str),
    /// A session file.
    File(PathBuf),
}

/// Opens the window and comes back when it is closed. `machines` is a folder with more machine files.
///
/// # Errors
/// If the session cannot be opened, or if there is no display, no GL or no X library; the message says which.
pub fn open(start: Start, machines: Option<PathBuf>) -> Result<(), String> {
    let viewport = egui::ViewportBuilder::default()
        .with_title("Ringwright")
        .with_app_id("ringwright")
        .with_inner_size([1280.0, 800.0])
        .with_min_inner_size([1000.0, 640.0]);
    let options = eframe::NativeOptions { viewport, renderer: eframe::Renderer::Glow, ..Default::default() };
    let create = move |cc: &eframe::CreationContext<'_>| -> Result<Box<dyn eframe::App>, Box<dyn std::error::Error + Send + Sync>> {
        let app = App::new(&cc.egui_ctx, &start, Options { machines, ..Options::default() })?;
        OPENED.store(true, Ordering::Relaxed);
        Ok(Box::new(app))
    };
    eframe::run_native("ringwright", options, Box::new(create)).map_err(|error| error.to_string())
}

static OPENED: AtomicBool = AtomicBool::new(false);

/// Whether the window has shown: before that, whatever fails is one more reason without a window.
pub fn has_opened() -> bool {
    OPENED.load(Ordering::Relaxed)
}

/// Gives a list to choose from its name for whoever cannot see it.
fn name_combo(ui: &egui::Ui, response: &egui::Response, name: &str) {
    ui.ctx().accesskit_node_builder(response.id, |node| node.set_label(name));
}

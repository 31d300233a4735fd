use std::sync::OnceLock;
use std::time::{Duration, Instant};

use indicatif::{ProgressBar, ProgressStyle};
use ringwright_core::pace::Pace;

/// Work that takes no longer than this shows no bar.
const PATIENCE: Duration = Duration::from_secs(1);

/// A progress bar on the error stream that appears only when the work takes long and a person watches.
pub struct Progress {
    what: &'static str,
    began: Instant,
    watched: bool,
    bar: OnceLock<ProgressBar>,
}

impl Progress {
    pub fn new(what: &'static str, watched: bool) -> Self {
        Self { what, began: Instant::now(), watched, bar: OnceLock::new() }
    }

    fn new_bar(&self) -> ProgressBar {
        let bar = ProgressBar::new(1).with_message(self.what);
        match ProgressStyle::with_template("{msg} [{wide_bar}] {percent} %, {eta} left") {
            Ok(style) => bar.with_style(style.progress_chars("=> ")),
            Err(_) => bar,
        }
    }
}

impl Pace for Progress {
    fn proceed(&self, done: usize, of: usize) -> bool {
        if self.watched && self.began.elapsed() > PATIENCE {
            let bar = self.bar.get_or_init(|| self.new_bar());
            bar.set_length(of as u64);
            bar.set_position(done as u64);
        }
        true
    }
}

impl Drop for Progress {
    fn drop(&mut self) {
        if let Some(bar) = self.bar.get() {
            bar.finish_and_clear();
        }
    }
}

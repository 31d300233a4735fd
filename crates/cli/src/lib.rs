//! The headless verbs of Ringwright, as a library that the binary calls.
//!
//! [`run`] reads the command line and does what it asks. Results go to the given output or into a file, everything else to
//! the error stream. Nothing here prints by itself, so tests can listen.

mod args;
mod deliver;
mod failure;
mod progress;
mod summary;
mod verbs;

use std::ffi::OsString;
use std::io::{self, Write};
use std::path::PathBuf;

use clap::Parser;
use ringwright_core::session::Demo;

use args::{Arguments, Verb};
use deliver::Desktop;
use failure::Failure;

/// Exit status of work that is done, or of an answer that is yes.
pub const DONE: u8 = 0;
/// Exit status of an answer that is no.
pub const NO: u8 = 1;
/// Exit status of input that cannot be used.
pub const BAD_INPUT: u8 = 2;

/// The verbs that need no window, for messages.
pub const HEADLESS_VERBS: &str = "orient, reach, azimuth, plan, verify and demo";

/// Where a run writes to.
pub struct Streams<'a> {
    /// Results.
    pub out: &'a mut dyn Write,
    /// Everything else.
    pub err: &'a mut dyn Write,
    /// Whether a person watches the error stream, so that a progress bar may show there.
    pub err_is_terminal: bool,
}

/// How a run ends.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Outcome {
    /// It is over, with this exit status.
    Finished(u8),
    /// The window was asked for.
    OpenWindow {
        /// What it opens on.
        on: Start,
        /// A folder with more machine files.
        machines: Option<PathBuf>,
        /// The exit status if there is no display. After headless work that is done it is [`DONE`]: the window was only an extra.
        without_display: u8,
    },
}

/// What the window opens on.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Start {
    /// A demo, as an unsaved copy.
    Demo(&'static Demo),
    /// The file of a session.
    File(PathBuf),
}

/// Does what a command line asks; the first argument is the name of the program.
pub fn run(arguments: impl IntoIterator<Item = OsString>, streams: &mut Streams<'_>) -> Outcome {
    let arguments = match Arguments::try_parse_from(arguments) {
        Ok(arguments) => arguments,
        Err(message) => return Outcome::Finished(say(&message, streams)),
    };
    let mut desktop = Desktop::new(streams);
    let result = match arguments.verb {
        None => verbs::window(arguments.session, arguments.machines),
        Some(Verb::Orient(a)) => verbs::orient(&a, &mut desktop).map(Outcome::Finished),
        Some(Verb::Reach(a)) => verbs::reach(&a, &mut desktop).map(Outcome::Finished),
        Some(Verb::Azimuth(a)) => verbs::azimuth(&a, &mut desktop).map(Outcome::Finished),
        Some(Verb::Plan(a)) => verbs::plan(&a, &mut desktop).map(Outcome::Finished),
        Some(Verb::Verify(a)) => verbs::verify(&a, &mut desktop).map(Outcome::Finished),
        Some(Verb::Demo(a)) => verbs::demo(&a, &mut desktop),
    };
    let outcome = result.unwrap_or_else(|failure| {
        let Failure { message } = failure;
        desktop.tell(&message);
        Outcome::Finished(BAD_INPUT)
    });
    // Whoever closed the pipe has read enough.
    match desktop.flush() {
        Err(error) if error.kind() != io::ErrorKind::BrokenPipe => {
            desktop.tell(&format!("the results cannot be written: {error}"));
            Outcome::Finished(BAD_INPUT)
        }
        _ => outcome,
    }
}

/// Help that was asked for is a result; a command line that cannot be used is an error.
fn say(message: &clap::Error, streams: &mut Streams<'_>) -> u8 {
    let text = message.render().to_string();
    if message.use_stderr() {
        let _ = streams.err.write_all(text.as_bytes());
        return BAD_INPUT;
    }
    let _ = streams.out.write_all(text.as_bytes()).and_then(|()| streams.out.flush());
    DONE
}

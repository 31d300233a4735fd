//! Opens the window, or says in one line why it cannot and what does the same job without one.

use std::io::Write;
use std::process::ExitCode;

use ringwright_cli::{HEADLESS_VERBS, Start};

/// Opens the window on something; `without_display` is the exit status where there is none.
pub fn open(on: Start, without_display: u8) -> ExitCode {
    match try_open(on) {
        Ok(()) => ExitCode::SUCCESS,
        Err(reason) => {
            let reason: Vec<&str> = reason.split_whitespace().collect();
            let reason = reason.join(" ");
            let line = format!("ringwright: no window: {reason}; {HEADLESS_VERBS} need none (ringwright --help)\n");
            let _ = std::io::stderr().write_all(line.as_bytes());
            ExitCode::from(without_display)
        }
    }
}

fn try_open(_: Start) -> Result<(), String> {
    Err("this build has none".to_owned())
}

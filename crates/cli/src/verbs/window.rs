use std::path::PathBuf;

use ringwright_core::session::DEMOS;

use super::night::check_folder;
use crate::failure::Failure;
use crate::{BAD_INPUT, HEADLESS_VERBS, Outcome, Start};

/// No verb: the window. What is neither a verb nor a file is most likely a verb mistyped.
pub fn window(session: Option<PathBuf>, machines: Option<PathBuf>) -> Result<Outcome, Failure> {
    check_folder(machines.as_deref())?;
    let on = match session {
        None => Start::Demo(&DEMOS[0]),
        Some(path) if path.exists() => Start::File(path),
        Some(path) => {
            return Err(Failure::new(format_args!(
                "{}: there is no such session file, and no such verb; the verbs are {HEADLESS_VERBS}",
                path.display()
            )));
        }
    };
    Ok(Outcome::OpenWindow { on, machines, without_display: BAD_INPUT })
}

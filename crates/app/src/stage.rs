//! Opens the window, or says in one line why it cannot and what does the same job without one.

use std::io::Write;
use std::path::PathBuf;
use std::process::ExitCode;

use ringwright_cli::{HEADLESS_VERBS, Start};

/// Opens the window on something, with a folder of more machines; `without_display` is the exit status where there is none.
pub fn open(on: Start, machines: Option<PathBuf>, without_display: u8) -> ExitCode {
    match try_open(on, machines) {
        Ok(()) => ExitCode::SUCCESS,
        Err(reason) => {
            let reason = in_one_line(&reason);
            let line = format!("ringwright: no window: {reason}; {HEADLESS_VERBS} need none (ringwright --help)\n");
            let _ = std::io::stderr().write_all(line.as_bytes());
            ExitCode::from(without_display)
        }
    }
}

/// Libraries put the place in their source before the reason; a person at the machine has no use for that.
fn in_one_line(reason: &str) -> String {
    let reason = match reason.rfind(".rs:").map(|at| &reason[at + 4..]) {
        Some(after) => after.trim_start_matches(|c: char| c.is_ascii_digit() || c == ':'),
        None => reason,
    };
    reason.split_whitespace().collect::<Vec<_>>().join(" ")
}

#[cfg(not(feature = "window"))]
fn try_open(_: Start, _: Option<PathBuf>) -> Result<(), String> {
    Err("this build has none".to_owned())
}

#[cfg(feature = "window")]
fn try_open(on: Start, machines: Option<PathBuf>) -> Result<(), String> {
    use std::panic::{self, AssertUnwindSafe};
    use std::sync::Arc;
    use std::sync::Mutex;

    use ringwright::window;

    display()?;
    let start = match on {
        Start::Demo(demo) => window::Start::Demo(demo.name),
        Start::File(path) => window::Start::File(path),
    };
    // Libraries of the window system may panic where something of the system is missing. Until the window shows, that is
    // one more reason without a window; after that it is a defect, and told as every panic is.
    let message = Arc::new(Mutex::new(String::new()));
    let usual = panic::take_hook();
    let kept = message.clone();
    panic::set_hook(Box::new(move |info| {
        if window::has_opened() {
            usual(info);
        } else if let Ok(mut kept) = kept.lock() {
            *kept = info.payload_as_str().unwrap_or("the window system gave up").to_owned();
        }
    }));
    match panic::catch_unwind(AssertUnwindSafe(|| window::open(start, machines))) {
        Ok(result) => result,
        Err(panic) if window::has_opened() => panic::resume_unwind(panic),
        Err(_) => Err(message.lock().map(|kept| kept.clone()).unwrap_or_default()),
    }
}

/// Asked first, because window systems differ in how they fail without one.
#[cfg(all(feature = "window", unix, not(target_os = "macos")))]
fn display() -> Result<(), String> {
    let is_set = |name: &str| std::env::var_os(name).is_some_and(|value| !value.is_empty());
    if ["DISPLAY", "WAYLAND_DISPLAY", "WAYLAND_SOCKET"].into_iter().any(is_set) {
        return Ok(());
    }
    Err("there is no display (neither DISPLAY nor WAYLAND_DISPLAY is set)".to_owned())
}

#[cfg(all(feature = "window", not(all(unix, not(target_os = "macos")))))]
fn display() -> Result<(), String> {
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::in_one_line;

    #[test]
    fn a_reason_is_one_line_without_places_in_sources() {
        let met = "os error at /somewhere/linux/mod.rs:788: Failed to open\nconnection to X server";
        assert_eq!(in_one_line(met), "Failed to open connection to X server");
        assert_eq!(in_one_line("no  GL"), "no GL");
    }
}

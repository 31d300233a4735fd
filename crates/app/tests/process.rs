//! The binary itself, where a process of its own matters: closed pipes, exit statuses, no display.

#![allow(clippy::unwrap_used)]

use std::io::{BufRead, BufReader};
use std::process::{Command, Stdio};

fn without_display() -> Command {
    let mut command = Command::new(env!("CARGO_BIN_EXE_ringwright"));
    command.env_remove("DISPLAY").env_remove("WAYLAND_DISPLAY").env_remove("WAYLAND_SOCKET");
    command
}

const SESSION: &str = concat!(env!("CARGO_MANIFEST_DIR"), "/../../demo-sessions/kappa-monoclinic.ron");

/// `ringwright reach … | head`: more rows than any pipe holds, and a reader that leaves after the first.
#[test]
fn a_pipe_that_closes_ends_quietly() {
    let mut command = without_display();
    command.args(["reach", SESSION, "--every-setting"]).stdout(Stdio::piped()).stderr(Stdio::piped());
    let mut child = command.spawn().unwrap();
    let mut first = String::new();
    BufReader::new(child.stdout.take().unwrap()).read_line(&mut first).unwrap();
    assert!(first.starts_with("h,k,l,"));
    let ended = child.wait_with_output().unwrap();
    let err = String::from_utf8(ended.stderr).unwrap();
    assert_eq!(ended.status.code(), Some(0), "{err}");
    assert!(!err.contains("ipe") && !err.contains("panicked"), "{err}");
}

#[test]
fn without_a_display_one_line_names_the_verbs() {
    for arguments in [&[][..], &[SESSION]] {
        let ended = without_display().args(arguments).output().unwrap();
        assert_eq!(ended.status.code(), Some(2));
        assert!(ended.stdout.is_empty());
        let err = String::from_utf8(ended.stderr).unwrap();
        assert_eq!(err.lines().count(), 1, "{err}");
        assert!(err.contains("orient, reach, azimuth, plan, verify and demo"), "{err}");
    }
}

/// A display that is named but not there: the window system finds out late, and in its own way.
#[cfg(unix)]
#[test]
fn with_a_display_that_is_not_there_one_line_says_so() {
    let ended = without_display().env("DISPLAY", ":7319").output().unwrap();
    let err = String::from_utf8(ended.stderr).unwrap();
    assert_eq!(ended.status.code(), Some(2), "{err}");
    assert_eq!(err.lines().count(), 1, "{err}");
    assert!(err.contains("no window") && err.contains("orient, reach, azimuth, plan, verify and demo"), "{err}");
}

#[test]
fn demo_without_a_display_is_done_after_the_headless_part() {
    let ended = without_display().args(["demo", "kappa-monoclinic"]).output().unwrap();
    let err = String::from_utf8(ended.stderr).unwrap();
    assert_eq!(ended.status.code(), Some(0), "{err}");
    assert!(String::from_utf8(ended.stdout).unwrap().contains("PROVEN: all "));
    assert_eq!(err.lines().count(), 1, "one line says that there is no window: {err}");
}

#[test]
fn a_refusal_is_a_status_and_not_a_panic() {
    let ended = without_display().args(["plan", "no-such-file.ron"]).output().unwrap();
    assert_eq!(ended.status.code(), Some(2));
    assert!(!String::from_utf8(ended.stderr).unwrap().contains("panicked"));
}

#[test]
fn results_and_remarks_keep_apart() {
    let ended = without_display().args(["plan", SESSION]).output().unwrap();
    assert_eq!(ended.status.code(), Some(0));
    let out = String::from_utf8(ended.stdout).unwrap();
    assert!(out.starts_with("# Drive list:") && out.ends_with('\n'));
    let summary = "(counting not included)";
    assert!(!out.contains(summary), "the summary is no part of the list");
    assert!(String::from_utf8(ended.stderr).unwrap().contains(summary));
}

/// A save that is killed at any moment leaves the old file or the new one, whole.
#[cfg(unix)]
#[test]
fn a_kill_while_saving_leaves_a_whole_file() {
    use ringwright_core::session::Session;
    let folder = tempfile::tempdir().unwrap();
    let (long, saved) = (folder.path().join("long.ron"), folder.path().join("saved.ron"));
    // Long enough that writing takes a while: a list of many nodes.
    let mut session = Session::from_text(&std::fs::read_to_string(SESSION).unwrap(), "demo").unwrap();
    let node = |i: i32| format!("(h: {}, k: {}, l: {})", i % 40, i % 37, i % 41);
    let list: Vec<String> = (1..20_000).map(node).collect();
    session.targets = ron::from_str(&format!("List([{}])", list.join(", "))).unwrap();
    std::fs::write(&long, session.to_text().unwrap()).unwrap();
    let orient = |from: &str| {
        let mut command = without_display();
        command.args(["orient", from, "--output"]).arg(&saved);
        command.stdout(Stdio::null()).stderr(Stdio::null());
        command.spawn().unwrap()
    };
    assert!(orient(SESSION).wait().unwrap().success());
    let old = std::fs::read_to_string(&saved).unwrap();
    let started = std::time::Instant::now();
    assert!(orient(long.to_str().unwrap()).wait().unwrap().success());
    let whole = started.elapsed();
    let new = std::fs::read_to_string(&saved).unwrap();
    assert_ne!(old, new);
    let (mut olds, rounds) = (0, 24);
    for round in 0..rounds {
        std::fs::write(&saved, &old).unwrap();
        let mut child = orient(long.to_str().unwrap());
        // Most of the writing is at the end.
        std::thread::sleep(whole.mul_f64(0.5 + 0.6 * f64::from(round) / f64::from(rounds)));
        child.kill().unwrap();
        child.wait().unwrap();
        let left = std::fs::read_to_string(&saved).unwrap();
        assert!(left == old || left == new, "round {round}: {} bytes of neither", left.len());
        olds += i32::from(left == old);
    }
    assert!(olds > 0, "no kill came in time");
}

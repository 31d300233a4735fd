//! The binary itself, where a process of its own matters.

use std::io::{BufRead, BufReader};
use std::path::PathBuf;
use std::process::{Command, Stdio};

use crate::Folder;

/// The binary beside this test's own: everything of the workspace is built into the same folder.
fn binary() -> PathBuf {
    let mut folder = std::env::current_exe().unwrap();
    folder.pop();
    if folder.ends_with("deps") {
        folder.pop();
    }
    let path = folder.join(format!("ringwright{}", std::env::consts::EXE_SUFFIX));
    assert!(path.is_file(), "{} is not there: build the workspace first, with `cargo build --release`", path.display());
    path
}

fn without_display() -> Command {
    let mut command = Command::new(binary());
    command.env_remove("DISPLAY").env_remove("WAYLAND_DISPLAY").env_remove("WAYLAND_SOCKET");
    command
}

/// `ringwright reach … | head`: more rows than any pipe holds, and a reader that leaves after the first.
#[test]
fn a_pipe_that_closes_ends_quietly() {
    let folder = Folder::new();
    let text = std::fs::read_to_string(folder.path("kappa-monoclinic.ron")).unwrap();
    let session = folder.write("large.ron", &text.replace("min_angstrom: 1.9", "min_angstrom: 0.8"));
    let mut child = Command::new(binary())
        .args(["reach".as_ref(), session.as_os_str()])
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .unwrap();
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
    let ended = without_display().output().unwrap();
    assert_eq!(ended.status.code(), Some(2));
    assert!(ended.stdout.is_empty());
    let err = String::from_utf8(ended.stderr).unwrap();
    assert_eq!(err.lines().count(), 1, "{err}");
    assert!(err.contains("orient, reach, plan, verify and demo"), "{err}");
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

//! Saving: session → text → session is the identity; a save leaves the old file or the new one and loses nothing unsaid.

use std::fs;
use std::path::{Path, PathBuf};

use proptest::prelude::*;
use ringwright_core::session::{OpenedSession, Session, has_comments};

use super::{any, cases, good};

proptest! {
    #![proptest_config(cases())]

    #[test]
    fn session_to_text_to_session_is_the_identity(session in any::session()) {
        let text = session.to_text().map_err(TestCaseError::fail)?;
        let back = Session::from_text(&text, "text").map_err(|e| TestCaseError::fail(e.to_string()))?;
        prop_assert_eq!(&back, &session);
        // The same text again: nothing drifts from save to save.
        prop_assert_eq!(back.to_text().map_err(TestCaseError::fail)?, text.clone());
        prop_assert!(!has_comments(&text));
    }
}

fn without_comments() -> String {
    Session::from_text(&good(), "").unwrap().to_text().unwrap()
}

/// A folder with one file in it.
fn folder_with(name: &str, text: &str) -> (tempfile::TempDir, PathBuf) {
    let folder = tempfile::tempdir().unwrap();
    let file = folder.path().join(name);
    fs::write(&file, text).unwrap();
    (folder, file)
}

fn names(folder: &Path) -> Vec<String> {
    let mut names: Vec<String> =
        fs::read_dir(folder).unwrap().map(|entry| entry.unwrap().file_name().into_string().unwrap()).collect();
    names.sort();
    names
}

fn retitled(opened: &mut OpenedSession, title: &str) {
    opened.session.title = title.to_owned();
}

#[test]
fn a_peak_takes_one_line_and_numbers_are_short() {
    let text = without_comments();
    let peak = "        (h: 0, k: 2, l: 1, readings_deg: {\"chi\": -70, \"omega\": 6, \"phi\": 100, \"tilt\": 0, \"two_theta\": 12}),\n";
    assert!(text.contains(peak), "{text}");
    assert!(text.contains("    version: 1,\n") && !text.contains(".0,"), "{text}");
    assert!(text.lines().all(|line| line.chars().count() <= 160), "{text}");
}

#[test]
fn the_first_save_over_comments_says_so_and_keeps_them() {
    let (folder, file) = folder_with("night.ron", &good());
    let mut opened = OpenedSession::open(&file).unwrap();
    assert!(opened.has_comments() && !opened.is_edited());
    retitled(&mut opened, "second night");
    assert!(opened.is_edited());
    let outcome = opened.save().unwrap();
    let backup = folder.path().join("night.ron.bak");
    assert_eq!((outcome.backup, outcome.comments_lost, outcome.changed_elsewhere), (Some(backup.clone()), true, false));
    assert_eq!(fs::read_to_string(&backup).unwrap(), good());
    assert_eq!(OpenedSession::open(&file).unwrap().session, opened.session);
    retitled(&mut opened, "third night");
    let outcome = opened.save().unwrap();
    assert_eq!((outcome.backup, outcome.comments_lost), (None, false), "the second save has nothing to keep");
    assert!(!opened.has_comments() && !opened.is_edited());
    assert_eq!(names(folder.path()), ["night.ron", "night.ron.bak"], "no temporary file is left");
}

#[test]
fn a_backup_is_never_overwritten_and_never_kept_twice() {
    let (folder, file) = folder_with("night.ron", &good());
    let backup = |name: &str| folder.path().join(name);
    fs::write(backup("night.ron.bak"), "precious").unwrap();
    let mut opened = OpenedSession::open(&file).unwrap();
    retitled(&mut opened, "a");
    assert_eq!(opened.save().unwrap().backup, Some(backup("night.ron.bak.1")));
    assert_eq!(fs::read_to_string(backup("night.ron.bak")).unwrap(), "precious");
    fs::write(&file, good()).unwrap();
    let mut opened = OpenedSession::open(&file).unwrap();
    retitled(&mut opened, "b");
    assert_eq!(opened.save().unwrap().backup, Some(backup("night.ron.bak.1")), "the same text is kept already");
    assert_eq!(names(folder.path()), ["night.ron", "night.ron.bak", "night.ron.bak.1"]);
}

#[test]
fn what_someone_else_wrote_in_the_meantime_is_kept() {
    let (folder, file) = folder_with("night.ron", &without_comments());
    let mut opened = OpenedSession::open(&file).unwrap();
    retitled(&mut opened, "mine");
    let theirs = without_comments().replace("first night", "theirs");
    fs::write(&file, &theirs).unwrap();
    let outcome = opened.save().unwrap();
    assert!(outcome.changed_elsewhere && !outcome.comments_lost);
    assert_eq!(fs::read_to_string(folder.path().join("night.ron.bak")).unwrap(), theirs);
}

#[test]
fn a_demo_is_an_unsaved_copy_until_it_has_a_name() {
    let folder = tempfile::tempdir().unwrap();
    let mut demo = OpenedSession::unsaved_copy("demo", &good()).unwrap();
    assert!(demo.path().is_none() && demo.save().unwrap_err().reason.contains("unsaved copy"));
    let file = folder.path().join("mine.ron");
    let outcome = demo.save_as(&file).unwrap();
    assert_eq!((outcome.backup, outcome.comments_lost), (None, false), "no file was there");
    assert_eq!(demo.path(), Some(file.as_path()));
    assert_eq!(OpenedSession::open(&file).unwrap().session, demo.session);
    demo.save().unwrap();
    // Another file that is no text is kept too.
    let other = folder.path().join("other");
    fs::write(&other, [0xFF, 0xFE, 0]).unwrap();
    assert_eq!(demo.save_as(&other).unwrap().backup, Some(folder.path().join("other.bak")));
}

#[test]
fn a_save_that_cannot_be_done_leaves_everything_as_it_was() {
    let (folder, file) = folder_with("night.ron", &good());
    let mut opened = OpenedSession::open(&file).unwrap();
    retitled(&mut opened, "a");
    let nowhere = folder.path().join("no such folder").join("night.ron");
    assert!(opened.save_as(&nowhere).unwrap_err().to_string().contains("no such folder"));
    assert!(opened.save_as(folder.path()).unwrap_err().reason.contains("it is a folder"));
    assert!(opened.save_as(&file.join("night.ron")).is_err(), "a file is no folder");
    assert!(opened.save_as(Path::new("")).is_err());
    assert_eq!(opened.path(), Some(file.as_path()), "a failed save does not move the session");
    let mut permissions = fs::metadata(&file).unwrap().permissions();
    permissions.set_readonly(true);
    fs::set_permissions(&file, permissions).unwrap();
    assert!(opened.save().unwrap_err().reason.contains("read-only"));
    assert_eq!(fs::read_to_string(&file).unwrap(), good());
    assert_eq!(names(folder.path()), ["night.ron"]);
}

#[cfg(unix)]
#[test]
fn permissions_and_symbolic_links_stay() {
    use std::os::unix::fs::{PermissionsExt, symlink};
    let (folder, file) = folder_with("night.ron", &good());
    fs::set_permissions(&file, fs::Permissions::from_mode(0o640)).unwrap();
    let link = folder.path().join("tonight.ron");
    symlink("night.ron", &link).unwrap();
    let mut opened = OpenedSession::open(&link).unwrap();
    retitled(&mut opened, "through the link");
    let outcome = opened.save().unwrap();
    assert_eq!(outcome.file, file);
    assert!(fs::symlink_metadata(&link).unwrap().is_symlink());
    assert_eq!(OpenedSession::open(&file).unwrap().session.title, "through the link");
    let mode = |path: &Path| fs::metadata(path).unwrap().permissions().mode() & 0o777;
    assert_eq!((mode(&file), mode(&folder.path().join("night.ron.bak"))), (0o640, 0o640));
    let circle = folder.path().join("circle.ron");
    symlink("circle.ron", &circle).unwrap();
    assert!(opened.save_as(&circle).unwrap_err().reason.contains("circle"));
}

#[test]
fn what_is_no_session_file_is_not_opened() {
    let folder = tempfile::tempdir().unwrap();
    let said = |path: &Path| OpenedSession::open(path).unwrap_err().to_string();
    assert!(said(folder.path()).contains("it is a folder; accepted is a session file"));
    assert!(said(&folder.path().join("none.ron")).contains("none.ron: cannot be read: there is no such file"));
    let large = folder.path().join("large.ron");
    fs::File::create(&large).unwrap().set_len(20_000_001).unwrap();
    assert!(said(&large).contains("at most 20 MB"));
    #[cfg(unix)]
    assert!(said(Path::new("/dev/zero")).contains("no regular file"));
}

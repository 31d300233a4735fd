use ringwright_core::exchange::drive_list;
use ringwright_core::session::{OpenedSession, Session};
use ringwright_core::work;

use super::*;

#[test]
fn a_session_is_saved_and_opened_through_the_path_field() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("night.ron");
    let mut harness = demo(1);
    enter(&mut harness, "b, Å", "10.5");
    perform(&mut harness, Command::SaveAs);
    enter(&mut harness, "Path to save to", &path.display().to_string());
    press(&mut harness, "Save here");
    let saved = OpenedSession::open(&path).unwrap();
    assert_eq!(saved.session, *harness.state().session());
    assert_eq!(saved.session.crystal.cell.b_angstrom.get(), 10.5);

    perform(&mut harness, Command::OpenDemo(0));
    settle(&mut harness);
    assert_ne!(saved.session, *harness.state().session());
    perform(&mut harness, Command::Open);
    enter(&mut harness, "Path of the session", &path.display().to_string());
    press(&mut harness, "Open this file");
    assert_eq!(saved.session, *harness.state().session());
}

#[test]
fn without_a_working_dialogue_the_path_field_opens_by_itself() {
    let mut harness = demo(0);
    press(&mut harness, "Open…");
    assert!(harness.query_by_label_contains("gave no file").is_some());
    assert!(harness.query_by_label("Path of the session").is_some());
    press(&mut harness, "Close");
    assert!(harness.query_by_label("Path of the session").is_none());
}

#[test]
fn a_file_named_in_the_dialogue_is_opened() {
    let dialogue = |purpose, _: &std::path::Path| {
        assert_eq!(purpose, crate::window::Purpose::Open);
        Some(std::path::PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("../../demo-sessions/kappa-monoclinic.ron"))
    };
    let start = Start::Demo(DEMOS[0].name);
    let mut harness = window_with(&start, LAPTOP, Theme::Light, Options { dialogue, machines: None });
    press(&mut harness, "Open…");
    assert_eq!(*harness.state().session(), DEMOS[1].open().unwrap().session);
    assert!(harness.query_by_label("Path of the session").is_none());
}

#[test]
fn a_file_that_is_no_session_is_refused_in_the_bar() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("broken.ron");
    std::fs::write(&path, "(version: 1, crystals: ())").unwrap();
    let mut harness = demo(0);
    let before: Session = harness.state().session().clone();
    perform(&mut harness, Command::OpenByPath);
    enter(&mut harness, "Path of the session", &path.display().to_string());
    press(&mut harness, "Open this file");
    assert!(harness.query_by_label_contains("crystals").is_some());
    assert_eq!(before, *harness.state().session());
}

#[test]
fn the_exported_list_passes_the_proof() {
    for i in 0..2 {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("list.csv");
        let mut harness = demo(i);
        perform(&mut harness, Command::Export);
        for words in ["drives nothing by itself", "Interlocks", "shutter closed"] {
            assert!(harness.query_by_label_contains(words).is_some(), "{words}");
        }
        press(&mut harness, "By path…");
        enter(&mut harness, "Path for the drive list", &path.display().to_string());
        press(&mut harness, "Export here");
        let results = harness.state().results();
        let (resolved, oriented) = (results.resolved.clone().unwrap(), results.oriented.clone().unwrap());
        let bytes = std::fs::read(&path).unwrap();
        let list = drive_list::read(&bytes[..], "list.csv", &resolved.instrument).unwrap();
        let proof = work::verify(&resolved, &oriented.orientation, &list, 0.01);
        assert_eq!(list.rows.len(), results.current_plan().unwrap().list.rows.len());
        assert!(list.rows.len() > 100 && proof.passed(), "{} proven", proof.proven());
    }
}

#[test]
fn a_save_that_was_given_up_takes_what_was_to_follow_with_it() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("kept.ron");
    let mut harness = demo(0);
    enter(&mut harness, "Largest 2θ, degrees", "25");
    perform(&mut harness, Command::OpenDemo(1));
    press(&mut harness, "Save first");
    press(&mut harness, "Close");
    let mine: Session = harness.state().session().clone();
    perform(&mut harness, Command::SaveAsByPath);
    enter(&mut harness, "Path to save to", &path.display().to_string());
    press(&mut harness, "Save here");
    assert_eq!(mine, *harness.state().session(), "no other session may open by itself");
    // Not given up, it goes on.
    enter(&mut harness, "Largest 2θ, degrees", "26");
    perform(&mut harness, Command::OpenDemo(1));
    press(&mut harness, "Save first");
    settle(&mut harness);
    assert_eq!(OpenedSession::open(&path).unwrap().session.crystal, mine.crystal);
    assert_ne!(mine.crystal, harness.state().session().crystal);
}

#[test]
fn comments_and_changes_are_not_lost_unasked() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("night.ron");
    std::fs::write(&path, DEMOS[0].text).unwrap();
    let mut harness = window(&Start::File(path.clone()), LAPTOP, Theme::Dark);
    enter(&mut harness, "Largest 2θ, degrees", "30");
    perform(&mut harness, Command::OpenDemo(1));
    assert!(harness.query_by_label("Changes are not saved").is_some());
    press(&mut harness, "Stay here");
    perform(&mut harness, Command::Save);
    assert_eq!(std::fs::read_to_string(&path).unwrap(), DEMOS[0].text, "asked first");
    press(&mut harness, "Save, keep NAME.bak");
    assert!(OpenedSession::open(&path).unwrap().session == *harness.state().session());
    assert_eq!(std::fs::read_to_string(folder.path().join("night.ron.bak")).unwrap(), DEMOS[0].text);
    // Nothing is unsaved now, so nothing is asked.
    perform(&mut harness, Command::OpenDemo(1));
    settle(&mut harness);
    assert!(harness.query_by_label("Changes are not saved").is_none());
}

#[test]
fn a_machine_of_the_extra_folder_can_be_chosen() {
    let folder = tempfile::tempdir().unwrap();
    let text = ringwright_core::instrument::BUILT_IN_MACHINES[1].1.replace("Kappa four-circle, 50°", "Ours");
    std::fs::write(folder.path().join("ours.ron"), text).unwrap();
    let options = Options { machines: Some(folder.path().to_owned()), ..NO_DIALOGUE };
    let mut harness = window_with(&Start::Demo(DEMOS[1].name), LAPTOP, Theme::Light, options);
    assert!(harness.state().machines.iter().any(|name| name == "ours"));
    let ours = ringwright_core::session::MachineChoice::Named("ours".to_owned());
    harness.state_mut().opened.session.machine = ours;
    settle(&mut harness);
    assert!(harness.state().results().problems.is_empty());
    assert_eq!(harness.state().results().resolved.as_ref().unwrap().instrument.name(), "Ours");
}

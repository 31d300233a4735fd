//! Results go to a file on request, whole or not at all.

use std::ffi::OsStr;

use crate::{Folder, ringwright};

#[test]
fn output_holds_what_standard_output_would() {
    let folder = Folder::new();
    let session = folder.path("fixed-chi.ron");
    let list = folder.write("list.csv", &folder.plan(&session));
    let file = folder.path("result");
    let session = session.as_os_str();
    for arguments in [
        vec!["reach".as_ref(), session],
        vec!["plan".as_ref(), session],
        vec!["verify".as_ref(), session, list.as_ref()],
    ] {
        let direct = ringwright(&arguments);
        let into_file: Vec<&OsStr> = arguments.into_iter().chain(["--output".as_ref(), file.as_os_str()]).collect();
        let into_file = ringwright(&into_file);
        assert_eq!((into_file.status(), into_file.out.as_str()), (direct.status(), ""), "{}", into_file.err);
        assert_eq!(std::fs::read_to_string(&file).unwrap(), direct.out);
    }
}

#[test]
fn a_machine_of_ones_own_is_found_beside_the_session_and_in_a_folder() {
    let folder = Folder::new();
    let text = std::fs::read_to_string(folder.path("kappa-monoclinic.ron")).unwrap();
    let session = folder.write("own.ron", &text.replace("kappa-four-circle", "hut-7"));
    let elsewhere = tempfile::tempdir().unwrap();
    let machine = ringwright_core::instrument::BUILT_IN_MACHINES[1].1;
    std::fs::write(elsewhere.path().join("hut-7.ron"), machine).unwrap();
    let run = ringwright(&["plan".as_ref(), session.as_os_str()]);
    assert_eq!(run.status(), 2);
    assert!(run.err.contains("no machine is called \"hut-7\""), "{}", run.err);
    let with_folder = ["plan".as_ref(), session.as_os_str(), "--machines".as_ref(), elsewhere.path().as_os_str()];
    assert_eq!(ringwright(&with_folder).out, folder.plan(&folder.path("kappa-monoclinic.ron")));
    folder.write("hut-7.ron", machine);
    assert_eq!(ringwright(&["plan".as_ref(), session.as_os_str()]).status(), 0);
}

#[test]
fn saving_over_comments_keeps_them() {
    let folder = Folder::new();
    let session = folder.path("kappa-monoclinic.ron");
    let before = std::fs::read_to_string(&session).unwrap();
    let run = ringwright(&["orient".as_ref(), session.as_os_str(), "--output".as_ref(), session.as_os_str()]);
    assert_eq!(run.status(), 0, "{}", run.err);
    assert!(run.err.contains("is kept as ") && run.err.contains("kappa-monoclinic.ron.bak"), "{}", run.err);
    assert_eq!(std::fs::read_to_string(folder.path("kappa-monoclinic.ron.bak")).unwrap(), before);
}

#[cfg(unix)]
#[test]
fn a_device_is_never_replaced() {
    let folder = Folder::new();
    let session = folder.path("fixed-chi.ron");
    let run = ringwright(&["plan".as_ref(), session.as_os_str(), "--output".as_ref(), "/dev/null".as_ref()]);
    assert_eq!(run.status(), 2);
    assert!(run.err.contains("it is no regular file"), "{}", run.err);
}

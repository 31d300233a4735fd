//! Lists that were tampered with, and lists that other people made.

use std::path::Path;

use crate::{Folder, Run, Table, doctored, ringwright};

fn rejected(folder: &Folder, session: &Path, list: &str, reason: &str) -> Run {
    let run = folder.verify(session, list);
    assert_eq!(run.status(), 1, "{reason}: {}", run.out);
    assert!(run.out.starts_with("REJECTED"), "{}", run.out);
    assert!(run.out.contains(reason), "{reason}: {}", run.out);
    run
}

#[test]
fn one_angle_that_moved_is_found() {
    let folder = Folder::new();
    for session in folder.sessions() {
        let list = folder.plan(&session);
        rejected(&folder, &session, &doctored(&list, 3, "two_theta", |deg| deg + 0.02), "the node diffracts at");
        let run = rejected(&folder, &session, &doctored(&list, 3, "omega", |deg| deg + 0.02), "away from Q");
        assert!(run.out.starts_with("REJECTED: 1 of "), "{}", run.out);
        // 0.02° is allowed where somebody says so.
        let path = folder.path("list.csv");
        let wide = ["verify".as_ref(), session.as_os_str(), path.as_os_str(), "--tolerance=0.03".as_ref()];
        assert_eq!(ringwright(&wide).status(), 0);
    }
}

#[test]
fn a_swapped_sign_is_found() {
    let folder = Folder::new();
    for session in folder.sessions() {
        let list = folder.plan(&session);
        let rows = Table::of(&list);
        for column in ["h", "l", "omega", "two_theta"] {
            let row = rows.column(column).iter().position(|text| text.parse::<f64>().unwrap().abs() > 0.1).unwrap() + 1;
            let run = rejected(&folder, &session, &doctored(&list, row, column, |value| -value), "away from Q");
            assert!(run.out.starts_with("REJECTED: 1 of "), "{}", run.out);
        }
    }
}

#[test]
fn an_axis_over_its_limit_is_found_though_the_reflection_is_right() {
    let folder = Folder::new();
    let session = folder.path("kappa-monoclinic.ron");
    let list = folder.plan(&session);
    // A full turn more is the same place for the crystal, but not for the cables.
    let run = rejected(&folder, &session, &doctored(&list, 2, "kappa", |deg| deg + 360.0), "over its limit by");
    assert!(!run.out.contains("away from Q"), "{}", run.out);
}

#[test]
fn another_session_is_noticed() {
    let folder = Folder::new();
    let session = folder.path("eulerian-orthorhombic.ron");
    let list = folder.plan(&session);
    let marked = list.lines().find(|line| line.starts_with("# fingerprint:")).unwrap();
    let other = list.replace(marked, "# fingerprint: 0123456789abcdef");
    let run = rejected(&folder, &session, &other, "the session has changed since");
    assert!(run.out.contains("the list carries 0123456789abcdef"), "{}", run.out);
    // A crystal that is 1 % larger: the fingerprint and the rows tell.
    let text = std::fs::read_to_string(&session).unwrap().replace("a_angstrom: 8.914", "a_angstrom: 9.003");
    let grown = folder.write("grown.ron", &text);
    let run = rejected(&folder, &grown, &list, "UB, wavelength or machine have changed since");
    assert!(run.out.contains("the node diffracts at"), "{}", run.out);
}

#[test]
fn a_list_cut_short_is_noticed() {
    let folder = Folder::new();
    let session = folder.path("eulerian-orthorhombic.ron");
    let list = folder.plan(&session);
    let lines: Vec<&str> = list.lines().collect();
    let short = lines[..lines.len() - 3].join("\n");
    rejected(&folder, &session, &short, "rows, but");
    let header_only: Vec<&str> = lines.iter().copied().take_while(|line| !line.starts_with("1,")).collect();
    rejected(&folder, &session, &header_only.join("\n"), "nothing to prove");
}

#[test]
fn a_list_of_somebody_else_is_judged_by_its_rows() {
    let folder = Folder::new();
    let session = folder.path("eulerian-orthorhombic.ron");
    let ours = Table::of(&folder.plan(&session));
    let mut theirs = "two_theta,phi,chi,omega,l,k,h\r\n".to_owned();
    for row in ours.rows.iter().take(20) {
        let reversed: Vec<&str> = row[1..8].iter().rev().map(String::as_str).collect();
        theirs.push_str(&reversed.join(","));
        theirs.push_str("\r\n");
    }
    let run = folder.verify(&session, &theirs);
    assert_eq!(run.status(), 0, "{}", run.out);
    assert!(run.out.contains("PROVEN: all 20 rows hold") && run.out.contains("carries no fingerprint"), "{}", run.out);
}

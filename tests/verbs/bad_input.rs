//! Input that cannot be used: exit status 2, the place, and what would be accepted, on the error stream alone.

use std::path::{Path, PathBuf};

use crate::{Folder, Run, Table, ringwright};

fn refused<A: AsRef<std::ffi::OsStr>>(arguments: &[A], reason: &str) -> Run {
    let run = ringwright(arguments);
    assert_eq!(run.status(), 2, "{run:?}");
    assert!(run.err.contains(reason), "{reason}: {}", run.err);
    assert_eq!(run.out, "", "results only");
    run
}

fn changed(folder: &Folder, from: &str, to: &str) -> PathBuf {
    let text = std::fs::read_to_string(folder.path("eulerian-orthorhombic.ron")).unwrap();
    assert!(text.contains(from), "{from}");
    folder.write("changed.ron", &text.replacen(from, to, 1))
}

/// `FILE:LINE:COLUMN` of the first place of a text in a file.
fn place(path: &Path, text: &str) -> String {
    let all = std::fs::read_to_string(path).unwrap();
    let (line, found) = all.lines().enumerate().find(|(_, line)| line.contains(text)).unwrap();
    let column = found[..found.find(text).unwrap()].chars().count() + 1;
    format!("{}:{}:{column}", path.display(), line + 1)
}

const RANGE: &str = "TwoThetaRange(min_deg: Some(5), max_deg: 29)";

#[test]
fn a_wrong_field_is_named_with_its_place_by_every_verb() {
    let folder = Folder::new();
    let session = changed(&folder, "8.914", "-8.914");
    let due = format!("{}: crystal.cell.a_angstrom: -8.914 is not a length in Å", place(&session, "-8.914"));
    for verb in ["orient", "reach", "plan"] {
        refused(&[verb.as_ref(), session.as_os_str()], &due);
    }
    let list = folder.write("list.csv", "h,k,l\n");
    refused(&["verify".as_ref(), session.as_os_str(), list.as_os_str()], &due);
}

#[test]
fn what_does_not_fit_together_is_placed_too() {
    let folder = Folder::new();
    let session = changed(&folder, "beta_deg: 90", "beta_deg: 91");
    refused(&["plan".as_ref(), session.as_os_str()], &format!("{}:", session.display()));
    let session = changed(&folder, "rules: [Bisecting]", "rules: []");
    let run = refused(&["plan".as_ref(), session.as_os_str()], "so 1 angle is spare, but no rule is given");
    assert!(run.err.contains(&format!("{}: rules: ", place(&session, "[],"))), "{}", run.err);
    let text = std::fs::read_to_string(folder.path("fixed-chi.ron")).unwrap();
    let ruled = folder.write("ruled.ron", &text.replace("targets:", "rules: [Bisecting],\n    targets:"));
    refused(&["reach".as_ref(), ruled.as_os_str()], "2 + 1 − 3 = 0, so no angle is spare, but 1 rule is given");
}

#[test]
fn peaks_that_give_no_orientation_are_refused() {
    let folder = Folder::new();
    let text = std::fs::read_to_string(folder.path("eulerian-orthorhombic.ron")).unwrap();
    let one = text.replacen("uncertainty_deg: Some(0.02),", "uncertainty_deg: Some(0.02), ignored: true,", 1);
    let one = one.replacen("uncertainty_deg: Some(0.03),", "uncertainty_deg: Some(0.03), ignored: true,", 1);
    let one = folder.write("one.ron", &one);
    refused(&["orient".as_ref(), one.as_os_str()], "1 peak(s) in use and no kept orientation");
}

/// An index typed wrong: the report says what would mend it, and the answer is no.
#[test]
fn peaks_that_disagree_are_a_no() {
    let folder = Folder::new();
    let session = changed(&folder, "h: -2, k: -1, l: -3", "h: -2, k: -1, l: -4");
    let run = ringwright(&["orient".as_ref(), session.as_os_str()]);
    assert_eq!(run.status(), 1, "{}", run.out);
    assert!(run.out.starts_with("UNCONFIRMED"), "{}", run.out);
    let run = ringwright(&["plan".as_ref(), session.as_os_str()]);
    assert!(run.err.contains("WARNING: the peaks do not agree"), "{}", run.err);
}

#[test]
fn nothing_reachable_is_a_no() {
    let folder = Folder::new();
    let session = changed(&folder, RANGE, "List([(h: 90, k: 0, l: 0)])");
    let reach = ringwright(&["reach".as_ref(), session.as_os_str()]);
    assert_eq!(reach.status(), 1);
    let table = Table::of(&reach.out);
    let due = ["90", "0", "0", "0.099044", "", "", "outside_sphere", "needs a wavelength of at most 0.1981 Å"];
    assert_eq!(table.rows[0][..8], due);
    assert_eq!(table.rows[0][8..], [""; 4]);
    let plan = ringwright(&["plan".as_ref(), session.as_os_str()]);
    assert_eq!(plan.status(), 1);
    assert!(plan.out.contains("\norder,h,k,l,"), "the list is written all the same, with no rows");
}

#[test]
fn a_wanted_node_that_is_absent_is_listed_with_its_operation() {
    let folder = Folder::new();
    let session = changed(&folder, RANGE, "List([(h: 1, k: 0, l: 0), (h: 2.5, k: 0, l: 1), (h: 2, k: 0, l: 0)])");
    let table = Table::of(&ringwright(&["reach".as_ref(), session.as_os_str()]).out);
    assert_eq!(table.column("h"), ["1", "2.5", "2"]);
    let absent = table.column("absent");
    assert!(!absent[0].is_empty() && absent[1].is_empty() && absent[2].is_empty(), "{absent:?}");
}

#[test]
fn files_that_are_not_there_are_named() {
    let folder = Folder::new();
    let gone = folder.path("gone.ron");
    refused(&["plan".as_ref(), gone.as_os_str()], "gone.ron: cannot be read");
    refused(&[gone.as_os_str()], "gone.ron: there is no such session file, and no such verb");
    refused(&["paln"], "the verbs are orient, reach, azimuth, plan, verify and demo");
    let session = folder.path("fixed-chi.ron");
    refused(&["verify".as_ref(), session.as_os_str(), gone.as_os_str()], "gone.ron: cannot be read");
    let machines = ["plan".as_ref(), session.as_os_str(), "--machines".as_ref(), gone.as_os_str()];
    refused(&machines, "there is no such folder");
    let nowhere = folder.path("no-folder/list.csv");
    let output = ["plan".as_ref(), session.as_os_str(), "--output".as_ref(), nowhere.as_os_str()];
    refused(&output, "list.csv: cannot be written");
    refused(&["demo", "nothing"], "\"nothing\" is no demo; accepted are eulerian-orthorhombic and kappa-monoclinic");
}

#[test]
fn a_list_that_is_none_is_refused_with_its_place() {
    let folder = Folder::new();
    let session = folder.path("fixed-chi.ron");
    let list = folder.write("list.csv", "# mine\nh,k,l,omega,phi,two_theta\n1,0,0,1,2,x\n");
    let arguments = ["verify".as_ref(), session.as_os_str(), list.as_os_str()];
    refused(&arguments, "list.csv:3: column two_theta: \"x\" is not accepted; accepted is an angle in degrees");
}

#[test]
fn a_command_line_that_cannot_be_used_is_refused() {
    let folder = Folder::new();
    let session = folder.path("fixed-chi.ron");
    refused(&["plan"], "<SESSION>");
    refused(&["plan".as_ref(), session.as_os_str(), "--sideways".as_ref()], "--sideways");
    let list = folder.path("list.csv");
    for bad in ["0", "-1", "nan", "much", "6"] {
        let tolerance = format!("--tolerance={bad}");
        let arguments = ["verify".as_ref(), session.as_os_str(), list.as_os_str(), tolerance.as_ref()];
        refused(&arguments, "accepted is a number of degrees above 0, at most 5");
    }
}

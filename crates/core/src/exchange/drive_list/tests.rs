use nalgebra::Matrix3;
use proptest::prelude::*;

use super::*;
use crate::frames::Hkl;
use crate::instrument::{Instrument, Setting, built_in_machine};
use crate::route::{DriveList, DriveRow, Fingerprint, GivenList};
use crate::testing::cases;

fn machine() -> Instrument {
    built_in_machine("eulerian-four-circle").unwrap()
}

fn ub() -> Matrix3<f64> {
    Matrix3::new(0.1, 0.0, 0.02, -0.01, 0.12, 0.0, 0.0, 0.03, 0.05)
}

fn written(rows: Vec<DriveRow>) -> Vec<u8> {
    let (machine, ub) = (machine(), ub());
    let heading = Heading { title: "two\nlines", instrument: &machine, ub: &ub, wavelength_angstrom: 0.71 };
    let mut out = Vec::new();
    write(&mut out, &DriveList { rows, left_out: Vec::new(), total_s: 0.0 }, &heading).unwrap();
    out
}

fn given(text: &str) -> Result<GivenList, ListError> {
    read(text.as_bytes(), "list.csv", &machine())
}

fn refused(text: &str) -> String {
    given(text).unwrap_err().to_string()
}

const HEADER: &str = "order,h,k,l,omega,chi,phi,two_theta,drive_s,elapsed_s\n";

#[test]
fn a_list_is_read_as_it_was_written() {
    let row = |h: f64, phi: f64| DriveRow {
        hkl: Hkl::new(h, -0.0, 2.0),
        setting: Setting::new(&[12.3456, -0.0, phi, 24.6912]),
        drive_s: 3.25,
        elapsed_s: 7.5,
    };
    let bytes = written(vec![row(1.0, -170.0001), row(1.0 / 3.0, 370.5)]);
    let text = String::from_utf8(bytes.clone()).unwrap();
    let lines: Vec<&str> = text.lines().filter(|line| !line.starts_with('#')).collect();
    assert_eq!(lines[0], HEADER.trim_end());
    assert_eq!(lines[1], "1,1,0,2,12.3456,0.0000,-170.0001,24.6912,3.25,7.50");
    assert!(lines[2].starts_with("2,0.3333333333333333,0,2,"));
    assert!(text.contains("# session: two lines\n"), "{text}");
    let list = read(&bytes, "list.csv", &machine()).unwrap();
    assert_eq!(list.rows.len(), 2);
    assert_eq!(list.rows[1].hkl, Hkl::new(1.0 / 3.0, 0.0, 2.0));
    assert_eq!(list.rows[1].setting, Setting::new(&[12.3456, 0.0, 370.5, 24.6912]));
    assert_eq!(list.rows[0].drive_s, Some(3.25));
    assert_eq!(list.fingerprint, Some(Fingerprint::of(&ub(), 0.71, &machine())));
    assert_eq!(list.stated_rows, Some(2));
    let first_line = text.lines().position(|line| line.starts_with("1,")).unwrap() as u64 + 1;
    assert_eq!(list.rows[0].line, first_line);
}

#[test]
fn lists_of_other_people_are_read_too() {
    let plain = given("two_theta,phi,chi,omega,l,k,h\n20,-5,.5,1e1,3,2,1\n").unwrap();
    assert_eq!(plain.rows[0].setting, Setting::new(&[10.0, 0.5, -5.0, 20.0]));
    assert_eq!(plain.rows[0].hkl, Hkl::new(1.0, 2.0, 3.0));
    assert_eq!((plain.fingerprint, plain.stated_rows, plain.rows[0].drive_s), (None, None, None));
    let body = "# hello\r\n\r\n h , k , l ,omega,chi,phi,two_theta,note\r\n# between\r\n1,0,0,1,2,3,\"4\",\"a, b\"\r\n\r\n\n2,0,0,1,2,3,4,\r\n";
    let spread = given(&format!("\u{feff}{body}")).unwrap();
    assert_eq!(spread.rows.iter().map(|row| row.line).collect::<Vec<_>>(), [5, 8]);
    assert_eq!(spread.unread_columns, ["note"]);
    assert_eq!(given(HEADER).unwrap().rows, vec![]);
}

#[test]
fn every_misfit_names_its_place_and_what_would_do() {
    assert!(refused("").contains("no header line"));
    assert!(refused("# only a comment\n").contains("order,h,k,l,omega,chi,phi,two_theta,drive_s,elapsed_s"));
    let row = |fields: &str| refused(&format!("# a comment\n\n{HEADER}{fields}\n"));
    assert_eq!(row("1,0,0"), "list.csv:4: 3 fields in this row; accepted are 10, as many as the header has");
    let message = row("1,1,0,0,abc,2,3,4,0,0");
    assert!(
        message.starts_with("list.csv:4: column omega: \"abc\" is not accepted; accepted is an angle"),
        "{message}"
    );
    for bad in ["nan", "inf", "-inf", "1e400", "", "1,5", "12°"] {
        let message = row(&format!("1,1,0,0,0,\"{bad}\",3,4,0,0"));
        assert!(message.starts_with("list.csv:4: column chi: "), "{bad}: {message}");
    }
    assert!(row("1,x,0,0,0,0,0,4,0,0").starts_with("list.csv:4: column h: \"x\""));
    assert!(row("1,1,0,0,0,0,0,4,-1,0").starts_with("list.csv:4: column drive_s: \"-1\""));
    assert!(row("1,1,0,0,0,0,0,4,1,-2").starts_with("list.csv:4: column elapsed_s: \"-2\""));
    let message = row("1,1,0,0,0,0,0,4,1,2\n3,1,0,0,0,0,0,4,1,2");
    assert!(message.starts_with("list.csv:5: column order: \"3\" is not accepted; accepted is 2"), "{message}");
    assert!(refused("h,k,l,omega,chi,phi\n").starts_with("list.csv:1: no column two_theta; accepted are order,"));
    assert!(refused("h,k,l,omega,chi,phi,two_theta,kappa\n").starts_with("list.csv:1: there is no column \"kappa\""));
    assert!(refused("h,k,l,h,omega,chi,phi,two_theta\n").starts_with("list.csv:1: column h stands twice"));
    assert!(refused(&format!("# fingerprint: xyz\n{HEADER}")).starts_with("list.csv:1: comment \"fingerprint:\""));
    assert!(refused(&format!("# rows: many\n{HEADER}")).starts_with("list.csv:1: comment \"rows:\""));
    let two = "# fingerprint: 0123456789abcdef\n# fingerprint: 0123456789abcdee\n";
    assert!(refused(&format!("{two}{HEADER}")).starts_with("list.csv:2: comment"));
}

proptest! {
    #![proptest_config(cases())]

    #[test]
    fn no_bytes_panic(bytes in prop::collection::vec(any::<u8>(), 0..400)) {
        let _ = read(&bytes, "list.csv", &machine());
    }

    /// Damage to a sound list: some bytes replaced, some cut off.
    #[test]
    fn no_damage_panics(hits in prop::collection::vec((any::<prop::sample::Index>(), any::<u8>()), 0..6), cut in any::<prop::sample::Index>()) {
        let row = |h: i32| DriveRow {
            hkl: Hkl::from([h, 1, 2]),
            setting: Setting::new(&[10.5, 20.0, 30.0, 21.0]),
            drive_s: 1.0,
            elapsed_s: 2.0,
        };
        let mut bytes = written(vec![row(1), row(2), row(3)]);
        for (at, byte) in hits {
            let at = at.index(bytes.len());
            bytes[at] = byte;
        }
        bytes.truncate(cut.index(bytes.len() + 1));
        if let Err(error) = read(&bytes, "list.csv", &machine()) {
            prop_assert!(error.to_string().starts_with("list.csv"), "{error}");
        }
    }
}

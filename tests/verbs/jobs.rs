//! Every verb on every session.

use std::collections::BTreeMap;
use std::path::Path;

use ringwright_cli::{Outcome, Start};
use ringwright_core::crystal::UnitCell;
use ringwright_core::session::{DEMOS, MachineLibrary, Session};

use crate::{Folder, Table, ringwright};

#[test]
fn orient_reports_and_saves_a_session_that_gives_the_same_list() {
    let folder = Folder::new();
    for session in folder.sessions() {
        let saved = folder.path("saved.ron");
        let run = ringwright(&["orient".as_ref(), session.as_os_str(), "--output".as_ref(), saved.as_os_str()]);
        assert_eq!(run.status(), 0, "{}", run.err);
        assert!(run.out.starts_with("CONFIRMED"), "the verdict comes first: {}", run.out);
        assert!(run.out.contains("UB in 1/Å"));
        assert!(run.err.contains("saved.ron"));
        let text = std::fs::read_to_string(&saved).unwrap();
        let mut kept = Session::from_text(&text, "saved.ron").unwrap();
        assert!(kept.orientation.as_ref().unwrap().confirmed);
        // U alone, without the peaks, is enough for the same list.
        kept.peaks.clear();
        let without_peaks = folder.write("without-peaks.ron", &kept.to_text().unwrap());
        assert_eq!(folder.plan(&without_peaks), folder.plan(&session));
        std::fs::remove_file(&saved).unwrap();
    }
}

#[test]
fn both_demos_are_oriented_by_their_peaks_alone() {
    for demo in DEMOS {
        let session = Session::from_text(demo.text, demo.name).unwrap();
        assert!(session.orientation.is_none() && session.peaks.len() == 3, "{}", demo.name);
    }
}

/// λ = 2 d sin θ, spacings from the cell, and the words and columns that the table is promised to have.
#[test]
fn reach_tells_of_every_wanted_reflection() {
    let folder = Folder::new();
    for path in folder.sessions() {
        let run = ringwright(&["reach".as_ref(), path.as_os_str()]);
        assert_eq!(run.status(), 0, "{}", run.err);
        let table = Table::of(&run.out);
        let session = Session::from_text(&std::fs::read_to_string(&path).unwrap(), "session").unwrap();
        let inputs = session.resolve(&MachineLibrary::default()).unwrap();
        let axes: Vec<&str> = inputs.instrument.axes().map(|axis| axis.name.as_str()).collect();
        let fixed = ["h", "k", "l", "d_angstrom", "two_theta_deg", "absent", "verdict", "detail"];
        assert_eq!(table.columns, [&fixed[..], &axes[..]].concat());
        assert!(table.rows.len() > 300, "{}", table.rows.len());
        let number = |text: &str| text.parse::<f64>().unwrap();
        for row in &table.rows {
            let d = spacing(&inputs.cell, [number(&row[0]), number(&row[1]), number(&row[2])]);
            assert!((number(&row[3]) - d).abs() < 1e-6, "{row:?}");
            let two_theta = 2.0 * (0.5 * inputs.wavelength_angstrom / d).asin().to_degrees();
            assert!((number(&row[4]) - two_theta).abs() < 1e-4, "{row:?}");
            assert_eq!(row[5], "", "ranges skip absent nodes");
            let reachable = row[6] == "reachable";
            assert_eq!(row[7].is_empty(), reachable, "a no has its reason: {row:?}");
            assert!(row[8..].iter().all(|reading| reading.is_empty() != reachable), "{row:?}");
        }
        let all = table.rows.len();
        let reachable = table.column("verdict").into_iter().filter(|word| *word == "reachable").count();
        assert!(run.err.contains(&format!("{reachable} of {all} wanted reflections are reachable")), "{}", run.err);
    }
}

/// 1/d² by the reciprocal metric, written out for a monoclinic cell (all three have α = γ = 90°).
fn spacing(cell: &UnitCell, [h, k, l]: [f64; 3]) -> f64 {
    let ([a, b, c], [_, beta, _]) = (cell.lengths(), cell.angles_deg());
    let (sin, cos) = beta.to_radians().sin_cos();
    let inverse = ((h / a).powi(2) + (l / c).powi(2) - 2.0 * h * l * cos / (a * c)) / (sin * sin) + (k / b).powi(2);
    inverse.sqrt().recip()
}

#[test]
fn every_setting_is_listed_on_request() {
    let folder = Folder::new();
    for (path, most) in folder.sessions().into_iter().zip([8, 8, 4]) {
        let chosen = Table::of(&ringwright(&["reach".as_ref(), path.as_os_str()]).out);
        let run = ringwright(&["reach".as_ref(), path.as_os_str(), "--every-setting".as_ref()]);
        assert_eq!(run.status(), 0);
        let every = Table::of(&run.out);
        assert_eq!(every.columns, chosen.columns);
        let mut per_reflection: BTreeMap<&[String], Vec<&Vec<String>>> = BTreeMap::new();
        for row in &every.rows {
            per_reflection.entry(&row[..3]).or_default().push(row);
        }
        assert_eq!(per_reflection.len(), chosen.rows.len());
        assert_eq!(per_reflection.values().map(Vec::len).max(), Some(most));
        for row in chosen.rows.iter().filter(|row| row[6] == "reachable") {
            let settings = &per_reflection[&row[..3]];
            assert!(settings.iter().any(|setting| setting[6] == "reachable" && setting[8..] == row[8..]), "{row:?}");
        }
    }
}

#[test]
fn every_plan_passes_verify() {
    let folder = Folder::new();
    for session in folder.sessions() {
        let list = folder.plan(&session);
        assert!(list.starts_with("# Drive list:") && list.contains("shutter closed"));
        let table = Table::of(&list);
        let reach = Table::of(&ringwright(&["reach".as_ref(), session.as_os_str()]).out);
        let reachable = reach.column("verdict").into_iter().filter(|word| *word == "reachable").count();
        assert_eq!(table.rows.len(), reachable);
        let run = folder.verify(&session, &list);
        assert_eq!(run.status(), 0, "{}", run.out);
        assert!(run.out.starts_with(&format!("PROVEN: all {reachable} rows hold")), "{}", run.out);
        // What is written has four decimals, and that is what holds: 2e-4° is what rounding four axes may do.
        let list = folder.path("list.csv");
        let strict = ["verify".as_ref(), session.as_os_str(), list.as_os_str(), "--tolerance=0.0002".as_ref()];
        assert_eq!(ringwright(&strict).status(), 0);
    }
}

/// The time column by hand: path over speed plus overhead, on the slowest axis, from park.
#[test]
fn drive_times_are_those_that_the_session_states() {
    let folder = Folder::new();
    let list = Table::of(&folder.plan(&folder.path("eulerian-orthorhombic.ron")));
    // Speed in °/s and overhead in s of omega, chi, phi and two_theta, as the session states them; all park at 0.
    let machine = [(4.0, 0.4), (3.0, 0.5), (8.0, 0.3), (4.0, 0.4)];
    let number = |text: &String| text.parse::<f64>().unwrap();
    let mut here = vec![0.0; 4];
    let mut elapsed = 0.0;
    for row in &list.rows {
        let there: Vec<f64> = row[4..8].iter().map(number).collect();
        let times = machine.iter().zip(here.iter().zip(&there)).map(|((speed, overhead), (from, to))| {
            let path: f64 = to - from;
            if path == 0.0 { 0.0 } else { path.abs() / speed + overhead }
        });
        let slowest = times.fold(0.0, f64::max);
        assert!((number(&row[8]) - slowest).abs() < 0.00501, "{row:?}: {slowest}");
        elapsed += number(&row[8]);
        assert!((number(&row[9]) - elapsed).abs() < 1e-6, "{row:?}");
        here = there;
    }
}

#[test]
fn demo_does_the_whole_job_and_then_asks_for_the_window() {
    for demo in &DEMOS {
        let run = ringwright(&["demo", demo.name, "--headless"]);
        assert_eq!(run.status(), 0, "{}", run.err);
        for part in ["CONFIRMED", "wanted reflections are reachable", "of driving", "PROVEN: all "] {
            assert!(run.out.contains(part), "{part}: {}", run.out);
        }
        let run = ringwright(&["demo", demo.name]);
        assert_eq!(run.outcome, Outcome::OpenWindow { on: Start::Demo(demo), machines: None, without_display: 0 });
    }
    let alone = ringwright::<&str>(&[]).outcome;
    assert_eq!(alone, Outcome::OpenWindow { on: Start::Demo(&DEMOS[0]), machines: None, without_display: 2 });
    let path = Folder::new().path("fixed-chi.ron");
    assert_eq!(ringwright(&[&path]).status(), 2, "its folder is gone");
    let folder = Folder::new();
    let path = folder.path("fixed-chi.ron");
    let opens = |machines| Outcome::OpenWindow { on: Start::File(path.clone()), machines, without_display: 2 };
    assert_eq!(ringwright(&[&path]).outcome, opens(None));
    let machines = path.parent().unwrap().to_owned();
    let with_folder = |folder: &Path| ringwright(&["--machines".as_ref(), folder.as_os_str(), path.as_os_str()]);
    assert_eq!(with_folder(&machines).outcome, opens(Some(machines)));
    let run = with_folder(&folder.path("not-there"));
    assert!(run.status() == 2 && run.err.contains("there is no such folder"), "{}", run.err);
}

#[test]
fn a_demo_can_be_copied_as_a_start() {
    let folder = Folder::new();
    let copy = folder.path("mine.ron");
    let run = ringwright(&["demo".as_ref(), "--headless".as_ref(), "--output".as_ref(), copy.as_os_str()]);
    assert_eq!(run.status(), 0, "{}", run.err);
    assert_eq!(std::fs::read_to_string(&copy).unwrap(), DEMOS[0].text);
}

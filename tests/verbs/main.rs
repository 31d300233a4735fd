//! The headless verbs, as a user meets them: every verb on both demos and on a third machine, exit statuses, lists that were
//! tampered with. What needs a process of its own is tested beside the binary.

#![allow(clippy::unwrap_used, clippy::expect_used)]

mod bad_input;
mod doctored;
mod help;
mod jobs;
mod outputs;
mod rules;

use std::ffi::OsString;
use std::path::{Path, PathBuf};

use ringwright_cli::{Outcome, Streams};
use ringwright_core::session::DEMOS;
use tempfile::TempDir;

/// What a run gave.
#[derive(Debug)]
pub(crate) struct Run {
    pub(crate) outcome: Outcome,
    pub(crate) out: String,
    pub(crate) err: String,
}

impl Run {
    pub(crate) fn status(&self) -> u8 {
        match self.outcome {
            Outcome::Finished(status) => status,
            Outcome::OpenWindow { .. } => panic!("the window was asked for: {self:?}"),
        }
    }
}

/// Runs a command line inside this process. No window opens.
pub(crate) fn ringwright<A: AsRef<std::ffi::OsStr>>(arguments: &[A]) -> Run {
    let (mut out, mut err) = (Vec::new(), Vec::new());
    let all = std::iter::once(OsString::from("ringwright")).chain(arguments.iter().map(|a| a.as_ref().to_owned()));
    let outcome = ringwright_cli::run(all, &mut Streams { out: &mut out, err: &mut err, err_is_terminal: false });
    Run { outcome, out: String::from_utf8(out).unwrap(), err: String::from_utf8(err).unwrap() }
}

/// Three sessions in a folder that goes away with the test: both demos, and a machine without a spare angle.
pub(crate) struct Folder(TempDir);

impl Folder {
    pub(crate) fn new() -> Self {
        let folder = Self(tempfile::tempdir().unwrap());
        for demo in DEMOS {
            folder.write(&format!("{}.ron", demo.name), demo.text);
        }
        folder.write("fixed-chi.ron", FIXED_CHI);
        folder
    }

    pub(crate) fn path(&self, name: &str) -> PathBuf {
        self.0.path().join(name)
    }

    pub(crate) fn write(&self, name: &str, text: &str) -> PathBuf {
        std::fs::write(self.path(name), text).unwrap();
        self.path(name)
    }

    pub(crate) fn sessions(&self) -> Vec<PathBuf> {
        DEMOS.iter().map(|demo| demo.name).chain(["fixed-chi"]).map(|name| self.path(&format!("{name}.ron"))).collect()
    }

    /// The drive list of a session, as the verb writes it.
    pub(crate) fn plan(&self, session: &Path) -> String {
        let run = ringwright(&["plan".as_ref(), session.as_os_str()]);
        assert_eq!(run.status(), 0, "{}", run.err);
        run.out
    }

    /// The verdict of `verify` on the text of a list.
    pub(crate) fn verify(&self, session: &Path, list: &str) -> Run {
        let list = self.write("list.csv", list);
        ringwright(&["verify".as_ref(), session.as_os_str(), list.as_os_str()])
    }
}

/// A tetragonal crystal of the same invented laboratory on the machine with a fixed chi, oriented earlier.
const FIXED_CHI: &str = r#"(
    version: 1,
    title: "Tern Quay Crystallography, night 3: dovestone",
    crystal: (
        cell: (a_angstrom: 6.43, b_angstrom: 6.43, c_angstrom: 9.87, alpha_deg: 90, beta_deg: 90, gamma_deg: 90),
        symmetry: SpaceGroup("P 4/m m m"),
    ),
    radiation: XrayLine(name: "Mo Ka"),
    machine: Named("fixed-chi-three-circle"),
    targets: SpacingRange(min_angstrom: 1.4),
    orientation: Some((u: ((0.36, 0.48, -0.8), (-0.8, 0.6, 0), (0.48, 0.64, 0.6)), confirmed: true)),
)"#;

/// A CSV table, comments left out.
pub(crate) struct Table {
    pub(crate) columns: Vec<String>,
    pub(crate) rows: Vec<Vec<String>>,
}

impl Table {
    pub(crate) fn of(text: &str) -> Self {
        let mut csv = csv::ReaderBuilder::new().comment(Some(b'#')).from_reader(text.as_bytes());
        let columns = csv.headers().unwrap().iter().map(str::to_owned).collect();
        let rows = csv.records().map(|record| record.unwrap().iter().map(str::to_owned).collect()).collect();
        Self { columns, rows }
    }

    pub(crate) fn column(&self, name: &str) -> Vec<&str> {
        let i = self.columns.iter().position(|column| column == name).unwrap();
        self.rows.iter().map(|row| row[i].as_str()).collect()
    }
}

/// A list with one field of one row changed; rows count from 1.
pub(crate) fn doctored(list: &str, row: usize, column: &str, change: impl Fn(f64) -> f64) -> String {
    let mut lines: Vec<String> = list.lines().map(str::to_owned).collect();
    let header = lines.iter().position(|line| line.starts_with("order,")).unwrap();
    let at = lines[header].split(',').position(|name| name == column).unwrap();
    let mut fields: Vec<String> = lines[header + row].split(',').map(str::to_owned).collect();
    let before: f64 = fields[at].parse().unwrap();
    fields[at] = format!("{:.4}", change(before));
    lines[header + row] = fields.join(",");
    lines.join("\n") + "\n"
}

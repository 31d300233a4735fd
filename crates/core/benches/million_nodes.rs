//! Verdict, reason and chosen setting for every node of a 30 Å cube down to d = 0.48 Å, all eight bisecting settings of the
//! Eulerian machine with their limits: this program against a numpy script that evaluates the same closed forms.
//!
//! `cargo bench -p ringwright-core --bench million_nodes` measures this program with criterion, then runs the script
//! `tests/scripts/million_nodes.py` in the same run and prints the ratio; without numpy it says so.
#![allow(missing_docs, clippy::unwrap_used, clippy::print_stdout)]

use std::path::Path;
use std::process::Command;
use std::time::Instant;

use criterion::{BatchSize, Criterion};
use nalgebra::{Matrix3, Rotation3, Unit, Vector3};
use ringwright_core::aim::{Preference, Rule};
use ringwright_core::crystal::{AbsentNodes, DRange, NodesOutcome, SpaceGroup, SymmetryQuery, UnitCell, nodes};
use ringwright_core::frames::Hkl;
use ringwright_core::instrument::{Instrument, built_in_machine};
use ringwright_core::pace::Unhurried;
use ringwright_core::reach::{Judge, ReachTable, Wanted};

const WAVELENGTH_ANGSTROM: f64 = 0.71;
const D_MIN_ANGSTROM: f64 = 0.48;

struct Case {
    wanted: Wanted,
    ub: Matrix3<f64>,
    instrument: Instrument,
    judge: Judge,
}

/// U is Ry(20°) Rz(35°) Rx(50°), as in the script.
fn case(machine: &str) -> Case {
    let cell = UnitCell::new(30.0, 30.0, 30.0, 90.0, 90.0, 90.0).unwrap();
    let group = SpaceGroup::resolve(&SymmetryQuery::Number(1), &cell).unwrap();
    let range = DRange::down_to(D_MIN_ANGSTROM).unwrap();
    let found = nodes(&cell, &group, range, AbsentNodes::Keep, &Unhurried).unwrap();
    let NodesOutcome::Complete(columns) = found else { unreachable!("nobody said no") };
    let hkl: Vec<Hkl> = columns.hkl.iter().map(|&hkl| Hkl::from(hkl)).collect();
    let instrument = built_in_machine(machine).unwrap();
    let judge = Judge::new(&instrument, &[Rule::Bisecting], &Preference::default()).unwrap();
    let turn = |axis: Unit<Vector3<f64>>, deg: f64| Rotation3::from_axis_angle(&axis, deg.to_radians());
    let u = turn(Vector3::y_axis(), 20.0) * turn(Vector3::z_axis(), 35.0) * turn(Vector3::x_axis(), 50.0);
    let ub = u.matrix() * cell.b_matrix();
    Case { wanted: Wanted { absent: vec![None; hkl.len()], hkl }, ub, instrument, judge }
}

fn judge(case: &Case, wanted: Wanted) -> ReachTable {
    let axes = case.instrument.axis_count();
    ReachTable::judge(wanted, &case.ub, WAVELENGTH_ANGSTROM, &case.judge, axes, &Unhurried).unwrap()
}

/// Median seconds of several runs, and the counts of each kind of verdict.
fn median_seconds(case: &Case) -> (f64, Vec<usize>) {
    let mut seconds = Vec::new();
    let mut counts = Vec::new();
    for _ in 0..9 {
        let wanted = case.wanted.clone();
        let start = Instant::now();
        let table = judge(case, wanted);
        seconds.push(start.elapsed().as_secs_f64());
        counts = table.counts().to_vec();
    }
    seconds.sort_by(f64::total_cmp);
    (seconds[seconds.len() / 2], counts)
}

/// The largest memory this process has used so far, in MB, where the system tells.
fn peak_memory_mb() -> Option<f64> {
    let status = std::fs::read_to_string("/proc/self/status").ok()?;
    let line = status.lines().find(|line| line.starts_with("VmHWM:"))?;
    Some(line.split_whitespace().nth(1)?.parse::<f64>().ok()? / 1024.0)
}

fn against_numpy(case: &Case) {
    let (own, counts) = median_seconds(case);
    println!("this program: {own:.3} s for {} nodes, verdicts {counts:?}", case.wanted.hkl.len());
    match peak_memory_mb() {
        Some(peak) => println!("peak memory of this process: {peak:.0} MB"),
        None => println!("peak memory: this system does not tell"),
    }
    let script = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../tests/scripts/million_nodes.py");
    let python = std::env::var("RINGWRIGHT_PYTHON").unwrap_or_else(|_| "python3".to_owned());
    for (what, options) in [("eight settings", &[][..]), ("four-setting short cut", &["--short"][..])] {
        let output = Command::new(&python).arg(&script).args(options).output();
        match output {
            Ok(output) if output.status.success() => {
                let text = String::from_utf8_lossy(&output.stdout);
                let seconds: Option<f64> = text.split_whitespace().nth(1).and_then(|word| word.parse().ok());
                match seconds {
                    Some(other) => println!("numpy, {what}: {} -> ratio {:.1}", text.trim(), other / own),
                    None => println!("numpy, {what}: no figure in {text:?}"),
                }
            }
            _ => println!("numpy, {what}: not measured, because {python} has no numpy here (set RINGWRIGHT_PYTHON)"),
        }
    }
}

fn main() {
    let eulerian = case("eulerian-four-circle");
    against_numpy(&eulerian);
    let kappa = case("kappa-four-circle");
    let mut criterion = Criterion::default().configure_from_args().sample_size(10);
    for (name, case) in [("eulerian bisecting", &eulerian), ("kappa bisecting", &kappa)] {
        criterion.bench_function(name, |b| {
            b.iter_batched(|| case.wanted.clone(), |wanted| judge(case, wanted), BatchSize::PerIteration);
        });
    }
    criterion.final_summary();
}

//! Windows of one reflection, *freest* for ten thousand, and a million nodes at a given azimuth on the six-circle.
//!
//! `cargo bench -p ringwright-core --bench azimuth`. The last two are run once and timed as a whole; the second is beside
//! *bisecting* on the Eulerian machine in the same run, and the ratio is printed.
#![allow(missing_docs, clippy::unwrap_used, clippy::print_stdout)]

use std::time::Instant;

use criterion::Criterion;
use nalgebra::{Matrix3, Rotation3};
use ringwright_core::aim::{CrystalOnHead, Preference, Reference, Rule};
use ringwright_core::crystal::{AbsentNodes, DRange, NodesOutcome, SpaceGroup, SymmetryQuery, UnitCell, nodes};
use ringwright_core::frames::{Hkl, Vector};
use ringwright_core::instrument::{Instrument, built_in_machine};
use ringwright_core::pace::Unhurried;
use ringwright_core::reach::{AzimuthFamily, Judge, ReachTable, Wanted};

const WAVELENGTH_ANGSTROM: f64 = 0.71;

fn rules(texts: &[&str]) -> Vec<Rule> {
    texts.iter().map(|text| ron::from_str(text).unwrap()).collect()
}

fn ub(cell: &UnitCell) -> Matrix3<f64> {
    let turn = Rotation3::from_euler_angles(0.87, 0.35, 0.61);
    turn.matrix() * cell.b_matrix()
}

fn wanted(cell: &UnitCell, d_min: f64, at_most: usize) -> Wanted {
    let group = SpaceGroup::resolve(&SymmetryQuery::Number(1), cell).unwrap();
    let range = DRange::down_to(d_min).unwrap();
    let NodesOutcome::Complete(columns) = nodes(cell, &group, range, AbsentNodes::Keep, &Unhurried).unwrap() else {
        unreachable!("nobody said no")
    };
    let hkl: Vec<Hkl> = columns.hkl.iter().take(at_most).map(|&hkl| Hkl::from(hkl)).collect();
    Wanted { absent: vec![None; hkl.len()], hkl }
}

fn seconds(instrument: &Instrument, rules: &[Rule], cell: &UnitCell, wanted: &Wanted) -> f64 {
    let crystal = CrystalOnHead { ub: ub(cell), surface: None };
    let judge = Judge::for_crystal(instrument, rules, &Preference::default(), &crystal).unwrap();
    let mut all: Vec<f64> = (0..3)
        .map(|_| {
            let start = Instant::now();
            let table = ReachTable::judge(
                wanted.clone(),
                &crystal.ub,
                WAVELENGTH_ANGSTROM,
                &judge,
                instrument.axis_count(),
                &Unhurried,
            );
            assert!(table.unwrap().counts()[0] > 0);
            start.elapsed().as_secs_f64()
        })
        .collect();
    all.sort_by(f64::total_cmp);
    all[1]
}

fn main() {
    const FREEST: &str = "Freest(reference: Direct(u: 0, v: 0, w: 1))";
    let reference: Reference = ron::from_str("Direct(u: 0, v: 0, w: 1)").unwrap();
    let cell = UnitCell::new(30.0, 30.0, 30.0, 90.0, 90.0, 90.0).unwrap();
    let six = rules(&[FREEST, r#"Hold(axis: "mu", at_deg: 0)"#, r#"Hold(axis: "nu", at_deg: 0)"#]);
    let mut criterion = Criterion::default().configure_from_args().sample_size(30);
    for (machine, rules) in [
        ("eulerian-four-circle", rules(&[FREEST])),
        ("kappa-four-circle", rules(&[FREEST])),
        ("six-circle", six.clone()),
    ] {
        let instrument = built_in_machine(machine).unwrap();
        let crystal = CrystalOnHead { ub: ub(&cell), surface: None };
        let judge = Judge::for_crystal(&instrument, &rules, &Preference::default(), &crystal).unwrap();
        let family = AzimuthFamily::new(&instrument, &rules, &crystal, &reference).unwrap();
        let mut i = 0;
        criterion.bench_function(&format!("windows of one reflection, {machine}"), |b| {
            b.iter(|| {
                i = (i + 7) % 40;
                let node = Vector::from_raw(crystal.ub * Hkl::from([3 + i, 17 - i, 9]).to_vector());
                family.windows(&judge, node, WAVELENGTH_ANGSTROM)
            });
        });
        let ten_thousand = wanted(&cell, 1.5, 10_000);
        let taken = seconds(&instrument, &rules, &cell, &ten_thousand);
        println!("freest, {machine}: {taken:.2} s for {} reflections", ten_thousand.hkl.len());
    }
    let million = wanted(&cell, 0.48, usize::MAX);
    let eulerian = built_in_machine("eulerian-four-circle").unwrap();
    let bisecting = seconds(&eulerian, &rules(&["Bisecting"]), &cell, &million);
    let azimuth = rules(&[
        r#"Azimuth(reference: Direct(u: 0, v: 0, w: 1), at_deg: 40)"#,
        r#"Hold(axis: "mu", at_deg: 0)"#,
        r#"Hold(axis: "nu", at_deg: 0)"#,
    ]);
    let six_circle = seconds(&built_in_machine("six-circle").unwrap(), &azimuth, &cell, &million);
    println!(
        "azimuth at 40° on the six-circle: {six_circle:.3} s for {} nodes; bisecting on the Eulerian machine {bisecting:.3} s, ratio {:.2}",
        million.hkl.len(),
        six_circle / bisecting
    );
    criterion.final_summary();
}

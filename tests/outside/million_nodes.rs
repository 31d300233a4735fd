//! A million verdicts against an independent numpy script.
//!
//! Source: `scripts/million_nodes.py`, *computed* (versions in the head of `reference/million_nodes_numpy.csv`): nodes of a
//! 30 Å cubic cell with d ≥ 0.48 Å, bisecting on the Eulerian machine with its limits. The script has two roads, general
//! closed forms and the formulas of a Eulerian cradle, and they agree. Only its angles and limits are compared here; the
//! speed comparison is a benchmark of the core.

use nalgebra::{Rotation3, Vector3};
use ringwright_acceptance::reference_rows;
use ringwright_core::aim::{Preference, Rule};
use ringwright_core::crystal::{AbsentNodes, DRange, NodesOutcome, SpaceGroup, SymmetryQuery, UnitCell, nodes};
use ringwright_core::frames::{Hkl, Vector};
use ringwright_core::instrument::built_in_machine;
use ringwright_core::pace::Unhurried;
use ringwright_core::reach::{Judge, Verdict};

#[test]
fn a_million_nodes_have_the_verdicts_of_an_independent_script() {
    let cell = UnitCell::new(30.0, 30.0, 30.0, 90.0, 90.0, 90.0).unwrap();
    let group = SpaceGroup::resolve(&SymmetryQuery::Number(1), &cell).unwrap();
    let range = DRange::down_to(0.48).unwrap();
    let NodesOutcome::Complete(all) = nodes(&cell, &group, range, AbsentNodes::Keep, &Unhurried).unwrap() else {
        panic!("nobody said no")
    };
    assert_eq!(all.len(), 1_023_348);
    // Ry(20°) Rz(35°) Rx(50°) as in the script and the benchmark.
    let about = |axis, deg: f64| Rotation3::from_axis_angle(&axis, deg.to_radians());
    let u = about(Vector3::y_axis(), 20.0) * about(Vector3::z_axis(), 35.0) * about(Vector3::x_axis(), 50.0);
    let ub = u.matrix() * cell.b_matrix();
    let machine = built_in_machine("eulerian-four-circle").unwrap();
    let judge = Judge::new(&machine, &[Rule::Bisecting], &Preference::FarthestFromLimits).unwrap();

    for row in reference_rows("million_nodes_numpy.csv") {
        let mut counts = [0.0; Verdict::WORDS.len()];
        let mut clearance_sum = 0.0;
        for &hkl in &all.hkl {
            let node = Vector::from_raw(ub * Hkl::from(hkl).to_vector());
            let judged = judge.verdict(node, row.number("wavelength"));
            counts[judged.verdict.kind()] += 1.0;
            if judged.verdict.is_reachable() {
                clearance_sum += judged.setting.unwrap().clearance_deg;
            }
        }
        for (count, word) in counts.iter().zip(Verdict::WORDS) {
            let never = ["cannot_make", "no_azimuth", "below_surface"].contains(&word);
            let expected = if never { 0.0 } else { row.number(word) };
            assert_eq!(*count, expected, "{word}: {row:?}");
        }
        let off = clearance_sum / row.number("clearance_sum") - 1.0;
        assert!(off.abs() < 1e-9, "{clearance_sum}: {row:?}");
    }
}

//! Cells of all seven systems against an independent package.
//!
//! Source: gemmi 0.7.5, *computed* by `scripts/cells_with_gemmi.py` (versions and seed in the head of
//! `reference/cells_gemmi.csv`). gemmi puts x along a, so B of Busing & Levy (1967) stands there as the upper triangular
//! root of gemmi's reciprocal metric, which is unique.

use std::collections::BTreeSet;

use nalgebra::Matrix3;
use ringwright_acceptance::{Row, reference_rows};
use ringwright_core::crystal::UnitCell;
use ringwright_core::frames::Hkl;

const TOLERANCE: f64 = 1e-10;

fn cell(row: &Row) -> UnitCell {
    let [a, b, c, alpha, beta, gamma] = row.numbers(["a", "b", "c", "alpha", "beta", "gamma"]);
    UnitCell::new(a, b, c, alpha, beta, gamma).unwrap()
}

/// A symmetric matrix from the columns `prefix11` … `prefix23`.
fn symmetric(row: &Row, prefix: &str) -> Matrix3<f64> {
    Matrix3::from_fn(|i, j| row.number(&format!("{prefix}{}{}", i.min(j) + 1, i.max(j) + 1)))
}

/// The largest difference of elements, each relative to the lengths that its row and column stand for.
fn metric_off(ours: &Matrix3<f64>, theirs: &Matrix3<f64>) -> f64 {
    let relative = |i: usize, j: usize| (ours[(i, j)] - theirs[(i, j)]) / (theirs[(i, i)] * theirs[(j, j)]).sqrt();
    Matrix3::from_fn(relative).abs().max()
}

#[test]
fn metrics_and_volumes_agree() {
    let rows = reference_rows("cells_gemmi.csv");
    let systems: BTreeSet<&str> = rows.iter().map(|row| row.text("system")).collect();
    assert_eq!((rows.len(), systems.len()), (20, 7));
    for row in &rows {
        let cell = cell(row);
        assert!(metric_off(&cell.metric(), &symmetric(row, "g")) < TOLERANCE, "metric: {row:?}");
        assert!(metric_off(&cell.reciprocal_metric(), &symmetric(row, "r")) < TOLERANCE, "reciprocal metric: {row:?}");
        assert!((cell.volume() / row.number("volume") - 1.0).abs() < TOLERANCE, "volume: {row:?}");
    }
}

/// Element by element, relative to the length of its column (a*, b*, c*): here a B with x along a would be found out.
#[test]
fn b_is_that_of_busing_and_levy() {
    for row in reference_rows("cells_gemmi.csv") {
        let (ours, theirs) = (*cell(&row).b_matrix(), row.matrix("b"));
        for column in 0..3 {
            let off = (ours.column(column) - theirs.column(column)).abs().max() / theirs.column(column).norm();
            assert!(off < TOLERANCE, "{off:e} in column {column}: {row:?}");
        }
        assert!(theirs[(0, 0)] > 0.0 && theirs[(1, 1)] > 0.0 && theirs[(2, 2)] > 0.0);
    }
}

#[test]
fn spacings_and_angles_between_nodes_agree() {
    for row in reference_rows("cells_gemmi.csv") {
        let cell = cell(&row);
        let [first, second, third] =
            [["h1", "k1", "l1"], ["h2", "k2", "l2"], ["h3", "k3", "l3"]].map(|c| Hkl::from_vector(&row.vector(c)));
        for (hkl, column) in [(first, "d1"), (second, "d2"), (third, "d3")] {
            assert!((cell.d_spacing(hkl) / row.number(column) - 1.0).abs() < TOLERANCE, "{column}: {row:?}");
        }
        for (a, b, column) in [(first, second, "angle12"), (second, third, "angle23")] {
            let off = cell.angle_between(a, b).to_degrees() - row.number(column);
            assert!(off.abs() < TOLERANCE * 180.0, "{column}: {off:e}, {row:?}");
        }
    }
}

#[test]
fn a_cell_comes_back_from_its_reference_b() {
    for row in reference_rows("cells_gemmi.csv") {
        let (back, cell) = (UnitCell::from_ub(&row.matrix("b")).unwrap(), cell(&row));
        for i in 0..3 {
            assert!((back.lengths()[i] / cell.lengths()[i] - 1.0).abs() < TOLERANCE, "{row:?}");
            assert!((back.angles_deg()[i] - cell.angles_deg()[i]).abs() < TOLERANCE * 180.0, "{row:?}");
        }
    }
}

//! Orientation matrices that were published beside a cell.
//!
//! Sources: entries of the Crystallography Open Database with their papers and two examples of the CIF dictionaries, named
//! row by row in `reference/s5_ub_cell_cases.csv`. Matrices and `…_pub` cells are published, the other columns computed.
//! CIF leaves the scale of UB open: the rows hold 1/d or λ/d, or a placeholder.

use nalgebra::Matrix3;
use ringwright_acceptance::{Row, reference_rows};
use ringwright_core::crystal::{CellError, UnitCell};

const CALCULATED: [&str; 6] = ["a_calc", "b_calc", "c_calc", "alpha_calc", "beta_calc", "gamma_calc"];
const PUBLISHED: [&str; 6] = ["a_pub", "b_pub", "c_pub", "alpha_pub", "beta_pub", "gamma_pub"];

fn case(label: &str) -> Row {
    reference_rows("s5_ub_cell_cases.csv").into_iter().find(|row| row.text("label") == label).unwrap()
}

fn six(cell: &UnitCell) -> [f64; 6] {
    let ([a, b, c], [alpha, beta, gamma]) = (cell.lengths(), cell.angles_deg());
    [a, b, c, alpha, beta, gamma]
}

/// 0.1 % in lengths and 0.1° in angles: what rounding and unconstrained refinement leave between the published matrices
/// and their cells.
fn agrees(cell: &UnitCell, published: [f64; 6]) -> bool {
    six(cell).iter().zip(published).enumerate().all(|(i, (ours, theirs))| {
        let tolerance = if i < 3 { 1e-3 * theirs } else { 0.1 };
        (ours - theirs).abs() < tolerance
    })
}

#[test]
fn a_published_matrix_gives_the_calculated_cell() {
    let mut seen = 0;
    for row in reference_rows("s5_ub_cell_cases.csv") {
        let ub = row.matrix("UB");
        let scale = match row.text("scale") {
            "lambda/d" => row.number("lambda_stated"),
            scale if scale.starts_with("1/d") => 1.0,
            _ => continue,
        };
        seen += 1;
        let label = row.text("label");
        assert_eq!(row.text("det_sign"), "+");
        assert!(ub.determinant() > 0.0, "{label} is right-handed");
        let cell = UnitCell::from_ub(&(ub / scale)).unwrap();
        for (ours, column) in six(&cell).iter().zip(CALCULATED) {
            assert!((ours - row.number(column)).abs() < row.half_a_digit(column), "{label}, {column}: {ours}");
        }
        let mirrored = UnitCell::from_ub(&(-ub));
        assert!(matches!(mirrored, Err(CellError::NoRightHandedCell(det)) if det < 0.0), "{label} mirrored");
    }
    assert_eq!(seen, 5);
}

#[test]
fn matrices_on_the_scale_1_over_d_agree_with_the_published_cells() {
    for (label, tolerance_angstrom, tolerance_deg) in [("case1_I-4c2", 5e-5, 2e-4), ("case2_P1", 8e-4, 6e-3)] {
        let row = case(label);
        let cell = UnitCell::from_ub(&row.matrix("UB")).unwrap();
        for (i, (ours, column)) in six(&cell).iter().zip(PUBLISHED).enumerate() {
            // The matrix of case 2 has five decimals: 1e-5 of 0.17 Å⁻¹ is 4 in the fourth decimal of a length.
            let tolerance = if i < 3 { tolerance_angstrom } else { tolerance_deg };
            assert!((ours - row.number(column)).abs() < tolerance, "{label}, {column}: {ours}");
        }
    }
}

/// Case 4 holds λ/d with the anode's Kα1 on the older scale, not with the wavelength that its file states.
#[test]
fn a_matrix_on_the_scale_lambda_over_d_needs_its_wavelength() {
    let row = case("case4_P212121");
    let (ub, published) = (row.matrix("UB"), row.numbers(PUBLISHED));
    let with = |scale: f64| UnitCell::from_ub(&(ub / scale)).unwrap();
    assert!(agrees(&with(row.number("effective_lambda")), published));
    assert!(agrees(&with(0.709_30), published), "Mo Kα1 of the older scale, International Tables Vol. C, published");
    assert!(!agrees(&with(row.number("lambda_stated")), published), "0.2 % too large");
    assert!(!agrees(&with(1.0), published));
}

#[test]
fn placeholders_are_no_orientation() {
    let zero = case("placeholder_zero").matrix("UB");
    assert_eq!(zero, Matrix3::zeros());
    assert!(matches!(UnitCell::from_ub(&zero), Err(CellError::NoRightHandedCell(det)) if det == 0.0));

    let row = case("placeholder_identity");
    let (ub, published) = (row.matrix("UB"), row.numbers(PUBLISHED));
    for scale in [1.0, row.number("lambda_stated"), std::f64::consts::TAU] {
        let cell = UnitCell::from_ub(&(ub / scale)).unwrap();
        assert!(!agrees(&cell, published), "{:?} on the scale {scale}", cell.lengths());
    }
    let by_wavelength = UnitCell::from_ub(&(ub / row.number("lambda_stated"))).unwrap();
    assert!((by_wavelength.lengths()[0] - row.number("a_calc")).abs() < row.half_a_digit("a_calc"));
}

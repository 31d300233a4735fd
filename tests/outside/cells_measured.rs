//! Measured Bragg angles against the cell fitted to them.
//!
//! Source: core CIF dictionary 2.3.1, CELL_MEASUREMENT_REFLN example 1 (Rb2S2O6): h k l and θ *published*; the hexagonal cell
//! a = 10.1770(44), c = 6.3993(129) Å *computed* by an independent least-squares fit with λ = 0.71073 Å *assumed*; handbook
//! cell a = 10.17, c = 6.42 Å. `reference/s1_cell_measurement_refln8.csv`.

use ringwright_acceptance::{all_settings, bisecting, reference_rows};
use ringwright_core::crystal::UnitCell;
use ringwright_core::frames::{Hkl, Vector};
use ringwright_core::instrument::built_in_machine;

fn theta_deg(cell: &UnitCell, hkl: Hkl) -> f64 {
    let solver = bisecting(&built_in_machine("kappa-four-circle").unwrap());
    let settings = all_settings(&solver, Vector::from_raw(*cell.node(hkl).raw()), 0.710_73);
    0.5 * settings[0].readings_deg()[3].abs()
}

#[test]
fn a_fitted_cell_gives_the_measured_angles() {
    let fitted = UnitCell::new(10.1770, 10.1770, 6.3993, 90.0, 90.0, 120.0).unwrap();
    let handbook = UnitCell::new(10.17, 10.17, 6.42, 90.0, 90.0, 120.0).unwrap();
    let rows = reference_rows("s1_cell_measurement_refln8.csv");
    let (mut squares, mut from_handbook) = (0.0, 0.0f64);
    for row in &rows {
        let hkl = Hkl::from_vector(&row.vector(["h", "k", "l"]));
        let theta = theta_deg(&fitted, hkl);
        // The cell is printed to four decimals: a few 1e-5 degrees of θ.
        assert!((theta - row.number("theta_calc")).abs() < 1.5e-4, "{hkl}: {theta}");
        squares += (theta - row.number("theta_obs")).powi(2);
        from_handbook = from_handbook.max((theta_deg(&handbook, hkl) - row.number("theta_obs")).abs());
    }
    let rms = (squares / rows.len() as f64).sqrt();
    assert!((rms - 0.014).abs() < 0.0005, "the fit leaves 0.014°, not {rms}°");
    assert!(from_handbook < 0.05, "{from_handbook}");
}

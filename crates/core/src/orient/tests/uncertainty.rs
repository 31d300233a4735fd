//! Uncertainties against simulated reading errors.

use nalgebra::{Matrix3, Rotation3, Vector3};

use super::simulation::*;
use crate::crystal::UnitCell;
use crate::frames::Hkl;
use crate::instrument::{Instrument, Setting};
use crate::orient::{TwoPeakOrientation, orient_by_two};

const DRAWS: usize = 4000;

/// A standard deviation from that many draws scatters by 1/√(2 n) = 1.1 % of itself; four times that.
const TOLERANCE: f64 = 0.045;

/// Normal deviates from a fixed seed (splitmix64 and the polar form of Box & Muller 1958, Ann. Math. Stat. 29, 610).
struct Normal(u64);

impl Normal {
    fn uniform(&mut self) -> f64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        ((z ^ (z >> 31)) >> 11) as f64 / (1u64 << 53) as f64
    }

    fn next(&mut self) -> f64 {
        let (u, v) = (1.0 - self.uniform(), self.uniform());
        (-2.0 * u.ln()).sqrt() * (std::f64::consts::TAU * v).cos()
    }
}

fn orient(cell: &UnitCell, instrument: &Instrument, readings: [&[f64]; 2], sigma_deg: [f64; 2]) -> TwoPeakOrientation {
    let hkl = [Hkl::new(1.0, 2.0, 0.0), Hkl::new(2.0, -1.0, 3.0)];
    let [first, second] = [0, 1].map(|i| peak(hkl[i], Setting::new(readings[i]), Some(sigma_deg[i])));
    orient_by_two(cell, WAVELENGTH, instrument, &first, &second).unwrap()
}

fn near(name: &str, measured: f64, stated: f64) {
    assert!((measured / stated - 1.0).abs() < TOLERANCE, "{name}: simulated {measured:e}, stated {stated:e}");
}

#[test]
fn stated_uncertainties_are_those_of_simulated_readings() {
    let cell = UnitCell::new(5.0, 6.0, 7.0, 83.0, 97.0, 105.0).unwrap();
    let kappa = machine_with_zeros("kappa-four-circle", &[0.7, -0.4, 12.0, 0.3]);
    let truth = [vec![14.0, 61.0, -38.0, 27.0], vec![-20.0, -33.0, 71.0, -34.0]];
    let sigma_deg = [0.05, 0.02];
    let exact = orient(&cell, &kappa, [&truth[0], &truth[1]], sigma_deg);
    let mut normal = Normal(20_260_501);
    let (mut angle, mut d, mut turns) = (0.0, [0.0; 2], Matrix3::zeros());
    for _ in 0..DRAWS {
        let read = [0, 1].map(|i| truth[i].iter().map(|r| r + sigma_deg[i] * normal.next()).collect::<Vec<f64>>());
        let seen = orient(&cell, &kappa, [&read[0], &read[1]], sigma_deg);
        angle += (seen.angle_deg.observed - exact.angle_deg.observed).powi(2);
        for (sum, i) in d.iter_mut().zip(0..2) {
            *sum += (seen.d_angstrom[i].observed - exact.d_angstrom[i].observed).powi(2);
        }
        let [a, b] =
            [&seen, &exact].map(|o| Rotation3::from_matrix_unchecked(*o.orientation.head_from_crystal.matrix()));
        let w: Vector3<f64> = (a * b.inverse()).scaled_axis();
        turns += w * w.transpose();
    }
    let root = |sum: f64| (sum / DRAWS as f64).sqrt();
    near("angle between the peaks", root(angle), exact.angle_deg.sigma);
    near("d of the first", root(d[0]), exact.d_angstrom[0].sigma);
    near("d of the second", root(d[1]), exact.d_angstrom[1].sigma);
    for axis in [Vector3::x(), Vector3::y(), Vector3::z(), Vector3::new(1.0, 1.0, -1.0).normalize()] {
        near("turn", root(axis.dot(&(turns * axis))), axis.dot(&(exact.turn_covariance * axis)).sqrt());
    }
}

/// By hand: both peaks on one vertical axis with 2θ about the same axis. The angle between them is ω₂ − ω₁ − (2θ₂ − 2θ₁)/2,
/// so its variance is 2 σ² (1 + 1/4), and d = λ / (2 sin θ) has σ_d = d cot θ σ/2.
#[test]
fn the_uncertainty_of_the_plainest_machine_is_that_of_the_formula() {
    let cell = UnitCell::new(5.0, 6.0, 7.0, 90.0, 90.0, 90.0).unwrap();
    let plain = odd_machine(&[(Vector3::y(), 0.0)], &[(Vector3::y(), 0.0)]);
    let sigma = 0.03;
    let seen = orient(&cell, &plain, [&[10.0, 20.0], &[80.0, 30.0]], [sigma, sigma]);
    assert!((seen.angle_deg.sigma - sigma * 2.5f64.sqrt()).abs() < 1e-9);
    let d = WAVELENGTH / (2.0 * 10f64.to_radians().sin());
    let expected = d / 10f64.to_radians().tan() * 0.5 * sigma.to_radians();
    assert!((seen.d_angstrom[0].sigma / expected - 1.0).abs() < 1e-6);
}

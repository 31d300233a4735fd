//! What diffraction is, evaluated from the readings alone: λ = 2 d sin θ, |Δk| = 1/d, Δk ⟂ (hkl).
//!
//! Laws of W. L. Bragg (1913, Proc. Camb. Phil. Soc. 17, 43; from memory) and M. von Laue (1912); no number is needed. Each setting found
//! for each node of a few crystals in arbitrary orientations is turned into directions of axes and beams, and these into
//! the angle of reflection, the scattering vector, and two lattice vectors that lie in the planes (hkl).

use nalgebra::{Matrix3, Rotation3, Unit, Vector3};
use ringwright_acceptance::{all_settings, bisecting, hold};
use ringwright_core::aim::Solver;
use ringwright_core::crystal::UnitCell;
use ringwright_core::frames::{Hkl, Vector, angle_between};
use ringwright_core::instrument::{Instrument, Setting, built_in_machine};

const TOLERANCE: f64 = 1e-10;

/// Crystals of ours: cell, rotation vector of U in radians, wavelength in Å, smallest d in Å.
fn crystals() -> Vec<(UnitCell, Vector3<f64>, f64, f64)> {
    let cell = |v: [f64; 6]| UnitCell::new(v[0], v[1], v[2], v[3], v[4], v[5]).unwrap();
    vec![
        (cell([7.31, 9.84, 12.06, 90.0, 90.0, 90.0]), Vector3::new(0.4, -1.3, 0.9), 0.710_747_3, 0.9),
        (cell([8.12, 6.07, 11.4, 90.0, 103.7, 90.0]), Vector3::new(-2.1, 0.2, 1.1), 0.619_9, 0.85),
        (cell([5.93, 7.74, 8.29, 81.2, 96.4, 108.9]), Vector3::new(1.7, 1.9, -0.6), 1.541_871_2, 0.95),
        (cell([4.76, 4.76, 12.99, 90.0, 90.0, 120.0]), Vector3::new(0.0, 0.0, 0.0), 0.559_421_8, 0.6),
    ]
}

fn machines() -> Vec<(Instrument, Vec<Solver>)> {
    let machine = |name: &str| built_in_machine(name).unwrap();
    let (euler, kappa, fixed) =
        (machine("eulerian-four-circle"), machine("kappa-four-circle"), machine("fixed-chi-three-circle"));
    let of_euler = vec![bisecting(&euler), hold(&euler, "phi", 31.0), hold(&euler, "omega", -14.0)];
    let of_kappa = vec![bisecting(&kappa), hold(&kappa, "kappa", -72.5), hold(&kappa, "omega", 40.0)];
    let of_fixed = vec![Solver::new(&fixed, &[]).unwrap()];
    vec![(euler, of_euler), (kappa, of_kappa), (fixed, of_fixed)]
}

/// Every node down to a spacing, by trying all indices that could be near enough: |h| ≤ a/d and so on.
fn nodes(cell: &UnitCell, d_min: f64) -> Vec<Hkl> {
    let [h_max, k_max, l_max] = cell.lengths().map(|edge| (edge / d_min).floor() as i32);
    let mut found = Vec::new();
    for h in -h_max..=h_max {
        for k in -k_max..=k_max {
            for l in -l_max..=l_max {
                let hkl = Hkl::from([h, k, l]);
                if [h, k, l] != [0; 3] && cell.d_spacing(hkl) >= d_min {
                    found.push(hkl);
                }
            }
        }
    }
    found
}

/// Two lattice vectors, as components along a, b, c, that lie in the planes (hkl): those of the zone law
/// h u + k v + l w = 0.
fn in_plane(hkl: Hkl) -> [Vector3<f64>; 2] {
    let Hkl { h, k, l } = hkl;
    let candidates = [Vector3::new(0.0, l, -k), Vector3::new(-l, 0.0, h), Vector3::new(k, -h, 0.0)];
    let first = candidates.into_iter().find(|v| *v != Vector3::zeros()).unwrap();
    let second = candidates.into_iter().find(|v| v.cross(&first) != Vector3::zeros()).unwrap();
    [first, second]
}

/// Everything from the readings: directions of the beams, then the laws. `ub` only carries lattice vectors along.
fn check_laws(instrument: &Instrument, setting: &Setting, ub: &Matrix3<f64>, hkl: Hkl, d: f64, wavelength: f64) {
    let incident = Vector3::z();
    let diffracted = *instrument.diffracted_direction(setting).raw();
    let theta = 0.5 * angle_between(&incident, &diffracted);
    assert!((2.0 * d * theta.sin() / wavelength - 1.0).abs() < TOLERANCE, "λ = 2 d sin θ at {hkl}, {setting:?}");

    let delta_k = (diffracted - incident) / wavelength;
    assert!((delta_k.norm() * d - 1.0).abs() < TOLERANCE, "|Δk| = 1/d at {hkl}, {setting:?}");

    // Columns a, b, c in the head frame: the matrix whose product with (a* b* c*)ᵀ is one.
    let direct = ub.transpose().try_inverse().unwrap();
    let lab_from_head = *instrument.lab_from_head(setting).matrix();
    for vector in in_plane(hkl) {
        let in_lab = lab_from_head * direct * vector;
        let cosine = delta_k.dot(&in_lab) / (delta_k.norm() * in_lab.norm());
        assert!(cosine.abs() < TOLERANCE, "Δk ⟂ (hkl) at {hkl}: {cosine:e}, {setting:?}");
    }
    // Not −(hkl) either: Δk has the side of the node, so that a step across one plane of the set gains a whole period.
    let out_of_plane = lab_from_head * direct * Vector3::new(hkl.h, hkl.k, hkl.l);
    assert!(delta_k.dot(&out_of_plane) > 0.0);
}

#[test]
fn every_setting_of_every_node_diffracts() {
    let machines = machines();
    let mut checked = [0usize; 3];
    for (cell, rotation, wavelength, d_min) in crystals() {
        let u = Rotation3::new(rotation);
        let ub = u.matrix() * cell.b_matrix();
        let all = nodes(&cell, d_min);
        let expected = 4.0 / 3.0 * std::f64::consts::PI * cell.volume() / d_min.powi(3);
        assert!((all.len() as f64 / expected - 1.0).abs() < 0.05, "{} nodes, about {expected} expected", all.len());
        for hkl in all {
            let node = Vector::from_raw(ub * hkl.to_vector());
            for ((instrument, solvers), count) in machines.iter().zip(&mut checked) {
                for setting in solvers.iter().flat_map(|solver| all_settings(solver, node, wavelength)) {
                    check_laws(instrument, &setting, &ub, hkl, cell.d_spacing(hkl), wavelength);
                    *count += 1;
                }
            }
        }
    }
    // Eulerian bisecting alone gives eight for each node; none of the machines may have stood idle.
    assert!(checked.iter().all(|count| *count > 20_000), "{checked:?}");
}

/// The laws can fail: one hundredth of a degree on any axis breaks them.
#[test]
fn a_hundredth_of_a_degree_is_noticed() {
    let cell = UnitCell::new(7.31, 9.84, 12.06, 90.0, 90.0, 90.0).unwrap();
    let u = Rotation3::from_axis_angle(&Unit::new_normalize(Vector3::new(1.0, 2.0, -2.0)), 1.1);
    let ub = u.matrix() * cell.b_matrix();
    let (hkl, wavelength) = (Hkl::new(2.0, -1.0, 3.0), 0.71);
    let instrument = built_in_machine("kappa-four-circle").unwrap();
    let good = all_settings(&bisecting(&instrument), Vector::from_raw(ub * hkl.to_vector()), wavelength)[0];
    check_laws(&instrument, &good, &ub, hkl, cell.d_spacing(hkl), wavelength);
    for axis in 0..4 {
        let mut readings = good.readings_deg().to_vec();
        readings[axis] += 0.01;
        let bad = Setting::new(&readings);
        let caught = std::panic::catch_unwind(|| {
            check_laws(&instrument, &bad, &ub, hkl, cell.d_spacing(hkl), wavelength);
        });
        assert!(caught.is_err(), "axis {axis}");
    }
}

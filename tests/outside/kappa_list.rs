//! The one published list of really measured kappa angles that we know of: 13 centred reflections.
//!
//! Source: example of DIFFRN_ORIENT_REFLN in the IUCr's CIF core dictionary 2.3.1; `reference/s1_orient_refln_kappa13.csv`
//! names the file. Published are h, k, l, θ, φ, ω and κ. α = 50°, the senses of rotation and the wavelength (which only sets
//! the scale of the cell) are not printed there; they are the ones that make the list consistent, as that file says. The
//! two figures of misfit checked below were computed from the same list by an independent script (numpy 2.4.6).

use std::path::Path;

use nalgebra::Vector3;
use ringwright_core::crystal::UnitCell;
use ringwright_core::frames::Hkl;
use ringwright_core::instrument::{Instrument, Setting, built_in_machine};
use ringwright_core::orient::{Observation, Peak, orient_by_two};
use ringwright_core::quantity::Component;

const WAVELENGTH_ANGSTROM: f64 = 0.71073;

/// Busing & Levy's senses in our frame: ω, φ and 2θ about (0, −1, 0), κ about (0, −cos 50°, sin 50°), which is inclined from
/// it towards +z by 50° as the built-in one is.
fn machine() -> Instrument {
    let mut description = built_in_machine("kappa-four-circle").unwrap().description().clone();
    let component = |x: f64| Component::new(x).unwrap();
    let down = (component(0.0), component(-1.0), component(0.0));
    let names: Vec<&str> = description.sample_axes.iter().map(|axis| axis.name.as_str()).collect();
    assert_eq!(names, ["omega", "kappa", "phi"]);
    for axis in description.sample_axes.iter_mut().chain(&mut description.detector_axes) {
        axis.direction = down;
    }
    let machine = Instrument::new(description).unwrap();
    let alpha = 50f64.to_radians();
    let kappa = machine.sample_axes()[1].direction.into_inner();
    assert!((kappa - Vector3::new(0.0, -alpha.cos(), alpha.sin())).norm() < 1e-15);
    machine
}

fn peaks() -> Vec<Peak> {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("reference/s1_orient_refln_kappa13.csv");
    let mut reader = csv::ReaderBuilder::new().comment(Some(b'#')).from_path(path).unwrap();
    let columns: Vec<String> = reader.headers().unwrap().iter().map(str::to_owned).collect();
    let rows: Vec<csv::StringRecord> = reader.records().collect::<Result<_, _>>().unwrap();
    rows.iter()
        .map(|row| {
            let get = |name: &str| -> f64 { row[columns.iter().position(|c| c == name).unwrap()].parse().unwrap() };
            let readings = [get("omega_k"), get("kappa"), get("phi_k"), 2.0 * get("theta")];
            Peak::new(Hkl::new(get("h"), get("k"), get("l")), Setting::new(&readings), None).unwrap()
        })
        .collect()
}

#[test]
fn any_two_of_the_measured_reflections_predict_all_thirteen() {
    let cell = UnitCell::new(9.241, 9.241, 20.904, 90.0, 90.0, 120.0).unwrap();
    let (machine, peaks) = (machine(), peaks());
    assert_eq!(peaks.len(), 13);
    let observed: Vec<Vector3<f64>> =
        peaks.iter().map(|p| Observation::of(p, &machine, WAVELENGTH_ANGSTROM).unwrap().direction()).collect();
    let mut worst_of_pair = Vec::new();
    for (i, first) in peaks.iter().enumerate() {
        for (j, second) in peaks.iter().enumerate() {
            let apart = cell.angle_between(first.hkl(), second.hkl()).to_degrees();
            if i == j || !(30.0..=150.0).contains(&apart) {
                continue;
            }
            let u = orient_by_two(&cell, WAVELENGTH_ANGSTROM, &machine, first, second).unwrap();
            let misses = peaks.iter().zip(&observed).map(|(peak, seen)| {
                let predicted = u.orientation.q_in_head(peak.hkl());
                ringwright_core::frames::angle_between(predicted.raw(), seen).to_degrees()
            });
            worst_of_pair.push(misses.fold(0.0, f64::max));
        }
    }
    worst_of_pair.sort_by(f64::total_cmp);
    assert_eq!(worst_of_pair.len(), 116);
    let worst = worst_of_pair[115];
    let median = 0.5 * (worst_of_pair[57] + worst_of_pair[58]);
    assert!((worst - 1.003).abs() < 0.002, "worst {worst}");
    assert!((median - 0.444).abs() < 0.001, "median {median}");
}

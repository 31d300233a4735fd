//! Makes the peaks of the demo sessions: true settings of a crystal turned by a known rotation, with errors of reading added
//! to every axis. Crystal, beam, machine and rules are those of the sessions. Run it with
//! `cargo run --release -p ringwright-acceptance --example demo_peaks`.

use std::error::Error;
use std::io::Write;

use nalgebra::{Rotation3, Unit, Vector3};
use ringwright_acceptance::Gauss;
use ringwright_core::frames::{Hkl, Vector};
use ringwright_core::session::{DEMOS, Demo, MachineLibrary};
use ringwright_core::work;

/// How the crystal of a demo really sits, and which peaks are found with which standard uncertainty in degrees.
struct Truth {
    axis: [f64; 3],
    turn_deg: f64,
    peaks: [([i32; 3], f64); 3],
    seed: u64,
}

const TRUTHS: [Truth; 2] = [
    Truth {
        axis: [0.42, -0.31, 0.85],
        turn_deg: 73.0,
        peaks: [([-2, -1, -3], 0.02), ([-1, 2, 1], 0.02), ([-3, -1, 2], 0.03)],
        seed: 7,
    },
    Truth {
        axis: [-0.55, 0.63, 0.21],
        turn_deg: 128.0,
        peaks: [([1, 2, -5], 0.02), ([2, -1, 4], 0.025), ([0, 2, 6], 0.03)],
        seed: 14,
    },
];

fn main() -> Result<(), Box<dyn Error>> {
    let mut out = std::io::stdout().lock();
    for (demo, truth) in DEMOS.iter().zip(&TRUTHS) {
        writeln!(out, "{}", demo.name)?;
        write_peaks(demo, truth, &mut out)?;
    }
    Ok(())
}

fn write_peaks(demo: &Demo, truth: &Truth, out: &mut impl Write) -> Result<(), Box<dyn Error>> {
    let resolved = demo.open()?.session.resolve(&MachineLibrary::default());
    let inputs = resolved.map_err(|problems| format!("{problems:?}"))?;
    let axis = Unit::new_normalize(Vector3::from(truth.axis));
    let ub = Rotation3::from_axis_angle(&axis, truth.turn_deg.to_radians()).matrix() * inputs.cell.b_matrix();
    let judge = work::judge(&inputs, &ub)?;
    let mut errors = Gauss::new(truth.seed);
    for (hkl, sigma_deg) in truth.peaks {
        let node = Vector::from_raw(ub * Hkl::from(hkl).to_vector());
        let judgement = judge.verdict(node, inputs.wavelength_angstrom);
        let setting = judgement.setting.filter(|_| judgement.verdict.is_reachable()).and_then(|s| s.setting);
        let setting = setting.ok_or_else(|| format!("{hkl:?} is not reachable: {:?}", judgement.verdict))?;
        let axes = inputs.instrument.axes().zip(setting.readings_deg());
        let readings: Vec<String> = axes
            .map(|(axis, reading)| format!("\"{}\": {:.3}", axis.name, reading + sigma_deg * errors.next()))
            .collect();
        let [h, k, l] = hkl;
        writeln!(out, "        (")?;
        writeln!(out, "            h: {h}, k: {k}, l: {l},")?;
        writeln!(out, "            readings_deg: {{{}}},", readings.join(", "))?;
        writeln!(out, "            uncertainty_deg: Some({sigma_deg}),")?;
        writeln!(out, "        ),")?;
    }
    Ok(())
}

use nalgebra::Vector3;
use ringwright_core::aim::{Attempt, Rule, Solver};
use ringwright_core::frames::{Head, Vector};
use ringwright_core::instrument::{Instrument, MachineDescription, Setting};

use crate::turn_between_deg;

fn axis(name: &str, direction: &Vector3<f64>) -> String {
    let (x, y, z) = (direction.x, direction.y, direction.z);
    format!("(name: \"{name}\", direction: ({x:?}, {y:?}, {z:?}), limits: Endless, speed_deg_per_s: 1)")
}

/// A machine with these sample axes, from the base to the crystal, and one detector axis `two_theta`, without limits.
/// It goes through the text of a machine file, as every machine does.
pub fn sample_stack(sample: &[(&str, Vector3<f64>)], two_theta: &Vector3<f64>) -> Instrument {
    let sample: Vec<String> = sample.iter().map(|(name, direction)| axis(name, direction)).collect();
    let text = format!(
        "(version: 1, name: \"machine of a test\", sample_axes: [{}], detector_axes: [{}])",
        sample.join(", "),
        axis("two_theta", two_theta)
    );
    let description: MachineDescription = ron::from_str(&text).expect("the text of a machine");
    Instrument::new(description).expect("a machine that fits together")
}

/// Axes `omega`, one of any name and direction in the middle, `phi`; omega, phi and the detector axis point the same way.
pub fn four_circle(common: &Vector3<f64>, middle: (&str, Vector3<f64>)) -> Instrument {
    sample_stack(&[("omega", *common), middle, ("phi", *common)], common)
}

/// The machine under the rule *bisecting*.
pub fn bisecting(instrument: &Instrument) -> Solver {
    Solver::new(instrument, &[Rule::Bisecting]).expect("bisecting fits a four-circle machine")
}

/// The machine with one axis held at a reading.
pub fn hold(instrument: &Instrument, axis: &str, at_deg: f64) -> Solver {
    let rule: Rule = ron::from_str(&format!("Hold(axis: \"{axis}\", at_deg: {at_deg:?})")).expect("the text of a rule");
    Solver::new(instrument, &[rule]).expect("hold fits a four-circle machine")
}

/// Every setting that the closed forms give for a node in the head frame (Å⁻¹) at a wavelength in Å; empty outside the
/// sphere.
pub fn all_settings(solver: &Solver, q_in_head: Vector<Head>, wavelength_angstrom: f64) -> Vec<Setting> {
    let mut all = Vec::new();
    let _outside = solver.each_attempt(q_in_head, wavelength_angstrom, |attempt| {
        if let Attempt::Setting { setting, .. } = attempt {
            all.push(setting);
        }
    });
    all
}

/// Whether one of the settings has these readings in degrees, modulo full turns and within a tolerance.
pub fn settings_contain(settings: &[Setting], readings_deg: &[f64], tolerance_deg: f64) -> bool {
    settings.iter().any(|setting| {
        setting.readings_deg().len() == readings_deg.len()
            && setting
                .readings_deg()
                .iter()
                .zip(readings_deg)
                .all(|(a, b)| turn_between_deg(*a, *b).abs() <= tolerance_deg)
    })
}

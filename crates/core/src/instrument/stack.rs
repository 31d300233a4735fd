use nalgebra::{Rotation3, Unit, Vector3};

use super::{Axis, AxisDescription, MAX_AXES, MachineDescription, MachineProblem, Setting, Travel};
use crate::frames::{Head, Lab, Rotation, Vector};

/// A machine whose description has passed every check: two stacks of axes, the spindle among them, the forbidden cone.
#[derive(Debug, Clone, PartialEq)]
pub struct Instrument {
    description: MachineDescription,
    axes: Vec<Axis>,
    sample_count: usize,
    spindle: usize,
}

impl Instrument {
    /// Checks how the numbers of a description fit together.
    ///
    /// # Errors
    /// The first misfit, with the path of the field below the machine.
    pub fn new(description: MachineDescription) -> Result<Self, MachineProblem> {
        let sample = check_axes(&description.sample_axes, "sample_axes")?;
        let detector = check_axes(&description.detector_axes, "detector_axes")?;
        let sample_count = sample.len();
        let axes: Vec<Axis> = sample.into_iter().chain(detector).collect();
        if axes.len() > MAX_AXES {
            let message = format!("{} axes are more than the {MAX_AXES} that a machine may have", axes.len());
            return Err(MachineProblem::new("sample_axes", message));
        }
        check_names(&axes, sample_count)?;
        let spindle = find_spindle(&description, &axes[..sample_count])?;
        Ok(Self { description, axes, sample_count, spindle })
    }

    /// What the machine's file said.
    pub fn description(&self) -> &MachineDescription {
        &self.description
    }

    /// What people call it.
    pub fn name(&self) -> &str {
        &self.description.name
    }

    /// All axes: sample axes from the base to the crystal, then detector axes from the base to the detector.
    pub fn axes(&self) -> impl ExactSizeIterator<Item = &Axis> + DoubleEndedIterator + Clone {
        self.axes.iter()
    }

    /// The number of axes, sample and detector together.
    pub fn axis_count(&self) -> usize {
        self.axes.len()
    }

    /// Sample axes from the base to the crystal.
    pub fn sample_axes(&self) -> &[Axis] {
        &self.axes[..self.sample_count]
    }

    /// Detector axes from the base to the detector.
    pub fn detector_axes(&self) -> &[Axis] {
        &self.axes[self.sample_count..]
    }

    /// The position of an axis in [`Self::axes`] by its name.
    pub fn axis_index(&self, name: &str) -> Option<usize> {
        self.axes.iter().position(|axis| axis.name.as_str() == name)
    }

    /// The position of the spindle among the sample axes.
    pub fn spindle(&self) -> usize {
        self.spindle
    }

    /// Half angle in degrees of the cone about the direct beam that the detector must not enter.
    pub fn direct_beam_half_angle_deg(&self) -> f64 {
        self.description.direct_beam_half_angle_deg.get()
    }

    /// The setting where every axis rests.
    pub fn park(&self) -> Setting {
        let readings: Vec<f64> = self.axes.iter().map(|axis| axis.park_deg).collect();
        Setting::new(&readings)
    }

    /// R at a setting: takes the head frame into the lab frame.
    pub fn lab_from_head(&self, setting: &Setting) -> Rotation<Lab, Head> {
        Rotation::from_rotation(product(self.sample_axes(), setting.readings_deg()))
    }

    /// The direction from the sample to the detector at a setting, k̂_f, in the lab frame.
    pub fn diffracted_direction(&self, setting: &Setting) -> Vector<Lab> {
        let readings = setting.readings_deg().get(self.sample_count..).unwrap_or(&[]);
        Vector::from_raw(product(self.detector_axes(), readings) * Vector3::z())
    }

    /// Q = k_f − k_i in Å⁻¹ that the detector looks at, in the lab frame, for a wavelength in Å.
    pub fn q_in_lab(&self, setting: &Setting, wavelength_angstrom: f64) -> Vector<Lab> {
        (self.diffracted_direction(setting) - Vector::new(0.0, 0.0, 1.0)) * (1.0 / wavelength_angstrom)
    }

    /// 2θ in radians, 0 to π: the angle from the direct beam to the detector.
    pub fn two_theta_rad(&self, setting: &Setting) -> f64 {
        self.diffracted_direction(setting).angle_to(&Vector::new(0.0, 0.0, 1.0))
    }
}

/// Outermost first: R₁(t₁) R₂(t₂) … Rₙ(tₙ).
fn product(axes: &[Axis], readings_deg: &[f64]) -> Rotation3<f64> {
    axes.iter().zip(readings_deg).fold(Rotation3::identity(), |outer, (axis, &reading)| {
        outer * Rotation3::from_axis_angle(&axis.direction, axis.angle_rad(reading))
    })
}

fn check_axes(axes: &[AxisDescription], list: &str) -> Result<Vec<Axis>, MachineProblem> {
    if axes.is_empty() {
        return Err(MachineProblem::new(list, "the list is empty; accepted is at least one axis"));
    }
    axes.iter().enumerate().map(|(i, axis)| check_axis(axis, &format!("{list}[{i}]"))).collect()
}

fn check_axis(axis: &AxisDescription, path: &str) -> Result<Axis, MachineProblem> {
    let (x, y, z) = axis.direction;
    let Some(direction) = Unit::try_new(Vector3::new(x.get(), y.get(), z.get()), 1e-6) else {
        let message =
            format!("the direction of axis {} has no length; accepted is any vector but (0, 0, 0)", axis.name);
        return Err(MachineProblem::new(format!("{path}.direction"), message));
    };
    let travel = Travel::new(&axis.limits, axis.approach, &format!("{path}.limits"))?;
    let park = axis.park_deg.get();
    if travel.clearance_as_read_deg(park) < 0.0 {
        let intervals: Vec<String> = travel.intervals_deg().map(|(a, b)| format!("{a}° to {b}°")).collect();
        let message = format!(
            "the park reading {park}° of axis {} lies outside its limits (overshoot taken off); accepted is {}",
            axis.name,
            intervals.join(" or ")
        );
        return Err(MachineProblem::new(format!("{path}.park_deg"), message));
    }
    Ok(Axis {
        name: axis.name.clone(),
        direction,
        travel,
        speed_deg_per_s: axis.speed_deg_per_s.get(),
        overhead_s: axis.overhead_s.get(),
        zero_offset_deg: axis.zero_offset_deg.get(),
        park_deg: park,
        approach: axis.approach,
        set_by_hand: axis.set_by_hand,
    })
}

fn check_names(axes: &[Axis], sample_count: usize) -> Result<(), MachineProblem> {
    for (i, axis) in axes.iter().enumerate() {
        let double = axes[..i].iter().any(|other| other.name.as_str().eq_ignore_ascii_case(axis.name.as_str()));
        if double {
            let path = match i.checked_sub(sample_count) {
                None => format!("sample_axes[{i}].name"),
                Some(j) => format!("detector_axes[{j}].name"),
            };
            let message = format!("two axes are called {}; accepted is a name of its own for each", axis.name);
            return Err(MachineProblem::new(path, message));
        }
    }
    Ok(())
}

fn find_spindle(description: &MachineDescription, sample: &[Axis]) -> Result<usize, MachineProblem> {
    let Some(name) = &description.spindle else {
        let innermost = sample.iter().rposition(|axis| !axis.set_by_hand);
        return innermost.ok_or_else(|| {
            MachineProblem::new("sample_axes", "every sample axis is set by hand; accepted is at least one that moves")
        });
    };
    match sample.iter().position(|axis| axis.name == *name) {
        Some(i) if !sample[i].set_by_hand => Ok(i),
        Some(_) => Err(MachineProblem::new(
            "spindle",
            format!("the spindle {name} is set by hand; accepted is an axis that moves"),
        )),
        None => {
            let names: Vec<&str> = sample.iter().map(|axis| axis.name.as_str()).collect();
            let message = format!("{name} is no sample axis; accepted are {}", names.join(", "));
            Err(MachineProblem::new("spindle", message))
        }
    }
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::super::{BUILT_IN_MACHINES, built_in_machine};
    use super::*;

    fn turned(machine: &str, axis: &str, head: [f64; 3]) -> Vector3<f64> {
        let instrument = built_in_machine(machine).unwrap();
        let mut readings = vec![0.0; instrument.axis_count()];
        readings[instrument.axis_index(axis).unwrap()] = 10.0;
        let [x, y, z] = head;
        *(instrument.lab_from_head(&Setting::new(&readings)) * Vector::new(x, y, z)).raw()
    }

    /// Signs pinned on basis vectors: +10° moves a named vector to a named side.
    #[test]
    fn positive_angles_turn_the_crystal_the_right_handed_way() {
        for machine in ["eulerian-four-circle", "kappa-four-circle", "fixed-chi-three-circle"] {
            let v = turned(machine, "omega", [0.0, 0.0, 1.0]);
            assert!(v.x > 0.17, "{machine}: omega takes downstream to the left");
        }
        assert!(turned("eulerian-four-circle", "phi", [0.0, 0.0, 1.0]).x > 0.17, "phi takes downstream to the left");
        assert!(turned("kappa-four-circle", "phi", [0.0, 0.0, 1.0]).x > 0.17, "phi takes downstream to the left");
        assert!(turned("eulerian-four-circle", "chi", [1.0, 0.0, 0.0]).y > 0.17, "chi takes left to up");
        assert!(
            turned("kappa-four-circle", "kappa", [1.0, 0.0, 0.0]).y > 0.13,
            "kappa takes left to up, sin 50° of it"
        );
        assert!(turned("fixed-chi-three-circle", "phi", [0.0, 0.0, 1.0]).x > 0.09, "the tilted phi: left, cos χ of it");
    }

    #[test]
    fn a_positive_detector_angle_swings_the_detector_to_the_left() {
        for (machine, _) in BUILT_IN_MACHINES {
            let instrument = built_in_machine(machine).unwrap();
            let mut readings = vec![0.0; instrument.axis_count()];
            *readings.last_mut().unwrap() = 10.0;
            let setting = Setting::new(&readings);
            assert!(instrument.diffracted_direction(&setting).raw().x > 0.17);
            assert!((instrument.two_theta_rad(&setting).to_degrees() - 10.0).abs() < 1e-12);
            let q = instrument.q_in_lab(&setting, 0.5);
            assert!((q.norm() - 2.0 * 5f64.to_radians().sin() / 0.5).abs() < 1e-12, "|Q| = 2 sin θ / λ");
        }
    }

    fn refused(change: impl Fn(&mut MachineDescription)) -> MachineProblem {
        let mut description: MachineDescription = ron::from_str(BUILT_IN_MACHINES[0].1).unwrap();
        change(&mut description);
        Instrument::new(description).unwrap_err()
    }

    #[test]
    fn misfits_are_refused_with_their_place() {
        let double = refused(|d| d.detector_axes[0].name = d.sample_axes[0].name.clone());
        assert_eq!(double.path, "detector_axes[0].name");
        let zero = crate::quantity::Component::new(0.0).unwrap();
        assert_eq!(refused(|d| d.sample_axes[1].direction = (zero, zero, zero)).path, "sample_axes[1].direction");
        assert_eq!(refused(|d| d.sample_axes.clear()).path, "sample_axes");
        let far = crate::quantity::Degrees::new(999.0).unwrap();
        assert_eq!(refused(|d| d.sample_axes[0].park_deg = far).path, "sample_axes[0].park_deg");
        let name = super::super::AxisName::new("two_theta").unwrap();
        assert_eq!(refused(|d| d.spindle = Some(name.clone())).path, "spindle");
        assert_eq!(refused(|d| d.sample_axes[2].set_by_hand = true).path, "spindle");
    }
}

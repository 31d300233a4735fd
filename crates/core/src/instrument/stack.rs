use nalgebra::{Rotation3, Unit, Vector3};

use super::{Axis, AxisDescription, MAX_AXES, MachineDescription, MachineProblem, Setting, Travel};
use crate::frames::{Head, Lab, Rotation, Vector};
use crate::quantity::Component;

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
    let direction = direction_in_lab(axis, path)?;
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

/// Shorter directions and sideways parts than this say nothing about where they point.
const NO_LENGTH: f64 = 1e-6;

/// The unit vector of an axis in the lab frame, its inclination included.
fn direction_in_lab(axis: &AxisDescription, path: &str) -> Result<Unit<Vector3<f64>>, MachineProblem> {
    let vector = |(x, y, z): (Component, Component, Component)| Vector3::new(x.get(), y.get(), z.get());
    let Some(straight) = Unit::try_new(vector(axis.direction), NO_LENGTH) else {
        let message =
            format!("the direction of axis {} has no length; accepted is any vector but (0, 0, 0)", axis.name);
        return Err(MachineProblem::new(format!("{path}.direction"), message));
    };
    let Some(inclined) = axis.inclined else { return Ok(straight) };
    let refused = |what: &str| {
        let message = format!(
            "axis {} is inclined towards a vector that {what}; accepted is any vector that is not parallel to its direction",
            axis.name
        );
        MachineProblem::new(format!("{path}.inclined.towards"), message)
    };
    let towards =
        Unit::try_new(vector(inclined.towards), NO_LENGTH).ok_or_else(|| refused("has no length"))?.into_inner();
    let sideways = Unit::try_new(towards - straight.into_inner() * straight.dot(&towards), NO_LENGTH)
        .ok_or_else(|| refused("is parallel to its direction"))?;
    let (sin, cos) = inclined.by_deg.get().to_radians().sin_cos();
    Ok(Unit::new_normalize(straight.into_inner() * cos + sideways.into_inner() * sin))
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
mod tests;

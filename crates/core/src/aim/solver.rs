use nalgebra::Vector3;

use super::bisecting::Bisecting;
use super::chain::Chain;
use super::detector::{DetectorArm, DetectorPlace};
use super::pair::Pair;
use super::rule::Rule;
use crate::frames::{Head, Vector};
use crate::instrument::{Instrument, MAX_AXES, Setting};

/// Rules that do not fit the machine.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
pub enum RuleError {
    /// Too few or too many rules for the spare angles.
    #[error("{}", count_message(*sample, *detector, *spare, *rules))]
    Count {
        /// Sample axes that are not set by hand.
        sample: usize,
        /// Detector axes.
        detector: usize,
        /// n + m − 3.
        spare: isize,
        /// Rules given.
        rules: usize,
    },
    /// A held axis that the machine does not have.
    #[error("hold: there is no sample axis {name}; accepted are {accepted}")]
    UnknownAxis {
        /// What was asked for.
        name: String,
        /// The names that would do.
        accepted: String,
    },
    /// With one detector axis that axis follows from |Q| alone.
    #[error("hold: {0} is the only detector axis, which 2θ settles; accepted is a sample axis")]
    DetectorHeld(String),
    /// Held by hand already.
    #[error("hold: {0} is set by hand and never moves; accepted is an axis that moves")]
    SetByHand(String),
    /// The same axis held by two rules.
    #[error("hold: {0} is held by two rules; accepted is one rule for each spare angle")]
    HeldTwice(String),
    /// A held reading beyond the limits.
    #[error("hold: {at_deg}° lies outside the limits of {axis} by {over_deg}°")]
    HeldOutsideLimits {
        /// The axis.
        axis: String,
        /// The reading.
        at_deg: String,
        /// By how many degrees, as text.
        over_deg: String,
    },
    /// The spindle is not where *bisecting* needs it.
    #[error(
        "bisecting: the spindle must be the innermost moving axis and no two neighbouring axes parallel; use hold on this machine"
    )]
    NotBisectable,
    /// An arrangement that the closed forms here do not cover.
    #[error(
        "a machine with {sample} moving sample and {detector} detector axes is not covered yet; accepted are two or three sample axes and one detector axis across the beam"
    )]
    NotCovered {
        /// Sample axes that move.
        sample: usize,
        /// Detector axes.
        detector: usize,
    },
}

/// A node beyond the sphere of radius 2/λ.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct OutsideSphere {
    /// The longest wavelength, 2d, at which it can diffract, in Å.
    pub longest_wavelength_angstrom: f64,
}

/// Which of the closed-form solutions a setting is: a number that stays the same from node to node. The first half has
/// the detector at positive angles.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub struct Branch(pub u8);

/// What is free at a singular place, where one value of many was taken.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Freedom {
    /// Nothing: the setting is isolated.
    None,
    /// Q lies along the innermost moving axis, whose angle is free; 0 was taken.
    InnerAxis,
    /// Q lies along the outermost moving axis, whose angle is free; 0 was taken.
    OuterAxis,
    /// Innermost and outermost moving axis lie along one line: only the sum (or difference) of their angles counts.
    OnlySumFixed,
}

/// One closed-form solution before limits: the readings modulo 360°, or by how much it fails.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Attempt {
    /// The axes make it.
    Setting {
        /// Which solution.
        branch: Branch,
        /// Dial readings in degrees, each up to full turns.
        setting: Setting,
        /// What was free.
        freedom: Freedom,
    },
    /// The stack cannot turn the crystal or the detector that far.
    CannotMake {
        /// Which solution.
        branch: Branch,
        /// By how many degrees it misses.
        by_deg: f64,
    },
}

/// Solves the diffraction condition R U B h = Q for one machine under one set of rules.
#[derive(Debug, Clone, PartialEq)]
pub struct Solver {
    chain: Chain,
    arm: DetectorArm,
    method: Method,
    /// Readings of held axes; the others are filled in.
    template_deg: [f64; MAX_AXES],
    zero_deg: [f64; MAX_AXES],
    moving: Vec<usize>,
    axis_count: usize,
}

#[derive(Debug, Clone, PartialEq)]
enum Method {
    Bisecting(Bisecting),
    Pair(Pair),
}

impl Solver {
    /// Prepares a machine under a set of rules.
    ///
    /// # Errors
    /// If the rules do not fit the machine; the count of spare angles is in the message.
    pub fn new(instrument: &Instrument, rules: &[Rule]) -> Result<Self, RuleError> {
        let sample = instrument.sample_axes();
        let mut held_deg: Vec<Option<f64>> = sample.iter().map(|a| a.set_by_hand.then_some(a.park_deg)).collect();
        let moving_count = held_deg.iter().filter(|held| held.is_none()).count();
        let detector = instrument.detector_axes().len();
        let spare = moving_count as isize + detector as isize - 3;
        if spare != rules.len() as isize {
            return Err(RuleError::Count { sample: moving_count, detector, spare, rules: rules.len() });
        }
        for rule in rules {
            if let Rule::Hold { axis, at_deg } = rule {
                hold(instrument, axis.as_str(), at_deg.get(), &mut held_deg)?;
            }
        }
        let not_covered = || RuleError::NotCovered { sample: moving_count, detector };
        let [detector_axis] = instrument.detector_axes() else { return Err(not_covered()) };
        let arm = DetectorArm::new(&detector_axis.direction).ok_or_else(not_covered)?;
        let chain = Chain::new(instrument, &held_deg);
        let method = match chain.indices.len() {
            2 => Method::Pair(Pair::new(&chain).ok_or_else(not_covered)?),
            3 if bisectable(instrument, &chain) => {
                Method::Bisecting(Bisecting::new(&chain, &arm).ok_or(RuleError::NotBisectable)?)
            }
            3 => return Err(RuleError::NotBisectable),
            _ => return Err(not_covered()),
        };
        let (mut template_deg, mut zero_deg) = ([0.0; MAX_AXES], [0.0; MAX_AXES]);
        for (i, axis) in instrument.axes().enumerate() {
            template_deg[i] = held_deg.get(i).copied().flatten().unwrap_or(0.0);
            zero_deg[i] = axis.zero_offset_deg;
        }
        let moving = chain.indices.clone();
        Ok(Self { chain, arm, method, template_deg, zero_deg, moving, axis_count: instrument.axis_count() })
    }

    /// The sample axes that move, as positions among all axes.
    pub fn moving_sample_axes(&self) -> &[usize] {
        &self.moving
    }

    /// How many closed-form solutions there are for each reflection, counted without limits.
    pub fn branch_count(&self) -> usize {
        match self.method {
            Method::Bisecting(_) => 8,
            Method::Pair(_) => 4,
        }
    }

    /// Every closed-form solution for a node at `q_in_head` = U B h (Å⁻¹, not zero) and a wavelength in Å, in the order of
    /// branches.
    ///
    /// # Errors
    /// If the node lies outside the sphere of radius 2/λ.
    #[inline]
    pub fn each_attempt(
        &self,
        q_in_head: Vector<Head>,
        wavelength_angstrom: f64,
        mut found: impl FnMut(Attempt),
    ) -> Result<(), OutsideSphere> {
        let length = q_in_head.norm();
        let sin_theta = 0.5 * wavelength_angstrom * length;
        // A node on the sphere's edge to rounding, d = λ/2, is on it.
        if sin_theta > 1.0 + 1e-14 {
            return Err(OutsideSphere { longest_wavelength_angstrom: 2.0 / length });
        }
        let carried = self.chain.held * (q_in_head.raw() / length);
        match self.arm.places(sin_theta.min(1.0)) {
            Ok(places) => self.sample_attempts(&carried, &places, &mut found),
            Err(by_rad) => {
                for branch in 0..self.branch_count() {
                    found(Attempt::CannotMake { branch: Branch(branch as u8), by_deg: by_rad.to_degrees() });
                }
            }
        }
        Ok(())
    }

    #[inline]
    fn sample_attempts(&self, carried: &Vector3<f64>, places: &[DetectorPlace; 2], found: &mut impl FnMut(Attempt)) {
        match &self.method {
            Method::Bisecting(method) => method.each(carried, places, |sign, way, result| {
                let angle_rad = places[usize::from(sign)].angle_rad;
                let result = result.map(|a| (self.setting(&a.angles_rad, angle_rad), a.freedom));
                found(attempt(Branch(4 * sign + way), result));
            }),
            Method::Pair(method) => {
                for (sign, place) in places.iter().enumerate() {
                    let ways = method.angles(carried, &place.q);
                    for way in 0..2 {
                        let result = ways.map(|ways| {
                            let way = ways[usize::from(way)];
                            (self.setting(&way.angles_rad, place.angle_rad), way.freedom)
                        });
                        found(attempt(Branch(2 * sign as u8 + way), result));
                    }
                }
            }
        }
    }

    #[inline]
    fn setting(&self, sample_rad: &[f64], detector_rad: f64) -> Setting {
        let mut readings = self.template_deg;
        for (&axis, angle) in self.moving.iter().zip(sample_rad) {
            readings[axis] = angle.to_degrees() + self.zero_deg[axis];
        }
        let detector = self.axis_count - 1;
        readings[detector] = detector_rad.to_degrees() + self.zero_deg[detector];
        Setting::from_array(readings, self.axis_count)
    }
}

#[inline]
fn attempt(branch: Branch, result: Result<(Setting, Freedom), f64>) -> Attempt {
    match result {
        Ok((setting, freedom)) => Attempt::Setting { branch, setting, freedom },
        Err(by_rad) => Attempt::CannotMake { branch, by_deg: by_rad.to_degrees() },
    }
}

fn hold(instrument: &Instrument, name: &str, at_deg: f64, held_deg: &mut [Option<f64>]) -> Result<(), RuleError> {
    let sample = instrument.sample_axes();
    let Some(i) = sample.iter().position(|axis| axis.name.as_str() == name) else {
        if instrument.axis_index(name).is_some() {
            return Err(RuleError::DetectorHeld(name.to_owned()));
        }
        let accepted: Vec<&str> = sample.iter().map(|axis| axis.name.as_str()).collect();
        return Err(RuleError::UnknownAxis { name: name.to_owned(), accepted: accepted.join(", ") });
    };
    if sample[i].set_by_hand {
        return Err(RuleError::SetByHand(name.to_owned()));
    }
    if held_deg[i].is_some() {
        return Err(RuleError::HeldTwice(name.to_owned()));
    }
    let clearance = sample[i].travel.clearance_as_read_deg(at_deg);
    if clearance < 0.0 {
        let over_deg = format!("{:.4}", -clearance);
        return Err(RuleError::HeldOutsideLimits { axis: name.to_owned(), at_deg: at_deg.to_string(), over_deg });
    }
    held_deg[i] = Some(at_deg);
    Ok(())
}

/// Whether the spindle is innermost and the reference axis, the third from inside, the outermost of those that move.
fn bisectable(instrument: &Instrument, chain: &Chain) -> bool {
    let motors = instrument.sample_axes().iter().enumerate().filter(|(_, axis)| !axis.set_by_hand).map(|(i, _)| i);
    let from_inside: Vec<usize> = motors.rev().collect();
    let last = chain.indices.last().copied();
    from_inside.first().copied() == last
        && last == Some(instrument.spindle())
        && from_inside.get(2) == chain.indices.first()
}

fn count_message(sample: usize, detector: usize, spare: isize, rules: usize) -> String {
    let machine = format!("the machine has {sample} moving sample axes and {detector} detector axes");
    if spare < 0 {
        return format!("{machine}, too few to bring any node into the detector; accepted are at least three in all");
    }
    let spare_text = match spare {
        0 => "no angle is spare".to_owned(),
        1 => "1 angle is spare".to_owned(),
        n => format!("{n} angles are spare"),
    };
    let rules_text = match rules {
        0 => "no rule is given".to_owned(),
        1 => "1 rule is given".to_owned(),
        n => format!("{n} rules are given"),
    };
    let accepted =
        if spare == 0 { "no rule" } else { "exactly one rule for each spare angle (Bisecting, or Hold of an axis)" };
    format!("{machine}: {sample} + {detector} − 3 = {spare}, so {spare_text}, but {rules_text}; accepted is {accepted}")
}

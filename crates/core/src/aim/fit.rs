use super::chain::Chain;
use super::rule::Rule;
use crate::instrument::Instrument;

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

/// The reading of each sample axis that does not move, set by hand or held by a rule.
///
/// # Errors
/// If there are more or fewer rules than spare angles, or if an axis cannot be held.
pub(super) fn held_readings(instrument: &Instrument, rules: &[Rule]) -> Result<Vec<Option<f64>>, RuleError> {
    let axes = instrument.sample_axes();
    let mut held_deg: Vec<Option<f64>> = axes.iter().map(|a| a.set_by_hand.then_some(a.park_deg)).collect();
    let sample = held_deg.iter().filter(|held| held.is_none()).count();
    let detector = instrument.detector_axes().len();
    let spare = sample as isize + detector as isize - 3;
    if spare != rules.len() as isize {
        return Err(RuleError::Count { sample, detector, spare, rules: rules.len() });
    }
    for rule in rules {
        if let Rule::Hold { axis, at_deg } = rule {
            hold(instrument, axis.as_str(), at_deg.get(), &mut held_deg)?;
        }
    }
    Ok(held_deg)
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
pub(super) fn bisectable(instrument: &Instrument, chain: &Chain) -> bool {
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

//! Whether rules fit a machine: each by itself, beside the others, and all together against the count of spare angles.

use super::Reference;
use super::chain::Chain;
use super::rule::Rule;
use crate::instrument::{Axis, AxisName, Instrument, LIMIT_DUST_DEG};

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
    /// One rule that cannot be kept on this machine.
    #[error(transparent)]
    Rule(#[from] RuleProblem),
    /// Two rules settle the same freedom.
    #[error("{first} and {second} settle the same freedom: {freedom}; accepted is one of them, and another rule")]
    SameFreedom {
        /// A rule.
        first: String,
        /// The other.
        second: String,
        /// What both settle.
        freedom: &'static str,
    },
    /// An azimuth or a surface has no direction as long as nobody knows how the crystal sits.
    #[error(
        "{0}: this rule needs the crystal's orientation; accepted are two peaks, or an orientation kept from earlier"
    )]
    NeedsOrientation(&'static str),
    /// A combination that the roads here do not reach.
    #[error("{0}")]
    NotCovered(String),
}

/// What is wrong with one rule, and where.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[error("{word}: {message}")]
pub struct RuleProblem {
    /// Its number among the rules, from 0.
    pub rule: usize,
    /// Its name in messages.
    pub word: &'static str,
    /// Path of the field below the rule, for example `Hold.axis`; empty for the rule itself.
    pub field: &'static str,
    /// What is wrong and what would be accepted.
    pub message: String,
}

/// Sample axes that move.
pub(super) fn moving_sample(instrument: &Instrument) -> impl Iterator<Item = usize> + '_ {
    instrument.sample_axes().iter().enumerate().filter(|(_, axis)| !axis.set_by_hand).map(|(i, _)| i)
}

/// The reading of each sample axis that does not move, set by hand or held; nothing if other rules than *hold* and
/// *bisecting* about the usual axis are among them.
pub(super) fn held_readings(instrument: &Instrument, rules: &[Rule]) -> Option<Vec<Option<f64>>> {
    let axes = instrument.sample_axes();
    let mut held_deg: Vec<Option<f64>> = axes.iter().map(|axis| axis.set_by_hand.then_some(axis.park_deg)).collect();
    for rule in rules {
        match rule {
            Rule::Bisecting => {}
            Rule::Hold { axis, at_deg } => {
                let held = axes.iter().position(|other| other.name == *axis)?;
                held_deg[held] = Some(at_deg.get());
            }
            _ => return None,
        }
    }
    Some(held_deg)
}

/// Whether the spindle is innermost and the reference axis, the third from inside, the outermost of those that move.
pub(super) fn bisectable(instrument: &Instrument, chain: &Chain) -> bool {
    let from_inside: Vec<usize> = moving_sample(instrument).collect();
    let last = chain.indices.last().copied();
    from_inside.last().copied() == last
        && last == Some(instrument.spindle())
        && from_inside.iter().rev().nth(2) == chain.indices.first()
}

/// The position of the reference axis of *bisecting*: the third moving sample axis from inside unless a rule names it.
pub(super) fn reference_axis(instrument: &Instrument, rules: &[Rule]) -> Option<usize> {
    let named = rules.iter().find_map(|rule| match rule {
        Rule::BisectingAbout { axis } => Some(axis),
        _ => None,
    });
    match named {
        Some(name) => instrument.axis_index(name.as_str()),
        None => {
            let from_inside: Vec<usize> = moving_sample(instrument).collect();
            from_inside.iter().rev().nth(2).copied()
        }
    }
}

/// Everything that is wrong with single rules, or with a rule beside an earlier one. `surface` is the crystal's, if it has
/// one; nothing if nobody knows.
pub fn problems(instrument: &Instrument, rules: &[Rule], surface: Option<Option<&Reference>>) -> Vec<RuleProblem> {
    let one = |(i, rule): (usize, &Rule)| {
        let check = Check { instrument, earlier: rules.get(..i).unwrap_or(&[]), surface };
        let problem = |(field, message)| RuleProblem { rule: i, word: rule.word(), field, message };
        check.rule(rule).map_err(problem).err()
    };
    rules.iter().enumerate().filter_map(one).collect()
}

/// All checks that need no orientation.
///
/// # Errors
/// The first problem: of a rule, of the count, of two rules that settle the same.
pub(super) fn check(
    instrument: &Instrument,
    rules: &[Rule],
    surface: Option<Option<&Reference>>,
) -> Result<(), RuleError> {
    let sample = moving_sample(instrument).count();
    let detector = instrument.detector_axes().len();
    let spare = sample as isize + detector as isize - 3;
    if let Some(problem) = problems(instrument, rules, surface).into_iter().next() {
        return Err(problem.into());
    }
    if let Some(clash) = clash(rules, instrument) {
        return Err(clash);
    }
    if spare != rules.len() as isize {
        return Err(RuleError::Count { sample, detector, spare, rules: rules.len() });
    }
    if detector > 2 {
        return Err(RuleError::NotCovered(format!(
            "a machine with {detector} detector axes is not covered; accepted are one or two"
        )));
    }
    Ok(())
}

/// Two rules that settle the same freedom, even when the count fits.
fn clash(rules: &[Rule], instrument: &Instrument) -> Option<RuleError> {
    let pair_of = |freedom: &'static str, settles: &dyn Fn(&Rule) -> bool| {
        let mut which = rules.iter().filter(|rule| settles(rule));
        let (first, second) = (which.next()?, which.next()?);
        Some(RuleError::SameFreedom { first: first.word().to_owned(), second: second.word().to_owned(), freedom })
    };
    let is_detector = |name: &AxisName| instrument.detector_axes().iter().any(|axis| axis.name == *name);
    let of_detector = |rule: &Rule| match rule {
        Rule::Hold { axis, .. } | Rule::Tie { axis, .. } => is_detector(axis),
        Rule::DiffractionPlane { .. } => true,
        _ => false,
    };
    let bisecting = |rule: &Rule| matches!(rule, Rule::Bisecting | Rule::BisectingAbout { .. });
    pair_of("the azimuth", &Rule::settles_azimuth)
        .or_else(|| pair_of("the plane that holds the spindle", &bisecting))
        .or_else(|| pair_of("how the detector follows Q around the beam", &of_detector))
}

/// One rule against the machine and the rules before it.
struct Check<'a> {
    instrument: &'a Instrument,
    earlier: &'a [Rule],
    surface: Option<Option<&'a Reference>>,
}

type Refusal = (&'static str, String);

impl Check<'_> {
    fn rule(&self, rule: &Rule) -> Result<(), Refusal> {
        if self.earlier.contains(rule) && !matches!(rule, Rule::Hold { .. }) {
            return Err(("", "this rule stands here twice; accepted is one rule for each spare angle".to_owned()));
        }
        if rule.needs_surface() {
            return match self.surface {
                None => Ok(()),
                Some(None) => {
                    Err(("", "the crystal has no surface; accepted is a crystal with one (crystal.surface)".to_owned()))
                }
                Some(Some(surface)) => direction(surface, "the surface normal", ""),
            };
        }
        match rule {
            Rule::Bisecting => self.bisecting(),
            Rule::BisectingAbout { axis } => self.reference(axis),
            Rule::Hold { axis, at_deg } => self.hold(axis, at_deg.get()),
            Rule::Azimuth { reference, .. } => direction(reference, "the reference", "Azimuth.reference"),
            Rule::Freest { reference, .. } => direction(reference, "the reference", "Freest.reference"),
            Rule::Tie { axis, to, factor, .. } => self.tie(axis, to, factor.get()),
            Rule::DiffractionPlane { .. } if self.instrument.detector_axes().len() < 2 => {
                Err(("", "the only detector axis leaves no choice; accepted is a machine with two".to_owned()))
            }
            _ => Ok(()),
        }
    }

    fn bisecting(&self) -> Result<(), Refusal> {
        if moving_sample(self.instrument).count() < 3 {
            // Where no angle is spare, the count says more.
            let spare = moving_sample(self.instrument).count() + self.instrument.detector_axes().len() > 3;
            let message = "the machine has no third sample axis from inside; accepted is BisectingAbout(axis: …)";
            return if spare { Err(("", message.to_owned())) } else { Ok(()) };
        }
        Ok(())
    }

    fn reference(&self, name: &AxisName) -> Result<(), Refusal> {
        let spindle = &self.instrument.sample_axes()[self.instrument.spindle()].name;
        let others = || words(self.instrument.sample_axes().iter().map(|axis| &axis.name).filter(|n| *n != spindle));
        let known = self.instrument.sample_axes().iter().any(|axis| axis.name == *name);
        if !known || name == spindle {
            let message =
                format!("{name} cannot be the reference axis of spindle {spindle}; accepted is one of {}", others());
            return Err(("BisectingAbout.axis", message));
        }
        Ok(())
    }

    /// An axis that a rule may settle. `field` is where its name stands.
    fn own(&self, name: &AxisName, verb: &str, field: &'static str) -> Result<&Axis, Refusal> {
        let instrument = self.instrument;
        let free = settleable(instrument);
        let accepted = words(free.iter().map(|axis| &axis.name));
        let Some(axis) = instrument.axes().find(|axis| axis.name == *name) else {
            return Err((field, format!("{} has no axis {name}; accepted is one of {accepted}", instrument.name())));
        };
        if axis.set_by_hand {
            return Err((field, format!("{name} is set by hand and held already; accepted is one of {accepted}")));
        }
        if !free.iter().any(|axis| axis.name == *name) {
            let message = format!("{name} is the only detector axis, which 2θ settles; accepted is one of {accepted}");
            return Err((field, message));
        }
        let held = |rule: &Rule| matches!(rule, Rule::Hold { axis, .. } if axis == name);
        if verb == "held" && self.earlier.iter().any(held) {
            return Err((field, format!("{name} is held by two rules; accepted is one rule for each axis")));
        }
        Ok(axis)
    }

    fn hold(&self, name: &AxisName, at_deg: f64) -> Result<(), Refusal> {
        let axis = self.own(name, "held", "Hold.axis")?;
        let over = -axis.travel.check(at_deg).clearance_deg;
        if over > LIMIT_DUST_DEG {
            let intervals: Vec<String> = axis.travel.intervals_deg().map(|(a, b)| format!("{a}° to {b}°")).collect();
            let message = format!(
                "{at_deg}° lies {over:.4}° outside the limits of {name}; accepted is {} (overshoot taken off), or a full turn \
                 from it",
                intervals.join(" or ")
            );
            return Err(("Hold.at_deg", message));
        }
        Ok(())
    }

    fn tie(&self, name: &AxisName, to: &AxisName, factor: f64) -> Result<(), Refusal> {
        self.own(name, "tied", "Tie.axis")?;
        let moving = || {
            words(self.instrument.axes().filter(|axis| !axis.set_by_hand && axis.name != *name).map(|axis| &axis.name))
        };
        let Some(other) = self.instrument.axes().find(|axis| axis.name == *to) else {
            return Err((
                "Tie.to",
                format!("{} has no axis {to}; accepted is one of {}", self.instrument.name(), moving()),
            ));
        };
        if to == name || other.set_by_hand {
            return Err(("Tie.to", format!("{name} cannot follow {to}; accepted is one of {}", moving())));
        }
        let detector = |name: &AxisName| self.instrument.detector_axes().iter().any(|axis| axis.name == *name);
        if detector(name) && !detector(to) {
            return Err((
                "Tie.axis",
                format!("{name} is a detector axis; accepted is {to} tied to {name}, or two detector axes"),
            ));
        }
        if factor == 0.0 {
            return Err(("Tie.factor", "0 ties nothing; accepted is another number, or the rule Hold".to_owned()));
        }
        Ok(())
    }
}

fn direction(reference: &Reference, what: &str, field: &'static str) -> Result<(), Refusal> {
    if reference.has_direction() {
        return Ok(());
    }
    Err((field, format!("{what} {reference} has no direction; accepted are three numbers that are not all 0")))
}

/// Sample axes that move, and two detector axes.
fn settleable(instrument: &Instrument) -> Vec<&Axis> {
    let detector = match instrument.detector_axes() {
        [_] => &[],
        several => several,
    };
    instrument.sample_axes().iter().chain(detector).filter(|axis| !axis.set_by_hand).collect()
}

/// `a, b and c`.
fn words<'a>(names: impl Iterator<Item = &'a AxisName>) -> String {
    let names: Vec<&str> = names.map(AxisName::as_str).collect();
    match names.as_slice() {
        [] => "none".to_owned(),
        [only] => (*only).to_owned(),
        [most @ .., last] => format!("{} and {last}", most.join(", ")),
    }
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
    let accepted = if spare == 0 { "no rule" } else { "exactly one rule for each spare angle" };
    format!("{machine}: {sample} + {detector} − 3 = {spare}, so {spare_text}, but {rules_text}; accepted is {accepted}")
}

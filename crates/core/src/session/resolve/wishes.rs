use super::super::Session;
use super::super::problem::FieldProblem;
use super::in_words;
use crate::aim::{Preference, Rule};
use crate::instrument::{Axis, Instrument, LIMIT_DUST_DEG};

impl Session {
    /// Rules that do not fit this machine, each by itself and beside the others. Whether they settle all spare angles,
    /// [`crate::aim::Solver::new`] tells.
    pub fn check_rules(&self, instrument: &Instrument) -> Vec<FieldProblem> {
        let mut problems = Vec::new();
        for (i, rule) in self.rules.iter().enumerate() {
            let earlier = self.rules.get(..i).unwrap_or(&[]);
            problems.extend(check_rule(rule, earlier, instrument, &format!("rules[{i}]")).err());
        }
        problems
    }

    /// Axes of the preferred position that this machine does not have.
    pub fn check_preference(&self, instrument: &Instrument) -> Vec<FieldProblem> {
        let Preference::NearestTo { readings_deg } = &self.preference else { return Vec::new() };
        let path = "preference.NearestTo.readings_deg";
        if readings_deg.is_empty() {
            let message =
                "no axis has a reading, so every setting would be as near; accepted is a reading of at least one axis";
            return vec![FieldProblem::new(path, message)];
        }
        let unknown = readings_deg.keys().filter(|name| instrument.axis_index(name.as_str()).is_none());
        unknown
            .map(|name| {
                let names = in_words(instrument.axes().map(|axis| axis.name.as_str()));
                let message = format!("{} has no axis {name}; accepted are {names}", instrument.name());
                FieldProblem::new(format!("{path}.{name}"), message)
            })
            .collect()
    }
}

fn check_rule(rule: &Rule, earlier: &[Rule], instrument: &Instrument, path: &str) -> Result<(), FieldProblem> {
    match rule {
        Rule::Bisecting if earlier.contains(rule) => {
            Err(FieldProblem::new(path, "this rule stands here twice; accepted is one rule for each spare angle"))
        }
        Rule::Bisecting => Ok(()),
        Rule::Hold { axis: name, at_deg } => {
            let refuse = |message| Err(FieldProblem::new(format!("{path}.Hold.axis"), message));
            let holdable = holdable(instrument);
            let accepted = in_words(holdable.iter().map(|axis| axis.name.as_str()));
            let Some(axis) = instrument.axes().find(|axis| axis.name == *name) else {
                return refuse(format!("{} has no axis {name}; accepted is one of {accepted}", instrument.name()));
            };
            if axis.set_by_hand {
                return refuse(format!("{name} is set by hand and held already; accepted is one of {accepted}"));
            }
            if !holdable.iter().any(|axis| axis.name == *name) {
                let message =
                    format!("{name} is the only detector axis, which 2θ settles; accepted is one of {accepted}");
                return refuse(message);
            }
            if earlier.iter().any(|rule| matches!(rule, Rule::Hold { axis: other, .. } if other == name)) {
                return refuse(format!("{name} is held by two rules; accepted is one rule for each axis"));
            }
            let over = -axis.travel.check(at_deg.get()).clearance_deg;
            if over > LIMIT_DUST_DEG {
                let intervals: Vec<String> =
                    axis.travel.intervals_deg().map(|(a, b)| format!("{a}° to {b}°")).collect();
                let message = format!(
                    "{}° lies {over:.4}° outside the limits of {name}; accepted is {} (overshoot taken off), or a full turn \
                     from it",
                    at_deg.get(),
                    intervals.join(" or ")
                );
                return Err(FieldProblem::new(format!("{path}.Hold.at_deg"), message));
            }
            Ok(())
        }
    }
}

/// Sample axes that move, and one of two detector axes.
fn holdable(instrument: &Instrument) -> Vec<&Axis> {
    let detector = match instrument.detector_axes() {
        [_] => &[],
        several => several,
    };
    instrument.sample_axes().iter().chain(detector).filter(|axis| !axis.set_by_hand).collect()
}

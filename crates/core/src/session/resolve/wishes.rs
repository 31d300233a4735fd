use super::super::Session;
use super::super::problem::FieldProblem;
use super::in_words;
use crate::aim::{Preference, RuleProblem, rule_problems};
use crate::instrument::Instrument;

impl Session {
    /// Rules that do not fit this machine, each by itself and beside the others. Whether they settle all spare angles,
    /// [`crate::aim::Road::new`] tells.
    pub fn check_rules(&self, instrument: &Instrument) -> Vec<FieldProblem> {
        let problems = rule_problems(instrument, &self.rules, Some(self.crystal.surface.as_ref()));
        let in_session = |problem: RuleProblem| {
            let dot = if problem.field.is_empty() { "" } else { "." };
            FieldProblem::new(format!("rules[{}]{dot}{}", problem.rule, problem.field), problem.message)
        };
        let surface = self.crystal.surface.filter(|surface| !surface.has_direction()).map(|surface| {
            let message =
                format!("the surface normal {surface} has no direction; accepted are three numbers that are not all 0");
            FieldProblem::new("crystal.surface", message)
        });
        surface.into_iter().chain(problems.into_iter().map(in_session)).collect()
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

//! The left column: the inputs and what follows from them at once, as one thread of cards. Each card says whether it is
//! complete, wants a look or misses something, by a shape and a word.

mod axis;
mod beam;
mod card;
mod crystal;
mod machine;
mod orientation;
mod peaks;
mod rules;
mod targets;
mod wishes;

use egui::{ScrollArea, Ui};
use ringwright_core::crystal::UnitCell;
use ringwright_core::instrument::Instrument;
use ringwright_core::session::{FieldProblem, Session};

use super::command::Command;
use super::edits::Edits;
use super::shared::Results;
pub use card::{State, mark};
pub use orientation::state as trust;
pub use targets::read_hkl;

/// What the cards work on.
pub struct Bench<'a> {
    /// The document.
    pub session: &'a mut Session,
    /// Texts not taken yet.
    pub edits: &'a mut Edits,
    /// What follows from the document.
    pub results: &'a Results,
    /// The machine as it is chosen now, if it is sound.
    pub instrument: Option<&'a Instrument>,
    /// Machines that a session can name.
    pub machines: &'a [String],
    /// What a card wants done.
    pub commands: &'a mut Vec<Command>,
}

impl Bench<'_> {
    /// The state of the inputs under a path, with a word why. `doubt` is a remark that wants a look.
    fn state(&self, path: &str, doubt: Option<String>) -> (State, String) {
        let refused = self.edits.refused_under(path);
        let problems = self.problems_under(path).count();
        match (refused, problems, doubt) {
            (0, 0, None) => (State::Complete, "complete".to_owned()),
            (0, 0, Some(words)) => (State::Doubtful, words),
            (0, _, _) => (State::Missing, "does not fit".to_owned()),
            (_, _, _) => (State::Missing, "not taken".to_owned()),
        }
    }

    fn problems_under<'s>(&'s self, path: &'s str) -> impl Iterator<Item = &'s FieldProblem> {
        self.results.problems.iter().filter(move |problem| problem.path.starts_with(path))
    }

    fn show_errors(&self, ui: &mut Ui, path: &str) {
        self.edits.show_errors(ui, path, &self.results.problems);
    }

    /// Remarks on the inputs under a path, as long as they are those that were resolved last.
    fn notes(&self, path: &str) -> Vec<String> {
        let resolved = self.results.resolved.iter();
        resolved.flat_map(|r| &r.notes).filter(|note| note.path.starts_with(path)).map(|n| n.message.clone()).collect()
    }
}

/// The fields that a problem is about, as paths: of angles that close no cell the three angles, else all at or below its
/// own path.
pub fn fields_of(session: &Session, problem: &FieldProblem) -> Vec<String> {
    let c = session.crystal.cell;
    let angles = [c.alpha_deg, c.beta_deg, c.gamma_deg].map(|angle| angle.get());
    let [alpha, beta, gamma] = angles;
    if problem.path == "crystal.cell" && UnitCell::new(1.0, 1.0, 1.0, alpha, beta, gamma).is_err() {
        return ["alpha_deg", "beta_deg", "gamma_deg"].map(|angle| format!("crystal.cell.{angle}")).to_vec();
    }
    vec![problem.path.clone()]
}

/// Shows the column.
pub fn show(ui: &mut Ui, bench: &mut Bench<'_>) {
    ScrollArea::vertical().auto_shrink(false).show(ui, |ui| {
        card::heading(ui, "What do I have");
        crystal::show(ui, bench);
        beam::show(ui, bench);
        machine::show(ui, bench);
        peaks::show(ui, bench);
        card::heading(ui, "Can I trust it");
        orientation::show(ui, bench);
        card::heading(ui, "What do I want");
        targets::show(ui, bench);
        wishes::show(ui, bench);
    });
}

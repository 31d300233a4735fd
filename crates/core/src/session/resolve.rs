//! From the document to what the other rooms use: how the inputs fit together.

mod crystal;
mod peaks;
mod targets;
mod wishes;

use crate::aim::{Preference, Reference, Rule};
use crate::crystal::{SpaceGroup, UnitCell};
use crate::instrument::Instrument;
use crate::orient::Orientation;
use crate::radiation::Radiation;
pub use peaks::Peak;
pub use targets::MOST_NODES;

use super::problem::FieldProblem;
use super::{MachineChoice, MachineLibrary, Session, Targets};

/// A session whose inputs fit together.
#[derive(Debug, Clone, PartialEq)]
pub struct Resolved {
    /// The cell.
    pub cell: UnitCell,
    /// The space group in its setting.
    pub space_group: SpaceGroup,
    /// The beam as it was stated.
    pub radiation: Radiation,
    /// Its wavelength in Å.
    pub wavelength_angstrom: f64,
    /// The machine.
    pub instrument: Instrument,
    /// Every peak in the order of the document, also those that are ignored.
    pub peaks: Vec<Peak>,
    /// The outward normal of the crystal's surface, if it has one.
    pub surface: Option<Reference>,
    /// Rules, each of which fits the machine. Whether they settle all spare angles, [`crate::aim::Road::new`] tells.
    pub rules: Vec<Rule>,
    /// The choice among settings.
    pub preference: Preference,
    /// What is wanted.
    pub targets: Targets,
    /// An orientation that was kept.
    pub kept_orientation: Option<Orientation>,
    /// What the user should know: defaults that were chosen, values that look odd.
    pub notes: Vec<Note>,
}

/// Something worth knowing that stops nothing.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Note {
    /// Path of the field that it is about.
    pub path: String,
    /// What it says.
    pub message: String,
}

impl Note {
    fn new(path: impl Into<String>, message: impl Into<String>) -> Self {
        Self { path: path.into(), message: message.into() }
    }
}

impl Session {
    /// Checks how the inputs fit together and makes of them what the other rooms use. The parts can be had one by one:
    /// [`Self::resolve_crystal`], [`Self::resolve_machine`], [`Self::resolve_peaks`], [`Self::check_rules`],
    /// [`Self::check_preference`], [`Self::check_targets`], [`Self::resolve_orientation`].
    ///
    /// # Errors
    /// Every misfit, with the path of its field. What depends on a part that does not hold is left unsaid.
    pub fn resolve(&self, machines: &MachineLibrary) -> Result<Resolved, Vec<FieldProblem>> {
        let mut problems = Vec::new();
        let crystal = self.resolve_crystal().map_err(|problem| problems.push(problem)).ok();
        let cell = crystal.as_ref().map(|(cell, _)| cell);
        let instrument = self.resolve_machine(machines).map_err(|problem| problems.push(problem)).ok();
        let mut peaks = None;
        if let Some(instrument) = &instrument {
            peaks = self.resolve_peaks(instrument).map_err(|mut found| problems.append(&mut found)).ok();
            problems.extend(self.check_rules(instrument));
            problems.extend(self.check_preference(instrument));
        }
        problems.extend(self.check_targets(cell));
        let orientation = match cell {
            Some(cell) => self.resolve_orientation(cell).map_err(|problem| problems.push(problem)).ok(),
            None => None,
        };
        match (crystal, instrument, peaks, orientation) {
            (Some((cell, space_group)), Some(instrument), Some(peaks), Some(kept_orientation))
                if problems.is_empty() =>
            {
                let notes = self.notes(machines, &space_group, &instrument, &peaks);
                Ok(Resolved {
                    cell,
                    space_group,
                    radiation: self.radiation.clone(),
                    wavelength_angstrom: self.radiation.wavelength_angstrom(),
                    instrument,
                    peaks,
                    surface: self.crystal.surface,
                    rules: self.rules.clone(),
                    preference: self.preference.clone(),
                    targets: self.targets.clone(),
                    kept_orientation,
                    notes,
                })
            }
            _ => Err(problems),
        }
    }

    /// The machine, ready for use.
    ///
    /// # Errors
    /// If it is unknown, or if its numbers do not fit together.
    pub fn resolve_machine(&self, machines: &MachineLibrary) -> Result<Instrument, FieldProblem> {
        match &self.machine {
            MachineChoice::Named(name) => {
                machines.machine(name).map_err(|error| FieldProblem::new("machine.Named", error.to_string()))
            }
            MachineChoice::Inline(description) => Instrument::new(description.clone())
                .map_err(|problem| FieldProblem::new(format!("machine.Inline.{}", problem.path), problem.message)),
        }
    }

    fn notes(
        &self,
        machines: &MachineLibrary,
        space_group: &SpaceGroup,
        instrument: &Instrument,
        peaks: &[Peak],
    ) -> Vec<Note> {
        let mut notes: Vec<Note> =
            space_group.notes().iter().map(|message| Note::new("crystal.symmetry", message)).collect();
        notes.extend(self.radiation.older_scale_note().map(|message| Note::new("radiation", message)));
        if let MachineChoice::Named(name) = &self.machine
            && let Some(file) = machines.hidden_file(name)
        {
            let message =
                format!("{name} is a machine of the program; {} has the same name and is not used", file.display());
            notes.push(Note::new("machine.Named", message));
        }
        notes.extend(peaks::notes(instrument, peaks));
        notes.extend(self.target_notes());
        notes
    }
}

/// `a, b and c`.
fn in_words<'a>(names: impl IntoIterator<Item = &'a str>) -> String {
    let names: Vec<&str> = names.into_iter().collect();
    match names.as_slice() {
        [] => "none".to_owned(),
        [only] => (*only).to_owned(),
        [most @ .., last] => format!("{} and {last}", most.join(", ")),
    }
}

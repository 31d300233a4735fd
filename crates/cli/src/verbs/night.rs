use std::path::{Path, PathBuf};

use ringwright_core::orient::{Confirmation, Doubt};
use ringwright_core::session::{FieldProblem, OpenedSession, Resolved};
use ringwright_core::work::{self, Oriented, WorkError};

use crate::args::SessionArgs;
use crate::deliver::Desktop;
use crate::failure::Failure;

/// A session that is open and fits together.
pub struct Night {
    pub opened: OpenedSession,
    pub inputs: Resolved,
}

impl Night {
    /// Opens the session of a command line.
    pub fn open(args: &SessionArgs) -> Result<Self, Failure> {
        check_folder(args.machines.as_deref())?;
        let opened = OpenedSession::open(&args.session).map_err(Failure::new)?;
        Self::of(opened, args.machines.clone())
    }

    /// Checks how the inputs of an open session fit together.
    pub fn of(opened: OpenedSession, machines: Option<PathBuf>) -> Result<Self, Failure> {
        match opened.session.resolve(&opened.library(machines)) {
            Ok(inputs) => Ok(Self { opened, inputs }),
            Err(problems) => {
                let lines: Vec<String> = opened.place(&problems).iter().map(ToString::to_string).collect();
                Err(Failure::new(lines.join("\n")))
            }
        }
    }

    /// What the user should know, to the error stream.
    pub fn tell_notes(&self, desktop: &mut Desktop<'_, '_>) {
        for note in &self.inputs.notes {
            desktop.tell(&format!("Note: {}: {}", note.path, note.message));
        }
    }

    /// The orientation, with a warning where it is not yet to be trusted.
    pub fn orient(&self, desktop: &mut Desktop<'_, '_>) -> Result<Oriented, Failure> {
        let oriented = work::orient(&self.inputs).map_err(|error| self.failure(&error))?;
        if peaks_disagree(&oriented) {
            desktop.tell("WARNING: the peaks do not agree with this orientation; see `ringwright orient`.");
        } else if !oriented.orientation.confirmed {
            desktop.tell("WARNING: this orientation is unconfirmed; `ringwright orient` names the peak that decides.");
        }
        Ok(oriented)
    }

    /// An error of the work, with the place in the file that it is about.
    pub fn failure(&self, error: &WorkError) -> Failure {
        let path = match error {
            WorkError::NoOrientation { .. } | WorkError::Peak(_) | WorkError::Orient(_) => "peaks",
            WorkError::Rules(_) => "rules",
            WorkError::Targets(_) => "targets",
            WorkError::Stopped(_) | WorkError::Route(_) => return Failure::new(error),
        };
        let message = match error {
            WorkError::Rules(rules) => rules.to_string(),
            WorkError::Targets(targets) => targets.to_string(),
            other => other.to_string(),
        };
        let placed = self.opened.place(&[FieldProblem { path: path.to_owned(), message }]);
        Failure::new(placed.iter().map(ToString::to_string).collect::<Vec<_>>().join("\n"))
    }
}

/// A folder of machines that was given must be there.
pub fn check_folder(machines: Option<&Path>) -> Result<(), Failure> {
    match machines.filter(|folder| !folder.is_dir()) {
        Some(folder) => Err(Failure::new(format_args!("--machines {}: there is no such folder", folder.display()))),
        None => Ok(()),
    }
}

/// Whether the peaks contradict their own indices, or each other.
pub fn peaks_disagree(oriented: &Oriented) -> bool {
    let Some(report) = &oriented.report else { return false };
    match &report.confirmation {
        Confirmation::Unconfirmed { because, .. } => {
            matches!(because, Doubt::PairDisagrees | Doubt::Contradicted(_))
        }
        Confirmation::Confirmed { .. } => false,
    }
}

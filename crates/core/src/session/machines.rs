use std::path::{Path, PathBuf};

use super::files::{ReadError, read_limited};
use super::problem::FileProblem;
use super::read::{Format, read_machine, text_of};
use crate::instrument::{BUILT_IN_MACHINES, Instrument};

/// Where machines are looked for, in this order: among those of the program, beside the session, in an extra folder. The
/// working directory plays no part.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct MachineLibrary {
    /// The folder of the session's file, if it has one.
    pub beside_session: Option<PathBuf>,
    /// A folder given by option.
    pub extra_folder: Option<PathBuf>,
}

/// Why a machine could not be had by its name.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
pub enum LibraryError {
    /// A name that could lead out of the folders.
    #[error("{0:?} cannot name a machine; accepted is the name of a file without folders and without its ending .ron")]
    Name(String),
    /// No such machine.
    #[error("no machine is called {name:?}; known are {known}; looked among those of the program{folders}")]
    Unknown {
        /// What was asked for.
        name: String,
        /// The names there are.
        known: String,
        /// The folders that were searched, in words.
        folders: String,
    },
    /// The file is there, but cannot be read.
    #[error("{file}: cannot be read: {reason}")]
    Unreadable {
        /// The file.
        file: String,
        /// What the system said.
        reason: String,
    },
    /// The file was read and turned away.
    #[error("the machine's file is turned away: {0}")]
    Refused(#[from] FileProblem),
}

impl MachineLibrary {
    /// The library of a session at this path.
    pub fn of_session(path: &Path, extra_folder: Option<PathBuf>) -> Self {
        let folder = path.parent().filter(|folder| !folder.as_os_str().is_empty()).unwrap_or(Path::new("."));
        Self { beside_session: Some(folder.to_owned()), extra_folder }
    }

    /// The machine of this name, ready for use.
    ///
    /// # Errors
    /// If the name is no plain file name, if nothing bears it, or if its file is turned away.
    pub fn machine(&self, name: &str) -> Result<Instrument, LibraryError> {
        if !is_plain(name) {
            return Err(LibraryError::Name(name.to_owned()));
        }
        if let Some((_, text)) = BUILT_IN_MACHINES.iter().find(|(known, _)| *known == name) {
            return Ok(read_machine(text, &format!("{name}.ron"))?);
        }
        for folder in self.folders() {
            match from_file(&folder.join(format!("{name}.ron"))) {
                Err(LibraryError::Unknown { .. }) => {}
                answer => return answer,
            }
        }
        Err(self.unknown(name))
    }

    /// The file of the same name that a machine of the program hides, if there is one.
    pub fn hidden_file(&self, name: &str) -> Option<PathBuf> {
        BUILT_IN_MACHINES.iter().find(|(known, _)| *known == name)?;
        self.folders().map(|folder| folder.join(format!("{name}.ron"))).find(|file| file.is_file())
    }

    /// Every name that [`Self::machine`] accepts: those of the program, then those of the folders. Files that hold no sound
    /// machine (sessions lie beside them) are left out.
    pub fn names(&self) -> Vec<String> {
        let mut names: Vec<String> = BUILT_IN_MACHINES.iter().map(|(name, _)| (*name).to_owned()).collect();
        for folder in self.folders() {
            let Ok(entries) = std::fs::read_dir(folder) else { continue };
            let mut found: Vec<String> = entries
                .filter_map(|entry| Some(entry.ok()?.path()))
                .filter(|file| file.extension().is_some_and(|ending| ending == "ron") && from_file(file).is_ok())
                .filter_map(|file| Some(file.file_stem()?.to_str()?.to_owned()))
                .filter(|name| is_plain(name) && !names.contains(name))
                .collect();
            found.sort();
            names.append(&mut found);
        }
        names
    }

    fn folders(&self) -> impl Iterator<Item = &PathBuf> {
        self.beside_session.iter().chain(&self.extra_folder)
    }

    fn unknown(&self, name: &str) -> LibraryError {
        let mut folders = String::new();
        for (place, folder) in
            [("beside the session", &self.beside_session), ("in the extra folder", &self.extra_folder)]
        {
            if let Some(folder) = folder {
                folders.push_str(&format!(", {place} ({})", folder.display()));
            }
        }
        LibraryError::Unknown { name: name.to_owned(), known: self.names().join(", "), folders }
    }
}

fn from_file(file: &Path) -> Result<Instrument, LibraryError> {
    let shown = file.display().to_string();
    match read_limited(file, Format::Machine) {
        Ok(bytes) => Ok(read_machine(text_of(&bytes, &shown, Format::Machine)?, &shown)?),
        Err(ReadError::Missing) => {
            Err(LibraryError::Unknown { name: shown, known: String::new(), folders: String::new() })
        }
        Err(ReadError::Other(reason)) => Err(LibraryError::Unreadable { file: shown, reason }),
    }
}

/// Whether a name stays inside the folder it is looked for in, on every system.
fn is_plain(name: &str) -> bool {
    let bad = |c: char| c.is_control() || "/\\:*?\"<>|".contains(c);
    !name.is_empty() && name.len() <= 100 && !name.starts_with('.') && !name.contains("..") && !name.contains(bad)
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;

    #[test]
    fn machines_are_found_in_their_order_from_any_directory() {
        let (beside, extra) = (tempfile::tempdir().unwrap(), tempfile::tempdir().unwrap());
        let text = |name: &str| BUILT_IN_MACHINES[0].1.replace("Eulerian four-circle", name);
        std::fs::write(beside.path().join("ours.ron"), text("beside")).unwrap();
        std::fs::write(extra.path().join("ours.ron"), text("extra")).unwrap();
        std::fs::write(extra.path().join("far.ron"), text("far")).unwrap();
        std::fs::write(beside.path().join("kappa-four-circle.ron"), text("hidden")).unwrap();
        std::fs::write(beside.path().join("night.ron"), "(version: 1, title: \"a session\")").unwrap();
        let library = MachineLibrary::of_session(&beside.path().join("night.ron"), Some(extra.path().to_owned()));
        assert_eq!(library.machine("ours").unwrap().name(), "beside");
        assert_eq!(library.machine("far").unwrap().name(), "far");
        assert_eq!(library.machine("kappa-four-circle").unwrap().name(), "Kappa four-circle, 50°");
        assert_eq!(library.hidden_file("kappa-four-circle"), Some(beside.path().join("kappa-four-circle.ron")));
        let built_in = BUILT_IN_MACHINES.map(|(name, _)| name);
        assert_eq!(library.names(), [&built_in[..], &["ours", "far"]].concat());
    }

    #[test]
    fn an_unknown_machine_is_answered_with_names_and_places() {
        let folder = tempfile::tempdir().unwrap();
        let library = MachineLibrary { beside_session: None, extra_folder: Some(folder.path().to_owned()) };
        let message = library.machine("nowhere").unwrap_err().to_string();
        assert!(message.contains("kappa-four-circle") && message.contains(&folder.path().display().to_string()));
        std::fs::write(folder.path().join("broken.ron"), "(version: 1,\n name: 5)").unwrap();
        let message = library.machine("broken").unwrap_err().to_string();
        assert!(message.contains("broken.ron:2:8: name: "), "{message}");
    }

    #[test]
    fn names_cannot_lead_out_of_the_folders() {
        let library = MachineLibrary::default();
        for name in ["", "..", "../secret", "a/b", "a\\b", "/etc/passwd", "a..b", ".hidden", "c:x", "a\0b"] {
            assert!(matches!(library.machine(name), Err(LibraryError::Name(_))), "{name:?}");
        }
    }
}

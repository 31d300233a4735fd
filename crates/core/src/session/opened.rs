use std::path::{Path, PathBuf};

use super::files::{ReadError, read_limited};
use super::problem::{FieldProblem, FileProblem, SessionError};
use super::read::{self, Format};
use super::save::{SaveError, SaveOutcome};
use super::tokens::has_comments;
use super::{MachineLibrary, Session};

/// A session together with where it came from.
#[derive(Debug, Clone, PartialEq)]
pub struct OpenedSession {
    /// The session; edit it freely.
    pub session: Session,
    /// What messages call its file.
    file: String,
    /// Where it lives. A demo has no place of its own until it is saved under a name.
    path: Option<PathBuf>,
    /// The text as it was last read or written, and what it says.
    text: String,
    as_written: Session,
}

impl Session {
    /// Reads the text of a session file. `file` is what messages call it. How the inputs fit together is checked by
    /// [`Session::resolve`].
    ///
    /// # Errors
    /// The first problem: file, line, column, field, what was met and what would be accepted.
    pub fn from_text(text: &str, file: &str) -> Result<Self, SessionError> {
        Ok(read::read(text, file, Format::Session)?)
    }

    /// The same from bytes that may be no text.
    ///
    /// # Errors
    /// As [`Session::from_text`].
    pub fn from_bytes(bytes: &[u8], file: &str) -> Result<Self, SessionError> {
        Self::from_text(read::text_of(bytes, file, Format::Session)?, file)
    }
}

impl OpenedSession {
    /// Opens a file.
    ///
    /// # Errors
    /// If it cannot be read, or holds no session.
    pub fn open(path: &Path) -> Result<Self, SessionError> {
        let file = path.display().to_string();
        let bytes = read_limited(path, Format::Session).map_err(|error| {
            let reason = match error {
                ReadError::Missing => "there is no such file; accepted is the path of a session file".to_owned(),
                ReadError::Other(reason) => reason,
            };
            SessionError::Unreadable { file: file.clone(), reason }
        })?;
        let text = read::text_of(&bytes, &file, Format::Session)?;
        let session = Session::from_text(text, &file)?;
        Ok(Self { as_written: session.clone(), session, text: text.to_owned(), file, path: Some(path.to_owned()) })
    }

    /// Opens a text that is part of the program, such as a demo, as an unsaved copy.
    ///
    /// # Errors
    /// If it holds no session.
    pub fn unsaved_copy(name: &str, text: &str) -> Result<Self, SessionError> {
        let session = Session::from_text(text, name)?;
        Ok(Self { as_written: session.clone(), session, text: text.to_owned(), file: name.to_owned(), path: None })
    }

    /// What messages call the file.
    pub fn file(&self) -> &str {
        &self.file
    }

    /// Where it lives; nothing for an unsaved copy.
    pub fn path(&self) -> Option<&Path> {
        self.path.as_deref()
    }

    /// Whether saving over the file will take comments out of it (they stay in a backup).
    pub fn has_comments(&self) -> bool {
        has_comments(&self.text)
    }

    /// Whether the session differs from what was last read or written.
    pub fn is_edited(&self) -> bool {
        self.session != self.as_written
    }

    /// The places where this session's machine is looked for.
    pub fn library(&self, extra_folder: Option<PathBuf>) -> MachineLibrary {
        match &self.path {
            Some(path) => MachineLibrary::of_session(path, extra_folder),
            None => MachineLibrary { beside_session: None, extra_folder },
        }
    }

    /// The places of problems in the text as it was last read or written.
    pub fn place(&self, problems: &[FieldProblem]) -> Vec<FileProblem> {
        place_problems(&self.text, &self.file, problems)
    }

    /// Saves to where it was opened from. An unsaved copy has no such place and needs [`Self::save_as`].
    ///
    /// # Errors
    /// If the file cannot be written, or there is none yet.
    pub fn save(&mut self) -> Result<SaveOutcome, SaveError> {
        match self.path.clone() {
            Some(path) => self.save_to(path, true),
            None => Err(SaveError {
                file: self.file.clone(),
                reason: "this is an unsaved copy; accepted is saving under a name".to_owned(),
            }),
        }
    }

    /// Saves under a name; from then on the session lives there.
    ///
    /// # Errors
    /// If the file cannot be written.
    pub fn save_as(&mut self, path: &Path) -> Result<SaveOutcome, SaveError> {
        self.save_to(path.to_owned(), self.path.as_deref() == Some(path))
    }

    fn save_to(&mut self, path: PathBuf, same_file: bool) -> Result<SaveOutcome, SaveError> {
        let outcome = self.session.save(&path, same_file.then_some(self.text.as_str()))?;
        self.text = self.session.to_text().map_err(|reason| SaveError { file: self.file.clone(), reason })?;
        self.as_written = self.session.clone();
        self.file = path.display().to_string();
        self.path = Some(path);
        Ok(outcome)
    }
}

/// The places of problems that [`Session::resolve`] found, by reading the text of the session again.
pub fn place_problems(text: &str, file: &str, problems: &[FieldProblem]) -> Vec<FileProblem> {
    problems.iter().map(|problem| read::at_field(text, file, &problem.path, problem.message.clone())).collect()
}

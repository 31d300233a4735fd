use std::fs;
use std::io;
use std::path::{Path, PathBuf};

use super::files::{ReadError, create, read_limited, real_file, replace};
use super::layout::laid_out;
use super::read::{Format, options};
use super::tokens::has_comments;
use super::{Session, read};

/// How a save went.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct SaveOutcome {
    /// The file that was written, symbolic links followed.
    pub file: PathBuf,
    /// Where the file that stood there before was kept, if it held anything that the new one cannot carry.
    pub backup: Option<PathBuf>,
    /// Whether comments of the old file are only in the backup now.
    pub comments_lost: bool,
    /// Whether the file on the disk was not the one that was opened or last saved: someone else wrote to it.
    pub changed_elsewhere: bool,
}

/// Why a session was not saved. The file that stood there is untouched.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[error("{file}: not saved: {reason}")]
pub struct SaveError {
    /// The file.
    pub file: String,
    /// What went wrong, and what would be accepted.
    pub reason: String,
}

impl SaveError {
    fn new(file: &Path, reason: impl ToString) -> Self {
        Self { file: file.display().to_string(), reason: reason.to_string() }
    }
}

/// Beyond this many backups with different contents the folder wants looking at.
const MOST_BACKUPS: u32 = 1000;

impl Session {
    /// The session as the text of a file, laid out for people. Reading it gives the same session back.
    ///
    /// # Errors
    /// If it would not; then the program has a defect, and it is better said than saved.
    pub fn to_text(&self) -> Result<String, String> {
        let compact = options().to_string(self).map_err(|error| error.to_string())?;
        let text = laid_out(&compact);
        match read::read::<Self>(&text, "text", Format::Session) {
            Ok(back) if back == *self => Ok(text),
            Ok(_) => Err("the text of the session does not read as the same session".to_owned()),
            Err(problem) => Err(format!("the text of the session is turned away: {problem}")),
        }
    }

    /// Saves to a file, atomically. What would be lost is kept first: if the file has comments, is no text, or differs from
    /// `known` (its text when it was last read or written), a copy becomes `NAME.bak`, or `NAME.bak.1`, … where another copy
    /// has that name; a copy that is already kept is not kept twice.
    ///
    /// # Errors
    /// If the file cannot be written. Then the old one is untouched.
    pub fn save(&self, path: &Path, known: Option<&str>) -> Result<SaveOutcome, SaveError> {
        let refuse = |reason: String| SaveError::new(path, reason);
        let text = self.to_text().map_err(refuse)?;
        let file = real_file(path).map_err(|error| SaveError::new(path, error))?;
        if file.file_name().is_none() {
            return Err(SaveError::new(path, "it is no file name"));
        }
        let old = match read_limited(&file, Format::Session) {
            Ok(bytes) => Some(bytes),
            Err(ReadError::Missing) => None,
            Err(ReadError::Other(reason)) => return Err(SaveError::new(&file, reason)),
        };
        let metadata = match &old {
            Some(_) => Some(fs::metadata(&file).map_err(|error| SaveError::new(&file, error))?),
            None => None,
        };
        if metadata.as_ref().is_some_and(|m| m.permissions().readonly()) {
            return Err(SaveError::new(
                &file,
                "it is marked read-only; accepted is a file that may be written, or a new name",
            ));
        }
        let mut outcome = SaveOutcome { file, backup: None, comments_lost: false, changed_elsewhere: false };
        if let Some(old) = old.as_deref().filter(|old| *old != text.as_bytes()) {
            let old_text = std::str::from_utf8(old).ok();
            outcome.comments_lost = old_text.is_some_and(has_comments);
            outcome.changed_elsewhere = known.is_some() && known != old_text;
            if outcome.comments_lost || outcome.changed_elsewhere || old_text.is_none() {
                let backup = keep(&outcome.file, old, metadata.as_ref());
                outcome.backup = Some(backup.map_err(|error| {
                    SaveError::new(&outcome.file, format!("no backup of it could be made: {error}"))
                })?);
            }
        }
        let written = replace(&outcome.file, text.as_bytes(), metadata.as_ref());
        written.map_err(|error| SaveError::new(&outcome.file, error))?;
        Ok(outcome)
    }
}

/// Keeps a copy under the first backup name that is free or holds the same already.
fn keep(file: &Path, bytes: &[u8], like: Option<&fs::Metadata>) -> io::Result<PathBuf> {
    let name = file.file_name().unwrap_or_default();
    for number in 0..MOST_BACKUPS {
        let mut backup = name.to_owned();
        backup.push(if number == 0 { ".bak".to_owned() } else { format!(".bak.{number}") });
        let backup = file.with_file_name(backup);
        match create(&backup, bytes, like) {
            Ok(()) => return Ok(backup),
            Err(error) if error.kind() == io::ErrorKind::AlreadyExists => {
                if fs::read(&backup).is_ok_and(|kept| kept == bytes) {
                    return Ok(backup);
                }
            }
            Err(error) => return Err(error),
        }
    }
    Err(io::Error::other(format!("{MOST_BACKUPS} backups stand beside it already")))
}

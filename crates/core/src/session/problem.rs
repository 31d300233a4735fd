use std::fmt;

/// What is wrong with a file, and where.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
pub struct FileProblem {
    /// The file, as messages call it.
    pub file: String,
    /// Line, counted from 1.
    pub line: usize,
    /// Column in characters, counted from 1.
    pub column: usize,
    /// Path of the field, for example `crystal.cell.a_angstrom`; empty where the problem belongs to no field.
    pub field: String,
    /// What was met and what would be accepted.
    pub message: String,
}

/// `night.ron:12:18: crystal.cell.a_angstrom: -3 is not a length in Å between 0.1 and 10000`.
impl fmt::Display for FileProblem {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}:{}:{}: ", self.file, self.line, self.column)?;
        if !self.field.is_empty() {
            write!(f, "{}: ", self.field)?;
        }
        f.write_str(&self.message)
    }
}

/// Inputs that are right one by one but not together.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[error("{path}: {message}")]
pub struct FieldProblem {
    /// Path of field names below the session, for example `peaks[1].readings_deg.chi`.
    pub path: String,
    /// What was met and what would be accepted.
    pub message: String,
}

impl FieldProblem {
    pub(super) fn new(path: impl Into<String>, message: impl Into<String>) -> Self {
        Self { path: path.into(), message: message.into() }
    }
}

/// Why there is no session.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
pub enum SessionError {
    /// The file could not be read at all.
    #[error("{file}: cannot be read: {reason}")]
    Unreadable {
        /// The file.
        file: String,
        /// What the system said, and what would be accepted.
        reason: String,
    },
    /// The file was read and turned away.
    #[error("{}", .0.iter().map(ToString::to_string).collect::<Vec<_>>().join("\n"))]
    Problems(Vec<FileProblem>),
}

impl From<FileProblem> for SessionError {
    fn from(problem: FileProblem) -> Self {
        Self::Problems(vec![problem])
    }
}

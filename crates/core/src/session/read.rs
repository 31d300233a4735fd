//! Reading RON so that every refusal has a place, a field, what was met and what would be accepted.

use ron::Error as Code;
use ron::extensions::Extensions;
use serde::de::DeserializeOwned;
use serde_path_to_error::Segment;

use super::place::{self, Step};
use super::problem::FileProblem;
use super::tokens::{Kind, Tokens};
use super::words;
use crate::instrument::{Instrument, MachineDescription};

/// Files larger than this are turned away unread: a session with 100 000 listed targets has 4 MB.
pub(super) const LARGEST_BYTES: usize = 20_000_000;

/// How our files are written: RON, where a value that may be left out needs no `Some(…)` around it.
pub(super) fn options() -> ron::Options {
    ron::Options::default().with_default_extension(Extensions::IMPLICIT_SOME)
}

/// Which of our formats a text is in.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Format {
    Session,
    Machine,
}

impl Format {
    pub(super) fn name(self) -> &'static str {
        match self {
            Self::Session => "session",
            Self::Machine => "machine",
        }
    }
}

/// Reads a machine file and checks how its numbers fit together. `file` is what messages call it.
///
/// # Errors
/// The first problem, with its place.
pub fn read_machine(text: &str, file: &str) -> Result<Instrument, FileProblem> {
    let description: MachineDescription = read(text, file, Format::Machine)?;
    Instrument::new(description).map_err(|problem| at_field(text, file, &problem.path, problem.message))
}

/// The same from bytes, which may be no text at all.
pub(super) fn text_of<'a>(bytes: &'a [u8], file: &str, format: Format) -> Result<&'a str, FileProblem> {
    if bytes.len() > LARGEST_BYTES {
        return Err(at_byte("", file, 0, too_large(bytes.len() as u64, format)));
    }
    std::str::from_utf8(bytes).map_err(|error| {
        let (good, rest) = bytes.split_at(error.valid_up_to());
        let good = std::str::from_utf8(good).unwrap_or("");
        let byte = rest.first().copied().unwrap_or(0);
        let message = format!("the byte 0x{byte:02X} is no UTF-8; accepted is a {} file, a text", format.name());
        at_byte(good, file, good.len(), message)
    })
}

pub(super) fn too_large(bytes: u64, format: Format) -> String {
    format!(
        "the file has {bytes} bytes; accepted is a {} file of at most {} MB",
        format.name(),
        LARGEST_BYTES / 1_000_000
    )
}

/// A problem of a field that was found after reading: its place is found by reading the text again.
pub(super) fn at_field(text: &str, file: &str, path: &str, message: String) -> FileProblem {
    let text = without_mark(text);
    let found = place::find(text, &place::steps(path));
    FileProblem { field: path.to_owned(), ..at_byte(text, file, found.value, message) }
}

fn at_byte(text: &str, file: &str, byte: usize, message: String) -> FileProblem {
    let (line, column) = place::line_and_column(text, byte);
    FileProblem { file: file.to_owned(), line, column, field: String::new(), message }
}

pub(super) fn read<T: DeserializeOwned>(text: &str, file: &str, format: Format) -> Result<T, FileProblem> {
    if text.len() > LARGEST_BYTES {
        return Err(at_byte("", file, 0, too_large(text.len() as u64, format)));
    }
    let text = without_mark(text);
    if Tokens::new(text).all(|token| matches!(token.kind, Kind::Comment | Kind::Attribute)) {
        let message = format!("the file is empty; a {} file begins with (version: 1, …", format.name());
        return Err(at_byte(text, file, text.len(), message));
    }
    check_version(text, file, format)?;
    let refusal = match attempt::<T>(text) {
        Ok(value) => return Ok(value),
        Err(refusal) => refusal,
    };
    let (byte, field) = spot(text, &refusal);
    let accepted = if words::is_no_name(&refusal.code) { variants::<T>(text, byte) } else { Vec::new() };
    let message = words::refusal(&refusal.code, &place::met(text, byte), &field, &accepted);
    Err(FileProblem { field: place::written(&field), ..at_byte(text, file, byte, message) })
}

/// Some editors begin a text with this mark; it is no column of its own.
fn without_mark(text: &str) -> &str {
    text.strip_prefix('\u{FEFF}').unwrap_or(text)
}

/// The version is looked at first and alone: of a later version, unknown fields are no news.
fn check_version(text: &str, file: &str, format: Format) -> Result<(), FileProblem> {
    let found = place::find(text, &place::steps("version"));
    let met = place::met(text, found.value);
    if found.reached == 0 || met == "1" {
        return Ok(());
    }
    let message = format!("{met} is no version of the {} format; accepted is 1", format.name());
    Err(FileProblem { field: "version".to_owned(), ..at_byte(text, file, found.value, message) })
}

/// What the parser said.
struct Refusal {
    code: Code,
    path: Vec<Step>,
    /// Whether the path ends at a key that is no name.
    path_ends_at_a_key: bool,
    /// Where the parser stood.
    byte: usize,
}

fn attempt<T: DeserializeOwned>(text: &str) -> Result<T, Refusal> {
    let spanned = |error: ron::error::SpannedError, path, path_ends_at_a_key| Refusal {
        byte: place::byte_of(text, error.span.end.line, error.span.end.col),
        code: error.code,
        path,
        path_ends_at_a_key,
    };
    let mut parser = ron::Deserializer::from_str_with_options(text, &options())
        .map_err(|error| spanned(error, Vec::new(), false))?;
    let value = serde_path_to_error::deserialize(&mut parser).map_err(|error| {
        let path_ends_at_a_key = matches!(error.path().iter().next_back(), Some(Segment::Unknown));
        let path = error.path().iter().filter_map(step).collect();
        spanned(parser.span_error(error.into_inner()), path, path_ends_at_a_key)
    })?;
    parser.end().map_err(|code| spanned(parser.span_error(code), Vec::new(), false))?;
    Ok(value)
}

fn step(segment: &Segment) -> Option<Step> {
    match segment {
        Segment::Seq { index } => Some(Step::Index(*index)),
        Segment::Map { key } | Segment::Enum { variant: key } => Some(Step::Name(key.clone())),
        Segment::Unknown => None,
    }
}

/// The byte that a refusal is about, and the path to show.
fn spot(text: &str, refusal: &Refusal) -> (usize, Vec<Step>) {
    let mut path = refusal.path.clone();
    match &refusal.code {
        Code::NoSuchStructField { .. } | Code::NoSuchEnumVariant { .. } => (word_before(text, refusal.byte), path),
        Code::DuplicateStructField { field, .. } => {
            path.push(Step::Name((*field).to_owned()));
            (word_before(text, refusal.byte), path)
        }
        Code::MissingStructField { field, .. } => {
            let start = place::find(text, &path).value;
            path.push(Step::Name((*field).to_owned()));
            (start, path)
        }
        code if words::is_about_a_value(code) && !refusal.path_ends_at_a_key => {
            if let Some(key) = key_before(text, refusal.byte, &path) {
                return (key, path);
            }
            let found = place::find(text, &path);
            (if found.reached == path.len() { found.value } else { refusal.byte }, path)
        }
        _ => (past_space(text, refusal.byte), path),
    }
}

/// The start of the last word that ends at or before a byte.
fn word_before(text: &str, byte: usize) -> usize {
    let words = Tokens::new(text).take_while(|token| token.start < byte);
    words.filter(|token| token.kind == Kind::Word || token.kind == Kind::Text).last().map_or(byte, |token| token.start)
}

/// The start of the key that the path ends with, if the parser stopped between it and its colon: then the key itself was
/// turned away, because it is no name or because it stands twice.
fn key_before(text: &str, byte: usize, path: &[Step]) -> Option<usize> {
    let Some(Step::Name(name)) = path.last() else { return None };
    let start = word_before(text, byte);
    let mut tokens = Tokens::new(text.get(start..)?);
    tokens.next().filter(|key| key.text.trim_matches('"') == name)?;
    let colon = tokens.find(|token| token.kind != Kind::Comment)?;
    (colon.kind == Kind::Colon && start + colon.start >= byte).then_some(start)
}

/// The start of what comes next.
fn past_space(text: &str, byte: usize) -> usize {
    let rest = text.get(byte..).unwrap_or("");
    byte + rest.len() - rest.trim_start().len()
}

/// The names of an enum whose place holds something else: the text is read once more with a name there that is none.
fn variants<T: DeserializeOwned>(text: &str, byte: usize) -> Vec<&'static str> {
    let (before, rest) = text.split_at_checked(byte).unwrap_or((text, ""));
    let token = Tokens::new(rest).next();
    let after = match token {
        Some(token) if matches!(token.kind, Kind::Word | Kind::Text) => rest.get(token.end()..).unwrap_or(""),
        _ => rest,
    };
    match attempt::<T>(&format!("{before}no_such_name {after}")) {
        Err(Refusal { code: Code::NoSuchEnumVariant { expected, .. }, .. }) => expected.to_vec(),
        _ => Vec::new(),
    }
}

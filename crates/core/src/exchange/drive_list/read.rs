use csv::{ByteRecord, ReaderBuilder, Trim};

use super::{FINGERPRINT, ROWS};
use crate::frames::Hkl;
use crate::instrument::{Instrument, MAX_AXES, Setting};
use crate::quantity::Index;
use crate::route::{Fingerprint, GivenList, GivenRow};

/// Why a text is no drive list of this machine.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
pub enum ListError {
    /// Nothing but comments and empty lines.
    #[error(
        "{file}: no header line; accepted is a list whose first line that is no comment names the columns: {accepted}"
    )]
    Empty {
        /// The file, as messages call it.
        file: String,
        /// The columns.
        accepted: String,
    },
    /// A header that does not name the columns of a list of this machine.
    #[error("{file}:{line}: {message}")]
    Header {
        /// The file.
        file: String,
        /// Its line.
        line: u64,
        /// What was met and what would be accepted.
        message: String,
    },
    /// A row with too few or too many fields.
    #[error("{file}:{line}: {met} fields in this row; accepted are {accepted}, as many as the header has")]
    Fields {
        /// The file.
        file: String,
        /// Its line.
        line: u64,
        /// How many there are.
        met: usize,
        /// How many there should be.
        accepted: usize,
    },
    /// A field that is not what its column holds.
    #[error("{file}:{line}: column {column}: {met:?} is not accepted; accepted is {accepted}")]
    Value {
        /// The file.
        file: String,
        /// Its line.
        line: u64,
        /// The name of the column.
        column: String,
        /// What was met.
        met: String,
        /// What would be accepted.
        accepted: String,
    },
    /// A comment of ours that cannot be read.
    #[error("{file}:{line}: comment {name:?}: {message}")]
    Comment {
        /// The file.
        file: String,
        /// Its line.
        line: u64,
        /// What the comment starts with.
        name: &'static str,
        /// What was met and what would be accepted.
        message: String,
    },
}

/// Columns that lists of later versions have, and that no check here speaks of.
const READ_OVER: [&str; 4] = ["kind", "count_s", "note", "setting"];

/// Readings of an endless axis count on through full turns, but nothing turns this far.
const LARGEST_READING_DEG: f64 = 1.0e7;

/// The longest time that is no mistake, in s.
const LONGEST_S: f64 = 1.0e9;

#[derive(Debug, Clone, Copy, PartialEq)]
enum Column {
    Order,
    Index(usize),
    Axis(usize),
    DriveS,
    ElapsedS,
    ReadOver,
}

/// Reads a list of a machine, whoever made it. Columns are found by their names, in any order; `h`, `k`, `l` and every axis
/// must be there, `order`, `drive_s` and `elapsed_s` may be left out. Comments may stand anywhere or nowhere. `file` is what
/// messages call it.
///
/// # Errors
/// The first misfit, with file, line and column.
pub fn read(bytes: &[u8], file: &str, instrument: &Instrument) -> Result<GivenList, ListError> {
    let bytes = bytes.strip_prefix(b"\xef\xbb\xbf").unwrap_or(bytes);
    let mut list = GivenList { rows: Vec::new(), fingerprint: None, stated_rows: None, unread_columns: Vec::new() };
    read_comments(bytes, file, &mut list)?;
    let mut csv =
        ReaderBuilder::new().has_headers(false).flexible(true).comment(Some(b'#')).trim(Trim::All).from_reader(bytes);
    let mut record = ByteRecord::new();
    let mut columns: Option<Vec<(String, Column)>> = None;
    let mut place = Place { file, bytes, line: 1, byte: 0 };
    // A reader of bytes in memory meets no error of a device, and a flexible one none of the form.
    while csv.read_byte_record(&mut record).unwrap_or(false) {
        place.advance(&record);
        match &columns {
            None => columns = Some(read_header(&record, &place, instrument, &mut list.unread_columns)?),
            Some(columns) => {
                let row = read_row(&record, columns, &place, list.rows.len(), instrument.axis_count())?;
                list.rows.push(row);
            }
        }
    }
    if columns.is_none() {
        return Err(ListError::Empty { file: file.to_owned(), accepted: accepted_columns(instrument) });
    }
    Ok(list)
}

/// Where a record begins. The reader's own count stands at the end of the record before, so comments and empty lines are
/// stepped over here.
struct Place<'a> {
    file: &'a str,
    bytes: &'a [u8],
    line: u64,
    byte: usize,
}

impl Place<'_> {
    fn advance(&mut self, record: &ByteRecord) {
        let start = record.position().map_or(self.byte, |position| position.byte() as usize);
        let start = start.min(self.bytes.len());
        self.line += newlines(self.bytes.get(self.byte..start).unwrap_or(&[]));
        self.byte = self.byte.max(start);
        while let Some(rest) = self.bytes.get(self.byte..).filter(|rest| !rest.is_empty()) {
            let (line, with_end) = match rest.iter().position(|b| *b == b'\n') {
                Some(end) => (&rest[..end], end + 1),
                None => (rest, rest.len()),
            };
            if !(line.is_empty() || line == b"\r" || line.starts_with(b"#")) {
                break;
            }
            self.byte += with_end;
            self.line += newlines(&rest[..with_end]);
        }
    }

    fn header(&self, message: String) -> ListError {
        ListError::Header { file: self.file.to_owned(), line: self.line, message }
    }

    fn value(&self, column: &str, met: &[u8], accepted: impl Into<String>) -> ListError {
        let met = String::from_utf8_lossy(met).chars().take(60).collect();
        let (file, column) = (self.file.to_owned(), column.to_owned());
        ListError::Value { file, line: self.line, column, met, accepted: accepted.into() }
    }
}

fn newlines(bytes: &[u8]) -> u64 {
    bytes.iter().filter(|b| **b == b'\n').count() as u64
}

/// Fingerprint and number of rows, from the comments.
fn read_comments(bytes: &[u8], file: &str, list: &mut GivenList) -> Result<(), ListError> {
    for (i, line) in bytes.split(|b| *b == b'\n').enumerate() {
        let Some(comment) = line.strip_prefix(b"#").and_then(|rest| std::str::from_utf8(rest).ok()) else { continue };
        let refuse = |name, message| ListError::Comment { file: file.to_owned(), line: i as u64 + 1, name, message };
        let comment = comment.trim();
        if let Some(text) = comment.strip_prefix(FINGERPRINT) {
            let read = text.trim().parse::<Fingerprint>().map_err(|e| refuse(FINGERPRINT, e.to_string()))?;
            if list.fingerprint.replace(read).is_some_and(|before| before != read) {
                return Err(refuse(FINGERPRINT, "the list carries two that differ; accepted is one".to_owned()));
            }
        } else if let Some(text) = comment.strip_prefix(ROWS) {
            let met = text.trim();
            let count = met.parse().map_err(|_| refuse(ROWS, format!("{met:?} is no number of rows")))?;
            list.stated_rows = Some(count);
        }
    }
    Ok(())
}

fn accepted_columns(instrument: &Instrument) -> String {
    let axes = instrument.axes().map(|axis| axis.name.as_str());
    let names: Vec<&str> = ["order", "h", "k", "l"].into_iter().chain(axes).chain(["drive_s", "elapsed_s"]).collect();
    names.join(",")
}

fn read_header(
    record: &ByteRecord,
    place: &Place<'_>,
    instrument: &Instrument,
    unread: &mut Vec<String>,
) -> Result<Vec<(String, Column)>, ListError> {
    let accepted = || accepted_columns(instrument);
    let mut columns: Vec<(String, Column)> = Vec::with_capacity(record.len());
    for field in record {
        let name = String::from_utf8_lossy(field).into_owned();
        let shown: String = name.chars().take(40).collect();
        let column = match name.as_str() {
            "order" => Column::Order,
            "h" => Column::Index(0),
            "k" => Column::Index(1),
            "l" => Column::Index(2),
            "drive_s" => Column::DriveS,
            "elapsed_s" => Column::ElapsedS,
            name if READ_OVER.contains(&name) => {
                unread.push(name.to_owned());
                Column::ReadOver
            }
            name => match instrument.axis_index(name) {
                Some(axis) => Column::Axis(axis),
                None => {
                    let machine = instrument.name();
                    let message =
                        format!("there is no column {shown:?} in a list of {machine}; accepted are {}", accepted());
                    return Err(place.header(message));
                }
            },
        };
        if columns.iter().any(|(other, _)| *other == name) {
            return Err(place.header(format!("column {shown} stands twice; accepted is each column once")));
        }
        columns.push((name, column));
    }
    let has = |name: &str| columns.iter().any(|(other, _)| other == name);
    let needed = ["h", "k", "l"].into_iter().chain(instrument.axes().map(|axis| axis.name.as_str()));
    let missing: Vec<&str> = needed.filter(|name| !has(name)).collect();
    if !missing.is_empty() {
        let message = format!("no column {}; accepted are {}", missing.join(", "), accepted());
        return Err(place.header(message));
    }
    Ok(columns)
}

fn read_row(
    record: &ByteRecord,
    columns: &[(String, Column)],
    place: &Place<'_>,
    rows_before: usize,
    axis_count: usize,
) -> Result<GivenRow, ListError> {
    if record.len() != columns.len() {
        let (file, line) = (place.file.to_owned(), place.line);
        return Err(ListError::Fields { file, line, met: record.len(), accepted: columns.len() });
    }
    let (mut indices, mut readings, mut drive_s) = ([0.0; 3], [0.0; MAX_AXES], None);
    for (field, (name, column)) in record.iter().zip(columns) {
        let within = |largest: f64, smallest: f64, accepted: &str| {
            number(field).filter(|x| (smallest..=largest).contains(x)).ok_or_else(|| place.value(name, field, accepted))
        };
        match *column {
            Column::Order => {
                let due = (rows_before + 1).to_string();
                if field != due.as_bytes() {
                    let accepted = format!("{due}: rows are driven as they stand, numbered from 1 without gaps");
                    return Err(place.value(name, field, accepted));
                }
            }
            Column::Index(i) => {
                let read = number(field).and_then(|x| Index::new(x).ok());
                indices[i] = read.ok_or_else(|| place.value(name, field, Index::ACCEPTED))?.get();
            }
            Column::Axis(axis) => {
                let accepted = "an angle in degrees, with a point before the decimals";
                readings[axis] = within(LARGEST_READING_DEG, -LARGEST_READING_DEG, accepted)?;
            }
            Column::DriveS => drive_s = Some(within(LONGEST_S, 0.0, "a time in seconds, not negative")?),
            Column::ElapsedS => {
                within(LONGEST_S, 0.0, "a time in seconds, not negative")?;
            }
            Column::ReadOver => {}
        }
    }
    let hkl = Hkl::new(indices[0], indices[1], indices[2]);
    Ok(GivenRow { line: place.line, hkl, setting: Setting::new(&readings[..axis_count]), drive_s })
}

/// A finite number.
fn number(field: &[u8]) -> Option<f64> {
    std::str::from_utf8(field).ok()?.parse::<f64>().ok().filter(|x| x.is_finite())
}

//! The border to other people's formats: tables that leave the program, and lists that come in.

pub mod drive_list;
pub mod reach_table;

/// The error of the device itself: whoever closed a pipe must still be told from a full disk.
fn device_error(error: csv::Error) -> std::io::Error {
    match error.into_kind() {
        csv::ErrorKind::Io(error) => error,
        other => std::io::Error::other(format!("{other:?}")),
    }
}

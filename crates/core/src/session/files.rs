//! Reading and replacing whole files.

use std::fs::{self, File, Metadata, Permissions};
use std::io::{self, Read, Write};
use std::path::{Path, PathBuf};

use super::read::{Format, LARGEST_BYTES, too_large};

/// Why there are no bytes.
#[derive(Debug)]
pub(super) enum ReadError {
    Missing,
    Other(String),
}

/// The bytes of a file that is not too large, or the reason in words.
pub(super) fn read_limited(path: &Path, format: Format) -> Result<Vec<u8>, ReadError> {
    let in_words = |error: io::Error| match error.kind() {
        io::ErrorKind::NotFound => ReadError::Missing,
        _ => ReadError::Other(error.to_string()),
    };
    let metadata = fs::metadata(path).map_err(in_words)?;
    // A device or a pipe may never end.
    if !metadata.is_file() {
        let what = if metadata.is_dir() { "a folder" } else { "no regular file" };
        return Err(ReadError::Other(format!("it is {what}; accepted is a {} file", format.name())));
    }
    let mut bytes = Vec::new();
    let file = File::open(path).map_err(in_words)?;
    file.take(LARGEST_BYTES as u64 + 1).read_to_end(&mut bytes).map_err(in_words)?;
    if bytes.len() > LARGEST_BYTES {
        return Err(ReadError::Other(too_large(metadata.len(), format)));
    }
    Ok(bytes)
}

/// The file that a path means, symbolic links followed, whether or not it exists yet.
pub(super) fn real_file(path: &Path) -> io::Result<PathBuf> {
    const MOST_LINKS: usize = 40;
    let mut file = path.to_owned();
    for _ in 0..MOST_LINKS {
        match fs::symlink_metadata(&file) {
            Ok(metadata) if metadata.is_symlink() => {
                let target = fs::read_link(&file)?;
                file = file.parent().unwrap_or(Path::new("")).join(target);
            }
            Ok(_) => return Ok(file),
            Err(error) if error.kind() == io::ErrorKind::NotFound => return Ok(file),
            Err(error) => return Err(error),
        }
    }
    Err(io::Error::other("its symbolic links go round in a circle"))
}

/// Puts new bytes in the place of a file: written beside it, flushed to the disk, then renamed, so that a kill at any
/// moment leaves the old file or the new one. The permissions of the old file are kept. At worst a file with a name like
/// `.night.ron.x7Qk2b.tmp` is left over.
pub(super) fn replace(file: &Path, bytes: &[u8], old: Option<&Metadata>) -> io::Result<()> {
    let beside = write_beside(file, old, |out| out.write_all(bytes))?;
    beside.persist(file).map_err(|error| error.error)?;
    sync_folder(file);
    Ok(())
}

/// The same, but never in the place of a file that exists: that is an error of the kind `AlreadyExists`.
pub(super) fn create(file: &Path, bytes: &[u8], like: Option<&Metadata>) -> io::Result<()> {
    let beside = write_beside(file, like, |out| out.write_all(bytes))?;
    beside.persist_noclobber(file).map_err(|error| error.error)?;
    sync_folder(file);
    Ok(())
}

/// Writes a whole file of results, symbolic links followed: written beside its place, flushed to the disk, then renamed. If
/// `write` fails or the program is killed, a file that stood there is untouched.
///
/// # Errors
/// If it cannot be written, or if something stands there that is no regular file.
pub fn write_whole(path: &Path, write: impl FnOnce(&mut dyn Write) -> io::Result<()>) -> io::Result<()> {
    let file = real_file(path)?;
    if file.file_name().is_none() {
        return Err(io::Error::other("it is no file name"));
    }
    let old = match fs::metadata(&file) {
        Ok(metadata) if metadata.is_file() => Some(metadata),
        // A renamed file would take the place of a device.
        Ok(_) => return Err(io::Error::other("it is no regular file; accepted is a file, or a name that is free")),
        Err(error) if error.kind() == io::ErrorKind::NotFound => None,
        Err(error) => return Err(error),
    };
    let beside = write_beside(&file, old.as_ref(), |out| {
        let mut buffered = io::BufWriter::new(out);
        write(&mut buffered)?;
        buffered.flush()
    })?;
    beside.persist(&file).map_err(|error| error.error)?;
    sync_folder(&file);
    Ok(())
}

fn write_beside(
    file: &Path,
    like: Option<&Metadata>,
    write: impl FnOnce(&mut File) -> io::Result<()>,
) -> io::Result<tempfile::NamedTempFile> {
    let name = file.file_name().unwrap_or_default().to_string_lossy();
    let mut builder = tempfile::Builder::new();
    let prefix = format!(".{name}.");
    builder.prefix(&prefix).suffix(".tmp");
    if let Some(usual) = usual_permissions() {
        builder.permissions(usual);
    }
    let mut beside = builder.tempfile_in(folder_of(file))?;
    write(beside.as_file_mut())?;
    if let Some(like) = like {
        beside.as_file().set_permissions(like.permissions())?;
    }
    beside.as_file().sync_all()?;
    Ok(beside)
}

/// What a new file gets, less what the user's mask takes away; a temporary file would be for its owner alone.
#[cfg(unix)]
fn usual_permissions() -> Option<Permissions> {
    use std::os::unix::fs::PermissionsExt;
    Some(Permissions::from_mode(0o666))
}

#[cfg(not(unix))]
fn usual_permissions() -> Option<Permissions> {
    None
}

pub(super) fn folder_of(file: &Path) -> &Path {
    file.parent().filter(|folder| !folder.as_os_str().is_empty()).unwrap_or(Path::new("."))
}

/// Makes the rename itself last. Not every file system can, and the rename is done either way.
fn sync_folder(file: &Path) {
    if let Ok(folder) = File::open(folder_of(file)) {
        let _ = folder.sync_all();
    }
}

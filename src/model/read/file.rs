//! Opening a model file safely: regular files only, never through a link, never without end.

use std::fs::File;
use std::io::{self, Read as _};
use std::path::{Path, PathBuf};

use rustix::fs::{FileType, Mode, OFlags};

use super::bytes;
use super::most::MOST_BYTES;
use crate::model::escape::Plain;
use crate::model::fault::Fault;

/// Why a model file could not be read.
#[derive(Debug, thiserror::Error)]
pub enum FileProblem {
    /// There is none.
    #[error("{}: there is no such file", shown(.0))]
    Missing(PathBuf),
    /// It may not be read.
    #[error("{}: no permission to read it", shown(.0))]
    Forbidden(PathBuf),
    /// It is a symbolic link.
    #[error("{}: a symbolic link, which is not followed; put the file itself here", shown(.0))]
    Link(PathBuf),
    /// It is something other than a file.
    #[error("{}: {what}, not a file", shown(.path))]
    NotAFile {
        /// What was to be read.
        path: PathBuf,
        /// What it is, with its article.
        what: &'static str,
    },
    /// It is larger than [`MOST_BYTES`].
    #[error("{}: larger than the {} MiB that are read; split the model", shown(.0), MOST_BYTES >> 20)]
    TooLarge(PathBuf),
    /// It is a folder of parts that changed whenever it was read.
    #[error("{}: its parts change while they are read; it is read once they are at rest", shown(.0))]
    Moving(PathBuf),
    /// Anything else the system says.
    #[error("{}: cannot be read: {source}", shown(.path))]
    Other {
        /// What was to be read.
        path: PathBuf,
        /// What the system says.
        source: io::Error,
    },
}

impl FileProblem {
    /// What the system said of `path` when it was to be read.
    pub(super) fn of(path: &Path, source: io::Error) -> Self {
        refused(path, source)
    }

    /// The same as a fault of `path`, which is what was to be read.
    #[must_use]
    pub fn fault(&self, path: &Path) -> Fault {
        let (code, message, help) = match self {
            Self::Link(_) => {
                ("not-a-file", "a symbolic link, which is not followed".to_owned(), "put the file itself here")
            }
            Self::NotAFile { what, .. } => ("not-a-file", format!("{what}, not a file"), "take it out of the folder"),
            Self::TooLarge(_) => return bytes::too_large(path),
            Self::Missing(_) => ("unread", "there is no such file".to_owned(), ""),
            Self::Forbidden(_) => ("unread", "no permission to read it".to_owned(), "let this user read it"),
            Self::Moving(_) => ("unread", "its parts change while they are read".to_owned(), ""),
            Self::Other { source, .. } => ("unread", format!("cannot be read: {source}"), ""),
        };
        Fault { path: path.to_owned(), place: None, code, message, help: help.to_owned() }
    }

    /// The kind of failure in the system's terms; [`NotFound`](io::ErrorKind::NotFound) where there is no such file.
    #[must_use]
    pub fn kind(&self) -> io::ErrorKind {
        match self {
            Self::Missing(_) => io::ErrorKind::NotFound,
            Self::Forbidden(_) => io::ErrorKind::PermissionDenied,
            Self::TooLarge(_) => io::ErrorKind::FileTooLarge,
            Self::Moving(_) => io::ErrorKind::ResourceBusy,
            Self::Link(_) | Self::NotAFile { .. } => io::ErrorKind::InvalidInput,
            Self::Other { source, .. } => source.kind(),
        }
    }
}

fn shown(path: &Path) -> String {
    Plain(&path.to_string_lossy()).to_string()
}

/// The bytes of a regular file of at most [`MOST_BYTES`]. Never waits for a writer, as a pipe would make it.
///
/// # Errors
/// Where there is no such file, it may not be read, is a link, a folder, a pipe, a device or too large, or reading it fails.
pub fn file(path: &Path) -> Result<Vec<u8>, FileProblem> {
    let flags = OFlags::RDONLY | OFlags::NOFOLLOW | OFlags::NONBLOCK | OFlags::CLOEXEC | OFlags::NOCTTY;
    let handle = rustix::fs::open(path, flags, Mode::empty()).map_err(|error| refused(path, error.into()))?;
    let file = File::from(handle);
    let about = rustix::fs::fstat(&file).map_err(|error| refused(path, error.into()))?;
    if let Some(what) = other_than_file(FileType::from_raw_mode(about.st_mode)) {
        return Err(FileProblem::NotAFile { path: path.to_owned(), what });
    }
    let size = usize::try_from(about.st_size).unwrap_or(usize::MAX);
    if size > MOST_BYTES {
        return Err(FileProblem::TooLarge(path.to_owned()));
    }
    whole(path, file, size)
}

/// All that a reader yields, where that is at most [`MOST_BYTES`]; the file may have grown since it told its size.
fn whole(path: &Path, reader: impl io::Read, size: usize) -> Result<Vec<u8>, FileProblem> {
    let mut bytes = Vec::with_capacity(size + 1);
    reader.take(MOST_BYTES as u64 + 1).read_to_end(&mut bytes).map_err(|error| refused(path, error))?;
    if bytes.len() > MOST_BYTES {
        return Err(FileProblem::TooLarge(path.to_owned()));
    }
    Ok(bytes)
}

fn refused(path: &Path, source: io::Error) -> FileProblem {
    let path = path.to_owned();
    let is_link = || path.symlink_metadata().is_ok_and(|about| about.file_type().is_symlink());
    match source.kind() {
        io::ErrorKind::NotFound => FileProblem::Missing(path),
        io::ErrorKind::PermissionDenied => FileProblem::Forbidden(path),
        // A socket cannot be opened at all.
        _ if source.raw_os_error() == Some(rustix::io::Errno::NXIO.raw_os_error()) => {
            FileProblem::NotAFile { path, what: "a socket" }
        }
        _ if is_link() => FileProblem::Link(path),
        _ => FileProblem::Other { path, source },
    }
}

fn other_than_file(kind: FileType) -> Option<&'static str> {
    match kind {
        FileType::RegularFile => None,
        FileType::Directory => Some("a folder"),
        FileType::Fifo => Some("a named pipe"),
        FileType::Socket => Some("a socket"),
        FileType::CharacterDevice | FileType::BlockDevice => Some("a device"),
        FileType::Symlink | FileType::Unknown => Some("something else"),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_file_that_grows_without_end_is_given_up_at_the_cap() {
        let path = Path::new("works.model.toml");
        let read = whole(path, io::repeat(b'#'), 100);
        assert!(matches!(read, Err(FileProblem::TooLarge(_))));
        let read = whole(path, io::repeat(b'#').take(MOST_BYTES as u64), 100);
        assert_eq!(read.map(|bytes| bytes.len()).ok(), Some(MOST_BYTES));
    }
}

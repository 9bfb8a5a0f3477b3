//! What can go wrong on disk: which call failed, on what, why in plain words, and what would do.

use std::fmt;
use std::io::{self, ErrorKind};
use std::path::{Path, PathBuf};

use rustix::io::Errno;

use crate::model::escape::Plain;

/// The longest path shown in a message, in characters; the end of a longer one is shown.
const LONGEST_SHOWN: usize = 240;

/// The calls that make up a write, in the order in which they are made.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Step {
    /// Looking at what is there already.
    Look,
    /// Making a folder.
    MakeFolder,
    /// Creating the temporary file beside the target.
    Create,
    /// Writing into it.
    Write,
    /// Giving it the mode of the file it replaces.
    Mode,
    /// Syncing it to the disk.
    Sync,
    /// Renaming it over the target.
    Rename,
    /// Syncing the folder to the disk.
    SyncFolder,
}

impl Step {
    /// The words for it, to follow "cannot".
    #[must_use]
    pub fn words(self) -> &'static str {
        match self {
            Self::Look => "look at",
            Self::MakeFolder => "make the folder",
            Self::Create => "create a temporary file beside",
            Self::Write => "write a temporary file beside",
            Self::Mode => "set the mode of a temporary file beside",
            Self::Sync => "sync a temporary file beside",
            Self::Rename => "rename a finished file to",
            Self::SyncFolder => "sync the folder of",
        }
    }
}

/// Why a file was not written. The target is as it was, and no temporary file is left.
///
/// The one exception is [`Step::SyncFolder`]: the new file is in place, but a power cut could still bring the old one back.
#[derive(Debug, thiserror::Error)]
pub enum StoreError {
    /// A call failed.
    #[error("cannot {} {}: {}", .step.words(), shown(.path), reason(.source))]
    Failed {
        /// Which call.
        step: Step,
        /// The file that was to be written.
        path: PathBuf,
        /// What the system said.
        source: io::Error,
    },
    /// Something that is not a plain file stands in the way.
    #[error("{} is {what}: it is left alone; move it away, or rename the model", shown(.path))]
    InTheWay {
        /// The file that was to be written.
        path: PathBuf,
        /// What is there: "a folder", "a symbolic link", …
        what: &'static str,
    },
    /// A file that somebody else wrote, or a newer version, is there.
    #[error("{} was not written by millreeve, or by a newer version of it: it is left alone; move it away, or rename the model", shown(.path))]
    NotOurs {
        /// The file that was to be written.
        path: PathBuf,
    },
}

impl StoreError {
    /// Whether trying again later may help without anybody touching the model: all but somebody else's file in the way, and a name that does not fit.
    #[must_use]
    pub fn may_pass(&self) -> bool {
        match self {
            Self::Failed { source, .. } => source.kind() != ErrorKind::InvalidFilename,
            Self::InTheWay { .. } | Self::NotOurs { .. } => false,
        }
    }

    /// A failed call, for `map_err`.
    pub(crate) fn failed(step: Step, path: &Path) -> impl FnOnce(io::Error) -> Self {
        let path = path.to_owned();
        move |source| Self::Failed { step, path, source }
    }
}

/// A path in back-quotes, escaped and of bounded length.
pub(crate) fn shown(path: &Path) -> impl fmt::Display + use<> {
    let text = path.to_string_lossy();
    let count = text.chars().count();
    let cut: String = text.chars().skip(count.saturating_sub(LONGEST_SHOWN)).collect();
    let mark = if count > LONGEST_SHOWN { "…" } else { "" };
    format!("`{mark}{}`", Plain(&cut))
}

/// What the system said, in plain words and with a cure where there is one.
#[must_use]
pub fn reason(error: &io::Error) -> String {
    const TOO_MANY_OPEN: [Option<i32>; 2] = [Some(Errno::MFILE.raw_os_error()), Some(Errno::NFILE.raw_os_error())];
    let told = match error.kind() {
        _ if TOO_MANY_OPEN.contains(&error.raw_os_error()) => {
            "too many files are open; raise the limit on open files (ulimit -n, or LimitNOFILE of the service)"
        }
        ErrorKind::WouldBlock => {
            "the system allows no more threads; raise the limit on processes (ulimit -u, or TasksMax of the service)"
        }
        ErrorKind::StorageFull => "the disk is full (of data or of file entries); free some space",
        ErrorKind::QuotaExceeded => "the disk quota is used up; free some space or have it raised",
        ErrorKind::ReadOnlyFilesystem => "the file system is read-only; mount it for writing",
        ErrorKind::PermissionDenied => "permission denied; let the daemon's user write to this folder",
        ErrorKind::FileTooLarge => "the file would be larger than the limit set for this process; raise it (ulimit -f)",
        ErrorKind::InvalidFilename => {
            "the name is too long, or has a character this file system refuses; rename the model"
        }
        ErrorKind::NotFound => "the file or its folder is gone",
        _ => return Plain(&error.to_string()).to_string(),
    };
    told.to_owned()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn causes_are_told_in_plain_words() {
        // Error numbers of Linux: ENOSPC 28, EDQUOT 122, EROFS 30, EACCES 13, EFBIG 27, ENAMETOOLONG 36, EMFILE 24, EAGAIN 11.
        let words = [
            (28, "full"),
            (122, "quota"),
            (30, "read-only"),
            (13, "permission"),
            (27, "larger"),
            (36, "too long"),
            (24, "ulimit -n"),
            (11, "ulimit -u"),
        ];
        for (number, word) in words {
            let source = io::Error::from_raw_os_error(number);
            let error = StoreError::Failed { step: Step::Write, path: "a\u{1b}.plan.toml".into(), source };
            let told = error.to_string();
            assert!(told.contains(word), "{told}");
            assert!(told.starts_with("cannot write a temporary file beside `a\\u{1b}.plan.toml`: "), "{told}");
        }
    }

    #[test]
    fn a_long_path_is_cut_at_its_beginning() {
        let path = PathBuf::from(format!("{}/end.plan.toml", "x".repeat(4000)));
        let told = shown(&path).to_string();
        assert!(told.chars().count() <= LONGEST_SHOWN + 3, "{}", told.len());
        assert!(told.ends_with("/end.plan.toml`"));
    }
}

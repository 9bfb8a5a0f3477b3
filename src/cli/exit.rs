//! How a command can end, and the exit status that says so.

use std::fmt;
use std::path::{Path, PathBuf};
use std::process::ExitCode;

use crate::model::escape::Plain;

/// How a command ended that could do its work.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub(crate) enum Outcome {
    /// All current, all checked.
    Good,
    /// A model is held or faulty, or its plan is not what it should be.
    Amiss,
    /// Part of the work was done and the system refused the rest, which has been told.
    Failed,
}

impl Outcome {
    /// Good, if `good`.
    pub(crate) fn good_if(good: bool) -> Self {
        if good { Self::Good } else { Self::Amiss }
    }
}

impl From<Outcome> for ExitCode {
    fn from(outcome: Outcome) -> Self {
        Self::from(match outcome {
            Outcome::Good => 0,
            Outcome::Amiss => 1,
            Outcome::Failed => 3,
        })
    }
}

/// Why a command could not do its work. Texts are shown escaped.
#[derive(Debug)]
pub(crate) struct Error {
    kind: Kind,
    /// What went wrong, a lowercase fragment; may have several lines, which stay.
    message: String,
    /// What would mend it; empty where nothing can be said.
    help: String,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Kind {
    Faulty,
    Usage,
    Failure,
}

impl Error {
    /// What was to be read is faulty.
    pub(crate) fn faulty(message: impl fmt::Display, help: impl fmt::Display) -> Self {
        Self { kind: Kind::Faulty, message: message.to_string(), help: help.to_string() }
    }

    /// The command line or the settings are wrong.
    pub(crate) fn usage(message: impl fmt::Display, help: impl fmt::Display) -> Self {
        Self { kind: Kind::Usage, message: message.to_string(), help: help.to_string() }
    }

    /// The system would not do what was asked of it.
    pub(crate) fn failure(message: impl fmt::Display, help: impl fmt::Display) -> Self {
        Self { kind: Kind::Failure, message: message.to_string(), help: help.to_string() }
    }

    /// A file or folder named on the command line could not be read: a wrong command line where it is not there, else a failure.
    pub(crate) fn reading(path: &Path, error: &std::io::Error) -> Self {
        if error.kind() == std::io::ErrorKind::NotFound {
            return Self::usage(format_args!("there is no {}", shown(path)), "");
        }
        Self::failure(format_args!("cannot read {}: {error}", shown(path)), "")
    }

    /// The exit status.
    pub(crate) fn status(&self) -> u8 {
        match self.kind {
            Kind::Faulty => 1,
            Kind::Usage => 2,
            Kind::Failure => 3,
        }
    }

    /// Whether the system refused, rather than anybody having made a mistake.
    pub(crate) fn is_failure(&self) -> bool {
        self.kind == Kind::Failure
    }

    /// The message alone.
    pub(crate) fn message(&self) -> &str {
        &self.message
    }

    /// The cure alone.
    pub(crate) fn help(&self) -> &str {
        &self.help
    }
}

impl From<Error> for ExitCode {
    fn from(error: Error) -> Self {
        Self::from(error.status())
    }
}

/// A path as people may be shown it: escaped, in back-quotes.
pub(crate) fn shown(path: &Path) -> String {
    format!("`{}`", Plain(&path.to_string_lossy()))
}

/// A path as text for a JSON object; what is not Unicode in it is replaced.
pub(crate) fn text(path: &Path) -> String {
    PathBuf::from(path).to_string_lossy().into_owned()
}

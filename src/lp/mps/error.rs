//! What is wrong with an MPS file, and what was left out of one.

use crate::model::escape::Plain;
use crate::model::fault::MOST_REPORTED;

/// The longest part of a file's own text that a message repeats, in characters.
const LONGEST_QUOTE: usize = 60;

/// Why a text is no MPS file that can be planned.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
#[error("line {line}: {message}")]
pub struct MpsError {
    /// The line, from 1.
    pub line: usize,
    /// What is wrong: a fragment, short and escaped, names in back-quotes.
    pub message: String,
    /// What would mend it; empty where nothing can be said.
    pub help: &'static str,
}

/// Something of the file that the model does not say as the file did.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Warning {
    /// The line, from 1.
    pub line: usize,
    /// What was read otherwise or left out: a fragment, short and escaped.
    pub message: String,
}

/// The first warnings of a reading, and how many more there are.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Warnings {
    /// The warnings kept, at most [`MOST_REPORTED`].
    pub reported: Vec<Warning>,
    /// How many more there were.
    pub more: usize,
}

impl Warnings {
    pub(super) fn add(&mut self, line: usize, message: impl FnOnce() -> String) {
        if self.reported.len() < MOST_REPORTED {
            self.reported.push(Warning { line, message: message() });
        } else {
            self.more += 1;
        }
    }
}

/// What is wrong, before it is known in which line.
#[derive(Debug)]
pub(super) struct Flaw {
    message: String,
    help: &'static str,
}

impl Flaw {
    pub(super) fn new(message: impl Into<String>, help: &'static str) -> Self {
        Self { message: message.into(), help }
    }

    pub(super) fn at(self, line: usize) -> MpsError {
        MpsError { line, message: self.message, help: self.help }
    }
}

/// A name or value as messages show it: in back-quotes, escaped, cut to a readable length.
pub(super) fn quoted(text: &str) -> String {
    match text.char_indices().nth(LONGEST_QUOTE) {
        Some((end, _)) => format!("`{}…`", Plain(&text[..end])),
        None => format!("`{}`", Plain(text)),
    }
}

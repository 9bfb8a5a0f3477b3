//! Faults: what is wrong with a model, where, and what would mend it.

mod render;

use std::path::PathBuf;

/// The most faults one reading reports; the rest are counted.
pub const MOST_REPORTED: usize = 20;

/// One thing wrong with a model file.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Fault {
    /// The file, as it was given.
    pub path: PathBuf,
    /// Where in it; `None` where the fault is the file as a whole.
    pub place: Option<Place>,
    /// Stable identifier, for programs: lower case words joined by `-`.
    pub code: &'static str,
    /// What is wrong, in one sentence without a full stop; names stand in back-quotes. Not escaped.
    pub message: String,
    /// What would mend it; empty where nothing can be said. Not escaped.
    pub help: String,
}

/// A place in a text file, as an editor counts it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Place {
    /// Line, from 1.
    pub line: usize,
    /// Column in characters, from 1.
    pub column: usize,
    /// How many characters are meant; at least 1, within the line.
    pub width: usize,
    /// The line's own text around the place, cut to a readable length; not escaped.
    pub excerpt: Excerpt,
}

/// The part of a line that is shown with a caret under it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Excerpt {
    /// The text shown, at most some 80 characters of the line.
    pub text: String,
    /// Characters of `text` before the place.
    pub before: usize,
    /// Whether the line goes on to the left of `text`.
    pub cut_left: bool,
    /// Whether the line goes on to the right of `text`.
    pub cut_right: bool,
}

/// All that a reading found wrong: the first [`MOST_REPORTED`] faults, in the order of the file, and how many more there are.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Faults {
    /// The faults reported, in order of place.
    pub reported: Vec<Fault>,
    /// How many more were found.
    pub more: usize,
}

impl Faults {
    /// Whether there is none.
    #[must_use]
    pub fn is_empty(&self) -> bool {
        self.reported.is_empty() && self.more == 0
    }
}

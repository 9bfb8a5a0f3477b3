//! Reading a model: from bytes to a checked [`Model`], or to all the faults that keep it from being one.
//!
//! One pass with places: the bytes are made a text, the text is parsed into tables that know where they stand, and the
//! tables are walked once. Nothing is guessed and nothing is passed over: what is not understood is a fault. A text that was
//! read before it was edited is read by its edited tables where that comes to the same ([`again()`]).

mod activity;
mod again;
mod blocks;
mod bounds;
mod bytes;
mod caps;
mod complaints;
mod csv;
mod document;
mod duplicate;
mod fields;
mod file;
mod findings;
mod keys;
mod known;
mod limit;
mod near;
mod number;
mod parts;
mod resource;
mod source;
mod syntax;
mod term;
mod toml_types;
mod writing;

use std::path::Path;

pub use again::{Before, again};
pub use blocks::Blocks;
pub use caps::{
    MOST_ACTIVITIES, MOST_BYTES, MOST_COEFFICIENTS, MOST_LIMITS, MOST_LINES, MOST_PARTS, MOST_RESOURCES, MOST_TOKENS,
};
pub use fields::LONGEST_TEXT;
pub use file::{FileProblem, file};
pub use number::{LARGEST, SMALLEST_RATE};
pub use parts::folder::{Listing, is_part};
pub use writing::{FILE, FOLDER, Writing, forms, is_folder_name, is_in_parts, writing};

use super::fault::{Fault, Faults};
use super::types::Model;
use findings::Findings;

/// A model that was read, and what is odd about it though nothing is wrong.
#[derive(Clone, Debug, PartialEq)]
pub struct Reading {
    /// The model.
    pub model: Model,
    /// Oddities: names that look alike. At most [`MOST_REPORTED`](super::fault::MOST_REPORTED).
    pub warnings: Vec<Fault>,
}

/// What is wrong with a file that [`file()`] finds too large to be read: the fault that [`text`] would report.
#[must_use]
pub fn too_large(path: &Path) -> Faults {
    Faults { reported: vec![bytes::too_large(path)], more: 0 }
}

/// The model that the bytes of a file spell. Pure: `path` is only repeated in faults.
///
/// # Errors
/// All faults found, in the order of the file; the first [`MOST_REPORTED`](super::fault::MOST_REPORTED) are told and the rest
/// counted. A file that is no UTF-8 text or no TOML is not looked into further.
pub fn text(path: &Path, bytes: &[u8]) -> Result<Reading, Faults> {
    Ok(text_and_blocks(path, bytes)?.0)
}

/// As [`text`], and where the tables of the text lie, so that [`again`] can read it once it is edited.
///
/// # Errors
/// As [`text`].
pub fn text_and_blocks(path: &Path, bytes: &[u8]) -> Result<(Reading, Blocks), Faults> {
    let source = bytes::text(path, bytes).map_err(|fault| Faults { reported: vec![*fault], more: 0 })?;
    let root = syntax::parse(source)?;
    let mut findings = Findings::default();
    let model = document::model(root.get_ref(), &mut findings);
    if !findings.is_empty() {
        return Err(findings.finish(source, &model));
    }
    let warnings = document::twins(root.get_ref(), &model).finish(source, &model).reported;
    Ok((Reading { model, warnings }, Blocks::of(source.text, root.get_ref())))
}

//! Reading a model: from bytes to a checked [`Model`], or to all the faults that keep it from being one.
//!
//! One pass with places: the bytes are made a text, the text is parsed into tables that know where they stand, and the
//! tables are walked once. Nothing is guessed and nothing is passed over: what is not understood is a fault. A text that was
//! read before it was edited is read by its edited tables where that comes to the same ([`again()`]).

mod activity;
mod again;
mod blocks;
mod bounds;
mod by_period;
mod bytes;
mod calendar;
mod caps;
mod complaints;
mod csv;
mod document;
mod duplicate;
mod fields;
mod file;
mod findings;
mod flow;
mod keys;
mod known;
mod limit;
mod material;
mod most;
mod named;
mod number;
mod oddities;
mod over;
mod parts;
mod periods;
mod replaced;
mod resource;
mod source;
mod syntax;
mod term;
mod tiers;
mod toml_types;
mod writing;

use std::path::Path;

pub use again::{Before, again};
pub use blocks::Blocks;
pub use fields::LONGEST_TEXT;
pub use file::{FileProblem, file};
pub use most::{
    MOST_ACTIVITIES, MOST_BYTES, MOST_COEFFICIENTS, MOST_COLUMNS, MOST_LIMITS, MOST_LINES, MOST_LISTED, MOST_MATERIALS,
    MOST_PARTS, MOST_PERIODS, MOST_RESOURCES, MOST_ROWS, MOST_TOKENS,
};
pub use number::{LARGEST, SMALLEST_RATE};
pub use parts::Traces;
pub use parts::folder::{Listing, is_part};
pub use writing::{FILE, FOLDER, Traced, Writing, forms, is_folder_name, is_in_parts, writing};

use toml::Spanned;

use super::fault::Faults;
use super::types::Model;
use super::value::Value;
use findings::Findings;
use source::Source;
use toml_types::Table;

/// A model that was read, and what is odd about it though nothing is wrong.
#[derive(Clone, Debug, PartialEq)]
pub struct Reading {
    /// The model.
    pub model: Model,
    /// Oddities, such as names that look alike or a resource that nobody uses: in the order of the file, the first
    /// [`MOST_REPORTED`](super::fault::MOST_REPORTED), and how many more there are.
    pub warnings: Faults,
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
    let Parsed { source, root, model, .. } = parsed(path, bytes)?;
    let warnings = oddities::find(root.get_ref(), &model).finish(source, &model);
    Ok(Reading { model, warnings })
}

/// The model that the bytes of a file spell, and where the tables of the text lie, so that [`again`] can read it once it is edited.
/// Does not look for oddities.
///
/// # Errors
/// As [`text`].
pub fn text_and_blocks(path: &Path, bytes: &[u8]) -> Result<(Model, Blocks), Faults> {
    let Parsed { source, root, model, days } = parsed(path, bytes)?;
    Ok((model, Blocks::of(source.text, root.get_ref(), days)))
}

/// A text without a fault.
struct Parsed<'a> {
    source: Source<'a>,
    root: Spanned<Table<'a>>,
    model: Model,
    days: Option<Value>,
}

fn parsed<'a>(path: &'a Path, bytes: &'a [u8]) -> Result<Parsed<'a>, Faults> {
    let source = bytes::text(path, bytes).map_err(|fault| Faults { reported: vec![*fault], more: 0 })?;
    let root = syntax::parse(source)?;
    let mut findings = Findings::default();
    let (model, days) = document::model(root.get_ref(), &mut findings);
    if findings.is_empty() { Ok(Parsed { source, root, model, days }) } else { Err(findings.finish(source, &model)) }
}

//! Where the tables of a text lie, where that is plain to see: what lets an edited text be read by its edited tables alone.

use super::keys::{self, Keys};
use super::toml_types::Table;
use crate::model::name::Name;
use crate::model::value::Value;

/// The tables of a model's text: none where anything about its layout is out of the ordinary.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Blocks {
    /// In the order of the text.
    pub(super) tables: Vec<Block>,
    /// The working days in each period, which stand before the tables.
    pub(super) days: Option<Value>,
}

/// A table that begins with a line `[section.name]` and reaches to the next such line.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(super) struct Block {
    /// The byte at which its first line begins.
    pub(super) start: usize,
    pub(super) section: Section,
    pub(super) name: Name,
}

/// A section of a model.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Section {
    Resources,
    Activities,
    Materials,
    Limits,
}

impl Section {
    pub(super) const ALL: [Self; 4] = [Self::Resources, Self::Activities, Self::Materials, Self::Limits];

    /// The keys of its tables.
    pub(super) fn keys(self) -> &'static Keys {
        match self {
            Self::Resources => &keys::RESOURCE,
            Self::Activities => &keys::ACTIVITY,
            Self::Materials => &keys::MATERIAL,
            Self::Limits => &keys::LIMIT,
        }
    }

    /// Its key.
    pub(super) fn word(self) -> &'static str {
        match self {
            Self::Resources => "resources",
            Self::Activities => "activities",
            Self::Materials => "materials",
            Self::Limits => "limits",
        }
    }
}

impl Blocks {
    /// The blocks of `text`, which was parsed into `root`.
    ///
    /// A line that begins with a bracket may be a header or lie within a list or a text. So each entry is asked where its name
    /// stands; only where these are all the lines that begin so, they are all the headers, and nothing of an entry lies outside its block.
    pub(super) fn of(text: &str, root: &Table<'_>, days: Option<Value>) -> Self {
        let mut tables = Vec::new();
        for section in Section::ALL {
            let entries = root.get(section.word()).and_then(|node| node.get_ref().as_table());
            for (key, _) in entries.into_iter().flatten() {
                let start = header(text, section, key.span().start, key.get_ref());
                let (Some(start), Ok(name)) = (start, Name::new(key.get_ref())) else { return Self::default() };
                tables.push(Block { start, section, name });
            }
        }
        tables.sort_unstable_by_key(|block| block.start);
        if bracketed_lines(text) == tables.len() { Self { tables, days } } else { Self::default() }
    }
}

/// Where the line begins that is a header in its plainest form, if the name at `at` stands in one.
fn header(text: &str, section: Section, at: usize, name: &str) -> Option<usize> {
    let before = text.get(..at)?.strip_suffix('.')?.strip_suffix(section.word())?.strip_suffix('[')?;
    let closed = text.get(at..)?.strip_prefix(name)?.starts_with(']');
    (closed && (before.is_empty() || before.ends_with('\n'))).then_some(before.len())
}

fn bracketed_lines(text: &str) -> usize {
    text.lines().filter(|line| line.trim_ascii_start().starts_with('[')).count()
}

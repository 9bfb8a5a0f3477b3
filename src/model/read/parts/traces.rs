//! Where the entries of a model lie in its parts: what lets parts be read by what was edited in them alone.

use std::sync::Arc;

use super::sheets::Sheets;
use crate::model::name::Name;
use crate::model::read::blocks::{Block, Blocks, Section};
use crate::model::read::csv::{self, Kind};
use crate::model::read::toml_types::Table;
use crate::model::value::Value;

/// Where the tables and rows of a model's parts lie: nothing where the layout of a part is out of the ordinary.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Traces {
    /// The tables or rows of each part in their order, each reaching to the next; parts in byte order of their names.
    pub(super) parts: Vec<Arc<Vec<Block>>>,
    /// The working days in each period.
    pub(super) days: Option<Value>,
}

impl Traces {
    /// The traces of parts, where `tables` are the blocks of the TOML parts among them, in order.
    pub(super) fn of(sheets: &Sheets<'_>, tables: Vec<Option<Vec<Block>>>, days: Option<Value>) -> Self {
        let mut tables = tables.into_iter();
        let blocks = sheets.iter().map(|sheet| match sheet.csv {
            Some(kind) => rows(sheet.text, kind),
            None => tables.next().flatten(),
        });
        let parts: Option<Vec<_>> = blocks.map(|blocks| blocks.map(Arc::new)).collect();
        parts.map_or_else(Self::default, |parts| Self { parts, days })
    }
}

/// The tables of a TOML part that was parsed into `root`; `None` where an entry lies elsewhere than in a plain table of its own.
pub(super) fn tables(text: &str, root: &Table<'_>) -> Option<Vec<Block>> {
    let entries = Section::ALL.iter().filter_map(|section| root.get(section.word()));
    let count: usize = entries.map(|node| node.get_ref().as_table().map_or(1, |table| table.len())).sum();
    let tables = Blocks::of(text, root, None).tables;
    (tables.len() == count).then_some(tables)
}

/// The rows of a CSV part as blocks of what they are about.
pub(super) fn rows(text: &str, kind: Kind) -> Option<Vec<Block>> {
    let section = Section::ALL.into_iter().find(|section| section.word() == kind.section())?;
    let block = |(start, name): (usize, Name)| Block { start, section, name };
    Some(csv::rows(text, kind)?.into_iter().map(block).collect())
}

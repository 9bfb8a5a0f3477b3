//! A basis by name: which columns and rows are basic, and at which bound the others stand.

use serde::{Deserialize, Serialize};

use crate::lp::{Key, Program};

/// Where a column or row stands in a basis.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub enum Position {
    /// In the basis.
    #[serde(rename = "b")]
    Basic,
    /// Out of it, at its lower bound (or held at its only value).
    #[serde(rename = "l")]
    AtLower,
    /// Out of it, at its upper bound.
    #[serde(rename = "u")]
    AtUpper,
    /// Out of it, free, at 0.
    #[serde(rename = "z")]
    AtZero,
}

/// The positions of a program's columns and rows, in the program's order: as many basic ones as there are rows.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub struct Basis {
    /// One position per column.
    pub columns: Vec<Position>,
    /// One position per row.
    pub rows: Vec<Position>,
}

/// A basis that stands on its own: by key, so that it outlives the program it was found for.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub struct NamedBasis {
    /// Columns in byte order of keys.
    pub columns: Vec<(Key, Position)>,
    /// Rows in byte order of keys.
    pub rows: Vec<(Key, Position)>,
}

impl Basis {
    /// Whether it has the shape of `program`'s bases: a position for each column and row, as many basic as there are rows.
    #[must_use]
    pub fn fits(&self, program: &Program) -> bool {
        let basic = self.columns.iter().chain(&self.rows).filter(|&&position| position == Position::Basic).count();
        self.columns.len() == program.columns.len() && self.rows.len() == program.rows.len() && basic == self.rows.len()
    }

    /// The same basis by key.
    #[must_use]
    pub fn named(&self, program: &Program) -> NamedBasis {
        let columns = program.columns.iter().map(|column| column.key.clone());
        let rows = program.rows.iter().map(|row| row.key.clone());
        NamedBasis {
            columns: columns.zip(self.columns.iter().copied()).collect(),
            rows: rows.zip(self.rows.iter().copied()).collect(),
        }
    }
}

impl NamedBasis {
    /// The same basis where some keys have become others.
    #[must_use]
    pub fn renamed(&self, rename: impl Fn(&Key) -> Option<Key>) -> Self {
        let list = |entries: &[(Key, Position)]| {
            let mut list: Vec<_> =
                entries.iter().map(|(key, position)| (rename(key).unwrap_or_else(|| key.clone()), *position)).collect();
            list.sort_by(|a, b| a.0.cmp(&b.0));
            list
        };
        Self { columns: list(&self.columns), rows: list(&self.rows) }
    }

    /// The position of a column, if the basis knows it.
    #[must_use]
    pub fn column(&self, key: &Key) -> Option<Position> {
        find(&self.columns, key)
    }

    /// The position of a row, if the basis knows it.
    #[must_use]
    pub fn row(&self, key: &Key) -> Option<Position> {
        find(&self.rows, key)
    }
}

fn find(list: &[(Key, Position)], key: &Key) -> Option<Position> {
    list.binary_search_by(|entry| entry.0.cmp(key)).ok().map(|at| list[at].1)
}

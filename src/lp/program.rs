//! A linear program: columns and rows known by name, with a sparse matrix.

use std::cmp::Ordering;
use std::fmt;
use std::sync::Arc;

use serde::{Deserialize, Deserializer, Serialize, Serializer};

/// The name of a column or row: the address of what it stands for, such as `activities.floor_tile` or `resources.kiln`.
///
/// A basis, a difference and a plan refer to columns and rows by key, never by position, so they survive reordering.
#[derive(Clone, Debug)]
pub struct Key(Arc<str>);

impl Ord for Key {
    /// Byte order. What an edit leaves alone is shared by the programs before and after it, and equal without a look at its bytes.
    fn cmp(&self, other: &Self) -> Ordering {
        if Arc::ptr_eq(&self.0, &other.0) { Ordering::Equal } else { self.0.cmp(&other.0) }
    }
}

impl PartialOrd for Key {
    fn partial_cmp(&self, other: &Self) -> Option<Ordering> {
        Some(self.cmp(other))
    }
}

impl PartialEq for Key {
    fn eq(&self, other: &Self) -> bool {
        Arc::ptr_eq(&self.0, &other.0) || self.0 == other.0
    }
}

impl Eq for Key {}

impl Key {
    /// The key that `text` spells.
    #[must_use]
    pub fn new(text: &str) -> Self {
        Self(text.into())
    }

    /// The key as text.
    #[must_use]
    pub fn as_str(&self) -> &str {
        &self.0
    }
}

impl Serialize for Key {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        serializer.serialize_str(&self.0)
    }
}

impl<'de> Deserialize<'de> for Key {
    fn deserialize<D: Deserializer<'de>>(deserializer: D) -> Result<Self, D::Error> {
        String::deserialize(deserializer).map(|text| Self(text.into()))
    }
}

impl fmt::Display for Key {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.0)
    }
}

/// A column of one program, by position.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct ColumnIndex(pub usize);

/// A row of one program, by position.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash, Serialize, Deserialize)]
pub struct RowIndex(pub usize);

/// Whether the aim is to be large or small.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub enum Sense {
    /// The aim is to be as large as possible.
    #[default]
    Maximise,
    /// The aim is to be as small as possible.
    Minimise,
}

impl Sense {
    /// +1 where the aim is to be small, −1 where it is to be large: what turns the aim into one to minimise.
    #[must_use]
    pub fn sign(self) -> f64 {
        match self {
            Self::Minimise => 1.0,
            Self::Maximise => -1.0,
        }
    }
}

/// One column: a level to be found between its bounds.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Column {
    /// What it stands for.
    pub key: Key,
    /// The least value; may be minus infinity.
    pub lower: f64,
    /// The greatest value; may be infinity.
    pub upper: f64,
    /// What one unit adds to the aim.
    pub aim: f64,
    /// Its entries, by row, ascending and without zeros.
    pub entries: Vec<(RowIndex, f64)>,
}

/// One row: a sum of columns held between two bounds.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Row {
    /// What it stands for.
    pub key: Key,
    /// The least sum; may be minus infinity.
    pub lower: f64,
    /// The greatest sum; may be infinity.
    pub upper: f64,
}

/// A linear program: find levels of the columns, within bounds, that keep every row and make the aim largest or smallest.
///
/// Columns and rows are in byte order of their keys and no key stands twice.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
pub struct Program {
    /// Whether the aim is to be large or small.
    pub sense: Sense,
    /// Added to the aim.
    pub offset: f64,
    /// The columns, in byte order of keys.
    pub columns: Vec<Column>,
    /// The rows, in byte order of keys.
    pub rows: Vec<Row>,
}

/// Where each of `to` stands in `from`, both lists in order of their keys.
#[must_use]
pub fn places<T>(from: &[T], to: &[T], key: impl Fn(&T) -> &Key) -> Vec<Option<usize>> {
    let mut next = 0;
    let place = |item: &T| {
        while next < from.len() {
            match key(&from[next]).cmp(key(item)) {
                Ordering::Less => next += 1,
                Ordering::Equal => {
                    next += 1;
                    return Some(next - 1);
                }
                Ordering::Greater => return None,
            }
        }
        None
    };
    to.iter().map(place).collect()
}

impl Program {
    /// The position of a column.
    #[must_use]
    pub fn column(&self, key: &Key) -> Option<ColumnIndex> {
        self.columns.binary_search_by(|column| column.key.cmp(key)).ok().map(ColumnIndex)
    }

    /// The position of a row.
    #[must_use]
    pub fn row(&self, key: &Key) -> Option<RowIndex> {
        self.rows.binary_search_by(|row| row.key.cmp(key)).ok().map(RowIndex)
    }

    /// How many entries the matrix has.
    #[must_use]
    pub fn entries(&self) -> usize {
        self.columns.iter().map(|column| column.entries.len()).sum()
    }
}

//! What differs between two programs, by key: enough to turn the first into the second.

use serde::{Deserialize, Serialize};

use super::program::{Column, Key, Program, Row, Sense};

/// All that differs between two programs.
///
/// Every list is in byte order of keys. An added or removed column or row brings or takes its entries with it; `entries` lists
/// only those whose column and row are in both programs.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
pub struct Difference {
    /// The new sense of the aim, where it was turned round.
    pub sense: Option<Sense>,
    /// The new constant of the aim, where it changed.
    pub offset: Option<f64>,
    /// Columns only the second has; their entries are told by row key.
    pub added_columns: Vec<AddedColumn>,
    /// Columns only the first has.
    pub removed_columns: Vec<Key>,
    /// Rows only the second has. Entries in columns that both have stand in `entries`.
    pub added_rows: Vec<Row>,
    /// Rows only the first has.
    pub removed_rows: Vec<Key>,
    /// Columns of both whose worth in the aim changed: the new number.
    pub aims: Vec<(Key, f64)>,
    /// Columns of both whose bounds changed: the new ones.
    pub column_bounds: Vec<(Key, f64, f64)>,
    /// Rows of both whose bounds changed: the new ones.
    pub row_bounds: Vec<(Key, f64, f64)>,
    /// Entries of columns both have, in rows the second has, that changed: column, row, new number (0 where it is gone).
    pub entries: Vec<(Key, Key, f64)>,
}

/// A column that only the second program has.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct AddedColumn {
    /// What it stands for.
    pub key: Key,
    /// The least value.
    pub lower: f64,
    /// The greatest value.
    pub upper: f64,
    /// What one unit adds to the aim.
    pub aim: f64,
    /// Its entries, by row key.
    pub entries: Vec<(Key, f64)>,
}

impl Difference {
    /// What turns `from` into `to`.
    #[must_use]
    pub fn between(from: &Program, to: &Program) -> Self {
        let mut difference = Self {
            sense: (from.sense != to.sense).then_some(to.sense),
            offset: differ(from.offset, to.offset).then_some(to.offset),
            ..Self::default()
        };
        for pair in Pairs::new(&from.rows, &to.rows, |row| &row.key) {
            match pair {
                (Some(row), None) => difference.removed_rows.push(row.key.clone()),
                (None, Some(row)) => difference.added_rows.push(row.clone()),
                (Some(old), Some(new)) if differ(old.lower, new.lower) || differ(old.upper, new.upper) => {
                    difference.row_bounds.push((new.key.clone(), new.lower, new.upper));
                }
                _ => {}
            }
        }
        for pair in Pairs::new(&from.columns, &to.columns, |column| &column.key) {
            match pair {
                (Some(column), None) => difference.removed_columns.push(column.key.clone()),
                (None, Some(column)) => difference.added_columns.push(AddedColumn::of(column, to)),
                (Some(old), Some(new)) => difference.column(old, from, new, to),
                (None, None) => {}
            }
        }
        difference
    }

    /// Whether the two programs were the same.
    #[must_use]
    pub fn is_empty(&self) -> bool {
        *self == Self::default()
    }

    /// Whether rows stand at the same positions in both programs, so that equal entries need no second look.
    fn same_rows(&self) -> bool {
        self.added_rows.is_empty() && self.removed_rows.is_empty()
    }

    fn column(&mut self, old: &Column, from: &Program, new: &Column, to: &Program) {
        if differ(old.aim, new.aim) {
            self.aims.push((new.key.clone(), new.aim));
        }
        if differ(old.lower, new.lower) || differ(old.upper, new.upper) {
            self.column_bounds.push((new.key.clone(), new.lower, new.upper));
        }
        if self.same_rows() && old.entries == new.entries {
            return;
        }
        let olds: Vec<_> = old.entries.iter().map(|&(row, value)| (&from.rows[row.0].key, value)).collect();
        let news: Vec<_> = new.entries.iter().map(|&(row, value)| (&to.rows[row.0].key, value)).collect();
        if olds == news {
            return;
        }
        for pair in Pairs::new(&olds, &news, |entry| entry.0) {
            match pair {
                (Some(&(row, _)), None) if to.row(row).is_some() => {
                    self.entries.push((new.key.clone(), row.clone(), 0.0));
                }
                (None, Some(&(row, value))) => self.entries.push((new.key.clone(), row.clone(), value)),
                (Some(&(_, old_value)), Some(&(row, value))) if differ(old_value, value) => {
                    self.entries.push((new.key.clone(), row.clone(), value));
                }
                _ => {}
            }
        }
    }
}

impl AddedColumn {
    fn of(column: &Column, program: &Program) -> Self {
        Self {
            key: column.key.clone(),
            lower: column.lower,
            upper: column.upper,
            aim: column.aim,
            entries: column.entries.iter().map(|&(row, value)| (program.rows[row.0].key.clone(), value)).collect(),
        }
    }
}

/// Whether two numbers of a program differ; there is one zero only.
fn differ(a: f64, b: f64) -> bool {
    (a + 0.0).to_bits() != (b + 0.0).to_bits()
}

/// Walks two lists that are sorted by key side by side: what only the first has, only the second, or both.
struct Pairs<'a, T, F> {
    from: &'a [T],
    to: &'a [T],
    key: F,
}

impl<'a, T, F: Fn(&T) -> &Key> Pairs<'a, T, F> {
    fn new(from: &'a [T], to: &'a [T], key: F) -> Self {
        Self { from, to, key }
    }
}

impl<'a, T, F: Fn(&T) -> &Key> Iterator for Pairs<'a, T, F> {
    type Item = (Option<&'a T>, Option<&'a T>);

    fn next(&mut self) -> Option<Self::Item> {
        let order = match (self.from.first(), self.to.first()) {
            (None, None) => return None,
            (Some(_), None) => std::cmp::Ordering::Less,
            (None, Some(_)) => std::cmp::Ordering::Greater,
            (Some(a), Some(b)) => (self.key)(a).cmp((self.key)(b)),
        };
        let old = if order.is_le() { take_first(&mut self.from) } else { None };
        let new = if order.is_ge() { take_first(&mut self.to) } else { None };
        Some((old, new))
    }
}

fn take_first<'a, T>(list: &mut &'a [T]) -> Option<&'a T> {
    let (first, rest) = list.split_first()?;
    *list = rest;
    Some(first)
}

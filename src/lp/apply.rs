//! Turning one program into another by their difference.

use std::collections::BTreeMap;

use super::difference::Difference;
use super::program::{Column, Key, Program, Row, RowIndex};

/// Why a difference does not fit the program it was applied to.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum Misfit {
    /// It speaks of a column or row that the program does not have.
    #[error("no `{0}` to change or take away")]
    Missing(Key),
    /// It adds a column or row that the program has already.
    #[error("`{0}` is there already")]
    Doubled(Key),
}

impl Difference {
    /// What `from` becomes by this difference: `between(from, to).apply(from)` is `to`.
    ///
    /// # Errors
    /// Where the difference was taken from another program than `from`.
    pub fn apply(&self, from: &Program) -> Result<Program, Misfit> {
        let mut to = if self.keeps_shape() { from.clone() } else { self.reshaped(from)? };
        to.sense = self.sense.unwrap_or(from.sense);
        to.offset = self.offset.unwrap_or(from.offset);
        self.renumber(&mut to)?;
        Ok(to)
    }

    /// Whether columns and rows stay as they are, but for their numbers.
    fn keeps_shape(&self) -> bool {
        self.added_columns.is_empty()
            && self.removed_columns.is_empty()
            && self.added_rows.is_empty()
            && self.removed_rows.is_empty()
    }

    /// `from` with the columns and rows that come and without those that go; no other number has changed yet.
    fn reshaped(&self, from: &Program) -> Result<Program, Misfit> {
        let mut rows: BTreeMap<&Key, Row> = from.rows.iter().map(|row| (&row.key, row.clone())).collect();
        for key in &self.removed_rows {
            rows.remove(key).ok_or_else(|| Misfit::Missing(key.clone()))?;
        }
        for row in &self.added_rows {
            if rows.insert(&row.key, row.clone()).is_some() {
                return Err(Misfit::Doubled(row.key.clone()));
            }
        }
        let rows: Vec<Row> = rows.into_values().collect();
        let columns = self.columns(from, &rows)?;
        Ok(Program { sense: from.sense, offset: from.offset, columns, rows })
    }

    fn renumber(&self, to: &mut Program) -> Result<(), Misfit> {
        let missing = |key: &Key| Misfit::Missing(key.clone());
        for (key, lower, upper) in &self.row_bounds {
            let at = to.row(key).ok_or_else(|| missing(key))?;
            (to.rows[at.0].lower, to.rows[at.0].upper) = (*lower, *upper);
        }
        for (key, aim) in &self.aims {
            let at = to.column(key).ok_or_else(|| missing(key))?;
            to.columns[at.0].aim = *aim;
        }
        for (key, lower, upper) in &self.column_bounds {
            let at = to.column(key).ok_or_else(|| missing(key))?;
            (to.columns[at.0].lower, to.columns[at.0].upper) = (*lower, *upper);
        }
        for (key, row, value) in &self.entries {
            let row = to.row(row).ok_or_else(|| missing(row))?;
            let at = to.column(key).ok_or_else(|| missing(key))?;
            let entries = &mut to.columns[at.0].entries;
            match (entries.binary_search_by_key(&row, |entry| entry.0), *value) {
                (Ok(at), 0.0) => drop(entries.remove(at)),
                (Ok(at), value) => entries[at].1 = value,
                (Err(at), value) => entries.insert(at, (row, value)),
            }
        }
        Ok(())
    }

    fn columns(&self, from: &Program, rows: &[Row]) -> Result<Vec<Column>, Misfit> {
        let position = |key: &Key| {
            let found = rows.binary_search_by(|row| row.key.cmp(key)).ok();
            found.map(RowIndex).ok_or_else(|| Misfit::Missing(key.clone()))
        };
        let carried: Vec<Option<RowIndex>> = from.rows.iter().map(|row| position(&row.key).ok()).collect();
        let mut columns: BTreeMap<&Key, Column> = BTreeMap::new();
        for column in &from.columns {
            let kept = column.entries.iter().filter_map(|&(row, value)| carried[row.0].map(|row| (row, value)));
            columns.insert(&column.key, Column { entries: kept.collect(), ..column.clone() });
        }
        for key in &self.removed_columns {
            columns.remove(key).ok_or_else(|| Misfit::Missing(key.clone()))?;
        }
        for added in &self.added_columns {
            let entries = added.entries.iter().map(|(row, value)| Ok((position(row)?, *value)));
            let column = Column {
                key: added.key.clone(),
                lower: added.lower,
                upper: added.upper,
                aim: added.aim,
                entries: entries.collect::<Result<_, _>>()?,
            };
            if columns.insert(&added.key, column).is_some() {
                return Err(Misfit::Doubled(added.key.clone()));
            }
        }
        Ok(columns.into_values().collect())
    }
}

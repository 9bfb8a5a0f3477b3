//! What an MPS file has said so far: rows and columns by name, each number with the line it came from.

use std::collections::HashMap;

use super::error::{Flaw, quoted};
use crate::model::Aim;

/// A number and where it was given.
#[derive(Clone, Copy, Debug)]
pub(super) struct Stated {
    pub(super) value: f64,
    pub(super) line: usize,
}

/// How a row is held.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum RowKind {
    /// Not at all: the objective, or a row that is left out.
    Free,
    /// Its sum is at most the right-hand side.
    AtMost,
    /// Its sum is at least the right-hand side.
    AtLeast,
    /// Its sum is the right-hand side.
    Equal,
}

/// A row.
#[derive(Debug)]
pub(super) struct DraftRow<'t> {
    pub(super) name: &'t str,
    pub(super) kind: RowKind,
    pub(super) line: usize,
    pub(super) right: Option<Stated>,
    pub(super) range: Option<Stated>,
    /// The column that was last to have an entry here, and in which line.
    latest: Option<(usize, usize)>,
}

/// A column with its entries, by position of row.
#[derive(Debug)]
pub(super) struct DraftColumn<'t> {
    pub(super) name: &'t str,
    pub(super) entries: Vec<(usize, f64)>,
    pub(super) lower: Option<Stated>,
    pub(super) upper: Option<Stated>,
    /// The last line that spoke of its entries.
    last_line: usize,
}

/// Everything said so far.
#[derive(Debug, Default)]
pub(super) struct Draft<'t> {
    pub(super) title: Option<String>,
    pub(super) aim: Option<Aim>,
    pub(super) objective: Option<(&'t str, usize)>,
    pub(super) rows: Vec<DraftRow<'t>>,
    pub(super) columns: Vec<DraftColumn<'t>>,
    row_at: HashMap<&'t str, usize>,
    column_at: HashMap<&'t str, usize>,
}

/// Which bounds of a column are given.
#[derive(Clone, Copy, Debug, Default)]
pub(super) struct Bounds {
    pub(super) lower: Option<f64>,
    pub(super) upper: Option<f64>,
}

impl<'t> Draft<'t> {
    pub(super) fn add_row(&mut self, name: &'t str, kind: RowKind, line: usize) -> Result<(), Flaw> {
        if let Some(&first) = self.row_at.get(name) {
            return Err(twice(&format!("row {}", quoted(name)), self.rows[first].line, line));
        }
        self.row_at.insert(name, self.rows.len());
        self.rows.push(DraftRow { name, kind, line, right: None, range: None, latest: None });
        Ok(())
    }

    /// Opens a column, or goes on with it where it is the last one.
    pub(super) fn open_column(&mut self, name: &'t str, line: usize) -> Result<(), Flaw> {
        if let Some(&at) = self.column_at.get(name) {
            if at + 1 == self.columns.len() {
                self.columns[at].last_line = line;
                return Ok(());
            }
            return Err(Flaw::new(
                format!("column {} starts again, after it ended in line {}", quoted(name), self.columns[at].last_line),
                "keep the lines of a column together",
            ));
        }
        self.column_at.insert(name, self.columns.len());
        self.columns.push(DraftColumn { name, entries: Vec::new(), lower: None, upper: None, last_line: line });
        Ok(())
    }

    /// Adds an entry to the last column.
    pub(super) fn add_entry(&mut self, row: &str, value: f64, line: usize) -> Result<(), Flaw> {
        let at = self.row(row)?;
        let Some(current) = self.columns.len().checked_sub(1) else { return Ok(()) };
        if let Some((column, first)) = self.rows[at].latest.replace((current, line))
            && column == current
        {
            let what = format!("the entry of column {} in row {}", quoted(self.columns[current].name), quoted(row));
            return Err(twice(&what, first, line));
        }
        self.columns[current].entries.push((at, value));
        Ok(())
    }

    pub(super) fn set_right(&mut self, row: &str, value: f64, line: usize) -> Result<(), Flaw> {
        let at = self.row(row)?;
        match self.rows[at].right.replace(Stated { value, line }) {
            Some(first) => Err(twice(&format!("the right-hand side of row {}", quoted(row)), first.line, line)),
            None => Ok(()),
        }
    }

    pub(super) fn set_range(&mut self, row: &str, value: f64, line: usize) -> Result<(), Flaw> {
        let at = self.row(row)?;
        match self.rows[at].range.replace(Stated { value, line }) {
            Some(first) => Err(twice(&format!("the range of row {}", quoted(row)), first.line, line)),
            None => Ok(()),
        }
    }

    pub(super) fn set_bounds(&mut self, column: &str, bounds: Bounds, line: usize) -> Result<(), Flaw> {
        let Some(&at) = self.column_at.get(column) else {
            return Err(Flaw::new(format!("no column is named {}", quoted(column)), "columns are named in COLUMNS"));
        };
        let DraftColumn { lower, upper, .. } = &mut self.columns[at];
        for (which, place, value) in [("lower", lower, bounds.lower), ("upper", upper, bounds.upper)] {
            let Some(value) = value else { continue };
            if let Some(first) = place.replace(Stated { value, line }) {
                return Err(twice(&format!("the {which} bound of column {}", quoted(column)), first.line, line));
            }
        }
        Ok(())
    }

    pub(super) fn has_column(&self, name: &str) -> bool {
        self.column_at.contains_key(name)
    }

    /// Whether a row is free: its right-hand side, if any, is a constant of the aim.
    pub(super) fn is_free(&self, row: &str) -> bool {
        self.row_at.get(row).is_some_and(|&at| self.rows[at].kind == RowKind::Free)
    }

    /// The position of a row.
    pub(super) fn row(&self, name: &str) -> Result<usize, Flaw> {
        self.row_at
            .get(name)
            .copied()
            .ok_or_else(|| Flaw::new(format!("no row is named {}", quoted(name)), "rows are named in ROWS"))
    }
}

fn twice(what: &str, first: usize, second: usize) -> Flaw {
    let lines = if first == second { format!("line {first}") } else { format!("lines {first} and {second}") };
    Flaw::new(format!("{what} is given twice, in {lines}"), "leave one of them out")
}

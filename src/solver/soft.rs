//! Withdrawing softly: a program on the way from the old to the new one that keeps the last basis valid.
//!
//! Deleting a basic column or a binding row would ruin the basis, and so would taking away the bound that a nonbasic column or row
//! stands on. On the way, a column that is to go is held at 0, and a row or bound that is to go is held at its present value on
//! the side by which it may now leave. Once that program is solved, the rest is let go.

use super::basis::{Basis, Position};
use super::vertex::{Vertex, bound_at};
use crate::lp::{Column, Difference, Key, Program, Row, RowIndex};

/// The program on the way from `old`, whose last basis and vertex are given, to `new`; `None` where it would be `new` itself, as
/// nothing is withdrawn that the basis leans on. `difference` is what differs between the two.
#[must_use]
pub fn on_the_way(
    old: &Program,
    basis: &Basis,
    vertex: &Vertex,
    new: &Program,
    difference: &Difference,
) -> Option<Program> {
    leans(old, basis, difference).then(|| way(old, basis, vertex, new))
}

/// Whether the basis leans on anything that goes: a column that is not idle, a row that binds, a bound that something stands at.
fn leans(old: &Program, basis: &Basis, difference: &Difference) -> bool {
    let column = |key: &Key| old.column(key).map(|at| at.0);
    let row = |key: &Key| old.row(key).map(|at| at.0);
    let loses = |position: Position, old_bounds: (f64, f64), lower: f64, upper: f64| match position {
        Position::Basic | Position::AtZero => false,
        _ if old_bounds.0 >= old_bounds.1 => lower.is_infinite() || upper.is_infinite(),
        Position::AtLower => lower.is_infinite(),
        Position::AtUpper => upper.is_infinite(),
    };
    difference.removed_columns.iter().filter_map(column).any(|at| !is_idle(old, basis, at))
        || difference.removed_rows.iter().filter_map(row).any(|at| basis.rows[at] != Position::Basic)
        || difference.column_bounds.iter().any(|(key, lower, upper)| {
            column(key).is_some_and(|at| {
                loses(basis.columns[at], (old.columns[at].lower, old.columns[at].upper), *lower, *upper)
            })
        })
        || difference.row_bounds.iter().any(|(key, lower, upper)| {
            row(key).is_some_and(|at| loses(basis.rows[at], (old.rows[at].lower, old.rows[at].upper), *lower, *upper))
        })
}

fn is_idle(program: &Program, basis: &Basis, at: usize) -> bool {
    let column = &program.columns[at];
    bound_at(basis.columns[at], column.lower, column.upper) == Some(0.0)
}

fn way(old: &Program, basis: &Basis, vertex: &Vertex, new: &Program) -> Program {
    let rows = rows_on_the_way(old, basis, vertex, new);
    let place = |key: &Key| rows.binary_search_by(|row| row.key.cmp(key)).ok().map(RowIndex);
    let from_new: Vec<Option<RowIndex>> = new.rows.iter().map(|row| place(&row.key)).collect();
    let from_old: Vec<Option<RowIndex>> = old.rows.iter().map(|row| place(&row.key)).collect();
    let is_ghost: Vec<bool> = old.rows.iter().map(|row| new.row(&row.key).is_none()).collect();

    let mut columns: Vec<Column> = new
        .columns
        .iter()
        .map(|column| {
            let mut way = Column { entries: moved(&column.entries, &from_new), ..column.clone() };
            if let Some(at) = old.column(&column.key) {
                let ghostly = old.columns[at.0].entries.iter().filter(|&&(row, _)| is_ghost[row.0]);
                way.entries.extend(ghostly.filter_map(|&(row, value)| Some((from_old[row.0]?, value))));
                way.entries.sort_by_key(|entry| entry.0);
                let stands = Stands::column(old, at.0, basis, vertex);
                (way.lower, way.upper) = stands.held_within(column.lower, column.upper);
            }
            way
        })
        .collect();
    for (at, column) in old.columns.iter().enumerate() {
        if !is_idle(old, basis, at) && new.column(&column.key).is_none() {
            columns.push(Column {
                lower: 0.0,
                upper: 0.0,
                entries: moved(&column.entries, &from_old),
                ..column.clone()
            });
        }
    }
    columns.sort_by(|a, b| a.key.cmp(&b.key));
    Program { sense: new.sense, offset: new.offset, columns, rows }
}

fn rows_on_the_way(old: &Program, basis: &Basis, vertex: &Vertex, new: &Program) -> Vec<Row> {
    let mut rows: Vec<Row> = new
        .rows
        .iter()
        .map(|row| {
            let Some(at) = old.row(&row.key) else { return row.clone() };
            let (lower, upper) = Stands::row(old, at.0, basis, vertex).held_within(row.lower, row.upper);
            Row { lower, upper, ..row.clone() }
        })
        .collect();
    let robbed = robbed_rows(old, basis, new);
    for (at, row) in old.rows.iter().enumerate() {
        if basis.rows[at] != Position::Basic && new.row(&row.key).is_none() {
            // A row that loses an activity with it cannot stay where it is; its own bounds contradict that less often.
            let (lower, upper) = if robbed[at] {
                (row.lower, row.upper)
            } else {
                Stands::row(old, at, basis, vertex).held_within(f64::NEG_INFINITY, f64::INFINITY)
            };
            rows.push(Row { lower, upper, ..row.clone() });
        }
    }
    rows.sort_by(|a, b| a.key.cmp(&b.key));
    rows
}

/// Which rows of `old` have a column that is done and that `new` has no more.
fn robbed_rows(old: &Program, basis: &Basis, new: &Program) -> Vec<bool> {
    rows_of(old, |at, column| !is_idle(old, basis, at) && new.column(&column.key).is_none())
}

/// Which rows of a program have an entry in one of these columns.
pub(super) fn rows_of(program: &Program, asked: impl Fn(usize, &Column) -> bool) -> Vec<bool> {
    let mut rows = vec![false; program.rows.len()];
    for (at, column) in program.columns.iter().enumerate() {
        if asked(at, column) {
            column.entries.iter().for_each(|&(row, _)| rows[row.0] = true);
        }
    }
    rows
}

fn moved(entries: &[(RowIndex, f64)], map: &[Option<RowIndex>]) -> Vec<(RowIndex, f64)> {
    entries.iter().filter_map(|&(row, value)| Some((map[row.0]?, value))).collect()
}

/// How something stands in the last basis, and which way it would go if it could.
struct Stands {
    /// The bound it stands at; `None` for what is basic.
    at: Option<f64>,
    /// Whether the aim gains when it goes up rather than down.
    rises: bool,
}

impl Stands {
    fn column(program: &Program, at: usize, basis: &Basis, vertex: &Vertex) -> Self {
        let column = &program.columns[at];
        let charged: f64 = column.entries.iter().map(|&(row, value)| value * vertex.worths[row.0]).sum();
        let gain = column.aim - charged;
        Self {
            at: bound_at(basis.columns[at], column.lower, column.upper),
            rises: rises(basis.columns[at], column.lower, column.upper, program.sense.sign() * gain),
        }
    }

    fn row(program: &Program, at: usize, basis: &Basis, vertex: &Vertex) -> Self {
        let row = &program.rows[at];
        Self {
            at: bound_at(basis.rows[at], row.lower, row.upper),
            rises: rises(basis.rows[at], row.lower, row.upper, program.sense.sign() * vertex.worths[at]),
        }
    }

    /// Bounds to take on the way where its own are to become these: its own where it can stand at one of them, else held at its
    /// present value on the side by which it may now leave.
    fn held_within(&self, lower: f64, upper: f64) -> (f64, f64) {
        match self.at {
            Some(value) if self.rises && upper.is_infinite() && lower < value => (value, upper),
            Some(value) if !self.rises && lower.is_infinite() && value < upper => (lower, value),
            _ => (lower, upper),
        }
    }
}

/// What stands at its upper bound would rise if it could, at its lower it would fall; where both are one, the gain decides.
fn rises(position: Position, lower: f64, upper: f64, cost: f64) -> bool {
    if lower < upper { position == Position::AtUpper } else { cost < 0.0 }
}

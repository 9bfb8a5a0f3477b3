//! Carrying the last basis to another program by name alone.
//!
//! Where whole blocks of a program go, as when a horizon rolls, nothing can be withdrawn softly: what was made in a period that is gone
//! cannot be held at 0 while that period's balances still hold. But the basis of such a program is nearly triangular by period, so that
//! what overlaps keeps nearly as many basic columns and rows as it has rows. The few that lack or exceed are made up here; what is
//! still singular after that is mended by the solver as it takes the basis.

use super::basis::{Basis, Position};
use super::soft;
use crate::lp::{Difference, Program, Row, places};

/// Whether `way`, the program on the way of `difference`, contradicts itself plainly: a row that is to go counts but columns that are to
/// go with it, and may not be 0.
pub(super) fn is_needed(way: &Program, difference: &Difference) -> bool {
    if difference.removed_rows.is_empty() || difference.removed_columns.is_empty() {
        return false;
    }
    let mut movable = vec![false; way.rows.len()];
    for column in way.columns.iter().filter(|column| column.lower != 0.0 || column.upper != 0.0) {
        column.entries.iter().for_each(|&(row, _)| movable[row.0] = true);
    }
    let is_gone = |row: &Row| difference.removed_rows.binary_search(&row.key).is_ok();
    way.rows.iter().zip(movable).any(|(row, movable)| !movable && (row.lower > 0.0 || row.upper < 0.0) && is_gone(row))
}

/// The basis of `from` for `to`: what both have stands where it stood, new columns out of it, new rows in it.
pub(super) fn carried(from: &Program, basis: &Basis, to: &Program) -> Basis {
    let old_columns = places(&from.columns, &to.columns, |column| &column.key);
    let old_rows = places(&from.rows, &to.rows, |row| &row.key);
    let columns = to.columns.iter().zip(&old_columns).map(|(column, old)| {
        fitting(old.map_or(Position::AtLower, |at| basis.columns[at]), column.lower, column.upper)
    });
    let rows = to
        .rows
        .iter()
        .zip(&old_rows)
        .map(|(row, old)| fitting(old.map_or(Position::Basic, |at| basis.rows[at]), row.lower, row.upper));
    let mut carried = Basis { columns: columns.collect(), rows: rows.collect() };
    make_up(&mut carried, from, basis, to);
    carried
}

/// `basis` with every position one that the bounds of `program` allow: what the solver takes out to mend it stands on no side.
pub(super) fn fitted(basis: &Basis, program: &Program) -> Basis {
    let columns = basis.columns.iter().zip(&program.columns);
    let rows = basis.rows.iter().zip(&program.rows);
    Basis {
        columns: columns.map(|(&position, column)| fitting(position, column.lower, column.upper)).collect(),
        rows: rows.map(|(&position, row)| fitting(position, row.lower, row.upper)).collect(),
    }
}

/// The position that something with these bounds can take, the nearest to the one it had.
fn fitting(position: Position, lower: f64, upper: f64) -> Position {
    match position {
        Position::Basic => Position::Basic,
        Position::AtUpper if upper.is_finite() => Position::AtUpper,
        _ if lower.is_finite() => Position::AtLower,
        _ if upper.is_finite() => Position::AtUpper,
        _ => Position::AtZero,
    }
}

/// Makes the count of what is basic that of the rows: first rows that have lost a basic column take its place, or basic columns that have
/// lost a row that bound leave, then any.
fn make_up(carried: &mut Basis, from: &Program, basis: &Basis, to: &Program) {
    let basic = |positions: &[Position]| positions.iter().filter(|&&position| position == Position::Basic).count();
    let count = basic(&carried.columns) + basic(&carried.rows);
    if count < to.rows.len() {
        let bereft =
            soft::rows_of(from, |at, column| basis.columns[at] == Position::Basic && to.column(&column.key).is_none());
        let bereft = |at: usize| from.row(&to.rows[at].key).is_some_and(|old| bereft[old.0]);
        let mut lacking = to.rows.len() - count;
        for first in [true, false] {
            for at in 0..to.rows.len() {
                if lacking > 0 && carried.rows[at] != Position::Basic && (!first || bereft(at)) {
                    carried.rows[at] = Position::Basic;
                    lacking -= 1;
                }
            }
        }
        return;
    }
    let mut exceeding = count - to.rows.len();
    let gone: Vec<bool> = (from.rows.iter().zip(&basis.rows))
        .map(|(row, position)| *position != Position::Basic && to.row(&row.key).is_none())
        .collect();
    let loose = |at: usize| {
        let old = from.column(&to.columns[at].key);
        old.is_some_and(|old| from.columns[old.0].entries.iter().any(|&(row, _)| gone[row.0]))
    };
    for first in [true, false] {
        for (at, column) in to.columns.iter().enumerate() {
            if exceeding > 0 && carried.columns[at] == Position::Basic && (!first || loose(at)) {
                carried.columns[at] = fitting(Position::AtLower, column.lower, column.upper);
                exceeding -= 1;
            }
        }
    }
}

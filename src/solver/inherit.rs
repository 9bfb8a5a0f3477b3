//! The vertex that an edit leaves where it was: no factorisation is needed to know it.
//!
//! New rows come in slack and new columns at 0; numbers of what stands idle do not move the point, prices of what is out of the basis do
//! not move the worths, and bounds that nothing leans on move neither.

use super::basis::{Basis, Position};
use super::vertex::Vertex;
use crate::lp::{Difference, Key, Program, places};

/// The vertex of the last basis in `to`, if it is just that of `from`; `None` where it must be recomputed.
pub(super) fn vertex(
    from: &Program,
    basis: &Basis,
    vertex: &Vertex,
    to: &Program,
    difference: &Difference,
) -> Option<Vertex> {
    let stays = difference.sense.is_none()
        && difference.aims.iter().all(|(key, _)| is_out(from, basis, key))
        && difference.entries.iter().all(|(key, row, _)| is_new(difference, row) || is_idle(from, basis, vertex, key))
        && difference.removed_columns.iter().all(|key| is_idle(from, basis, vertex, key))
        && difference.removed_rows.iter().all(|key| is_slack(from, basis, key))
        && difference.column_bounds.iter().all(|(key, ..)| is_in(from, basis, key))
        && difference.row_bounds.iter().all(|(key, ..)| is_slack(from, basis, key))
        && difference.added_columns.iter().all(|column| rests_at_0(column.lower, column.upper));
    stays.then(|| carried(from, vertex, to, difference))
}

/// The vertex of `from` as numbers for `to`: what is new in it is at 0.
pub(super) fn carried(from: &Program, vertex: &Vertex, to: &Program, difference: &Difference) -> Vertex {
    let same_columns = difference.added_columns.is_empty() && difference.removed_columns.is_empty();
    let same_rows = difference.added_rows.is_empty() && difference.removed_rows.is_empty();
    let moved =
        |old: &[f64], places: Vec<Option<usize>>| places.into_iter().map(|at| at.map_or(0.0, |at| old[at])).collect();
    Vertex {
        levels: if same_columns {
            vertex.levels.clone()
        } else {
            moved(&vertex.levels, places(&from.columns, &to.columns, |column| &column.key))
        },
        worths: if same_rows {
            vertex.worths.clone()
        } else {
            moved(&vertex.worths, places(&from.rows, &to.rows, |row| &row.key))
        },
    }
}

fn is_new(difference: &Difference, row: &Key) -> bool {
    difference.added_rows.binary_search_by(|added| added.key.cmp(row)).is_ok()
}

fn is_out(from: &Program, basis: &Basis, key: &Key) -> bool {
    from.column(key).is_some_and(|at| basis.columns[at.0] != Position::Basic)
}

fn is_in(from: &Program, basis: &Basis, key: &Key) -> bool {
    from.column(key).is_some_and(|at| basis.columns[at.0] == Position::Basic)
}

fn is_slack(from: &Program, basis: &Basis, key: &Key) -> bool {
    from.row(key).is_some_and(|at| basis.rows[at.0] == Position::Basic)
}

/// Out of the basis and at 0, so that its entries move no row.
fn is_idle(from: &Program, basis: &Basis, vertex: &Vertex, key: &Key) -> bool {
    from.column(key).is_some_and(|at| basis.columns[at.0] != Position::Basic && vertex.levels[at.0] == 0.0)
}

/// Whether a new column comes in at 0: its lower bound, its only one, or what is free.
fn rests_at_0(lower: f64, upper: f64) -> bool {
    match (lower.is_finite(), upper.is_finite()) {
        (true, _) => lower == 0.0 && upper >= 0.0,
        (false, true) => upper == 0.0,
        (false, false) => true,
    }
}

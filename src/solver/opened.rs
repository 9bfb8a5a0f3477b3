//! What was held at one value and may now move starts from where it was.
//!
//! The solver keeps a side for what is out of the basis even where both bounds are one; once they part, that side may be the one
//! far away.

use super::basis::{Basis, Position};
use super::instance::Instance;
use super::live::Refusal;
use crate::lp::{Difference, Program};

/// Puts what `difference` opened back to the bound it stood at. `instance` holds `to`.
///
/// # Errors
/// When the solver refuses the basis.
pub fn stay(instance: &mut Instance, from: &Program, to: &Program, difference: &Difference) -> Result<(), Refusal> {
    let columns = difference.column_bounds.iter().filter_map(|(key, lower, upper)| {
        let was = &from.columns[from.column(key)?.0];
        Some((to.column(key)?.0, side(was.lower, was.upper, *lower, *upper)?))
    });
    let rows = difference.row_bounds.iter().filter_map(|(key, lower, upper)| {
        let was = &from.rows[from.row(key)?.0];
        Some((to.row(key)?.0, side(was.lower, was.upper, *lower, *upper)?))
    });
    let (columns, rows): (Vec<_>, Vec<_>) = (columns.collect(), rows.collect());
    if columns.is_empty() && rows.is_empty() {
        return Ok(());
    }
    let held = instance.basis()?;
    let Basis { columns: mut column_positions, rows: mut row_positions } = held.clone();
    for (at, side) in columns {
        put(&mut column_positions[at], side);
    }
    for (at, side) in rows {
        put(&mut row_positions[at], side);
    }
    let wanted = Basis { columns: column_positions, rows: row_positions };
    if wanted == held { Ok(()) } else { instance.set_basis(&wanted) }
}

/// The side at which a value held by both bounds stands once they part; `None` where it was not held, or stands at neither.
#[expect(clippy::float_cmp, reason = "bounds are read, not computed")]
fn side(old_lower: f64, old_upper: f64, lower: f64, upper: f64) -> Option<Position> {
    if old_lower != old_upper || lower == upper {
        return None;
    }
    match (lower == old_lower, upper == old_upper) {
        (true, _) => Some(Position::AtLower),
        (_, true) => Some(Position::AtUpper),
        _ => None,
    }
}

fn put(position: &mut Position, side: Position) {
    if *position != Position::Basic {
        *position = side;
    }
}

//! Letting go of what was withdrawn softly, once the program on the way is solved.

use super::basis::Basis;
use super::instance::{Instance, Member};
use super::live::Refusal;
use super::look::Look;
use super::step::step;
use super::swap::{self, Entrant};
use super::vertex::bound_at;
use crate::lp::{ColumnIndex, Program, RowIndex};

/// Own pivots on the way to letting go; past so many the solver mends the basis as it can.
const MOST_SWAPS: usize = 16;

/// From the program on the way to the program itself: pivots what is to go out of the way of the basis, then lets it go.
pub(super) fn let_go(
    instance: &mut Instance,
    way: &Program,
    mut look: Look,
    program: &Program,
) -> Result<Look, Refusal> {
    for _ in 0..MOST_SWAPS {
        let Some(basis) = next_swap(instance, way, &look, program)? else { break };
        instance.set_basis(&basis)?;
        look = Look::at(instance, way)?;
    }
    step(instance, way, &look.vertex, program)
}

/// The basis after one more member is out of the way; `None` when nothing is left, or nothing can be done.
fn next_swap(instance: &mut Instance, way: &Program, look: &Look, program: &Program) -> Result<Option<Basis>, Refusal> {
    let sign = way.sense.sign();
    for (at, column) in way.columns.iter().enumerate() {
        let member = Member::Column(ColumnIndex(at));
        let after = program.column(&column.key).map(|found| &program.columns[found.0]);
        let basis = match (after, bound_at(look.basis.columns[at], column.lower, column.upper)) {
            (None, None) => swap::leave(instance, way, look, member)?,
            (Some(after), Some(value)) if after.lower < value && value < after.upper => {
                let rises = sign * look.checked.gains[at] < 0.0;
                let entrant = Entrant { member, value, lower: after.lower, upper: after.upper, rises };
                swap::enter(instance, way, look, entrant)?
            }
            _ => None,
        };
        if basis.is_some() {
            return Ok(basis);
        }
    }
    for (at, row) in way.rows.iter().enumerate() {
        let after = program.row(&row.key).map(|found| &program.rows[found.0]);
        let (lower, upper) = after.map_or((f64::NEG_INFINITY, f64::INFINITY), |after| (after.lower, after.upper));
        let Some(value) = bound_at(look.basis.rows[at], row.lower, row.upper) else { continue };
        if lower < value && value < upper {
            let rises = sign * look.vertex.worths[at] < 0.0;
            let entrant = Entrant { member: Member::Row(RowIndex(at)), value, lower, upper, rises };
            let basis = swap::enter(instance, way, look, entrant)?;
            if basis.is_some() {
                return Ok(basis);
            }
        }
    }
    Ok(None)
}

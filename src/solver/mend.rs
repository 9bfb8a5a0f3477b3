//! Own pivots where the solver's tolerance lets a gain of the wrong sign stand.
//!
//! The solver stops once no gain is wrong by more than its tolerance. Which of two nearly tied bases it stops in is then a matter of the way
//! there. In twice the digits the sign is known, and a pivot or two lead to the better one.

use super::basis::Position;
use super::instance::{Instance, Member};
use super::live::Refusal;
use super::look::Look;
use super::sharp::Sharp;
use super::swap::{self, Entrant};
use super::vertex::bound_at;
use crate::lp::{ColumnIndex, Program, RowIndex};

/// Own pivots at most: near ties are few, and each pivot factorises anew.
const MOST_PIVOTS: usize = 20;

/// From the optimal basis of `look`, which `instance` holds, to one that leaves no gain of the wrong sign by more than `nil`, relative to
/// what it is summed from; as near to that as a few pivots come. `instance` holds its basis afterwards.
///
/// # Errors
/// When the solver refuses a basis.
pub(super) fn gains(
    instance: &mut Instance,
    program: &Program,
    mut look: Look,
    nil: f64,
) -> Result<(Look, Sharp), Refusal> {
    let mut sharp = Sharp::of(instance, program, &look)?;
    for _ in 0..MOST_PIVOTS {
        let Some(entrant) = wrong(program, &look, &sharp, nil) else { break };
        let Some(basis) = swap::enter(instance, program, &look, entrant)? else { break };
        instance.set_basis(&basis)?;
        let next = Look::near(instance, program, look.vertex.clone())?;
        if !next.is_optimal() {
            instance.set_basis(&look.basis)?;
            break;
        }
        look = next;
        sharp = Sharp::of(instance, program, &look)?;
    }
    Ok((look, sharp))
}

/// What stands out of the basis and would gain most by moving.
fn wrong(program: &Program, look: &Look, sharp: &Sharp, nil: f64) -> Option<Entrant> {
    let (columns, rows) = sharp.margins.split_at(program.columns.len());
    let columns = columns.iter().enumerate().map(|(at, &margin)| (margin, Member::Column(ColumnIndex(at))));
    let rows = rows.iter().enumerate().map(|(at, &margin)| (margin, Member::Row(RowIndex(at))));
    let entrants = columns.chain(rows).filter(|&(margin, _)| margin < -nil);
    let entrants = entrants.filter_map(|(margin, member)| Some((margin, entrant(program, look, sharp, member)?)));
    entrants.min_by(|a, b| a.0.total_cmp(&b.0)).map(|(_, entrant)| entrant)
}

/// How a member enters the basis; `None` where it is in it.
fn entrant(program: &Program, look: &Look, sharp: &Sharp, member: Member) -> Option<Entrant> {
    let (position, lower, upper, multiplier) = match member {
        Member::Column(ColumnIndex(at)) => {
            let column = &program.columns[at];
            (look.basis.columns[at], column.lower, column.upper, sharp.gains[at])
        }
        Member::Row(RowIndex(at)) => {
            let row = &program.rows[at];
            (look.basis.rows[at], row.lower, row.upper, sharp.worths[at])
        }
    };
    let value = bound_at(position, lower, upper)?;
    let rises = match position {
        Position::AtLower => true,
        Position::AtUpper => false,
        Position::AtZero | Position::Basic => program.sense.sign() * multiplier < 0.0,
    };
    Some(Entrant { member, value, lower, upper, rises })
}

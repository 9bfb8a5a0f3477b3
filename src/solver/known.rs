//! Which worths and gains are the only optimal ones, where not all of them are.
//!
//! Where the levels are the only optimal ones, some optimal worths leave a gain to everything that stands at a bound (Goldman &
//! Tucker, *Theory of linear programming*, 1956). So other optimal worths differ by whatever the basic columns and rows at a bound may
//! take for gains, and a worth on which none of these has a part is the only one. Any optimal basis tells the same.

use super::basis::Position;
use super::instance::{Instance, Member};
use super::live::Refusal;
use super::look::Look;
use super::message::Known;
use super::ties::at_bound;
use crate::lp::Program;

/// It is worked out where basic members at a bound times entries and rows are at most so many: the model alone decides, never a clock.
pub const EFFORT: usize = 4_000_000;

/// A part smaller than this, relative to the largest of its row, is none.
const NONE: f64 = 1e-10;

/// Which worths and gains are the only optimal ones, for the optimal basis of `look`, whose levels are; `None` where that is too much work.
///
/// # Errors
/// When the solver has no factorisation.
pub fn known(instance: &mut Instance, program: &Program, look: &Look) -> Result<Option<Known>, Refusal> {
    instance.factorise()?;
    let basics = instance.basics()?;
    let at_bound: Vec<usize> =
        (0..basics.len()).filter(|&place| stands_at_bound(program, look, basics[place])).collect();
    if at_bound.len().saturating_mul(program.entries() + program.rows.len()) > EFFORT {
        return Ok(None);
    }
    let mut known = Known { worths: vec![true; program.rows.len()], gains: vec![true; program.columns.len()] };
    for place in at_bound {
        let mut unit = vec![0.0; program.rows.len()];
        unit[place] = 1.0;
        let parts = instance.solve_transposed(&unit)?;
        let none = NONE * parts.iter().fold(0.0_f64, |most, part| most.max(part.abs()));
        for (known, part) in known.worths.iter_mut().zip(&parts) {
            *known &= part.abs() <= none;
        }
        for (at, column) in program.columns.iter().enumerate() {
            let is_basic = look.basis.columns[at] == Position::Basic;
            let rate = if is_basic {
                f64::from(u8::from(basics[place] == Member::Column(crate::lp::ColumnIndex(at))))
            } else {
                column.entries.iter().map(|&(row, value)| value * parts[row.0]).sum()
            };
            let scale = column.entries.iter().fold(1.0_f64, |most, &(_, value)| most.max(value.abs()));
            known.gains[at] &= rate.abs() <= none * scale;
        }
    }
    Ok(Some(known))
}

fn stands_at_bound(program: &Program, look: &Look, basic: Member) -> bool {
    match basic {
        Member::Column(column) => {
            let bounds = &program.columns[column.0];
            at_bound(Position::Basic, look.vertex.levels[column.0], 0.0, bounds.lower, bounds.upper)
        }
        Member::Row(row) => {
            let (bounds, checked) = (&program.rows[row.0], &look.checked);
            at_bound(Position::Basic, checked.sums[row.0], checked.sum_scales[row.0], bounds.lower, bounds.upper)
        }
    }
}

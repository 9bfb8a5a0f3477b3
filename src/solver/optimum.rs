//! From the one plan to what a plan file is made of.

use super::canonical::Canonical;
use super::instance::Instance;
use super::live::Refusal;
use super::message::Optimum;
use super::stop::Stop;
use super::{known, ranging, ties};
use crate::lp::Program;

/// Ranges are worked out where rows times entries are at most so many: the model alone decides, never a clock.
pub const RANGED: usize = 4_000_000;

/// The optimum of `program` that `plan` is; `instance` holds its basis.
///
/// # Errors
/// When the solver refuses.
pub fn of(instance: &mut Instance, program: &Program, plan: &Canonical, stop: &Stop) -> Result<Optimum, Refusal> {
    let look = &plan.look;
    let worths_unique = ties::worths_unique(program, look);
    let levels_unique = ties::levels_unique(instance, program, plan, stop)?;
    let spans = if levels_unique || program.columns.len() > ties::SPANNED {
        None
    } else {
        Some(ties::spans(instance, program, plan, stop)?)
    };
    let small = program.rows.len().saturating_mul(program.entries()) <= RANGED;
    let ranges = (levels_unique && worths_unique && small).then(|| ranging::ranges(instance, program, look).ok());
    let known =
        if levels_unique && !worths_unique { known::known(instance, program, look).ok().flatten() } else { None };
    Ok(Optimum {
        aim: look.checked.aim,
        levels: look.vertex.levels.clone(),
        sums: look.checked.sums.clone(),
        gains: look.checked.gains.clone(),
        worths: look.vertex.worths.clone(),
        basis: look.basis.clone(),
        exact: plan.exact,
        levels_unique,
        spans,
        worths_unique,
        known,
        ranges: ranges.flatten(),
        proof: look.checked.proof,
    })
}

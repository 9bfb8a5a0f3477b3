//! From a proven basis to what a plan is made of.

use super::instance::Instance;
use super::look::Look;
use super::message::{Optimum, Outcome};
use super::{ranging, ties};
use crate::lp::Program;

/// Ranges are worked out where rows times entries are at most so many: the model alone decides, never a clock.
pub const RANGED: usize = 4_000_000;

/// The optimum of `program` at the proven basis of `look`.
pub fn of(instance: &mut Instance, program: &Program, look: &Look) -> Outcome {
    let worths_unique = ties::worths_unique(program, look);
    let levels_unique = match ties::levels_unique(instance, program, look) {
        Ok(unique) => unique,
        Err(refusal) => return Outcome::Undecided(refusal.to_string()),
    };
    let small = program.rows.len().saturating_mul(program.entries()) <= RANGED;
    let ranges = (levels_unique && worths_unique && small).then(|| ranging::ranges(instance, program, look).ok());
    Outcome::Optimal(Box::new(Optimum {
        aim: look.checked.aim,
        levels: look.vertex.levels.clone(),
        sums: look.checked.sums.clone(),
        gains: look.checked.gains.clone(),
        worths: look.vertex.worths.clone(),
        basis: look.basis.clone(),
        levels_unique,
        worths_unique,
        ranges: ranges.flatten(),
        proof: look.checked.proof,
    }))
}

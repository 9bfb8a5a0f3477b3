//! Whether the levels, or the worths, of an optimal basis are the only optimal ones, and how far levels may differ.

use super::basis::{Basis, Position};
use super::canonical::Canonical;
use super::exact::{self, Unsettled};
use super::face::{End, Face};
use super::free::is_free;
use super::instance::Instance;
use super::live::Refusal;
use super::look::Look;
use super::proof::TOLERANCE;
use super::stop::Stop;
use super::weight::weights;
use crate::lp::Program;

/// A difference smaller than this, relative to what differs, is none where nothing exact is known.
const DIFFERS: f64 = 1e-6;

/// How far each level may differ is worked out for programs of at most so many columns.
pub const SPANNED: usize = 64;

/// Whether no basic column or row stands at a bound of its own: then the worths are unique.
#[must_use]
pub fn worths_unique(program: &Program, look: &Look) -> bool {
    let Look { basis, vertex, checked, .. } = look;
    let column_at_bound = program
        .columns
        .iter()
        .enumerate()
        .any(|(at, column)| at_bound(basis.columns[at], vertex.levels[at], 0.0, column.lower, column.upper));
    let row_at_bound = program
        .rows
        .iter()
        .enumerate()
        .any(|(at, row)| at_bound(basis.rows[at], checked.sums[at], checked.sum_scales[at], row.lower, row.upper));
    !column_at_bound && !row_at_bound
}

/// Whether something basic stands at a bound of its own.
pub(super) fn at_bound(position: Position, value: f64, scale: f64, lower: f64, upper: f64) -> bool {
    let near = TOLERANCE * value.abs().max(scale).max(1.0);
    position == Position::Basic && ((value - lower).abs() <= near || (upper - value).abs() <= near)
}

/// Whether no other levels earn as much: those of the greatest weight on the optimal face are those of the least, and there are both.
///
/// # Errors
/// When the solver refuses.
pub fn levels_unique(
    instance: &mut Instance,
    program: &Program,
    plan: &Canonical,
    stop: &Stop,
) -> Result<bool, Refusal> {
    if !plan.may_tie {
        return Ok(true);
    }
    let weights = weights(program);
    let mut aims = vec![weights.iter().map(|weight| -weight).collect()];
    if program.columns.iter().any(is_free) {
        // The plan is not the one of least weight where there is none such.
        aims.push(weights);
    }
    for aim in aims {
        let Some(other) = least(instance, program, plan, &aim, stop)? else { return Ok(false) };
        if other.iter().zip(&plan.look.vertex.levels).any(|(&a, &b)| differs(plan, a, b)) {
            return Ok(false);
        }
    }
    Ok(true)
}

/// Per column, the least and the most that its level is in any plan that earns as much.
///
/// # Errors
/// When the solver refuses.
pub fn spans(
    instance: &mut Instance,
    program: &Program,
    plan: &Canonical,
    stop: &Stop,
) -> Result<Vec<(f64, f64)>, Refusal> {
    let mut spans = Vec::with_capacity(program.columns.len());
    let mut aim = vec![0.0; program.columns.len()];
    for (at, &level) in plan.look.vertex.levels.iter().enumerate() {
        let mut end = |direction: f64| {
            aim[at] = direction;
            let found = least(instance, program, plan, &aim, stop);
            aim[at] = 0.0;
            Ok(found?.map_or(-direction * f64::INFINITY, |levels| levels[at]))
        };
        let (least, most) = (end(1.0)?, end(-1.0)?);
        let differ = differs(plan, least, most);
        spans.push(if differ { (least, most) } else { (level, level) });
    }
    Ok(spans)
}

#[expect(clippy::float_cmp, reason = "both are the doubles nearest to exact numbers")]
fn differs(plan: &Canonical, a: f64, b: f64) -> bool {
    if plan.rational { a != b } else { (a - b).abs() > DIFFERS * a.abs().max(1.0) }
}

/// The levels with the least sum of `aim` times level on the optimal face; `None` where there is no least.
fn least(
    instance: &mut Instance,
    program: &Program,
    plan: &Canonical,
    aim: &[f64],
    stop: &Stop,
) -> Result<Option<Vec<f64>>, Refusal> {
    let own = plan.look.vertex.levels.clone();
    let basis = match Face::of(program, &plan.look, plan.nil).least(aim, stop)? {
        End::Least(basis) => basis,
        // Exact arithmetic has its own word on that: floating point takes what is nearly tied for tied.
        End::NoLeast if !plan.rational => return Ok(None),
        End::NoLeast | End::Unknown => plan.look.basis.clone(),
    };
    if plan.rational {
        return match exact::settle(program, &basis, aim) {
            Ok(settled) => Ok(Some(settled.levels)),
            Err(Unsettled::Unbounded) => Ok(None),
            Err(_) => Ok(Some(own)),
        };
    }
    let found = at(instance, program, &basis)?;
    instance.set_basis(&plan.look.basis)?;
    Ok(Some(if found.is_optimal() { found.vertex.levels } else { own }))
}

fn at(instance: &mut Instance, program: &Program, basis: &Basis) -> Result<Look, Refusal> {
    instance.set_basis(basis)?;
    Look::at(instance, program)
}

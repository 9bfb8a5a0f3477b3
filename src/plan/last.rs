//! What of a plan decides which edits leave its basis standing.

use super::types::{Plan, State};
use crate::edits::LastPlan;
use crate::model::{Bound, Model, Value};

/// Relative difference below which two numbers of a plan, which has ten digits, are one.
const SAME: f64 = 1e-9;

/// What stood at a bound in `plan`, which answers `model`. What cannot be told from the plan counts as standing at one.
#[must_use]
pub fn of(plan: &Plan, model: &Model) -> LastPlan {
    let mut last = LastPlan::default();
    for planned in &plan.activities {
        let idle = planned.level.numbers().iter().all(|&level| level.abs() <= SAME);
        if idle {
            last.idle.insert(planned.name.clone());
        } else if matches!(planned.state, State::AtItsMost | State::AtItsLeast | State::Fixed) {
            last.bounded.insert(planned.name.clone());
        }
    }
    for planned in &plan.resources {
        let bounds = model.resources.get(&planned.name).map(|resource| [&resource.at_least, &resource.capacity]);
        if bounds.is_none_or(|bounds| bounds.iter().any(|bound| meets(&planned.used, bound))) {
            last.scarce.insert(planned.name.clone());
        }
    }
    for planned in &plan.limits {
        let bounds = model.limits.get(&planned.name).map(|limit| match &limit.bound {
            Bound::Between(least, most) => [least, most],
            Bound::Equals(value) => [value, value],
        });
        let met = |value: &Value| bounds.is_none_or(|bounds| bounds.iter().any(|bound| meets(value, bound)));
        if planned.value.as_ref().is_none_or(met) {
            last.binding.insert(planned.name.clone());
        }
    }
    last
}

/// Whether a value reaches a bound in some period.
fn meets(value: &Value, bound: &Value) -> bool {
    let (values, bounds) = (value.numbers(), bound.numbers());
    let longest = values.len().max(bounds.len());
    let at = |numbers: &[f64], period: usize| numbers.get(period).or(numbers.last()).copied().unwrap_or(0.0);
    (0..longest).any(|period| {
        let (value, bound) = (at(values, period), at(bounds, period));
        bound.is_finite() && (value - bound).abs() <= SAME * value.abs().max(bound.abs()).max(1.0)
    })
}

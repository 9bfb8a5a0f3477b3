//! What mattered in a plan: enough to say what an edit leaves standing of its basis.

use super::types::{Plan, PlannedActivity, State};
use crate::edits::LastPlan;
use crate::lp::Key;
use crate::model::{Model, Name};
use crate::solver::basis::{NamedBasis, Position};

/// What mattered in `plan`, the plan of `model` that `basis` gave.
#[must_use]
pub fn last_plan(model: &Model, plan: &Plan, basis: &NamedBasis) -> LastPlan {
    let is_idle = |planned: &&PlannedActivity| planned.level.numbers().iter().all(|&level| level == 0.0);
    let is_bound = |state: &State| matches!(state, State::AtItsMost | State::AtItsLeast | State::Fixed);
    let at_bound = |planned: &&PlannedActivity| !is_idle(planned) && planned.state.all().iter().any(is_bound);
    let leaned_on = |table: &str, name: &Name| {
        let whole = format!("{table}.{name}");
        let of_it =
            |key: &Key| key.as_str().strip_prefix(&whole).is_some_and(|rest| rest.is_empty() || rest.starts_with('.'));
        basis.rows.iter().any(|(key, position)| *position != Position::Basic && of_it(key))
    };
    let names = |planned: &PlannedActivity| planned.name.clone();
    LastPlan {
        idle: plan.activities.iter().filter(is_idle).map(names).collect(),
        bounded: plan.activities.iter().filter(at_bound).map(names).collect(),
        scarce: model.resources.keys().filter(|name| leaned_on("resources", name)).cloned().collect(),
        binding: model.limits.keys().filter(|name| leaned_on("limits", name)).cloned().collect(),
    }
}

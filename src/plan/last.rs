//! What mattered in a plan: enough to say what an edit leaves standing of its basis.

use crate::edits::LastPlan;
use crate::lp::Program;
use crate::model::Horizon;
use crate::solver::basis::{NamedBasis, Position};

/// What mattered in the plan that `basis` gave for `program`, over the periods of `horizon`.
#[must_use]
pub fn last_plan(horizon: &Horizon, program: &Program, basis: &NamedBasis) -> LastPlan {
    let mut last = LastPlan { horizon: horizon.clone(), ..LastPlan::default() };
    for column in &program.columns {
        let position = basis.column(&column.key);
        let stands_at = match position {
            Some(Position::AtLower) => Some(column.lower),
            Some(Position::AtUpper) => Some(column.upper),
            Some(Position::AtZero) => Some(0.0),
            Some(Position::Basic) | None => None,
        };
        if stands_at.is_some() {
            last.resting.insert(column.key.clone());
        }
        if stands_at != Some(0.0) {
            last.busy.insert(column.key.clone());
        }
    }
    let binding = basis.rows.iter().filter(|(_, position)| *position != Position::Basic);
    last.binding = binding.map(|(key, _)| key.clone()).collect();
    last
}

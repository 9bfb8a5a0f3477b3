//! What mattered in a plan: enough to say what an edit leaves standing of its basis.

use crate::edits::LastPlan;
use crate::lp::{Key, Program};
use crate::model::Horizon;
use crate::solver::basis::{NamedBasis, Position};

/// What mattered in the plan that `basis` gave for `program`, over the periods of `horizon`.
#[must_use]
pub fn last_plan(horizon: &Horizon, program: &Program, basis: &NamedBasis) -> LastPlan {
    let mut known = basis.columns.iter().peekable();
    // Both are in byte order of keys.
    let mut position = |key: &Key| {
        while known.next_if(|(other, _)| other < key).is_some() {}
        known.next_if(|(other, _)| other == key).map(|(_, position)| *position)
    };
    let (mut resting, mut busy) = (Vec::new(), Vec::new());
    for column in &program.columns {
        let stands_at = match position(&column.key) {
            Some(Position::AtLower) => Some(column.lower),
            Some(Position::AtUpper) => Some(column.upper),
            Some(Position::AtZero) => Some(0.0),
            Some(Position::Basic) | None => None,
        };
        if stands_at.is_some() {
            resting.push(column.key.clone());
        }
        if stands_at != Some(0.0) {
            busy.push(column.key.clone());
        }
    }
    let binding = basis.rows.iter().filter(|(_, position)| *position != Position::Basic);
    LastPlan {
        horizon: horizon.clone(),
        busy: busy.into_iter().collect(),
        resting: resting.into_iter().collect(),
        binding: binding.map(|(key, _)| key.clone()).collect(),
    }
}

//! What a note says of what is not made: how far each prospect and idle activity is from paying.

use super::layout::{ROWS, name_of_activity, section};
use super::words::{amounts, per_unit, unit_of_activity};
use super::{Report, periods};
use crate::plan::compare::{Comparison, PricedOut, is_made, nearest_to_paying, would_enter};
use crate::plan::types::{Plan, PlannedActivity, State};

/// Prospects, then idle activities, those nearest to paying first. Over several periods each is told in its nearest one.
pub(super) fn prospects(report: &Report<'_>, plan: &Plan, comparison: Option<&Comparison>) -> String {
    let mut priced: Vec<(&PlannedActivity, PricedOut)> = Vec::new();
    for planned in plan.activities.iter().filter(|planned| !is_made(planned)) {
        if let Some(told) = nearest_to_paying(planned, plan.minimise) {
            priced.push((planned, told));
        }
    }
    let near = |&(planned, told): &(&PlannedActivity, PricedOut)| (!planned.state.is(State::Prospect), told.share());
    let nearest_first = |a: &_, b: &_| {
        let (a_near, b_near) = (near(a), near(b));
        a_near.0.cmp(&b_near.0).then(a_near.1.total_cmp(&b_near.1)).then_with(|| a.0.name.cmp(&b.0.name))
    };
    let more = priced.len().saturating_sub(ROWS);
    if more > 0 {
        // Thousands are left out: only those told need be in order.
        priced.select_nth_unstable_by(ROWS, nearest_first);
        priced.truncate(ROWS);
    }
    priced.sort_by(nearest_first);
    let mut body = String::new();
    for (planned, told) in priced {
        let newly = comparison.is_some_and(|comparison| comparison.would_enter.contains(&planned.name));
        body.push_str(&format!("- {}\n", priced_out(report, plan, planned, told, newly)));
    }
    if more > 0 {
        body.push_str(&format!("- … and {more} more\n"));
    }
    section("What is not made, and when it would pay", &body)
}

fn priced_out(report: &Report<'_>, plan: &Plan, planned: &PlannedActivity, told: PricedOut, newly: bool) -> String {
    let name = name_of_activity(report.model, &planned.name);
    let (must, is) = amounts(told.break_even, told.offered);
    let unit = unit_of_activity(report.model, &planned.name);
    let by = per_unit(told.loses.abs(), plan.currency.as_deref(), unit);
    let kind = if planned.state.is(State::Prospect) { "prospect" } else { "idle" };
    let period = match plan.periods.len() {
        0 | 1 => String::new(),
        _ => format!(" in {}", periods::name(told.place, &plan.periods)),
    };
    let asked = if plan.minimise {
        format!("{name}, {kind}: must cost less than {must}{period}, costs {is}")
    } else {
        format!("{name}, {kind}: must earn {must}{period}, is offered {is}")
    };
    if would_enter(planned) {
        let now = if newly { "**it would pay now**" } else { "it would pay" };
        format!("{asked}: {now}, by {by}")
    } else if told.loses > 0.0 && plan.minimise {
        format!("{asked}: {by} too much")
    } else if told.loses > 0.0 {
        format!("{asked}: {by} short")
    } else {
        format!("{asked}: just breaks even")
    }
}

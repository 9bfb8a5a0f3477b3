//! What a note says of levels: what is made, what moves, what enters the mix and what leaves it.

use super::layout::{few, name_of_activity, section, table};
use super::words::{change, total, unit_of_activity, value, values, with_unit};
use super::{Report, periods};
use crate::lp::build::worth_of_one;
use crate::model::{Model, Name, Value};
use crate::plan::compare::{Comparison, Move, PeriodMove};
use crate::plan::types::{Plan, PlannedActivity};

/// What is made, where there is nothing to compare it with.
pub(super) fn levels(report: &Report<'_>, plan: &Plan) -> String {
    let made = plan.activities.iter().filter(|planned| total(Some(&planned.level)).abs() > 0.0);
    let weight_of = |planned: &PlannedActivity| weight(report.model, &planned.name, &planned.level);
    let made = heaviest_first(made.map(|planned| (weight_of(planned), &planned.name, planned)).collect());
    let over_periods = !plan.periods.is_empty();
    let rows = made.into_iter().map(|planned| {
        let level = with_unit(&value(&planned.level), unit_of_activity(report.model, &planned.name));
        let mut row = vec![name_of_activity(report.model, &planned.name), level];
        if over_periods {
            row.push(made_in(planned, plan));
        }
        row.push(planned.state.words());
        row
    });
    let header: &[&str] = if over_periods {
        &["activity", "in all", "made in", "how it stands"]
    } else {
        &["activity", "level", "how it stands"]
    };
    section("What is made", &table(header, 1, &rows.collect::<Vec<_>>(), "more activities are made"))
}

fn made_in(planned: &PlannedActivity, plan: &Plan) -> String {
    let levels = planned.level.numbers().iter().enumerate();
    let places: Vec<usize> = levels.filter(|(_, level)| level.abs() > 0.0).map(|(place, _)| place).collect();
    periods::which(&places, &plan.periods)
}

/// What moves from the plan before to this one.
pub(super) fn moves(report: &Report<'_>, comparison: &Comparison) -> String {
    let mut body = move_table(report.model, &comparison.moved, "before");
    for (names, words) in [(&comparison.entered, "Entered the mix"), (&comparison.left, "Left the mix")] {
        if !names.is_empty() {
            body.push_str(&format!("\n{words}: {}.\n", few(names, |name| turned_in(name, comparison))));
        }
    }
    section("What moves", &body)
}

/// In which periods an activity entered the mix or left it, where they have names: ` (2027-W03)`.
fn turned_in(name: &Name, comparison: &Comparison) -> String {
    let shared = &comparison.overlap.shared;
    let told = comparison.moved.iter().find(|told| told.name == *name);
    let Some(told) = told.filter(|told| shared.len() > 1 && !told.periods.is_empty()) else { return String::new() };
    let places: Vec<usize> = told.periods.iter().map(|moved| moved.place).collect();
    format!(" ({})", periods::which(&places, shared))
}

/// Levels that moved, those first that weigh most in the aim; `before` is the head of the column of what they were. Over several
/// periods a move is told by what they come to, and where it is.
pub(super) fn move_table(model: Option<&Model>, moves: &[Move], before: &str) -> String {
    let over_periods = moves.iter().any(|told| !told.periods.is_empty());
    let rows = by_weight(model, moves).into_iter().map(|told| {
        let unit = unit_of_activity(model, &told.name);
        let (before, after) = match (&told.before, &told.after) {
            (Some(before), Some(after)) => values(before, after),
            (before, after) => {
                let side = |level: &Option<_>| level.as_ref().map_or("none".to_owned(), value);
                (side(before), side(after))
            }
        };
        let moved = change(total(told.before.as_ref()), total(told.after.as_ref()));
        let mut row = vec![name_of_activity(model, &told.name), before, after, with_unit(&moved, unit)];
        if over_periods {
            row.push(periods::moves(&told.periods));
        }
        row
    });
    let mut header = vec!["activity", before, "now", "change"];
    if over_periods {
        header.push("in which periods");
    }
    table(&header, 3, &rows.collect::<Vec<_>>(), "more levels move")
}

/// Moves, those first that weigh most in the aim: what moves from one period to another counts in both.
pub(super) fn by_weight<'m>(model: Option<&Model>, moves: &'m [Move]) -> Vec<&'m Move> {
    let weight_of = |told: &Move| match told.periods.as_slice() {
        [] => weight(model, &told.name, &(total(told.after.as_ref()) - total(told.before.as_ref())).into()),
        periods => weight_of_periods(model, &told.name, periods),
    };
    heaviest_first(moves.iter().map(|told| (weight_of(told), &told.name, told)).collect())
}

fn weight_of_periods(model: Option<&Model>, name: &Name, periods: &[PeriodMove]) -> f64 {
    let moved = periods.iter().map(|told| (told.after - told.before).abs());
    let Some(model) = model else { return moved.sum() };
    let Some(activity) = model.activities.get(name) else { return f64::INFINITY };
    let worth = |label: &Name| {
        let period = model.horizon.period(label.as_str());
        period.map_or(0.0, |period| worth_of_one(model, activity, period).abs())
    };
    periods.iter().zip(moved).map(|(told, by)| worth(&told.period) * by).sum()
}

/// Things by weight, and those of equal weight by name. Working out a weight costs more than comparing two, so each is given.
pub(super) fn heaviest_first<T>(mut weighed: Vec<(f64, &Name, T)>) -> Vec<T> {
    weighed.sort_by(|a, b| b.0.total_cmp(&a.0).then_with(|| a.1.cmp(b.1)));
    weighed.into_iter().map(|(_, _, thing)| thing).collect()
}

/// How much a level of an activity counts: what it adds to the aim. What the model no longer has counts most.
pub(super) fn weight(model: Option<&Model>, name: &Name, level: &Value) -> f64 {
    let Some(model) = model else { return total(Some(level)).abs() };
    let Some(activity) = model.activities.get(name) else { return f64::INFINITY };
    let periods = model.horizon.periods();
    periods.map(|period| (worth_of_one(model, activity, period) * level.at(period)).abs()).sum()
}

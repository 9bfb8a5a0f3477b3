//! The sentence that says it all.

use super::words::{
    amount, amounts, count, difference, listed, per_cent, text, total, unit_of_activity, value, values, with_unit,
};
use super::{Report, Trouble, Verdict, moves, periods, reason, was_held};
use crate::edits::Kind;
use crate::model::Value;
use crate::model::escape::Markdown;
use crate::plan::compare::{Comparison, Move, is_made, moved};
use crate::plan::types::{Plan, PlannedActivity};

/// The first sentence of the note.
pub(super) fn sentence(report: &Report<'_>, comparison: Option<&Comparison>) -> String {
    match (&report.verdict, comparison) {
        (Verdict::Planned(plan), Some(comparison)) => {
            format!("{}{}", planned_again(report, plan, comparison), would_pay(comparison))
        }
        (Verdict::Planned(plan), None) => first(report, plan),
        (Verdict::Trouble(trouble), _) => no_plan(report, *trouble),
        (Verdict::Retired, _) if report.before.is_some() => {
            "The model is gone. Its last plan stays and is marked retired.".to_owned()
        }
        (Verdict::Retired, _) => "The model is gone, and it never had a plan.".to_owned(),
    }
}

fn no_plan(report: &Report<'_>, trouble: Trouble<'_>) -> String {
    let why = match trouble {
        // The rules, or the reason, follow at once.
        Trouble::Infeasible(_) => "its rules contradict each other".to_owned(),
        Trouble::Undecided(_) => "the solver cannot tell".to_owned(),
        _ => text(&reason(trouble, report.model)),
    };
    match report.before {
        Some(_) => format!("There is no plan for this model now: {why}. The last good plan stays and is marked held."),
        None => format!("There is no plan for this model yet: {why}."),
    }
}

fn first(report: &Report<'_>, plan: &Plan) -> String {
    let aim = aim_told(plan, &amount(plan.aim.abs()));
    let made = plan.activities.iter().filter(|planned| is_made(planned));
    let weight = |planned: &PlannedActivity| moves::weight(report.model, &planned.name, &planned.level);
    let made = moves::heaviest_first(made.map(|planned| (weight(planned), &planned.name, planned)).collect());
    let mut told: Vec<String> = made
        .iter()
        .take(3)
        .map(|planned| {
            let level = value(&planned.level);
            format!(
                "{} {}",
                Markdown(planned.name.as_str()),
                with_unit(&level, unit_of_activity(report.model, &planned.name))
            )
        })
        .collect();
    match made.len() {
        0 => told.push("nothing is made".to_owned()),
        number if number > 3 => told.push(format!("{} more", number - 3)),
        _ => {}
    }
    format!("The first plan {aim}{}: {}.", over(plan), listed(&told))
}

fn planned_again(report: &Report<'_>, plan: &Plan, comparison: &Comparison) -> String {
    let subject = if was_held(report) { "There is a plan again: it" } else { "The plan" };
    let Some((before, after)) = comparison.aim else {
        let aim = aim_told(plan, &amount(plan.aim.abs()));
        let why = "which cannot be compared with before, as";
        return if comparison.overlap.is_whole() {
            format!(
                "{subject} now {aim}, {why} the aim or its currency was changed; {}.",
                moved_most(report, comparison)
            )
        } else {
            format!("{subject} now {aim}{}, {why} {}.", over(plan), horizon(report, comparison))
        };
    };
    if !moved(before, after) {
        return stands(report, plan, comparison, subject);
    }
    let (_, shown) = amounts(before.abs(), after.abs());
    let gained = difference(before, after);
    let share = gained.abs() / before.abs();
    // Next to nothing is plain from the number itself, and from nothing there is no share.
    let share = if (1e-4..f64::INFINITY).contains(&share) { format!(" ({})", per_cent(share)) } else { String::new() };
    let by = with_unit(&amount(gained.abs()), plan.currency.as_deref());
    let direction = direction(plan, before, after);
    format!(
        "{subject} {}, {by}{share} {direction} than before; {}.",
        aim_told(plan, &shown),
        moved_most(report, comparison)
    )
}

fn stands(report: &Report<'_>, plan: &Plan, comparison: &Comparison, subject: &str) -> String {
    let aim = aim_told(plan, &amount(plan.aim.abs()));
    if !comparison.moved.is_empty() {
        return format!("{subject} {aim}, as before; {}.", moved_most(report, comparison));
    }
    if was_held(report) {
        return format!("There is a plan again: nothing moves, and it {aim} as before.");
    }
    let only_wording = !report.edits.is_empty() && report.edits.iter().all(|told| told.edit.kind == Kind::Wording);
    let why = if only_wording { "only wording was edited" } else { "nothing moves" };
    format!("The plan stands: {why}, and it {aim} as before.")
}

/// What became of the horizon, and of the levels in the periods that stay.
fn horizon(report: &Report<'_>, comparison: &Comparison) -> String {
    let overlap = &comparison.overlap;
    if overlap.is_empty() {
        return "it planned none of these periods".to_owned();
    }
    let ways = [(overlap.dropped.as_slice(), "dropped"), (overlap.added.as_slice(), "new")];
    let told: Vec<String> = ways
        .into_iter()
        .filter(|(names, _)| !names.is_empty())
        .map(|(names, way)| match names.len() {
            1 | 2 => format!(
                "{} {way}",
                listed(&names.iter().map(|name| Markdown(name.as_str()).to_string()).collect::<Vec<_>>())
            ),
            many => format!("{} {way}", count(many, "period")),
        })
        .collect();
    let stay = match overlap.shared.len() {
        1 => "period that stays",
        _ => "periods that stay",
    };
    let moves = moved_most(report, comparison);
    format!("its horizon has changed ({}); in the {} {stay}, {moves}", told.join(", "), overlap.shared.len())
}

/// ` over 2027-W01 to 2027-W08`; empty where there is a single nameless period.
fn over(plan: &Plan) -> String {
    if plan.periods.is_empty() { String::new() } else { format!(" over {}", periods::from_to(&plan.periods)) }
}

/// `earns 43 265.1 EUR`, with `size` as the number without its sign.
fn aim_told(plan: &Plan, size: &str) -> String {
    let verb = match (plan.minimise, plan.aim < 0.0) {
        (false, false) | (true, true) => "earns",
        (false, true) => "loses",
        (true, false) => "costs",
    };
    format!("{verb} {}", with_unit(size, plan.currency.as_deref()))
}

/// Which way the aim went, so that it fits the verb: a loss that shrinks is less.
fn direction(plan: &Plan, before: f64, after: f64) -> &'static str {
    let crosses = (before < 0.0) != (after < 0.0);
    match (crosses, plan.minimise) {
        (true, false) => return if after > before { "better" } else { "worse" },
        (true, true) => return if after < before { "better" } else { "worse" },
        _ => {}
    }
    if after.abs() > before.abs() { "more" } else { "less" }
}

/// The one or two moves that matter most, and how many more there are.
fn moved_most(report: &Report<'_>, comparison: &Comparison) -> String {
    let ordered = moves::by_weight(report.model, &comparison.moved);
    match ordered.as_slice() {
        [] => "no level moves".to_owned(),
        [only] => one_move(report, only),
        [first, second] if shifts(first) && shifts(second) => {
            format!("{} and {} shift between periods", Markdown(first.name.as_str()), Markdown(second.name.as_str()))
        }
        [first, second] => format!("{}, and {}", one_move(report, first), one_move(report, second)),
        [first, more @ ..] => format!("{}, and {} more levels move", one_move(report, first), more.len()),
    }
}

/// What a planner should hear of prospects at once.
fn would_pay(comparison: &Comparison) -> String {
    match comparison.would_enter.as_slice() {
        [] => String::new(),
        [only] => format!(" The prospect {} would pay now.", Markdown(only.as_str())),
        [first, more @ ..] => format!(
            " The prospect {} and {} would pay now.",
            Markdown(first.as_str()),
            count(more.len(), "other prospect").replacen("1 other", "another", 1)
        ),
    }
}

/// Whether a level comes to the same in all, though not in each period.
fn shifts(told: &Move) -> bool {
    is_there(told.before.as_ref())
        && is_there(told.after.as_ref())
        && !moved(total(told.before.as_ref()), total(told.after.as_ref()))
}

fn is_there(level: Option<&Value>) -> bool {
    level.is_some_and(|value| value.numbers().iter().any(|number| number.abs() > 0.0))
}

fn one_move(report: &Report<'_>, told: &Move) -> String {
    let name = Markdown(told.name.as_str());
    let unit = unit_of_activity(report.model, &told.name);
    let before = told.before.as_ref().filter(|value| is_there(Some(value)));
    let after = told.after.as_ref().filter(|value| is_there(Some(value)));
    match (before, after) {
        (Some(_), Some(after)) if shifts(told) => {
            format!("{name} stays at {} and shifts between periods", with_unit(&value(after), unit))
        }
        (Some(before), Some(after)) => {
            let (before, after) = values(before, after);
            format!("{name} goes from {before} to {}", with_unit(&after, unit))
        }
        (None, Some(after)) => {
            format!("{name} enters the mix with {}", with_unit(&value(after), unit))
        }
        (Some(before), None) => {
            format!("{name}, {} before, leaves the mix", with_unit(&value(before), unit))
        }
        (None, None) => format!("{name} stays out of the mix"),
    }
}

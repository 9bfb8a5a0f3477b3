//! What a note says of resources and limits: what binds, what more of it is worth, and where extra capacity is taken.

use super::layout::{few, section, table};
use super::words::{amount, amounts, labelled, per_unit, total, unit_of_resource, value, with_unit};
use super::{Report, periods};
use crate::model::{Name, Over, Value};
use crate::plan::compare::{Comparison, find, greatest, is_scarce, is_scarce_in, moved};
use crate::plan::each::Span;
use crate::plan::types::{Plan, PlannedLimit, PlannedResource};

/// Something that binds.
struct Binding {
    /// How much it counts: what is used of it, at what more is worth.
    weight: f64,
    row: Vec<String>,
}

/// The table of what binds.
pub(super) fn scarce(report: &Report<'_>, plan: &Plan, comparison: Option<&Comparison>) -> String {
    let mut binding: Vec<Binding> = Vec::new();
    for planned in plan.resources.iter().filter(|planned| is_scarce(planned)) {
        let label = report.model.and_then(|model| model.resources.get(&planned.name)?.label.as_deref());
        let newly = comparison.is_some_and(|comparison| comparison.binds.contains(&planned.name));
        let name = format!("{}{}", labelled(&planned.name, label), if newly { ", newly scarce" } else { "" });
        binding.push(of_resource(report, plan, planned, name));
    }
    for planned in &plan.limits {
        let binds = |worth: &&Value| worth.numbers().iter().any(|worth| worth.abs() > 0.0);
        let Some(worth) = planned.worth_of_more.as_ref().filter(binds) else { continue };
        let label = report.model.and_then(|model| model.limits.get(&planned.name)?.label.as_deref());
        binding.push(of_limit(report, plan, (planned, worth), format!("limit {}", labelled(&planned.name, label))));
    }
    binding.sort_by(|a, b| b.weight.total_cmp(&a.weight).then_with(|| a.row.cmp(&b.row)));
    let rows: Vec<_> = binding.into_iter().map(|binding| binding.row).collect();
    let mut body = if plan.periods.is_empty() {
        table(&["what binds", "at", "one more is worth", "holds for"], 3, &rows, "more bind")
    } else {
        table(&["what binds", "one more is worth at most", "in", "binds in"], 1, &rows, "more bind")
    };
    if let Some(comparison) = comparison.filter(|comparison| !comparison.eases.is_empty()) {
        body.push_str(&format!("\nNo longer scarce: {}.\n", few(&comparison.eases, |_| String::new())));
    }
    section("What is scarce", &body)
}

fn of_resource(report: &Report<'_>, plan: &Plan, planned: &PlannedResource, name: String) -> Binding {
    let (currency, unit) = (plan.currency.as_deref(), unit_of_resource(report.model, &planned.name));
    let rate = |worth: f64| per_unit(worth, currency, unit);
    let weight = planned.worth_of_more.as_ref().map_or(0.0, |worth| by_period(worth, &planned.used));
    if plan.periods.is_empty() {
        let worth = planned.worth_of_more.as_ref().map(|worth| rate(greatest(worth)));
        let span = planned.holds_between.as_ref().and_then(|spans| spans.all().first());
        let row = vec![
            name,
            with_unit(&value(&planned.used), unit),
            worth.unwrap_or("not told".to_owned()),
            span.map_or(String::new(), |&span| between(span, unit)),
        ];
        return Binding { weight, row };
    }
    let binds: Vec<usize> = plan
        .horizon()
        .periods()
        .filter(|&period| is_scarce_in(planned, period))
        .map(|period| period.position())
        .collect();
    Binding { weight, row: over_periods(name, planned.worth_of_more.as_ref(), &binds, plan, rate) }
}

fn of_limit(report: &Report<'_>, plan: &Plan, (planned, worth): (&PlannedLimit, &Value), name: String) -> Binding {
    let rate = |worth: f64| per_unit(worth, plan.currency.as_deref(), None);
    let weight = planned.value.as_ref().map_or(0.0, |value| by_period(worth, value));
    if plan.periods.is_empty() {
        let span = planned.holds_between.as_ref().and_then(|spans| spans.all().first());
        let row = vec![
            name,
            planned.value.as_ref().map_or(String::new(), value),
            rate(total(Some(worth))),
            span.map_or(String::new(), |&span| between(span, None)),
        ];
        return Binding { weight, row };
    }
    let row = match worth {
        Value::Every(worth) => vec![name, rate(*worth), String::new(), together(report, planned, plan)],
        Value::Listed(worths) => {
            let numbers = worths.iter().enumerate();
            let binds: Vec<usize> = numbers.filter(|(_, worth)| worth.abs() > 0.0).map(|(place, _)| place).collect();
            over_periods(name, Some(worth), &binds, plan, rate)
        }
    };
    Binding { weight, row }
}

/// The periods over which a limit binds as one: `all 8 periods together`.
fn together(report: &Report<'_>, planned: &PlannedLimit, plan: &Plan) -> String {
    let places: Vec<usize> = match report.model.and_then(|model| Some(&model.limits.get(&planned.name)?.over)) {
        Some(Over::All) => (0..plan.periods.len()).collect(),
        Some(Over::Some(periods)) => periods.iter().map(|period| period.position()).collect(),
        Some(Over::Each) | None => return "several periods together".to_owned(),
    };
    format!("{} together", periods::which(&places, &plan.periods))
}

/// A row of what binds in several periods: the worth that is farthest from nothing, where that is, and where it binds.
fn over_periods(
    name: String,
    worth: Option<&Value>,
    binds: &[usize],
    plan: &Plan,
    rate: impl Fn(f64) -> String,
) -> Vec<String> {
    let (most, most_in) = match worth.and_then(farthest) {
        Some((places, most)) => (rate(most), periods::which(&places, &plan.periods)),
        None => ("not told".to_owned(), String::new()),
    };
    vec![name, most, most_in, periods::which(binds, &plan.periods)]
}

/// The number of a value that is farthest from 0, and where it is.
pub(super) fn farthest(value: &Value) -> Option<(Vec<usize>, f64)> {
    let numbers = value.numbers();
    let most = numbers.iter().copied().max_by(|a, b| a.abs().total_cmp(&b.abs()))?;
    let places = numbers.iter().enumerate().filter(|&(_, &number)| !moved(number, most));
    Some((places.map(|(place, _)| place).collect(), most))
}

/// What the amounts come to at the worths, period by period.
fn by_period(worth: &Value, amounts: &Value) -> f64 {
    let (worths, amounts) = (worth.numbers(), amounts.numbers());
    worths.iter().zip(amounts).map(|(worth, amount)| (worth * amount).abs()).sum()
}

fn between((least, most): Span, unit: Option<&str>) -> String {
    match (least.is_finite(), most.is_finite()) {
        (true, true) => {
            let (least, most) = amounts(least, most);
            with_unit(&format!("{least} to {most}"), unit)
        }
        (true, false) => with_unit(&format!("at least {}", amount(least)), unit),
        (false, true) => with_unit(&format!("at most {}", amount(most)), unit),
        (false, false) => "any".to_owned(),
    }
}

/// Where extra capacity is taken, and how much.
pub(super) fn extra(report: &Report<'_>, plan: &Plan, comparison: Option<&Comparison>) -> String {
    let mut body = String::new();
    for planned in &plan.resources {
        let Some(surge) = planned.surge.as_ref() else { continue };
        let was = before(report, comparison, &planned.name);
        let (now, was) = (total(Some(surge)), was.map(|was| total(was.surge.as_ref())));
        if now <= 0.0 && was.is_none_or(|was| was <= 0.0) {
            continue;
        }
        let unit = unit_of_resource(report.model, &planned.name);
        let label = report.model.and_then(|model| model.resources.get(&planned.name)?.label.as_deref());
        let taken: Vec<usize> =
            surge.numbers().iter().enumerate().filter(|(_, taken)| **taken > 0.0).map(|(place, _)| place).collect();
        let places = if plan.periods.len() > 1 && !taken.is_empty() {
            format!(", in {}", periods::which(&taken, &plan.periods))
        } else {
            String::new()
        };
        let earlier =
            was.filter(|&was| moved(was, now)).map_or(String::new(), |was| format!(" ({} before)", amount(was)));
        let name = labelled(&planned.name, label);
        body.push_str(&format!("- {name}: {}{earlier} beyond its capacity{places}\n", with_unit(&amount(now), unit)));
    }
    section("Extra capacity", &body)
}

/// The same resource in the plan before, where its sums can be compared.
fn before<'r>(report: &Report<'r>, comparison: Option<&Comparison>, name: &Name) -> Option<&'r PlannedResource> {
    let before = report.before.filter(|_| comparison.is_some_and(|comparison| comparison.overlap.is_whole()))?;
    find(&before.resources, name, |planned| &planned.name)
}

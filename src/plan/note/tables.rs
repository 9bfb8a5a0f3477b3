//! The parts of a note below its first sentence: edits, moves, what is scarce, and what would pay.

use super::words::{
    amount, amounts, change, labelled, listed, per_unit, signed, text, total, unit_of_activity, unit_of_resource,
    value, values, with_unit,
};
use super::{ROWS, Report, Verdict};
use crate::lp::build::worth_of_one;
use crate::model::escape::Markdown;
use crate::model::{Model, Name};
use crate::plan::compare::{Comparison, Move, is_scarce, offered, would_enter};
use crate::plan::types::{Plan, PlannedActivity, State};

/// The most names told in a row.
const NAMES: usize = 6;

/// What was edited, and what each edit was worth.
pub(super) fn edits(report: &Report<'_>) -> String {
    if report.edits.is_empty() {
        return String::new();
    }
    let currency = match report.verdict {
        Verdict::Planned(plan) => plan.currency.as_deref(),
        _ => None,
    };
    let with_worths = report.edits.iter().any(|told| told.worth.is_some());
    let mut header = vec!["where", "before", "now"];
    if with_worths {
        header.push("worth");
    }
    let rows = report.edits.iter().map(|told| {
        let side = |told: &Option<String>| told.as_deref().map_or("none".to_owned(), text);
        let mut row = vec![text(&told.edit.address), side(&told.edit.old), side(&told.edit.new)];
        if with_worths {
            row.push(told.worth.map_or(String::new(), |worth| with_unit(&signed(worth), currency)));
        }
        row
    });
    section("What was edited", &table(&header, header.len() - 1, &rows.collect::<Vec<_>>(), "more edits"))
}

/// What the plan does, beside what it did before.
pub(super) fn of_plan(report: &Report<'_>, plan: &Plan, comparison: Option<&Comparison>) -> String {
    let moves = match comparison {
        Some(comparison) => moves(report, comparison),
        None => levels(report, plan),
    };
    format!("{moves}{}{}", scarce(report, plan, comparison), prospects(report, plan, comparison))
}

fn levels(report: &Report<'_>, plan: &Plan) -> String {
    let made = plan.activities.iter().filter(|planned| total(Some(&planned.level)).abs() > 0.0);
    let weight_of = |planned: &PlannedActivity| weight(report.model, &planned.name, total(Some(&planned.level)));
    let made = heaviest_first(made.map(|planned| (weight_of(planned), &planned.name, planned)).collect());
    let rows = made.into_iter().map(|planned| {
        let level = with_unit(&value(&planned.level), unit_of_activity(report.model, &planned.name));
        vec![name_of_activity(report.model, &planned.name), level, planned.state.words().to_owned()]
    });
    section(
        "What is made",
        &table(&["activity", "level", "how it stands"], 1, &rows.collect::<Vec<_>>(), "more activities are made"),
    )
}

fn moves(report: &Report<'_>, comparison: &Comparison) -> String {
    let mut body = move_table(report.model, &comparison.moved, "before");
    for (names, words) in [(&comparison.entered, "Entered the mix"), (&comparison.left, "Left the mix")] {
        if !names.is_empty() {
            body.push_str(&format!("\n{words}: {}.\n", few(names)));
        }
    }
    section("What moves", &body)
}

/// Levels that moved, those first that weigh most in the aim; `before` is the head of the column of what they were.
pub(super) fn move_table(model: Option<&Model>, moves: &[Move], before: &str) -> String {
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
        vec![name_of_activity(model, &told.name), before, after, with_unit(&moved, unit)]
    });
    table(&["activity", before, "now", "change"], 3, &rows.collect::<Vec<_>>(), "more levels move")
}

/// Moves, those first that weigh most in the aim.
pub(super) fn by_weight<'m>(model: Option<&Model>, moves: &'m [Move]) -> Vec<&'m Move> {
    let weight_of = |told: &Move| weight(model, &told.name, total(told.after.as_ref()) - total(told.before.as_ref()));
    heaviest_first(moves.iter().map(|told| (weight_of(told), &told.name, told)).collect())
}

/// Things by weight, and those of equal weight by name. Working out a weight costs more than comparing two, so each is given.
pub(super) fn heaviest_first<T>(mut weighed: Vec<(f64, &Name, T)>) -> Vec<T> {
    weighed.sort_by(|a, b| b.0.total_cmp(&a.0).then_with(|| a.1.cmp(b.1)));
    weighed.into_iter().map(|(_, _, thing)| thing).collect()
}

/// How much `level` of an activity counts: what it adds to the aim. What the model no longer has counts most.
pub(super) fn weight(model: Option<&Model>, name: &Name, level: f64) -> f64 {
    let Some(model) = model else { return level.abs() };
    let Some(activity) = model.activities.get(name) else { return f64::INFINITY };
    model.horizon.periods().next().map_or(0.0, |period| (worth_of_one(model, activity, period) * level).abs())
}

/// Something that binds: what it is, how far it goes, what one more is worth and for how long.
struct Binding {
    weight: f64,
    row: Vec<String>,
}

fn scarce(report: &Report<'_>, plan: &Plan, comparison: Option<&Comparison>) -> String {
    let currency = plan.currency.as_deref();
    let newly = |name: &Name| comparison.is_some_and(|comparison| comparison.binds.contains(name));
    let mut binding: Vec<Binding> = Vec::new();
    for planned in plan.resources.iter().filter(|planned| is_scarce(planned)) {
        let unit = unit_of_resource(report.model, &planned.name);
        let label = report.model.and_then(|model| model.resources.get(&planned.name)?.label.as_deref());
        let new = if newly(&planned.name) { ", newly scarce" } else { "" };
        binding.push(Binding {
            weight: planned.worth_of_more.map_or(0.0, |worth| worth * total(Some(&planned.used)).abs()),
            row: vec![
                format!("{}{new}", labelled(&planned.name, label)),
                with_unit(&value(&planned.used), unit),
                planned.worth_of_more.map_or("not told".to_owned(), |worth| per_unit(worth, currency, unit)),
                planned.holds_between.map_or(String::new(), |range| between(range, unit)),
            ],
        });
    }
    for planned in &plan.limits {
        let Some(worth) = planned.worth_of_more.filter(|worth| worth.abs() > 0.0) else { continue };
        let label = report.model.and_then(|model| model.limits.get(&planned.name)?.label.as_deref());
        binding.push(Binding {
            weight: worth.abs() * total(planned.value.as_ref()).abs(),
            row: vec![
                format!("limit {}", labelled(&planned.name, label)),
                planned.value.as_ref().map_or(String::new(), value),
                per_unit(worth, currency, None),
                planned.holds_between.map_or(String::new(), |range| between(range, None)),
            ],
        });
    }
    binding.sort_by(|a, b| b.weight.total_cmp(&a.weight).then_with(|| a.row.cmp(&b.row)));
    let rows: Vec<_> = binding.into_iter().map(|binding| binding.row).collect();
    let header = ["what binds", "at", "one more is worth", "holds for"];
    let mut body = table(&header, 3, &rows, "more bind");
    if let Some(comparison) = comparison.filter(|comparison| !comparison.eases.is_empty()) {
        body.push_str(&format!("\nNo longer scarce: {}.\n", few(&comparison.eases)));
    }
    section("What is scarce", &body)
}

fn between((least, most): (f64, f64), unit: Option<&str>) -> String {
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

/// Prospects, then idle activities: how far each is from paying.
fn prospects(report: &Report<'_>, plan: &Plan, comparison: Option<&Comparison>) -> String {
    let mut priced: Vec<(&PlannedActivity, f64, f64)> = Vec::new();
    for planned in &plan.activities {
        if let (Some(loses), Some(offered)) = (planned.loses, offered(planned, plan.minimise)) {
            priced.push((planned, loses, offered));
        }
    }
    let near = |&(planned, loses, offered): &(&PlannedActivity, f64, f64)| {
        (planned.state != State::Prospect, loses / offered.abs().max(f64::MIN_POSITIVE))
    };
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
    for (planned, loses, offered) in priced {
        let newly = comparison.is_some_and(|comparison| comparison.would_enter.contains(&planned.name));
        body.push_str(&format!("- {}\n", priced_out(report, plan, planned, loses, offered, newly)));
    }
    if more > 0 {
        body.push_str(&format!("- … and {more} more\n"));
    }
    section("What is not made, and when it would pay", &body)
}

fn priced_out(
    report: &Report<'_>,
    plan: &Plan,
    planned: &PlannedActivity,
    loses: f64,
    offered: f64,
    newly: bool,
) -> String {
    let name = name_of_activity(report.model, &planned.name);
    let (must, is) = amounts(planned.break_even.unwrap_or(offered), offered);
    let unit = unit_of_activity(report.model, &planned.name);
    let by = per_unit(loses.abs(), plan.currency.as_deref(), unit);
    let kind = if planned.state == State::Prospect { "prospect" } else { "idle" };
    let asked = if plan.minimise {
        format!("{name}, {kind}: must cost less than {must}, costs {is}")
    } else {
        format!("{name}, {kind}: must earn {must}, is offered {is}")
    };
    if would_enter(planned) {
        let now = if newly { "**it would pay now**" } else { "it would pay" };
        format!("{asked}: {now}, by {by}")
    } else if loses > 0.0 && plan.minimise {
        format!("{asked}: {by} too much")
    } else if loses > 0.0 {
        format!("{asked}: {by} short")
    } else {
        format!("{asked}: just breaks even")
    }
}

fn name_of_activity(model: Option<&Model>, name: &Name) -> String {
    labelled(name, model.and_then(|model| model.activities.get(name)?.label.as_deref()))
}

/// Names in a row, the first of them where there are many.
fn few(names: &[Name]) -> String {
    let mut told: Vec<String> = names.iter().take(NAMES).map(|name| Markdown(name.as_str()).to_string()).collect();
    if names.len() > NAMES {
        told.push(format!("{} more", names.len() - NAMES));
    }
    listed(&told)
}

/// A part of a note under its heading; empty without a body.
pub(super) fn section(title: &str, body: &str) -> String {
    if body.is_empty() { String::new() } else { format!("\n## {title}\n\n{}\n", body.trim_matches('\n')) }
}

/// A table of at most [`ROWS`] rows, then how many there are beyond; empty without rows. The first column is text,
/// then come `numbers` columns of numbers, then text again.
fn table(header: &[&str], numbers: usize, rows: &[Vec<String>], beyond: &str) -> String {
    if rows.is_empty() {
        return String::new();
    }
    let rule = |column: usize| if (1..=numbers).contains(&column) { " ---: |" } else { " --- |" };
    let rules: String = (0..header.len()).map(rule).collect();
    let mut out = format!("| {} |\n|{rules}\n", header.join(" | "));
    for row in rows.iter().take(ROWS) {
        out.push_str(&format!("| {} |\n", row.join(" | ")));
    }
    if rows.len() > ROWS {
        let more = rows.len() - ROWS;
        out.push_str(&format!("\n… and {more} {beyond}.\n"));
    }
    out
}

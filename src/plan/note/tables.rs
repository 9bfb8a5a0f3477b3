//! The parts of a note below its first sentence: what was edited, and in which order the others come; how a table is drawn.

use super::words::{labelled, listed, signed, text, with_unit};
use super::{Report, Verdict, materials, moves, prospects, scarce};
use crate::model::escape::Markdown;
use crate::model::{Model, Name};
use crate::plan::compare::Comparison;
use crate::plan::types::Plan;

/// The most rows of any table; the rest are counted.
pub(super) const ROWS: usize = 15;

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

/// What the plan does, beside what it did before in the periods that both have.
pub(super) fn of_plan(report: &Report<'_>, plan: &Plan, comparison: Option<&Comparison>) -> String {
    let comparison = comparison.filter(|comparison| !comparison.overlap.is_empty());
    let moves = match comparison {
        Some(comparison) => moves::moves(report, comparison),
        None => moves::levels(report, plan),
    };
    let scarce = [scarce::scarce(report, plan, comparison), scarce::extra(report, plan, comparison)].concat();
    let materials = materials::told(report, plan, comparison);
    format!("{moves}{scarce}{materials}{}", prospects::prospects(report, plan, comparison))
}

/// The name of an activity with its label.
pub(super) fn name_of_activity(model: Option<&Model>, name: &Name) -> String {
    labelled(name, model.and_then(|model| model.activities.get(name)?.label.as_deref()))
}

/// Names in a row, each with what is to be said of it; the first of them where there are many.
pub(super) fn few(names: &[Name], of_each: impl Fn(&Name) -> String) -> String {
    let one = |name: &Name| format!("{}{}", Markdown(name.as_str()), of_each(name));
    let mut told: Vec<String> = names.iter().take(NAMES).map(one).collect();
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
pub(super) fn table(header: &[&str], numbers: usize, rows: &[Vec<String>], beyond: &str) -> String {
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

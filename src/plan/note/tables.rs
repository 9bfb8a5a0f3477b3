//! The parts of a note below its first sentence: what was edited, and in which order the others come.

use super::layout::{section, table};
use super::words::{signed, text, with_unit};
use super::{Report, Verdict, materials, moves, prospects, scarce};
use crate::plan::compare::Comparison;
use crate::plan::types::Plan;

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

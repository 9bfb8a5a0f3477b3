//! Reading the periods that a model plans, and the working days in them.

use std::collections::HashSet;

use super::by_period;
use super::calendar::{Calendar, EACH, PER_DAY};
use super::findings::{Findings, shown};
use super::most::MOST_PERIODS;
use super::named::name;
use super::number::Role;
use super::toml_types::{Node, Table, kind};
use crate::model::name::Name;
use crate::model::value::Horizon;

/// The periods and days that the keys of a model give.
pub(super) fn calendar(root: &Table<'_>, findings: &mut Findings) -> Calendar {
    let calendar = match labels(root, findings) {
        Some(labels) => Calendar::of(Horizon::of(labels), None),
        None if root.contains_key("periods") => Calendar::unreadable(),
        None => Calendar::default(),
    };
    match root.get("days") {
        Some(node) => {
            let days = by_period::value("days", node, Role::Days, &calendar, findings);
            calendar.with_days(days)
        }
        None => calendar,
    }
}

/// The names under `periods`; `None` where they are left out or hold a fault.
fn labels(root: &Table<'_>, findings: &mut Findings) -> Option<Vec<Name>> {
    let node = root.get("periods")?;
    let Some(list) = node.get_ref().as_array() else {
        let message = format!("`periods` must be a list of names, not {}", kind(node));
        findings.add(&node.span(), "wrong-type", message, "write it as periods = [\"2027-W01\", \"2027-W02\"]");
        return None;
    };
    if list.is_empty() {
        let message = "`periods` is empty, but a model plans at least one".to_owned();
        findings.add(&node.span(), "no-periods", message, "name the periods, or take the key out to plan a single one");
        return None;
    }
    if list.len() > MOST_PERIODS {
        let message = format!("{} periods are more than the {MOST_PERIODS} that one model may have", list.len());
        findings.add(&node.span(), "too-many", message, "plan fewer periods, or longer ones");
        return None;
    }
    let mut seen = HashSet::new();
    let labels: Vec<Name> = list.iter().filter_map(|item| label(item, &mut seen, findings)).collect();
    (labels.len() == list.len()).then_some(labels)
}

/// The name of one period, which is none of those `seen`.
fn label(item: &Node<'_>, seen: &mut HashSet<Name>, findings: &mut Findings) -> Option<Name> {
    let Some(text) = item.get_ref().as_str() else {
        let message = format!("`periods` holds names, not {}", kind(item));
        findings.add(&item.span(), "wrong-type", message, "put each name in double quotes");
        return None;
    };
    let label = name(text, &item.span(), findings)?;
    if [EACH, PER_DAY].contains(&text) {
        let message = format!("a period cannot be called `{text}`, which has a meaning of its own in values");
        findings.add(&item.span(), "bad-name", message, "give it another name");
        return None;
    }
    if !seen.insert(label.clone()) {
        let message = format!("period `{}` is given twice", shown(text));
        findings.add(&item.span(), "duplicate-period", message, "give each period a name of its own");
        return None;
    }
    Some(label)
}

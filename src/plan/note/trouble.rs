//! Why there is no plan, in a planner's words.

use super::Trouble;
use super::layout::ROWS;
use super::rules::{self, Place};
use super::words::{amount, count, listed, text, with_unit};
use crate::model::Model;
use crate::model::escape::{Markdown, Plain};
use crate::model::fault::{self, Fault, Faults};
use crate::model::read::is_folder_name;
use crate::solver::message::{Conflict, Growth, Rule};

/// Why a plan is held, in one plain sentence without a full stop. Not escaped.
#[must_use]
pub fn reason(trouble: Trouble<'_>, model: Option<&Model>) -> String {
    match trouble {
        Trouble::Faults(faults) => {
            let Some(first) = faults.reported.first() else { return "the model cannot be read".to_owned() };
            let place = first.place.as_ref().map_or(String::new(), |place| match part(first) {
                Some(part) => format!(" in {part}, line {}", place.line),
                None => format!(" in line {}", place.line),
            });
            let message: String = first.message.chars().take(300).collect();
            match faults.reported.len() + faults.more {
                1 => format!("the model has a fault{place}: {message}"),
                number => format!("the model has {number} faults, the first{place}: {message}"),
            }
        }
        Trouble::Infeasible(conflict) if conflict.rules.is_empty() => "the rules contradict each other".to_owned(),
        Trouble::Infeasible(conflict) => {
            let mut rules = rules::told(&stated(conflict, model), model);
            let more = rules.len().saturating_sub(ROWS);
            rules.truncate(ROWS);
            let more = if more > 0 { format!(" and {more} more") } else { String::new() };
            format!("these cannot all be kept: {}{more}", rules.join(", "))
        }
        Trouble::Unbounded(growth) if growth.rates.is_empty() => "nothing limits the aim".to_owned(),
        Trouble::Unbounded(growth) => {
            let mut names: Vec<String> = Vec::new();
            for name in growth.rates.iter().map(|(key, _)| Place::of(key, model).level()) {
                // What can grow in one period mostly can in others.
                if names.len() < ROWS && !names.contains(&name) {
                    names.push(name);
                }
            }
            format!("nothing limits {}", listed(&names))
        }
        Trouble::Undecided(why) => format!("the solver cannot tell: {}", why.trim_end_matches('.')),
    }
}

/// What stands below the first sentence of a note without a plan.
pub(super) fn told(trouble: Trouble<'_>, model: Option<&Model>) -> String {
    match trouble {
        Trouble::Faults(faults) => faults_told(faults),
        Trouble::Infeasible(conflict) => conflict_told(conflict, model),
        Trouble::Unbounded(growth) => growth_told(growth, model),
        Trouble::Undecided(why) => format!("\n{}\n", text(why)),
    }
}

/// The name of the part that a fault is in, where the model is in parts.
fn part(fault: &Fault) -> Option<String> {
    let folder = fault.path.parent()?.file_name()?;
    is_folder_name(folder).then(|| fault.path.file_name().unwrap_or_default().to_string_lossy().into_owned())
}

fn faults_told(faults: &Faults) -> String {
    let mut out = format!("\n## {}\n", heading(faults.reported.len() + faults.more));
    for fault in &faults.reported {
        out.push_str(&fault_told(fault));
    }
    if faults.more > 0 {
        out.push_str(&format!("\n… and {}.\n", count(faults.more, "more fault")));
    }
    out
}

fn heading(faults: usize) -> String {
    if faults == 1 { "What is wrong".to_owned() } else { format!("What is wrong: {}", count(faults, "fault")) }
}

fn fault_told(fault: &Fault) -> String {
    let file = fault.path.file_name().unwrap_or(fault.path.as_os_str()).to_string_lossy();
    let place = match &fault.place {
        Some(place) => format!(", line {}, column {}", place.line, place.column),
        None => String::new(),
    };
    let mut out = format!("\n{}{place}: **{}**\n", text(&file), text(&fault.message));
    if let Some(place) = &fault.place {
        out.push_str(&excerpt(place));
    }
    if !fault.help.is_empty() {
        out.push_str(&format!("\nCure: {}\n", text(&fault.help)));
    }
    out
}

/// The line and a caret, as an indented code block: one line of text cannot break out of it.
fn excerpt(place: &fault::Place) -> String {
    let shown = &place.excerpt;
    let characters = |from: usize, number: usize| shown.text.chars().skip(from).take(number).collect::<String>();
    let width = |text: &str| unicode_width::UnicodeWidthStr::width(Plain(text).to_string().as_str());
    let before = width(&characters(0, shown.before)) + usize::from(shown.cut_left);
    let marked = width(&characters(shown.before, place.width)).max(1);
    let (left, right) = (if shown.cut_left { "…" } else { "" }, if shown.cut_right { "…" } else { "" });
    format!("\n    {left}{}{right}\n    {}{}\n", Plain(&shown.text), " ".repeat(before), "^".repeat(marked))
}

fn conflict_told(conflict: &Conflict, model: Option<&Model>) -> String {
    if conflict.rules.is_empty() {
        return "\nWhich rules they are could not be told.\n".to_owned();
    }
    let mut out = "\n## These cannot all be kept\n\n".to_owned();
    let rules = rules::told(&stated(conflict, model), model);
    for rule in rules.iter().take(ROWS) {
        out.push_str(&format!("- {}\n", Markdown(rule)));
    }
    if rules.len() > ROWS {
        out.push_str(&format!("- … and {} more\n", rules.len() - ROWS));
    }
    out.push_str(if conflict.minimal {
        "\nEach of them is needed for the contradiction: give way in any one, and look again.\n"
    } else {
        "\nGive way in one of them, and look again.\n"
    });
    if !conflict.proven {
        out.push_str("This comes from the solver alone and has not been confirmed.\n");
    }
    out
}

/// The rules that people have stated: not that a level is at least 0, or that a prospect is not made, as long as there are others.
fn stated<'c>(conflict: &'c Conflict, model: Option<&Model>) -> Vec<&'c Rule> {
    let goes_without_saying = |rule: &&Rule| {
        let is_prospect = || Place::of(&rule.key, model).is_prospect(model);
        !rule.is_row && rule.bound.abs() <= 0.0 && (!rule.upper || is_prospect())
    };
    let (silent, stated): (Vec<&Rule>, Vec<&Rule>) = conflict.rules.iter().partition(goes_without_saying);
    if stated.is_empty() { silent } else { stated }
}

fn growth_told(growth: &Growth, model: Option<&Model>) -> String {
    if growth.rates.is_empty() {
        return "\nWhich activities they are could not be told.\n".to_owned();
    }
    let mut out = "\n## These can grow together without end\n\n".to_owned();
    for (key, rate) in growth.rates.iter().take(ROWS) {
        let place = Place::of(key, model);
        let way = if *rate < 0.0 { "falls" } else { "grows" };
        let by = with_unit(&amount(rate.abs()), place.unit(model));
        let period = place.period.map_or(String::new(), |period| format!(" in {}", Markdown(period)));
        out.push_str(&format!("- {} {way} by {by}{period}\n", Markdown(&place.level())));
    }
    if growth.rates.len() > ROWS {
        out.push_str(&format!("- … and {} more\n", growth.rates.len() - ROWS));
    }
    out.push_str("\nA price, a capacity or an upper bound is missing or mistyped.\n");
    if !growth.proven {
        out.push_str("This comes from the solver alone and has not been confirmed.\n");
    }
    out
}

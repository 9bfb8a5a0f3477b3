//! A finding as lines for people: what was found, what it means, what to do about it.

use std::path::Path;

use super::super::check::counted;
use super::super::demo::quoted;
use super::super::exit::shown;
use super::super::screen::{BAD, GOOD, HINT, Screen, WARN};
use crate::keep::verify::{Finding, Pair};
use crate::model::escape::Plain;
use crate::model::{Name, Value};
use crate::plan::Standing;
use crate::plan::compare::{Comparison, Move};
use crate::plan::difference::Difference;
use crate::plan::number;
use crate::plan::types::RULES;

/// The most lines of one kind that are told of one plan.
const ROWS: usize = 12;

pub(super) fn tell(screen: &mut Screen, pair: &Pair, finding: &Finding) {
    let look = match finding {
        _ if finding.is_failure() => BAD,
        Finding::Verified(_) | Finding::Retired => GOOD,
        _ => WARN,
    };
    screen.say(format_args!("{look}{}:{look:#} {}", plain(&pair.model), sentence(pair, finding)));
    if let Finding::Faulty(faults) = finding {
        screen.say(faults.terminal(true).to_string().trim_end_matches('\n'));
    }
    if let Finding::Differs(difference) | Finding::Edited(Some(difference)) = finding {
        for line in difference_told(difference) {
            screen.say(format_args!("  {line}"));
        }
    }
    let cure = cure(pair, finding);
    if !cure.is_empty() {
        screen.say(format_args!("  {HINT}{cure}{HINT:#}"));
    }
}

/// What was found, in a line without a full stop.
pub(super) fn sentence(pair: &Pair, finding: &Finding) -> String {
    let plan = plain(&pair.plan);
    match finding {
        Finding::Verified(_) => "verified".to_owned(),
        Finding::Differs(difference) if difference.line_ends_only => {
            "differs in its line ends only; the plan is the one worked out afresh".to_owned()
        }
        Finding::Differs(difference) if difference.in_bytes_only() => {
            "differs in its bytes only; aim, levels and states are those worked out afresh".to_owned()
        }
        Finding::Differs(_) => "differs from the plan worked out afresh".to_owned(),
        Finding::Baseless(why) => format!("differs: worked out afresh there is no plan: {}", Plain(why)),
        Finding::Edited(_) => "edited by hand: its seal does not fit".to_owned(),
        Finding::Unmerged(line) => {
            format!("not merged: {plan} holds the marks of a merge conflict, from line {line} on")
        }
        Finding::Damaged(why) => format!("damaged: {why}"),
        Finding::Foreign => format!("not ours: {plan} was not written by millreeve and is left alone"),
        Finding::Newer { what, found, known } => {
            format!("made by a newer millreeve: {what} {found}, this one knows up to {known}")
        }
        Finding::OldRules => format!("made under earlier rules; this millreeve follows rules {RULES}"),
        Finding::Stale => "stale: the model has been edited since the plan was made".to_owned(),
        Finding::Overtaken { standing, afresh } => {
            let was = match standing {
                Standing::Held(_) => "held, though there is a plan now",
                _ => "marked as retired, though the model is there",
            };
            format!("stale: {was}, with an aim of {}", digits(afresh.aim))
        }
        Finding::Held { reason, now } if reason == now => format!("held, as it should be: {}", Plain(reason)),
        Finding::Held { reason, now } => {
            format!("held, as it should be: {}; worked out afresh: {}", Plain(reason), Plain(now))
        }
        Finding::Missing(afresh) => format!("no plan, though there could be one with an aim of {}", digits(afresh.aim)),
        Finding::Unplannable(why) => format!("no plan, as it should be: {}", Plain(why)),
        Finding::Faulty(faults) => {
            format!("model faulty: {}", counted(faults.reported.len() + faults.more, "fault"))
        }
        Finding::Retired => "retired, as it should be: the model is gone".to_owned(),
        Finding::Orphaned => format!("the model is gone, and {plan} does not say so"),
        Finding::Unread(why) => why.clone(),
        Finding::Untold(why) => format!("cannot be worked out: {}", Plain(why)),
    }
}

/// What to do about it; empty where nothing is to be done or nothing can be said.
pub(super) fn cure(pair: &Pair, finding: &Finding) -> String {
    let plan = plain(&pair.plan);
    let once = format!("millreeve once {}", quoted(&pair.model));
    match finding {
        Finding::Stale | Finding::Overtaken { .. } | Finding::OldRules => format!("{once} brings it up to date"),
        Finding::Missing(_) => format!("{once} makes it"),
        Finding::Edited(_) | Finding::Unmerged(_) | Finding::Damaged(_) => format!("{once} writes it as it should be"),
        Finding::Differs(difference) if difference.line_ends_only => {
            format!("{once} writes it as it should be; `*.plan.toml -text` in .gitattributes keeps it so")
        }
        // It bears a seal and answers its model, so nothing but working it out can tell that it is wrong.
        Finding::Differs(_) | Finding::Baseless(_) => {
            format!("delete {plan} and the folder .millreeve, then {once} works it out again")
        }
        Finding::Foreign => "move it away, or rename the model".to_owned(),
        Finding::Newer { .. } => "verify it with that version, or a newer one".to_owned(),
        Finding::Orphaned => {
            let folder = pair.plan.parent().filter(|folder| !folder.as_os_str().is_empty());
            format!("millreeve once {} marks it as retired; or delete it", quoted(folder.unwrap_or(Path::new("."))))
        }
        Finding::Verified(_)
        | Finding::Held { .. }
        | Finding::Unplannable(_)
        | Finding::Faulty(_)
        | Finding::Retired
        | Finding::Unread(_)
        | Finding::Untold(_) => String::new(),
    }
}

/// A difference of plans, line by line: aim, levels, states, what entered and left; bytes where those agree.
fn difference_told(difference: &Difference) -> Vec<String> {
    if difference.line_ends_only {
        return Vec::new();
    }
    if difference.in_bytes_only() {
        return bytes_told(difference);
    }
    let Comparison { moved, entered, left, aim, .. } = &difference.comparison;
    let mut lines = Vec::new();
    match aim {
        Some((before, after)) if digits(*before) != digits(*after) => {
            lines.push(format!("aim: {} in the file, {} afresh", digits(*before), digits(*after)));
        }
        Some(_) => {}
        None => lines.push("aim: another sense or currency than afresh".to_owned()),
    }
    for told in moved.iter().take(ROWS) {
        lines.push(level_told(told));
    }
    more(&mut lines, moved.len(), "level");
    for (name, before, after) in difference.states.iter().take(ROWS) {
        lines.push(format!("{name}: {} in the file, {} afresh", before.words(), after.words()));
    }
    more(&mut lines, difference.states.len(), "state");
    for (names, words) in [(entered, "made afresh, not in the file"), (left, "made in the file, not afresh")] {
        if !names.is_empty() {
            lines.push(format!("{words}: {}", listed(names)));
        }
    }
    lines
}

fn bytes_told(difference: &Difference) -> Vec<String> {
    let told = difference.lines.iter().map(|pair| {
        let side = |line: &str| if line.is_empty() { "nothing".to_owned() } else { format!("`{}`", Plain(line)) };
        format!("line {}: {} in the file, {} afresh", pair.number, side(&pair.written), side(&pair.afresh))
    });
    let mut lines: Vec<String> = told.collect();
    more(&mut lines, difference.lines.len() + difference.more_lines, "line");
    lines
}

/// How many are left out beyond those that were told.
fn more(lines: &mut Vec<String>, all: usize, what: &str) {
    let shown = if what == "line" { lines.len() } else { ROWS };
    if all > shown {
        lines.push(format!("… and {}", counted(all - shown, &format!("more {what}"))));
    }
}

fn listed(names: &[Name]) -> String {
    let mut told: Vec<&str> = names.iter().take(ROWS).map(Name::as_str).collect();
    let more = names.len().saturating_sub(ROWS);
    let rest = format!("{more} more");
    if more > 0 {
        told.push(&rest);
    }
    told.join(", ")
}

/// A level that differs: with all digits that a plan has, in the first period in which it does.
fn level_told(told: &Move) -> String {
    if let [first, more @ ..] = told.periods.as_slice() {
        let more = if more.is_empty() { String::new() } else { format!(" (and {} more periods)", more.len()) };
        let (file, afresh) = (digits(first.before), digits(first.after));
        return format!("{} in {}: {file} in the file, {afresh} afresh{more}", told.name, first.period);
    }
    let side = |level: &Option<Value>| level.as_ref().map_or("none".to_owned(), levels);
    format!("{}: {} in the file, {} afresh", told.name, side(&told.before), side(&told.after))
}

/// A level: its number, or its numbers one after the other, with all digits that a plan has.
fn levels(value: &Value) -> String {
    value.numbers().iter().map(|&number| digits(number)).collect::<Vec<_>>().join(" ")
}

fn digits(number: f64) -> String {
    let mut text = String::new();
    number::push(&mut text, number);
    text
}

/// A path, escaped.
fn plain(path: &Path) -> String {
    shown(path).trim_matches('`').to_owned()
}

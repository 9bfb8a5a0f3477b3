//! What differs between two plans, and the events that others are told of.

use serde::Serialize;

use super::make::NIL;
use super::number::rounded;
use super::types::{Plan, PlannedActivity, PlannedResource, Standing, State};
use crate::model::{Name, Value};

/// What differs between two plans. Lists are in byte order of names.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Comparison {
    /// Levels that moved by more than 1e-9 of themselves.
    pub moved: Vec<Move>,
    /// Activities that are made now and were not.
    pub entered: Vec<Name>,
    /// Activities that were made and are not now, or are gone.
    pub left: Vec<Name>,
    /// Resources that have become scarce.
    pub binds: Vec<Name>,
    /// Resources that are no longer scarce, or are gone.
    pub eases: Vec<Name>,
    /// Prospects that would pay now and would not have before.
    pub would_enter: Vec<Name>,
    /// The aim before and after, where the two can be compared: both large or both small, in one currency.
    pub aim: Option<(f64, f64)>,
}

/// A level that moved.
#[derive(Clone, Debug, PartialEq)]
pub struct Move {
    /// Of which activity.
    pub name: Name,
    /// The level before; `None` where there was no such activity.
    pub before: Option<Value>,
    /// The level after; `None` where the activity is gone.
    pub after: Option<Value>,
}

/// Something others are told of.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(tag = "event", rename_all = "snake_case")]
pub enum Event {
    /// An activity enters the mix.
    Entered {
        /// Which.
        name: String,
    },
    /// An activity leaves the mix.
    Left {
        /// Which.
        name: String,
    },
    /// A prospect's price has passed its break-even.
    WouldEnter {
        /// Which.
        name: String,
        /// Its price (its cost, where costs are to be small).
        offered: f64,
        /// What it has passed.
        break_even: f64,
    },
    /// A resource has become scarce.
    Binds {
        /// Which.
        name: String,
        /// What one unit more is worth, where that is known.
        #[serde(skip_serializing_if = "Option::is_none")]
        worth_of_more: Option<f64>,
    },
    /// A resource is no longer scarce.
    Eases {
        /// Which.
        name: String,
    },
    /// The aim moved by more than a set share of itself.
    Moved {
        /// The aim before.
        before: f64,
        /// The aim after.
        after: f64,
    },
    /// The model can no longer be planned.
    Held {
        /// Why, in one sentence.
        reason: String,
    },
    /// The model can be planned again.
    Mended,
}

/// What differs between `before` and `after`.
#[must_use]
pub fn compare(before: &Plan, after: &Plan) -> Comparison {
    let mut comparison = Comparison::default();
    let comparable = before.minimise == after.minimise && before.currency == after.currency;
    comparison.aim = comparable.then_some((before.aim, after.aim));
    for (old, new) in paired(&before.activities, &after.activities, |planned| &planned.name) {
        let Some(name) = new.or(old).map(|planned| &planned.name) else { continue };
        let (was_made, is_made) = (old.is_some_and(is_made), new.is_some_and(is_made));
        match (was_made, is_made) {
            (false, true) => comparison.entered.push(name.clone()),
            (true, false) => comparison.left.push(name.clone()),
            _ => {}
        }
        if new.is_some_and(would_enter) && !old.is_some_and(would_enter) {
            comparison.would_enter.push(name.clone());
        }
        let (before, after) = (old.map(|planned| &planned.level), new.map(|planned| &planned.level));
        if (was_made || is_made) && differ(before, after) {
            comparison.moved.push(Move { name: name.clone(), before: before.cloned(), after: after.cloned() });
        }
    }
    for (old, new) in paired(&before.resources, &after.resources, |planned| &planned.name) {
        let Some(name) = new.or(old).map(|planned| &planned.name) else { continue };
        match (old.is_some_and(is_scarce), new.is_some_and(is_scarce)) {
            (false, true) => comparison.binds.push(name.clone()),
            (true, false) => comparison.eases.push(name.clone()),
            _ => {}
        }
    }
    comparison
}

/// The events of `after`, with `before` as the plan that stood last. `share` is that of the aim from which a move is told.
///
/// A first plan has no events but prospects that would pay.
#[must_use]
pub fn events(before: Option<&Plan>, after: &Plan, share: f64) -> Vec<Event> {
    let Some(before) = before else {
        let paying = after.activities.iter().filter(|planned| would_enter(planned));
        return paying.filter_map(|planned| would_enter_event(after, &planned.name)).collect();
    };
    let told = compare(before, after);
    let mut events: Vec<Event> = standing_event(Some(&before.standing), &after.standing).into_iter().collect();
    events.extend(told.entered.iter().map(|name| Event::Entered { name: name.to_string() }));
    events.extend(told.left.iter().map(|name| Event::Left { name: name.to_string() }));
    events.extend(told.would_enter.iter().filter_map(|name| would_enter_event(after, name)));
    events.extend(
        told.binds.iter().map(|name| Event::Binds {
            name: name.to_string(),
            worth_of_more: find(&after.resources, name, |planned| &planned.name)
                .and_then(|planned| planned.worth_of_more.map(rounded)),
        }),
    );
    events.extend(told.eases.iter().map(|name| Event::Eases { name: name.to_string() }));
    if let Some((before, after)) = told.aim
        && moved(before, after)
        && (after - before).abs() > share * before.abs()
    {
        events.push(Event::Moved { before: rounded(before), after: rounded(after) });
    }
    events
}

/// The event of a plan's standing turning from `before` to `after`, if others are told of it.
#[must_use]
pub fn standing_event(before: Option<&Standing>, after: &Standing) -> Option<Event> {
    let was_held = matches!(before, Some(Standing::Held(_)));
    match after {
        Standing::Held(reason) if !was_held => Some(Event::Held { reason: reason.clone() }),
        Standing::Current if was_held => Some(Event::Mended),
        _ => None,
    }
}

/// Whether an activity is made at all.
#[must_use]
pub fn is_made(planned: &PlannedActivity) -> bool {
    planned.level.numbers().iter().any(|level| level.abs() > 0.0)
}

/// Whether a resource is used up, and more of it would be worth something as far as that is known.
#[must_use]
pub fn is_scarce(planned: &PlannedResource) -> bool {
    let used_up = planned.spare.as_ref().is_some_and(|spare| spare.numbers().iter().any(|&left| left <= 0.0));
    used_up && planned.worth_of_more.is_none_or(|worth| worth > 0.0)
}

/// Whether a prospect's price has passed its break-even, by more than 1e-9 of it.
#[must_use]
pub fn would_enter(planned: &PlannedActivity) -> bool {
    let (Some(loses), Some(break_even)) = (planned.loses, planned.break_even) else { return false };
    planned.state == State::Prospect && loses < -NIL * break_even.abs()
}

/// What an activity earns (costs, where costs are to be small), from its break-even and what it loses.
#[must_use]
pub fn offered(planned: &PlannedActivity, minimise: bool) -> Option<f64> {
    let (loses, break_even) = (planned.loses?, planned.break_even?);
    Some(if minimise { break_even + loses } else { break_even - loses })
}

/// Whether a number moved by more than 1e-9 of itself.
pub(super) fn moved(before: f64, after: f64) -> bool {
    (after - before).abs() > NIL * before.abs().max(after.abs())
}

fn differ(before: Option<&Value>, after: Option<&Value>) -> bool {
    match (before, after) {
        (Some(before), Some(after)) => {
            let (before, after) = (before.numbers(), after.numbers());
            before.len() != after.len() || before.iter().zip(after).any(|(&old, &new)| moved(old, new))
        }
        (None, None) => false,
        _ => true,
    }
}

fn would_enter_event(plan: &Plan, name: &Name) -> Option<Event> {
    let planned = find(&plan.activities, name, |planned| &planned.name)?;
    let offered = offered(planned, plan.minimise)?;
    let (offered, break_even) = (rounded(offered), rounded(planned.break_even?));
    Some(Event::WouldEnter { name: name.to_string(), offered, break_even })
}

pub(super) fn find<'a, T>(list: &'a [T], name: &Name, name_of: impl Fn(&T) -> &Name) -> Option<&'a T> {
    list.binary_search_by(|entry| name_of(entry).cmp(name)).ok().map(|at| &list[at])
}

/// The entries of two lists in byte order of names, those of one name side by side.
fn paired<'a, T>(
    before: &'a [T],
    after: &'a [T],
    name_of: impl Fn(&T) -> &Name,
) -> Vec<(Option<&'a T>, Option<&'a T>)> {
    let (mut before, mut after) = (before.iter().peekable(), after.iter().peekable());
    let mut pairs = Vec::with_capacity(before.len().max(after.len()));
    while before.peek().is_some() || after.peek().is_some() {
        let order = match (before.peek(), after.peek()) {
            (Some(old), Some(new)) => name_of(old).cmp(name_of(new)),
            (Some(_), None) => std::cmp::Ordering::Less,
            _ => std::cmp::Ordering::Greater,
        };
        pairs.push((before.next_if(|_| order.is_le()), after.next_if(|_| order.is_ge())));
    }
    pairs
}

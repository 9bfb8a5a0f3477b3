//! What differs between two plans, and the events that others are told of.

use serde::Serialize;

use super::make::NIL;
use super::number::rounded;
use super::overlap::Overlap;
use super::types::{Plan, PlannedActivity, PlannedResource, Standing, State};
use crate::model::{Name, Period, Value};

/// What differs between two plans, in the periods that both have. Lists are in byte order of names.
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
    /// The aim before and after, where the two can be compared: both large or both small, in one currency, of the same periods.
    pub aim: Option<(f64, f64)>,
    /// Which periods both have.
    pub overlap: Overlap,
}

/// A level that moved.
#[derive(Clone, Debug, PartialEq)]
pub struct Move {
    /// Of which activity.
    pub name: Name,
    /// The level before, in the periods that both plans have; `None` where there was no such activity.
    pub before: Option<Value>,
    /// The level after, in those periods; `None` where the activity is gone.
    pub after: Option<Value>,
    /// The periods in which it moved, in order; empty where they have no names.
    pub periods: Vec<PeriodMove>,
}

/// A level that moved in one period.
#[derive(Clone, Debug, PartialEq)]
pub struct PeriodMove {
    /// Which.
    pub period: Name,
    /// Where it stands among the periods that both plans have, from 0.
    pub place: usize,
    /// The level before; 0 where there was no such activity.
    pub before: f64,
    /// The level after; 0 where the activity is gone.
    pub after: f64,
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
        /// The period in which it would pay most, where they have names.
        #[serde(skip_serializing_if = "Option::is_none")]
        period: Option<String>,
    },
    /// A resource has become scarce.
    Binds {
        /// Which.
        name: String,
        /// What one unit more is worth, where that is known; the most of all periods.
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
    let overlap = Overlap::of(&before.periods, &after.periods);
    let mut comparison = Comparison::default();
    let comparable = before.minimise == after.minimise && before.currency == after.currency && overlap.is_whole();
    comparison.aim = comparable.then_some((before.aim, after.aim));
    for (old, new) in paired(&before.activities, &after.activities, |planned| &planned.name) {
        let Some(name) = new.or(old).map(|planned| &planned.name) else { continue };
        let (before, after) =
            (old.map(|planned| overlap.of_old(&planned.level)), new.map(|planned| overlap.of_new(&planned.level)));
        let (was_made, is_made) = (before.as_ref().is_some_and(is_any), after.as_ref().is_some_and(is_any));
        match (was_made, is_made) {
            (false, true) => comparison.entered.push(name.clone()),
            (true, false) => comparison.left.push(name.clone()),
            _ => {}
        }
        if new.is_some_and(would_enter) && !old.is_some_and(would_enter) {
            comparison.would_enter.push(name.clone());
        }
        if (was_made || is_made) && differ(before.as_ref(), after.as_ref()) {
            let periods = period_moves(&overlap, before.as_ref(), after.as_ref());
            comparison.moved.push(Move { name: name.clone(), before, after, periods });
        }
    }
    for (old, new) in paired(&before.resources, &after.resources, |planned| &planned.name) {
        let Some(name) = new.or(old).map(|planned| &planned.name) else { continue };
        let was_scarce = old.is_some_and(|old| overlap.old_periods().any(|period| is_scarce_in(old, period)));
        let is_scarce = new.is_some_and(|new| overlap.new_periods().any(|period| is_scarce_in(new, period)));
        match (was_scarce, is_scarce) {
            (false, true) => comparison.binds.push(name.clone()),
            (true, false) => comparison.eases.push(name.clone()),
            _ => {}
        }
    }
    comparison.overlap = overlap;
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
    events.extend(told.binds.iter().map(|name| {
        Event::Binds {
            name: name.to_string(),
            worth_of_more: find(&after.resources, name, |planned| &planned.name)
                .and_then(|planned| planned.worth_of_more.as_ref())
                .map(|worth| rounded(greatest(worth))),
        }
    }));
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
    is_any(&planned.level)
}

/// Whether there is any of it in some period.
fn is_any(value: &Value) -> bool {
    value.numbers().iter().any(|number| number.abs() > 0.0)
}

/// Whether a resource is used up in some period, and more of it would be worth something as far as that is known.
#[must_use]
pub fn is_scarce(planned: &PlannedResource) -> bool {
    let number = |value: &Value, place: usize| value.numbers().get(place).or(value.numbers().last()).copied();
    let mut places = 0..planned.used.numbers().len();
    places.any(|place| is_scarce_where(planned, |value| number(value, place).unwrap_or(0.0)))
}

/// Whether a resource is used up in a period, and more of it would be worth something as far as that is known.
#[must_use]
pub fn is_scarce_in(planned: &PlannedResource, period: Period) -> bool {
    is_scarce_where(planned, |value| value.at(period))
}

/// Where there is extra capacity, the other is used up as soon as that is taken, though there may be more of it.
fn is_scarce_where(planned: &PlannedResource, at: impl Fn(&Value) -> f64) -> bool {
    let worth = planned.worth_of_more.as_ref().map(&at);
    let used_up = planned.spare.as_ref().is_some_and(|spare| at(spare) <= 0.0);
    let has_extra = planned.surge.is_some() && worth.is_some();
    (used_up || has_extra) && worth.is_none_or(|worth| worth > 0.0)
}

/// The greatest number of a value.
pub(super) fn greatest(value: &Value) -> f64 {
    value.numbers().iter().copied().fold(f64::NEG_INFINITY, f64::max)
}

/// Whether a prospect's price has passed its break-even in some period, by more than 1e-9 of it.
#[must_use]
pub fn would_enter(planned: &PlannedActivity) -> bool {
    let (Some(loses), Some(break_even)) = (&planned.loses, &planned.break_even) else { return false };
    let pays = |(loses, even): (&f64, &f64)| *loses < -NIL * even.abs();
    planned.state.is(State::Prospect) && loses.numbers().iter().zip(break_even.numbers()).any(pays)
}

/// An activity as it is priced out in one period.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct PricedOut {
    /// Which period, by its place in the horizon.
    pub place: usize,
    /// What it earns (costs, where costs are to be small).
    pub offered: f64,
    /// The price above which (the cost below which) one unit more would pay.
    pub break_even: f64,
    /// What one unit more would cost the aim; negative where it would pay.
    pub loses: f64,
}

/// How an activity is priced out in the period in which it is nearest to paying, by what it loses for each unit of what it is offered.
#[must_use]
pub fn nearest_to_paying(planned: &PlannedActivity, minimise: bool) -> Option<PricedOut> {
    let (loses, even) = (planned.loses.as_ref()?, planned.break_even.as_ref()?);
    let states = planned.state.all();
    // Where its bounds leave it no choice, it is not its price that keeps it out.
    let is_out = |place: usize| matches!(states.get(place).or(states.first()), Some(State::Idle | State::Prospect));
    let priced = loses.numbers().iter().zip(even.numbers()).enumerate().filter(|&(place, _)| is_out(place));
    let priced = priced.map(|(place, (&loses, &break_even))| {
        let offered = if minimise { break_even + loses } else { break_even - loses };
        PricedOut { place, offered, break_even, loses }
    });
    priced.min_by(|a, b| a.share().total_cmp(&b.share()))
}

impl PricedOut {
    /// What it loses for each unit of what it is offered.
    #[must_use]
    pub fn share(&self) -> f64 {
        self.loses / self.offered.abs().max(f64::MIN_POSITIVE)
    }
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

fn period_moves(overlap: &Overlap, before: Option<&Value>, after: Option<&Value>) -> Vec<PeriodMove> {
    let at = |value: Option<&Value>, place: usize| value.and_then(|value| value.numbers().get(place)).copied();
    let moves = overlap.shared.iter().enumerate().map(|(place, period)| PeriodMove {
        period: period.clone(),
        place,
        before: at(before, place).unwrap_or(0.0),
        after: at(after, place).unwrap_or(0.0),
    });
    moves.filter(|told| moved(told.before, told.after)).collect()
}

fn would_enter_event(plan: &Plan, name: &Name) -> Option<Event> {
    let planned = find(&plan.activities, name, |planned| &planned.name)?;
    let told = nearest_to_paying(planned, plan.minimise)?;
    Some(Event::WouldEnter {
        name: name.to_string(),
        offered: rounded(told.offered),
        break_even: rounded(told.break_even),
        period: plan.periods.get(told.place).map(Name::to_string),
    })
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

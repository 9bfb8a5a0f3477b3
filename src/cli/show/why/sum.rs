//! What one unit of an activity earns and takes, line by line, at the worths of the plan.

use std::collections::BTreeMap;

use crate::model::{Activity, Aim, Bound, Limit, Model, Name, Period, Resource, Term, Value};
use crate::plan::{Plan, PlannedActivity, State};

/// One line of the sum.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Line {
    /// What it is about.
    pub(super) what: What,
    /// What it adds to the aim's better side, per unit of the activity.
    pub(super) amount: f64,
}

/// What a line is about.
#[derive(Clone, Debug, PartialEq)]
pub(super) enum What {
    Price,
    Cost,
    /// So much of a resource, at what it is worth and costs per unit.
    Resource {
        name: Name,
        rate: f64,
        worth: f64,
        cost: f64,
    },
    /// So much of what a limit allows, at what that is worth per unit.
    Limit {
        name: Name,
        rate: f64,
        worth: f64,
    },
    /// What minimum loads that bind take or give; a plan does not say their worth, so this is what is left.
    Loads {
        names: Vec<Name>,
    },
}

/// The sum of an activity.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Sum {
    pub(super) lines: Vec<Line>,
    /// What one unit more gains (loses, if negative).
    pub(super) gain: f64,
}

/// Why there is no sum.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(super) enum NoSum {
    /// The plan leaves this worth out, as others are as good.
    Worth(String),
    /// A minimum load binds, and this activity's own gain is not known to tell its worth by.
    Load(Name),
    /// The plan has several periods.
    Periods,
}

/// Price less cost, less what is used at its worth, less what is taken of limits at their worth.
pub(super) fn of(model: &Model, plan: &Plan, planned: &PlannedActivity, activity: &Activity) -> Result<Sum, NoSum> {
    let mut periods = model.horizon.periods();
    let (Some(period), None) = (periods.next(), periods.next()) else { return Err(NoSum::Periods) };
    let mut lines = Vec::new();
    if model.aim == Aim::Maximise {
        lines.push(Line { what: What::Price, amount: activity.price.at(period) });
    }
    lines.push(Line { what: What::Cost, amount: 0.0 - activity.cost.at(period) });
    let mut loads = Vec::new();
    for (name, rate) in &activity.uses {
        let Some(resource) = model.resources.get(name) else { continue };
        let worth = worth_of_resource(plan, name, resource, period)?;
        if worth.is_none() {
            loads.push(name.clone());
        }
        let (rate, worth, cost) = (rate.at(period), worth.unwrap_or(0.0), resource.cost.at(period));
        let what = What::Resource { name: name.clone(), rate, worth, cost };
        lines.push(Line { what, amount: 0.0 - rate * (worth + cost) });
    }
    for (name, limit) in &model.limits {
        let worth = worth_of_limit(plan, name)?;
        let rate = coefficient(limit, worth, &planned.name, activity, period);
        if rate != 0.0 {
            lines.push(Line { what: What::Limit { name: name.clone(), rate, worth }, amount: 0.0 - rate * worth });
        }
    }
    let mut gain: f64 = lines.iter().map(|line| line.amount).sum();
    if let Some(first) = loads.first() {
        let own = own_gain(planned).ok_or_else(|| NoSum::Load(first.clone()))?;
        lines.push(Line { what: What::Loads { names: loads }, amount: own - gain });
        gain = own;
    }
    // A sum whose terms cancel is 0: what is left below the tenth digit of its terms is how the plan's numbers were rounded.
    let size: f64 = lines.iter().map(|line| line.amount.abs()).sum();
    if gain.abs() <= 1e-8 * size {
        gain = 0.0;
    }
    Ok(Sum { lines, gain })
}

/// What one unit gains by the plan itself, where it says so.
fn own_gain(planned: &PlannedActivity) -> Option<f64> {
    match planned.state {
        State::InTheMix => Some(0.0),
        State::Idle | State::Prospect => planned.loses.map(|loses| 0.0 - loses),
        State::AtItsMost | State::AtItsLeast | State::Fixed => None,
    }
}

/// The worth of a resource; `None` where its minimum load binds, of which the plan says nothing.
fn worth_of_resource(plan: &Plan, name: &Name, resource: &Resource, period: Period) -> Result<Option<f64>, NoSum> {
    let planned = plan.resources.iter().find(|planned| planned.name == *name);
    let used = planned.map(|planned| planned.used.at(period));
    if used == Some(resource.at_least.at(period)) {
        return Ok(None);
    }
    if resource.capacity.at(period).is_infinite() {
        return Ok(Some(0.0));
    }
    let worth = planned.and_then(|planned| planned.worth_of_more);
    worth.map(Some).ok_or_else(|| NoSum::Worth(name.to_string()))
}

fn worth_of_limit(plan: &Plan, name: &Name) -> Result<f64, NoSum> {
    let planned = plan.limits.iter().find(|planned| planned.name == *name);
    planned.and_then(|planned| planned.worth_of_more).ok_or_else(|| NoSum::Worth(name.to_string()))
}

/// How much of a limit one unit takes: its terms, less what the bound allows for it where there is a `per`. The worth tells
/// which bound that is: positive where more is allowed by a larger one.
fn coefficient(limit: &Limit, worth: f64, name: &Name, activity: &Activity, period: Period) -> f64 {
    let terms = total(&limit.terms, name, activity, period);
    let Some(per) = &limit.per else { return terms };
    let bound = match &limit.bound {
        Bound::Equals(value) => value.at(period),
        Bound::Between(least, most) => {
            let (first, other) = if worth < 0.0 { (least, most) } else { (most, least) };
            let first = first.at(period);
            if first.is_finite() { first } else { other.at(period) }
        }
    };
    terms - bound * total(per, name, activity, period)
}

/// What one unit of an activity adds to a sum of terms.
pub(super) fn total(terms: &BTreeMap<Term, Value>, name: &Name, activity: &Activity, period: Period) -> f64 {
    let counts = |term: &Term| match term {
        Term::Activity(other) => other == name,
        Term::Tag(tag) => activity.tags.contains(tag),
        Term::All => true,
        Term::Material(..) | Term::Surge(..) => false,
    };
    terms.iter().filter(|(term, _)| counts(term)).map(|(_, value)| value.at(period)).sum()
}

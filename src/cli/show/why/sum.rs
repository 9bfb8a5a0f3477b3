//! What one unit of an activity in a period earns and takes, line by line, at the worths of the plan.

use std::collections::BTreeMap;

use crate::model::{Activity, Aim, Bound, Limit, Model, Name, Over, Period, Resource, Term, Value};
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
    /// So much of a material drawn, at what that is worth at hand.
    Draws {
        name: Name,
        rate: f64,
        worth: f64,
    },
    /// So much of a material made, at what that is worth when it is there: `None` where that is after the last period.
    Makes {
        name: Name,
        rate: f64,
        worth: f64,
        arrives: Option<Period>,
    },
    /// So much of what a limit allows, at what that is worth per unit.
    Limit {
        name: Name,
        rate: f64,
        worth: f64,
    },
    /// What bounds take or give of which a plan does not say the worth, so that this is what is left.
    Left(Vec<Untold>),
}

/// A bound of which a plan does not say the worth.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(super) enum Untold {
    /// The minimum load of a resource binds.
    Load(Name),
    /// The level may not change more from the period before, or to the one after.
    Change,
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
    /// A bound without a told worth binds, and this activity's own gain is not known to tell that by.
    Untold(Untold),
}

/// A line for each thing that the activity takes or gives.
struct Adder<'a> {
    model: &'a Model,
    plan: &'a Plan,
    planned: &'a PlannedActivity,
    activity: &'a Activity,
    period: Period,
    lines: Vec<Line>,
    untold: Vec<Untold>,
}

/// Price less cost, less what is used and drawn at its worth, with what is made at its worth, less what is taken of limits at their
/// worth.
pub(super) fn of(
    model: &Model,
    plan: &Plan,
    planned: &PlannedActivity,
    activity: &Activity,
    period: Period,
) -> Result<Sum, NoSum> {
    let mut adder = Adder { model, plan, planned, activity, period, lines: Vec::new(), untold: Vec::new() };
    adder.own();
    adder.resources()?;
    adder.materials()?;
    adder.limits()?;
    adder.change();
    adder.sum()
}

impl Adder<'_> {
    fn add(&mut self, what: What, amount: f64) {
        self.lines.push(Line { what, amount: amount + 0.0 });
    }

    fn own(&mut self) {
        if self.model.aim == Aim::Maximise {
            self.add(What::Price, self.activity.price.at(self.period));
        }
        self.add(What::Cost, 0.0 - self.activity.cost.at(self.period));
    }

    fn resources(&mut self) -> Result<(), NoSum> {
        let period = self.period;
        for (name, rate) in &self.activity.uses {
            let Some(resource) = self.model.resources.get(name) else { continue };
            let worth = worth_of_resource(self.plan, name, resource, period)?;
            if worth.is_none() {
                self.untold.push(Untold::Load(name.clone()));
            }
            let (rate, worth, cost) = (rate.at(period), worth.unwrap_or(0.0), resource.cost.at(period));
            self.add(What::Resource { name: name.clone(), rate, worth, cost }, 0.0 - rate * (worth + cost));
        }
        Ok(())
    }

    fn materials(&mut self) -> Result<(), NoSum> {
        let (activity, period) = (self.activity, self.period);
        for (name, rate) in &activity.draws {
            let (rate, worth) = (rate.at(period), worth_of_material(self.plan, name, period)?);
            self.add(What::Draws { name: name.clone(), rate, worth }, 0.0 - rate * worth);
        }
        let arrives = self.model.horizon.periods().find(|later| later.before(activity.lead) == Some(period));
        for (name, rate) in &activity.makes {
            let rate = rate.at(period);
            let worth = arrives.map_or(Ok(0.0), |arrives| worth_of_material(self.plan, name, arrives))?;
            self.add(What::Makes { name: name.clone(), rate, worth, arrives }, rate * worth);
        }
        Ok(())
    }

    fn limits(&mut self) -> Result<(), NoSum> {
        let period = self.period;
        for (name, limit) in self.model.limits.iter().filter(|(_, limit)| covers(&limit.over, period)) {
            let worth = worth_of_limit(self.plan, name, limit, self.planned, self.activity, period)?;
            let rate = coefficient(limit, worth, &self.planned.name, self.activity, period);
            if rate != 0.0 {
                self.add(What::Limit { name: name.clone(), rate, worth }, 0.0 - rate * worth);
            }
        }
        Ok(())
    }

    /// Whether the change from the period before, or to the one after, is as large as it may be.
    fn change(&mut self) {
        let later = self.model.horizon.periods().find(|later| later.before(1) == Some(self.period));
        let binds = [Some(self.period), later].into_iter().flatten().any(|at| {
            let (most, level) = (self.activity.change_at_most.at(at), self.planned.level.at(at));
            let Some(before) = at.before(1).map(|before| self.planned.level.at(before)) else { return false };
            // A plan keeps ten digits of each level.
            let rounding = 2e-9 * level.abs().max(before.abs()).max(most);
            most.is_finite() && (level - before).abs() >= most - rounding
        });
        if binds {
            self.untold.push(Untold::Change);
        }
    }

    fn sum(mut self) -> Result<Sum, NoSum> {
        let mut gain: f64 = self.lines.iter().map(|line| line.amount).sum();
        if let Some(first) = self.untold.first() {
            let own = own_gain(self.planned, self.period).ok_or_else(|| NoSum::Untold(first.clone()))?;
            let left = std::mem::take(&mut self.untold);
            self.lines.push(Line { what: What::Left(left), amount: own - gain });
            gain = own;
        }
        // A sum whose terms cancel is 0: what is left below the tenth digit of its terms is how the plan's numbers were rounded.
        let size: f64 = self.lines.iter().map(|line| line.amount.abs()).sum();
        if gain.abs() <= 1e-8 * size {
            gain = 0.0;
        }
        Ok(Sum { lines: self.lines, gain })
    }
}

/// What one unit gains by the plan itself, where it says so.
fn own_gain(planned: &PlannedActivity, period: Period) -> Option<f64> {
    match planned.state.at(period)? {
        State::InTheMix => Some(0.0),
        _ => planned.loses.as_ref().map(|loses| 0.0 - loses.at(period)),
    }
}

/// The worth of a resource; `None` where its minimum load binds, of which the plan says nothing.
fn worth_of_resource(plan: &Plan, name: &Name, resource: &Resource, period: Period) -> Result<Option<f64>, NoSum> {
    let planned = plan.resources.iter().find(|planned| planned.name == *name);
    let extra = |planned: &crate::plan::PlannedResource| planned.surge.as_ref().map_or(0.0, |surge| surge.at(period));
    let own = planned.map(|planned| planned.used.at(period) - extra(planned));
    if own == Some(resource.at_least.at(period)) {
        return Ok(None);
    }
    if resource.capacity.at(period).is_infinite() {
        return Ok(Some(0.0));
    }
    let worth = planned.and_then(|planned| planned.worth_of_more.as_ref());
    worth.map(|worth| Some(worth.at(period))).ok_or_else(|| NoSum::Worth(name.to_string()))
}

fn worth_of_material(plan: &Plan, name: &Name, period: Period) -> Result<f64, NoSum> {
    let planned = plan.materials.iter().find(|planned| planned.name == *name);
    let worth = planned.and_then(|planned| planned.worth_of_more.as_ref());
    worth.map(|worth| worth.at(period)).ok_or_else(|| NoSum::Worth(name.to_string()))
}

/// The worth of a limit; it need not be known where the activity has no part in it.
fn worth_of_limit(
    plan: &Plan,
    name: &Name,
    limit: &Limit,
    planned: &PlannedActivity,
    activity: &Activity,
    period: Period,
) -> Result<f64, NoSum> {
    let found = plan.limits.iter().find(|planned| planned.name == *name);
    if let Some(worth) = found.and_then(|planned| planned.worth_of_more.as_ref()) {
        return Ok(worth.at(period));
    }
    let part = |terms: &BTreeMap<Term, Value>| total(terms, &planned.name, activity, period) != 0.0;
    let has_part = part(&limit.terms) || limit.per.as_ref().is_some_and(part);
    if has_part { Err(NoSum::Worth(name.to_string())) } else { Ok(0.0) }
}

/// Whether a limit sums over a period.
pub(super) fn covers(over: &Over, period: Period) -> bool {
    match over {
        Over::Each | Over::All => true,
        Over::Some(periods) => periods.contains(&period),
    }
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

//! Levels of activities, and how far they may change from a period to the next.

use super::frame::{Columns, Frame, Line, Part, Rows, at};
use super::limits::{Limits, Uses};
use super::materials::Balances;
use super::resources::Capacities;
use crate::lp::keys::{activity_key, change_key};
use crate::model::products;
use crate::model::{Activity, Aim, Model, Name, Period, Resource, Value};

/// What one unit of an activity adds to the aim: price less costs, or costs alone where they are to be small.
#[must_use]
pub fn worth_of_one(model: &Model, activity: &Activity, period: Period) -> f64 {
    let uses = activity.uses.iter().filter_map(|(name, rate)| Some((model.resources.get(name)?, rate)));
    worth(model.aim, activity, period, uses)
}

fn worth<'m>(
    aim: Aim,
    activity: &Activity,
    period: Period,
    uses: impl Iterator<Item = (&'m Resource, &'m Value)>,
) -> f64 {
    let (earned, spent) = match aim {
        Aim::Maximise => (activity.price.at(period), -1.0),
        Aim::Minimise => (0.0, 1.0),
    };
    let mut parts = Vec::with_capacity(2 + activity.uses.len());
    parts.extend([(earned, 1.0), (spent * activity.cost.at(period), 1.0)]);
    for (resource, rate) in uses {
        let cost = resource.cost.at(period);
        if cost != 0.0 {
            parts.push((spent * rate.at(period), cost));
        }
    }
    products::sum(parts.into_iter())
}

/// The change rows of each activity, in order of activities; empty where nothing holds its changes.
pub(super) fn rows(frame: &Frame<'_>, rows: &mut Rows) -> Vec<Line> {
    let Model { horizon, activities, .. } = frame.model;
    let line = |(name, activity): (&Name, &Activity)| {
        if activity.change_at_most.numbers().iter().all(|number| number.is_infinite()) {
            return Line::new();
        }
        rows.line(frame, |period| {
            let most = activity.change_at_most.at(period);
            let held = period.position() > 0 && most.is_finite();
            held.then(|| (change_key(name, horizon, period), 0.0 - most, most))
        })
    };
    activities.iter().map(line).collect()
}

/// The rows that levels have a part in.
pub(super) struct Lines<'r, 'm> {
    pub(super) changes: &'r [Line],
    pub(super) limits: &'r Limits<'m>,
    pub(super) balances: &'r Balances<'m>,
    pub(super) capacities: &'r Capacities<'m>,
}

pub(super) fn columns(frame: &Frame<'_>, lines: &Lines<'_, '_>, columns: &mut Columns<'_>) {
    let mut parts = Vec::new();
    for ((name, activity), change) in frame.model.activities.iter().zip(lines.changes) {
        let recipe = Recipe::of(name, activity, lines, change);
        for &period in &frame.by_name {
            recipe.parts(frame, period, &mut parts);
            let bounds = if activity.prospect {
                (0.0, 0.0)
            } else {
                (activity.at_least.at(period), activity.at_most.at(period))
            };
            let uses = recipe.uses.iter().map(|&(resource, _, rate)| (resource, rate));
            let aim = worth(frame.model.aim, activity, period, uses);
            columns.push(activity_key(name, &frame.model.horizon, period), bounds, aim, &mut parts);
        }
    }
}

/// All that one activity has a part in, found once for all periods.
struct Recipe<'r> {
    uses: Vec<(&'r Resource, &'r Line, &'r Value)>,
    draws: Vec<(&'r Line, &'r Value)>,
    makes: Vec<(&'r Line, &'r Value)>,
    lead: usize,
    change: &'r Line,
    limits: &'r Limits<'r>,
    terms: Uses<'r>,
}

impl<'r> Recipe<'r> {
    fn of(name: &Name, activity: &'r Activity, lines: &'r Lines<'r, '_>, change: &'r Line) -> Self {
        let balance = |(material, rate)| Some((lines.balances.line(material)?, rate));
        Self {
            uses: (activity.uses.iter())
                .filter_map(|(name, rate)| {
                    let (resource, line) = lines.capacities.get(name)?;
                    Some((*resource, line, rate))
                })
                .collect(),
            draws: activity.draws.iter().filter_map(balance).collect(),
            makes: activity.makes.iter().filter_map(balance).collect(),
            lead: activity.lead,
            change,
            limits: lines.limits,
            terms: lines.limits.of_activity(name, activity),
        }
    }

    fn parts(&self, frame: &Frame<'_>, period: Period, parts: &mut Vec<Part>) {
        let now = period.position();
        for &(_, line, rate) in &self.uses {
            parts.extend(at(line, now).map(|row| Part::new(row, rate.at(period))));
        }
        for &(line, rate) in &self.draws {
            parts.extend(at(line, now).map(|row| Part { row, coefficient: rate.at(period), factor: -1.0 }));
        }
        // What arrives after the last period is lost.
        if let Some(there) = frame.after(period, self.lead) {
            for &(line, rate) in &self.makes {
                parts.extend(at(line, there).map(|row| Part::new(row, rate.at(period))));
            }
        }
        parts.extend(at(self.change, now).map(|row| Part::new(row, 1.0)));
        parts.extend(at(self.change, now + 1).map(|row| Part::new(row, -1.0)));
        self.limits.parts(&self.terms, period, parts);
    }
}

//! Building the program that a model stands for.
//!
//! One column per activity and period (a prospect's is held at 0, so that it is priced and never made), one row per resource
//! and per limit. A resource's cost is charged to the activities that use it.

use std::collections::BTreeMap;

use super::program::{Column, Key, Program, Row, RowIndex, Sense};
use crate::model::name::Name;
use crate::model::{Activity, Aim, Bound, Horizon, Limit, Model, Period, Term, Value};

/// The program behind `model`.
#[must_use]
pub fn build(model: &Model) -> Program {
    let mut rows = Vec::new();
    let mut sums: Vec<Sum<'_>> = Vec::new();
    for period in model.horizon.periods() {
        for (name, resource) in &model.resources {
            let (lower, upper) = (resource.at_least.at(period), resource.capacity.at(period));
            rows.push(Row { key: resource_key(name, &model.horizon, period), lower, upper });
            sums.push(Sum::Resource(name, period));
        }
        for (name, limit) in &model.limits {
            for side in sides(limit, period) {
                rows.push(Row {
                    key: limit_key(name, side.word, &model.horizon, period),
                    lower: side.lower,
                    upper: side.upper,
                });
                sums.push(Sum::Limit(limit, side.per, period));
            }
        }
    }
    let (rows, sums) = in_order(rows, sums);
    let entries = Entries::of(model, &sums);

    let mut columns = Vec::new();
    for period in model.horizon.periods() {
        for (name, activity) in &model.activities {
            columns.push(Column {
                key: activity_key(name, &model.horizon, period),
                lower: if activity.prospect { 0.0 } else { activity.at_least.at(period) },
                upper: if activity.prospect { 0.0 } else { activity.at_most.at(period) },
                aim: worth_of_one(model, activity, period),
                entries: entries.of_activity(name, activity, period),
            });
        }
    }
    columns.sort_by(|a, b| a.key.cmp(&b.key));
    Program {
        sense: match model.aim {
            Aim::Maximise => Sense::Maximise,
            Aim::Minimise => Sense::Minimise,
        },
        offset: model.constant,
        columns,
        rows,
    }
}

/// The key of an activity's level in a period.
#[must_use]
pub fn activity_key(name: &Name, horizon: &Horizon, period: Period) -> Key {
    key("activities", name, None, horizon.label(period))
}

/// The key of a resource's row in a period.
#[must_use]
pub fn resource_key(name: &Name, horizon: &Horizon, period: Period) -> Key {
    key("resources", name, None, horizon.label(period))
}

/// The key of a limit's row in a period; `side` tells the two rows of a limit with `per` apart.
#[must_use]
pub fn limit_key(name: &Name, side: Option<&str>, horizon: &Horizon, period: Period) -> Key {
    key("limits", name, side, horizon.label(period))
}

fn key(table: &str, name: &Name, side: Option<&str>, period: Option<&str>) -> Key {
    let mut text = format!("{table}.{name}");
    for part in [side, period].into_iter().flatten() {
        text.push('.');
        text.push_str(part);
    }
    Key::new(&text)
}

/// One row of a limit: the bounds of the row, and what `per` is multiplied by in it.
pub struct Side {
    /// Tells the rows of one limit apart; `None` where it has one.
    pub word: Option<&'static str>,
    /// Lower bound of the row.
    pub lower: f64,
    /// Upper bound of the row.
    pub upper: f64,
    /// The bound that multiplies `per`.
    pub per: f64,
}

/// The rows that a limit stands for in a period: one, or with `per` one for each bound, as the bound is then a coefficient.
#[must_use]
pub fn sides(limit: &Limit, period: Period) -> Vec<Side> {
    let (least, most) = match &limit.bound {
        Bound::Between(least, most) => (least.at(period), most.at(period)),
        Bound::Equals(value) => (value.at(period), value.at(period)),
    };
    if limit.per.is_none() {
        return vec![Side { word: None, lower: least, upper: most, per: 0.0 }];
    }
    if let Bound::Equals(_) = limit.bound {
        return vec![Side { word: Some("equals"), lower: 0.0, upper: 0.0, per: least }];
    }
    let at_least =
        least.is_finite().then_some(Side { word: Some("at_least"), lower: 0.0, upper: f64::INFINITY, per: least });
    let at_most =
        most.is_finite().then_some(Side { word: Some("at_most"), lower: f64::NEG_INFINITY, upper: 0.0, per: most });
    at_least.into_iter().chain(at_most).collect()
}

/// What one unit of an activity adds to the aim: price less costs, or costs alone where they are to be small.
#[must_use]
pub fn worth_of_one(model: &Model, activity: &Activity, period: Period) -> f64 {
    let resources: f64 = activity
        .uses
        .iter()
        .filter_map(|(name, rate)| model.resources.get(name).map(|resource| rate.at(period) * resource.cost.at(period)))
        .sum();
    let cost = activity.cost.at(period) + resources;
    match model.aim {
        Aim::Maximise => activity.price.at(period) - cost,
        Aim::Minimise => cost,
    }
}

/// What a row sums, in which period.
#[derive(Clone, Copy)]
enum Sum<'m> {
    Resource(&'m Name, Period),
    Limit(&'m Limit, f64, Period),
}

fn in_order<'m>(rows: Vec<Row>, sums: Vec<Sum<'m>>) -> (Vec<Row>, Vec<Sum<'m>>) {
    let mut both: Vec<_> = rows.into_iter().zip(sums).collect();
    both.sort_by(|a, b| a.0.key.cmp(&b.0.key));
    both.into_iter().unzip()
}

/// The rows' sums, turned round so that an activity's column can be gathered without looking at every row.
struct Entries<'m> {
    resources: BTreeMap<(&'m Name, Period), RowIndex>,
    terms: BTreeMap<(Term, Period), Vec<(RowIndex, f64)>>,
}

impl<'m> Entries<'m> {
    fn of(model: &'m Model, sums: &[Sum<'m>]) -> Self {
        let mut entries = Self { resources: BTreeMap::new(), terms: BTreeMap::new() };
        for (position, sum) in sums.iter().enumerate() {
            let row = RowIndex(position);
            match *sum {
                Sum::Resource(name, period) => {
                    entries.resources.insert((name, period), row);
                }
                Sum::Limit(limit, bound, period) => {
                    entries.add(&limit.terms, 1.0, row, period);
                    if let Some(per) = &limit.per {
                        entries.add(per, -bound, row, period);
                    }
                }
            }
        }
        debug_assert_eq!(entries.resources.len(), model.resources.len() * model.horizon.periods().count());
        entries
    }

    fn add(&mut self, terms: &'m BTreeMap<Term, Value>, factor: f64, row: RowIndex, period: Period) {
        for (term, coefficient) in terms {
            self.terms.entry((term.clone(), period)).or_default().push((row, coefficient.at(period) * factor));
        }
    }

    fn of_activity(&self, name: &Name, activity: &Activity, period: Period) -> Vec<(RowIndex, f64)> {
        let uses = activity
            .uses
            .iter()
            .filter_map(|(resource, rate)| self.resources.get(&(resource, period)).map(|&row| (row, rate.at(period))));
        let terms = std::iter::once(Term::Activity(name.clone()))
            .chain(activity.tags.iter().cloned().map(Term::Tag))
            .chain(std::iter::once(Term::All));
        let limits = terms.filter_map(|term| self.terms.get(&(term, period))).flatten().copied();
        summed(uses.chain(limits).collect())
    }
}

/// Entries in order of rows, those of one row added up, zeros left out.
fn summed(mut entries: Vec<(RowIndex, f64)>) -> Vec<(RowIndex, f64)> {
    entries.sort_by_key(|&(row, _)| row);
    let mut sums: Vec<(RowIndex, f64)> = Vec::with_capacity(entries.len());
    for (row, value) in entries {
        match sums.last_mut() {
            Some((last, sum)) if *last == row => *sum += value,
            _ => sums.push((row, value)),
        }
    }
    sums.retain(|&(_, value)| value != 0.0);
    sums
}

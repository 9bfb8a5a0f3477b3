//! Building the program that a model stands for.
//!
//! One column per activity and period (a prospect's is held at 0, so that it is priced and never made), one row per resource
//! and per limit. A resource's cost is charged to the activities that use it.
//!
//! Where several numbers of a model meet in one of the program, they are added up as the decimals that people wrote and rounded once, so
//! that what earns as much on paper earns as much here.

use std::collections::{BTreeMap, HashMap};

use super::keys::{activity_key, limit_key, resource_key};
use super::program::{Column, Program, Row, RowIndex, Sense};
use crate::model::name::Name;
use crate::model::products;
use crate::model::{Activity, Aim, Bound, Limit, Model, Period, Term, Value};

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
                aim: worth(model.aim, activity, period, |resource| entries.cost(resource, period)),
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
    worth(model.aim, activity, period, |name| model.resources.get(name).map(|resource| resource.cost.at(period)))
}

/// As [`worth_of_one`], with the cost of a resource as `cost_of` tells it.
fn worth(aim: Aim, activity: &Activity, period: Period, cost_of: impl Fn(&Name) -> Option<f64>) -> f64 {
    let (earned, spent) = match aim {
        Aim::Maximise => (activity.price.at(period), -1.0),
        Aim::Minimise => (0.0, 1.0),
    };
    let mut parts = Vec::with_capacity(2 + activity.uses.len());
    parts.extend([(earned, 1.0), (spent * activity.cost.at(period), 1.0)]);
    for (name, rate) in &activity.uses {
        if let Some(cost) = cost_of(name).filter(|&cost| cost != 0.0) {
            parts.push((spent * rate.at(period), cost));
        }
    }
    products::sum(parts.into_iter())
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
#[derive(Default)]
struct Entries<'m> {
    resources: HashMap<(&'m Name, Period), Used>,
    activities: HashMap<(&'m Name, Period), Vec<Part>>,
    tags: HashMap<(&'m Name, Period), Vec<Part>>,
    all: HashMap<Period, Vec<Part>>,
}

/// What one term adds to an entry: a coefficient, times a factor.
#[derive(Clone, Copy)]
struct Part {
    row: RowIndex,
    coefficient: f64,
    factor: f64,
}

/// What a column must know of a resource: its row, and what a unit costs.
struct Used {
    row: RowIndex,
    cost: f64,
}

impl<'m> Entries<'m> {
    fn of(model: &'m Model, sums: &[Sum<'m>]) -> Self {
        let mut entries = Self::default();
        for (position, sum) in sums.iter().enumerate() {
            let row = RowIndex(position);
            match *sum {
                Sum::Resource(name, period) => {
                    let cost = model.resources.get(name).map_or(0.0, |resource| resource.cost.at(period));
                    entries.resources.insert((name, period), Used { row, cost });
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
            let list = match term {
                Term::Activity(name) => self.activities.entry((name, period)).or_default(),
                Term::Tag(tag) => self.tags.entry((tag, period)).or_default(),
                Term::All => self.all.entry(period).or_default(),
                Term::Material(..) | Term::Surge(..) => continue,
            };
            list.push(Part { row, coefficient: coefficient.at(period), factor });
        }
    }

    /// What one unit of a resource costs; `None` where there is no such resource.
    fn cost(&self, resource: &Name, period: Period) -> Option<f64> {
        self.resources.get(&(resource, period)).map(|used| used.cost)
    }

    fn of_activity(&self, name: &Name, activity: &Activity, period: Period) -> Vec<(RowIndex, f64)> {
        let mut parts = Vec::with_capacity(activity.uses.len());
        for (resource, rate) in &activity.uses {
            if let Some(used) = self.resources.get(&(resource, period)) {
                parts.push(Part { row: used.row, coefficient: rate.at(period), factor: 1.0 });
            }
        }
        let by_tag = activity.tags.iter().filter_map(|tag| self.tags.get(&(tag, period)));
        let lists = self.activities.get(&(name, period)).into_iter().chain(by_tag).chain(self.all.get(&period));
        parts.extend(lists.flatten());
        summed(parts)
    }
}

/// Entries in order of rows, the parts of one row added up, zeros left out.
fn summed(mut parts: Vec<Part>) -> Vec<(RowIndex, f64)> {
    parts.sort_by_key(|part| part.row);
    let of_one_row = parts.chunk_by(|one, other| one.row == other.row);
    let entry = |parts: &[Part]| {
        let products = parts.iter().map(|part| (part.coefficient, part.factor));
        Some((parts.first()?.row, products::sum(products)))
    };
    // Mostly there is one part for each entry.
    let mut entries = Vec::with_capacity(parts.len());
    entries.extend(of_one_row.filter_map(entry).filter(|&(_, value)| value != 0.0));
    entries
}

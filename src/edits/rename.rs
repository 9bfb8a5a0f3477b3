//! Renames: something withdrawn and something new that agree in every number.

use std::collections::BTreeMap;

use super::side_by_side::side_by_side;
use crate::model::{Activity, Limit, Model, Name, Resource, Term, Value};

/// What was renamed from one model to the next: new names by old ones.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Renames {
    /// Resources.
    pub resources: BTreeMap<Name, Name>,
    /// Activities.
    pub activities: BTreeMap<Name, Name>,
    /// Limits.
    pub limits: BTreeMap<Name, Name>,
}

impl Renames {
    /// The renames that turn things of `old` into things of `new`. A thing that could be several is none.
    #[must_use]
    pub fn between(old: &Model, new: &Model) -> Self {
        Self {
            resources: matches(&old.resources, &new.resources, |was, is| {
                same_resource(was.1, is.1) && same_use(old, was.0, new, is.0)
            }),
            activities: matches(&old.activities, &new.activities, |was, is| {
                same_activity(was.1, is.1) && same_terms(old, was.0, new, is.0)
            }),
            limits: matches(&old.limits, &new.limits, |was, is| same_limit(was.1, is.1)),
        }
    }

    /// Whether nothing was renamed.
    #[must_use]
    pub fn is_empty(&self) -> bool {
        *self == Self::default()
    }

    /// `model` with the new names.
    #[must_use]
    pub fn applied(&self, model: &Model) -> Model {
        let mut renamed = model.clone();
        renamed.resources = rekeyed(renamed.resources, &self.resources);
        renamed.activities = rekeyed(renamed.activities, &self.activities);
        renamed.limits = rekeyed(renamed.limits, &self.limits);
        for activity in renamed.activities.values_mut() {
            activity.uses = rekeyed(std::mem::take(&mut activity.uses), &self.resources);
        }
        for limit in renamed.limits.values_mut() {
            limit.terms = self.terms(std::mem::take(&mut limit.terms));
            limit.per = limit.per.take().map(|per| self.terms(per));
        }
        renamed
    }

    fn terms(&self, terms: BTreeMap<Term, Value>) -> BTreeMap<Term, Value> {
        let renamed = |term| match term {
            Term::Activity(name) => Term::Activity(self.activities.get(&name).cloned().unwrap_or(name)),
            other => other,
        };
        terms.into_iter().map(|(term, value)| (renamed(term), value)).collect()
    }
}

fn rekeyed<T>(map: BTreeMap<Name, T>, names: &BTreeMap<Name, Name>) -> BTreeMap<Name, T> {
    map.into_iter().map(|(name, thing)| (names.get(&name).cloned().unwrap_or(name), thing)).collect()
}

/// Pairs what only `old` has with what only `new` has, where each is the other's only match.
fn matches<T>(
    old: &BTreeMap<Name, T>,
    new: &BTreeMap<Name, T>,
    same: impl Fn((&Name, &T), (&Name, &T)) -> bool,
) -> BTreeMap<Name, Name> {
    let (mut gone, mut come) = (Vec::new(), Vec::new());
    for (name, pair) in side_by_side(old, new) {
        match pair {
            (Some(was), None) => gone.push((name, was)),
            (None, Some(is)) => come.push((name, is)),
            _ => {}
        }
    }
    let mut pairs = BTreeMap::new();
    for &was in &gone {
        let mut fits = come.iter().filter(|&&is| same(was, is));
        if let (Some(&is), None) = (fits.next(), fits.next())
            && gone.iter().filter(|&&other| same(other, is)).count() == 1
        {
            pairs.insert(was.0.clone(), is.0.clone());
        }
    }
    pairs
}

fn same_resource(was: &Resource, is: &Resource) -> bool {
    *is == Resource { label: is.label.clone(), unit: is.unit.clone(), ..was.clone() }
}

fn same_activity(was: &Activity, is: &Activity) -> bool {
    *is == Activity { label: is.label.clone(), unit: is.unit.clone(), ..was.clone() }
}

fn same_limit(was: &Limit, is: &Limit) -> bool {
    *is == Limit { label: is.label.clone(), ..was.clone() }
}

/// Whether every activity uses `was` in the old model as it uses `is` in the new one.
fn same_use(old: &Model, was: &Name, new: &Model, is: &Name) -> bool {
    fn uses<'m>(model: &'m Model, resource: &Name) -> Vec<(&'m Name, &'m Value)> {
        model.activities.iter().filter_map(|(name, activity)| Some((name, activity.uses.get(resource)?))).collect()
    }
    uses(old, was) == uses(new, is)
}

/// Whether every limit counts `was` in the old model as it counts `is` in the new one.
fn same_terms(old: &Model, was: &Name, new: &Model, is: &Name) -> bool {
    fn counts<'m>(model: &'m Model, activity: &Name) -> Vec<(&'m Name, Option<&'m Value>, Option<&'m Value>)> {
        let term = Term::Activity(activity.clone());
        let of = |limit: &'m Limit| (limit.terms.get(&term), limit.per.as_ref().and_then(|per| per.get(&term)));
        let counted = model.limits.iter().map(|(name, limit)| (name, of(limit).0, of(limit).1));
        counted.filter(|(_, terms, per)| terms.is_some() || per.is_some()).collect()
    }
    counts(old, was) == counts(new, is)
}

//! Renames: something withdrawn and something new that agree in every number.

use std::collections::BTreeMap;

use super::side_by_side::side_by_side;
use crate::model::{Activity, Flow, Limit, Material, Model, Name, Resource, Term, Value};

/// What was renamed from one model to the next: new names by old ones.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Renames {
    /// Resources.
    pub resources: BTreeMap<Name, Name>,
    /// Activities.
    pub activities: BTreeMap<Name, Name>,
    /// Materials.
    pub materials: BTreeMap<Name, Name>,
    /// Limits.
    pub limits: BTreeMap<Name, Name>,
}

impl Renames {
    /// The renames that turn things of `old` into things of `new`. A thing that could be several is none.
    #[must_use]
    pub fn between(old: &Model, new: &Model) -> Self {
        let same_terms = |table, was: &Name, is: &Name| counts(old, table, was) == counts(new, table, is);
        Self {
            resources: matches(&old.resources, &new.resources, |was, is| {
                *is.1 == Resource { label: is.1.label.clone(), unit: is.1.unit.clone(), ..was.1.clone() }
                    && rates(old, was.0, |activity| &activity.uses) == rates(new, is.0, |activity| &activity.uses)
                    && same_terms(Table::Resources, was.0, is.0)
            }),
            activities: matches(&old.activities, &new.activities, |was, is| {
                *is.1 == Activity { label: is.1.label.clone(), unit: is.1.unit.clone(), ..was.1.clone() }
                    && same_terms(Table::Activities, was.0, is.0)
            }),
            materials: matches(&old.materials, &new.materials, |was, is| {
                *is.1 == Material { label: is.1.label.clone(), unit: is.1.unit.clone(), ..was.1.clone() }
                    && rates(old, was.0, |activity| &activity.draws) == rates(new, is.0, |activity| &activity.draws)
                    && rates(old, was.0, |activity| &activity.makes) == rates(new, is.0, |activity| &activity.makes)
                    && same_terms(Table::Materials, was.0, is.0)
            }),
            limits: matches(&old.limits, &new.limits, |was, is| {
                *is.1 == Limit { label: is.1.label.clone(), ..was.1.clone() }
            }),
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
        renamed.materials = rekeyed(renamed.materials, &self.materials);
        renamed.limits = rekeyed(renamed.limits, &self.limits);
        for activity in renamed.activities.values_mut() {
            activity.uses = rekeyed(std::mem::take(&mut activity.uses), &self.resources);
            activity.draws = rekeyed(std::mem::take(&mut activity.draws), &self.materials);
            activity.makes = rekeyed(std::mem::take(&mut activity.makes), &self.materials);
        }
        for limit in renamed.limits.values_mut() {
            limit.terms = self.terms(std::mem::take(&mut limit.terms));
            limit.per = limit.per.take().map(|per| self.terms(per));
        }
        renamed
    }

    fn terms(&self, terms: BTreeMap<Term, Value>) -> BTreeMap<Term, Value> {
        let new = |names: &BTreeMap<Name, Name>, name: Name| names.get(&name).cloned().unwrap_or(name);
        let renamed = |term| match term {
            Term::Activity(name) => Term::Activity(new(&self.activities, name)),
            Term::Material(name, flow) => Term::Material(new(&self.materials, name), flow),
            Term::Surge(name, tier) => Term::Surge(new(&self.resources, name), tier),
            Term::Tag(_) | Term::All => term,
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

/// The rates of one thing, by activity.
fn rates<'m>(
    model: &'m Model,
    of: &Name,
    rates: impl Fn(&'m Activity) -> &'m BTreeMap<Name, Value>,
) -> Vec<(&'m Name, &'m Value)> {
    model.activities.iter().filter_map(|(name, activity)| Some((name, rates(activity).get(of)?))).collect()
}

/// Tables whose things limits count.
#[derive(Clone, Copy)]
enum Table {
    Resources,
    Activities,
    Materials,
}

/// Where a limit counts something: in which limit, whether by `per`, in which way, by how much.
type Count<'m> = (&'m Name, bool, Option<Flow>, Option<usize>, &'m Value);

/// Where limits count a thing by its name.
fn counts<'m>(model: &'m Model, table: Table, of: &Name) -> Vec<Count<'m>> {
    let way = |term: &Term| match (table, term) {
        (Table::Activities, Term::Activity(name)) if name == of => Some((None, None)),
        (Table::Materials, Term::Material(name, flow)) if name == of => Some((Some(*flow), None)),
        (Table::Resources, Term::Surge(name, tier)) if name == of => Some((None, *tier)),
        _ => None,
    };
    let mut counts = Vec::new();
    for (limit, Limit { terms, per, .. }) in &model.limits {
        let both = terms.iter().map(|term| (false, term)).chain(per.iter().flatten().map(|term| (true, term)));
        counts.extend(both.filter_map(|(by_per, (term, value))| {
            let (flow, tier) = way(term)?;
            Some((limit, by_per, flow, tier, value))
        }));
    }
    counts
}

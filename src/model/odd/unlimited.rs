//! Activities that nothing limits.

use std::collections::{BTreeMap, HashSet};

use super::{Oddity, entry, terms};
use crate::model::name::Name;
use crate::model::types::{Activity, Aim, Material, Model, Resource, Term};
use crate::model::value::{Period, Value};

/// Activities that could be carried on without end: no bound, no resource that is scarce and no limit holds them.
///
/// One that draws or makes materials may well be left to what else happens to these; it is odd only where each unit would earn
/// something, bought and sold at the tiers that have no end.
pub(super) fn find(model: &Model) -> Vec<Oddity> {
    let limited = Limited::of(model);
    let free = model.activities.iter().filter(|(name, activity)| !activity.prospect && !limited.holds(name, activity));
    free.filter_map(|(name, activity)| odd(model, name, activity)).collect()
}

fn odd(model: &Model, name: &Name, activity: &Activity) -> Option<Oddity> {
    let period = model.horizon.periods().find(|&period| is_free(model, activity, period))?;
    let place = model.horizon.label(period).map_or_else(String::new, |label| format!(" in {label}"));
    let trades = !activity.draws.is_empty() || !activity.makes.is_empty();
    let earned = gain(model, activity, period);
    if trades && earned <= 0.0 {
        return None;
    }
    let message = match earned > 0.0 {
        true => format!("nothing limits `{name}`{place}, and every unit of it would pay"),
        false => format!("nothing limits `{name}`{place}"),
    };
    let help = "give it an `at_most`, name what it `uses`, or sum it in a limit";
    Some(Oddity::new(&entry("activities", name), "unlimited", message, help))
}

/// What the limits of a model hold.
struct Limited<'m> {
    activities: HashSet<&'m Name>,
    tags: HashSet<&'m Name>,
    all: bool,
}

impl<'m> Limited<'m> {
    fn of(model: &'m Model) -> Self {
        let mut limited = Self { activities: HashSet::new(), tags: HashSet::new(), all: false };
        for term in terms(model) {
            match term {
                Term::Activity(name) => drop(limited.activities.insert(name)),
                Term::Tag(tag) => drop(limited.tags.insert(tag)),
                Term::All => limited.all = true,
                Term::Material(..) | Term::Surge(..) => {}
            }
        }
        limited
    }

    fn holds(&self, name: &Name, activity: &Activity) -> bool {
        self.all || self.activities.contains(name) || activity.tags.iter().any(|tag| self.tags.contains(tag))
    }
}

/// Whether neither its own bounds, nor a resource, nor a material stops an activity in a period.
fn is_free(model: &Model, activity: &Activity, period: Period) -> bool {
    let held = activity.change_at_most.at(period).is_finite() && period.before(1).is_some();
    if activity.at_most.at(period).is_finite() || held {
        return false;
    }
    let mut used = rates(&activity.uses, &model.resources, period);
    let mut drawn = rates(&activity.draws, &model.materials, period);
    let mut made = rates(&activity.makes, &model.materials, period);
    used.all(|(_, resource)| !is_scarce(resource, period))
        && drawn.all(|(rate, material)| rate > 0.0 && cheapest(material, period).is_some())
        && made.all(|(rate, material)| rate > 0.0 && best(material, period).is_some())
}

/// The rates of an activity that are not 0 in a period, each with what it is of.
fn rates<'m, T>(
    rates: &'m BTreeMap<Name, Value>,
    of: &'m BTreeMap<Name, T>,
    period: Period,
) -> impl Iterator<Item = (f64, &'m T)> {
    rates.iter().filter_map(move |(name, rate)| Some((rate.at(period), of.get(name)?))).filter(|(rate, _)| *rate != 0.0)
}

fn is_scarce(resource: &Resource, period: Period) -> bool {
    let ends = resource.capacity.at(period).is_finite() && extra(resource, period).is_none();
    ends || resource.at_least.at(period).is_finite()
}

/// What a unit of extra capacity costs, where there is any amount of it.
fn extra(resource: &Resource, period: Period) -> Option<f64> {
    let endless = resource.surge.iter().filter(|tier| tier.at_most.at(period).is_infinite());
    endless.map(|tier| tier.cost.at(period)).min_by(f64::total_cmp)
}

/// What a unit of a material costs, where any amount can be bought.
fn cheapest(material: &Material, period: Period) -> Option<f64> {
    let endless = material.purchase.iter().filter(|tier| tier.at_most.at(period).is_infinite());
    endless.map(|tier| tier.price.at(period)).min_by(f64::total_cmp)
}

/// What a unit of a material earns, where any amount can be sold or thrown away.
fn best(material: &Material, period: Period) -> Option<f64> {
    let sold = material.sale.iter().filter(|tier| tier.at_most.at(period).is_infinite());
    let discard = &material.discard;
    let thrown = discard.at_most.at(period).is_infinite().then(|| -discard.cost.at(period));
    sold.map(|tier| tier.price.at(period)).chain(thrown).max_by(f64::total_cmp)
}

/// What one unit more of an activity that is free adds to the plan in the long run.
fn gain(model: &Model, activity: &Activity, period: Period) -> f64 {
    let price = match model.aim {
        Aim::Maximise => activity.price.at(period),
        Aim::Minimise => 0.0,
    };
    let used = rates(&activity.uses, &model.resources, period).map(|(rate, resource)| {
        let beyond = if resource.capacity.at(period).is_finite() { extra(resource, period) } else { None };
        rate * (resource.cost.at(period) + beyond.unwrap_or(0.0))
    });
    let drawn = rates(&activity.draws, &model.materials, period)
        .map(|(rate, material)| rate * cheapest(material, period).unwrap_or(0.0));
    let made = rates(&activity.makes, &model.materials, period)
        .map(|(rate, material)| rate * best(material, period).unwrap_or(0.0));
    price - activity.cost.at(period) - used.sum::<f64>() - drawn.sum::<f64>() + made.sum::<f64>()
}

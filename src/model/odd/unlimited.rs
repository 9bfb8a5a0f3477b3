//! Activities that nothing limits.

use std::collections::HashSet;

use super::{Oddity, entry, terms};
use crate::model::name::Name;
use crate::model::types::{Activity, Aim, Material, Model, Resource, Term};
use crate::model::value::Period;

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
    let changes = activity.change_at_most.at(period).is_finite() && period.before(1).is_some();
    let unbounded = !activity.at_most.at(period).is_finite() && !changes;
    let scarce = |resource: &Resource| {
        let endless = resource.surge.iter().any(|tier| !tier.at_most.at(period).is_finite());
        (resource.capacity.at(period).is_finite() && !endless) || resource.at_least.at(period).is_finite()
    };
    let mut used = activity.uses.iter().filter(|(_, rate)| rate.at(period) != 0.0);
    let stopped = used.any(|(name, _)| model.resources.get(name).is_some_and(scarce));
    let mut drawn = activity.draws.iter().filter(|(_, rate)| rate.at(period) != 0.0);
    let bought = drawn.all(|(name, rate)| {
        rate.at(period) > 0.0 && model.materials.get(name).is_some_and(|it| cheapest(it, period).is_some())
    });
    let mut made = activity.makes.iter().filter(|(_, rate)| rate.at(period) != 0.0);
    let gone = made.all(|(name, rate)| {
        rate.at(period) > 0.0 && model.materials.get(name).is_some_and(|it| best(it, period).is_some())
    });
    unbounded && !stopped && bought && gone
}

/// What a unit of a material costs, where any amount can be had.
fn cheapest(material: &Material, period: Period) -> Option<f64> {
    let endless = material.purchase.iter().filter(|tier| !tier.at_most.at(period).is_finite());
    endless.map(|tier| tier.price.at(period)).min_by(f64::total_cmp)
}

/// What a unit of a material earns, where any amount can be sold or thrown away.
fn best(material: &Material, period: Period) -> Option<f64> {
    let sold = material.sale.iter().filter(|tier| !tier.at_most.at(period).is_finite());
    let discard = &material.discard;
    let thrown = (!discard.at_most.at(period).is_finite()).then(|| -discard.cost.at(period));
    sold.map(|tier| tier.price.at(period)).chain(thrown).max_by(f64::total_cmp)
}

/// What one unit of an activity that is free adds to the plan, at least.
fn gain(model: &Model, activity: &Activity, period: Period) -> f64 {
    let price = match model.aim {
        Aim::Maximise => activity.price.at(period),
        Aim::Minimise => 0.0,
    };
    let used = activity.uses.iter().filter_map(|(name, rate)| {
        let resource = model.resources.get(name)?;
        let surge = resource.surge.iter().filter(|tier| !tier.at_most.at(period).is_finite());
        let dearest = surge.map(|tier| tier.cost.at(period)).min_by(f64::total_cmp);
        let beyond = if resource.capacity.at(period).is_finite() { dearest.unwrap_or(0.0) } else { 0.0 };
        Some(rate.at(period) * (resource.cost.at(period) + beyond))
    });
    let drawn = activity
        .draws
        .iter()
        .filter_map(|(name, rate)| Some(rate.at(period) * cheapest(model.materials.get(name)?, period)?));
    let made = activity
        .makes
        .iter()
        .filter_map(|(name, rate)| Some(rate.at(period) * best(model.materials.get(name)?, period)?));
    price - activity.cost.at(period) - used.sum::<f64>() - drawn.sum::<f64>() + made.sum::<f64>()
}

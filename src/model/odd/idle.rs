//! What is there, and nothing comes of it.

use std::collections::{BTreeMap, BTreeSet};

use super::{Oddity, entry, terms};
use crate::model::name::Name;
use crate::model::near;
use crate::model::types::{Activity, Discard, Material, Model, Term};
use crate::model::value::Value;

/// Resources that nobody uses, tags that nobody sums, materials that cannot come or go, and leads that reach beyond the horizon.
pub(super) fn find(model: &Model) -> Vec<Oddity> {
    let mut found = resources(model);
    found.extend(materials(model));
    found.extend(tags(model));
    found.extend(model.activities.iter().filter_map(|(name, activity)| lead(model, name, activity)));
    found
}

/// The names that rates of activities are for, where the rate is not 0 throughout.
fn named<'a>(model: &'a Model, rates: impl Fn(&'a Activity) -> &'a BTreeMap<Name, Value>) -> BTreeSet<&'a Name> {
    let some = |value: &Value| value.numbers().iter().any(|&number| number != 0.0);
    let all = model.activities.values().flat_map(rates);
    all.filter(|(_, rate)| some(rate)).map(|(name, _)| name).collect()
}

fn resources(model: &Model) -> Vec<Oddity> {
    let used = named(model, |activity| &activity.uses);
    let idle = model.resources.keys().filter(|name| !used.contains(name));
    let odd = |name: &Name| {
        let help = "add it to the `uses` of what needs it, or take it out";
        Oddity::new(&entry("resources", name), "unused-resource", format!("no activity uses `{name}`"), help)
    };
    idle.map(odd).collect()
}

fn materials(model: &Model) -> Vec<Oddity> {
    let made = named(model, |activity| &activity.makes);
    let drawn = named(model, |activity| &activity.draws);
    let mut found = Vec::new();
    for (name, material) in &model.materials {
        let comes = made.contains(name) || !material.purchase.is_empty() || material.opening > 0.0;
        if drawn.contains(name) && !comes {
            let message = format!("`{name}` is drawn, but nobody makes or buys it");
            let help = "add `purchase` or `opening` to it, or name it in the `makes` of an activity";
            found.push(Oddity::new(&entry("materials", name), "no-source", message, help));
        }
        if !drawn.contains(name) && !goes(material) {
            let message = format!("nobody draws or sells `{name}`");
            let help = "add `sale`, `closing` or `discard` to it, or name it in the `draws` of an activity";
            found.push(Oddity::new(&entry("materials", name), "no-outlet", message, help));
        }
    }
    found
}

/// Whether a material that nobody draws is there for something: to be sold, to be kept, or to be got rid of.
fn goes(material: &Material) -> bool {
    !material.sale.is_empty() || material.closing.is_some() || material.discard != Discard::default()
}

fn tags(model: &Model) -> Vec<Oddity> {
    let tags = terms(model).filter_map(|term| if let Term::Tag(tag) = term { Some(tag) } else { None });
    let summed: BTreeSet<&Name> = tags.collect();
    let mut carriers: BTreeMap<&Name, &Name> = BTreeMap::new();
    for (name, activity) in &model.activities {
        for tag in activity.tags.iter().filter(|tag| !summed.contains(tag)) {
            carriers.entry(tag).or_insert(name);
        }
    }
    let odd = |(tag, carrier): (&Name, &Name)| {
        let otherwise = || format!("sum it in a limit as \"tag:{tag}\", or take it out");
        let help = near::help(tag.as_str(), summed.iter().map(|tag| tag.as_str()), otherwise);
        let place = ["activities", carrier.as_str(), "tags"];
        Oddity::new(&place, "unused-tag", format!("no limit sums the tag `{tag}`"), help)
    };
    carriers.into_iter().map(odd).collect()
}

fn lead(model: &Model, name: &Name, activity: &Activity) -> Option<Oddity> {
    let periods = model.horizon.count();
    if activity.makes.is_empty() || activity.lead < periods {
        return None;
    }
    let message = match periods {
        1 => format!("what `{name}` makes comes after the only period, so nothing is made of it"),
        _ => format!("what `{name}` makes comes after the last of the {periods} periods, so nothing is made of it"),
    };
    let help = "shorten its `lead`, or plan more periods";
    Some(Oddity::new(&["activities", name.as_str(), "lead"], "lead-too-long", message, help))
}

//! All values of a model that may differ by period.

use super::types::{Activity, Bound, Discard, Late, Limit, Material, Model, Purchase, Resource, Sale, Stock, Surge};
use super::value::Value;

/// Calls `seen` with every value of `model` that may differ by period, in no order that matters.
pub(crate) fn each(model: &Model, seen: &mut impl FnMut(&Value)) {
    model.resources.values().for_each(|resource| of_resource(resource, seen));
    model.activities.values().for_each(|activity| of_activity(activity, seen));
    model.materials.values().for_each(|material| of_material(material, seen));
    model.limits.values().for_each(|limit| of_limit(limit, seen));
}

fn of_resource(resource: &Resource, seen: &mut impl FnMut(&Value)) {
    let Resource { label: _, unit: _, capacity, at_least, cost, surge } = resource;
    [capacity, at_least, cost].into_iter().for_each(&mut *seen);
    for Surge { at_most, cost } in surge {
        [at_most, cost].into_iter().for_each(&mut *seen);
    }
}

fn of_activity(activity: &Activity, seen: &mut impl FnMut(&Value)) {
    let Activity { price, cost, uses, draws, makes, at_least, at_most, change_at_most, .. } = activity;
    [price, cost, at_least, at_most, change_at_most].into_iter().for_each(&mut *seen);
    uses.values().chain(draws.values()).chain(makes.values()).for_each(seen);
}

fn of_material(material: &Material, seen: &mut impl FnMut(&Value)) {
    let Material { label: _, unit: _, opening: _, purchase, sale, stock, closing: _, discard } = material;
    for Purchase { price, at_least, at_most } in purchase {
        [price, at_least, at_most].into_iter().for_each(&mut *seen);
    }
    for Sale { price, at_least, at_most, late } in sale {
        [price, at_least, at_most].into_iter().for_each(&mut *seen);
        if let Some(Late { cost, at_most }) = late {
            [cost, at_most].into_iter().for_each(&mut *seen);
        }
    }
    if let Some(Stock { cost, at_least, at_most }) = stock {
        [cost, at_least, at_most].into_iter().for_each(&mut *seen);
    }
    let Discard { cost, at_most } = discard;
    [cost, at_most].into_iter().for_each(seen);
}

fn of_limit(limit: &Limit, seen: &mut impl FnMut(&Value)) {
    let Limit { label: _, terms, per, bound, over: _ } = limit;
    terms.values().chain(per.iter().flat_map(|per| per.values())).for_each(&mut *seen);
    match bound {
        Bound::Between(least, most) => [least, most].into_iter().for_each(seen),
        Bound::Equals(value) => seen(value),
    }
}

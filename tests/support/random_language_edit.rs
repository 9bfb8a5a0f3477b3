//! Random edits over the whole language, one of every kind that people make.

use std::collections::BTreeMap;

use millreeve::model::{Bound, Horizon, Model, Name, Over, Term, Value};

use crate::random_language::{Draw, name, weeks};
use crate::rng::Rng;

type Edit = fn(&mut Draw<'_>, &mut Model);

const EDITS: [Edit; 26] = [
    price,
    price,
    resource_cost,
    capacity,
    capacity,
    surge_changed,
    surge_tier,
    level_bounds,
    change_at_most,
    recipe,
    recipe,
    lead,
    activity_in_or_out,
    prospect,
    opening,
    opening,
    purchase_changed,
    sale_changed,
    tier_in_or_out,
    late,
    stock,
    closing,
    discard,
    material_in_or_out,
    limit,
    roll,
];

/// `model` after one to three edits.
pub(crate) fn edit(rng: &mut Rng, model: &Model) -> Model {
    let mut edited = model.clone();
    let times = if rng.below(4) == 0 { 2 + rng.below(2) } else { 1 };
    for _ in 0..times {
        let coarse = rng.below(2) == 0;
        let edit = *rng.pick(&EDITS);
        edit(&mut Draw { rng, coarse }, &mut edited);
    }
    edited
}

/// One thing of a map, taken out to be put back.
fn one<T: Clone>(draw: &mut Draw<'_>, map: &BTreeMap<Name, T>) -> Option<(Name, T)> {
    let at = draw.rng.below(map.len().max(1));
    map.iter().nth(at).map(|(name, thing)| (name.clone(), thing.clone()))
}

/// A value with one number of it drawn anew, or all of them.
fn moved(draw: &mut Draw<'_>, model: &Model, value: &Value, least: i32, most: i32) -> Value {
    if !model.horizon.is_named() || draw.once_in(3) {
        return draw.value(model, least, most);
    }
    let mut numbers: Vec<f64> = model.horizon.periods().map(|period| value.at(period)).collect();
    let at = draw.rng.below(numbers.len());
    numbers[at] = draw.number(least, most);
    Value::Listed(numbers)
}

fn price(draw: &mut Draw<'_>, model: &mut Model) {
    if let Some((name, mut activity)) = one(draw, &model.activities) {
        draw.priced(&mut activity, model);
        model.activities.insert(name, activity);
    }
}

fn resource_cost(draw: &mut Draw<'_>, model: &mut Model) {
    if let Some((name, mut resource)) = one(draw, &model.resources) {
        resource.cost = moved(draw, model, &resource.cost, 0, 3);
        model.resources.insert(name, resource);
    }
}

fn capacity(draw: &mut Draw<'_>, model: &mut Model) {
    if let Some((name, mut resource)) = one(draw, &model.resources) {
        resource.capacity =
            if draw.once_in(4) { draw.most(model, 2, 6, 40) } else { moved(draw, model, &resource.capacity, 4, 40) };
        if draw.once_in(5) {
            resource.at_least = draw.number(0, 3).into();
        }
        model.resources.insert(name, resource);
    }
}

fn surge_changed(draw: &mut Draw<'_>, model: &mut Model) {
    if let Some((name, mut resource)) = one(draw, &model.resources) {
        let dearer = draw.number(0, 2);
        for tier in &mut resource.surge {
            if draw.once_in(2) {
                tier.at_most = moved(draw, model, &tier.at_most, 0, 8);
            }
            tier.cost = Value::Every(tier.cost.numbers()[0] + dearer);
        }
        model.resources.insert(name, resource);
    }
}

/// Limits that ask for a tier by its number go with it.
fn surge_tier(draw: &mut Draw<'_>, model: &mut Model) {
    if let Some((name, mut resource)) = one(draw, &model.resources) {
        if resource.surge.is_empty() || draw.once_in(2) {
            let dear = resource.surge.last().map_or(2.0, |tier| tier.cost.numbers()[0]);
            resource.surge.push(draw.surge(model, dear));
        } else {
            resource.surge.pop();
        }
        model.resources.insert(name, resource);
        forget(model);
    }
}

fn level_bounds(draw: &mut Draw<'_>, model: &mut Model) {
    if let Some((name, mut activity)) = one(draw, &model.activities) {
        if draw.once_in(2) {
            activity.at_least = moved(draw, model, &activity.at_least, 0, 2);
        }
        activity.at_most = if draw.once_in(2) { draw.most(model, 2, 3, 12) } else { draw.value(model, 3, 12) };
        model.activities.insert(name, activity);
    }
}

fn change_at_most(draw: &mut Draw<'_>, model: &mut Model) {
    if let Some((name, mut activity)) = one(draw, &model.activities) {
        activity.change_at_most = draw.most(model, 3, 0, 6);
        model.activities.insert(name, activity);
    }
}

fn recipe(draw: &mut Draw<'_>, model: &mut Model) {
    let materials: Vec<Name> = model.materials.keys().cloned().collect();
    let resources: Vec<Name> = model.resources.keys().cloned().collect();
    if let Some((name, mut activity)) = one(draw, &model.activities) {
        match draw.rng.below(3) {
            0 => activity.uses = draw.rates(model, &resources, 1),
            1 => activity.draws = draw.rates(model, &materials, 3),
            _ => activity.makes = draw.rates(model, &materials, 2),
        }
        model.activities.insert(name, activity);
    }
}

fn lead(draw: &mut Draw<'_>, model: &mut Model) {
    if let Some((name, mut activity)) = one(draw, &model.activities) {
        activity.lead = draw.rng.below(3);
        model.activities.insert(name, activity);
    }
}

fn activity_in_or_out(draw: &mut Draw<'_>, model: &mut Model) {
    if model.activities.len() > 2 && draw.once_in(2) {
        model.activities.pop_first();
    } else {
        let activity = draw.activity(model);
        model.activities.insert(name(["zz_new", "aa_new"][draw.rng.below(2)]), activity);
    }
    forget(model);
}

fn prospect(draw: &mut Draw<'_>, model: &mut Model) {
    if let Some((name, mut activity)) = one(draw, &model.activities) {
        activity.prospect = !activity.prospect;
        model.activities.insert(name, activity);
    }
}

fn opening(draw: &mut Draw<'_>, model: &mut Model) {
    if let Some((name, mut material)) = one(draw, &model.materials) {
        material.opening = draw.number(0, 9);
        model.materials.insert(name, material);
    }
}

fn purchase_changed(draw: &mut Draw<'_>, model: &mut Model) {
    if let Some((name, mut material)) = one(draw, &model.materials) {
        let dearer = draw.number(-1, 2);
        for tier in &mut material.purchase {
            tier.price = Value::Every(tier.price.numbers()[0] + dearer);
            if draw.once_in(2) {
                tier.at_most = draw.most(model, 3, 3, 20);
            }
            if draw.once_in(4) {
                tier.at_least = draw.value(model, 0, 2);
            }
        }
        model.materials.insert(name, material);
    }
}

fn sale_changed(draw: &mut Draw<'_>, model: &mut Model) {
    if let Some((name, mut material)) = one(draw, &model.materials) {
        let dearer = draw.number(-2, 2);
        for tier in &mut material.sale {
            tier.price = Value::Every(tier.price.numbers()[0] + dearer);
            if draw.once_in(2) {
                tier.at_most = draw.most(model, 9, 3, 12);
            }
            if draw.once_in(3) {
                tier.at_least = moved(draw, model, &tier.at_least, 0, 3);
            }
        }
        model.materials.insert(name, material);
    }
}

fn tier_in_or_out(draw: &mut Draw<'_>, model: &mut Model) {
    if let Some((name, mut material)) = one(draw, &model.materials) {
        match draw.rng.below(4) {
            0 => {
                let price = material.purchase.last().map_or(3.0, |tier| tier.price.numbers()[0]);
                material.purchase.push(draw.purchase(model, price));
            }
            1 => drop(material.purchase.pop()),
            2 => {
                let price = material.sale.last().map_or(6.0, |tier| tier.price.numbers()[0]);
                material.sale.push(draw.sale(model, price));
            }
            _ => drop(material.sale.pop()),
        }
        model.materials.insert(name, material);
        forget(model);
    }
}

fn late(draw: &mut Draw<'_>, model: &mut Model) {
    if let Some((name, mut material)) = one(draw, &model.materials) {
        for tier in &mut material.sale {
            tier.late = (tier.late.is_none() || draw.once_in(2)).then(|| draw.late(model));
        }
        model.materials.insert(name, material);
        forget(model);
    }
}

fn stock(draw: &mut Draw<'_>, model: &mut Model) {
    if let Some((name, mut material)) = one(draw, &model.materials) {
        match &mut material.stock {
            Some(stock) if !draw.once_in(3) => {
                if draw.once_in(2) {
                    stock.at_least = moved(draw, model, &stock.at_least, 0, 3);
                }
                stock.at_most = draw.most(model, 3, 4, 20);
                stock.cost = moved(draw, model, &stock.cost, 0, 1);
            }
            Some(_) => material.stock = None,
            None => material.stock = Some(draw.stock(model)),
        }
        model.materials.insert(name, material);
        forget(model);
    }
}

fn closing(draw: &mut Draw<'_>, model: &mut Model) {
    if let Some((name, mut material)) = one(draw, &model.materials) {
        material.closing = (!draw.once_in(3)).then(|| draw.closing());
        model.materials.insert(name, material);
        forget(model);
    }
}

fn discard(draw: &mut Draw<'_>, model: &mut Model) {
    if let Some((name, mut material)) = one(draw, &model.materials) {
        material.discard.cost = moved(draw, model, &material.discard.cost, 0, 3);
        material.discard.at_most = draw.most(model, 2, 0, 9);
        model.materials.insert(name, material);
    }
}

fn material_in_or_out(draw: &mut Draw<'_>, model: &mut Model) {
    if model.materials.len() > 1 && draw.once_in(2) {
        if let Some((gone, _)) = model.materials.pop_first() {
            for activity in model.activities.values_mut() {
                activity.draws.remove(&gone);
                activity.makes.remove(&gone);
            }
        }
    } else {
        let (new, material) = (name(["zz_material", "aa_material"][draw.rng.below(2)]), draw.material(model));
        model.materials.insert(new.clone(), material);
        if let Some((maker, mut activity)) = one(draw, &model.activities) {
            activity.makes.insert(new, draw.value(model, 1, 4));
            model.activities.insert(maker, activity);
        }
    }
    forget(model);
}

fn limit(draw: &mut Draw<'_>, model: &mut Model) {
    match (draw.rng.below(5), one(draw, &model.limits)) {
        (0, Some((name, _))) => drop(model.limits.remove(&name)),
        (1, Some((name, mut limit))) => {
            limit.bound = draw.bound(model, limit.per.is_some(), limit.over == Over::Each);
            model.limits.insert(name, limit);
        }
        (2, Some((name, mut limit))) => {
            limit.over = draw.over(model);
            if limit.over != Over::Each {
                limit.bound = draw.bound(model, limit.per.is_some(), false);
            }
            model.limits.insert(name, limit);
        }
        (3, Some((name, mut limit))) => {
            let (term, rate) = (draw.term(model), draw.value(model, 1, 4));
            limit.terms.insert(term, rate);
            model.limits.insert(name, limit);
        }
        _ => drop(model.limits.insert(name(["zz_limit", "aa_limit"][draw.rng.below(2)]), draw.limit(model))),
    }
}

/// The first week goes, another comes, or both.
fn roll(draw: &mut Draw<'_>, model: &mut Model) {
    let Some(first) = model.horizon.periods().next().and_then(|period| model.horizon.label(period)) else { return };
    let (first, count): (usize, usize) = (first[1..].parse().unwrap(), model.horizon.count());
    let dropped = draw.rng.below(2).min(count - 1);
    let added = 1 + draw.rng.below(2);
    let horizon = weeks(first + dropped, (count - dropped + added).min(5));
    let all = std::mem::take(&mut model.horizon);
    let map = |value: &mut Value| rolled(value, &all, &horizon);
    for resource in model.resources.values_mut() {
        [&mut resource.capacity, &mut resource.at_least, &mut resource.cost].into_iter().for_each(map);
        resource.surge.iter_mut().flat_map(|tier| [&mut tier.at_most, &mut tier.cost]).for_each(map);
    }
    for activity in model.activities.values_mut() {
        [&mut activity.price, &mut activity.cost, &mut activity.at_least, &mut activity.at_most]
            .into_iter()
            .for_each(map);
        map(&mut activity.change_at_most);
        [&mut activity.uses, &mut activity.draws, &mut activity.makes]
            .into_iter()
            .flat_map(BTreeMap::values_mut)
            .for_each(map);
    }
    for material in model.materials.values_mut() {
        for tier in &mut material.purchase {
            [&mut tier.price, &mut tier.at_least, &mut tier.at_most].into_iter().for_each(map);
        }
        for tier in &mut material.sale {
            [&mut tier.price, &mut tier.at_least, &mut tier.at_most].into_iter().for_each(map);
            tier.late.iter_mut().flat_map(|late| [&mut late.cost, &mut late.at_most]).for_each(map);
        }
        let stock = material.stock.iter_mut();
        stock.flat_map(|stock| [&mut stock.cost, &mut stock.at_least, &mut stock.at_most]).for_each(map);
        [&mut material.discard.cost, &mut material.discard.at_most].into_iter().for_each(map);
    }
    for limit in model.limits.values_mut() {
        limit.terms.values_mut().chain(limit.per.iter_mut().flat_map(BTreeMap::values_mut)).for_each(map);
        match &mut limit.bound {
            Bound::Between(least, most) => [least, most].into_iter().for_each(map),
            Bound::Equals(exactly) => map(exactly),
        }
        if let Over::Some(_) = limit.over {
            limit.over = Over::Some(horizon.periods().skip(horizon.count() - 1).collect());
        }
    }
    model.horizon = horizon;
}

/// The numbers of the weeks that stay; those that come are like the last.
fn rolled(value: &mut Value, from: &Horizon, to: &Horizon) {
    if let Value::Listed(numbers) = value {
        let last = *numbers.last().unwrap();
        let number = |period| from.period(to.label(period).unwrap()).map_or(last, |period| numbers[period.position()]);
        *value = Value::Listed(to.periods().map(number).collect());
    }
}

/// Takes out the terms that name what is gone, and the limits that are left without any.
fn forget(model: &mut Model) {
    let Model { resources, activities, materials, limits, .. } = model;
    let is_there = |term: &Term| match term {
        Term::Activity(name) => activities.contains_key(name),
        Term::Surge(name, tier) => resources[name].surge.len() >= tier.unwrap_or(1),
        Term::Material(name, flow) => materials.get(name).is_some_and(|material| {
            use millreeve::model::Flow::{Discard, Late, Purchase, Sale, Stock};
            let late = material.sale.iter().all(|sale| sale.late.is_some());
            match flow {
                Purchase(tier) => material.purchase.len() >= tier.unwrap_or(1),
                Sale(tier) => material.sale.len() >= tier.unwrap_or(1),
                Late(tier) => late && material.sale.len() >= tier.unwrap_or(1),
                Stock => material.stock.is_some() || material.closing.is_some(),
                Discard => true,
            }
        }),
        Term::Tag(_) | Term::All => true,
    };
    for limit in limits.values_mut() {
        limit.terms.retain(|term, _| is_there(term));
        if let Some(per) = &mut limit.per {
            per.retain(|term, _| is_there(term));
        }
    }
    limits.retain(|_, limit| !limit.terms.is_empty() && limit.per.as_ref().is_none_or(|per| !per.is_empty()));
}

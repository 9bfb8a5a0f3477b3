//! Random edits of a model, one of every kind that people make.

use std::collections::BTreeMap;

use millreeve::model::{Activity, Aim, Bound, Limit, Model, Name, Resource, Term, Value};

use crate::random::{Draw, Grain, TAGS, name};
use crate::rng::Rng;

const INF: f64 = f64::INFINITY;

type Edit = fn(&mut Draw<'_>, &mut Model);

const EDITS: [Edit; 20] = [
    |_, model| model.title = Some("Tileworks".to_owned()),
    price,
    price,
    resource_cost,
    capacity,
    capacity,
    minimum_load,
    level_bounds,
    level_bounds,
    new_activity,
    activity_withdrawn,
    prospect,
    |draw, model| drop(model.limits.insert(name("zz_limit"), draw.limit(model))),
    limit_withdrawn,
    new_resource,
    resource_withdrawn,
    recipe,
    term,
    limit_bound,
    rare,
];

/// `model` after one to three edits.
pub(crate) fn edit(rng: &mut Rng, model: &Model) -> Model {
    let mut edited = model.clone();
    let times = if rng.below(4) == 0 { 2 + rng.below(2) } else { 1 };
    for _ in 0..times {
        let grain = if rng.below(2) == 0 { Grain::Coarse } else { Grain::Fine };
        let edit = *rng.pick(&EDITS);
        edit(&mut Draw { rng, grain }, &mut edited);
    }
    edited
}

fn one<'m, T>(draw: &mut Draw<'_>, map: &'m mut BTreeMap<Name, T>) -> Option<(Name, &'m mut T)> {
    if map.is_empty() {
        return None;
    }
    let at = draw.rng.below(map.len());
    map.iter_mut().nth(at).map(|(name, item)| (name.clone(), item))
}

fn price(draw: &mut Draw<'_>, model: &mut Model) {
    let aim = model.aim;
    if let Some((_, activity)) = one(draw, &mut model.activities) {
        draw.priced(activity, aim);
    }
}

fn resource_cost(draw: &mut Draw<'_>, model: &mut Model) {
    if let Some((_, resource)) = one(draw, &mut model.resources) {
        resource.cost = draw.number(0, 3).into();
    }
}

fn bounds_of(resource: &Resource) -> (f64, f64) {
    (resource.at_least.numbers()[0], resource.capacity.numbers()[0])
}

fn capacity(draw: &mut Draw<'_>, model: &mut Model) {
    if let Some((_, resource)) = one(draw, &mut model.resources) {
        let (least, _) = bounds_of(resource);
        let most = if draw.once_in(5) { INF } else { draw.number(4, 40) };
        resource.capacity = most.max(least).into();
    }
}

fn minimum_load(draw: &mut Draw<'_>, model: &mut Model) {
    if let Some((_, resource)) = one(draw, &mut model.resources) {
        let (_, most) = bounds_of(resource);
        let least = if draw.once_in(3) { -INF } else { draw.number(0, 6) };
        resource.at_least = least.min(most).into();
    }
}

fn level_bounds(draw: &mut Draw<'_>, model: &mut Model) {
    if let Some((_, activity)) = one(draw, &mut model.activities) {
        let least = match draw.rng.below(8) {
            0 => -INF,
            1 => draw.number(-6, -1),
            2 => draw.number(1, 4),
            _ => 0.0,
        };
        let most = if draw.once_in(3) { INF } else { least.max(0.0) + draw.number(0, 9) };
        (activity.at_least, activity.at_most) = (least.into(), most.into());
    }
}

fn new_activity(draw: &mut Draw<'_>, model: &mut Model) {
    let new = name(["zz_new", "aa_new"][draw.rng.below(2)]);
    let activity = draw.activity(model);
    if !draw.once_in(3)
        && let Some((_, limit)) = one(draw, &mut model.limits)
    {
        limit.terms.insert(Term::Activity(new.clone()), 2.0.into());
    }
    model.activities.insert(new, activity);
}

/// With all terms that name it; a limit that is left without terms goes too.
fn activity_withdrawn(draw: &mut Draw<'_>, model: &mut Model) {
    if model.activities.len() < 2 {
        return;
    }
    let Some((gone, _)) = one(draw, &mut model.activities) else { return };
    model.activities.remove(&gone);
    let term = Term::Activity(gone);
    for limit in model.limits.values_mut() {
        limit.terms.remove(&term);
        if let Some(per) = &mut limit.per {
            per.remove(&term);
        }
    }
    model.limits.retain(|_, limit| !limit.terms.is_empty() && limit.per.as_ref().is_none_or(|per| !per.is_empty()));
}

fn prospect(draw: &mut Draw<'_>, model: &mut Model) {
    if let Some((_, activity)) = one(draw, &mut model.activities) {
        activity.prospect = !activity.prospect;
    }
}

fn limit_withdrawn(draw: &mut Draw<'_>, model: &mut Model) {
    if let Some((gone, _)) = one(draw, &mut model.limits) {
        model.limits.remove(&gone);
    }
}

fn new_resource(draw: &mut Draw<'_>, model: &mut Model) {
    let new = name(["zz_resource", "aa_resource"][draw.rng.below(2)]);
    let resource = draw.resource();
    model.resources.insert(new.clone(), resource);
    for activity in model.activities.values_mut() {
        if draw.once_in(2) {
            activity.uses.insert(new.clone(), draw.rate().into());
        }
    }
}

fn resource_withdrawn(draw: &mut Draw<'_>, model: &mut Model) {
    if model.resources.len() < 2 {
        return;
    }
    let Some((gone, _)) = one(draw, &mut model.resources) else { return };
    model.resources.remove(&gone);
    for activity in model.activities.values_mut() {
        activity.uses.remove(&gone);
    }
}

fn recipe(draw: &mut Draw<'_>, model: &mut Model) {
    let resources: Vec<Name> = model.resources.keys().cloned().collect();
    if let Some((_, activity)) = one(draw, &mut model.activities) {
        let resource = draw.rng.pick(&resources).clone();
        if draw.once_in(4) {
            activity.uses.remove(&resource);
        } else {
            activity.uses.insert(resource, draw.rate().into());
        }
    }
}

fn term(draw: &mut Draw<'_>, model: &mut Model) {
    let (term, rate) = (draw.term(model), Value::from(draw.rate()));
    if let Some((_, limit)) = one(draw, &mut model.limits) {
        let terms = match &mut limit.per {
            Some(per) if draw.once_in(2) => per,
            _ => &mut limit.terms,
        };
        if terms.len() > 1 && draw.once_in(3) {
            terms.pop_first();
        } else {
            terms.insert(term, rate);
        }
    }
}

fn limit_bound(draw: &mut Draw<'_>, model: &mut Model) {
    let aim = model.aim;
    if let Some((_, limit)) = one(draw, &mut model.limits) {
        limit.bound = draw.bound(aim);
        if limit.per.is_some() && draw.once_in(2) {
            limit.bound = Bound::Between(0.25.into(), 0.75.into());
        }
    }
}

/// What is seldom done.
fn rare(draw: &mut Draw<'_>, model: &mut Model) {
    match draw.rng.below(5) {
        0 => model.constant = draw.number(-9, 9),
        1 => turn_round(draw, model),
        2 => {
            let tag = name(TAGS[draw.rng.below(TAGS.len())]);
            if let Some((_, Activity { tags, .. })) = one(draw, &mut model.activities)
                && !tags.remove(&tag)
            {
                tags.insert(tag);
            }
        }
        3 => {
            let per = BTreeMap::from([(draw.term(model), Value::from(draw.rate()))]);
            if let Some((_, Limit { per: old, .. })) = one(draw, &mut model.limits) {
                *old = if old.is_some() { None } else { Some(per) };
            }
        }
        // Renamed: everything else stays.
        _ => {
            if let Some(first) = model.activities.keys().next().cloned()
                && let Some(activity) = model.activities.remove(&first)
            {
                model.activities.insert(name("renamed"), activity);
                activity_forgotten(model, &first);
            }
        }
    }
}

/// An aim that is to be small has no prices.
fn turn_round(draw: &mut Draw<'_>, model: &mut Model) {
    model.aim = if model.aim == Aim::Maximise { Aim::Minimise } else { Aim::Maximise };
    for activity in model.activities.values_mut() {
        if model.aim == Aim::Minimise {
            activity.price = 0.0.into();
        } else {
            draw.priced(activity, Aim::Maximise);
        }
    }
}

/// Terms that name what is gone now name what it is called.
fn activity_forgotten(model: &mut Model, gone: &Name) {
    let (old, new) = (Term::Activity(gone.clone()), Term::Activity(name("renamed")));
    for limit in model.limits.values_mut() {
        for terms in std::iter::once(&mut limit.terms).chain(&mut limit.per) {
            if let Some(rate) = terms.remove(&old) {
                terms.insert(new.clone(), rate);
            }
        }
    }
}

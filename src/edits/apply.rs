//! Making one edit alone: a model on the way from the old to the new one.

use std::collections::BTreeMap;

use super::edit::{Edit, Subject};
use crate::model::{Activity, Model, Name, Resource};

/// Makes `edit`, one of those that lead to `new`, in `model`.
///
/// What comes of some edits of several need not be a model that a reading would let through, but a program can be built of it.
pub fn apply(model: &mut Model, edit: &Edit, new: &Model) {
    match &edit.subject {
        Subject::Model => match edit.address.as_str() {
            "title" => model.title.clone_from(&new.title),
            "currency" => model.currency.clone_from(&new.currency),
            "constant" => model.constant = new.constant,
            _ => model.aim = new.aim,
        },
        Subject::Resource(name) => part(&edit.address, name, &mut model.resources, &new.resources, resource),
        Subject::Activity(name) => part(&edit.address, name, &mut model.activities, &new.activities, activity),
        Subject::Limit(name, _) => part(&edit.address, name, &mut model.limits, &new.limits, |_, _, _| false),
    }
}

/// Changes what the address names: a part of one thing where `change` knows it, else the whole thing.
fn part<T: Clone>(
    address: &str,
    name: &Name,
    things: &mut BTreeMap<Name, T>,
    new: &BTreeMap<Name, T>,
    change: impl Fn(&mut T, &T, &str) -> bool,
) {
    let Some(is) = new.get(name) else {
        things.remove(name);
        return;
    };
    let key = address.splitn(3, '.').nth(2);
    if let (Some(key), Some(was)) = (key, things.get_mut(name))
        && change(was, is, key)
    {
        return;
    }
    things.insert(name.clone(), is.clone());
}

fn resource(was: &mut Resource, is: &Resource, key: &str) -> bool {
    match key {
        "label" => was.label.clone_from(&is.label),
        "unit" => was.unit.clone_from(&is.unit),
        "capacity" => was.capacity.clone_from(&is.capacity),
        "at_least" => was.at_least.clone_from(&is.at_least),
        "cost" => was.cost.clone_from(&is.cost),
        _ => return false,
    }
    true
}

fn activity(was: &mut Activity, is: &Activity, key: &str) -> bool {
    match key {
        "label" => was.label.clone_from(&is.label),
        "unit" => was.unit.clone_from(&is.unit),
        "price" => was.price.clone_from(&is.price),
        "cost" => was.cost.clone_from(&is.cost),
        "at_least" => was.at_least.clone_from(&is.at_least),
        "at_most" => was.at_most.clone_from(&is.at_most),
        "prospect" => was.prospect = is.prospect,
        "tags" => was.tags.clone_from(&is.tags),
        _ => {
            let Some(resource) = key.strip_prefix("uses.") else { return false };
            match is.uses.get_key_value(resource) {
                Some((name, rate)) => drop(was.uses.insert(name.clone(), rate.clone())),
                None => drop(was.uses.remove(resource)),
            }
        }
    }
    true
}

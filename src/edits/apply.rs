//! Making one edit alone: a model on the way from the old to the new one.

use std::collections::BTreeMap;

use super::compare::moved;
use super::edit::{Edit, Kind};
use crate::model::{Activity, Horizon, Late, Material, Model, Name, Purchase, Resource, Sale, Stock, Surge, Value};

/// Makes `edit`, one of those that lead to `new`, in `model`.
///
/// What comes of some edits of several need not be a model that a reading would let through, but a program can be built of it.
pub fn apply(model: &mut Model, edit: &Edit, new: &Model) {
    if matches!(edit.kind, Kind::HorizonRolled | Kind::HorizonReplaced) {
        *model = moved(model, new);
        return;
    }
    let mut words: Vec<&str> = edit.address.split('.').collect();
    let at = At(&new.horizon);
    match words[..] {
        ["title"] => model.title.clone_from(&new.title),
        ["currency"] => model.currency.clone_from(&new.currency),
        ["constant"] => model.constant = new.constant,
        ["aim"] => model.aim = new.aim,
        [table, name, ..] => {
            let key = words.split_off(2);
            match table {
                "resources" => part(name, &key, &mut model.resources, &new.resources, |w, i, k| at.resource(w, i, k)),
                "activities" => {
                    part(name, &key, &mut model.activities, &new.activities, |w, i, k| at.activity(w, i, k))
                }
                "materials" => part(name, &key, &mut model.materials, &new.materials, |w, i, k| at.material(w, i, k)),
                _ => part(name, &key, &mut model.limits, &new.limits, |_, _, _| false),
            }
        }
        _ => {}
    }
}

/// Changes what the address names: a part of one thing where `change` knows it, else the whole thing.
fn part<T: Clone>(
    name: &str,
    key: &[&str],
    things: &mut BTreeMap<Name, T>,
    new: &BTreeMap<Name, T>,
    change: impl Fn(&mut T, &T, &[&str]) -> bool,
) {
    let Some((name, is)) = new.get_key_value(name) else {
        things.remove(name);
        return;
    };
    if let Some(was) = things.get_mut(name)
        && !key.is_empty()
        && change(was, is, key)
    {
        return;
    }
    things.insert(name.clone(), is.clone());
}

/// Makes edits over a horizon. What an address says after a key is the rest of it: nothing, or the one period that it is about.
struct At<'m>(&'m Horizon);

impl At<'_> {
    fn value(&self, was: &mut Value, is: &Value, rest: &[&str]) {
        match rest.first().and_then(|label| self.0.period(label)) {
            None => was.clone_from(is),
            Some(period) => {
                let mut numbers: Vec<f64> = match was {
                    Value::Every(number) => vec![*number; self.0.count()],
                    Value::Listed(numbers) => numbers.clone(),
                };
                if let Some(number) = numbers.get_mut(period.position()) {
                    *number = is.at(period);
                }
                *was = Value::Listed(numbers);
            }
        }
    }

    fn rate(&self, was: &mut BTreeMap<Name, Value>, is: &BTreeMap<Name, Value>, of: &str, rest: &[&str]) {
        match (is.get_key_value(of), was.get_mut(of)) {
            (Some((_, is)), Some(was)) => self.value(was, is, rest),
            (Some((name, is)), None) => drop(was.insert(name.clone(), is.clone())),
            (None, _) => drop(was.remove(of)),
        }
    }

    fn resource(&self, was: &mut Resource, is: &Resource, key: &[&str]) -> bool {
        match *key {
            ["label"] => was.label.clone_from(&is.label),
            ["unit"] => was.unit.clone_from(&is.unit),
            ["capacity", ref rest @ ..] => self.value(&mut was.capacity, &is.capacity, rest),
            ["at_least", ref rest @ ..] => self.value(&mut was.at_least, &is.at_least, rest),
            ["cost", ref rest @ ..] => self.value(&mut was.cost, &is.cost, rest),
            ["surge", tier, ref rest @ ..] => self.tier(&mut was.surge, &is.surge, tier, rest, Self::surge),
            _ => return false,
        }
        true
    }

    fn activity(&self, was: &mut Activity, is: &Activity, key: &[&str]) -> bool {
        match *key {
            ["label"] => was.label.clone_from(&is.label),
            ["unit"] => was.unit.clone_from(&is.unit),
            ["price", ref rest @ ..] => self.value(&mut was.price, &is.price, rest),
            ["cost", ref rest @ ..] => self.value(&mut was.cost, &is.cost, rest),
            ["at_least", ref rest @ ..] => self.value(&mut was.at_least, &is.at_least, rest),
            ["at_most", ref rest @ ..] => self.value(&mut was.at_most, &is.at_most, rest),
            ["change_at_most", ref rest @ ..] => self.value(&mut was.change_at_most, &is.change_at_most, rest),
            ["lead"] => was.lead = is.lead,
            ["prospect"] => was.prospect = is.prospect,
            ["tags"] => was.tags.clone_from(&is.tags),
            ["uses", of, ref rest @ ..] => self.rate(&mut was.uses, &is.uses, of, rest),
            ["draws", of, ref rest @ ..] => self.rate(&mut was.draws, &is.draws, of, rest),
            ["makes", of, ref rest @ ..] => self.rate(&mut was.makes, &is.makes, of, rest),
            _ => return false,
        }
        true
    }

    fn material(&self, was: &mut Material, is: &Material, key: &[&str]) -> bool {
        match *key {
            ["label"] => was.label.clone_from(&is.label),
            ["unit"] => was.unit.clone_from(&is.unit),
            ["opening"] => was.opening = is.opening,
            ["purchase", tier, ref rest @ ..] => self.tier(&mut was.purchase, &is.purchase, tier, rest, Self::purchase),
            ["sale", tier, ref rest @ ..] => self.tier(&mut was.sale, &is.sale, tier, rest, Self::sale),
            ["stock", ref rest @ ..] => self.optional(&mut was.stock, is.stock.as_ref(), rest, Self::stock),
            ["closing", ref rest @ ..] => match (&mut was.closing, is.closing, rest) {
                (Some(was), is, ["at_least"]) => was.at_least = is.unwrap_or_default().at_least,
                (Some(was), is, ["worth"]) => was.worth = is.unwrap_or_default().worth,
                (was, is, _) => *was = is,
            },
            ["discard", "cost", ref rest @ ..] => self.value(&mut was.discard.cost, &is.discard.cost, rest),
            ["discard", "at_most", ref rest @ ..] => self.value(&mut was.discard.at_most, &is.discard.at_most, rest),
            _ => return false,
        }
        true
    }

    /// A tier, counted from 1, or a part of it.
    fn tier<T: Clone>(
        &self,
        was: &mut Vec<T>,
        is: &[T],
        tier: &str,
        key: &[&str],
        change: impl Fn(&Self, &mut T, &T, &[&str]),
    ) {
        let Some(at) = tier.parse::<usize>().ok().and_then(|tier| tier.checked_sub(1)) else { return };
        match (was.get_mut(at), is.get(at)) {
            (Some(was), Some(is)) => change(self, was, is, key),
            (None, Some(is)) => was.push(is.clone()),
            (_, None) => was.truncate(at),
        }
    }

    /// Something that may not be there, or a part of it.
    fn optional<T: Clone>(
        &self,
        was: &mut Option<T>,
        is: Option<&T>,
        key: &[&str],
        change: impl Fn(&Self, &mut T, &T, &[&str]),
    ) {
        match (was, is) {
            (Some(was), Some(is)) if !key.is_empty() => change(self, was, is, key),
            (was, is) => *was = is.cloned(),
        }
    }

    fn surge(&self, was: &mut Surge, is: &Surge, key: &[&str]) {
        match *key {
            ["cost", ref rest @ ..] => self.value(&mut was.cost, &is.cost, rest),
            ["at_most", ref rest @ ..] => self.value(&mut was.at_most, &is.at_most, rest),
            _ => *was = is.clone(),
        }
    }

    fn purchase(&self, was: &mut Purchase, is: &Purchase, key: &[&str]) {
        match *key {
            ["price", ref rest @ ..] => self.value(&mut was.price, &is.price, rest),
            ["at_least", ref rest @ ..] => self.value(&mut was.at_least, &is.at_least, rest),
            ["at_most", ref rest @ ..] => self.value(&mut was.at_most, &is.at_most, rest),
            _ => *was = is.clone(),
        }
    }

    fn sale(&self, was: &mut Sale, is: &Sale, key: &[&str]) {
        match *key {
            ["price", ref rest @ ..] => self.value(&mut was.price, &is.price, rest),
            ["at_least", ref rest @ ..] => self.value(&mut was.at_least, &is.at_least, rest),
            ["late", ref rest @ ..] => self.optional(&mut was.late, is.late.as_ref(), rest, Self::late),
            ["at_most", ref rest @ ..] => self.value(&mut was.at_most, &is.at_most, rest),
            _ => *was = is.clone(),
        }
    }

    fn late(&self, was: &mut Late, is: &Late, key: &[&str]) {
        match *key {
            ["cost", ref rest @ ..] => self.value(&mut was.cost, &is.cost, rest),
            ["at_most", ref rest @ ..] => self.value(&mut was.at_most, &is.at_most, rest),
            _ => *was = is.clone(),
        }
    }

    fn stock(&self, was: &mut Stock, is: &Stock, key: &[&str]) {
        match *key {
            ["cost", ref rest @ ..] => self.value(&mut was.cost, &is.cost, rest),
            ["at_least", ref rest @ ..] => self.value(&mut was.at_least, &is.at_least, rest),
            ["at_most", ref rest @ ..] => self.value(&mut was.at_most, &is.at_most, rest),
            _ => *was = is.clone(),
        }
    }
}

//! Other periods: what they do to a model, and the one edit that they are.

use std::collections::BTreeMap;

use super::Edits;
use crate::edits::edit::{Kind, Subject};
use crate::model::{
    Activity, Bound, Horizon, Limit, Material, Model, Name, Over, Period, Purchase, Resource, Sale, Surge, Value,
};

impl Edits {
    /// One edit where other periods are planned than before.
    pub(super) fn periods(&mut self, old: &Horizon, new: &Horizon) {
        if old != new {
            let (kind, told): (_, fn(&Horizon) -> Option<String>) =
                if is_rolled(old, new) { (Kind::HorizonRolled, range) } else { (Kind::HorizonReplaced, list) };
            self.push("periods".to_owned(), &Subject::Model, kind, told(old), told(new));
        }
    }
}

/// Whether `new` follows from `old` by dropping periods at the beginning and adding some at the end.
fn is_rolled(old: &Horizon, new: &Horizon) -> bool {
    let (old, new) = (labels(old), labels(new));
    let dropped = new.first().and_then(|first| old.iter().position(|label| label == first));
    dropped.is_some_and(|dropped| {
        let kept = &old[dropped..];
        new.starts_with(kept) && new[kept.len()..].iter().all(|added| !old.contains(added))
    })
}

fn labels(horizon: &Horizon) -> Vec<&str> {
    horizon.periods().filter_map(|period| horizon.label(period)).collect()
}

/// All periods; `None` where they have no names.
fn list(horizon: &Horizon) -> Option<String> {
    horizon.is_named().then(|| format!("[{}]", labels(horizon).join(", ")))
}

/// The periods from first to last; `None` where they have no names.
fn range(horizon: &Horizon) -> Option<String> {
    match labels(horizon)[..] {
        [] => None,
        [one] => Some(one.to_owned()),
        [first, .., last] => Some(format!("{first} to {last}")),
    }
}

/// `old` as it stands once the periods are those of `new`: every number of a period that both plan stays, those of other periods are
/// as `new` has them, so that what still differs is about the periods that both plan.
pub(in crate::edits) fn moved(old: &Model, new: &Model) -> Model {
    let roll = Roll::between(&old.horizon, &new.horizon);
    Model {
        horizon: new.horizon.clone(),
        resources: roll.each(&old.resources, &new.resources, Roll::resource),
        activities: roll.each(&old.activities, &new.activities, Roll::activity),
        materials: roll.each(&old.materials, &new.materials, Roll::material),
        limits: roll.each(&old.limits, &new.limits, Roll::limit),
        ..old.clone()
    }
}

/// For each new period the old one of the same name, where there is one.
struct Roll {
    from: Vec<Option<Period>>,
    new: Vec<Period>,
}

impl Roll {
    fn between(old: &Horizon, new: &Horizon) -> Self {
        let was = |period| new.label(period).and_then(|label| old.period(label));
        Self { from: new.periods().map(was).collect(), new: new.periods().collect() }
    }

    fn each<T: Clone>(
        &self,
        old: &BTreeMap<Name, T>,
        new: &BTreeMap<Name, T>,
        moved: impl Fn(&Self, &T, Option<&T>) -> T,
    ) -> BTreeMap<Name, T> {
        old.iter().map(|(name, thing)| (name.clone(), moved(self, thing, new.get(name)))).collect()
    }

    /// A value whose counterpart is given, where there is one.
    fn value(&self, old: &Value, new: Option<&Value>) -> Value {
        let single = |value: &Value| matches!(value, Value::Every(_));
        if single(old) && new.is_none_or(single) {
            return old.clone();
        }
        let last = old.numbers().last().copied().unwrap_or(0.0);
        let number = |(from, period): (&Option<Period>, &Period)| match from {
            Some(from) => old.at(*from),
            None => new.map_or(last, |new| new.at(*period)),
        };
        Value::Listed(self.from.iter().zip(&self.new).map(number).collect())
    }

    fn values<K: Ord + Clone>(&self, old: &BTreeMap<K, Value>, new: Option<&BTreeMap<K, Value>>) -> BTreeMap<K, Value> {
        let moved = |(key, value): (&K, &Value)| (key.clone(), self.value(value, new.and_then(|new| new.get(key))));
        old.iter().map(moved).collect()
    }

    fn resource(&self, old: &Resource, new: Option<&Resource>) -> Resource {
        let surge = |(at, tier): (usize, &Surge)| {
            let is = new.and_then(|new| new.surge.get(at));
            Surge {
                at_most: self.value(&tier.at_most, is.map(|is| &is.at_most)),
                cost: self.value(&tier.cost, is.map(|is| &is.cost)),
            }
        };
        Resource {
            label: old.label.clone(),
            unit: old.unit.clone(),
            capacity: self.value(&old.capacity, new.map(|new| &new.capacity)),
            at_least: self.value(&old.at_least, new.map(|new| &new.at_least)),
            cost: self.value(&old.cost, new.map(|new| &new.cost)),
            surge: old.surge.iter().enumerate().map(surge).collect(),
        }
    }

    fn activity(&self, old: &Activity, new: Option<&Activity>) -> Activity {
        Activity {
            price: self.value(&old.price, new.map(|new| &new.price)),
            cost: self.value(&old.cost, new.map(|new| &new.cost)),
            uses: self.values(&old.uses, new.map(|new| &new.uses)),
            draws: self.values(&old.draws, new.map(|new| &new.draws)),
            makes: self.values(&old.makes, new.map(|new| &new.makes)),
            at_least: self.value(&old.at_least, new.map(|new| &new.at_least)),
            at_most: self.value(&old.at_most, new.map(|new| &new.at_most)),
            change_at_most: self.value(&old.change_at_most, new.map(|new| &new.change_at_most)),
            ..old.clone()
        }
    }

    fn material(&self, old: &Material, new: Option<&Material>) -> Material {
        let mut moved = old.clone();
        for (at, Purchase { price, at_least, at_most }) in moved.purchase.iter_mut().enumerate() {
            let is = new.and_then(|new| new.purchase.get(at));
            *price = self.value(price, is.map(|is| &is.price));
            *at_least = self.value(at_least, is.map(|is| &is.at_least));
            *at_most = self.value(at_most, is.map(|is| &is.at_most));
        }
        for (at, Sale { price, at_least, at_most, late }) in moved.sale.iter_mut().enumerate() {
            let is = new.and_then(|new| new.sale.get(at));
            *price = self.value(price, is.map(|is| &is.price));
            *at_least = self.value(at_least, is.map(|is| &is.at_least));
            *at_most = self.value(at_most, is.map(|is| &is.at_most));
            if let Some(late) = late {
                let is = is.and_then(|is| is.late.as_ref());
                late.cost = self.value(&late.cost, is.map(|is| &is.cost));
                late.at_most = self.value(&late.at_most, is.map(|is| &is.at_most));
            }
        }
        if let Some(stock) = &mut moved.stock {
            let is = new.and_then(|new| new.stock.as_ref());
            stock.cost = self.value(&stock.cost, is.map(|is| &is.cost));
            stock.at_least = self.value(&stock.at_least, is.map(|is| &is.at_least));
            stock.at_most = self.value(&stock.at_most, is.map(|is| &is.at_most));
        }
        moved.discard.cost = self.value(&old.discard.cost, new.map(|new| &new.discard.cost));
        moved.discard.at_most = self.value(&old.discard.at_most, new.map(|new| &new.discard.at_most));
        moved
    }

    fn limit(&self, old: &Limit, new: Option<&Limit>) -> Limit {
        let bound = match (&old.bound, new.map(|new| &new.bound)) {
            (Bound::Between(least, most), Some(Bound::Between(is_least, is_most))) => {
                Bound::Between(self.value(least, Some(is_least)), self.value(most, Some(is_most)))
            }
            (Bound::Between(least, most), _) => Bound::Between(self.value(least, None), self.value(most, None)),
            (Bound::Equals(exactly), Some(Bound::Equals(is))) => Bound::Equals(self.value(exactly, Some(is))),
            (Bound::Equals(exactly), _) => Bound::Equals(self.value(exactly, None)),
        };
        let per = old.per.as_ref().map(|per| self.values(per, new.and_then(|new| new.per.as_ref())));
        Limit {
            label: old.label.clone(),
            terms: self.values(&old.terms, new.map(|new| &new.terms)),
            per,
            bound,
            over: self.over(&old.over, new.map(|new| &new.over)),
        }
    }

    /// The periods of a limit that are still planned; those of its counterpart where none is.
    fn over(&self, old: &Over, new: Option<&Over>) -> Over {
        let Over::Some(periods) = old else { return old.clone() };
        let still =
            self.new.iter().zip(&self.from).filter(|(_, from)| from.is_some_and(|from| periods.contains(&from)));
        let still: Vec<Period> = still.map(|(period, _)| *period).collect();
        match new {
            _ if !still.is_empty() => Over::Some(still),
            Some(new) => new.clone(),
            None => Over::All,
        }
    }
}

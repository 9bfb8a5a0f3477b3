//! What a model means, as a hash: equal for two models that must get the same plan.

mod digest;
mod groups;

use std::collections::BTreeMap;
use std::fmt;

use super::name::Name;
use super::types::{
    Activity, Bound, Closing, Discard, Late, Limit, Material, Model, Over, Purchase, Resource, Sale, Stock, Surge, Term,
};
use super::value::Value;
use digest::Digest;
use groups::Groups;

/// The BLAKE3 hash of a model's meaning.
///
/// Titles, labels, units, comments, layout and the order of declaration do not count; nor does what a tag is called and who carries one
/// that no limit sums, nor the difference between a value left out and its default written out, or between a number and a list
/// of it for every period. Everything else does.
#[derive(Clone, Copy, PartialEq, Eq, Hash)]
pub struct Meaning([u8; 32]);

impl Meaning {
    /// The hash of what `model` means.
    #[must_use]
    pub fn of(model: &Model) -> Self {
        let mut telling = Telling { digest: Digest::new("millreeve meaning 1\n"), groups: Groups::of(model) };
        telling.model(model);
        Self(telling.digest.finish())
    }

    /// The meaning whose text is `text`: 64 hexadecimal digits, as [`Display`](fmt::Display) writes them.
    #[must_use]
    pub fn parse(text: &str) -> Option<Self> {
        blake3::Hash::from_hex(text).ok().map(|hash| Self(*hash.as_bytes()))
    }
}

impl fmt::Display for Meaning {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&blake3::Hash::from_bytes(self.0).to_hex())
    }
}

impl fmt::Debug for Meaning {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "Meaning({self})")
    }
}

/// Feeds a model to the hash.
struct Telling<'m> {
    digest: Digest,
    groups: Groups<'m>,
}

impl Telling<'_> {
    fn model(&mut self, model: &Model) {
        let Model { title: _, currency, aim, constant, horizon, resources, activities, materials, limits } = model;
        self.digest.text(aim.word());
        self.digest.text(currency.as_deref().unwrap_or(""));
        self.digest.number(*constant);
        let labels: Vec<_> = horizon.periods().filter_map(|period| horizon.label(period)).collect();
        self.list(&labels, |telling, label| telling.digest.text(label));
        self.map(resources, Self::resource);
        self.map(activities, Self::activity);
        self.map(materials, Self::material);
        self.map(limits, Self::limit);
    }

    fn resource(&mut self, resource: &Resource) {
        let Resource { label: _, unit: _, capacity, at_least, cost, surge } = resource;
        self.digest.values([capacity, at_least, cost]);
        self.list(surge, |telling, Surge { at_most, cost }| telling.digest.values([at_most, cost]));
    }

    fn activity(&mut self, activity: &Activity) {
        let Activity { label: _, unit: _, price, cost, uses, draws, makes, .. } = activity;
        let Activity { lead, at_least, at_most, change_at_most, tags: _, prospect, .. } = activity;
        self.digest.values([price, cost, at_least, at_most, change_at_most]);
        for rates in [uses, draws, makes] {
            self.digest.rates(rates);
        }
        self.digest.count(*lead);
        self.digest.count(usize::from(*prospect));
    }

    fn material(&mut self, material: &Material) {
        let Material { label: _, unit: _, opening, purchase, sale, stock, closing, discard } = material;
        self.digest.number(*opening);
        self.list(purchase, |telling, Purchase { price, at_least, at_most }| {
            telling.digest.values([price, at_least, at_most]);
        });
        self.list(sale, |telling, Sale { price, at_least, at_most, late }| {
            telling.digest.values([price, at_least, at_most]);
            telling.list(late.as_slice(), |telling, Late { cost, at_most }| telling.digest.values([cost, at_most]));
        });
        self.list(stock.as_slice(), |telling, Stock { cost, at_least, at_most }| {
            telling.digest.values([cost, at_least, at_most]);
        });
        self.list(closing.as_slice(), |telling, Closing { at_least, worth }| {
            telling.digest.number(*at_least);
            telling.digest.number(*worth);
        });
        let Discard { cost, at_most } = discard;
        self.digest.values([cost, at_most]);
    }

    fn limit(&mut self, limit: &Limit) {
        let Limit { label: _, terms, per, bound, over } = limit;
        self.sum(terms);
        self.list(per.as_slice(), Self::sum);
        match bound {
            Bound::Between(least, most) => {
                self.digest.text("between");
                self.digest.values([least, most]);
            }
            Bound::Equals(value) => {
                self.digest.text("equals");
                self.digest.value(value);
            }
        }
        match over {
            Over::Each => self.digest.text("each"),
            Over::All => self.digest.text("all"),
            Over::Some(periods) => {
                self.digest.text("some");
                self.list(periods, |telling, period| telling.digest.count(period.position()));
            }
        }
    }

    /// The terms of a sum. A tag is told by its activities, so that what it is called does not count.
    fn sum(&mut self, terms: &BTreeMap<Term, Value>) {
        self.digest.count(terms.len());
        let mut groups = Vec::new();
        for (term, value) in terms {
            match term {
                Term::Tag(tag) => {
                    groups.push((self.groups.hash(tag), value));
                    continue;
                }
                Term::Activity(name) => {
                    self.digest.text("activity");
                    self.digest.text(name.as_str());
                }
                Term::All | Term::Material(..) | Term::Surge(..) => self.digest.text(&term.to_string()),
            }
            self.digest.value(value);
        }
        groups.sort_by_cached_key(|(group, value)| (*group, digest::key(value)));
        for (group, value) in groups {
            self.digest.text("group");
            self.digest.bytes(&group);
            self.digest.value(value);
        }
    }

    fn map<T>(&mut self, map: &BTreeMap<Name, T>, tell: impl Fn(&mut Self, &T)) {
        self.digest.count(map.len());
        for (name, entry) in map {
            self.digest.text(name.as_str());
            tell(self, entry);
        }
    }

    fn list<T>(&mut self, list: &[T], tell: impl Fn(&mut Self, &T)) {
        self.digest.count(list.len());
        list.iter().for_each(|entry| tell(self, entry));
    }
}

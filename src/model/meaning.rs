//! What a model means, as a hash: equal for two models that must get the same plan.

use std::collections::BTreeMap;
use std::fmt;
use std::hash::Hash;

use super::name::Name;
use super::types::{Activity, Bound, Limit, Model, Resource, Term};
use super::value::Value;

/// The BLAKE3 hash of a model's meaning.
///
/// Titles, labels, units, comments, layout and the order of declaration do not count; neither does the difference between a
/// value left out and its default written out. Everything else does.
#[derive(Clone, Copy, PartialEq, Eq, Hash)]
pub struct Meaning([u8; 32]);

impl Meaning {
    /// The hash of what `model` means.
    #[must_use]
    pub fn of(model: &Model) -> Self {
        let mut digest = Digest::new();
        digest.model(model);
        Self(digest.finish())
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

/// Feeds a model to the hash without ambiguity: every text and list is preceded by its length, every number is its bits.
struct Digest {
    hasher: blake3::Hasher,
    /// What has not been fed yet: the hash takes large pieces many times faster than small ones.
    waiting: Vec<u8>,
}

/// Bytes that wait at most.
const PIECE: usize = 16 * 1024;

impl Digest {
    fn new() -> Self {
        let mut digest = Self { hasher: blake3::Hasher::new(), waiting: Vec::with_capacity(2 * PIECE) };
        digest.bytes(b"millreeve meaning 1\n");
        digest
    }

    fn finish(mut self) -> [u8; 32] {
        self.hasher.update(&self.waiting);
        *self.hasher.finalize().as_bytes()
    }

    fn bytes(&mut self, bytes: &[u8]) {
        self.waiting.extend_from_slice(bytes);
        if self.waiting.len() >= PIECE {
            self.hasher.update(&self.waiting);
            self.waiting.clear();
        }
    }

    fn model(&mut self, model: &Model) {
        self.text(model.aim.word());
        self.text(model.currency.as_deref().unwrap_or(""));
        self.number(model.constant);
        let labels: Vec<_> = model.horizon.periods().filter_map(|period| model.horizon.label(period)).collect();
        self.count(labels.len());
        for label in labels {
            self.text(label);
        }
        self.map(&model.resources, |digest, name| digest.text(name.as_str()), Self::resource);
        self.map(&model.activities, |digest, name| digest.text(name.as_str()), Self::activity);
        self.map(&model.limits, |digest, name| digest.text(name.as_str()), Self::limit);
    }

    fn resource(&mut self, resource: &Resource) {
        let Resource { label: _, unit: _, capacity, at_least, cost, surge: _ } = resource;
        self.value(capacity);
        self.value(at_least);
        self.value(cost);
    }

    fn activity(&mut self, activity: &Activity) {
        let Activity { label: _, unit: _, price, cost, uses, at_least, at_most, tags, prospect, .. } = activity;
        for value in [price, cost, at_least, at_most] {
            self.value(value);
        }
        self.map(uses, |digest, name| digest.text(name.as_str()), Self::value);
        self.count(tags.len());
        for tag in tags {
            self.text(tag.as_str());
        }
        self.count(usize::from(*prospect));
    }

    fn limit(&mut self, limit: &Limit) {
        let Limit { label: _, terms, per, bound, over: _ } = limit;
        self.map(terms, Self::term, Self::value);
        self.count(usize::from(per.is_some()));
        if let Some(per) = per {
            self.map(per, Self::term, Self::value);
        }
        match bound {
            Bound::Between(least, most) => {
                self.text("between");
                self.value(least);
                self.value(most);
            }
            Bound::Equals(value) => {
                self.text("equals");
                self.value(value);
            }
        }
    }

    fn term(&mut self, term: &Term) {
        let (kind, name): (&str, Option<&Name>) = match term {
            Term::Activity(name) => ("activity", Some(name)),
            Term::Tag(name) => ("tag", Some(name)),
            Term::All => ("all", None),
            Term::Material(name, _) => ("material", Some(name)),
            Term::Surge(name, _) => ("surge", Some(name)),
        };
        self.text(kind);
        self.text(name.map_or("", Name::as_str));
    }

    fn map<K: Hash, V>(&mut self, map: &BTreeMap<K, V>, key: impl Fn(&mut Self, &K), value: impl Fn(&mut Self, &V)) {
        self.count(map.len());
        for (k, v) in map {
            key(self, k);
            value(self, v);
        }
    }

    /// A list of equal numbers means the same as the number alone.
    fn value(&mut self, value: &Value) {
        let numbers = value.numbers();
        let same = numbers.windows(2).all(|pair| bits(pair[0]) == bits(pair[1]));
        let told = if same { &numbers[..numbers.len().min(1)] } else { numbers };
        self.count(told.len());
        for &number in told {
            self.number(number);
        }
    }

    fn number(&mut self, number: f64) {
        self.bytes(&bits(number).to_le_bytes());
    }

    fn text(&mut self, text: &str) {
        self.count(text.len());
        self.bytes(text.as_bytes());
    }

    fn count(&mut self, count: usize) {
        self.bytes(&(count as u64).to_le_bytes());
    }
}

/// The bits of a number, with one zero only.
fn bits(number: f64) -> u64 {
    (number + 0.0).to_bits()
}

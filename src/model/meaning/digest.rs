//! The hash that a meaning is, and how texts, numbers and lists are fed to it.

use std::collections::BTreeMap;

use crate::model::name::Name;
use crate::model::value::Value;

/// Feeds a model to the hash without ambiguity: every text and list is preceded by its length, every number is its bits.
pub(super) struct Digest {
    hasher: blake3::Hasher,
    /// What has not been fed yet: the hash takes large pieces many times faster than small ones.
    waiting: Vec<u8>,
}

/// Bytes that wait at most.
const PIECE: usize = 16 * 1024;

impl Digest {
    pub(super) fn new(what: &str) -> Self {
        let mut digest = Self { hasher: blake3::Hasher::new(), waiting: Vec::new() };
        digest.bytes(what.as_bytes());
        digest
    }

    pub(super) fn finish(mut self) -> [u8; 32] {
        self.hasher.update(&self.waiting);
        *self.hasher.finalize().as_bytes()
    }

    pub(super) fn bytes(&mut self, bytes: &[u8]) {
        self.waiting.extend_from_slice(bytes);
        if self.waiting.len() >= PIECE {
            self.hasher.update(&self.waiting);
            self.waiting.clear();
        }
    }

    pub(super) fn text(&mut self, text: &str) {
        self.count(text.len());
        self.bytes(text.as_bytes());
    }

    pub(super) fn count(&mut self, count: usize) {
        self.bytes(&(count as u64).to_le_bytes());
    }

    pub(super) fn number(&mut self, number: f64) {
        self.bytes(&bits(number).to_le_bytes());
    }

    /// A list of equal numbers means the same as the number alone.
    pub(super) fn value(&mut self, value: &Value) {
        let numbers = told(value);
        self.count(numbers.len());
        for &number in numbers {
            self.number(number);
        }
    }

    pub(super) fn values<const COUNT: usize>(&mut self, values: [&Value; COUNT]) {
        values.into_iter().for_each(|value| self.value(value));
    }

    pub(super) fn rates(&mut self, rates: &BTreeMap<Name, Value>) {
        self.count(rates.len());
        for (name, rate) in rates {
            self.text(name.as_str());
            self.value(rate);
        }
    }
}

/// The numbers of a value, one where they are all the same.
fn told(value: &Value) -> &[f64] {
    let numbers = value.numbers();
    let same = numbers.windows(2).all(|pair| bits(pair[0]) == bits(pair[1]));
    if same { &numbers[..numbers.len().min(1)] } else { numbers }
}

/// What tells values apart, and brings them into an order.
pub(super) fn key(value: &Value) -> Vec<u64> {
    told(value).iter().map(|&number| bits(number)).collect()
}

/// The bits of a number, with one zero only.
fn bits(number: f64) -> u64 {
    (number + 0.0).to_bits()
}

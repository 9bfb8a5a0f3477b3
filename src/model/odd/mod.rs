//! What is odd about a model though nothing is wrong: legal, and yet most likely not what was meant.

mod alike;
mod idle;
mod spread;
mod unlimited;

use std::collections::BTreeMap;

use super::name::Name;
use super::types::{Limit, Model, Term};

/// One oddity.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(crate) struct Oddity {
    /// Where it is: a section, a name in it, and keys within that.
    pub(crate) place: Vec<String>,
    /// Stable identifier, for programs.
    pub(crate) code: &'static str,
    /// What is odd, in one sentence without a full stop. Not escaped.
    pub(crate) message: String,
    /// What to do about it. Not escaped.
    pub(crate) help: String,
}

impl Oddity {
    fn new(place: &[&str], code: &'static str, message: impl Into<String>, help: impl Into<String>) -> Self {
        let place = place.iter().map(|&key| key.to_owned()).collect();
        Self { place, code, message: message.into(), help: help.into() }
    }
}

/// All that is odd about a model.
pub(crate) fn find(model: &Model) -> Vec<Oddity> {
    let mut found = alike::find(model);
    found.extend(idle::find(model));
    found.extend(unlimited::find(model));
    found.extend(spread::find(model));
    found
}

/// The terms of all limits.
fn terms(model: &Model) -> impl Iterator<Item = &Term> {
    model.limits.values().flat_map(Limit::sums).flat_map(BTreeMap::keys)
}

/// Where the entry of a section is.
fn entry<'a>(section: &'a str, name: &'a Name) -> [&'a str; 2] {
    [section, name.as_str()]
}

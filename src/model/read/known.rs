//! What has been read so far, for the tables that refer to it.

use std::cell::OnceCell;
use std::collections::{BTreeMap, HashMap};

use super::toml_types::Table;
use crate::model::name::Name;
use crate::model::types::{Activity, Material, Resource};

/// What other tables may refer to: the entries that were read, and those that were declared but could not be.
pub(super) struct Known<'a, 'i, T> {
    table: Option<&'a Table<'i>>,
    names: &'a BTreeMap<Name, T>,
    /// The names by their text: each is asked for as often as it is used, and halving would compare it with many others.
    by_text: OnceCell<HashMap<&'a str, &'a Name>>,
}

impl<'a, 'i, T> Known<'a, 'i, T> {
    /// What was read as `names` from `table`.
    pub(super) fn new(table: Option<&'a Table<'i>>, names: &'a BTreeMap<Name, T>) -> Self {
        Self { table, names, by_text: OnceCell::new() }
    }

    /// The name spelt so, if there is one.
    pub(super) fn find(&self, text: &str) -> Option<Name> {
        let by_text = self.by_text.get_or_init(|| self.names.keys().map(|name| (name.as_str(), name)).collect());
        by_text.get(text).map(|&name| name.clone())
    }

    /// The entry of that name, if it was read.
    pub(super) fn get(&self, name: &Name) -> Option<&'a T> {
        self.names.get(name)
    }

    /// Whether it is there, though faulty: then its own fault says enough.
    pub(super) fn declares(&self, text: &str) -> bool {
        self.table.is_some_and(|table| table.contains_key(text))
    }
}

/// What activities live on.
pub(super) struct Supplies<'a, 'i> {
    pub(super) resources: Known<'a, 'i, Resource>,
    pub(super) materials: Known<'a, 'i, Material>,
}

/// What limits may sum.
pub(super) struct Summable<'a, 'i> {
    pub(super) supplies: Supplies<'a, 'i>,
    pub(super) activities: Known<'a, 'i, Activity>,
    pub(super) tags: Tags,
}

/// How many activities carry each tag.
pub(super) type Tags = BTreeMap<Name, usize>;

/// The tags that activities carry.
pub(super) fn tags(activities: &BTreeMap<Name, Activity>) -> Tags {
    let mut tags = Tags::new();
    for tag in activities.values().flat_map(|activity| &activity.tags) {
        *tags.entry(tag.clone()).or_default() += 1;
    }
    tags
}

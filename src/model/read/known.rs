//! What has been read so far, for the tables that refer to it.

use std::collections::BTreeMap;

use super::toml_types::Table;
use crate::model::name::Name;
use crate::model::types::Activity;

/// What other tables may refer to: the entries that were read, and those that were declared but could not be.
pub(super) struct Known<'a, 'i, T> {
    pub(super) table: Option<&'a Table<'i>>,
    pub(super) names: &'a BTreeMap<Name, T>,
}

impl<T> Known<'_, '_, T> {
    /// The name spelt so, if there is one.
    pub(super) fn find(&self, text: &str) -> Option<Name> {
        self.names.get_key_value(text).map(|(name, _)| name.clone())
    }

    /// Whether it is there, though faulty: then its own fault says enough.
    pub(super) fn declares(&self, text: &str) -> bool {
        self.table.is_some_and(|table| table.contains_key(text))
    }
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

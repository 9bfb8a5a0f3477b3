//! What the tags that limits sum stand for: activities, whatever the tag is called.

use std::collections::BTreeMap;

use super::digest::Digest;
use crate::model::name::Name;
use crate::model::types::{Limit, Model, Term};

/// The activities behind each tag that a limit sums, as a hash of their names.
pub(super) struct Groups<'m>(BTreeMap<&'m Name, [u8; 32]>);

impl<'m> Groups<'m> {
    pub(super) fn of(model: &'m Model) -> Self {
        let tags = model.limits.values().flat_map(Limit::sums).flat_map(BTreeMap::keys).filter_map(|term| match term {
            Term::Tag(tag) => Some((tag, Vec::new())),
            _ => None,
        });
        let mut members: BTreeMap<&Name, Vec<&Name>> = tags.collect();
        if !members.is_empty() {
            for (name, activity) in &model.activities {
                for tag in &activity.tags {
                    if let Some(members) = members.get_mut(tag) {
                        members.push(name);
                    }
                }
            }
        }
        Self(members.into_iter().map(|(tag, members)| (tag, hash(&members))).collect())
    }

    /// The hash of the activities with a tag.
    pub(super) fn hash(&self, tag: &Name) -> [u8; 32] {
        self.0.get(tag).copied().unwrap_or_default()
    }
}

fn hash(members: &[&Name]) -> [u8; 32] {
    let mut digest = Digest::new("millreeve group 1\n");
    digest.count(members.len());
    members.iter().for_each(|name| digest.text(name.as_str()));
    digest.finish()
}

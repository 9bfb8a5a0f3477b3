//! Merging the tables of parts: an entry may be begun in one and go on in another, but no key is given twice.

use std::borrow::Cow;

use toml::Spanned;
use toml::de::DeValue;

use super::sheets::Sheets;
use crate::model::read::findings::{Among, Cure, Findings, Span, shown};
use crate::model::read::toml_types::{Key, Node, Table};

/// Merges `from`, a table of one part whose places count from `base`, into `into`.
pub(super) fn merge<'a>(into: &mut Table<'a>, from: Table<'a>, base: usize, merging: &mut Merging<'_, '_>) {
    for (key, node) in from {
        let key = Spanned::new(moved(&key.span(), base), key.into_inner());
        let Some(there) = into.get_mut(key.get_ref().as_ref()) else {
            into.insert(key, moved_node(node, base));
            continue;
        };
        let twice = match (there.get_mut(), node.into_inner()) {
            (DeValue::Table(there), DeValue::Table(more)) => {
                merging.within.push(key.get_ref().clone().into_owned());
                merge(there, more, base, merging);
                merging.within.pop();
                false
            }
            _ => true,
        };
        if twice {
            merging.twice(into, &key);
        }
    }
}

/// Merges rates of a CSV part, a table for each activity, into the activities that other parts begin.
pub(super) fn merge_rates<'a>(
    root: &mut Table<'a>,
    what: &'static str,
    rates: Table<'a>,
    merging: &mut Merging<'_, '_>,
) {
    let mut none = Table::new();
    let activities = match root.get_mut("activities").map(Spanned::get_mut) {
        Some(DeValue::Table(activities)) => activities,
        // That they are no table is told elsewhere.
        Some(_) => return,
        None => &mut none,
    };
    for (key, node) in rates {
        match activities.get_mut(key.get_ref().as_ref()).map(Spanned::get_mut) {
            Some(DeValue::Table(activity)) if !activity.contains_key(what) => {
                activity.insert(Spanned::new(key.span(), Cow::Borrowed(what)), node);
            }
            Some(DeValue::Table(activity)) => {
                merging.within = vec!["activities".to_owned(), key.get_ref().clone().into_owned()];
                let whole = Spanned::new(key.span(), Cow::Borrowed(what));
                merge(activity, Table::from_iter([(whole, node)]), 0, merging);
                merging.within.clear();
            }
            Some(_) => {}
            None => {
                let message = format!("no activity `{}`", shown(key.get_ref()));
                let cure = Cure::Nearest(shown(key.get_ref()), Among::Activities);
                merging.findings.add(&key.span(), "unknown-activity", message, cure);
            }
        }
    }
}

/// What merging needs beside the tables.
pub(super) struct Merging<'s, 'f> {
    pub(super) sheets: &'s Sheets<'s>,
    pub(super) findings: &'f mut Findings,
    /// The keys that lead to the tables being merged.
    pub(super) within: Vec<String>,
}

impl<'s, 'f> Merging<'s, 'f> {
    /// To merge tables that lie in nothing yet.
    pub(super) fn of(sheets: &'s Sheets<'s>, findings: &'f mut Findings) -> Self {
        Self { sheets, findings, within: Vec::new() }
    }

    /// Adds the fault that `second` is in `table` already.
    fn twice(&mut self, table: &Table<'_>, second: &Key<'_>) {
        let Some((first, _)) = table.get_key_value(second.get_ref().as_ref()) else { return };
        let within = self.within.iter().map(|key| key.as_str());
        let address: Vec<_> = within.chain([second.get_ref().as_ref()]).collect();
        let (first, place) = (first.span(), second.span());
        let message = format!(
            "`{}` is given twice: {} and {}",
            shown(&address.join(".")),
            self.sheets.told(first.start),
            self.sheets.told(place.start)
        );
        self.findings.add(&place, "duplicate-key", message, "keep one of the two");
    }
}

fn moved(span: &Span, base: usize) -> Span {
    base + span.start..base + span.end
}

fn moved_node(node: Node<'_>, base: usize) -> Node<'_> {
    if base == 0 {
        return node;
    }
    let span = moved(&node.span(), base);
    let value = match node.into_inner() {
        DeValue::Table(table) => DeValue::Table(moved_table(table, base)),
        DeValue::Array(mut list) => {
            for item in list.iter_mut() {
                let node = std::mem::replace(item, Spanned::new(0..0, DeValue::Boolean(false)));
                *item = moved_node(node, base);
            }
            DeValue::Array(list)
        }
        value => value,
    };
    Spanned::new(span, value)
}

fn moved_table(table: Table<'_>, base: usize) -> Table<'_> {
    table
        .into_iter()
        .map(|(key, node)| {
            let span = moved(&key.span(), base);
            (Spanned::new(span, key.into_inner()), moved_node(node, base))
        })
        .collect()
}

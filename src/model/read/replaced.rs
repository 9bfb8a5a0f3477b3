//! A model with some of its entries read anew: put in, taken out, or in place of what they were.
//!
//! What others refer to may go only where nothing refers to it any longer.

use std::collections::{BTreeMap, BTreeSet};

use super::blocks::{Block, Section};
use super::calendar::Calendar;
use super::fields::Fields;
use super::findings::Findings;
use super::known::{self, Known, Summable, Supplies};
use super::toml_types::Table;
use super::{activity, caps, flow, limit, material, resource};
use crate::model::name::Name;
use crate::model::types::{Activity, Material, Model};

/// Entries of a model, by their sections.
#[derive(Debug, Default)]
pub(super) struct Entries(BTreeMap<Section, BTreeSet<Name>>);

impl Entries {
    /// Adds the entries that blocks are about.
    pub(super) fn extend<'a>(&mut self, blocks: impl IntoIterator<Item = &'a Block>) {
        for block in blocks {
            self.0.entry(block.section).or_default().insert(block.name.clone());
        }
    }

    /// Whether the entry that a block is about is among them.
    pub(super) fn contains(&self, block: &Block) -> bool {
        self.0.get(&block.section).is_some_and(|names| names.contains(&block.name))
    }

    fn of(&self, section: Section) -> impl Iterator<Item = &Name> {
        self.0.get(&section).into_iter().flatten()
    }
}

/// Whether a model has the entry that a block is about.
pub(super) fn is_there(model: &Model, block: &Block) -> bool {
    match block.section {
        Section::Resources => model.resources.contains_key(&block.name),
        Section::Activities => model.activities.contains_key(&block.name),
        Section::Materials => model.materials.contains_key(&block.name),
        Section::Limits => model.limits.contains_key(&block.name),
    }
}

/// `model` with what `root` says of `entries` in place of what they were; those it does not have are taken out. `None` where others still
/// refer to what is gone, or for a fault.
pub(super) fn replaced(model: &Model, root: &Table<'_>, entries: &Entries, calendar: &Calendar) -> Option<Model> {
    let mut findings = Findings::default();
    let mut edited = model.clone();
    let Model { aim, resources, activities, materials, limits, .. } = &mut edited;
    let mut anew = Anew { root, entries, calendar, findings: &mut findings, gone: false, asked: false };
    anew.section(Section::Resources, resources, resource::read, |resource| resource.surge.len())?;
    anew.section(Section::Materials, materials, material::read, flows)?;
    let supplies = Supplies { resources: Known::new(None, resources), materials: Known::new(None, materials) };
    let read = |fields: &mut Fields<'_, '_>| activity::read(fields, *aim, &supplies);
    let supplies_gone = std::mem::take(&mut anew.gone);
    anew.section(Section::Activities, activities, read, |activity| activity.tags.clone())?;
    let there = Summable { supplies, activities: Known::new(None, activities), tags: known::tags(activities) };
    anew.section(Section::Limits, limits, |fields| limit::read(fields, &there), |_| ())?;
    let (asked, tags) = (anew.asked, there.tags);
    let sound = findings.is_empty()
        && !calendar.is_full()
        && (!supplies_gone || edited.activities.values().all(|activity| is_supplied(activity, &edited)))
        && (!asked
            || edited
                .limits
                .values()
                .flat_map(|limit| limit.sums())
                .flat_map(BTreeMap::keys)
                .all(|term| flow::is_there(term, &edited, &tags)))
        && caps::fit(&edited, &tags);
    sound.then_some(edited)
}

/// The reading of entries, section by section.
struct Anew<'a, 'i> {
    root: &'a Table<'i>,
    entries: &'a Entries,
    calendar: &'a Calendar,
    findings: &'a mut Findings,
    /// Whether something was taken out.
    gone: bool,
    /// Whether there may be less of something that limits ask for.
    asked: bool,
}

impl Anew<'_, '_> {
    /// The entries of a section, put into `there`; `asked` is what limits ask of one. `None` where one is no table.
    fn section<T, A: PartialEq>(
        &mut self,
        section: Section,
        there: &mut BTreeMap<Name, T>,
        read: impl Fn(&mut Fields<'_, '_>) -> T,
        asked: impl Fn(&T) -> A,
    ) -> Option<()> {
        let table = self.root.get(section.word()).and_then(|node| node.get_ref().as_table());
        for name in self.entries.of(section) {
            let Some((key, node)) = table.and_then(|table| table.get_key_value(name.as_str())) else {
                let gone = there.remove(name).is_some();
                self.gone |= gone;
                self.asked |= gone;
                continue;
            };
            let table = node.get_ref().as_table()?;
            let new = read(&mut Fields::open(table, key.span(), section.keys(), self.calendar, self.findings));
            let asks = asked(&new);
            // What is new was asked for by nobody.
            self.asked |= there.insert(name.clone(), new).is_some_and(|old| asked(&old) != asks);
        }
        Some(())
    }
}

/// What there is of a material that a limit can sum.
fn flows(material: &Material) -> (usize, Vec<bool>, bool) {
    let late = material.sale.iter().map(|sale| sale.late.is_some()).collect();
    (material.purchase.len(), late, material.stock.is_some() || material.closing.is_some())
}

/// Whether all that an activity uses, draws and makes is there.
fn is_supplied(activity: &Activity, model: &Model) -> bool {
    activity.uses.keys().all(|name| model.resources.contains_key(name))
        && activity.draws.keys().chain(activity.makes.keys()).all(|name| model.materials.contains_key(name))
}

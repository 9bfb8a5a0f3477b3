//! What else an edit of one part of a model concerns.

use std::collections::{BTreeMap, BTreeSet};

use crate::edits::edit::{Kind, Planned, Subject};
use crate::model::{Flow, Material, Model, Name, Resource, Term};

/// The models, for finding out what else an edit of one of their parts concerns.
pub(super) struct Concerned<'a> {
    old: &'a Model,
    new: &'a Model,
    /// Tags that limits ask for, before or after.
    asked: BTreeSet<&'a Name>,
}

impl<'a> Concerned<'a> {
    pub(super) fn of(old: &'a Model, new: &'a Model) -> Self {
        let limits = old.limits.values().chain(new.limits.values());
        let terms = limits.flat_map(|limit| limit.terms.keys().chain(limit.per.iter().flat_map(BTreeMap::keys)));
        let asked = terms.filter_map(|term| if let Term::Tag(tag) = term { Some(tag) } else { None }).collect();
        Self { old, new, asked }
    }

    /// Whether a limit asks for this tag.
    pub(super) fn is_asked(&self, tag: &Name) -> bool {
        self.asked.contains(tag)
    }

    /// What a term counts in both models: what is new or withdrawn brings or takes its terms with it.
    pub(super) fn by(&self, term: &Term) -> Vec<Planned> {
        match term {
            Term::Activity(_) | Term::Tag(_) | Term::All => self.activities(term),
            Term::Material(name, flow) => {
                let is_in =
                    |model: &Model, flow| model.materials.get(name).is_some_and(|material| has_flow(material, flow));
                let most = self.new.materials.get(name).map_or(0, |m| m.purchase.len().max(m.sale.len()));
                let in_both = flows(*flow, most).filter(|&flow| is_in(self.old, flow) && is_in(self.new, flow));
                in_both.map(|flow| Planned::Flow(name.clone(), flow)).collect()
            }
            Term::Surge(name, tier) => {
                let count = |model: &Model| model.resources.get(name).map_or(0, |resource| resource.surge.len());
                let asked = |at: &usize| tier.is_none_or(|tier| tier == *at);
                let in_both = 1..=count(self.old).min(count(self.new));
                in_both.filter(asked).map(|tier| Planned::Surge(name.clone(), tier)).collect()
            }
        }
    }

    fn activities(&self, term: &Term) -> Vec<Planned> {
        let all = self.old.activities.iter().chain(&self.new.activities);
        let concerned = all.filter(|(name, activity)| {
            let asked = match term {
                Term::Activity(one) => one == *name,
                Term::Tag(tag) => activity.tags.contains(tag),
                _ => true,
            };
            asked && self.old.activities.contains_key(*name) && self.new.activities.contains_key(*name)
        });
        let names: BTreeSet<&Name> = concerned.map(|(name, _)| name).collect();
        names.into_iter().cloned().map(Planned::Activity).collect()
    }

    /// What a changed rate of use of `resource` is about: a resource that is new or withdrawn brings or takes its rates with it.
    pub(super) fn use_of(&self, activity: &Subject, resource: &Name) -> (Subject, Kind) {
        let pair = (self.old.resources.get(resource), self.new.resources.get(resource));
        let subject = || Subject::Resource(resource.clone());
        match pair {
            (None, Some(new)) => (subject(), new_resource(new)),
            (Some(old), None) => (subject(), withdrawn_resource(old)),
            _ => (activity.clone(), Kind::Recipe),
        }
    }

    /// The same of a rate at which `material` is drawn or made.
    pub(super) fn flow_of(&self, activity: &Subject, material: &Name) -> (Subject, Kind) {
        let subject = || Subject::Material(material.clone());
        match (self.old.materials.contains_key(material), self.new.materials.contains_key(material)) {
            (false, true) => (subject(), Kind::NewBalance),
            (true, false) => (subject(), Kind::WithdrawnBalance),
            _ => (activity.clone(), Kind::Recipe),
        }
    }
}

/// The kind of a new resource.
pub(super) fn new_resource(resource: &Resource) -> Kind {
    if resource.surge.is_empty() { Kind::NewConstraint } else { Kind::NewBalance }
}

/// The kind of a resource withdrawn.
pub(super) fn withdrawn_resource(resource: &Resource) -> Kind {
    if resource.surge.is_empty() { Kind::WithdrawnConstraint } else { Kind::WithdrawnBalance }
}

/// The flows that one stands for: where it names no tier, each of `most`.
fn flows(flow: Flow, most: usize) -> impl Iterator<Item = Flow> {
    let tiers = if matches!(flow, Flow::Purchase(None) | Flow::Sale(None) | Flow::Late(None)) { most } else { 1 };
    (1..=tiers).map(move |tier| match flow {
        Flow::Purchase(None) => Flow::Purchase(Some(tier)),
        Flow::Sale(None) => Flow::Sale(Some(tier)),
        Flow::Late(None) => Flow::Late(Some(tier)),
        one => one,
    })
}

fn has_flow(material: &Material, flow: Flow) -> bool {
    match flow {
        Flow::Purchase(tier) => tier.is_some_and(|tier| tier <= material.purchase.len()),
        Flow::Sale(tier) => tier.is_some_and(|tier| tier <= material.sale.len()),
        Flow::Late(tier) => {
            let sale = tier.and_then(|tier| material.sale.get(tier.checked_sub(1)?));
            sale.is_some_and(|sale| sale.late.is_some())
        }
        Flow::Stock => material.stock.is_some() || material.closing.is_some(),
        Flow::Discard => true,
    }
}

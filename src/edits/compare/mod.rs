//! Comparing two models: every edit, in planners' terms.

mod activities;
mod concerned;
mod horizon;
mod in_short;
mod limits;
mod materials;
mod resources;
mod values;

use std::borrow::Cow;
use std::collections::BTreeMap;

use self::concerned::Concerned;
use super::edit::{Edit, Kind, Subject};
use super::rename::Renames;
use super::side_by_side::{Pair, side_by_side};
use crate::model::{Horizon, Model, Name};

pub(super) use self::horizon::moved;

/// Every edit that turns `old` into `new`, in the order of the model: its own keys, periods, resources, activities, materials, limits.
///
/// A rename is a withdrawal and something new, unless every number agrees: then it is wording, told under the new name. Where other
/// periods are planned, that is one edit; what is told beside it is about the periods that both models plan, by their names.
#[must_use]
pub fn compare(old: &Model, new: &Model) -> Vec<Edit> {
    compare_renamed(old, new, &Renames::between(old, new))
}

/// As [`compare`], where the renames are known: those [between](Renames::between) the two models.
#[must_use]
pub fn compare_renamed(old: &Model, new: &Model, renames: &Renames) -> Vec<Edit> {
    if renames.is_empty() {
        return compared(old, new).edits;
    }
    let mut edits = compared(&renames.applied(old), new);
    edits.renames(renames);
    edits.edits
}

fn compared(old: &Model, new: &Model) -> Edits {
    let mut edits = Edits { edits: Vec::new(), horizon: new.horizon.clone() };
    edits.model(old, new);
    edits.periods(&old.horizon, &new.horizon);
    let old = if old.horizon == new.horizon { Cow::Borrowed(old) } else { Cow::Owned(moved(old, new)) };
    let old = &*old;
    let concerned = Concerned::of(old, new);
    for (name, pair) in pairs(&old.resources, &new.resources) {
        edits.resource(name, pair);
    }
    for (name, pair) in pairs(&old.activities, &new.activities) {
        edits.activity(name, pair, &concerned);
    }
    for (name, pair) in pairs(&old.materials, &new.materials) {
        edits.material(name, pair);
    }
    for (name, pair) in pairs(&old.limits, &new.limits) {
        edits.limit(name, pair, &concerned);
    }
    edits
}

/// What differs between two maps, by name.
fn pairs<'a, T: PartialEq>(
    old: &'a BTreeMap<Name, T>,
    new: &'a BTreeMap<Name, T>,
) -> impl Iterator<Item = (&'a Name, Pair<'a, T>)> {
    side_by_side(old, new).filter(|(_, (was, is))| was != is)
}

/// Gathers edits.
struct Edits {
    edits: Vec<Edit>,
    /// The periods that both models plan by now.
    horizon: Horizon,
}

impl Edits {
    fn push(&mut self, address: String, subject: &Subject, kind: Kind, old: Option<String>, new: Option<String>) {
        if old != new {
            self.edits.push(Edit { address, subject: subject.clone(), old, new, kind });
        }
    }

    fn renames(&mut self, renames: &Renames) {
        self.renamed("resources", &renames.resources, Subject::Resource);
        self.renamed("activities", &renames.activities, Subject::Activity);
        self.renamed("materials", &renames.materials, Subject::Material);
        self.renamed("limits", &renames.limits, |name| Subject::Limit(name, Vec::new()));
    }

    fn renamed(&mut self, table: &str, names: &BTreeMap<Name, Name>, subject: impl Fn(Name) -> Subject) {
        for (was, is) in names {
            let (old, new) = (Some(was.to_string()), Some(is.to_string()));
            self.push(format!("{table}.{is}"), &subject(is.clone()), Kind::Wording, old, new);
        }
    }

    /// A text that decides nothing.
    fn words(&mut self, address: String, subject: &Subject, old: Option<&String>, new: Option<&String>) {
        self.push(address, subject, Kind::Wording, old.cloned(), new.cloned());
    }

    fn model(&mut self, old: &Model, new: &Model) {
        let subject = Subject::Model;
        self.words("title".into(), &subject, old.title.as_ref(), new.title.as_ref());
        self.words("currency".into(), &subject, old.currency.as_ref(), new.currency.as_ref());
        let aims = (Some(old.aim.word().to_owned()), Some(new.aim.word().to_owned()));
        self.push("aim".into(), &subject, Kind::Aim, aims.0, aims.1);
        self.push(
            "constant".into(),
            &subject,
            Kind::Wording,
            Some(old.constant.to_string()),
            Some(new.constant.to_string()),
        );
    }
}

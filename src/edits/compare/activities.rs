//! Edits of activities.

use std::collections::BTreeMap;

use super::values::{bound_shown, same};
use super::{Concerned, Edits, in_short, pairs};
use crate::edits::edit::{Kind, Subject};
use crate::edits::side_by_side::Pair;
use crate::model::{Activity, Name, Value};

/// Rates by what they are rates of.
type Rates = BTreeMap<Name, Value>;

impl Edits {
    pub(super) fn activity(&mut self, name: &Name, pair: Pair<'_, Activity>, concerned: &Concerned<'_>) {
        let subject = Subject::Activity(name.clone());
        let address = format!("activities.{name}");
        match pair {
            (Some(old), Some(new)) => self.activity_changed(name, old, new, concerned),
            (None, Some(new)) => {
                self.push(address, &subject, self.new_activity(new), None, Some(in_short::activity(new)));
            }
            (Some(old), None) => {
                self.push(address, &subject, Kind::WithdrawnActivity, Some(in_short::activity(old)), None);
            }
            (None, None) => {}
        }
    }

    fn activity_changed(&mut self, name: &Name, old: &Activity, new: &Activity, concerned: &Concerned<'_>) {
        let subject = &Subject::Activity(name.clone());
        let address = format!("activities.{name}");
        self.words(format!("{address}.label"), subject, old.label.as_ref(), new.label.as_ref());
        self.words(format!("{address}.unit"), subject, old.unit.as_ref(), new.unit.as_ref());
        if old.prospect != new.prospect {
            let kind = if new.prospect { Kind::WithdrawnActivity } else { self.new_activity(new) };
            let flag = |activity: &Activity| Some(activity.prospect.to_string());
            self.push(format!("{address}.prospect"), subject, kind, flag(old), flag(new));
        }
        self.number(&format!("{address}.price"), subject, Kind::Price, &old.price, &new.price);
        self.number(&format!("{address}.cost"), subject, Kind::Price, &old.cost, &new.cost);
        self.rates(&format!("{address}.uses"), &old.uses, &new.uses, |resource| concerned.use_of(subject, resource));
        self.rates(&format!("{address}.draws"), &old.draws, &new.draws, |name| concerned.flow_of(subject, name));
        self.rates(&format!("{address}.makes"), &old.makes, &new.makes, |name| concerned.flow_of(subject, name));
        let leads = [old, new].map(|activity| Some(activity.lead.to_string()));
        let [was, is] = leads;
        self.push(format!("{address}.lead"), subject, Kind::Recipe, was, is);
        let addresses = ["at_least", "at_most"].map(|word| format!("{address}.{word}"));
        let (was, is) = ([&old.at_least, &old.at_most], [&new.at_least, &new.at_most]);
        self.bounds([&addresses[0], &addresses[1]], subject, was, is);
        self.change(name, &old.change_at_most, &new.change_at_most);
        for tag in old.tags.symmetric_difference(&new.tags) {
            let kind = if concerned.is_asked(tag) { Kind::Recipe } else { Kind::Wording };
            let carried = |activity: &Activity| activity.tags.contains(tag).then(|| tag.to_string());
            self.push(format!("{address}.tags"), subject, kind, carried(old), carried(new));
        }
    }

    fn rates(&mut self, address: &str, old: &Rates, new: &Rates, about: impl Fn(&Name) -> (Subject, Kind)) {
        for (of, (old, new)) in pairs(old, new) {
            let (subject, kind) = about(of);
            self.rate(&format!("{address}.{of}"), &subject, kind, old, new);
        }
    }

    /// How far a level may change: a rule that is there only where it is finite.
    fn change(&mut self, name: &Name, old: &Value, new: &Value) {
        let subject = Subject::Change(name.clone());
        let address = format!("activities.{name}.change_at_most");
        self.value(&address, &subject, (old, new), bound_shown, |period| {
            let (was, is) = (old.at(period), new.at(period));
            match (was.is_finite(), is.is_finite()) {
                (false, true) => Kind::NewConstraint,
                (true, false) => Kind::WithdrawnConstraint,
                // What no change was allowed of stood on both bounds at once.
                _ if same(was, 0.0) => Kind::BoundRemoved,
                _ => Kind::Capacity,
            }
        });
    }

    /// The kind of what is new as a level.
    fn new_activity(&self, activity: &Activity) -> Kind {
        let at_rest =
            self.horizon.periods().all(|period| rests_at_0(activity.at_least.at(period), activity.at_most.at(period)));
        if at_rest || activity.prospect { Kind::NewActivity } else { Kind::NewCommitment }
    }
}

/// Whether something new comes in at 0: out of the basis it stands at its lower bound, else at its upper one, or at 0 where it is free.
pub(super) fn rests_at_0(least: f64, most: f64) -> bool {
    match (least.is_finite(), most.is_finite()) {
        (true, _) => same(least, 0.0) && most >= 0.0,
        (false, true) => same(most, 0.0),
        (false, false) => true,
    }
}

//! Edits of resources and their extra capacity.

use super::Edits;
use super::concerned::{new_resource, withdrawn_resource};
use super::in_short;
use crate::edits::edit::{Kind, Planned, Subject};
use crate::edits::side_by_side::Pair;
use crate::model::{Name, Resource, Surge, Value};

impl Edits {
    pub(super) fn resource(&mut self, name: &Name, pair: Pair<'_, Resource>) {
        let subject = Subject::Resource(name.clone());
        let address = format!("resources.{name}");
        let cost = format!("{address}.cost");
        match pair {
            (Some(old), Some(new)) => {
                self.words(format!("{address}.label"), &subject, old.label.as_ref(), new.label.as_ref());
                self.words(format!("{address}.unit"), &subject, old.unit.as_ref(), new.unit.as_ref());
                let addresses = ["at_least", "capacity"].map(|word| format!("{address}.{word}"));
                let (was, is) = ([&old.at_least, &old.capacity], [&new.at_least, &new.capacity]);
                self.bounds([&addresses[0], &addresses[1]], &subject, was, is);
                self.number(&cost, &subject, Kind::Price, &old.cost, &new.cost);
                for tier in 0..old.surge.len().max(new.surge.len()) {
                    self.surge(name, tier + 1, (old.surge.get(tier), new.surge.get(tier)));
                }
            }
            (None, Some(new)) => {
                self.push(address, &subject, new_resource(new), None, Some(in_short::resource(new)));
                self.number(&cost, &subject, Kind::Price, &Value::Every(0.0), &new.cost);
            }
            (Some(old), None) => {
                self.push(address, &subject, withdrawn_resource(old), Some(in_short::resource(old)), None);
                self.number(&cost, &subject, Kind::Price, &old.cost, &Value::Every(0.0));
            }
            (None, None) => {}
        }
    }

    fn surge(&mut self, resource: &Name, tier: usize, pair: Pair<'_, Surge>) {
        let subject = Subject::Planned(Planned::Surge(resource.clone(), tier));
        let address = format!("resources.{resource}.surge.{tier}");
        match pair {
            (Some(old), Some(new)) => {
                let none = Value::Every(0.0);
                let most = format!("{address}.at_most");
                self.bounds([&address, &most], &subject, [&none, &old.at_most], [&none, &new.at_most]);
                self.number(&format!("{address}.cost"), &subject, Kind::Price, &old.cost, &new.cost);
            }
            (None, Some(new)) => self.push(address, &subject, Kind::NewActivity, None, Some(in_short::surge(new))),
            (Some(old), None) => {
                self.push(address, &subject, Kind::WithdrawnActivity, Some(in_short::surge(old)), None);
            }
            (None, None) => {}
        }
    }
}

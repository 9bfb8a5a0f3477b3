//! Edits of materials: how they come, go and wait.

use super::activities::rests_at_0;
use super::values::{bound_kinds, bound_shown, same};
use super::{Edits, in_short};
use crate::edits::edit::{Kind, Planned, Subject};
use crate::edits::side_by_side::Pair;
use crate::model::{Closing, Flow, Late, Material, Name, Period, Purchase, Sale, Stock, Value};

const NONE: Value = Value::Every(0.0);

impl Edits {
    pub(super) fn material(&mut self, name: &Name, pair: Pair<'_, Material>) {
        let subject = Subject::Material(name.clone());
        let address = format!("materials.{name}");
        match pair {
            (Some(old), Some(new)) => self.material_changed(name, old, new),
            (None, Some(new)) => {
                self.push(address, &subject, Kind::NewBalance, None, Some(in_short::material(new)));
            }
            (Some(old), None) => {
                self.push(address, &subject, Kind::WithdrawnBalance, Some(in_short::material(old)), None);
            }
            (None, None) => {}
        }
    }

    fn material_changed(&mut self, name: &Name, old: &Material, new: &Material) {
        let subject = Subject::Material(name.clone());
        let address = format!("materials.{name}");
        self.words(format!("{address}.label"), &subject, old.label.as_ref(), new.label.as_ref());
        self.words(format!("{address}.unit"), &subject, old.unit.as_ref(), new.unit.as_ref());
        let openings = [old, new].map(|material| Value::Every(material.opening));
        self.number(&format!("{address}.opening"), &subject, Kind::Capacity, &openings[0], &openings[1]);
        for tier in 0..old.purchase.len().max(new.purchase.len()) {
            self.purchase(name, tier + 1, (old.purchase.get(tier), new.purchase.get(tier)));
        }
        for tier in 0..old.sale.len().max(new.sale.len()) {
            self.sale(name, tier + 1, (old.sale.get(tier), new.sale.get(tier)));
        }
        self.stock(name, old, new);
        let subject = flow(name, Flow::Discard);
        let address = format!("{address}.discard");
        let (was, is) = (&old.discard, &new.discard);
        self.number(&format!("{address}.cost"), &subject, Kind::Price, &was.cost, &is.cost);
        let most = format!("{address}.at_most");
        self.bounds([&address, &most], &subject, [&NONE, &was.at_most], [&NONE, &is.at_most]);
    }

    fn purchase(&mut self, material: &Name, tier: usize, pair: Pair<'_, Purchase>) {
        let subject = flow(material, Flow::Purchase(Some(tier)));
        let address = format!("materials.{material}.purchase.{tier}");
        match pair {
            (Some(old), Some(new)) => {
                self.number(&format!("{address}.price"), &subject, Kind::Price, &old.price, &new.price);
                self.limits_of(&address, &subject, [&old.at_least, &old.at_most], [&new.at_least, &new.at_most]);
            }
            (None, Some(new)) => {
                let kind = self.new_flow(&new.at_least, &new.at_most);
                self.push(address, &subject, kind, None, Some(in_short::purchase(new)));
            }
            (Some(old), None) => {
                self.push(address, &subject, Kind::WithdrawnActivity, Some(in_short::purchase(old)), None);
            }
            (None, None) => {}
        }
    }

    fn sale(&mut self, material: &Name, tier: usize, pair: Pair<'_, Sale>) {
        let subject = flow(material, Flow::Sale(Some(tier)));
        let address = format!("materials.{material}.sale.{tier}");
        match pair {
            (Some(old), Some(new)) => {
                self.number(&format!("{address}.price"), &subject, Kind::Price, &old.price, &new.price);
                self.limits_of(&address, &subject, [&old.at_least, &old.at_most], [&new.at_least, &new.at_most]);
                self.late(material, tier, (old.late.as_ref(), new.late.as_ref()));
            }
            (None, Some(new)) => {
                let kind = self.new_flow(&new.at_least, &new.at_most);
                self.push(address, &subject, kind, None, Some(in_short::sale(new)));
            }
            (Some(old), None) => {
                let kind = if old.late.is_some() { Kind::WithdrawnBalance } else { Kind::WithdrawnActivity };
                self.push(address, &subject, kind, Some(in_short::sale(old)), None);
            }
            (None, None) => {}
        }
    }

    /// With it, a row takes over from the bounds of what is sold.
    fn late(&mut self, material: &Name, tier: usize, pair: Pair<'_, Late>) {
        let subject = flow(material, Flow::Late(Some(tier)));
        let address = format!("materials.{material}.sale.{tier}.late");
        match pair {
            (Some(old), Some(new)) => {
                self.number(&format!("{address}.cost"), &subject, Kind::Price, &old.cost, &new.cost);
                let most = format!("{address}.at_most");
                self.bounds([&address, &most], &subject, [&NONE, &old.at_most], [&NONE, &new.at_most]);
            }
            (None, Some(new)) => self.push(address, &subject, Kind::NewBalance, None, Some(in_short::late(new))),
            (Some(old), None) => {
                self.push(address, &subject, Kind::WithdrawnBalance, Some(in_short::late(old)), None);
            }
            (None, None) => {}
        }
    }

    /// What is carried, and what is left at the end: one column, so that each of the two keys matters to the other.
    fn stock(&mut self, name: &Name, old: &Material, new: &Material) {
        let subject = flow(name, Flow::Stock);
        let carried = format!("materials.{name}.stock");
        let left = format!("materials.{name}.closing");
        match (&old.stock, &new.stock) {
            (Some(was), Some(is)) => {
                self.number(&format!("{carried}.cost"), &subject, Kind::Price, &was.cost, &is.cost);
                self.carried(&carried, &subject, (was, old.closing), (is, new.closing));
            }
            (None, Some(is)) => {
                let kind = match old.closing {
                    None => self.new_flow(&is.at_least, &is.at_most),
                    Some(_) => Kind::NewCommitment,
                };
                self.push(carried, &subject, kind, None, Some(in_short::stock(is)));
            }
            (Some(was), None) => {
                let kind = if new.closing.is_some() { Kind::WithdrawnBalance } else { Kind::WithdrawnActivity };
                self.push(carried, &subject, kind, Some(in_short::stock(was)), None);
            }
            (None, None) => {}
        }
        let alone = old.stock.is_none() && new.stock.is_none();
        match (old.closing, new.closing) {
            (None, Some(is)) if alone => {
                let kind = self.new_flow(&is.at_least.into(), &f64::INFINITY.into());
                self.push(left, &subject, kind, None, Some(in_short::closing(&is)));
            }
            (Some(was), None) if alone => {
                self.push(left, &subject, Kind::WithdrawnActivity, Some(in_short::closing(&was)), None);
            }
            (was, is) => self.left(&left, &subject, [(old.stock.as_ref(), was), (new.stock.as_ref(), is)]),
        }
    }

    /// The bounds of what is carried. At the end, what must be left may be more.
    fn carried(
        &mut self,
        address: &str,
        subject: &Subject,
        (was, left_before): (&Stock, Option<Closing>),
        (is, left): (&Stock, Option<Closing>),
    ) {
        let horizon = self.horizon.clone();
        let kinds = |period: Period| {
            let last = period.position() + 1 == horizon.count();
            let of = |stock: &Stock, closing| stock_bounds(Some(stock), if last { closing } else { None }, period);
            bound_kinds(of(was, left_before), of(is, left))
        };
        let least = format!("{address}.at_least");
        self.value(&least, subject, (&was.at_least, &is.at_least), bound_shown, |period| kinds(period)[0]);
        let most = format!("{address}.at_most");
        self.value(&most, subject, (&was.at_most, &is.at_most), bound_shown, |period| kinds(period)[1]);
    }

    /// What must be left at the end, and what that is worth.
    fn left(&mut self, address: &str, subject: &Subject, versions: [(Option<&Stock>, Option<Closing>); 2]) {
        let Some(last) = self.horizon.periods().last() else { return };
        let [was, is] = versions.map(|(stock, closing)| stock_bounds(stock, closing, last));
        let kind = bound_kinds(was, is)[0];
        let [was, is] = versions.map(|(_, closing)| closing.unwrap_or_default());
        let [told_was, told_is] = versions.map(|(_, closing)| closing.is_some());
        let mut push = |word: &str, kind, was: f64, is: f64| {
            // What is not said is 0.
            let told = |said: bool, number: f64| (said && !same(number, 0.0)).then(|| number.to_string());
            self.push(format!("{address}.{word}"), subject, kind, told(told_was, was), told(told_is, is));
        };
        push("at_least", kind, was.at_least, is.at_least);
        push("worth", Kind::Price, was.worth, is.worth);
    }

    /// The limits of a tier.
    fn limits_of(&mut self, address: &str, subject: &Subject, old: [&Value; 2], new: [&Value; 2]) {
        let addresses = ["at_least", "at_most"].map(|word| format!("{address}.{word}"));
        self.bounds([&addresses[0], &addresses[1]], subject, old, new);
    }

    /// The kind of a new way for a material.
    fn new_flow(&self, least: &Value, most: &Value) -> Kind {
        let at_rest = self.horizon.periods().all(|period| rests_at_0(least.at(period), most.at(period)));
        if at_rest { Kind::NewActivity } else { Kind::NewCommitment }
    }
}

fn flow(material: &Name, flow: Flow) -> Subject {
    Subject::Planned(Planned::Flow(material.clone(), flow))
}

/// What is carried at the end of a period stands between these.
fn stock_bounds(stock: Option<&Stock>, closing: Option<Closing>, period: Period) -> [f64; 2] {
    let (least, most) =
        stock.map_or((0.0, f64::INFINITY), |stock| (stock.at_least.at(period), stock.at_most.at(period)));
    [least.max(closing.map_or(0.0, |closing| closing.at_least)), most]
}
